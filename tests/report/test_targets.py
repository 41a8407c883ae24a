"""Which planets come first, and how the list is written."""

from __future__ import annotations

import csv
import io
import json
import unicodedata
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from keptair.errors import NotThereError, UsageError
from keptair.report import targets

Maker = Callable[..., Path]
Planet = Callable[..., dict[str, Any]]


def names(folder: Path, *arguments: Any, **options: Any) -> list[str]:
    listed: list[str] = targets.select(folder, *arguments, **options)["planet_id"].to_pylist()
    return listed


def test_the_strongest_come_first_and_those_without_a_value_last(run_folder: Maker, a_planet: Planet) -> None:
    folder = run_folder([a_planet("none"), a_planet("low", priority=0.5), a_planet("high", priority=2.0)])
    assert names(folder) == ["high", "low", "none"]


def test_equals_are_in_the_order_of_their_names(run_folder: Maker, a_planet: Planet) -> None:
    folder = run_folder([a_planet("c", priority=1.0), a_planet("a", priority=1.0), a_planet("b", priority=1.0)])
    assert names(folder) == ["a", "b", "c"]


@pytest.mark.parametrize("sort", ["tsm", "esm"])
def test_each_metric_can_put_them_in_order(run_folder: Maker, a_planet: Planet, sort: str) -> None:
    folder = run_folder([a_planet("second", **{sort: 1.0, "priority": 9.0}), a_planet("first", **{sort: 2.0})])
    assert names(folder, sort=sort) == ["first", "second"]


def test_decisive_shares_are_told_apart_by_one_digit_only(run_folder: Maker, a_planet: Planet) -> None:
    folder = run_folder(
        [a_planet("b", decisive_share=0.44), a_planet("c", decisive_share=0.61), a_planet("a", decisive_share=0.41)]
    )
    table = targets.select(folder, sort="decisive")
    assert table["planet_id"].to_pylist() == ["c", "a", "b"]
    assert table["decisive_share"].to_pylist() == pytest.approx([0.6, 0.4, 0.4])


def test_only_the_verdicts_asked_for_are_listed(run_folder: Maker, a_planet: Planet) -> None:
    folder = run_folder([a_planet("air", "secondary"), a_planet("rock", "bare"), a_planet("haze", "undecided")])
    assert names(folder, ["bare", "undecided"]) == ["haze", "rock"]


def test_the_list_ends_where_it_is_told_to_or_with_the_last_planet(run_folder: Maker, a_planet: Planet) -> None:
    folder = run_folder([a_planet(f"planet {number:02}") for number in range(30)])
    assert len(names(folder)) == 20
    assert len(names(folder, top=3)) == 3
    assert len(names(folder, top=None)) == 30


def test_a_list_has_the_promised_columns(run_folder: Maker) -> None:
    promised = (
        "planet_id verdict verdict_reason air_probability priority tsm esm equilibrium_temperature_k "
        "planet_radius_rearth planet_radius_rearth_source distance_pc decisive_input decisive_share flag_names"
    )
    assert targets.select(run_folder()).column_names == promised.split()


def test_everything_wrong_with_a_request_is_said_at_once(run_folder: Maker) -> None:
    with pytest.raises(UsageError) as caught:
        targets.select(run_folder(), verdicts=["airy"], top=0, sort="beauty")
    assert [problem.split(":")[0] for problem in caught.value.problems] == [
        "verdict 'airy'",
        "sort 'beauty'",
        "top 0",
    ]


def test_a_folder_that_is_no_run_is_named(tmp_path: Path) -> None:
    with pytest.raises(NotThereError, match=r"planets\.parquet"):
        targets.select(tmp_path)


