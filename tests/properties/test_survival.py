"""Whatever a body is like, its numbers come out finite, and without a warning."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from handmade import make_batch
from keptair import stages
from keptair.settings import Settings
from keptair.stages import Assessed
from keptair.tables import schema

QUICK = {"draws": 256, "epochs": 4, "use_backgrounds": ("co2", "n2", "h2", "n2_icy", "steam")}
OUTFLOW, RADIATE = Settings(**QUICK), Settings(**QUICK, excess_heat="radiate")
INPUTS = schema.measured_inputs()
NEEDS_AN_EXOBASE_A_STAR_OR_A_DOUBT = (
    "exobase_altitude_km", "exobase_escape_speed_km_s", "jeans_parameter_", "speed_ratio_", "hydrogen_kept",
    "decisive_share", "model_share", "tsm", "esm", "priority", "shoreline_dex",
)  # fmt: skip
ALWAYS_THERE = [
    column.name
    for column in schema.table("planets")
    if column.type == "number"
    and column.derived_by
    and column.subject not in INPUTS
    and not column.name.startswith(NEEDS_AN_EXOBASE_A_STAR_OR_A_DOUBT)
]


def logarithmic(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(math.log10(low), math.log10(high)).map(lambda power: 10**power)


def body_of(temperature: float, **row: Any) -> dict[str, Any]:
    """The insolation, or the axis for the star's light, at which a black planet has this temperature."""
    insolation = (temperature / 278.32) ** 4
    light = row.get("stellar_luminosity_lsun")
    if light is None:
        return {**row, "insolation_earth": insolation}
    return {**row, "semi_major_axis_au": (light / insolation) ** 0.5}


bodies = st.builds(
    body_of,
    temperature=logarithmic(5, 5000),
    planet_mass_mearth=logarithmic(1e-4, 1e4),
    planet_radius_rearth=logarithmic(0.03, 30),
    eccentricity=st.floats(0, 0.95),
    stellar_mass_msun=logarithmic(0.08, 20),
    stellar_luminosity_lsun=st.none() | logarithmic(1e-4, 1e4),
    stellar_age_gyr=logarithmic(0.01, 13.8),
    planet_mass_mearth_err=logarithmic(1e-5, 1e4),
    eccentricity_err=st.sampled_from([0.0, 0.2]),
    planet_mass_kind=st.sampled_from(["measured", "minimum"]),
    planet_mass_mearth_bound=st.sampled_from(["", "", "upper", "lower"]),
    planet_radius_rearth_bound=st.sampled_from(["", "", "upper", "lower"]),
    stellar_teff_k=st.none() | logarithmic(1000, 1e5),
    stellar_radius_rsun=st.none() | logarithmic(0.01, 1000),
    stellar_xray_luminosity_w=st.none() | logarithmic(1e17, 1e27),
    j_mag=st.none() | st.floats(-5, 30),
    distance_pc=st.none() | logarithmic(1, 1e5),
    background=st.sampled_from(["", "", "n2", "h2", "steam", "n2_icy"]),
).map(lambda row: {name: value for name, value in row.items() if value is not None})


def assess(rows: list[dict[str, Any]], how: Settings) -> Assessed:
    """Through all stages with every floating-point error raised but underflow, which is harmless."""
    with np.errstate(all="raise", under="ignore"):
        return stages.assess(make_batch(rows), how)


def assert_survives(found: Assessed) -> None:
    """No infinity anywhere; nothing missing that an assessed body has."""
    for table in (found.planets, found.gases):
        for name, values in table.items():
            if values.dtype.kind == "f":
                assert not (np.abs(np.nan_to_num(values, posinf=np.inf)) > 3e38).any(), name
    assessed = found.planets["verdict"] != "unassessed"
    for name in ALWAYS_THERE:
        assert not np.isnan(found.planets[name][assessed]).any(), name
    for name in ("retention", "held_now_share", "escape_time_gyr", "loss_rate_kg_s", "inventories_lost"):
        assert not np.isnan(found.gases[name]).any(), name
        assert (found.gases[name] >= 0).all(), name
    assert (found.gases["escape_time_gyr"] <= 1e30 * (1 + 1e-12)).all()
    assert (found.gases["retention"] <= 1).all()


