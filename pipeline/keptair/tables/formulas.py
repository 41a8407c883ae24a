"""What a formula's docstring says: summary, equation, units, validity and source."""

from __future__ import annotations

import inspect
import re
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from pydoc import locate
from typing import Any

HEADINGS = ("Parameters", "Returns", "Notes", "Examples")
UNIT = re.compile(r"^(\w+) : .*\[([^\]]+)\]$|^\w+ \[([^\]]+)\]$")


@dataclass(frozen=True)
class Formula:
    """One function as its docstring tells it."""

    name: str  # dotted, within the package
    summary: str
    equation: str
    parameters: dict[str, str]  # name → unit
    returns: str  # unit
    notes: str


@cache
def formula(dotted: str) -> Formula:
    """The docstring of a function named by its dotted path, taken apart."""
    function = locate(dotted)
    if not callable(function):
        raise ValueError(f"{dotted} is no function")
    return of_function(function)


def of_function(function: Callable[..., Any]) -> Formula:
    """The docstring of a function, taken apart; parts it lacks are empty."""
    text = inspect.getdoc(function) or ""
    heading = "|".join(HEADINGS)
    head, *rest = re.split(rf"^({heading})\n-+\n", text, flags=re.MULTILINE)
    sections = dict(zip(rest[::2], rest[1::2], strict=True))
    summary, _, equation = head.strip().partition("\n\n")
    return Formula(
        f"{function.__module__}.{function.__qualname__}",
        _one_line(summary),
        _one_line(equation),
        {name: unit for name, unit in _units(sections.get("Parameters", "")) if name},
        next((unit for _, unit in _units(sections.get("Returns", ""))), ""),
        _one_line(sections.get("Notes", "")),
    )


def _units(section: str) -> list[tuple[str, str]]:
    found = []
    for line in section.splitlines():
        match = UNIT.match(line)
        if match:
            found.append((match[1] or "", match[2] or match[3]))
    return found


def _one_line(text: str) -> str:
    return " ".join(text.split())
