"""Blocks of a file → the canonical columns `read.*`, as the plan says."""

from __future__ import annotations

from collections.abc import Iterable
from datetime import datetime
from typing import Any

import numpy as np
from numpy.typing import NDArray

from keptair.catalogue import cells
from keptair.catalogue.cells import Floats, Objects
from keptair.catalogue.columns import KINDS, looked_up
from keptair.catalogue.resolving import NumberPlan, Plan, Source, TextPlan
from keptair.catalogue.table import Block

Array = NDArray[Any]

BOUND_WORDS = {
    **dict.fromkeys(("1", "+1", "upper", "upper limit", "upper_limit", "upperlimit", "ul", "u", "<", "<="), "upper"),
    **dict.fromkeys(("-1", "lower", "lower limit", "lower_limit", "lowerlimit", "ll", "l", ">", ">="), "lower"),
    **dict.fromkeys(("0", "measured", "=", "false"), ""),
}


def canonical(block: Block, plan: Plan) -> dict[str, Array]:
    """The `read.*` columns of a block's rows; of a row with the wrong number of cells only its planet_id."""
    size = len(block.rows)
    columns: dict[str, Array] = {"row": block.rows, "wrong_cells": block.wrong_cells}
    for text in plan.texts:
        columns[f"read.{text.name}"] = read_text(block, text, size)
    for number in plan.numbers:
        columns |= read_number(block, number, size)
        if number.name in KINDS:
            columns[f"read.{KINDS[number.name][0]}"] = _kind(block, number, columns)
    ragged = block.wrong_cells > 0
    if ragged.any():
        columns = {name: _blanked(name, values, ragged) for name, values in columns.items()}
    return columns


def read_text(block: Block, plan: TextPlan, size: int) -> Objects:
    """One text: the first column that has a value, its words translated, its date as ISO 8601."""
    if plan.constant is not None or not plan.values:
        return np.full(size, plan.constant or "", dtype=object)
    values = cells.texts(block.cells[plan.values[0]], plan.missing)
    for position in plan.values[1:]:
        values = _filled_in(values, cells.texts(block.cells[position], plan.missing))
    if plan.words:
        return cells.translated(values, lambda word: _translation(word, plan))
    if plan.date:
        return cells.translated(values, lambda word: _iso_date(word, plan.date))
    return cells.objects(values)


def read_number(block: Block, plan: NumberPlan, size: int) -> dict[str, Array]:
    """One number in its canonical unit with errors and limit: `read.x`, its companions, `unreadable.x` if needed."""
    name = plan.name
    nothing = np.full(size, np.nan)
    if plan.constant is not None:
        given = {f"read.{name}": np.full(size, plan.constant), f"given.{name}": np.ones(size, dtype=bool)}
        empty = {f"read.{name}_err_plus": nothing, f"read.{name}_err_minus": nothing}
        return {**given, **empty, f"read.{name}_bound": np.full(size, "", dtype=object)}
    strange: dict[str, Objects] = {}
    values = nothing
    for source in plan.values:
        found = _numbers(block, source.position, plan, strange, name)
        fresh = np.isnan(values) & ~np.isnan(found)
        values = np.where(fresh, source.conversion.values(found), values)
    bound = _bound(block, plan, size)
    for side, limit in (("upper", plan.upper), ("lower", plan.lower)):
        if limit is not None:
            found = limit.conversion.values(_numbers(block, limit.position, plan, strange, name))
            fresh = np.isnan(values) & ~np.isnan(found)
            values = np.where(fresh, found, values)
            bound = np.where(fresh, side, bound).astype(object)
    if name in strange:
        strange[name] = np.where(np.isnan(values), strange[name], "").astype(object)
    columns: dict[str, Array] = {  # a table with one column of errors means it for both sides
        f"read.{name}": values,
        f"read.{name}_err_plus": _error(block, plan, plan.plus or plan.minus, values, +1, strange),
        f"read.{name}_err_minus": _error(block, plan, plan.minus or plan.plus, values, -1, strange),
        f"read.{name}_bound": np.where(np.isnan(values), "", bound).astype(object),
    }
    return columns | {f"unreadable.{part}": texts for part, texts in strange.items() if (texts != "").any()}


