"""The pipeline against a second hand: the same equations in plain floats, for the central draw and for every draw."""

from __future__ import annotations

import random
import statistics
from typing import Any

import numpy as np
import pytest

from end_to_end import scalar_chain
from handmade import make_batch
from keptair import stages
from keptair.batch import Batch
from keptair.draws import Sampler
from keptair.settings import Settings

SETTINGS = Settings(use_backgrounds=("co2", "n2", "h2", "n2_icy", "steam"))
THROTTLES = ("energy", "supply", "kinetic")
LEAST_LOST = 1e-25  # inventories: below it the cap of escape times at 10³⁰ Gyr shows
LEAST_FLUX = 1e-150  # m⁻² s⁻¹: below it the clip of exponents shows

# Invented but for the Earth; the key is also the planet_id. `_err` stands for both errors.
PLANETS: dict[str, dict[str, Any]] = {
    "temperate rock of a K dwarf": {
        "planet_mass_mearth": 1.6, "planet_mass_mearth_err": 0.3, "planet_radius_rearth": 1.15,
        "planet_radius_rearth_err": 0.05, "orbital_period_d": 48.0, "eccentricity": 0.05, "eccentricity_err": 0.1,
        "stellar_mass_msun": 0.72, "stellar_radius_rsun": 0.70, "stellar_radius_rsun_err": 0.03,
        "stellar_teff_k": 4550.0, "stellar_teff_k_err": 80.0, "stellar_age_gyr": 4.0, "stellar_age_gyr_err_plus": 6.0,
        "stellar_age_gyr_err_minus": 1.5, "bond_albedo": 0.3,
    },
    "light rock near an M dwarf": {
        "planet_mass_mearth": 0.5, "planet_mass_mearth_err": 0.2, "planet_radius_rearth": 0.85,
        "semi_major_axis_au": 0.05, "eccentricity": 0.02, "stellar_mass_msun": 0.2, "stellar_luminosity_lsun": 0.005,
        "stellar_luminosity_lsun_err_plus": 0.001, "stellar_age_gyr": 6.0, "bond_albedo": 0.1,
    },
    "sub-Neptune": {
        "planet_mass_mearth": 4.0, "planet_mass_mearth_err": 1.5, "planet_radius_rearth": 1.9,
        "planet_radius_rearth_err": 0.1, "semi_major_axis_au": 0.03, "stellar_mass_msun": 0.5,
        "stellar_radius_rsun": 0.5, "stellar_teff_k": 3700.0, "stellar_age_gyr": 5.0, "bond_albedo": 0.2,
    },
    "hot Jupiter": {
        "planet_mass_mearth": 300.0, "planet_mass_mearth_err": 20.0, "planet_radius_rearth": 13.0,
        "orbital_period_d": 3.0, "stellar_mass_msun": 1.2, "stellar_luminosity_lsun": 2.0, "stellar_age_gyr": 3.0,
        "eccentricity": 0.1,
    },
    "cold icy body": {
        "planet_mass_mearth": 0.0225, "planet_radius_rearth": 0.404, "semi_major_axis_au": 9.54, "eccentricity": 0.054,
        "stellar_mass_msun": 1.0, "stellar_luminosity_lsun": 1.0, "stellar_age_gyr": 4.57, "bond_albedo": 0.265,
    },
    "Earth": {
        "planet_mass_mearth": 1.0, "planet_radius_rearth": 0.99889, "semi_major_axis_au": 1.0, "eccentricity": 0.0167,
        "stellar_mass_msun": 1.0, "stellar_luminosity_lsun": 1.0, "stellar_age_gyr": 4.57, "stellar_age_gyr_err": 0.05,
        "bond_albedo": 0.306, "background": "n2",
    },
    "M sin i on an eccentric orbit, star by its light": {
        "planet_mass_mearth": 5.0, "planet_mass_kind": "minimum", "planet_mass_mearth_err": 1.0,
        "orbital_period_d": 30.0, "eccentricity": 0.4, "eccentricity_err": 0.3, "stellar_luminosity_lsun": 0.5,
    },
    "no mass, no age, no albedo": {
        "planet_radius_rearth": 1.25, "planet_radius_rearth_err": 0.1, "orbital_period_d": 10.0,
        "stellar_luminosity_lsun": 0.01, "stellar_luminosity_lsun_err": 0.002,
    },
    "insolation alone, mass a limit": {
        "planet_mass_mearth": 1.4, "planet_mass_mearth_bound": "upper", "planet_radius_rearth": 0.7,
        "insolation_earth": 3.0, "insolation_earth_err": 0.5, "stellar_mass_msun": 0.9,
    },
    "giant inside the Roche limit of a giant": {
        "planet_mass_mearth": 30.0, "planet_radius_rearth": 15.0, "semi_major_axis_au": 0.008, "eccentricity": 0.3,
        "stellar_mass_msun": 1.1, "stellar_luminosity_lsun": 40.0, "stellar_age_gyr": 0.15,
    },
}  # fmt: skip
JUDGED = [
    ("temperate rock of a K dwarf", "co2"),
    ("light rock near an M dwarf", "co2"),
    ("sub-Neptune", "h2"),
    ("sub-Neptune", "co2"),
    ("hot Jupiter", "h2"),
    ("cold icy body", "n2_icy"),
    ("Earth", "n2"),
    ("M sin i on an eccentric orbit, star by its light", "h2"),
    ("no mass, no age, no albedo", "co2"),
    ("insolation alone, mass a limit", "co2"),
]
# What the pipeline calls the variables of the model; inputs have their columns' names in both.
VARIABLES = {
    "xuv_scatter": "xuv_level",
    "conduction": "damping_exponent",
    "efficiency": "efficiency",
    "jeans_correction": "jeans_factor",
    "start": "start_gyr",
    "inventory": "inventory",
    "mass_radius": "mass_radius_scatter",
    "inclination": "inclination",
} | {name: name for name in scalar_chain.BOUNDS}


