"""One test for each way floating point could spoil a number, and the limits of the formulas."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from handmade import make_batch
from keptair import draws, stages
from keptair.physics import bulk, diffusion, exobase, frost, kinetics, orbit, spectroscopy, time
from keptair.settings import Settings
from keptair.tables import parquet, schema

QUICK = Settings(draws=256, epochs=4)
STAR = {"stellar_mass_msun": 1.0, "stellar_luminosity_lsun": 1.0, "stellar_age_gyr": 5.0, "eccentricity": 0.0}


@pytest.fixture(autouse=True)
def _every_floating_point_error_is_raised() -> Iterator[None]:
    with np.errstate(all="raise"):
        yield


def test_air_without_a_top_has_no_exobase_rather_than_a_negative_one() -> None:
    hot_pebble = {"planet_mass_mearth": 1e-3, "planet_radius_rearth": 0.2, "semi_major_axis_au": 0.02, **STAR}
    with np.errstate(under="ignore"):
        batch = stages.through(make_batch([hot_pebble]), QUICK)
    assert np.isnan(batch.draws["exobase_radius.co2"]).all()
    assert np.isnan(batch.columns["exobase_altitude_km"]).all()
    assert (batch.draws["exobase_temperature.co2"] > 0).all()
    assert batch.columns["flag.unbound"][0]
    for name in ("loss", "lost", "key_flux"):
        assert np.isfinite(batch.draws[f"{name}.co2"]).all()
    # 1/r of this body would be negative: 8000 K and 30 u, 22 scale heights of 4e-3 R each and more
    inverse = exobase.inverse_exobase_radius(6e21, 1.3e6, 1900.0, 1600.0, 8000.0, 7.3e-26, 5e-26, 13.8, 12.0)
    assert inverse < 0


@given(
    jeans=st.floats(0.01, 1e4), scale_heights=st.floats(0.01, 40), mass=st.floats(1, 70), mean_mass=st.floats(1.2, 44)
)
@settings(deadline=None)
def test_the_flux_of_a_trace_is_never_denormal(
    jeans: float, scale_heights: float, mass: float, mean_mass: float
) -> None:
    """X_exo of 1e-288 times e^−λ: as one exponent, cut at −600 (e^−600 = 2.65e-261)."""
    flux = float(kinetics.trace_jeans_flux(1e20, jeans / mass, scale_heights, mass, mean_mass))
    assert flux > 1e-245


def test_two_fluxes_in_series_may_both_be_nothing() -> None:
    kinetic, supply = np.array([0.0, 0.0, 3.0, 1e-260, 1e200]), np.array([0.0, 2.0, 0.0, 1e20, 1e200])
    found = diffusion.in_series(kinetic, supply)
    np.testing.assert_allclose(found, [0.0, 0.0, 0.0, 1e-260, 0.5e200], rtol=1e-12)


def test_an_outflow_carries_a_gas_of_the_mean_mass_along_and_leaves_the_heaviest() -> None:
    """(m_c − m_i)/(m_c − m_key) would be 0/0 without a wind."""
    wind, supply = np.array([0.0, 5.0, 5.0, 0.0]), np.array([0.0, 0.0, -6.0, 2.0])
    np.testing.assert_array_equal(diffusion.carried_flux(wind, supply), [0.0, 5.0, 0.0, 2.0])


def test_no_uniform_number_is_0_or_1(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(draws, "shifts", lambda _variable, owners, _seed: np.zeros(len(owners)))
    sampler = draws.Sampler(["Aster b"], ["Aster"], 256, 1)
    assert sampler("inclination").min() == 2.0**-53
    assert np.isfinite(sampler.normal("xuv_level")).all()


def test_a_radius_smaller_than_the_core_asks_for_no_hydrogen() -> None:
    earth = (5.97e24, 6.37e6)
    assert bulk.hydrogen_share(earth[0], 0.9 * earth[1], 1.0, 5.0) == 0.0
    assert bulk.hydrogen_share(earth[0], 1.2 * earth[1], 1.0, 5.0) > 0.0


def test_an_orbit_seen_from_above_does_not_make_the_mass_infinite() -> None:
    row = {"planet_id": "Aster b", "planet_mass_mearth": 2.0, "planet_mass_kind": "minimum", "orbital_period_d": 9.0}
    with np.errstate(under="ignore"):
        batch = stages.through(make_batch([row | STAR]), QUICK)
    mass = batch.draws["input.planet_mass_mearth"][0] / (3.986004e14 / 6.67430e-11)
    assert 2.0 <= mass.min() < mass.max() <= 2.0 / (1 - 0.996**2) ** 0.5 * (1 + 1e-12)


@pytest.mark.parametrize("temperature", [2.0, 5.0, 40.0])
def test_a_cold_body_shines_faintly_and_without_overflow(temperature: float) -> None:
    ratio = float(spectroscopy.planck_ratio(temperature, 3000.0, 7.5e-6))
    assert 0 < ratio < 1e-15


def test_a_result_that_does_not_vary_has_no_decisive_input() -> None:
    rows = [
        {"planet_id": "Aster b", "planet_mass_mearth": 8.0, "planet_radius_rearth": 1.7, "semi_major_axis_au": 2.0},
        {"planet_id": "Aster c", "planet_mass_mearth": 0.01, "planet_radius_rearth": 0.3, "semi_major_axis_au": 0.1},
    ]
    with np.errstate(under="ignore"):
        batch = stages.through(make_batch([row | STAR for row in rows]), QUICK)
    assert batch.columns["secondary_probability"].tolist() == [1.0, 0.0]
    assert np.isnan(batch.columns["decisive_share"]).all()
    assert batch.columns["decisive_input"].tolist() == ["", ""]


def test_unbound_draws_are_left_out_of_percentiles_and_fewer_than_half_give_none() -> None:
    values = np.array([[9.0, 4.0, np.nan, 2.0, np.nan], [9.0, np.nan, np.nan, 2.0, np.nan]])
    middle = draws.median(values)
    assert middle[0] == 3.0
    assert np.isnan(middle[1])


def test_a_loss_of_nothing_takes_the_longest_time_there_is() -> None:
    times = time.escape_time(np.array([1e30, 1e30, 1e30, 1.0]), np.array([0.0, 1e-300, 1e-17, 1.0]))
    np.testing.assert_allclose(times, [1e30, 1e30, 1e30, 1 / 3.15576e16], rtol=1e-12)


def test_the_longest_time_and_the_smallest_flux_survive_single_precision() -> None:
    table = schema.table("gases")
    columns = {
        column.name: np.array(["x"] * 3, dtype=object)
        if column.type == "string"
        else np.zeros(3, dtype=np.int64 if column.type == "integer" else float)
        for column in table
    }
    columns["escape_time_gyr"] = np.array([1e30, 1e-40, np.nan])
    columns["jeans_flux_m2_s"] = np.array([1e-38, 1.1e-37, 1e300])
    with np.errstate(invalid="ignore", under="ignore"):
        written = parquet.to_arrow(columns, table)
    assert written["escape_time_gyr"].to_pylist() == [pytest.approx(1e30, rel=1e-7), 0.0, None]
    small, least, huge = written["jeans_flux_m2_s"].to_pylist()
    assert small == 0.0
    assert least == pytest.approx(1.1e-37, rel=1e-6)
    assert np.isfinite(huge)


@pytest.mark.parametrize("temperature", [1e-3, 1e-6, 1e-12])
def test_in_the_limit_of_no_temperature_nothing_leaves(temperature: float) -> None:
    jeans = kinetics.jeans_parameter(6e24, 6.4e6, temperature, 1.7e-27)
    speed = kinetics.most_probable_speed(temperature, 1.7e-27)
    assert kinetics.jeans_flux(1.0, 1e14, speed, jeans) < 1e-200
    assert kinetics.effusion_speed(speed, jeans) < 1e-200
    assert kinetics.trace_jeans_flux(1e20, jeans, 12.0, 1.0, 20.0) < 1e-200


@pytest.mark.parametrize("jeans", [1e3, 1e6, 1e12, 1e30])
def test_in_the_limit_of_an_infinite_jeans_parameter_nothing_leaves(jeans: float) -> None:
    assert kinetics.effusion_speed(1e3, jeans) < 1e-200
    assert kinetics.trace_jeans_flux(1e20, jeans, 12.0, 28.0, 20.0) < 1e-200


def test_in_the_limit_of_no_jeans_parameter_a_gas_effuses_as_into_nothing() -> None:
    """A quarter of the mean speed, from kinetic theory."""
    speed = kinetics.most_probable_speed(300.0, 1e-26)
    assert kinetics.effusion_speed(speed, 0.0) == pytest.approx(kinetics.mean_speed(300.0, 1e-26) / 4, rel=1e-12)


def test_far_from_its_star_a_planet_feels_no_tide() -> None:
    assert orbit.roche_factor(np.inf, 0.02) == 1.0
    assert orbit.roche_factor(1e100, 0.02) == 1.0
    assert orbit.roche_factor(1e-300, 0.02) == 0.02


def test_nothing_freezes_above_its_critical_point_and_everything_near_no_temperature() -> None:
    triple = (216.592, 517950.0, 304.128, 26100.0, 15300.0)
    with np.errstate(under="ignore"):
        pressures = frost.saturation_pressure(np.array([1e-3, 1.0, 216.592, 304.2, 1e6]), *triple)
    assert (pressures[:2] < 1e-200).all()
    assert pressures[2] == 517950.0
    assert np.isinf(pressures[3:]).all()
