"""CSV for spreadsheets."""

from __future__ import annotations

import csv
import io

import pytest

from keptair.tables.sheets import Sheet


def written(*rows: tuple[object, ...]) -> str:
    stream = io.StringIO(newline="")
    sheet = Sheet(stream)
    for row in rows:
        sheet.write(row)
    return stream.getvalue()


@pytest.mark.parametrize("start", "=+-@＝＋－＠")
def test_what_a_spreadsheet_would_run_gets_a_quote_before_it(start: str) -> None:
    assert written((1, f"{start}1+1")) == f"1,'{start}1+1\n"


def test_numbers_and_other_texts_stay_as_they_are() -> None:
    assert written((-1, -0.5, None, "a=1", "'")) == "-1,-0.5,,a=1,'\n"


@pytest.mark.parametrize("text", ["a\r=1+1", "a\n=1+1", "a\r\n=1+1", '"\r=1+1', 'a",\r=1+1'])
def test_no_text_can_begin_a_row_or_a_cell_of_its_own(text: str) -> None:
    read = list(csv.reader(io.StringIO(written((1, text), (2, "b")), newline="")))
    assert read == [["1", text], ["2", "b"]]
