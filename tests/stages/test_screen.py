"""The screen: rows that cannot be used leave with a reason, bad cells become missing, nothing is lost."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest

from keptair.catalogue import open_catalogue
from keptair.settings import Settings
from keptair.stages import screen
from keptair.tables import schema

DIRTY = """planet_id,host_id,planet_radius_rearth,planet_radius_rearth_err_plus,planet_mass_mearth,planet_mass_kind,\
stellar_age_gyr,background,updated,note
Asha b,Asha,1.5,-0.1,4,minimum,4.5,n2,2024-01-01,x
Asha c,Asha,wide,0.1,1e9,measured,99,argon,01.02.24,y
,Asha,1,,,,,,,
Bron b,Bron,1,,,,,,2024-01-01,old
Bron b,Bron,1,,,,,,2025-01-01,new
Cato b,Cato,1
"""


@pytest.fixture
def dirty(tmp_path: Path) -> Path:
    path = tmp_path / "dirty.csv"
    path.write_text(DIRTY)
    return path


@pytest.fixture
def screened(dirty: Path) -> screen.Screened:
    catalogue = open_catalogue(dirty, {"file": {"carry": "note"}, "constants": {"bond_albedo": 0.3}})
    [batch] = catalogue.batches(100)
    return screen.run(batch, Settings())


def test_planets_that_stay_keep_their_rows_and_order(screened: screen.Screened) -> None:
    assert screened.batch.columns["row"].tolist() == [1, 2, 5]
    assert screened.batch.columns["planet_id"].tolist() == ["Asha b", "Asha c", "Bron b"]
    assert screened.batch.columns["input_note"].tolist() == ["x", "y", "new"]
    assert screened.batch.columns["given.bond_albedo"].tolist() == [True] * 3


def test_cells_that_break_a_rule_become_missing_and_are_counted(screened: screen.Screened) -> None:
    columns = screened.batch.columns
    np.testing.assert_array_equal(columns["catalogue.planet_radius_rearth"], [1.5, math.nan, 1.0])
    np.testing.assert_array_equal(columns["planet_radius_rearth_err_plus"], [0.1, math.nan, math.nan])
    assert columns["planet_radius_kind"].tolist() == ["measured", "", "measured"]
    assert columns["planet_mass_kind"].tolist() == ["minimum", "", ""]
    assert columns["catalogue.background"].tolist() == ["n2", "", ""]
    assert columns["updated"].tolist() == ["2024-01-01", "", "2025-01-01"]
    assert columns["flag.cell_emptied"].tolist() == [False, True, False]
    assert screened.emptied == {
        ("planet_radius_rearth", "number"): 1,
        ("planet_mass_mearth", "bounds"): 1,
        ("stellar_age_gyr", "bounds"): 1,
        ("background", "background"): 1,
        ("updated", "date"): 1,
    }


def test_rows_that_leave_have_one_line_for_each_broken_rule_in_file_order(screened: screen.Screened) -> None:
    rejects = screened.rejects
    assert list(rejects) == [column.name for column in schema.table("rejects", {})]
    assert rejects["row"].tolist() == [3, 4, 6]
    assert rejects["rule"].tolist() == ["identifier", "duplicate", "cells"]
    assert rejects["planet_id"].tolist() == ["", "Bron b", "Cato b"]
    assert rejects["value"].tolist() == ["", "Bron b", "3"]
    assert rejects["reason"][1] == "Row 5 has the same planet_id; it is newer or fuller, or comes first, and stays."


def test_the_screened_batch_has_what_the_stages_are_promised(screened: screen.Screened) -> None:
    expected = {"row", "fingerprint", "flag.cell_emptied", "catalogue.background", "input_note", "given.bond_albedo"}
    expected |= {column.name for column in schema.inputs() if column.type == "string"} - {"background"}
    for name in schema.measured_inputs():
        expected |= {f"catalogue.{name}", f"{name}_err_plus", f"{name}_err_minus", f"{name}_bound"}
    assert set(screened.batch.columns) == expected


def test_long_identifiers_are_shortened_in_the_rejects(tmp_path: Path) -> None:
    path = tmp_path / "long.csv"
    path.write_text(f"planet_id\n{'x' * 1_000_000}\n")
    [batch] = open_catalogue(path).batches(10)
    rejects = screen.run(batch, Settings()).rejects
    assert len(rejects["planet_id"][0]) == len(rejects["value"][0]) == 256
    assert rejects["reason"].tolist() == ["planet_id has 1000000 characters; 128 are allowed."]


@pytest.mark.parametrize("size", [1, 2, 5])
def test_batches_never_change_what_comes_of_a_row(dirty: Path, screened: screen.Screened, size: int) -> None:
    catalogue = open_catalogue(dirty, {"file": {"carry": "note"}, "constants": {"bond_albedo": 0.3}})
    parts = [screen.run(batch, Settings()) for batch in catalogue.batches(size)]
    for name, values in screened.batch.columns.items():
        joined = np.concatenate([part.batch.columns[name] for part in parts])
        np.testing.assert_array_equal(joined, values, err_msg=name)
    for name, values in screened.rejects.items():
        np.testing.assert_array_equal(np.concatenate([part.rejects[name] for part in parts]), values, err_msg=name)
