"""Fill: error bars become draws, gaps are filled and marked, and bulk density speaks."""

from __future__ import annotations

import numpy as np

from keptair import draws
from keptair.batch import Array, Batch
from keptair.draws import Sampler
from keptair.physics import bulk, mass_radius
from keptair.physics.constants import (
    ASTRONOMICAL_UNIT,
    DAY,
    EARTH_MASS,
    EARTH_RADIUS,
    JUPITER_MASS,
    SOLAR_LUMINOSITY,
    SOLAR_MASS,
    SOLAR_RADIUS,
)
from keptair.reference import load_chen_kipping, load_otegi
from keptair.settings import Settings
from keptair.stages import dwarfs
from keptair.tables import schema

UNITS = {  # canonical unit in the unit the stages work in
    "planet_radius_rearth": EARTH_RADIUS,
    "planet_mass_mearth": EARTH_MASS,
    "orbital_period_d": DAY,
    "semi_major_axis_au": ASTRONOMICAL_UNIT,
    "eccentricity": 1.0,
    "insolation_earth": 1.0,
    "bond_albedo": 1.0,
    "stellar_teff_k": 1.0,
    "stellar_radius_rsun": SOLAR_RADIUS,
    "stellar_mass_msun": SOLAR_MASS,
    "stellar_luminosity_lsun": SOLAR_LUMINOSITY,
    "stellar_age_gyr": 1.0,
    "stellar_xray_luminosity_w": 1.0,
}
DRAWN = tuple(UNITS)
LIMIT_IS_MISSING = frozenset(
    {
        "semi_major_axis_au",
        "orbital_period_d",
        "stellar_luminosity_lsun",
        "stellar_teff_k",
        "stellar_radius_rsun",
        "stellar_mass_msun",
        "j_mag",
        "k_mag",
        "distance_pc",
    }
)
DRAW_BOUNDS = {"eccentricity": (0.0, 0.95), "stellar_age_gyr": (0.01, 13.8)}  # others: the schema's
MODEL_DRAWS = ("damping_exponent", "efficiency", "jeans_factor", "start_gyr", "inventory")
SETTLED_LATER = ("stellar_luminosity_lsun", "stellar_mass_msun", "semi_major_axis_au", "insolation_earth")


def run(batch: Batch, settings: Settings) -> Batch:
    """Draw every input, then fill what the catalogue lacks."""
    sampler = Sampler(batch.columns["planet_id"], batch.columns["host_id"], settings.draws, settings.seed)
    values, sources = read_inputs(batch, sampler, settings.limit_reach)
    marks = error_marks(batch, sources)
    flags = {"flag.age_from_prior": sources["stellar_age_gyr"] == ""}
    fill_priors(values, sources, sampler, settings)
    mean_dwarf = dwarfs.fill_radius(values, sources, settings.dwarf_departure)
    magnitudes, mean_magnitude = dwarfs.magnitudes(batch, values, sources, settings.dwarf_departure)
    flags["flag.main_sequence_fallback"] = mean_dwarf | mean_magnitude
    sized = np.isin(sources["planet_radius_rearth"], ("measured", "measured_no_error", "given"))
    transiting = (sized & (batch.columns["transits"] != "no")) | (batch.columns["transits"] == "yes")
    incline(values, sources, transiting, sampler, settings.largest_cosine)
    weighed = np.isin(sources["planet_mass_mearth"], ("measured", "measured_no_error", "given")) | (
        (sources["planet_mass_mearth"] == "minimum") & transiting
    )
    flags |= relate(values, sources, sampler, settings)
    radius, mass = values["planet_radius_rearth"] * EARTH_RADIUS, values["planet_mass_mearth"] * EARTH_MASS
    flags["flag.substellar"] = draws.median(mass) > settings.substellar_mjup * JUPITER_MASS
    envelope = envelope_evidence(mass, radius, weighed, sources["planet_radius_rearth"] == "relation", settings)
    assessed_bulk = ~np.isnan(mass[:, 0])
    columns = {
        **published(batch, values, sources, magnitudes),
        **{name: flag & assessed_bulk if name == "flag.substellar" else flag for name, flag in flags.items()},
        **marks,
        "is.weighed": weighed,
        "is.sized": sized,
        "is.mean_dwarf": mean_dwarf,
        "envelope_probability": np.where(assessed_bulk, draws.share(envelope), np.nan),
    }
    for name in SETTLED_LATER:  # the star's light and the orbit are settled where the flux is worked out
        columns[f"source.{name}"] = sources[name]
    made = {f"input.{name}": values[name] * unit for name, unit in UNITS.items()}
    made |= {f"u.{name}": sampler(name) for name in MODEL_DRAWS}
    made |= {"xuv_deviate": sampler.normal("xuv_level"), "scatter_deviate": sampler.normal("mass_radius_scatter")}
    return batch.adding(columns, {**made, "is_envelope": envelope})