def spelled_out(row: dict[str, Any]) -> dict[str, Any]:
    """The row with `_err` written out as both errors."""
    plain = {name: value for name, value in row.items() if not name.endswith("_err")}
    for name, value in row.items():
        if name.endswith("_err"):
            plain |= {f"{name}_plus": value, f"{name}_minus": value}
    return plain


@pytest.fixture(scope="module")
def worked() -> Batch:
    """All planets through all stages with the default draws."""
    rows = [{"planet_id": name, **row} for name, row in PLANETS.items()]
    return stages.through(make_batch(rows), SETTINGS)


def draw(batch: Batch, planet: str, column: int) -> dict[str, float]:
    """One draw of one planet, every array of it."""
    row = list(PLANETS).index(planet)
    return {name: values[row, min(column, values.shape[1] - 1)] for name, values in batch.draws.items()}


def uniforms(batch: Batch, planet: str) -> dict[str, np.ndarray]:
    """u of every variable, over the pipeline's own draws."""
    sampler = Sampler(batch.columns["planet_id"], batch.columns["host_id"], SETTINGS.draws, SETTINGS.seed)
    row = list(PLANETS).index(planet)
    return {ours: sampler(theirs)[row] for ours, theirs in VARIABLES.items()}


def assert_same(found: dict[str, float], expected: dict[str, float | None], smallest: float = 0.0) -> None:
    """Agreement to 1e-6 and presence of the same values; all that differ are named."""
    differing = {
        name: (found[name], value)
        for name, value in expected.items()
        if (value is None) != bool(np.isnan(found[name]))
        or (value is not None and abs(found[name] - value) > 1e-6 * abs(value) + smallest)
    }
    assert not differing


@pytest.mark.parametrize("planet", PLANETS)
def test_star_orbit_and_body_of_the_central_draw_are_those_of_the_second_hand(worked: Batch, planet: str) -> None:
    body = scalar_chain.chain(spelled_out(PLANETS[planet]), "co2")["body"]
    light, axis = body["luminosity"], body["axis"]
    expected = {
        "luminosity": None if light is None else light * scalar_chain.SUN_LUMINOSITY,
        "star_mass": body["star_mass"] * scalar_chain.SUN_MASS,
        "flux": body["insolation"],
        "mean_flux": body["mean_insolation"],
        "equilibrium": body["equilibrium"],
        "base": body["skin"],
        "gravity": body["gravity"],
        "input.planet_mass_mearth": body["mass"],
        "input.planet_radius_rearth": body["radius"],
        "input.stellar_age_gyr": body["age"],
    }
    found = draw(worked, planet, 0)
    assert_same(found, expected)
    assert found["roche_ratio"] == pytest.approx(np.inf if axis is None else body["roche"], rel=1e-6)
    published = worked.columns["semi_major_axis_au"][list(PLANETS).index(planet)]
    assert np.isnan(published) == (axis is None)


@pytest.mark.parametrize("key", scalar_chain.BACKGROUNDS)
@pytest.mark.parametrize("planet", PLANETS)
def test_exobase_and_loss_of_the_central_draw_are_those_of_the_second_hand(
    worked: Batch, planet: str, key: str
) -> None:
    if not worked.columns[f"worked.{key}"][list(PLANETS).index(planet)]:
        assert key == "n2_icy"
        return
    answer, found = scalar_chain.chain(spelled_out(PLANETS[planet]), key), draw(worked, planet, 0)
    now = answer["now"]
    exobase = {
        "xuv_now": now["xuv"],
        f"conductive.{key}": now["conduction"],
        f"exobase_temperature.{key}": now["temperature"],
        f"exobase_radius.{key}": now.get("radius"),
    }
    assert_same(found, exobase)
    assert found[f"outflow.{key}"] == (now["regime"] == "outflow")
    fluxes = {f"loss.{key}": now["loss"]}
    if now["bound"]:
        fluxes[f"key_flux.{key}"] = now["kinetic"]
    assert_same(found, fluxes, LEAST_FLUX)
    assert_same(found, {f"lost.{key}": answer["inventories_lost"]}, LEAST_LOST)
    held, loss = found[f"held.{key}"], found[f"loss.{key}"]
    assert held / max(loss, held / scalar_chain.LONGEST) == pytest.approx(now["escape_time"], rel=1e-6)


