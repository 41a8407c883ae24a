"""The schema's constraints as masks and reasons: which cells are emptied, which rows are set aside."""

from __future__ import annotations

import re
import sys
from collections.abc import Callable, Collection, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from keptair.tables import schema

Array = NDArray[Any]
Mask = NDArray[np.bool_]

CELL_RULES = {
    "number": "text where a number belongs",
    "infinite": "not a finite number",
    "bounds": "out of bounds",
    "word": "a word that is not allowed",
    "length": "too long",
    "date": "not a date in ISO 8601",
    "background": "no background of that name",
    "companion": "its limit or kind cannot be read, so nobody knows what it is",
}
KINDS_OF = {"planet_radius_rearth": "planet_radius_kind", "planet_mass_mearth": "planet_mass_kind"}


@dataclass(frozen=True)
class Emptied:
    """The canonical columns after the cell rules, and where each rule emptied a cell: (column, rule) → mask."""

    columns: dict[str, Array]
    broken: dict[tuple[str, str], Mask]


@dataclass(frozen=True)
class BrokenRow:
    """One row rule and the rows that break it, each with what stood there and the reason."""

    rule: str
    column: str
    rows: Array
    values: list[str]
    reasons: list[str]


def empty_broken_cells(read: Mapping[str, Array], backgrounds: Collection[str] | None = None) -> Emptied:
    """What the catalogue gives (`read.*`), with every cell that breaks a cell rule made missing.

    A missing value has no error, limit or kind left. backgrounds : known keys; None: any key will do.
    """
    columns: dict[str, Array] = {}
    broken: dict[tuple[str, str], Mask] = {}
    for column in schema.inputs():
        if column.type == "string" and column.on_failure == "cell":
            values, found = _clean_text(column, read[f"read.{column.name}"], backgrounds)
            columns["catalogue.background" if column.name == "background" else column.name] = values
            broken |= {(column.name, rule): mask for rule, mask in found.items()}
    columns["planet_id"] = read["read.planet_id"]
    for name in schema.measured_inputs():
        kind = KINDS_OF.get(name, "")
        unknown_kind = broken.get((kind, "word"), np.zeros(len(read["row"]), dtype=bool))
        cleaned, emptied = _clean_number(name, read, unknown_kind)
        columns |= cleaned
        broken |= emptied
        if kind:
            columns[kind] = np.where(np.isnan(columns[f"catalogue.{name}"]), "", columns[kind]).astype(object)
    return Emptied(columns, {key: mask for key, mask in broken.items() if mask.any()})


def broken_rows(read: Mapping[str, Array]) -> list[BrokenRow]:
    """The row rules. A row with the wrong number of cells is judged by that alone: the rest of it cannot be trusted."""
    names, wrong, twin = read["read.planet_id"], read["wrong_cells"], read["duplicate_of"]
    longest = schema.catalogue()["planet_id"].max_length
    sound = wrong == 0
    lengths = np.fromiter(map(len, names), dtype=np.int64, count=len(names))

    def misnamed(row: int) -> str:
        return (
            f"planet_id has {lengths[row]} characters; {longest} are allowed."
            if names[row]
            else "There is no planet_id."
        )

    def doubled(row: int) -> str:
        return f"Row {twin[row]} has the same planet_id; it is newer or fuller, or comes first, and stays."

    def ragged(row: int) -> str:
        return f"The row has {wrong[row]} cells, not as many as the header."

    return [
        _broken("identifier", "planet_id", sound & ((lengths == 0) | (lengths > longest)), names, misnamed),
        _broken("duplicate", "planet_id", sound & (twin > 0), names, doubled),
        _broken("cells", "", ~sound, wrong, ragged),
    ]


def complaint(column: schema.Column, value: object) -> str:
    """What is wrong with a single value of a column, "" if nothing."""
    if column.type == "number":
        if isinstance(value, bool) or not isinstance(value, int | float):
            return "a number is needed"
        if not abs(value) <= sys.float_info.max:  # a whole number may be too large even to be infinite
            return CELL_RULES["infinite"]
        return "" if in_bounds(column, np.array([float(value)]))[0] else f"{CELL_RULES['bounds']}, {bounds(column)}"
    if not isinstance(value, str):
        return "a text is needed"
    _, found = _clean_text(column, np.array([value], dtype=object), None)
    rule = next((rule for rule, mask in found.items() if mask[0]), "")
    return (
        f"{CELL_RULES[rule]}{', possible are ' + ', '.join(filter(None, column.enum)) if column.enum else ''}"
        if rule
        else ""
    )


