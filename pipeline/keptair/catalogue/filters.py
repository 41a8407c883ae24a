"""Which rows the column map keeps and drops."""

from __future__ import annotations

import fnmatch
import re
from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from keptair.catalogue import cells
from keptair.catalogue.resolving import Plan
from keptair.catalogue.table import Block


def kept(block: Block, plan: Plan) -> NDArray[np.bool_]:
    """Rows that match every line of [rows.keep] and none of [rows.drop]; a row with the wrong number of cells stays."""
    keep = np.ones(len(block.rows), dtype=bool)
    for mask in _matches(block, plan.keep):
        keep &= mask
    for mask in _matches(block, plan.drop):
        keep &= ~mask
    return keep | (block.wrong_cells > 0)


def _matches(block: Block, lines: Mapping[int, tuple[Any, ...]]) -> list[NDArray[np.bool_]]:
    return [_any_of(block.cells[position], words) for position, words in lines.items()]


def _any_of(column: Any, words: tuple[Any, ...]) -> NDArray[np.bool_]:
    texts = cells.texts(column, frozenset([""]))
    pattern = re.compile("|".join(f"(?:{_pattern(word)})" for word in words), re.DOTALL)
    hit = cells.translated(texts, lambda text: _verdict(pattern, text))
    matched: NDArray[np.bool_] = hit == "yes"
    return matched


def _verdict(pattern: re.Pattern[str], text: str) -> str:
    return "yes" if pattern.fullmatch(text) or pattern.fullmatch(cells.without_point_zero(text)) else ""


def _pattern(word: Any) -> str:
    """A regular expression of a word with wildcards; true and false in any case; 1 and 1.0 are the same."""
    if isinstance(word, bool):
        return f"(?i:{word})"
    if isinstance(word, int | float):
        return re.escape(cells.without_point_zero(str(word)))
    return fnmatch.translate(word.replace("[", "[[]"))
