"""What counts as a number, as missing, as text."""

from __future__ import annotations

import math

import numpy as np
import pyarrow as pa
import pytest
from hypothesis import given
from hypothesis import strategies as st

from keptair.catalogue import cells

MISSING = cells.missing_words()


def number(text: str) -> tuple[float, str]:
    values, strange = cells.numbers(pa.array([text]), MISSING)
    return float(values[0]), "" if strange is None else strange[0]


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("1", 1.0),
        (" 2.50\t", 2.5),
        ("+.5", 0.5),
        ("5.", 5.0),
        ("-1e-3", -0.001),
        ("1.0D+05", 1e5),
        ("1d2", 100.0),
        ("inf", math.inf),
        ("-Infinity", -math.inf),
        ("\u00a07\u00a0", 7.0),
    ],
)
def test_numbers_are_read_as_they_are_written(text: str, value: float) -> None:
    assert number(text) == (value, "")


@pytest.mark.parametrize(
    "text", ["1_000", "0x10", "3,5", "1.000.000", "~5", "<3", "1e", "5 ± 1", "nan(1)", "٣", "12:30"]
)
def test_what_is_no_number_is_kept_as_text(text: str) -> None:
    value, strange = number(text)
    assert math.isnan(value)
    assert strange == text


@pytest.mark.parametrize("text", ["", "  ", "nan", "NaN", "NAN", "null", "NULL", "None", "N/A", "--", "..."])
def test_words_for_missing_are_missing(text: str) -> None:
    value, strange = number(text)
    assert math.isnan(value)
    assert strange == ""


@given(st.floats(allow_nan=False))
def test_every_float_written_by_python_is_read_back(value: float) -> None:
    assert number(repr(value)) == (value, "")


@pytest.mark.parametrize(
    ("column", "texts"),
    [
        (pa.array([1, None, 2**62 + 1]), ["1", "", str(2**62 + 1)]),
        (pa.array([1.0, math.nan, 2.5]), ["1", "", "2.5"]),
        (pa.array([True, False, None]), ["true", "false", ""]),
        (pa.array([b"Caf\xe9", None, b" x "]), ["Caf\xe9", "", "x"]),
        (pa.nulls(1), [""]),
    ],
)
def test_any_type_has_a_text(column: pa.Array, texts: list[str]) -> None:
    assert cells.texts(column, MISSING).to_pylist() == texts


@given(st.lists(st.text(max_size=5)))
def test_translating_is_done_cell_by_cell(texts: list[str]) -> None:
    result = cells.translated(pa.array(texts, pa.string()), str.upper)
    assert result.tolist() == [text.upper() for text in texts]


def test_numbers_of_other_types_are_numbers() -> None:
    for column in (pa.array([1, None]), pa.array([1.0, math.nan], pa.float32()), pa.array([True, None])):
        np.testing.assert_array_equal(cells.numbers(column, MISSING)[0], [1.0, math.nan])
