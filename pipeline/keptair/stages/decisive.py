"""The input whose error bar moves the verdict most, and how much of it is the model's own."""

from __future__ import annotations

import numpy as np

from keptair.batch import Array, Batch
from keptair.physics.sensitivity import first_order_share

INPUTS = (  # canonical inputs that can decide, and where each is told from a filled one
    "planet_mass_mearth",
    "planet_radius_rearth",
    "bond_albedo",
    "stellar_age_gyr",
    "stellar_luminosity_lsun",
    "stellar_teff_k",
    "stellar_radius_rsun",
    "stellar_mass_msun",
    "semi_major_axis_au",
    "orbital_period_d",
    "insolation_earth",
    "eccentricity",
)
XUV_LEVEL = "stellar_xray_luminosity_w"  # measuring it would pin the star's XUV level
MODEL = ("u.damping_exponent", "u.efficiency", "u.jeans_factor", "u.start_gyr", "u.inventory", "scatter_deviate")
OPEN = (0.05, 0.95)  # a verdict outside this is clear: nothing is decisive
SMALLEST_SHARE = 0.05
FILLED = ("relation", "computed", "")  # these have no error bar of their own


def decisive(batch: Batch, envelope: Array, kept: Array) -> dict[str, Array]:
    """Name and share of the decisive input, and the summed shares of the model's draws.

    The result whose variance is shared out: secondary air kept; for `envelope` rows a radius above the rock line.
    """
    names, shares = np.full(len(batch), "", dtype=object), np.full(len(batch), np.nan)
    model = np.full(len(batch), np.nan)
    result = np.where(envelope[:, None], batch.draws["is_envelope"], kept)[:, 1:]
    probability = result.mean(axis=1)
    rows = np.flatnonzero((probability >= OPEN[0]) & (probability <= OPEN[1]) & batch.columns["is.assessed"])
    if len(rows) == 0:
        return {"decisive_input": names, "decisive_share": shares, "model_share": model}
    result = result[rows]
    candidates = {name: given(batch, name)[rows, 1:] for name in INPUTS}
    candidates[XUV_LEVEL] = xuv_level(batch)[rows, 1:]
    grid = np.stack([np.nan_to_num(first_order_share(result, values), nan=-1.0) for values in candidates.values()])
    best, largest = np.argmax(grid, axis=0), np.max(grid, axis=0)
    found = largest >= SMALLEST_SHARE
    named = np.array(list(candidates), dtype=object)[best]
    names[rows[found]], shares[rows[found]] = named[found], np.minimum(largest[found], 1.0)
    model[rows] = sum(
        np.maximum(np.nan_to_num(first_order_share(result, batch.draws[name][rows, 1:])), 0.0) for name in MODEL
    )
    return {"decisive_input": names, "decisive_share": shares, "model_share": model}


def xuv_level(batch: Batch) -> Array:
    """How bright the star is in X-rays against the law, or, where they were measured, against that measurement."""
    measured = np.nan_to_num(batch.draws["xuv_measured"], nan=1.0)
    return np.log10(batch.draws["xuv_level"]) + np.log10(measured)


def given(batch: Batch, name: str) -> Array:
    """An input's own draws; a constant where its value was worked out from others."""
    own = ~np.isin(batch.columns[f"{name}_source"], FILLED)
    return np.where(own[:, None], np.nan_to_num(batch.draws[f"input.{name}"]), 0.0)