def read_inputs(batch: Batch, sampler: Sampler, limit_reach: float) -> tuple[dict[str, Array], dict[str, Array]]:
    """Draws of every catalogued input, in canonical units, and where each came from ("" where there is none)."""
    values, sources = {}, {}
    for column in schema.inputs():
        if column.type != "number":
            continue
        name = column.name
        value, bound = batch.columns[f"catalogue.{name}"], batch.columns[f"{name}_bound"]
        plus, minus = batch.columns[f"{name}_err_plus"], batch.columns[f"{name}_err_minus"]
        kind_name = name.rsplit("_", 1)[0] + "_kind"
        kind = batch.columns.get(kind_name, np.full(len(batch), "", dtype=object))
        present = ~np.isnan(value) & (kind != "relation")
        if name in LIMIT_IS_MISSING:
            present &= bound == ""
        source = np.full(len(batch), "measured", dtype=object)
        source[np.isnan(plus) & np.isnan(minus)] = "measured_no_error"
        source[kind == "minimum"] = "minimum"
        source[bound != ""] = "limit"
        given = batch.columns.get(f"given.{name}")
        if given is not None:
            source[given] = "given"
        source[~present] = ""
        sources[name] = source
        if name not in DRAWN:
            continue
        bounds = draw_bounds(name)
        plus, minus = np.where(np.isnan(plus), minus, plus), np.where(np.isnan(minus), plus, minus)
        drawn = draws.measured(value, np.nan_to_num(plus), np.nan_to_num(minus), bounds, sampler(name))
        upper, lower = (source == "limit") & (bound == "upper"), (source == "limit") & (bound == "lower")
        if upper.any():
            end = np.clip(value[upper, None], *bounds)
            drawn[upper] = draws.between(bounds[0], end, sampler(name)[upper])
        if lower.any():
            start = np.maximum(np.clip(value[lower, None], *bounds), 1e-300)
            end = np.minimum(limit_reach * start, bounds[1])
            drawn[lower] = draws.log_between(start, end, sampler(name)[lower])
        drawn[~present] = np.nan
        values[name] = drawn
    return values, sources


def draw_bounds(name: str) -> tuple[float, float]:
    """What the draws of an input are kept to: the schema's bounds, or its own."""
    column = schema.catalogue()[name]
    low, high = column.minimum, column.maximum
    return DRAW_BOUNDS.get(name, (low if low is not None else -np.inf, high if high is not None else np.inf))


def error_marks(batch: Batch, sources: dict[str, Array]) -> dict[str, Array]:
    """Where a used value has no error, an error on one side only, or is a limit.

    Insolation stands apart: whether the catalogue's is used is settled where the flux is worked out.
    """
    marks: dict[str, Array] = {}
    for which, names in (
        ("all", [name for name in DRAWN if name != "insolation_earth"]),
        ("flux", ["insolation_earth"]),
    ):
        bare, one_sided, limit = (np.zeros(len(batch), dtype=bool) for _ in range(3))
        for name in names:
            plus, minus = np.isnan(batch.columns[f"{name}_err_plus"]), np.isnan(batch.columns[f"{name}_err_minus"])
            stands = np.isin(sources[name], ("measured", "measured_no_error", "minimum"))
            bare |= stands & plus & minus
            one_sided |= stands & (plus != minus)
            limit |= sources[name] == "limit"
        marks |= {f"bare.{which}": bare, f"one_sided.{which}": one_sided, f"limit.{which}": limit}
    return marks


def fill_priors(values: dict[str, Array], sources: dict[str, Array], sampler: Sampler, settings: Settings) -> None:
    """A missing albedo or age is drawn from its prior, a missing eccentricity is 0."""
    priors = {"bond_albedo": settings.bond_albedo, "stellar_age_gyr": settings.age_prior_gyr}
    for name, (low, high) in priors.items():
        gap = sources[name] == ""
        values[name][gap] = draws.between(low, high, sampler(name)[gap])
        sources[name][gap] = "prior"
    gap = sources["eccentricity"] == ""
    values["eccentricity"][gap] = 0.0
    sources["eccentricity"][gap] = "assumed"