@given(rows=st.lists(bodies, min_size=1, max_size=8), how=st.sampled_from([OUTFLOW, RADIATE]))
@settings(max_examples=60, deadline=None)
def test_numbers_of_any_body_survive(rows: list[dict[str, Any]], how: Settings) -> None:
    found = assess(rows, how)
    assert (found.planets["verdict"] != "unassessed").all()
    assert_survives(found)


@given(rows=st.lists(bodies, min_size=1, max_size=4), drop=st.sets(st.sampled_from(INPUTS), max_size=4))
@settings(max_examples=40, deadline=None)
def test_numbers_of_a_body_with_gaps_survive(rows: list[dict[str, Any]], drop: set[str]) -> None:
    left = [{name: value for name, value in row.items() if name.split("_err")[0] not in drop} for row in rows]
    assert_survives(assess(left, OUTFLOW))


@pytest.mark.parametrize("mass", [1e-4, 1.0, 1e4])
@pytest.mark.parametrize("temperature", [5.0, 255.0, 5000.0])
@pytest.mark.parametrize("age", [0.01, 13.8])
@pytest.mark.parametrize("eccentricity", [0.0, 0.95])
def test_the_corners_survive(mass: float, temperature: float, age: float, eccentricity: float) -> None:
    star = {"stellar_mass_msun": 0.5, "stellar_luminosity_lsun": 0.03, "stellar_age_gyr": age}
    rows = [
        body_of(
            temperature,
            planet_mass_mearth=mass,
            planet_radius_rearth=radius,
            eccentricity=eccentricity,
            **star,
            **extra,
        )
        for radius in (0.01, 1.0, 50.0)
        for extra in ({}, {"planet_mass_mearth_err": mass, "stellar_age_gyr_err": 5.0})
    ]
    assert_survives(assess(rows, OUTFLOW))
    assert_survives(assess(rows, RADIATE))


def test_a_body_inside_the_roche_limit_flows_out() -> None:
    star = {"stellar_mass_msun": 1.0, "stellar_luminosity_lsun": 1.0, "stellar_age_gyr": 5.0}
    row = {"planet_mass_mearth": 50.0, "planet_radius_rearth": 12.0, "semi_major_axis_au": 0.006, "eccentricity": 0.5}
    found = assess([row | star], OUTFLOW)
    assert_survives(found)
    assert "inside_roche" in found.planets["flag_names"][0]
    assert found.planets["regime"][0] == "outflow"
    assert found.planets["outflow_share"][0] == 1.0


def test_bodies_at_every_bound_of_the_catalogue_survive() -> None:
    lowest = {"planet_radius_rearth": 1e-3, "planet_mass_mearth": 1e-4, "semi_major_axis_au": 1e-4, "eccentricity": 1.0,
              "stellar_mass_msun": 0.005, "stellar_luminosity_lsun": 1e-8, "stellar_age_gyr": 0.01, "bond_albedo": 0.99,
              "stellar_teff_k": 250.0, "stellar_radius_rsun": 1e-3}  # fmt: skip
    highest = {"planet_radius_rearth": 100.0, "planet_mass_mearth": 1e5, "semi_major_axis_au": 1e5, "eccentricity": 0.0,
               "stellar_mass_msun": 200.0, "stellar_luminosity_lsun": 1e7, "stellar_age_gyr": 13.8, "bond_albedo": 0.0,
               "stellar_teff_k": 2e5, "stellar_radius_rsun": 2e3}  # fmt: skip
    swapped = [lowest | {name: highest[name]} for name in lowest] + [highest | {name: lowest[name]} for name in lowest]
    assert_survives(assess([lowest, highest, *swapped], OUTFLOW))
    assert_survives(assess([lowest, highest, *swapped], RADIATE))
