"""The schema's constraints as masks: what is emptied, what is set aside, and what is left alone."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from keptair.tables import rules, schema

NUMBERS = [column for column in schema.inputs() if column.type == "number"]


def read(size: int = 1, **columns: Any) -> dict[str, Any]:
    """What the catalogue gives for some rows, nothing but names unless told."""
    values: dict[str, Any] = {
        "row": np.arange(1, size + 1),
        "wrong_cells": np.zeros(size, dtype=np.int64),
        "duplicate_of": np.zeros(size, dtype=np.int64),
    }
    for column in schema.inputs():
        if column.type == "string":
            values[f"read.{column.name}"] = np.full(size, "", dtype=object)
        else:
            for suffix in ("", "_err_plus", "_err_minus"):
                values[f"read.{column.name}{suffix}"] = np.full(size, math.nan)
            values[f"read.{column.name}_bound"] = np.full(size, "", dtype=object)
    values["read.planet_id"] = np.array([f"p{row}" for row in range(size)], dtype=object)
    for name, given_values in columns.items():
        values[name] = np.array(given_values, dtype=object if isinstance(given_values[0], str) else None)
    return values


def of(name: str, **companions: Any) -> dict[str, Any]:
    return {f"read.{name}{'_' + key if key != 'value' else ''}": value for key, value in companions.items()}


@pytest.mark.parametrize("column", NUMBERS, ids=lambda column: column.name)
def test_bounds_are_inclusive_except_an_exclusive_minimum(column: schema.Column) -> None:
    low = column.minimum if column.minimum is not None else column.exclusive_minimum
    assert low is not None
    assert column.maximum is not None
    values = [low, column.maximum, np.nextafter(low, -math.inf), np.nextafter(column.maximum, math.inf), math.nan]
    found = rules.empty_broken_cells(read(5, **of(column.name, value=values)))
    kept = ~np.isnan(found.columns[f"catalogue.{column.name}"])
    assert kept.tolist() == [column.minimum is not None, True, False, False, False]
    [(key, mask)] = found.broken.items()
    assert key == (column.name, "bounds")
    assert mask.tolist() == [column.minimum is None, False, True, True, False]


@pytest.mark.parametrize("value", [math.inf, -math.inf])
def test_infinite_values_are_emptied_as_such(value: float) -> None:
    found = rules.empty_broken_cells(read(1, **of("k_mag", value=[value])))
    assert set(found.broken) == {("k_mag", "infinite")}
    assert np.isnan(found.columns["catalogue.k_mag"]).all()


def test_an_old_age_stays_if_its_lower_error_reaches_below_the_age_of_the_universe() -> None:
    ages = of(
        "stellar_age_gyr",
        value=[14.0, 14.0, 14.0, 20.0, 13.8],
        err_plus=[math.nan, 0.3, 0.1, 9.0, math.nan],
        err_minus=[0.2, math.nan, math.nan, 1.0, math.nan],
    )
    found = rules.empty_broken_cells(read(5, **ages))
    np.testing.assert_array_equal(found.columns["catalogue.stellar_age_gyr"], [14.0, 14.0, math.nan, math.nan, 13.8])


def test_an_emptied_value_leaves_no_error_limit_or_kind() -> None:
    mass = of("planet_mass_mearth", value=[1e9], err_plus=[1.0], err_minus=[1.0], bound=["upper"])
    found = rules.empty_broken_cells(read(1, **mass, **{"read.planet_mass_kind": ["minimum"]}))
    assert np.isnan(found.columns["planet_mass_mearth_err_plus"]).all()
    assert np.isnan(found.columns["planet_mass_mearth_err_minus"]).all()
    assert found.columns["planet_mass_mearth_bound"].tolist() == [""]
    assert found.columns["planet_mass_kind"].tolist() == [""]


def test_a_limit_or_kind_nobody_can_read_takes_its_value_with_it() -> None:
    mass = of("planet_mass_mearth", value=[5.0, 5.0], bound=["", "about"])
    found = rules.empty_broken_cells(read(2, **mass, **{"read.planet_mass_kind": ["guess", ""]}))
    assert np.isnan(found.columns["catalogue.planet_mass_mearth"]).all()
    assert {key: mask.tolist() for key, mask in found.broken.items()} == {
        ("planet_mass_kind", "word"): [True, False],
        ("planet_mass_mearth_bound", "word"): [False, True],
        ("planet_mass_mearth", "companion"): [True, True],
    }


def test_unreadable_numbers_are_counted_with_their_column() -> None:
    texts = {"unreadable.k_mag": ["", "faint"], "unreadable.k_mag_err_plus": ["x", ""]}
    found = rules.empty_broken_cells(read(2, **texts))
    assert {key: mask.tolist() for key, mask in found.broken.items()} == {
        ("k_mag", "number"): [False, True],
        ("k_mag_err_plus", "number"): [True, False],
    }


@pytest.mark.parametrize(
    ("column", "rule", "good", "bad"),
    [
        ("transits", "word", ["yes", "no", ""], ["Yes", "maybe"]),
        ("planet_radius_kind", "word", [""], ["minimum"]),
        ("host_id", "length", ["", "x" * 128], ["x" * 129]),
        ("updated", "date", ["2024-05-06", "2024-05-06T07:08:09Z", "2024-05", "2024", "20240506", ""], ["06/05/24"]),
        ("updated", "length", [""], ["2024-05-06" + " " * 30]),
        ("background", "background", ["co2", ""], ["argon"]),
        ("background", "length", [""], ["x" * 33]),
    ],
)
def test_texts_that_break_a_rule_are_emptied(column: str, rule: str, good: list[str], bad: list[str]) -> None:
    texts = [*good, *bad]
    found = rules.empty_broken_cells(read(len(texts), **{f"read.{column}": texts}), {"co2", "n2"})
    name = "catalogue.background" if column == "background" else column
    assert found.columns[name].tolist() == [*good, *[""] * len(bad)] if column != "planet_radius_kind" else True
    assert {key: mask.tolist() for key, mask in found.broken.items()} == {
        (column, rule): [False] * len(good) + [True] * len(bad)
    }


def test_row_rules_name_the_row_that_stays_and_the_cells_that_were_found() -> None:
    columns = read(
        5,
        **{
            "read.planet_id": ["a", "", "x" * 129, "a", "r"],
            "duplicate_of": [0, 0, 0, 1, 0],
            "wrong_cells": [0, 0, 0, 0, 7],
        },
    )
    found = {
        (broken.rule, int(row)): reason
        for broken in rules.broken_rows(columns)
        for row, reason in zip(broken.rows, broken.reasons, strict=True)
    }
    assert found == {
        ("identifier", 1): "There is no planet_id.",
        ("identifier", 2): "planet_id has 129 characters; 128 are allowed.",
        ("duplicate", 3): "Row 1 has the same planet_id; it is newer or fuller, or comes first, and stays.",
        ("cells", 4): "The row has 7 cells, not as many as the header.",
    }


def test_a_row_with_the_wrong_number_of_cells_breaks_that_rule_only() -> None:
    columns = read(1, **{"read.planet_id": [""], "duplicate_of": [0], "wrong_cells": [2]})
    assert [broken.rule for broken in rules.broken_rows(columns) if len(broken.rows)] == ["cells"]


@pytest.mark.parametrize(
    ("text", "seconds"),
    [
        ("1970-01-01", 0.0),
        ("1970-01-02T00:00:00", 86400.0),
        ("1970-01-01T01:00:00+01:00", 0.0),
        ("1971", 365 * 86400.0),
        ("1970-02", 31 * 86400.0),
        ("yesterday", None),
        ("1970-13", None),
    ],
)
def test_dates_become_seconds_since_1970(text: str, seconds: float | None) -> None:
    assert rules.timestamp(text) == seconds


@given(st.sampled_from(NUMBERS), st.lists(st.floats(), min_size=1, max_size=20))
def test_what_is_left_is_missing_or_within_bounds_and_is_left_alone_the_second_time(
    column: schema.Column, values: list[float]
) -> None:
    once = rules.empty_broken_cells(read(len(values), **of(column.name, value=values)))
    left = once.columns[f"catalogue.{column.name}"]
    assert rules.in_bounds(column, left).all()
    assert not np.isinf(left).any()
    untouched = ~np.isnan(left)
    np.testing.assert_array_equal(left[untouched], np.array(values)[untouched])
    assert not rules.empty_broken_cells(read(len(values), **of(column.name, value=left))).broken


@pytest.mark.parametrize(
    ("name", "value", "reason"),
    [
        ("bond_albedo", 0.3, ""),
        ("bond_albedo", 1, "out of bounds, from 0 to 0.99"),
        ("stellar_age_gyr", 0.0, "out of bounds, above 0 to 13.8 Gyr"),
        ("bond_albedo", "0.3", "a number is needed"),
        ("bond_albedo", math.nan, "not a finite number"),
        ("transits", "maybe", "a word that is not allowed, possible are yes, no"),
        ("transits", 1, "a text is needed"),
        ("host_id", "Sun", ""),
    ],
)
def test_a_single_value_gets_its_complaint(name: str, value: object, reason: str) -> None:
    assert rules.complaint(schema.catalogue()[name], value) == reason
