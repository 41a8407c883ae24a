"""Fill: what is drawn for a value, a limit, a minimum mass or a gap, and how each is marked."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from handmade import make_batch
from keptair.batch import Batch
from keptair.settings import Settings
from keptair.stages import fill, irradiate

EARTH_MASS, EARTH_RADIUS = 3.986004e14 / 6.67430e-11, 6.3781e6  # IAU 2015 Resolution B3
JUPITER_IN_EARTHS = 1.2668653e17 / 3.986004e14


def filled(*rows: dict[str, Any], **changed: Any) -> Batch:
    return fill.run(
        make_batch([{"planet_id": f"Aster {place}", **row} for place, row in enumerate(rows)]), Settings(**changed)
    )


def drawn(batch: Batch, name: str, unit: float = 1.0, planet: int = 0) -> np.ndarray:
    """Draws of an input in canonical units, the central one left out."""
    return batch.draws[f"input.{name}"][planet, 1:] / unit


def sources(batch: Batch, name: str) -> list[str]:
    column = f"{name}_source"
    return list(batch.columns[column if column in batch.columns else f"source.{name}"])


def raised(batch: Batch, flag: str) -> list[bool]:
    """A flag of fill, or one that waits until the flux is settled."""
    return irradiate.run(batch, Settings()).columns[f"flag.{flag}"].tolist()


def test_a_value_is_marked_by_whether_it_has_an_error() -> None:
    batch = filled(
        {"planet_mass_mearth": 2.0, "planet_mass_mearth_err": 0.2},
        {"planet_mass_mearth": 2.0},
        {"planet_mass_mearth": 2.0, "planet_mass_mearth_err_plus": 0.2},
        {"planet_mass_mearth": 2.0, "planet_mass_mearth_err_minus": 0.2},
        {},
    )
    assert sources(batch, "planet_mass_mearth") == ["measured", "measured_no_error", "measured", "measured", ""]
    assert raised(batch, "value_without_error") == [False, True, False, False, False]
    assert raised(batch, "one_sided_error") == [False, False, True, True, False]
    assert batch.columns["planet_mass_mearth"][:4].tolist() == [2.0] * 4
    assert np.isnan(batch.columns["planet_mass_mearth"][4])


def test_without_an_error_a_value_is_exact() -> None:
    assert (drawn(filled({"bond_albedo": 0.3}), "bond_albedo") == 0.3).all()


def test_an_error_on_one_side_serves_both() -> None:
    batch = filled({"planet_mass_mearth": 5.0, "planet_mass_mearth_err_plus": 0.5})
    mass = drawn(batch, "planet_mass_mearth", EARTH_MASS)
    np.testing.assert_allclose(np.percentile(mass, [15.87, 50, 84.13]), [4.5, 5.0, 5.5], rtol=0.01)


def test_two_errors_each_serve_their_side() -> None:
    row = {"planet_mass_mearth": 5.0, "planet_mass_mearth_err_plus": 0.5, "planet_mass_mearth_err_minus": 1.0}
    mass = drawn(filled(row), "planet_mass_mearth", EARTH_MASS)
    np.testing.assert_allclose(np.percentile(mass, [15.87, 50, 84.13]), [4.0, 5.0, 5.5], rtol=0.01)


def test_an_upper_limit_is_drawn_evenly_from_the_floor_and_a_lower_one_up_to_three_times_itself() -> None:
    batch = filled(
        {"planet_mass_mearth": 6.0, "planet_mass_mearth_bound": "upper"},
        {"planet_mass_mearth": 6.0, "planet_mass_mearth_bound": "lower", "planet_mass_mearth_err": 1.0},
        {"planet_mass_mearth": 9e4, "planet_mass_mearth_bound": "lower"},
    )
    assert sources(batch, "planet_mass_mearth") == ["limit"] * 3
    assert raised(batch, "limit_used") == [True] * 3
    upper, lower, last = (drawn(batch, "planet_mass_mearth", EARTH_MASS, planet) for planet in range(3))
    np.testing.assert_allclose(np.percentile(upper, [25, 50, 75]), [1.5, 3.0, 4.5], rtol=0.01)
    assert upper.min() >= 1e-4
    assert upper.max() <= 6.0
    np.testing.assert_allclose(np.percentile(np.log(lower / 6.0) / math.log(3), [0, 50, 100]), [0, 0.5, 1], atol=0.01)
    assert last.min() >= 9e4 * (1 - 1e-12)
    assert last.max() <= 1e5
    assert batch.columns["planet_mass_mearth"][0] == pytest.approx(3.0, rel=0.01)


@pytest.mark.parametrize(
    "name",
    ["semi_major_axis_au", "orbital_period_d", "stellar_luminosity_lsun", "stellar_teff_k", "stellar_mass_msun"],
)
def test_limits_of_the_star_and_the_orbit_count_as_missing(name: str) -> None:
    batch = filled({name: 5000.0 if name == "stellar_teff_k" else 0.5, f"{name}_bound": "upper"})
    assert sources(batch, name) == [""]
    assert np.isnan(drawn(batch, name)).all()
    assert raised(batch, "limit_used") == [False]


def test_a_missing_albedo_age_and_eccentricity_have_their_priors() -> None:
    batch = filled({"planet_mass_mearth": 1.0})
    albedo, age = drawn(batch, "bond_albedo"), drawn(batch, "stellar_age_gyr")
    np.testing.assert_allclose(np.percentile(albedo, [0, 50, 100]), [0, 0.25, 0.5], atol=0.003)
    np.testing.assert_allclose(np.percentile(age, [0, 50, 100]), [1, 5.5, 10], atol=0.05)
    assert (drawn(batch, "eccentricity") == 0).all()
    assert batch.draws["input.bond_albedo"][0, 0] == 0.25
    assert batch.draws["input.stellar_age_gyr"][0, 0] == 5.5
    assert sources(batch, "bond_albedo") == sources(batch, "stellar_age_gyr") == ["prior"]
    assert sources(batch, "eccentricity") == ["assumed"]
    assert raised(batch, "age_from_prior") == [True]
    other = filled({}, bond_albedo=(0.1, 0.1), age_prior_gyr=(2.0, 3.0))
    assert (drawn(other, "bond_albedo") == 0.1).all()
    assert 2 <= drawn(other, "stellar_age_gyr").min() < drawn(other, "stellar_age_gyr").max() <= 3


def test_eccentricity_is_drawn_below_095_and_age_within_the_age_of_the_universe() -> None:
    batch = filled(
        {"eccentricity": 0.9, "eccentricity_err": 0.3, "stellar_age_gyr": 12.0, "stellar_age_gyr_err": 4.0},
        {"eccentricity": 1.0, "stellar_age_gyr": 15.0, "stellar_age_gyr_err": 3.0},
    )
    assert 0 <= drawn(batch, "eccentricity").min() < drawn(batch, "eccentricity").max() <= 0.95
    assert (drawn(batch, "eccentricity", planet=1) == 0.95).all()
    for planet in (0, 1):
        age = drawn(batch, "stellar_age_gyr", planet=planet)
        assert 0.01 <= age.min() < age.max() <= 13.8


def test_a_minimum_mass_is_turned_by_an_unknown_inclination_unless_the_planet_transits() -> None:
    minimum = {"planet_mass_mearth": 4.0, "planet_mass_kind": "minimum"}
    batch = filled(
        minimum,
        {**minimum, "planet_radius_rearth": 2.0},
        {**minimum, "transits": "yes"},
        {**minimum, "planet_radius_rearth": 2.0, "planet_radius_kind": "relation"},
    )
    assert sources(batch, "planet_mass_mearth") == ["minimum"] * 4
    turned = drawn(batch, "planet_mass_mearth", EARTH_MASS)
    # cos i uniform on 0–0.996: half the draws below 4/√(1 − 0.498²) = 4.613, none above 4/√(1 − 0.996²) = 44.77
    assert np.median(turned) == pytest.approx(4.613, rel=0.003)
    assert turned.min() == pytest.approx(4.0, rel=1e-4)
    assert 20 < turned.max() <= 44.77
    assert batch.columns["planet_mass_mearth"][0] == pytest.approx(4.613, rel=0.003)
    for seen in (1, 2):
        np.testing.assert_allclose(drawn(batch, "planet_mass_mearth", EARTH_MASS, seen), 4.0, rtol=1e-12)
    assert drawn(batch, "planet_mass_mearth", EARTH_MASS, 3).max() > 20
    assert batch.columns["is.weighed"].tolist() == [False, True, True, False]


@pytest.mark.parametrize(
    ("mass", "radius", "scatter"),
    [  # Chen & Kipping 2017 (values from memory): R = C M^S, worked by hand
        (1.0, 1.008, 0.040),
        (17.15, 0.808 * 17.15**0.589, 0.146),
        (317.8, 17.74 * 317.8**-0.044, 0.074),
    ],
)
def test_a_missing_radius_follows_the_mass(mass: float, radius: float, scatter: float) -> None:
    batch = filled({"planet_mass_mearth": mass})
    assert sources(batch, "planet_radius_rearth") == ["relation"]
    logarithms = np.log(drawn(batch, "planet_radius_rearth", EARTH_RADIUS) / radius)
    np.testing.assert_allclose(
        np.percentile(logarithms, [15.87, 50, 84.13]), [-scatter, 0, scatter], atol=0.03 * scatter
    )
    assert batch.columns["planet_radius_rearth"][0] == pytest.approx(radius, rel=0.01)
    assert batch.columns["is.sized"].tolist() == [False]


@pytest.mark.parametrize(
    ("radius", "mass", "scatter"),
    [(0.8, (0.8 / 1.008) ** (1 / 0.279), 0.040 / 0.279), (3.0, (3.0 / 0.808) ** (1 / 0.589), 0.146 / 0.589)],
)
def test_a_missing_mass_follows_the_radius(radius: float, mass: float, scatter: float) -> None:
    batch = filled({"planet_radius_rearth": radius})
    assert sources(batch, "planet_mass_mearth") == ["relation"]
    logarithms = np.log(drawn(batch, "planet_mass_mearth", EARTH_MASS) / mass)
    np.testing.assert_allclose(
        np.percentile(logarithms, [15.87, 50, 84.13]), [-scatter, 0, scatter], atol=0.03 * scatter
    )
    assert raised(batch, "mass_degenerate") == [False]
    assert batch.columns["is.weighed"].tolist() == [False]


def test_the_mass_of_a_large_planet_cannot_be_told_from_its_radius() -> None:
    batch = filled({"planet_radius_rearth": 12.0}, {"planet_radius_rearth": 12.0, "planet_mass_mearth": 300.0})
    mass = np.log(drawn(batch, "planet_mass_mearth", EARTH_MASS))
    np.testing.assert_allclose(np.percentile(mass, [0, 50, 100]), np.log([60, math.sqrt(60 * 4000), 4000]), atol=0.02)
    assert raised(batch, "mass_degenerate") == [True, False]


def test_values_from_a_relation_are_discarded_and_filled_again() -> None:
    batch = filled(
        {"planet_mass_mearth": 50.0, "planet_mass_kind": "relation", "planet_radius_rearth": 1.0},
        {"planet_mass_mearth": 1.0, "planet_radius_kind": "relation", "planet_radius_rearth": 5.0},
        {
            "planet_mass_mearth": 50.0, "planet_mass_kind": "relation",
            "planet_radius_kind": "relation", "planet_radius_rearth": 5.0,
        },
    )  # fmt: skip
    assert sources(batch, "planet_mass_mearth") == ["relation", "measured_no_error", ""]
    assert sources(batch, "planet_radius_rearth") == ["measured_no_error", "relation", ""]
    assert batch.columns["planet_mass_mearth"][0] == pytest.approx((1 / 1.008) ** (1 / 0.279), rel=0.02)
    assert batch.columns["planet_radius_rearth"][1] == pytest.approx(1.008, rel=0.02)
    assert np.isnan(batch.draws["input.planet_mass_mearth"][2]).all()
    assert np.isnan(batch.columns["envelope_probability"][2])


def test_filled_masses_stay_within_their_bounds() -> None:
    batch = filled({"planet_radius_rearth": 0.01}, {"planet_mass_mearth": 1e-4})
    assert drawn(batch, "planet_mass_mearth", EARTH_MASS).min() >= 1e-4 * (1 - 1e-12)
    assert drawn(batch, "planet_radius_rearth", EARTH_RADIUS, 1).min() >= 1e-3


def test_constants_of_the_column_map_are_marked_given() -> None:
    batch = filled({"bond_albedo": 0.3, "given.bond_albedo": True}, {"bond_albedo": 0.3})
    assert sources(batch, "bond_albedo") == ["given", "measured_no_error"]


@pytest.mark.parametrize(
    ("row", "share"),
    [  # rock without a core: 1.07 × 5^(1/3.7) = 1.653 R⊕ at 5 M⊕ (Zeng et al. 2016)
        ({"planet_mass_mearth": 5.0, "planet_radius_rearth": 1.68}, 1.0),
        ({"planet_mass_mearth": 5.0, "planet_radius_rearth": 1.63}, 0.0),
        ({"planet_mass_mearth": 5.0, "planet_radius_rearth": 1.653, "planet_radius_rearth_err": 0.2}, 0.5),
        # without a measured mass the radius gap at 1.8 R⊕ (Fulton et al. 2017) decides; a limit is not a mass
        ({"planet_radius_rearth": 1.85}, 1.0),
        ({"planet_radius_rearth": 1.75}, 0.0),
        ({"planet_radius_rearth": 1.8, "planet_radius_rearth_err": 0.1}, 0.5),
        ({"planet_radius_rearth": 1.75, "planet_mass_mearth": 1.0, "planet_mass_mearth_bound": "upper"}, 0.0),
        ({"planet_radius_rearth": 1.85, "planet_mass_mearth": 50.0, "planet_mass_mearth_bound": "upper"}, 1.0),
        ({"planet_radius_rearth": 1.85, "planet_mass_mearth": 50.0, "planet_mass_kind": "relation"}, 1.0),
        # M sin i of a planet that transits is a mass
        ({"planet_radius_rearth": 1.75, "planet_mass_mearth": 1.0, "planet_mass_kind": "minimum"}, 1.0),
        # a radius filled from the mass: 0.808 × 20^0.589 = 4.7 R⊕ against 2.4 of rock
        ({"planet_mass_mearth": 20.0}, 1.0),
        # small icy bodies are light without having air: Titan's bulk
        ({"planet_mass_mearth": 0.0225, "planet_radius_rearth": 0.404}, 0.0),
        ({"planet_mass_mearth": 0.9, "planet_radius_rearth": 1.06}, 1.0),
        ({"planet_mass_mearth": 0.6, "planet_radius_rearth": 0.99}, 0.0),
    ],
)
def test_lighter_than_rock_of_any_core_means_an_envelope(row: dict[str, Any], share: float) -> None:
    assert filled(row).columns["envelope_probability"][0] == pytest.approx(share, abs=0.01)


@pytest.mark.parametrize("how", [{"planet_mass_kind": "minimum"}, {"planet_mass_mearth_bound": "lower"}, {}])
def test_a_radius_filled_from_any_kind_of_mass_is_held_against_rock_of_that_mass(how: dict[str, str]) -> None:
    batch = filled({"planet_mass_mearth": 4.0} | how)
    mass, radius = drawn(batch, "planet_mass_mearth", EARTH_MASS), drawn(batch, "planet_radius_rearth", EARTH_RADIUS)
    light = (radius > 1.07 * mass ** (1 / 3.7)).mean()
    assert batch.columns["envelope_probability"][0] == light
    assert light - (radius > 1.8).mean() > 0.03


def test_objects_above_thirteen_jupiters_stay_and_are_flagged() -> None:
    limit = 13 * JUPITER_IN_EARTHS
    batch = filled({"planet_mass_mearth": 1.001 * limit}, {"planet_mass_mearth": 0.999 * limit}, {})
    assert raised(batch, "substellar") == [True, False, False]
