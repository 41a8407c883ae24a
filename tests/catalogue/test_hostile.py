"""Names and cells made to do harm are read as what they are: text."""

from __future__ import annotations

import csv
import io
import unicodedata
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from keptair.catalogue import open_catalogue
from keptair.catalogue.showing import listed, shown
from keptair.errors import CatalogueError, ColumnMapError
from keptair.settings import Settings
from keptair.stages import screen

Writer = Callable[..., Path]
HOSTILE = [
    "=cmd|'/c calc'!A1",
    "@SUM(1+1)",
    "+1+1",
    "-2+3",
    "<script>alert(1)</script>",
    '"><img src=x onerror=alert(1)>',
    "{{ 7*7 }}",
    "'; DROP TABLE planets; --",
    "../../etc/passwd",
    "a\x00b",
    "\x1b[2Ja",
    "a\u202eb\u2066",
    "a\nb\r\nc",
    "%s%n{0}",
    "Kepler-1\u200bb",
    "🪐",
]


def test_hostile_names_are_kept_as_written(write: Writer, tmp_path: Path) -> None:
    rows = [{"planet_id": name, "host_id": name} for name in HOSTILE]
    [batch] = open_catalogue(write(tmp_path, rows), {"file": {"carry": "*"}}).batches(100)
    screened = screen.run(batch, Settings())
    assert screened.batch.columns["planet_id"].tolist() == HOSTILE
    assert screened.batch.columns["input_host_id"].tolist() == HOSTILE


@settings(max_examples=50, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(names=st.lists(st.text(st.characters(exclude_categories=["Cs"]), min_size=1), min_size=1, max_size=8))
def test_any_name_comes_through_csv_with_its_outer_blanks_cut(tmp_path: Path, names: list[str]) -> None:
    out = io.StringIO()
    csv.writer(out, quoting=csv.QUOTE_ALL).writerows([["planet_id", "k_mag"], *[[name, 1] for name in names]])
    path = tmp_path / "names.csv"
    path.write_bytes(out.getvalue().encode())
    missing = {"", "nan", "-nan", "null", "none", "na", "n/a", "<na>", "nat", "--", "---", "-", "..."}
    read = [name for batch in open_catalogue(path).batches(3) for name in batch.columns["read.planet_id"]]
    assert read == ["" if name.strip().lower() in missing else name.strip() for name in names]


def test_hostile_column_names_are_shown_safely(tmp_path: Path) -> None:
    path = tmp_path / "t.csv"
    path.write_text("\x1b[31mred,a\u202eb," + "x" * 1_000_000 + ",=1+1\n1,2,3,4\n", encoding="utf-8")
    with pytest.raises(CatalogueError) as failure:
        open_catalogue(path)
    with pytest.raises(ColumnMapError) as second:
        open_catalogue(path, {"columns": {"planet_id": {"from": "a\u202eb\x07"}, "host_id": {"from": "y" * 9999}}})
    for message in (str(failure.value), str(second.value)):
        assert len(message) < 2000
        assert not {unicodedata.category(letter) for letter in message.replace("\n", "")} & {"Cc", "Cf"}


@given(st.text(), st.integers(5, 80))
def test_shown_text_is_short_and_has_nothing_hidden(text: str, longest: int) -> None:
    written = shown(text, longest)
    assert len(written) <= 10 * longest
    assert not {unicodedata.category(letter) for letter in written} & {"Cc", "Cf", "Cs", "Zl", "Zp"}


def test_plain_text_is_shown_as_it_is() -> None:
    assert shown("Proxima Cen b, λ = 3") == "Proxima Cen b, λ = 3"
    assert listed(["a", "b"]) == '"a", "b"'
    assert listed(list("abcdefghij"), most=2) == '"a", "b" and 8 more'


def test_names_that_differ_only_in_case_blanks_or_hyphens_are_remarked_on(tmp_path: Path) -> None:
    path = tmp_path / "t.csv"
    path.write_text("planet_id\nTOI-1 b\nKepler-2 c\nTOI 1b\nkepler2C\nKepler-2 c\nother\n")
    catalogue = open_catalogue(path)
    assert catalogue.remarks == ["2 names differ from another only in case, blanks or hyphens, first in rows 1 and 3"]