def in_bounds(column: schema.Column, values: Array) -> Mask:
    """Whether values are within a column's bounds; a missing value is."""
    inside = np.ones(len(values), dtype=bool)
    if column.minimum is not None:
        inside &= ~(values < column.minimum)
    if column.exclusive_minimum is not None:
        inside &= ~(values <= column.exclusive_minimum)
    if column.maximum is not None:
        inside &= ~(values > column.maximum)
    return inside


def bounds(column: schema.Column) -> str:
    """The bounds in words."""
    low = f"above {column.exclusive_minimum:g}" if column.exclusive_minimum is not None else f"from {column.minimum:g}"
    return f"{low} to {column.maximum:g} {column.unit}".rstrip()


@lru_cache(maxsize=1 << 16)
def timestamp(text: str) -> float | None:
    """Seconds since 1970 of an ISO 8601 date or time, None if it is none. Without a zone it is taken as UTC."""
    if re.fullmatch(r"\d{4}(-\d{2})?", text):  # a year or a month, which Python's own reader refuses
        text = f"{text}-01-01"[:10] if len(text) == 4 else f"{text}-01"
    try:
        moment = datetime.fromisoformat(text)
    except ValueError:
        return None
    if moment.tzinfo is None:
        moment = moment.replace(tzinfo=UTC)
    return (moment - datetime(1970, 1, 1, tzinfo=UTC)).total_seconds()


def _broken(rule: str, column: str, mask: Mask, stood: Array, reason: Callable[[int], str]) -> BrokenRow:
    rows = np.flatnonzero(mask)
    return BrokenRow(rule, column, rows, [str(stood[row]) for row in rows], [reason(row) for row in rows.tolist()])


def _clean_number(
    name: str, read: Mapping[str, Array], unknown_kind: Mask
) -> tuple[dict[str, Array], dict[tuple[str, str], Mask]]:
    """One number with its errors and limit: `catalogue.x`, `x_err_plus`, `x_err_minus`, `x_bound`."""
    column = schema.catalogue()[name]
    values, plus, minus = read[f"read.{name}"], read[f"read.{name}_err_plus"], read[f"read.{name}_err_minus"]
    limit = read[f"read.{name}_bound"]
    inside = in_bounds(column, values)
    if name == "stellar_age_gyr":  # an age above the universe's stays if its error reaches below
        assert column.maximum is not None
        inside |= (values > column.maximum) & (values - np.where(np.isnan(minus), plus, minus) <= column.maximum)
    infinite = np.isinf(values)
    there = ~np.isnan(values)
    strange_limit = there & ~np.isin(limit, ("", "upper", "lower"))
    broken = {
        (name, "infinite"): infinite,
        (name, "bounds"): ~inside & ~infinite,
        (name, "companion"): there & (strange_limit | unknown_kind),
        (f"{name}_bound", "word"): strange_limit,
    }
    for part in (name, f"{name}_err_plus", f"{name}_err_minus"):
        if f"unreadable.{part}" in read:
            broken[part, "number"] = read[f"unreadable.{part}"] != ""
    gone = ~there | infinite | ~inside | strange_limit | unknown_kind
    missing = np.nan
    cleaned: dict[str, Array] = {
        f"catalogue.{name}": np.where(gone, missing, values),
        f"{name}_err_plus": np.where(gone, missing, plus),
        f"{name}_err_minus": np.where(gone, missing, minus),
        f"{name}_bound": np.where(gone, "", limit).astype(object),
    }
    return cleaned, broken


def _clean_text(
    column: schema.Column, values: Array, backgrounds: Collection[str] | None
) -> tuple[Array, dict[str, Mask]]:
    """One text column, broken cells made ""; each different text is looked at once."""
    tests: dict[str, Callable[[str], bool]] = {}
    if column.enum:
        tests["word"] = lambda text: text not in column.enum
    elif column.max_length:
        tests["length"] = lambda text: len(text) > column.max_length
    if column.name == "updated":
        tests["date"] = lambda text: len(text) <= column.max_length and timestamp(text) is None
    if column.name == "background" and backgrounds is not None:
        tests["background"] = lambda text: len(text) <= column.max_length and text not in backgrounds
    broken: dict[str, Mask] = {}
    for rule, test in tests.items():
        verdict = {text: bool(text) and test(text) for text in set(values)}
        broken[rule] = np.fromiter((verdict[text] for text in values), dtype=bool, count=len(values))
    gone = np.logical_or.reduce([*broken.values(), np.zeros(len(values), dtype=bool)])
    return np.where(gone, "", values).astype(object), broken
