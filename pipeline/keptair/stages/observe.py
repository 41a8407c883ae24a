"""Observe: how well the air could be seen, what comes first, and the flags of all stages in one mask."""

from __future__ import annotations

import numpy as np

from keptair.batch import Batch
from keptair.physics import irradiation, spectroscopy
from keptair.physics.constants import EARTH_RADIUS
from keptair.settings import Settings
from keptair.tables import flags, schema

LARGEST_RADIUS = 10.0  # [R⊕] up to which the transmission metric was made
FULL_REDISTRIBUTION = 0.25


def run(batch: Batch, settings: Settings) -> Batch:  # noqa: ARG001  (every stage takes the settings)
    """Spectroscopy metrics of the central draw, for planets whose radius is measured and that may transit."""
    mass, radius, star_radius, star_temperature, flux = (
        batch.draws[name][:, 0]
        for name in (
            "input.planet_mass_mearth",
            "input.planet_radius_rearth",
            "input.stellar_radius_rsun",
            "input.stellar_teff_k",
            "flux",
        )
    )
    equilibrium = irradiation.equilibrium_temperature(flux, 0.0, FULL_REDISTRIBUTION)
    seen = batch.columns["is.sized"] & (batch.columns["transits"] != "no")
    transmission = spectroscopy.transmission_metric(mass, radius, equilibrium, star_radius, batch.columns["j_mag"])
    emission = spectroscopy.emission_metric(radius, equilibrium, star_radius, star_temperature, batch.columns["k_mag"])
    tsm = np.where(seen, transmission, np.nan)
    batch = batch.with_columns(
        tsm=tsm,
        esm=np.where(seen, emission, np.nan),
        priority=spectroscopy.priority(radius, batch.columns["air_probability"], tsm),
        **{
            "flag.no_transit_radius": ~seen,
            "flag.tsm_extrapolated": batch.columns["is.assessed"]
            & ~np.isnan(tsm)
            & (radius > LARGEST_RADIUS * EARTH_RADIUS),
        },
    )
    mask, names = flags.pack(batch.flagged(flag.name for flag in schema.flags()))
    return batch.with_columns(flags=mask, flag_names=names)
