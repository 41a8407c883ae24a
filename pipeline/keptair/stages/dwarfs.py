"""The mean dwarf of a star's temperature stands in for a radius, mass or magnitude the catalogue lacks."""

from __future__ import annotations

import numpy as np

from keptair.batch import Array, Batch
from keptair.physics import irradiation
from keptair.physics.constants import SOLAR_LUMINOSITY, SOLAR_RADIUS
from keptair.reference import load_main_sequence

MAGNITUDES = {"j_mag": "absolute_j_mag", "k_mag": "absolute_k_mag"}


def mean_dwarf(column: str, temperature: Array) -> Array:
    """A property of the mean dwarf of this temperature; missing outside the sequence."""
    sequence = load_main_sequence()
    return np.interp(temperature, sequence["teff_k"], sequence[column], left=np.nan, right=np.nan)


def last_dwarf(column: str, temperature: Array) -> Array:
    """The same for draws of a star that is on the sequence: one past its end takes the last dwarf."""
    sequence = load_main_sequence()["teff_k"]
    return mean_dwarf(column, np.clip(temperature, sequence[0], sequence[-1]))


def fill_radius(values: dict[str, Array], sources: dict[str, Array], departure: float) -> Array:
    """Fill a missing stellar radius: from luminosity and temperature, else from the mean dwarf; say where it was that.

    A star whose catalogued mass departs from that dwarf's is left alone: it may be a giant.
    """
    radius, temperature = values["stellar_radius_rsun"], values["stellar_teff_k"]
    gap = sources["stellar_radius_rsun"] == ""
    worked_out = irradiation.star_radius(values["stellar_luminosity_lsun"] * SOLAR_LUMINOSITY, temperature)
    lit = gap & ~np.isnan(worked_out[:, 0])
    radius[lit] = worked_out[lit] / SOLAR_RADIUS
    sources["stellar_radius_rsun"][lit] = "computed"

    central = temperature[:, 0]
    unlike = departs(values["stellar_mass_msun"][:, 0], mean_dwarf("mass_msun", central), departure)
    stands_in = gap & ~lit & ~np.isnan(mean_dwarf("radius_rsun", central)) & ~unlike
    radius[stands_in] = last_dwarf("radius_rsun", temperature[stands_in])
    sources["stellar_radius_rsun"][stands_in] = "relation"
    return stands_in


def magnitudes(
    batch: Batch, values: dict[str, Array], sources: dict[str, Array], departure: float
) -> tuple[dict[str, Array], Array]:
    """Apparent J and K, a missing one from the mean dwarf at the system's distance; and where that was so."""
    temperature, radius = values["stellar_teff_k"][:, 0], values["stellar_radius_rsun"][:, 0]
    distance = np.where(sources["distance_pc"] == "", np.nan, batch.columns["catalogue.distance_pc"])
    dwarf = ~np.isnan(radius) & ~departs(radius, mean_dwarf("radius_rsun", temperature), departure)
    filled, stood_in = {}, np.zeros(len(batch), dtype=bool)
    for name, column in MAGNITUDES.items():
        apparent = mean_dwarf(column, temperature) + 5 * np.log10(distance / 10)
        gap = (sources[name] == "") & dwarf & ~np.isnan(apparent)
        catalogued = np.where(sources[name] == "", np.nan, batch.columns[f"catalogue.{name}"])
        filled[name] = np.where(gap, apparent, catalogued)
        sources[name][gap] = "relation"
        stood_in |= gap
    return filled, stood_in


def departs(value: Array, mean: Array, departure: float) -> Array:
    """Whether a known value is further from the mean dwarf's than a dwarf can be."""
    ratio = value / mean
    far: Array = (ratio > departure) | (ratio < 1 / departure)
    return far
