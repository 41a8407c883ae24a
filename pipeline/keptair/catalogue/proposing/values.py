"""What a column's numbers are like: where they lie, which of them mean missing, which unit they look like."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from keptair.catalogue.cells import Floats
from keptair.catalogue.proposing.naming import Reading
from keptair.catalogue.proposing.sampling import Column
from keptair.catalogue.proposing.vocabulary import Input, Typical, words
from keptair.catalogue.showing import quoted
from keptair.catalogue.units import LOGARITHM, NO_UNIT, Conversion, UnitError, conversion, dimension_of, schema_unit
from keptair.tables import schema

MARKS = (-1, 0, -9, -99, -999, -9999, -99999, 99, 999, 9999, 99999, -99.9, -999.9, -99.99, 99.9, 99.99, 99.999, 999.9)
Span = tuple[float, float]  # lowest and highest twentieth
NOT_KNOWN = "no such unit"  # how the complaint about a unit nobody knows begins; others are of the wrong kind
SLACK = 3.0  # beyond the usual range a stated unit is still believed


@dataclass(frozen=True)
class UnitGuess:
    """The unit a column is most likely in.

    unit : as the map spells it, "" for a plain number.
    because : what says so. doubts : what speaks against it.
    possible : the units it may be where that stays open; then none is guessed.
    wrong : why it cannot be this input at all.
    """

    unit: str = ""
    conversion: Conversion = field(default_factory=Conversion)
    because: str = ""
    doubts: tuple[str, ...] = ()
    possible: tuple[str, ...] = ()
    wrong: str = ""


def span(values: Floats) -> Span | None:
    """Between which values nine in ten lie; nothing where there are none."""
    found = values[np.isfinite(values)]
    if not len(found):
        return None
    low, high = np.percentile(found, [5.0, 95.0])
    return float(low), float(high)


def rough(values: Floats) -> Floats:
    """The values without the usual marks of missing that lie beyond all others."""
    present = [mark for mark in MARKS if (values == mark).any()]
    others = values[np.isfinite(values) & ~np.isin(values, present)]
    if not len(others):
        return values
    return without(values, [mark for mark in present if not others.min() < mark < others.max()])


def missing_marks(values: Floats, unit: Conversion, name: str) -> list[int | float]:
    """Numbers that stand for missing: the usual ones, where the quantity cannot be that."""
    present = [mark for mark in MARKS if (values == mark).any()]
    if not present:
        return []
    others = values[np.isfinite(values) & ~np.isin(values, present)]
    return [mark for mark in present if _is_impossible(mark, unit, name, others)]


def without(values: Floats, marks: list[int | float]) -> Floats:
    """The values, NaN where a mark stands."""
    return np.where(np.isin(values, marks), np.nan, values) if marks else values


def guess_unit(input: Input, column: Column, readings: tuple[Reading, Reading], values: Floats) -> UnitGuess:
    """From the header, the name, the description, and else from the values.

    readings : of the name and of the description.
    values : without marks of missing, in the file's unit.
    """
    if column.name != input.name:
        return _unit(input, column, readings, values)
    unit = schema_unit(input.name)
    guess = _unit(input, column, readings, values) if column.unit else UnitGuess(unit, conversion(unit, input.name))
    if guess.wrong or guess.possible:
        return UnitGuess(unit, conversion(unit, input.name), doubts=(f"the header says {quoted(column.unit)}",))
    return guess


def _unit(input: Input, column: Column, readings: tuple[Reading, Reading], values: Floats) -> UnitGuess:
    logarithm = any(reading.logarithm for reading in readings)
    found = span(values)
    doubts: tuple[str, ...] = ()
    for source, word, text in _stated(input, column, readings):
        unit = f"dex({text})" if logarithm and not LOGARITHM.match(text) else text
        try:
            factor = conversion(unit, input.name)
        except UnitError as error:
            known = not str(error).startswith(NOT_KNOWN)
            if known and source != "the description":
                return UnitGuess(wrong=f"{source} says {quoted(text)}: {error}")
            if known or source == "the header":
                doubts = (*doubts, f"{source} says {quoted(text)}")
            continue
        if found and not _is_likely(input, factor, found):
            doubts = (*doubts, f"{_range(found)} are unusual in {unit}")
        if found and found[0] < 0 <= input.units[0].low[0] and not factor.logarithmic:
            doubts = (*doubts, "many are below zero")
        return UnitGuess(unit, factor, f"{source} says {quoted(word)}", doubts)
    return _from_values(input, found, logarithm, doubts)


def _from_values(input: Input, found: Span | None, logarithm: bool, doubts: tuple[str, ...]) -> UnitGuess:
    """The units the values fit, rare ones only where no other does."""
    usual = input.units[0].unit
    units = [unit for unit in input.units if unit.unit.startswith("dex(") or not logarithm]
    if not units:
        unit = f"dex({usual})"
        doubts = (*doubts, "of what it is the logarithm is not said")
        return UnitGuess(unit, conversion(unit, input.name), "its name says logarithm", doubts)
    if found is None:
        unit = units[0].unit
        return UnitGuess(unit, conversion(unit, input.name), "", (*doubts, "there are no values to judge by"))
    fitting = [unit for unit in units if _fits(unit, found)]
    common = list(dict.fromkeys(unit.unit for unit in [unit for unit in fitting if not unit.rare] or fitting))
    if not common:
        return UnitGuess(wrong=f"{_range(found)} fit no unit usual for it")
    if len(common) > 1:
        return UnitGuess(possible=tuple(common), because=_range(found))
    [unit] = common
    if input.any_unit or unit not in (usual, units[0].unit):
        doubts = (*doubts, f"only the values say {unit}")
    return UnitGuess(unit, conversion(unit, input.name), f"{_range(found)} fit {unit}".rstrip(), doubts)


def _stated(input: Input, column: Column, readings: tuple[Reading, Reading]) -> list[tuple[str, str, str]]:
    """Units that are said, the surest first: where, by which word, and as the map writes it."""
    dimension = dimension_of(input.name)
    name, description = readings
    written = (("the header", column.unit), ("the name", name.unit), ("the description", description.unit))
    stated = [(source, unit, unit) for source, unit in written]
    for source, reading in (("the name", name), ("the description", description)):
        for word in reading.unit_words:
            spelled = words().units[word].spellings
            stated.append((source, word, spelled.get(dimension, "")))
    return [
        (source, word, text)
        for source, word, text in stated
        if text.strip().lower() not in (*NO_UNIT, "dex") and text.strip("-. 0123456789/")
    ]


def _is_likely(input: Input, unit: Conversion, found: Span) -> bool:
    """Whether the values, in the canonical unit, lie about where they usually do."""
    low, high = sorted(float(value) for value in unit.values(np.array(found)))
    usual = input.units[0]
    return all(
        least * (SLACK if least < 0 else 1 / SLACK) <= value <= most * (SLACK if most > 0 else 1 / SLACK)
        for value, (least, most) in ((low, usual.low), (high, usual.high))
    )


def _fits(unit: Typical, found: Span) -> bool:
    low, high = found
    return unit.low[0] <= low <= unit.low[1] and unit.high[0] <= high <= unit.high[1]


def _is_impossible(mark: float, unit: Conversion, name: str, others: Floats) -> bool:
    column = schema.catalogue()[name]
    if unit.logarithmic:
        return bool(mark <= 0 and len(others) and (others > 1).all())
    value = float(unit.values(np.array([float(mark)]))[0])
    too_small = column.minimum is not None and value < column.minimum
    nothing = column.exclusive_minimum is not None and value <= column.exclusive_minimum
    return too_small or nothing or (column.maximum is not None and value > column.maximum)


def _range(found: Span) -> str:
    return f"nine in ten values from {found[0]:.4g} to {found[1]:.4g}"
