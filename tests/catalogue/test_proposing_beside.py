"""Errors, limits, kinds, words and dates beside the numbers are found by names, and believed by values."""

from __future__ import annotations

import csv
import tomllib
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from keptair.catalogue import open_catalogue
from keptair.catalogue.proposing import Proposal, propose
from keptair.tables import schema

ROWS = 20
PLANETS = [f"Zor {row // 2 + 1} {'bc'[row % 2]}" for row in range(ROWS)]
RADII = [0.8 + row * 0.9 for row in range(ROWS)]
SMALL = [0.1 + row * 0.01 for row in range(ROWS)]
Table = dict[str, Sequence[object]]


def proposed(folder: Path, table: Table) -> Proposal:
    path = folder / "table.csv"
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(["planet", *table])
        writer.writerows(zip(PLANETS, *table.values(), strict=True))
    proposal = propose(path)
    open_catalogue(path, tomllib.loads(proposal.toml))  # every proposal fits its file
    return proposal


def entry(proposal: Proposal, name: str) -> dict[str, Any]:
    found: dict[str, Any] = tomllib.loads(proposal.toml)["columns"].get(name, {})
    return found


def radius_entry(folder: Path, table: Table) -> dict[str, Any]:
    found = entry(proposed(folder, {"rp_earth": RADII, **table}), "planet_radius_rearth")
    return {key: value for key, value in found.items() if key not in ("from", "unit")}


@pytest.mark.parametrize(
    ("plus", "minus"),
    [
        ("rp_earth_err1", "rp_earth_err2"),
        ("rp_earth_err_plus", "rp_earth_err_minus"),
        ("rp_earth_errp", "rp_earth_errm"),
        ("rp_earth_error_max", "rp_earth_error_min"),
        ("rp_earth_uerr", "rp_earth_lerr"),
        ("rp_earth_upper_error", "rp_earth_lower_error"),
        ("rp_earth_up", "rp_earth_dn"),
        ("rp_earth_hi", "rp_earth_lo"),
        ("rp_err_hi_earth", "rp_err_lo_earth"),
        ("rp_err_hi", "rp_err_lo"),
        ("E_rp_earth", "e_rp_earth"),
        ("rp_earth_err+", "rp_earth_err-"),
        ("RpEarthErrUp", "RpEarthErrDown"),
        ("sigma_plus_rp_earth", "sigma_minus_rp_earth"),
    ],
)
def test_both_errors_are_found_whatever_they_are_called(plus: str, minus: str, tmp_path: Path) -> None:
    assert radius_entry(tmp_path, {plus: SMALL, minus: SMALL}) == {"plus": plus, "minus": minus}


@pytest.mark.parametrize(
    "name", ["rp_earth_err", "e_rp_earth", "rp_earth_unc", "sigma_rp_earth", "rp_err", "err_rp_earth"]
)
def test_one_error_for_both_sides_is_found(name: str, tmp_path: Path) -> None:
    assert radius_entry(tmp_path, {name: SMALL}) == {"plus": name}


def test_numbered_errors_are_told_apart_by_their_signs(tmp_path: Path) -> None:
    table = {"rp_earth_err1": [-value for value in SMALL], "rp_earth_err2": SMALL}
    assert radius_entry(tmp_path, table) == {"plus": "rp_earth_err2", "minus": "rp_earth_err1"}


@pytest.mark.parametrize(
    ("name", "cells"),
    [
        ("rp_earth_lim", [0, 1, -1, 0] * 5),
        ("rp_earth_limit_flag", ["", "upper", "", ""] * 5),
        ("rp_earth_upper_limit", [0, 1, 0, 0] * 5),
        ("l_rp_earth", ["", "<", "", ">"] * 5),
    ],
)
def test_flags_of_limits_are_found(name: str, cells: Sequence[object], tmp_path: Path) -> None:
    assert radius_entry(tmp_path, {name: cells}) == {"bound": name}


def test_limits_in_columns_of_their_own_are_found(tmp_path: Path) -> None:
    gaps = [value if row % 4 else "" for row, value in enumerate(RADII)]
    upper = ["" if row % 4 else 2.5 for row in range(ROWS)]
    table = {"rp_earth": gaps, "rp_earth_upperlimit": upper}
    assert radius_entry(tmp_path, table) == {"upper": "rp_earth_upperlimit"}
    assert radius_entry(tmp_path, {"rp_earth": gaps, "rp_earth_max": upper}) == {"upper": "rp_earth_max"}


