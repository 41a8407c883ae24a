"""Retain: escape times and shares kept, of each background, of each trace, and of the row's own background."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from handmade import make_batch
from keptair.batch import Batch
from keptair.settings import Settings
from keptair.stages import escape, exobase, fill, irradiate, retain
from keptair.stages.gas_rows import gas_rows

EARTH = {"planet_mass_mearth": 1.0, "planet_radius_rearth": 1.0, "bond_albedo": 0.3, "eccentricity": 0.0,
         "semi_major_axis_au": 1.0, "stellar_luminosity_lsun": 1.0, "stellar_mass_msun": 1.0,
         "stellar_age_gyr": 4.57}  # fmt: skip
MARGINAL = EARTH | {"planet_mass_mearth": 0.35, "planet_radius_rearth": 0.75, "semi_major_axis_au": 0.8}
TINY = EARTH | {"planet_mass_mearth": 0.005, "planet_radius_rearth": 0.2, "semi_major_axis_au": 0.2}
GIGAYEAR = 3.15576e16


def settings_of(**changed: Any) -> Settings:
    return Settings.read(None, {"draws": 256, "epochs": 8} | changed)


def retained(*rows: dict[str, Any], **changed: Any) -> Batch:
    batch, settings = make_batch(rows), settings_of(**changed)
    for stage in (fill, irradiate, exobase, escape, retain):
        batch = stage.run(batch, settings)
    return batch


@pytest.fixture(scope="module")
def kept() -> Batch:
    return retained(EARTH | {"background": "n2"}, MARGINAL, TINY, {}, EARTH | {"semi_major_axis_au": 9.5})


@pytest.fixture(scope="module")
def lines(kept: Batch) -> dict[str, np.ndarray]:
    return gas_rows(kept, settings_of())


def line(lines: dict[str, np.ndarray], planet: int, background: str, gas: str) -> dict[str, Any]:
    found = (lines["planet_id"] == f"planet {planet}") & (lines["background"] == background) & (lines["gas"] == gas)
    assert found.sum() == 1
    return {name: values[found][0] for name, values in lines.items()}


def made(batch: Batch, name: str, planet: int) -> np.ndarray:
    return batch.draws[name][planet - 1, 1:]


@pytest.mark.parametrize(("planet", "background", "main"), [(1, "n2", "n2"), (2, "co2", "co2"), (3, "h2", "h2")])
def test_the_row_of_the_main_gas_is_the_background_itself(
    kept: Batch, lines: dict[str, np.ndarray], planet: int, background: str, main: str
) -> None:
    row, lost = line(lines, planet, background, main), made(kept, f"lost.{background}", planet)
    times = made(kept, f"held.{background}", planet) / made(kept, f"loss.{background}", planet) / GIGAYEAR
    assert row["is_background"] == 1
    assert row["mixing_ratio"] == 1.0
    assert row["diffusion_source"] == ""
    assert np.isnan(row["supply_flux_m2_s"])
    assert row["retention"] == np.mean(lost < 1)
    assert row["inventories_lost"] == pytest.approx(np.median(lost), rel=1e-9)
    low, middle, high = np.percentile(np.minimum(times, 1e30), [16, 50, 84])
    assert row["escape_time_p16_gyr"] == pytest.approx(low, rel=1e-9)
    assert row["escape_time_gyr"] == pytest.approx(middle, rel=1e-9)
    assert row["escape_time_p84_gyr"] == pytest.approx(high, rel=1e-9)
    assert row["held_now_share"] == np.mean(times > 4.57)
    area = 4 * np.pi * np.square(made(kept, "input.planet_radius_rearth", planet))
    assert row["loss_rate_kg_s"] == pytest.approx(np.median(made(kept, f"loss.{background}", planet) * area), rel=1e-9)


def test_the_background_moves_as_its_molecule(kept: Batch, lines: dict[str, np.ndarray]) -> None:
    """And its flux is that of the key escaper, N."""
    row, temperature = line(lines, 1, "n2", "n2"), made(kept, "exobase_temperature.n2", 1)
    weight = 28.014 * 1.66053906660e-27
    jeans = 3.986004e14 * weight / (1.380649e-23 * temperature * made(kept, "exobase_radius.n2", 1))
    assert row["jeans_parameter"] == pytest.approx(np.median(jeans), rel=1e-9)
    assert row["speed_ratio"] == pytest.approx(np.median(np.sqrt(jeans / 1.5)), rel=1e-9)
    assert row["rms_speed_m_s"] == pytest.approx(np.median(np.sqrt(3 * 1.380649e-23 * temperature / weight)), rel=1e-9)
    assert row["jeans_flux_m2_s"] == pytest.approx(np.median(made(kept, "key_flux.n2", 1)), rel=1e-9)


def test_every_other_row_is_a_trace_even_that_of_the_key_escaper(kept: Batch, lines: dict[str, np.ndarray]) -> None:
    for gas in ("n", "h", "ar"):
        row = line(lines, 1, "n2", gas)
        assert row["is_background"] == 0
        assert row["mixing_ratio"] == 1e-6
        assert row["retention"] == np.mean(made(kept, f"lost.n2.{gas}", 1) < 1)
        times = made(kept, "particles.n2", 1) / np.maximum(made(kept, f"loss.n2.{gas}", 1), 1e-200) / GIGAYEAR
        assert row["escape_time_gyr"] == pytest.approx(min(np.median(times), 1e30), rel=1e-9)
        flux = np.median(made(kept, f"jeans_flux.n2.{gas}", 1)) * 1e-6
        assert row["jeans_flux_m2_s"] == pytest.approx(flux, rel=1e-9)


def test_supply_is_given_for_gases_lighter_than_the_air_and_where_its_coefficient_is_from(
    lines: dict[str, np.ndarray],
) -> None:
    supplied = {gas: not np.isnan(line(lines, 1, "n2", gas)["supply_flux_m2_s"]) for gas in Settings().gases}
    lighter = {"h", "h2", "he", "ch4", "nh3", "h2o", "ne", "n", "co", "o"}
    assert {gas for gas, given in supplied.items() if given} == lighter
    table = {gas for gas in Settings().gases if line(lines, 1, "n2", gas)["diffusion_source"] == "table"}
    # the pairs of the CRC Handbook and of Banks & Kockarts with air, and CH4 with N2
    assert table == {"h", "h2", "he", "ch4", "co", "ar", "h2o", "co2"}
    assert line(lines, 1, "h2", "n2")["diffusion_source"] == "table"
    assert line(lines, 1, "n2", "so2")["diffusion_source"] == "hard_sphere"


def test_fluxes_of_traces_scale_with_their_mixing_ratio_and_nothing_else_does() -> None:
    scarce, plenty = (
        gas_rows(retained(EARTH, **changed), settings_of(**changed)) for changed in ({}, {"trace_mixing_ratio": 1e-3})
    )
    traces = scarce["is_background"] == 0
    for name in ("jeans_flux_m2_s", "supply_flux_m2_s", "loss_rate_kg_s", "mixing_ratio"):
        np.testing.assert_allclose(plenty[name][traces], 1e3 * scarce[name][traces], rtol=1e-9)
        np.testing.assert_array_equal(plenty[name][~traces], scarce[name][~traces])
    for name in ("retention", "escape_time_gyr", "inventories_lost", "jeans_parameter"):
        np.testing.assert_array_equal(plenty[name], scarce[name])


def test_lines_stand_planet_by_planet_background_by_background_and_none_for_the_unassessed(
    lines: dict[str, np.ndarray],
) -> None:
    seen = list(dict.fromkeys(zip(lines["planet_id"], lines["background"], strict=True)))
    order = [key for key in Settings().backgrounds if key in ("co2", "n2", "n2_icy", "h2")]
    usual = [key for key in order if key != "n2_icy"]
    expected = [(f"planet {planet}", key) for planet in (1, 2, 3) for key in usual]
    assert seen == expected + [("planet 5", key) for key in order]
    assert list(lines["gas"][: len(Settings().gases)]) == list(Settings().gases)
    assert len({len(values) for values in lines.values()}) == 1


def test_a_frozen_gas_is_marked_and_keeps_its_retention(lines: dict[str, np.ndarray]) -> None:
    assert line(lines, 5, "n2_icy", "co2")["frozen_out"] == 1
    assert line(lines, 5, "n2_icy", "n2")["frozen_out"] == 0
    assert line(lines, 5, "co2", "co2")["frozen_out"] == 1
    assert line(lines, 5, "co2", "co2")["retention"] > 0.9


def test_plain_columns_are_of_the_rows_published_background(kept: Batch, lines: dict[str, np.ndarray]) -> None:
    for planet, background in ((1, "n2"), (2, "co2"), (3, "co2"), (5, "n2_icy")):
        for gas in Settings().gases:
            row = line(lines, planet, background, gas)
            for ours, theirs in (
                (f"retention_{gas}", "retention"),
                (f"escape_time_{gas}_gyr", "escape_time_gyr"),
                (f"jeans_parameter_{gas}", "jeans_parameter"),
                (f"speed_ratio_{gas}", "speed_ratio"),
            ):
                np.testing.assert_equal(kept.columns[ours][planet - 1], row[theirs])


def test_regime_is_the_commoner_of_the_two_now(kept: Batch) -> None:
    assert kept.columns["regime"].tolist() == ["evaporation", "evaporation", "outflow", "", "evaporation"]
    shares = kept.columns["outflow_share"]
    assert shares[2] > 0.9
    assert np.isnan(shares[3])
    assert shares[0] == np.mean(made(kept, "outflow.n2", 1) == 1)


def test_a_tie_of_regimes_is_an_outflow() -> None:
    masses = np.geomspace(0.002, 0.05, 40)
    rows = [EARTH | {"planet_mass_mearth": mass, "planet_radius_rearth": mass**0.28} for mass in masses]
    batch = retained(*rows)
    share = batch.columns["outflow_share"]
    assert ((batch.columns["regime"] == "outflow") == (share >= 0.5)).all()
    assert 0 < np.count_nonzero(share >= 0.5) < 40


def test_unbound_rows_have_times_and_no_jeans_parameter(kept: Batch, lines: dict[str, np.ndarray]) -> None:
    row = line(lines, 3, "co2", "h")
    assert np.isnan(row["jeans_parameter"])
    assert np.isnan(row["jeans_flux_m2_s"])
    assert row["escape_time_gyr"] < 1
    assert row["limited_by"] == "energy"
    assert np.isnan(kept.columns["jeans_parameter_h"][2])


def test_no_loss_takes_the_longest_time_there_is(lines: dict[str, np.ndarray]) -> None:
    row = line(lines, 5, "co2", "so2")
    assert [row["escape_time_gyr"], row["escape_time_p84_gyr"]] == pytest.approx([1e30, 1e30], rel=1e-12)
    assert row["retention"] == row["held_now_share"] == 1.0


def test_hard_spheres_are_flagged_where_they_limit_a_gas_of_the_published_background(kept: Batch) -> None:
    """In an outflow every gas needs its coefficient; on a calm and cold planet nothing waits for diffusion."""
    flagged = kept.columns["flag.hard_sphere_diffusion"]
    assert flagged[2]
    assert not flagged[3:].any()


def test_the_order_of_gas_rows_setting_changes_what_is_listed() -> None:
    settings = settings_of(gas_rows="chosen")
    batch = retained(EARTH, EARTH | {"background": "n2"}, gas_rows="chosen")
    rows = gas_rows(batch, settings)
    assert set(zip(rows["planet_id"], rows["background"], strict=True)) == {("planet 1", "co2"), ("planet 2", "n2")}
    none = gas_rows(retained(EARTH, gas_rows="none"), settings_of(gas_rows="none"))
    assert all(len(values) == 0 for values in none.values())
    empty = gas_rows(retained({}), settings_of())
    assert all(len(values) == 0 for values in empty.values())
