"""Cells of any type as numbers and as texts: the one place where a cell is read."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from typing import Any

import numpy as np
from numpy.typing import NDArray

Objects = NDArray[np.object_]
Floats = NDArray[np.float64]

MISSING_WORDS = ("", "nan", "-nan", "null", "none", "na", "n/a", "<na>", "nat", "--", "---", "-", "...")
NUMBER = r"^[+-]?(\d+\.?\d*|\.\d+)([eEdD][+-]?\d+)?$|^[+-]?(?i:inf|infinity)$"
EXACT_INTEGER = 2.0**53  # whole numbers above it do not survive as float64


def missing_words(extra: Iterable[str] = ()) -> frozenset[str]:
    """The words that mean missing, in the cases people write them."""
    return frozenset(
        case for word in (*MISSING_WORDS, *extra) for case in (word, word.lower(), word.upper(), word.capitalize())
    ) | {"NaN"}


def texts(column: Any, missing: frozenset[str]) -> Any:
    """An Arrow array of text: outer blanks cut, "" where missing."""
    import pyarrow.compute as pc

    trimmed = pc.utf8_trim_whitespace(pc.fill_null(_plain_text(column), ""))
    return pc.if_else(pc.is_in(trimmed, value_set=_word_set(missing)), "", trimmed)


def objects(column: Any) -> Objects:
    """An Arrow array of text as Python strings."""
    values: Objects = column.to_numpy(zero_copy_only=False)
    return values


def numbers(column: Any, missing: frozenset[str]) -> tuple[Floats, Objects | None]:
    """The numbers, NaN where missing, and the texts of cells that are no number (None if there are none).

    Decimal commas, `1_000` and hexadecimal are no numbers; Fortran's `1.0D+05` is one.
    """
    import pyarrow as pa
    import pyarrow.compute as pc

    if _is_number(column.type):
        values = pc.fill_null(pc.cast(column, pa.float64(), safe=False), np.nan)
        return values.to_numpy(zero_copy_only=False), None
    cells = texts(column, missing)
    readable = pc.match_substring_regex(cells, NUMBER)
    written = pc.if_else(readable, cells, None)
    if pc.any(pc.match_substring_regex(written, "[dD]")).as_py():
        written = pc.replace_substring_regex(written, "[dD]", "e")
    values = pc.fill_null(pc.cast(written, pa.float64()), np.nan).to_numpy(zero_copy_only=False)
    strange = pc.and_(pc.invert(readable), pc.not_equal(cells, ""))
    if not pc.any(strange).as_py():
        return values, None
    return values, objects(pc.if_else(strange, cells, ""))


def translated(column: Any, translate: Callable[[str], str]) -> Objects:
    """Each text put through a function, which is called once for each different text."""
    coded = column.dictionary_encode()
    words = np.array([translate(word) for word in coded.dictionary.to_pylist()] + [""], dtype=object)
    result: Objects = words[coded.indices.to_numpy(zero_copy_only=False)]
    return result


def counts(column: Any) -> dict[str, int]:
    """How often each text stands in the column."""
    return {entry["values"]: entry["counts"] for entry in column.value_counts().to_pylist()}


def carries_numbers(column: Any, missing: frozenset[str]) -> bool:
    """Whether every cell is a number that float64 keeps as it is written."""
    import pyarrow as pa
    import pyarrow.compute as pc

    if pa.types.is_boolean(column.type):
        return False
    values, strange = numbers(column, missing)
    if strange is not None or np.isinf(values).any():
        return False
    if pa.types.is_floating(column.type):
        return True
    if (np.abs(values) > EXACT_INTEGER).any():
        return False
    return not pc.any(pc.match_substring_regex(texts(column, missing), r"^[+-]?0\d")).as_py()


def without_point_zero(text: str) -> str:
    """`1.0` as `1`: whole numbers are written either way, by the program that wrote the file."""
    whole, point, zeros = text.partition(".")
    return whole if point and whole.lstrip("+-").isdigit() and not zeros.strip("0") else text


def _is_number(kind: Any) -> bool:
    import pyarrow as pa

    return bool(
        pa.types.is_floating(kind)
        or pa.types.is_integer(kind)
        or pa.types.is_boolean(kind)
        or pa.types.is_decimal(kind)
    )


def _plain_text(column: Any) -> Any:
    import pyarrow as pa
    import pyarrow.compute as pc

    if pa.types.is_string(column.type):
        return column
    try:
        return pc.cast(column, pa.string())
    except pa.ArrowInvalid:  # bytes that are not UTF-8
        return pa.array([cell if cell is None else cell.decode("latin-1") for cell in column.to_pylist()], pa.string())


def _word_set(words: frozenset[str]) -> Any:
    import pyarrow as pa

    return pa.array(sorted(words), pa.string())
