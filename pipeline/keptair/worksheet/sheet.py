"""What a worked sheet is made of: steps in sections."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from keptair import draws
from keptair.batch import Array
from keptair.tables.formulas import of_function


@dataclass(frozen=True)
class Step:
    """One line of the sheet: the central value, and the percentiles of the draws beside it."""

    symbol: str
    name: str
    value: float | str | None
    unit: str = ""
    percentiles: tuple[float | None, float | None, float | None] | None = None
    formula: str = ""
    source: str = ""
    origin: str = ""
    column: str = ""  # where planets.parquet has the same, if it does


@dataclass(frozen=True)
class Section:
    """Steps that belong together; `rows` is a small table where the steps are the same for many gases."""

    title: str
    steps: tuple[Step, ...] = ()
    heads: tuple[str, ...] = ()
    rows: tuple[tuple[float | str | None, ...], ...] = ()


@dataclass(frozen=True)
class Sheet:
    """The whole chain of one planet."""

    planet: str
    run: str
    sections: tuple[Section, ...]
    remarks: tuple[str, ...] = ()


def number(
    symbol: str,
    name: str,
    values: Array,
    unit: str,
    function: Callable[..., Any] | None = None,
    scale: float = 1.0,
    origin: str = "",
    column: str = "",
) -> Step:
    """A step from its draws: column 0 is the central value."""
    told = of_function(function) if function else None
    values = np.asarray(values, dtype=float) / scale
    spread = tuple(plain(one[0]) for one in draws.percentiles(values, (16, 50, 84)))
    return Step(
        symbol,
        name,
        plain(values[0, 0]),
        unit,
        (spread[0], spread[1], spread[2]),
        told.equation if told else "",
        told.notes if told else "",
        origin,
        column,
    )


def word(name: str, value: Any, column: str = "", origin: str = "") -> Step:
    """A step that is a word or a plain number of the published table."""
    shown = plain(value) if isinstance(value, (float, np.floating)) else str(value)
    return Step("", name, shown, origin=origin, column=column)


def plain(value: Any) -> float | None:
    return None if value is None or np.isnan(value) else float(value)