def _numbers(block: Block, position: int, plan: NumberPlan, strange: dict[str, Objects], part: str) -> Floats:
    values, unreadable = cells.numbers(block.cells[position], plan.missing)
    if unreadable is not None:
        before = strange.get(part)
        strange[part] = unreadable if before is None else np.where(before == "", unreadable, before).astype(object)
    if plan.missing_numbers:
        values = np.where(np.isin(values, plan.missing_numbers), np.nan, values)
    return values


def _error(
    block: Block, plan: NumberPlan, source: Source | None, values: Floats, side: int, strange: dict[str, Objects]
) -> Floats:
    """The size of one side's error; 0, infinite and missing: none given."""
    if source is None:
        return np.full(len(values), np.nan)
    written = _numbers(block, source.position, plan, strange, f"{plan.name}_err_{'plus' if side > 0 else 'minus'}")
    size = source.conversion.error(np.where(np.isfinite(written), written, np.nan), values, side)
    return np.where((size > 0) & np.isfinite(size), size, np.nan)


def _bound(block: Block, plan: NumberPlan, size: int) -> Objects:
    """upper, lower or "" for each row; a word nobody knows stays, for the screen to see."""
    if plan.bound is None:
        return np.full(size, "", dtype=object)
    texts = cells.texts(block.cells[plan.bound], plan.missing)
    return cells.translated(texts, lambda word: BOUND_WORDS.get(cells.without_point_zero(word).lower(), word))


def _kind(block: Block, plan: NumberPlan, columns: dict[str, Array]) -> Objects:
    """measured, minimum or relation; "" where the value is missing."""
    name, kind_name = plan.name, KINDS[plan.name][0]
    values, bound = columns[f"read.{name}"], columns[f"read.{name}_bound"]
    if plan.kind is not None:
        texts = cells.texts(block.cells[plan.kind], plan.missing)
        kinds = cells.translated(texts, lambda word: looked_up(word, plan.kinds) or "")
    else:
        kinds = columns[f"read.{kind_name}"]
    bare = np.isnan(columns[f"read.{name}_err_plus"]) & np.isnan(columns[f"read.{name}_err_minus"]) & (bound == "")
    assumed = np.where(bare, plan.without_error, "measured")
    said = np.where(kinds == "", assumed, kinds)
    return np.where(np.isnan(values), "", said).astype(object)


def _translation(word: str, plan: TextPlan) -> str:
    found = looked_up(word, plan.words)
    return word if found is None else found


def _iso_date(word: str, pattern: str) -> str:
    """The date in ISO 8601; a text that does not fit the pattern stays, for the screen to see."""
    if not word:
        return ""
    try:
        moment = datetime.strptime(word, pattern)
    except ValueError:
        return word
    return moment.date().isoformat() if moment.time() == datetime.min.time() else moment.isoformat()


def _filled_in(values: Any, others: Any) -> Any:
    import pyarrow.compute as pc

    return pc.if_else(pc.equal(values, ""), others, values)


def _blanked(name: str, values: Array, rows: NDArray[np.bool_]) -> Array:
    if name in ("row", "wrong_cells", "read.planet_id"):
        return values
    if values.dtype == np.float64:
        return np.where(rows, np.nan, values)
    return np.where(rows, "", values).astype(object) if values.dtype == object else values & ~rows


def regrouped(pieces: Iterable[dict[str, Array]], size: int) -> Iterable[dict[str, Array]]:
    """The same rows in groups of `size`, the last one shorter."""
    waiting: list[dict[str, Array]] = []
    held = 0
    for piece in pieces:
        waiting.append(piece)
        held += len(piece["row"])
        if held < size:
            continue
        joined = _joined(waiting)
        whole = held - held % size
        for start in range(0, whole, size):
            yield {name: values[start : start + size] for name, values in joined.items()}
        waiting = [{name: values[whole:] for name, values in joined.items()}]
        held -= whole
    if held:
        yield _joined(waiting)


def _joined(pieces: list[dict[str, Array]]) -> dict[str, Array]:
    pieces = [piece for piece in pieces if len(piece["row"])]
    names = {name for piece in pieces for name in piece}
    return {name: np.concatenate([_part(piece, name) for piece in pieces]) for name in sorted(names)}


def _part(piece: dict[str, Array], name: str) -> Array:
    """A column of a piece; only `unreadable.*` stands in some pieces and not in others."""
    return piece[name] if name in piece else np.full(len(piece["row"]), "", dtype=object)
