"""What `keptair check` says is what a run then does."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest

from keptair import stages
from keptair.catalogue import open_catalogue
from keptair.catalogue.checking import FILLED_BY, CheckReport, ColumnCheck, check
from keptair.settings import Settings
from keptair.stages import screen
from keptair.tables import schema

CATALOGUE = """planet_id,planet_radius_rearth,planet_mass_mearth,planet_mass_kind,planet_mass_mearth_bound,\
stellar_teff_k,stellar_teff_k_bound,transits
a,1,5,measured,,5000,,yes
b,bad,5,minimum,,5000,upper,no
c,2,5,relation,,,,maybe
d,1e9,5,measured,upper,5000,,
d,1,,,,,,
,1,,,,,,
e,1
f,,,,,,,
"""


@pytest.fixture
def path(tmp_path: Path) -> Path:
    target = tmp_path / "planets.csv"
    target.write_text(CATALOGUE)
    return target


@pytest.fixture
def report(path: Path) -> CheckReport:
    return check(path, {"rows": {"drop": {"planet_id": "f"}}}, Settings())


def column(report: CheckReport, name: str) -> ColumnCheck:
    return next(entry for entry in report.columns if entry.name == name)


def test_every_row_is_accounted_for(report: CheckReport) -> None:
    assert report.rows == {"read": 8, "filtered": 1, "set_aside": 3, "accepted": 4}
    assert {rule: (found.count, found.first_rows) for rule, found in report.set_aside.items()} == {
        "identifier": (1, [6]),
        "duplicate": (1, [5]),
        "cells": (1, [7]),
    }


def test_cells_are_counted_by_what_becomes_of_them(report: CheckReport) -> None:
    assert column(report, "planet_radius_rearth") == ColumnCheck(
        "planet_radius_rearth",
        ("planet_radius_rearth",),
        given=4,
        missing=0,
        in_bounds=2,
        emptied=2,
        measured=2,
        lacking=2,
        filled_by="relation",
    )
    mass = column(report, "planet_mass_mearth")
    assert (mass.measured, mass.minimum, mass.relation, mass.limits, mass.lacking) == (1, 1, 1, 1, 1)
    temperature = column(report, "stellar_teff_k")
    assert (temperature.given, temperature.limits, temperature.lacking, temperature.filled_by) == (3, 1, 2, "")
    assert column(report, "transits").emptied == 1
    assert {
        (name, rule): entry.first_rows for name, found in report.emptied.items() for rule, entry in found.items()
    } == {
        ("planet_radius_rearth", "number"): [2],
        ("planet_radius_rearth", "bounds"): [4],
        ("transits", "word"): [3],
    }


def test_the_columns_add_up(report: CheckReport) -> None:
    for entry in report.columns:
        assert entry.given + entry.missing == report.rows["accepted"]
        assert entry.in_bounds + entry.emptied == entry.given
        if entry.name in schema.measured_inputs():
            assert entry.measured + entry.limits + entry.minimum + entry.relation == entry.in_bounds


def test_the_report_is_json_and_fits_eighty_columns(report: CheckReport) -> None:
    assert json.loads(json.dumps(report.as_dict()))["rows"] == report.rows
    lines = report.lines()
    assert max(map(len, lines)) <= 80
    assert "8 rows read = 1 filtered + 3 set aside + 4 accepted" in lines
    assert "set aside, duplicate: 1 (row 5)" in lines
    assert "  planet_radius_rearth: out of bounds, 1 (row 4)" in lines


def test_a_run_empties_and_sets_aside_what_the_check_says(path: Path, report: CheckReport) -> None:
    [batch] = open_catalogue(path, {"rows": {"drop": {"planet_id": "f"}}}).batches(100)
    screened = screen.run(batch, Settings())
    assert len(screened.batch) == report.rows["accepted"]
    counts = {(name, rule): entry.count for name, found in report.emptied.items() for rule, entry in found.items()}
    assert screened.emptied == counts


def test_gaps_are_filled_in_the_way_it_is_announced(tmp_path: Path) -> None:
    path = tmp_path / "gaps.csv"
    path.write_text(
        "planet_id,planet_radius_rearth,planet_mass_mearth,orbital_period_d,stellar_teff_k,distance_pc\n"
        "no mass,1.1,,20,5000,10\nno radius,,1.1,20,5000,10\n"
    )
    [batch] = open_catalogue(path).batches(10)
    planets = stages.assess(
        screen.run(batch, Settings(draws=256, epochs=4)).batch, Settings(draws=256, epochs=4)
    ).planets
    found = {
        name: set(planets[f"{name}_source"].tolist()) - {"", "measured_no_error"} for name in schema.measured_inputs()
    }
    assert {name: words.pop() for name, words in found.items() if words} == FILLED_BY


def test_a_report_of_nothing_is_still_a_report(tmp_path: Path) -> None:
    path = tmp_path / "none.csv"
    path.write_text("planet_id\n")
    report = check(path, None, Settings())
    assert report.rows == {"read": 0, "filtered": 0, "set_aside": 0, "accepted": 0}
    assert np.all([entry.given == 0 for entry in report.columns])
    assert report.lines()
