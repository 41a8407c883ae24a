"""Of rows that share a planet_id one stays: the newest, then the fullest, then the smallest content hash."""

from __future__ import annotations

import random
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from keptair.catalogue import open_catalogue

Write = Callable[[str | bytes], Path]
HEADER = "planet_id,planet_radius_rearth,stellar_age_gyr,updated\n"


def staying(path: Path, size: int = 100) -> dict[int, int]:
    """Row → 0 or the row that stays in its stead."""
    found: dict[int, int] = {}
    for batch in open_catalogue(path).batches(size):
        pairs = zip(batch.columns["row"].tolist(), batch.columns["duplicate_of"].tolist(), strict=True)
        found |= dict(pairs)
    return found


def test_without_twins_every_row_stays(write_csv: Write) -> None:
    assert staying(write_csv(HEADER + "a,1,,\nb,1,,\n,1,,\n,1,,\n")) == {1: 0, 2: 0, 3: 0, 4: 0}


def test_the_newest_stays_whatever_its_place_and_the_way_its_date_is_written(write_csv: Write) -> None:
    lines = "a,1,1,2024-02-01\na,,,2024-02-01T00:00:01Z\na,1,1,\na,1,1,soon\nb,1,,\n"
    assert staying(write_csv(HEADER + lines)) == {1: 2, 2: 0, 3: 2, 4: 2, 5: 0}


def test_then_the_fullest_where_an_emptied_cell_does_not_count(write_csv: Write) -> None:
    assert staying(write_csv(HEADER + "a,1,bad,\na,1,4,\na,1e9,4,\n")) == {1: 2, 2: 0, 3: 2}


def test_equal_rows_leave_the_first(write_csv: Write) -> None:
    assert staying(write_csv(HEADER + "a,1,4,\na,1.0,4,\n a ,1,4,\n")) == {1: 0, 2: 1, 3: 1}


def test_names_that_differ_in_case_are_two_planets(write_csv: Write) -> None:
    assert staying(write_csv(HEADER + "a,1,4,\nA,1,4,\n")) == {1: 0, 2: 0}


def test_a_row_with_the_wrong_number_of_cells_never_stands_in_for_a_sound_one(write_csv: Write) -> None:
    assert staying(write_csv(HEADER + "a,1,4,2024-01-01,extra\na,1,4,\n")) == {1: 0, 2: 0}


def test_filtered_rows_are_nobodys_twins(write_csv: Write) -> None:
    path = write_csv(HEADER + "a,1,4,2025-01-01\na,2,4,2024-01-01\n")
    [batch] = open_catalogue(path, {"rows": {"drop": {"planet_radius_rearth": "1"}}}).batches(9)
    assert batch.columns["duplicate_of"].tolist() == [0]


@pytest.mark.parametrize("size", [1, 2, 1000])
def test_every_batch_size_says_the_same(write_csv: Write, size: int) -> None:
    path = write_csv(HEADER + "a,1,4,2024-01-01\nb,2,4,\na,3,4,2025-01-01\n")
    assert staying(path, size) == {1: 3, 2: 0, 3: 0}


LINE = st.tuples(
    st.sampled_from("abc"),
    st.sampled_from(["", "1", "2", "1e9", "x"]),
    st.sampled_from(["", "1", "4"]),
    st.sampled_from(["", "2024-01-01", "2024-01", "x"]),
)


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(lines=st.lists(LINE, min_size=1, max_size=12, unique=True), seed=st.integers(0, 99))
def test_the_order_of_different_rows_does_not_matter(tmp_path: Path, lines: list[tuple[str, ...]], seed: int) -> None:
    shuffled = random.Random(seed).sample(lines, len(lines))
    kept = []
    for number, order in enumerate((lines, shuffled)):
        path = tmp_path / f"{number}.csv"
        path.write_text(HEADER + "\n".join(",".join(line) for line in order))
        stays = [order[row - 1] for row, twin in staying(path).items() if twin == 0]
        kept.append({line[0]: _as_read(line) for line in stays})
        assert len(stays) == len({line[0] for line in lines})
    assert kept[0] == kept[1]


def _as_read(line: tuple[str, ...]) -> tuple[str, ...]:
    """Cells that break a rule are read as missing, so rows that differ only in them are the same."""
    name, radius, age, updated = line
    return (
        name,
        "" if radius in ("1e9", "x") else radius,
        age,
        {"x": "", "2024-01": "2024-01-01"}.get(updated, updated),
    )
