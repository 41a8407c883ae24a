"""Retain: escape times against the system's age, and the shares of draws that keep each gas."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from keptair import draws
from keptair.batch import Array, Batch
from keptair.physics import exobase, kinetics, time
from keptair.physics.constants import ATOMIC_MASS
from keptair.reference import diffusion_pair
from keptair.reference.models import Background
from keptair.settings import Settings
from keptair.stages.escape import THROTTLES
from keptair.stages.exobase import pick

NAMED = ("jeans_parameter", "speed_ratio", "escape_time_gyr", "retention")  # of a gas, published for the row


def run(batch: Batch, settings: Settings) -> Batch:
    """Statistics of every background and gas, and those of the row's own background under their plain names."""
    columns: dict[str, Array] = {}
    hard_spheres = np.zeros(len(batch), dtype=bool)
    for key, background in worked(batch, settings):
        columns |= exobase_statistics(batch, key, settings)
        for gas in settings.gases:
            columns |= gas_statistics(batch, key, gas, background, settings)
            if gas != background.main_gas and diffusion_pair(gas, background.diffusion_partners) is None:
                limited = columns[f"limited_by.{key}.{gas}"] != THROTTLES.index("kinetic")
                hard_spheres |= limited & (batch.columns["background"] == key)
    columns |= of_the_row(batch, columns, settings)
    flowing = draws.share(np.broadcast_to(pick(batch, "outflow", batch.columns["background"]), shape(batch)) == 1)
    assessed = batch.columns["is.assessed"]
    columns["outflow_share"] = np.where(assessed, flowing, np.nan)
    regime = np.where(flowing >= 0.5, "outflow", "evaporation").astype(object)
    regime[~assessed] = ""
    return batch.adding({**columns, "regime": regime, "flag.hard_sphere_diffusion": hard_spheres})


def worked(batch: Batch, settings: Settings) -> Iterator[tuple[str, Background]]:
    """The backgrounds that were worked out for any row of this batch."""
    for key, background in settings.backgrounds.items():
        if batch.columns[f"worked.{key}"].any():
            yield key, background


def shape(batch: Batch) -> tuple[int, ...]:
    whole: tuple[int, ...] = batch.draws["gravity"].shape
    return whole


def exobase_statistics(batch: Batch, key: str, settings: Settings) -> dict[str, Array]:
    """Jeans parameter, speed ratio and rms speed of every gas under one background.

    Each is a power of the particle's mass times something common to all, so one sort serves all gases.
    """
    temperature = batch.draws[f"exobase_temperature.{key}"]
    unit = kinetics.jeans_parameter(
        batch.draws["input.planet_mass_mearth"], batch.draws[f"exobase_radius.{key}"], temperature, ATOMIC_MASS
    )
    ordered = draws.sorted_draws(unit)
    (jeans,), (ratio,) = (draws.percentiles_of_sorted(values) for values in (ordered, kinetics.speed_ratio(ordered)))
    rms = draws.median(kinetics.rms_speed(temperature, ATOMIC_MASS))
    columns = {}
    for name, gas in settings.gases.items():
        columns[f"jeans_parameter.{key}.{name}"] = jeans * gas.mass_u
        columns[f"speed_ratio.{key}.{name}"] = ratio * np.sqrt(gas.mass_u)
        columns[f"rms_speed.{key}.{name}"] = rms / np.sqrt(gas.mass_u)
    return columns


def gas_statistics(batch: Batch, key: str, gas: str, background: Background, settings: Settings) -> dict[str, Array]:
    """Flux, loss, time and retention of one gas under one background; of the background itself for its main gas.

    retention: share of draws with Λ = ∫ dt/τ < 1 from t₀ to the age; held now: share with τ above the age

    Notes
    -----
    A trace is taken in the limit of no mixing ratio; its fluxes are published for `trace_mixing_ratio`. Its retention
    says whether it lasts under that background, not whether the background lasts.
    """
    made, end = batch.draws, f"{key}.{gas}"
    area = 4 * np.pi * np.square(made["input.planet_radius_rearth"])
    has_exobase = ~np.isnan(made[f"exobase_radius.{key}"])
    if gas == background.main_gas:
        held, loss, lost, limited = (made[f"{name}.{key}"] for name in ("held", "loss", "lost", "limited"))
        jeans_flux, mixing, mass = made[f"key_flux.{key}"], 1.0, 1.0
        supply = np.full(len(batch), np.nan)
    else:
        held, loss, lost, limited = (
            made[f"particles.{key}"],
            made[f"loss.{end}"],
            made[f"lost.{end}"],
            made[f"limited.{end}"],
        )
        jeans_flux, mixing = made[f"jeans_flux.{end}"], settings.trace_mixing_ratio
        mass = exobase.particle_mass(settings.gases[gas].mass_u)
        lighter = settings.gases[gas].mass_u < background.mean_mass_u
        supply = draws.median(made[f"supply_flux.{end}"]) * mixing if lighter else np.full(len(batch), np.nan)
    escape_time = time.escape_time(held, loss)
    low, middle, high = draws.percentiles(escape_time, (16, 50, 84))
    counts = np.stack([draws.share(limited == throttle) for throttle in range(len(THROTTLES))])
    return {
        f"jeans_flux.{end}": draws.median(np.where(has_exobase, jeans_flux, np.nan)) * mixing,
        f"supply_flux.{end}": supply,
        f"loss_rate.{end}": draws.median(loss * area) * mixing * mass,
        f"limited_by.{end}": np.argmax(counts, axis=0).astype(np.int8),
        f"escape_time_gyr.{end}": middle,
        f"escape_time_p16_gyr.{end}": low,
        f"escape_time_p84_gyr.{end}": high,
        f"inventories_lost.{end}": draws.median(lost),
        f"retention.{end}": draws.share(lost < 1),
        f"held_now_share.{end}": draws.share(escape_time > made["input.stellar_age_gyr"]),
    }


def of_the_row(batch: Batch, columns: dict[str, Array], settings: Settings) -> dict[str, Array]:
    """Per gas, the four published numbers under the row's own background."""
    named = {}
    for gas in settings.gases:
        for name in NAMED:
            stem, unit = (name.removesuffix("_gyr"), "_gyr") if name.endswith("_gyr") else (name, "")
            values = np.full(len(batch), np.nan)
            for key, _ in worked(batch, settings):
                values = np.where(batch.columns["background"] == key, columns[f"{name}.{key}.{gas}"], values)
            named[f"{stem}_{gas}{unit}"] = values
    return named
