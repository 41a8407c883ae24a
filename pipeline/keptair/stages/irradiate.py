"""Irradiate: the star's light and orbit, the flux, the temperature it keeps, high-energy light now."""

from __future__ import annotations

import numpy as np

from keptair import draws
from keptair.batch import Array, Batch
from keptair.physics import bulk, irradiation, orbit
from keptair.physics.constants import ASTRONOMICAL_UNIT, SOLAR_LUMINOSITY, SOLAR_MASS, SOLAR_RADIUS
from keptair.settings import Settings
from keptair.stages.dwarfs import last_dwarf
from keptair.stages.starlight import activity_draws, xuv_at


def run(batch: Batch, settings: Settings) -> Batch:
    """In the order of the light: star, orbit, flux, temperature; then the planet's own pull."""
    light, light_source = star_luminosity(batch)
    star_mass, star_mass_source = stellar_mass(batch, light)
    axis, axis_source = semi_major_axis(batch, star_mass)
    flux, flux_source, disagrees = insolation(batch, light, axis, settings)
    mass, radius = batch.draws["input.planet_mass_mearth"], batch.draws["input.planet_radius_rearth"]
    albedo, eccentricity = batch.draws["input.bond_albedo"], batch.draws["input.eccentricity"]
    mean_flux = orbit.orbit_mean_flux(flux, eccentricity)
    equilibrium = irradiation.equilibrium_temperature(mean_flux, albedo, settings.redistribution, settings.emissivity)
    black = irradiation.equilibrium_temperature(mean_flux, 0.0, settings.redistribution, settings.emissivity)
    assessed = ~np.isnan(mass[:, 0] + radius[:, 0] + flux[:, 0] + star_mass[:, 0])
    known_axis = np.where(np.isnan(axis), np.inf, axis)
    lit = batch.with_draws(
        luminosity=light,
        star_mass=star_mass,
        axis=axis,
        flux=flux,
        mean_flux=mean_flux,
        equilibrium=equilibrium,
        base=irradiation.skin_temperature(equilibrium),
        gravity=bulk.surface_gravity(mass, radius),
        roche_ratio=orbit.roche_ratio(mass, radius, known_axis, eccentricity, star_mass),
        hydrogen_share=bulk.hydrogen_share(mass, radius, flux, batch.draws["input.stellar_age_gyr"]),
        **activity_draws(batch, light, star_mass, settings),
    )
    lit = lit.with_draws(xuv_now=xuv_at(lit, settings, batch.draws["input.stellar_age_gyr"]))
    columns = {
        **settled("stellar_luminosity_lsun", light / SOLAR_LUMINOSITY, light_source, batch),
        **settled("stellar_mass_msun", star_mass / SOLAR_MASS, star_mass_source, batch),
        **settled("semi_major_axis_au", axis / ASTRONOMICAL_UNIT, axis_source, batch),
        **settled("insolation_earth", flux, flux_source, batch),
        **with_range("equilibrium_temperature_k", equilibrium, ~np.isnan(flux[:, 0])),
        **with_range("xuv_flux_earth", lit.draws["xuv_now"], assessed),
        "equilibrium_temperature_black_k": draws.median(black),
        "surface_gravity_m_s2": draws.median(lit.draws["gravity"]),
        "bulk_density_g_cm3": draws.median(bulk.bulk_density(mass, radius)) / 1e3,
        "escape_speed_km_s": draws.median(bulk.escape_speed(mass, radius)) / 1e3,
        "missing_inputs": missing_inputs(batch, light_source, star_mass_source, axis_source, flux_source),
        "is.assessed": assessed,
        **error_flags(batch, flux_source),
        "flag.insolation_disagrees": disagrees,
        "flag.no_orbit": assessed & np.isnan(axis[:, 0]),
        "flag.xuv_extrapolated": assessed & far_from_dwarfs(batch, settings),
    }
    return lit.with_columns(**columns)


def star_luminosity(batch: Batch) -> tuple[Array, Array]:
    """The catalogue's luminosity, else that of the star's radius and temperature."""
    worked_out = irradiation.luminosity(batch.draws["input.stellar_radius_rsun"], batch.draws["input.stellar_teff_k"])
    return first_known(batch, "stellar_luminosity_lsun", worked_out, "computed")


def stellar_mass(batch: Batch, light: Array) -> tuple[Array, Array]:
    """The catalogue's mass, else that of a dwarf of this luminosity; a mean dwarf keeps its own."""
    mean = SOLAR_MASS * last_dwarf("mass_msun", batch.draws["input.stellar_teff_k"])
    stands_in = batch.columns["is.mean_dwarf"][:, None]
    worked_out = np.where(stands_in, mean, irradiation.mass_from_luminosity(light))
    return first_known(batch, "stellar_mass_msun", worked_out, "relation")


def semi_major_axis(batch: Batch, star_mass: Array) -> tuple[Array, Array]:
    """The catalogue's axis, else Kepler's third law."""
    worked_out = orbit.semi_major_axis(batch.draws["input.orbital_period_d"], star_mass)
    return first_known(batch, "semi_major_axis_au", worked_out, "computed")


