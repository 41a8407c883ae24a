"""A planet's numbers depend on its own row, the settings and the code, and on nothing else."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from handmade import make_batch
from keptair import stages
from keptair.settings import Settings

QUICK = Settings(draws=256, epochs=4)
SUN = {"stellar_mass_msun": 1.0, "stellar_luminosity_lsun": 1.0, "stellar_age_gyr": 4.6, "stellar_age_gyr_err": 0.5}
DWARF = {"stellar_teff_k": 3300.0, "stellar_radius_rsun": 0.3, "stellar_mass_msun": 0.28, "stellar_mass_msun_err": 0.02,
         "j_mag": 9.0, "k_mag": 8.2, "host_id": "Aster"}  # fmt: skip
ROWS: list[dict[str, Any]] = [
    {"planet_id": "Aster b", "planet_radius_rearth": 1.1, "planet_radius_rearth_err": 0.1,
     "orbital_period_d": 5, **DWARF},
    {"planet_id": "Aster c", "planet_radius_rearth": 2.4, "planet_mass_mearth": 6, "planet_mass_mearth_err": 2.0,
     "orbital_period_d": 11, **DWARF},
    {"planet_id": "Boreal b", "planet_mass_mearth": 90, "planet_mass_kind": "minimum",
     "semi_major_axis_au": 1.2, **SUN},
    {"planet_id": "Cirro b", "planet_mass_mearth": 0.02, "planet_radius_rearth": 0.4, "semi_major_axis_au": 9.5, **SUN},
    {"planet_id": "Dune b", "planet_mass_mearth": 300, "planet_radius_rearth": 13, "semi_major_axis_au": 0.03, **SUN},
    {"planet_id": "Ember b", "planet_mass_mearth": 1, "planet_radius_rearth": 1, "semi_major_axis_au": 1,
     "background": "n2", **SUN},
    {"planet_id": "Frost b", "planet_mass_mearth": 0.0022, "planet_radius_rearth": 0.19,
     "semi_major_axis_au": 39, **SUN},
    {"planet_id": "Gale b"},
    {"planet_id": "Haze b", "planet_radius_rearth": 0.9, "insolation_earth": 50, "stellar_mass_msun": 0.6},
    {"planet_id": "Iris b", "planet_mass_mearth": 4, "planet_mass_mearth_bound": "upper", "planet_radius_rearth": 1.5,
     "orbital_period_d": 3, "eccentricity": 0.3, "eccentricity_err": 0.2, "background": "steam", **SUN},
    {"planet_id": "Joule b", "planet_radius_rearth": 11, "semi_major_axis_au": 0.5, "background": "h2", **SUN},
]  # fmt: skip


def planets_of(rows: list[dict[str, Any]], how: Settings = QUICK) -> dict[str, dict[str, Any]]:
    """Published columns by planet, and its lines of gases by background and gas."""
    found = stages.assess(make_batch(rows), how)
    answer = {}
    for place, name in enumerate(found.planets["planet_id"]):
        own = found.gases["planet_id"] == name
        keys = list(zip(found.gases["background"][own], found.gases["gas"][own], strict=True))
        lines = {
            (*key, column): values[own][line] for column, values in found.gases.items() for line, key in enumerate(keys)
        }
        columns = {column: values[place] for column, values in found.planets.items() if column != "row"}
        answer[str(name)] = {**columns, **lines}
    return answer


def assert_exactly_the_same(one: dict[str, Any], other: dict[str, Any]) -> None:
    """To the last bit; missing is the same as missing."""
    assert one.keys() == other.keys()
    missing = {name for name in one if one[name] != one[name] and other[name] != other[name]}
    assert not [name for name in one.keys() - missing if one[name] != other[name]]


@pytest.fixture(scope="module")
def together() -> dict[str, dict[str, Any]]:
    return planets_of(ROWS)


@pytest.mark.parametrize("row", ROWS, ids=lambda row: row["planet_id"])
def test_a_planet_alone_has_the_numbers_it_has_among_others(
    together: dict[str, dict[str, Any]], row: dict[str, Any]
) -> None:
    assert_exactly_the_same(planets_of([row])[row["planet_id"]], together[row["planet_id"]])


@given(order=st.permutations(range(len(ROWS))), cut=st.integers(1, len(ROWS)))
@settings(max_examples=12, deadline=None)
def test_neither_order_nor_batches_change_a_number(
    together: dict[str, dict[str, Any]], order: list[int], cut: int
) -> None:
    for chosen in (order[:cut], order[cut:]):
        if chosen:
            for name, found in planets_of([ROWS[place] for place in chosen]).items():
                assert_exactly_the_same(found, together[name])


def test_a_hundred_neighbours_change_nothing(together: dict[str, dict[str, Any]]) -> None:
    crowd = [{**row, "planet_id": f"{row['planet_id']} {copy}"} for copy in range(10) for row in ROWS]
    found = planets_of([*crowd[:37], *ROWS, *crowd[37:]])
    for row in ROWS:
        assert_exactly_the_same(found[row["planet_id"]], together[row["planet_id"]])


def test_which_gas_rows_are_asked_for_changes_no_number_of_the_planets(together: dict[str, dict[str, Any]]) -> None:
    for gas_rows in ("chosen", "none"):
        found = planets_of(ROWS, Settings(draws=256, epochs=4, gas_rows=gas_rows))
        for name, columns in found.items():
            assert_exactly_the_same(columns, {key: together[name][key] for key in columns})
            assert not [key for key in together[name] if isinstance(key, str) and key not in columns]


def test_another_seed_changes_the_draws_and_the_same_seed_does_not(together: dict[str, dict[str, Any]]) -> None:
    again, other = planets_of(ROWS), planets_of(ROWS, Settings(draws=256, epochs=4, seed=2))
    assert_exactly_the_same(again["Aster b"], together["Aster b"])
    assert other["Aster b"]["planet_mass_mearth"] != together["Aster b"]["planet_mass_mearth"]
    assert other["Aster b"]["planet_mass_mearth"] == pytest.approx(together["Aster b"]["planet_mass_mearth"], rel=0.05)


def test_a_stage_changes_nothing_that_was_there() -> None:
    batch = make_batch(ROWS)
    for stage in stages.STAGES.values():
        columns = {name: values.copy() for name, values in batch.columns.items()}
        made = {name: values.copy() for name, values in batch.draws.items()}
        after = stage(batch, QUICK)
        for name, values in columns.items():
            np.testing.assert_array_equal(after.columns[name], values)
        for name, values in made.items():
            np.testing.assert_array_equal(after.draws[name], values)
        batch = after