def incline(
    values: dict[str, Array], sources: dict[str, Array], transiting: Array, sampler: Sampler, largest_cosine: float
) -> None:
    """M sin i becomes M: cos i is uniform unless the planet transits."""
    tilted = (sources["planet_mass_mearth"] == "minimum") & ~transiting
    if tilted.any():
        cosine = largest_cosine * sampler("inclination")[tilted]
        mass = values["planet_mass_mearth"][tilted] / np.sqrt(1 - np.square(cosine))
        values["planet_mass_mearth"][tilted] = np.minimum(mass, draw_bounds("planet_mass_mearth")[1])


def relate(
    values: dict[str, Array], sources: dict[str, Array], sampler: Sampler, settings: Settings
) -> dict[str, Array]:
    """Fill a missing mass from the radius, or a missing radius from the mass; flag a mass no radius can tell."""
    no_mass, no_radius = sources["planet_mass_mearth"] == "", sources["planet_radius_rearth"] == ""
    deviate, uniform = sampler.normal("mass_radius_scatter"), sampler("mass_radius_scatter")
    from_radius, from_mass = no_mass & ~no_radius, no_radius & ~no_mass
    chen, otegi = load_chen_kipping(), load_otegi()
    if from_radius.any():
        radius = values["planet_radius_rearth"][from_radius] * EARTH_RADIUS
        mass = (
            mass_radius.otegi_mass(radius, otegi.rocky, otegi.volatile, otegi.radius_break_rearth)
            if settings.mass_radius == "otegi-2020"
            else mass_radius.chen_kipping_mass(
                radius,
                chen.branches,
                chen.radius_breaks_rearth,
                chen.degenerate_masses_mearth,
                deviate[from_radius],
                uniform[from_radius],
            )
        )
        values["planet_mass_mearth"][from_radius] = np.clip(mass / EARTH_MASS, *draw_bounds("planet_mass_mearth"))
        sources["planet_mass_mearth"][from_radius] = "relation"
    if from_mass.any():
        mass = values["planet_mass_mearth"][from_mass] * EARTH_MASS
        radius = (
            mass_radius.otegi_radius(mass, otegi.rocky, otegi.volatile, otegi.radius_break_rearth)
            if settings.mass_radius == "otegi-2020"
            else mass_radius.chen_kipping_radius(mass, chen.branches, chen.mass_breaks_mearth, deviate[from_mass])
        )
        values["planet_radius_rearth"][from_mass] = radius / EARTH_RADIUS
        sources["planet_radius_rearth"][from_mass] = "relation"
    large = draws.median(values["planet_radius_rearth"]) > chen.radius_breaks_rearth[-1]
    degenerate = from_radius & large & (settings.mass_radius == "chen-kipping-2017")
    return {"flag.mass_degenerate": degenerate}


def envelope_evidence(mass: Array, radius: Array, weighed: Array, filled_radius: Array, settings: Settings) -> Array:
    """Draws lighter than rock of any core; without a measured mass, larger than rock gets.

    R > R_sil(M) with a measured mass or a filled radius, R_sil of `physics.bulk.silicate_radius`; else R > 1.8 R⊕

    Notes
    -----
    Small icy bodies are light without having air: no draw within one Earth radius and mass counts. A limit is no
    measured mass; M sin i is one where the planet transits.
    """
    lighter_than_rock = radius > bulk.silicate_radius(mass)
    large = radius > settings.verdict.radius_only_rearth * EARTH_RADIUS
    small = (radius <= EARTH_RADIUS) & (mass <= EARTH_MASS)
    evidence: Array = np.where((weighed | filled_radius)[:, None], lighter_than_rock, large) & ~small
    return evidence


def published(
    batch: Batch, values: dict[str, Array], sources: dict[str, Array], magnitudes: dict[str, Array]
) -> dict[str, Array]:
    """The inputs as used: measured values as catalogued, everything else the median of its draws."""
    columns = {}
    for name in schema.measured_inputs():
        catalogued = batch.columns[f"catalogue.{name}"]
        columns[f"{name}_catalogued"] = catalogued
        if name in SETTLED_LATER:
            continue
        as_it_stands = np.isin(sources[name], ("measured", "measured_no_error", "given"))
        usable = np.where(sources[name] == "", np.nan, catalogued)
        drawn = draws.median(values[name]) if name in DRAWN else magnitudes.get(name, usable)
        columns[name] = np.where(as_it_stands, catalogued, drawn)
        columns[f"{name}_source"] = sources[name]
    return columns