def test_csv_cells_are_no_formulas_and_numbers_are_as_short_as_they_are_exact(
    run_folder: Maker, a_planet: Planet
) -> None:
    folder = run_folder([a_planet(name, air_probability=0.3) for name in ("=1+1", "+1", "-1", "@x", 'a "b", c')])
    rows = list(csv.DictReader(io.StringIO(targets.as_csv(targets.select(folder)))))
    assert [row["planet_id"] for row in rows] == ["'+1", "'-1", "'=1+1", "'@x", 'a "b", c']
    assert {row["air_probability"] for row in rows} == {"0.3"}
    assert {row["priority"] for row in rows} == {""}


def test_json_has_null_where_a_number_is_missing(run_folder: Maker, a_planet: Planet) -> None:
    folder = run_folder([a_planet("Ñandú b", air_probability=0.3)])
    text = targets.as_json(targets.select(folder))
    assert "Ñandú b" in text
    (row,) = json.loads(text)
    assert row["priority"] is None
    assert row["air_probability"] == 0.3
    assert list(row) == list(targets.COLUMNS)


def test_a_votable_opens_in_astropy_with_units_and_gaps(run_folder: Maker, a_planet: Planet) -> None:
    from astropy.table import Table

    folder = run_folder([a_planet("a <b> & c\x07", distance_pc=12.5, priority=1.0), a_planet("d")])
    table = Table.read(io.BytesIO(targets.as_votable(targets.select(folder)).encode()), format="votable")
    assert list(table["planet_id"]) == ["a <b> & c\ufffd", "d"]
    assert str(table["distance_pc"].unit) == "pc"
    assert table["distance_pc"][0] == 12.5
    assert table["distance_pc"].mask.tolist() == [False, True]
    assert table.colnames == list(targets.COLUMNS)


def test_a_votable_of_no_planets_opens_too(run_folder: Maker) -> None:
    from astropy.table import Table

    table = Table.read(io.BytesIO(targets.as_votable(targets.select(run_folder())).encode()), format="votable")
    assert len(table) == 0
    assert table.colnames == list(targets.COLUMNS)


def test_the_text_names_units_and_what_it_had_no_room_for(run_folder: Maker, a_planet: Planet) -> None:
    folder = run_folder(
        [a_planet("Vega c", priority=1.234, tsm=98.7, decisive_input="stellar_age_gyr", decisive_share=0.42)]
    )
    narrow, broad = (targets.as_text(targets.select(folder), width) for width in (80, 300))
    assert "T_eq [K]" in narrow
    assert "R [R⊕]" in narrow
    assert "age 0.4" in narrow
    assert "no room for: " in narrow
    assert "d [pc]" in broad
    assert "no room for" not in broad


def test_a_list_of_nobody_is_a_sentence(run_folder: Maker) -> None:
    assert targets.as_text(targets.select(run_folder())) == "no planet answers to this\n"


anything = st.text(alphabet=st.characters(exclude_categories=["Cs"]), min_size=1, max_size=128)


@given(identifiers=st.lists(anything, min_size=1, max_size=4), width=st.integers(20, 200))
def test_no_line_is_broader_than_the_terminal_and_no_name_can_steer_it(identifiers: Sequence[str], width: int) -> None:
    import pyarrow as pa

    blank: dict[str, float | None] = {
        name: None for name in targets.COLUMNS if name.endswith(("_share", "tsm", "esm", "priority", "_pc"))
    }
    blank |= {"air_probability": 0.5, "equilibrium_temperature_k": 300.0, "planet_radius_rearth": 1.0}
    rows = [dict.fromkeys(targets.COLUMNS, "") | blank | {"planet_id": name} for name in identifiers]
    text = targets.as_text(pa.Table.from_pylist(rows), width)
    lines = text.split("\n")
    assert len(lines) >= 1 + len(identifiers)
    for line in lines:
        assert not [character for character in line if unicodedata.category(character) in ("Cc", "Zl", "Zp")]
        wide = sum(unicodedata.east_asian_width(character) in "WF" for character in line)
        narrow = sum(not unicodedata.combining(character) for character in line)
        assert narrow + wide <= width + sum(unicodedata.combining(character) > 0 for character in line)