def test_the_end_of_an_interval_is_no_error(tmp_path: Path) -> None:
    table = {"rp_earth_hi": [1.1 * value for value in RADII], "rp_earth_lo": [0.9 * value for value in RADII]}
    proposal = proposed(tmp_path, {"rp_earth": RADII, **table})
    assert not {"plus", "minus"} & entry(proposal, "planet_radius_rearth").keys()
    assert '"rp_earth_hi" looks like the end of an interval' in " ".join(proposal.toml.replace("#", "").split())


def test_a_flag_that_would_be_read_the_wrong_way_is_only_spoken_of(tmp_path: Path) -> None:
    proposal = proposed(tmp_path, {"rp_earth": RADII, "rp_earth_lowerlimit": [0, 1] * 10, "rp_earth_lim": [7, 8] * 10})
    assert not {"bound", "lower", "upper"} & entry(proposal, "planet_radius_rearth").keys()
    [guess] = [guess for guess in proposal.guesses if guess.name == "planet_radius_rearth"]
    assert len(guess.remarks) == 2


@pytest.mark.parametrize("name", ["mp_type", "mp_prov", "mp_from", "mp_kind", "mp_source", "which"])
def test_kinds_of_masses_are_read_from_their_words(name: str, tmp_path: Path) -> None:
    words = ["true mass", "M sin i", "from M-R relation", "Msin(i)/sin(i)"]
    found = entry(proposed(tmp_path, {"mp_earth": RADII, name: words * 5}), "planet_mass_mearth")
    assert found["kind"] == name
    assert found["kinds"] == {
        "true mass": "measured",
        "M sin i": "minimum",
        "from M-R relation": "relation",
        "Msin(i)/sin(i)": "measured",
    }


def test_a_word_nobody_knows_is_taken_as_measured_and_said_to_be(tmp_path: Path) -> None:
    proposal = proposed(tmp_path, {"mp_earth": RADII, "mp_type": ["msini", "oracle"] * 10})
    assert entry(proposal, "planet_mass_mearth")["kinds"]["oracle"] == "measured"
    assert '# taken as measured, check: "oracle"' in proposal.toml


def test_masses_that_all_are_m_sin_i_are_called_so(tmp_path: Path) -> None:
    proposal = proposed(tmp_path, {"msini_earth": RADII})
    assert entry(proposal, "planet_mass_mearth")["from"] == "msini_earth"
    assert tomllib.loads(proposal.toml)["constants"] == {"planet_mass_kind": "minimum"}


def test_m_sin_i_in_a_column_of_its_own_is_a_lower_limit_where_there_is_no_mass(tmp_path: Path) -> None:
    gaps = ["" if row % 2 else value for row, value in enumerate(RADII)]
    proposal = proposed(tmp_path, {"mass_earth": gaps, "mass_sini_earth": RADII})
    assert entry(proposal, "planet_mass_mearth")["lower"] == "mass_sini_earth"
    assert "constants" not in tomllib.loads(proposal.toml)


def test_radii_without_error_of_planets_that_never_transit_are_from_a_relation(tmp_path: Path) -> None:
    method = ["transit" if row % 2 else "radial velocity" for row in range(ROWS)]
    error = [0.1 if row % 2 else "" for row in range(ROWS)]
    table = {"rp_earth": RADII, "rp_earth_err": error, "method": method}
    assert entry(proposed(tmp_path, table), "planet_radius_rearth")["without_error"] == "relation"
    table["method"] = ["transit"] * ROWS
    assert "without_error" not in entry(proposed(tmp_path, table), "planet_radius_rearth")


@pytest.mark.parametrize(
    ("name", "cells", "words"),
    [
        ("tr", ["1", "0", "?", "1"], {"1": "yes", "0": "no", "*": ""}),
        ("is_transiting", ["1.0", "0.0", "", "1.0"], {"1": "yes", "0": "no"}),
        ("transitFlag", ["True", "False"] * 2, {"True": "yes", "False": "no"}),
        ("transit", ["Y", "N"] * 2, {"Y": "yes", "N": "no"}),
        ("transits", ["yes", "no", "", "yes"], None),
        ("detection_method", ["Primary Transit", "Imaging"] * 2, {"Primary Transit": "yes", "*": ""}),
    ],
)
def test_transits_are_read_from_flags_and_methods(
    name: str, cells: list[str], words: dict[str, str] | None, tmp_path: Path
) -> None:
    found = entry(proposed(tmp_path, {name: cells * 5}), "transits")
    assert (found["from"], found.get("words")) == (name, words)


def test_times_and_depths_of_transits_are_not_taken_for_transits(tmp_path: Path) -> None:
    table = {"transit_depth": [0, 1] * 10, "transit_epoch": RADII, "ttv_flag": [0, 1] * 10}
    assert not entry(proposed(tmp_path, table), "transits")


