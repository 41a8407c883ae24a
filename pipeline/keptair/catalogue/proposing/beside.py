"""What stands beside a number: errors, limits and their flags, as the values of those columns bear out."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from keptair.catalogue.cells import Floats, without_point_zero
from keptair.catalogue.converting import BOUND_WORDS
from keptair.catalogue.proposing.candidates import Candidate
from keptair.catalogue.proposing.companions import Companion
from keptair.catalogue.proposing.sampling import Column
from keptair.catalogue.showing import quoted
from keptair.catalogue.units import UnitError, error_conversion

MOST = 0.9  # of the values: what holds for so many holds for the column


@dataclass
class Beside:
    """Keys of a map's entry, and what the user should know."""

    entry: dict[str, Any] = field(default_factory=dict)
    remarks: list[str] = field(default_factory=list)
    used: list[Column] = field(default_factory=list)
    errors: tuple[Column, ...] = ()

    def take(self, key: str, column: Column) -> None:
        """A column for a key that has none yet."""
        if key not in self.entry:
            self.entry[key] = column.reference
            self.used.append(column)


def beside(candidate: Candidate, companions: Sequence[Companion]) -> Beside:
    """Errors and limits of a number."""
    found = Beside()
    errors: dict[str, Column] = {}
    if candidate.column.name == candidate.input.name:
        _canonical(found, candidate, companions)
    for companion in companions:
        column, role = companion.column, companion.role
        if role in ("limit", "upper", "lower"):
            _limit(found, column, role)
        elif role in ("plus", "minus", "error", "bare plus", "bare minus"):
            side = _side(found, candidate, companion)
            if side and _has_its_unit(found, candidate, column):
                errors.setdefault(side, column)
    _errors(found, errors)
    return found


def _canonical(found: Beside, candidate: Candidate, companions: Sequence[Companion]) -> None:
    """Companions under their canonical names are what they are called."""
    for companion in companions:
        for key, suffix in (("plus", "_err_plus"), ("minus", "_err_minus"), ("bound", "_bound")):
            if companion.column.name == candidate.input.name + suffix:
                found.take(key, companion.column)
    errors = (column for column in found.used if column.name != f"{candidate.input.name}_bound")
    found.errors = tuple(errors)


def _errors(found: Beside, errors: dict[str, Column]) -> None:
    """Two sides, the signs deciding where the names only number them; else one error for both."""
    plus, minus, both = errors.get("plus"), errors.get("minus"), errors.get("error")
    if plus and minus:
        if _share(plus.numbers < 0, plus.numbers) > MOST and _share(minus.numbers > 0, minus.numbers) > MOST:
            plus, minus = minus, plus
    elif plus and both:  # E_Rp and e_Rp
        minus = both
    elif both:
        plus, minus = both, None
    for key, column in (("plus", plus), ("minus", minus)):
        if column is not None:
            found.take(key, column)
    found.errors = found.errors or tuple(column for column in (plus, minus) if column is not None)


def _side(found: Beside, candidate: Candidate, companion: Companion) -> str:
    """Which error it is; columns called only `up` or `max` may be limits or the ends of an interval instead."""
    column, role = companion.column, companion.role
    if not column.is_numeric:
        return "" if column.words else role.removeprefix("bare ")
    if not role.startswith("bare"):
        return role
    side = role.removeprefix("bare ")
    values, ends = candidate.column.numbers, column.numbers
    has_value, has_end = np.isfinite(candidate.values), np.isfinite(ends)
    if (has_end & ~has_value).sum() > (has_end & has_value).sum():
        _limit(found, column, "upper" if side == "plus" else "lower")
        return ""
    both = has_value & has_end
    beyond = ends[both] > values[both] if side == "plus" else _nearer_than_zero(ends[both], values[both])
    if both.any() and beyond.mean() > MOST and np.median(np.abs(ends[both])) > 0.3 * np.median(np.abs(values[both])):
        found.remarks.append(f"{quoted(column.name)} looks like the end of an interval, which a map cannot say")
        return ""
    return side


def _nearer_than_zero(ends: Floats, values: Floats) -> Any:
    """Below the value, yet nearer to it than to zero: a lower end, no error."""
    return (ends < values) & (ends > 0.6 * values)


def _limit(found: Beside, column: Column, role: str) -> None:
    """A flag (1, 0, -1 or a word) or limits in a column of their own."""
    words = {without_point_zero(word).lower() for word in column.words}
    if column.is_numeric and not words <= {"1", "+1", "0", "-1"}:
        if role == "limit":
            found.remarks.append(f"{quoted(column.name)} holds numbers: upper or lower limits? Say upper = or lower =")
        else:
            found.take(role, column)
    elif not words <= BOUND_WORDS.keys():
        unknown = next(iter(words - BOUND_WORDS.keys()))
        found.remarks.append(f"{quoted(column.name)} says {quoted(unknown)}, which is no limit keptair knows")
    elif role == "lower" and "1" in words:
        found.remarks.append(f"{quoted(column.name)} marks lower limits with 1; keptair takes 1 for an upper limit")
    elif role == "limit" or words:
        found.take("bound", column)


def _has_its_unit(found: Beside, candidate: Candidate, column: Column) -> bool:
    try:
        error_conversion(column.unit, candidate.input.name, candidate.unit.conversion)
    except UnitError as error:
        found.remarks.append(f"{quoted(column.name)} is no error that can be read: {quoted(column.unit)} is {error}")
        return False
    return True


def precision(candidate: Candidate, errors: Iterable[Column]) -> float:
    """The median size of the errors relative to the values, infinite where there are none."""
    for column in errors:
        relative = np.abs(column.numbers / candidate.column.numbers)
        relative = relative[np.isfinite(relative) & (relative > 0)]
        if len(relative):
            return float(np.median(relative))
    return np.inf


def _share(mask: Any, values: Floats) -> float:
    known = np.isfinite(values) & (values != 0)
    return float((mask & known).sum() / known.sum()) if known.any() else 0.0