def first_known(batch: Batch, name: str, worked_out: Array, how: str) -> tuple[Array, Array]:
    """The catalogue's draws where it has any, else those worked out; and which."""
    source = batch.columns[f"source.{name}"].copy()
    gap = source == ""
    values = np.where(gap[:, None], worked_out, batch.draws[f"input.{name}"])
    source[gap & ~np.isnan(values[:, 0])] = how
    return values, source


def insolation(batch: Batch, light: Array, axis: Array, settings: Settings) -> tuple[Array, Array, Array]:
    """Flux from star and orbit, else the catalogue's; and where the two differ."""
    worked_out = irradiation.insolation(light, axis)
    known = ~np.isnan(worked_out[:, 0])
    catalogued = batch.draws["input.insolation_earth"]
    source = batch.columns["source.insolation_earth"].copy()
    both = known & (source != "") & (source != "limit")
    ours, theirs = draws.percentiles(worked_out, (16, 50, 84)), draws.percentiles(catalogued, (16, 50, 84))
    apart = np.abs(ours[1] - theirs[1])
    error = np.hypot((ours[2] - ours[0]) / 2, (theirs[2] - theirs[0]) / 2)
    disagrees: Array = both & (apart > settings.insolation_tolerance * theirs[1]) & (apart > 2 * error)
    source[known] = "computed"
    return np.where(known[:, None], worked_out, catalogued), source, disagrees


def error_flags(batch: Batch, flux_source: Array) -> dict[str, Array]:
    """Flags of values without error, with an error on one side, or limits; of flux only where it is used."""
    used = (flux_source != "") & (flux_source != "computed")
    names = {"value_without_error": "bare", "one_sided_error": "one_sided", "limit_used": "limit"}
    columns = batch.columns
    return {f"flag.{flag}": columns[f"{mark}.all"] | (columns[f"{mark}.flux"] & used) for flag, mark in names.items()}


def far_from_dwarfs(batch: Batch, settings: Settings) -> Array:
    """Stars the activity law was not made for: giants, and the very hot or cool."""
    radius = draws.median(batch.draws["input.stellar_radius_rsun"])
    temperature = draws.median(batch.draws["input.stellar_teff_k"])
    coolest, hottest = settings.xuv.dwarf_teff_k
    far: Array = (
        (radius > settings.xuv.giant_radius_rsun * SOLAR_RADIUS) | (temperature < coolest) | (temperature > hottest)
    )
    return far


def settled(name: str, values: Array, source: Array, batch: Batch) -> dict[str, Array]:
    """An input as used, and where it came from."""
    as_it_stands = np.isin(source, ("measured", "measured_no_error", "given"))
    value = np.where(as_it_stands, batch.columns[f"catalogue.{name}"], draws.median(values))
    return {name: value, f"{name}_source": source}


def with_range(name: str, values: Array, where: Array) -> dict[str, Array]:
    """Median, 16th and 84th percentile of the draws."""
    low, middle, high = (np.where(where, column, np.nan) for column in draws.percentiles(values, (16, 50, 84)))
    return {name: middle, f"{name}_p16": low, f"{name}_p84": high}


def missing_inputs(batch: Batch, light: Array, star_mass: Array, axis: Array, flux: Array) -> Array:
    """Names of the inputs the chain needs without a usable catalogue value, in the order of the schema."""
    columns = batch.columns
    catalogued = {"measured", "measured_no_error", "given", "limit", "minimum"}

    def lacks(name: str) -> Array:
        return ~np.isin(columns[f"{name}_source"], tuple(catalogued))

    no_flux_path = (light == "") | (axis == "")
    flux_from_catalogue = no_flux_path & (flux != "")
    mean_dwarf = columns["is.mean_dwarf"]
    wanted = {
        "planet_radius_rearth": lacks("planet_radius_rearth"),
        "planet_mass_mearth": lacks("planet_mass_mearth"),
        "orbital_period_d": (axis == "") & lacks("orbital_period_d"),
        "semi_major_axis_au": axis == "",
        "eccentricity": lacks("eccentricity"),
        "insolation_earth": flux == "",
        "bond_albedo": lacks("bond_albedo"),
        "stellar_teff_k": (light == "") & lacks("stellar_teff_k") & ~flux_from_catalogue,
        "stellar_radius_rsun": (((light == "") & lacks("stellar_radius_rsun")) | mean_dwarf) & ~flux_from_catalogue,
        "stellar_mass_msun": (star_mass == "") | (star_mass == "relation"),
        "stellar_luminosity_lsun": ((light == "") | (mean_dwarf & (light == "computed"))) & ~flux_from_catalogue,
        "stellar_age_gyr": lacks("stellar_age_gyr"),
    }
    names = np.full(len(batch), "", dtype=object)
    for name, missing in wanted.items():
        names[missing] += name + " "
    return np.array([text.rstrip() for text in names], dtype=object)