@pytest.mark.parametrize(
    ("first", "second", "pattern"),
    [
        ("2024-03-30", "2023-11-02", None),
        ("2024-03-30 10:00:00", "2023-11-02 23:10:00", None),
        ("30.03.2024", "02.11.2023", "%d.%m.%Y"),
        ("03/30/2024", "11/02/2023", "%m/%d/%Y"),
        ("16/05/10", "98/02/26", "%y/%m/%d"),
        ("30 Mar 2024", "2 Nov 2023", "%d %b %Y"),
        ("20240330", "20231102", "%Y%m%d"),
    ],
)
def test_the_date_of_change_is_found_as_it_is_written(
    first: str, second: str, pattern: str | None, tmp_path: Path
) -> None:
    found = entry(proposed(tmp_path, {"last_update": [first, second] * 10}), "updated")
    assert (found["from"], found.get("date")) == ("last_update", pattern)


def test_a_date_that_may_be_read_two_ways_is_asked_about(tmp_path: Path) -> None:
    proposal = proposed(tmp_path, {"last_update": ["03/04/2021", "05/06/2022"] * 10})
    [question] = [question for question in proposal.questions if question.name == "updated"]
    assert '"%d/%m/%Y" or "%m/%d/%Y"' in question.text


def test_backgrounds_are_known_by_their_names(tmp_path: Path) -> None:
    assert entry(proposed(tmp_path, {"air": ["co2", "h2", "", "n2"] * 5}), "background") == {"from": "air"}
    assert not entry(proposed(tmp_path, {"air": ["thick", "thin"] * 10}), "background")


def test_a_second_column_of_names_fills_the_gaps_of_the_first(tmp_path: Path) -> None:
    path = tmp_path / "table.csv"
    named = "\n".join(f"Zor {row} b," if row % 3 else f",K{row:05d}.01" for row in range(ROWS))
    path.write_text(f"name,candidate\n{named}\n")
    assert entry(propose(path), "planet_id") == {"from": ["name", "candidate"]}


def test_the_star_is_not_taken_for_the_planet(tmp_path: Path) -> None:
    stars = [name[:-2] for name in PLANETS]
    proposal = proposed(tmp_path, {"host_name": stars, "system": stars})
    assert entry(proposal, "planet_id") == {"from": "planet"}
    assert entry(proposal, "host_id") == {"from": "host_name"}


def test_rows_one_may_want_to_leave_out_are_named_but_stay(tmp_path: Path) -> None:
    proposal = proposed(tmp_path, {"disposition": ["CONFIRMED", "FALSE POSITIVE"] * 10})
    assert '# [rows.drop]\n# "disposition" = ["FALSE POSITIVE"]' in proposal.toml
    assert "rows" not in tomllib.loads(proposal.toml)


def test_of_several_rows_for_a_planet_the_flagged_ones_are_pointed_at(tmp_path: Path) -> None:
    path = tmp_path / "table.csv"
    path.write_text("planet,default_flag\n" + "".join(f"Zor {row // 3} b,{int(row % 3 == 0)}\n" for row in range(30)))
    assert '# [rows.keep]\n# "default_flag" = ["1"]' in propose(path).toml


def test_canonical_names_map_to_themselves(tmp_path: Path) -> None:
    rows = [1.0 + row for row in range(ROWS)]
    texts = {"background": "co2", "transits": "yes", "updated": "2024-01-02", "planet_radius_kind": "measured"}
    table = {
        column.name: [texts.get(column.name, "")] * ROWS if column.type == "string" else rows
        for column in schema.catalogue()
        if column.name != "planet_id"
    }
    path = tmp_path / "table.csv"
    with path.open("w", newline="") as file:
        csv.writer(file).writerows([["planet_id", *table], *zip(PLANETS, *table.values(), strict=True)])
    proposal = propose(path)
    assert {guess.name: guess.sources for guess in proposal.guesses} == {
        column.name: (column.name,) for column in schema.inputs()
    }
    assert {guess.confidence for guess in proposal.guesses} == {"high"}
    for name in schema.measured_inputs():
        found = entry(proposal, name)
        companions = {"plus": f"{name}_err_plus", "minus": f"{name}_err_minus", "bound": f"{name}_bound"}
        assert {key: found[key] for key in companions} == companions
    [with_map], [without] = (
        list(open_catalogue(path, column_map).batches(100)) for column_map in (tomllib.loads(proposal.toml), None)
    )
    for name in without.columns:
        np.testing.assert_array_equal(with_map.columns[name], without.columns[name])
