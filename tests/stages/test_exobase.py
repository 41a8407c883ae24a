"""Exobase: which background a row has, where it freezes, and what is said of the upper air."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from handmade import make_batch
from keptair.batch import Batch
from keptair.settings import Settings
from keptair.stages import exobase, fill, irradiate

EARTH = {"planet_mass_mearth": 1.0, "planet_radius_rearth": 1.0, "bond_albedo": 0.0, "eccentricity": 0.0,
         "stellar_luminosity_lsun": 1.0, "stellar_mass_msun": 1.0, "stellar_age_gyr": 4.57}  # fmt: skip
WARM, COLD, COLDEST = {"semi_major_axis_au": 1.0}, {"semi_major_axis_au": 9.5}, {"semi_major_axis_au": 60.0}
PUFFY = {"planet_mass_mearth": 100.0, "planet_radius_rearth": 10.0}


def worked(*rows: dict[str, Any], **changed: Any) -> Batch:
    settings = Settings(draws=256, **changed)
    return exobase.run(irradiate.run(fill.run(make_batch(rows), settings), settings), settings)


def column(batch: Batch, name: str) -> list[Any]:
    return batch.columns[name].tolist()


def at(temperature: float) -> dict[str, float]:
    """The orbit on which a black planet of the Sun has this temperature."""
    return {"semi_major_axis_au": (278.32 / temperature) ** 2}


@pytest.mark.parametrize(
    ("row", "background", "secondary", "source"),
    [
        (WARM, "co2", "co2", "chosen"),
        (COLD, "n2_icy", "n2_icy", "chosen"),
        (WARM | {"background": "n2"}, "n2", "n2", "given"),
        (COLD | {"background": "co2"}, "co2", "co2", "given"),
        (WARM | {"background": "steam"}, "steam", "steam", "given"),
        (WARM | {"background": "h2"}, "h2", "co2", "given"),
        (COLD | {"background": "h2"}, "h2", "n2_icy", "given"),
        (WARM | PUFFY, "h2", "co2", "chosen"),
        (WARM | PUFFY | {"background": "n2"}, "h2", "n2", "chosen"),
        (WARM | PUFFY | {"background": "h2"}, "h2", "co2", "given"),
    ],
)
def test_a_row_has_its_own_background_else_carbon_dioxide_else_nitrogen_where_that_freezes(
    row: dict[str, Any], background: str, secondary: str, source: str
) -> None:
    batch = worked(EARTH | row)
    assert column(batch, "background") == [background]
    assert column(batch, "secondary_background") == [secondary]
    assert column(batch, "background_source") == [source]


def test_an_unassessed_row_has_no_background() -> None:
    batch = worked(WARM | EARTH, {"background": "n2"})
    for name in ("background", "secondary_background", "background_source"):
        assert column(batch, name)[1] == ""
    assert not any(batch.columns[f"worked.{key}"][1] for key in Settings().backgrounds)
    assert np.isnan(batch.columns["exobase_temperature_k"][1])


@pytest.mark.parametrize(
    ("temperature", "gas", "frozen"),
    [  # 10 Pa: CO2 at 124.4 K (Span & Wagner 1996), N2 at 41 K
        (122.0, "co2", True),
        (126.0, "co2", False),
        (39.5, "n2", True),
        (42.5, "n2", False),
        (600.0, "h2o", False),
        (150.0, "h2o", True),
        (10.0, "h2", False),
        (10.0, "he", False),
        (10.0, "o", False),
        (10.0, "ne", False),
    ],
)
def test_a_gas_is_frozen_below_ten_pascals_of_its_vapour(temperature: float, gas: str, frozen: bool) -> None:
    assert column(worked(EARTH | at(temperature)), f"frozen.{gas}") == [frozen]


def test_the_frost_pressure_is_a_setting() -> None:
    # CO2 over its ice at 124 K: 10 Pa; at 110 K 0.4 Pa by Clausius and Clapeyron with 26.1 kJ/mol
    row = EARTH | at(110.0)
    assert column(worked(row), "secondary_background") == ["n2_icy"]
    assert column(worked(row, frost_pressure_pa=0.1), "secondary_background") == ["co2"]


def test_a_background_whose_main_gas_is_frozen_is_marked_frozen_out() -> None:
    batch = worked(EARTH | COLDEST, EARTH | COLD | {"background": "co2"}, EARTH | WARM, EARTH | PUFFY | COLDEST)
    assert column(batch, "is.frozen") == [True, True, False, True]
    # the flag speaks of the published background, h2 for the last, which never freezes
    assert column(batch, "flag.frozen_out") == [True, True, False, False]


def listed(batch: Batch, planet: int) -> set[str]:
    return {key for key in Settings().backgrounds if batch.columns[f"listed.{key}"][planet]}


def test_gas_rows_are_of_the_backgrounds_in_use_and_of_the_rows_two() -> None:
    rows = [EARTH | WARM, EARTH | COLD, EARTH | WARM | {"background": "steam"}, EARTH | WARM | PUFFY, {}]
    batch = worked(*rows)
    assert [listed(batch, planet) for planet in range(5)] == [
        {"co2", "n2", "h2"},
        {"co2", "n2", "h2", "n2_icy"},
        {"co2", "n2", "h2", "steam"},
        {"co2", "n2", "h2"},
        set(),
    ]
    few = worked(*rows, use_backgrounds=["n2"])
    assert [listed(few, planet) for planet in range(5)] == [
        {"co2", "n2"},
        {"n2_icy", "n2"},
        {"steam", "n2"},
        {"co2", "h2", "n2"},
        set(),
    ]
    chosen = worked(*rows, gas_rows="chosen")
    assert [listed(chosen, planet) for planet in range(5)] == [{"co2"}, {"n2_icy"}, {"steam"}, {"h2"}, set()]
    assert not any(listed(worked(*rows, gas_rows="none"), planet) for planet in range(5))


def test_the_background_of_the_verdict_is_worked_out_whatever_is_listed() -> None:
    for gas_rows in ("all", "chosen", "none"):
        batch = worked(EARTH | WARM | PUFFY, gas_rows=gas_rows, use_backgrounds=["n2"])
        assert batch.columns["worked.co2"][0]
        assert batch.columns["worked.h2"][0]


def test_the_exobase_is_never_hotter_than_conduction_allows() -> None:
    batch = worked(EARTH | at(900.0), EARTH | WARM)
    assert (batch.draws["exobase_temperature.h2"][0] == 1e4).all()
    assert (batch.draws["conductive.h2"][0] > 1e4).all()
    assert column(batch, "flag.beyond_conduction")[1] is False
    cooler = worked(EARTH | WARM, conduction_limit_k=500)
    assert cooler.draws["exobase_temperature.n2"].max() == 500.0


def test_beyond_conduction_is_flagged_where_half_the_draws_are() -> None:
    temperatures = np.geomspace(60, 500, 12)
    batch = worked(*(EARTH | at(temperature) | {"background": "h2"} for temperature in temperatures))
    share = (batch.draws["conductive.h2"][:, 1:] > 1e4).mean(axis=1)
    assert column(batch, "flag.beyond_conduction") == (share >= 0.5).tolist()
    assert 0 < sum(column(batch, "flag.beyond_conduction")) < 12


def test_published_numbers_are_of_the_rows_background_and_the_draws_that_have_one() -> None:
    light_and_hot = EARTH | at(1500.0) | {"planet_mass_mearth": 0.2}
    batch = worked(EARTH | WARM | {"background": "n2"}, EARTH | WARM, light_and_hot)
    assert column(batch, "exobase_temperature_k")[0] == np.median(batch.draws["exobase_temperature.n2"][0, 1:])
    altitudes = (batch.draws["exobase_radius.co2"][1, 1:] - 6.3781e6) / 1e3
    assert column(batch, "exobase_altitude_km")[1] == pytest.approx(np.median(altitudes), rel=1e-9)
    speeds = np.sqrt(2 * 3.986004e14 / batch.draws["exobase_radius.co2"][1, 1:]) / 1e3
    assert column(batch, "exobase_escape_speed_km_s")[1] == pytest.approx(np.median(speeds), rel=1e-9)
    assert batch.columns["exobase_altitude_km_p16"][1] < batch.columns["exobase_altitude_km_p84"][1]
    assert column(batch, "flag.unbound") == [False, False, True]
    for name in ("exobase_altitude_km", "exobase_altitude_km_p84", "exobase_escape_speed_km_s"):
        assert np.isnan(batch.columns[name][2])
    assert column(batch, "exobase_temperature_k")[2] == 1e4


def test_unbound_draws_have_a_temperature_and_no_radius() -> None:
    batch = worked(EARTH | at(600.0) | {"planet_mass_mearth": 0.3, "planet_mass_mearth_err": 0.2})
    radius, temperature = (batch.draws[f"exobase_{name}.co2"][0] for name in ("radius", "temperature"))
    assert np.isnan(radius).any()
    assert not np.isnan(temperature).any()
    assert (radius[~np.isnan(radius)] <= 30 * 6.3781e6).all()
    assert (radius[~np.isnan(radius)] > 6.3781e6).all()


@pytest.mark.parametrize(
    ("radius", "none_asked", "extrapolated"),
    [(1.0, True, False), (3.0, False, False), (12.0, False, True)],
)
def test_the_hydrogen_share_of_rows_shown_under_hydrogen_is_flagged(
    radius: float, none_asked: bool, extrapolated: bool
) -> None:
    row = EARTH | WARM | {"planet_mass_mearth": 5.0, "planet_radius_rearth": radius}
    batch = worked(row | {"background": "h2"}, row | {"planet_mass_kind": "relation"})
    assert column(batch, "flag.no_hydrogen_asked") == [none_asked, False]
    assert column(batch, "flag.hydrogen_share_extrapolated")[0] == extrapolated


def test_a_radius_that_was_filled_asks_for_no_hydrogen_and_none_is_flagged() -> None:
    batch = worked(EARTH | WARM | {"planet_radius_kind": "relation", "background": "h2"})
    assert column(batch, "flag.no_hydrogen_asked") == [False]