@pytest.mark.parametrize("key", scalar_chain.BACKGROUNDS)
@pytest.mark.parametrize("planet", PLANETS)
def test_traces_of_the_central_draw_are_those_of_the_second_hand(worked: Batch, planet: str, key: str) -> None:
    if not worked.columns[f"worked.{key}"][list(PLANETS).index(planet)]:
        assert key == "n2_icy"
        return
    answer, found = scalar_chain.chain(spelled_out(PLANETS[planet]), key), draw(worked, planet, 0)
    for gas, trace in answer["now"]["traces"].items():
        fluxes = {f"loss.{key}.{gas}": trace["flux"]}
        if trace["kinetic"] is not None:
            fluxes[f"jeans_flux.{key}.{gas}"] = trace["kinetic"]
        if trace["supply"] is not None:
            fluxes[f"supply_flux.{key}.{gas}"] = trace["supply"]
        assert_same(found, fluxes, LEAST_FLUX)
        assert THROTTLES[int(found[f"limited.{key}.{gas}"])] == trace["limited_by"], gas
        assert_same(found, {f"lost.{key}.{gas}": answer["traces_lost"][gas]}, LEAST_LOST)


@pytest.mark.parametrize(("planet", "key"), JUDGED)
def test_retention_is_that_of_the_second_hand_draw_by_draw(worked: Batch, planet: str, key: str) -> None:
    row = list(PLANETS).index(planet)
    u, catalogued = uniforms(worked, planet), spelled_out(PLANETS[planet])
    traces = ("h", "o2")
    kept = {"": 0, "h": 0, "o2": 0}
    for column in range(1, SETTINGS.draws + 1):
        of_draw = {name: float(values[column]) for name, values in u.items()}
        answer, found = scalar_chain.chain(catalogued, key, of_draw, gases=traces), draw(worked, planet, column)
        lost = {"": answer["inventories_lost"], **answer["traces_lost"]}
        assert_same(found, {f"lost.{key}.{gas}".rstrip("."): value for gas, value in lost.items()}, LEAST_LOST)
        for gas, value in lost.items():
            kept[gas] += value < 1
    main = SETTINGS.backgrounds[key].main_gas
    for gas, count in kept.items():
        assert worked.columns[f"retention.{key}.{gas or main}"][row] == count / SETTINGS.draws


@pytest.mark.parametrize(("planet", "key"), JUDGED)
def test_retention_hardly_depends_on_whose_random_numbers_are_drawn(worked: Batch, planet: str, key: str) -> None:
    row, own = list(PLANETS).index(planet), random.Random(20261201)
    catalogued, draws = spelled_out(PLANETS[planet]), 1500  # standard error 0.013 at worst
    kept = 0
    for _ in range(draws):
        u = {name: own.random() for name in VARIABLES}
        kept += scalar_chain.chain(catalogued, key, u, gases=())["inventories_lost"] < 1
    main = SETTINGS.backgrounds[key].main_gas
    assert worked.columns[f"retention.{key}.{main}"][row] == pytest.approx(kept / draws, abs=0.05)


def test_the_planets_compared_are_of_all_kinds(worked: Batch) -> None:
    """Else the comparison would say little: kept, lost and undecided air, both regimes, bound and unbound."""
    kept = [
        worked.columns[f"retention.{key}.{SETTINGS.backgrounds[key].main_gas}"][list(PLANETS).index(planet)]
        for planet, key in JUDGED
    ]
    assert min(kept) < 0.1
    assert max(kept) > 0.9
    assert sum(0.2 < share < 0.8 for share in kept) >= 3
    outflow = np.stack([worked.draws[f"outflow.{key}"][:, 0] == 1 for key in ("co2", "n2", "h2")])
    assert 0.1 < outflow.mean() < 0.9
    assert worked.columns["flag.inside_roche"].any()


@pytest.mark.parametrize("planet", ["temperate rock of a K dwarf", "light rock near an M dwarf"])
def test_published_medians_are_over_the_draws_that_have_an_exobase(worked: Batch, planet: str) -> None:
    row, key = list(PLANETS).index(planet), worked.columns["background"][list(PLANETS).index(planet)]
    u, gases = uniforms(worked, planet), ("h", "co2")
    bound = []
    for column in range(1, SETTINGS.draws + 1):
        of_draw = {name: float(values[column]) for name, values in u.items()}
        now = scalar_chain.chain(spelled_out(PLANETS[planet]), key, of_draw, epochs=2, gases=gases)["now"]
        if now["bound"]:
            bound.append(now)
    for gas in gases:
        published = worked.columns[f"jeans_parameter_{gas}"][row]
        if 2 * len(bound) < SETTINGS.draws:
            assert np.isnan(published)
            assert worked.columns["flag.unbound"][row]
        else:
            middle = statistics.median(now["jeans"][gas] for now in bound)
            assert published == pytest.approx(middle, rel=1e-6)
            assert worked.columns[f"speed_ratio_{gas}"][row] == pytest.approx((middle / 1.5) ** 0.5, rel=1e-3)
