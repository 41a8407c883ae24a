"""The column map: everything it can say, and everything it can say wrongly."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from keptair.batch import Batch
from keptair.catalogue import ColumnMap, open_catalogue
from keptair.errors import ColumnMapError

Write = Callable[[str | bytes], Path]


def read(path: Path, column_map: dict[str, Any]) -> Batch:
    [batch] = open_catalogue(path, {"columns": {"planet_id": {"from": 1}}, **column_map}).batches(1000)
    return batch


def columns(**entries: dict[str, Any]) -> dict[str, Any]:
    return {"columns": {"planet_id": {"from": 1}, **entries}}


def problems(path: Path, column_map: Any) -> list[str]:
    with pytest.raises(ColumnMapError) as failure:
        open_catalogue(path, column_map)
    assert failure.value.exit_code == 3
    return failure.value.problems


def test_the_first_column_that_has_a_value_is_taken(write_csv: Write) -> None:
    path = write_csv("id,name,koi,Rp,R2\n1,A b,,1,9\n2,,K1,,2\n3,,,bad,3\n4,-,K4,bad,\n")
    batch = read(path, columns(planet_id={"from": ["name", "koi"]}, planet_radius_rearth={"from": ["Rp", "R2"]}))
    assert batch.columns["read.planet_id"].tolist() == ["A b", "K1", "", "K4"]
    np.testing.assert_array_equal(batch.columns["read.planet_radius_rearth"], [1, 2, 3, np.nan])
    assert batch.columns["unreadable.planet_radius_rearth"].tolist() == ["", "", "", "bad"]


def test_units_missing_numbers_and_errors_of_any_sign(write_csv: Write) -> None:
    path = write_csv("id,age,up,down\na,9,0.1,-0.1\nb,-1,-1,-1\nc,10,0,inf\nd,9,-1,0.2\n")
    entry = {"from": "age", "unit": "dex(yr)", "plus": "up", "minus": "down", "missing": -1}
    batch = read(path, columns(stellar_age_gyr=entry))
    np.testing.assert_allclose(batch.columns["read.stellar_age_gyr"], [1, np.nan, 10, 1], rtol=1e-12)
    # 10^0.1 = 1.2589, 10^-0.1 = 0.7943, 10^-0.2 = 0.6310
    np.testing.assert_allclose(
        batch.columns["read.stellar_age_gyr_err_plus"], [0.2589, np.nan, np.nan, np.nan], atol=1e-4
    )
    np.testing.assert_allclose(
        batch.columns["read.stellar_age_gyr_err_minus"], [0.2057, np.nan, np.nan, 0.3690], atol=1e-4
    )


@pytest.mark.parametrize(
    ("word", "bound"),
    [
        ("1", "upper"),
        ("1.0", "upper"),
        ("-1", "lower"),
        ("0", ""),
        ("", ""),
        ("UPPER", "upper"),
        (">", "lower"),
        ("?", "?"),
    ],
)
def test_limits_are_flagged_by_numbers_or_words(write_csv: Write, word: str, bound: str) -> None:
    path = write_csv(f"id,Mp,lim\na,3,{word}\n")
    batch = read(path, columns(planet_mass_mearth={"from": "Mp", "bound": "lim"}))
    assert batch.columns["read.planet_mass_mearth_bound"].tolist() == [bound]


def test_limits_in_columns_of_their_own_stand_in_for_a_missing_value(write_csv: Write) -> None:
    path = write_csv("id,Mp,max,min\na,3,9,1\nb,,9,\nc,,,1\nd,,,\n")
    entry = {"from": "Mp", "upper": "max", "lower": "min", "unit": "Mjup"}
    batch = read(path, columns(planet_mass_mearth=entry))
    jupiter = 317.828  # nominal GM of Jupiter over that of Earth, IAU 2015 Resolution B3
    np.testing.assert_allclose(
        batch.columns["read.planet_mass_mearth"], np.array([3, 9, 1, np.nan]) * jupiter, rtol=1e-5
    )
    assert batch.columns["read.planet_mass_mearth_bound"].tolist() == ["", "upper", "lower", ""]


def test_kinds_come_from_words_a_star_or_the_lack_of_an_error(write_csv: Write) -> None:
    path = write_csv("id,Mp,prov,Rp,e\na,1,Msini,1,0.1\nb,2,Mass,1,\nc,3,,1,0\nd,,Msini,,\n")
    mass = {"from": "Mp", "kind": "prov", "kinds": {"Msini": "minimum", "*": "measured"}}
    radius = {"from": "Rp", "plus": "e", "without_error": "relation"}
    batch = read(path, columns(planet_mass_mearth=mass, planet_radius_rearth=radius))
    assert batch.columns["read.planet_mass_kind"].tolist() == ["minimum", "measured", "measured", ""]
    assert batch.columns["read.planet_radius_kind"].tolist() == ["measured", "relation", "relation", ""]


def test_words_and_dates_are_translated(write_csv: Write) -> None:
    path = write_csv("id,tr,when\na,1,24/12/31\nb,0.0,31.12.2024\nc,,\nd,maybe,24/01/02\n")
    batch = read(
        path,
        columns(
            transits={"from": "tr", "words": {"1": "yes", "0": "no", "*": ""}},
            updated={"from": "when", "date": "%y/%m/%d"},
        ),
    )
    assert batch.columns["read.transits"].tolist() == ["yes", "no", "", ""]
    assert batch.columns["read.updated"].tolist() == ["2024-12-31", "31.12.2024", "", "2024-01-02"]


def test_constants_are_given_and_marked(write_csv: Write) -> None:
    batch = read(write_csv("id\na\nb\n"), {"constants": {"bond_albedo": 0.3, "background": "n2"}})
    assert batch.columns["read.bond_albedo"].tolist() == [0.3, 0.3]
    assert batch.columns["given.bond_albedo"].tolist() == [True, True]
    assert batch.columns["read.background"].tolist() == ["n2", "n2"]


def test_rows_are_kept_where_every_line_matches_and_dropped_where_any_does(write_csv: Write) -> None:
    path = write_csv(
        "id,disposition,status,n\na,CONFIRMED,,1\nb,CANDIDATE,is retracted.,1\nc,FALSE,,1\n"
        "d,CONFIRMED,ok,2\ne,C*,,1.0\nf\n"
    )
    rows = {"keep": {"disposition": ["C?N*", "C?ND*", "C*"], "n": 1}, "drop": {"status": "*retracted*"}}
    catalogue = open_catalogue(path, {**columns(), "rows": rows})
    [batch] = catalogue.batches(100)
    assert batch.columns["read.planet_id"].tolist() == ["a", "e", "f"]
    assert (catalogue.rows_read, catalogue.rows_filtered) == (6, 3)


def test_a_wildcard_is_no_regular_expression(write_csv: Write) -> None:
    path = write_csv("id,s\na,x.y\nb,xzy\nc,[ab]\n")
    [batch] = open_catalogue(path, {**columns(), "rows": {"keep": {"s": ["x.y", "[ab]"]}}}).batches(9)
    assert batch.columns["read.planet_id"].tolist() == ["a", "c"]


def test_canonical_columns_a_map_does_not_speak_of_are_read_as_they_are(write_csv: Write) -> None:
    path = write_csv("planet_id,planet_radius_rearth,planet_radius_rearth_err_plus,P\na,1.5,0.1,3\n")
    [batch] = open_catalogue(path, {"columns": {"orbital_period_d": {"from": "P"}}}).batches(9)
    assert batch.columns["read.planet_radius_rearth_err_plus"].tolist() == [0.1]
    assert batch.columns["read.orbital_period_d"].tolist() == [3.0]


def test_all_mistakes_are_told_at_once_with_their_lines(write_csv: Write, tmp_path: Path) -> None:
    path = write_csv("name,R_planet,Mp,prov\na,1,1,Msini\nb,1,1,Msini\nc,1,1,Mass\n")
    column_map = tmp_path / "map.toml"
    column_map.write_text(
        '[columns.planet_id]\nfrom = "name"\n'
        '[columns.planet_radius_rearth]\nfrom = "Rplanet"\n'
        '[columns.planet_mass_mearth]\nfrom = "Mp"\nunit = "jupiterRad"\nkind = "prov"\n'
        '[columns.planet_mass_mearth.kinds]\nMass = "measured"\n'
        '[columns.host_id]\nfrom = "name"\n'
        "[columns.k_mag]\nfrom = 9\n"
        '[rows.keep]\nstatus = "ok"\n'
        '[file]\ncarry = ["R_plan"]\n'
    )
    assert problems(path, column_map) == [
        'line 4 [columns.planet_radius_rearth] from = "Rplanet": no such column; the file has "R_planet"',
        'line 7 [columns.planet_mass_mearth] unit = "jupiterRad": a length, but a mass is needed',
        "line 14 [columns.k_mag] from = 9: there is no such position; the file has 4 columns",
        'line 16 [rows.keep] status: no such column; the file has "name", "R_planet", "Mp", "prov"',
        'line 18 [file] carry = "R_plan": no such column; the file has "R_planet"',
        '[columns]: the column "name" is mapped to host_id and planet_id',
        'line 9 [columns.planet_mass_mearth.kinds]: the file also says "Msini" (2 rows); add it, or "*"',
    ]


def test_mistakes_that_need_no_file_are_told_with_those_that_do(write_csv: Write, tmp_path: Path) -> None:
    path = write_csv("planet_id,tr,Rp,k\na,1,1,x\n")
    column_map = tmp_path / "map.toml"
    column_map.write_text(
        '[columns.planet_radius]\nfrom = "Rp"\n'
        '[columns.transits]\nfrom = "tr"\nunit = "K"\n'
        '[columns.transits.words]\n1 = "ja"\n'
        '[columns.planet_radius_rearth]\nfrom = "Rp"\nkind = "k"\n'
        '[columns.planet_radius_rearth.kinds]\nx = "minimum"\n'
        '[columns.updated]\nfrom = "changed"\ndate = "%"\n'
        "[constants]\nbond_albedo = 2\nj_mag = true\nsize = 3\n"
    )
    assert problems(path, column_map) == [
        "line 1 [columns.planet_radius]: no such canonical column; planet_radius_rearth was meant?",
        "line 5 [columns.transits] unit: means nothing for transits; possible are from, missing, words",
        'line 7 [columns.transits.words] 1 = "ja": should be "", "yes", "no"',
        'line 12 [columns.planet_radius_rearth.kinds] x = "minimum": should be "measured", "relation"',
        'line 15 [columns.updated] date = "%": no pattern of dates; 24/12/31 is "%y/%m/%d"',
        "line 17 [constants] bond_albedo = 2: out of bounds, from 0 to 0.99",
        "line 18 [constants] j_mag = true: a number is needed",
        "line 19 [constants] size: no such canonical column",
        'line 14 [columns.updated] from = "changed": no such column; the file has "planet_id", "tr", "Rp", "k"',
    ]


@pytest.mark.parametrize(
    ("text", "reason"),
    [
        ("[columns.planet_id]\nform = 1\n", r"line 2 \[columns.planet_id\] form: no such key; from was meant"),
        ("[colums.planet_id]\nfrom = 1\n", r"line 1 \[colums\]: no such key; columns was meant"),
        ("[columns.planet_id]\nfrom = 1.5\n", r"line 2 \[columns.planet_id\] from = 1.5"),
        ("[columns.k_mag]\nwithout_error = 'x'\n", "should be 'measured' or 'relation'"),
        ("[columns\n", "is not TOML"),
    ],
)
def test_a_map_of_the_wrong_shape_says_where(tmp_path: Path, text: str, reason: str) -> None:
    column_map = tmp_path / "map.toml"
    column_map.write_text(text)
    with pytest.raises(ColumnMapError, match=reason):
        ColumnMap.read(column_map)


def test_a_map_that_is_not_there_is_one_sentence(tmp_path: Path) -> None:
    with pytest.raises(ColumnMapError, match="the column map cannot be read"):
        ColumnMap.read(tmp_path / "nowhere.toml")


def test_a_map_without_the_planet_says_so(write_csv: Write) -> None:
    path = write_csv("name,Rp\na,1\n")
    with pytest.raises(ColumnMapError, match="does not say which column names the planet"):
        open_catalogue(path, {"columns": {"planet_radius_rearth": {"from": "Rp"}}})


def test_a_thousand_unknown_words_are_not_all_printed(write_csv: Write) -> None:
    path = write_csv("id,Mp,prov\n" + "".join(f"p{n},1,w{n}\n" for n in range(1000)))
    entry = {"from": "Mp", "kind": "prov", "kinds": {"x": "measured"}}
    found = problems(path, columns(planet_mass_mearth=entry))
    assert len(found) == 9
    assert "and 992 more words; is it the right column?" in found[-1]


def test_an_unreadable_limit_beside_a_good_value_does_no_harm(write_csv: Write) -> None:
    path = write_csv("id,Mp,max\na,3,none yet\nb,,none yet\n")
    batch = read(path, columns(planet_mass_mearth={"from": "Mp", "upper": "max"}))
    assert batch.columns["unreadable.planet_mass_mearth"].tolist() == ["", "none yet"]
