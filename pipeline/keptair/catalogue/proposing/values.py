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
SLACK = 3.0  # beyond the usual range a stated unit is still believed


@dataclass(frozen=True)
class UnitGuess:
    """The unit a column is most likely in.

    unit : as the map spells it, "" for a plain number.
    because : what says so. doubt : what speaks against it.
    possible : the units it may be where that stays open; then none is guessed.
    wrong : why it cannot be this input at all.
    """

    unit: str = ""
    conversion: Conversion = field(default_factory=Conversion)
    because: str = ""
    doubts: tuple[str, ...] = ()
    possible: tuple[str, ...] = ()
    wrong: str = ""


def span(values: Floats) -> tuple[float, float] | None:
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
    if column.name == input.name and not column.unit:
        unit = schema_unit(input.name)
        return UnitGuess(unit, conversion(unit, input.name))
    logarithm = any(reading.logarithm for reading in readings)
    found = span(values)
    doubts: tuple[str, ...] = ()
    for source, text in _stated(input, column, readings):
        unit = f"dex({text})" if logarithm and not LOGARITHM.match(text) else text
        try:
            factor = conversion(unit, input.name)
        except UnitError as error:
            if source == "the header":
                if _is_known(text):
                    return UnitGuess(wrong=f"the header says {quoted(text)}: {error}")
                doubts = (f"the header's unit {quoted(text)} is not known",)
            continue
        if found and not _is_likely(input, factor, found):
            doubts = (*doubts, f"values of {_range(found)} are unusual in {unit}")
        return UnitGuess(unit, factor, f"{source} says {quoted(text)}", doubts)
    return _from_values(input, found, logarithm, doubts)


def _from_values(input: Input, found: tuple[float, float] | None, logarithm: bool, doubts: tuple[str, ...]) -> UnitGuess:
    """The units the values fit; the usual one first, rare ones only where no other does."""
    choices = [unit for unit in input.units if unit.unit.startswith("dex(") == logarithm]
    if logarithm and not choices:
        unit = f"dex({input.units[0].unit})"
        return UnitGuess(unit, conversion(unit, input.name), "its name says logarithm", (*doubts, "of what is not said"))
    if found is None:
        unit = choices[0].unit
        return UnitGuess(unit, conversion(unit, input.name), "", (*doubts, "there are no values to judge by"))
    if not logarithm:
        choices = list(input.units)
    fitting = [unit for unit in choices if _fits(unit, found)]
    common = [unit for unit in fitting if not unit.rare] or fitting
    if not common:
        return UnitGuess(wrong=f"values of {_range(found)} are in no unit usual for it")
    if len(common) > 1:
        return UnitGuess(possible=tuple(unit.unit or "1" for unit in common), because=f"values of {_range(found)}")
    [unit] = common
    written = f"values of {_range(found)} fit"
    because = f"{written} {unit.unit}" if unit.unit else written
    if unit is not input.units[0] or input.any_unit:
        doubts = (*doubts, f"only the values say {unit.unit or 'so'}")
    return UnitGuess(unit.unit, conversion(unit.unit, input.name), because, doubts)


def _stated(input: Input, column: Column, readings: tuple[Reading, Reading]) -> list[tuple[str, str]]:
    """Units that are said, the surest first."""
    dimension = dimension_of(input.name)
    name, description = readings
    stated = [("the header", column.unit), ("the name", name.unit), ("the description", description.unit)]
    for source, reading in (("the name", name), ("the description", description)):
        for word in reading.unit_words:
            spelled = words().units[word].spellings
            stated.append((source, spelled.get(dimension, "")))
    return [
        (source, text)
        for source, text in stated
        if text.strip().lower() not in (*NO_UNIT, "dex") and text.strip("-. 0123456789/")
    ]


def _is_known(unit: str) -> bool:
    """Whether it is a unit of any of the inputs."""
    for name in schema.measured_inputs():
        try:
            conversion(unit, name)
        except UnitError:
            continue
        return True
    return False


def _is_likely(input: Input, unit: Conversion, found: tuple[float, float]) -> bool:
    """Whether the values, in the canonical unit, lie about where they usually do."""
    low, high = sorted(float(value) for value in unit.values(np.array(found)))
    usual = input.units[0]
    return all(
        least * (SLACK if least < 0 else 1 / SLACK) <= value <= most * (SLACK if most > 0 else 1 / SLACK)
        for value, (least, most) in ((low, usual.low), (high, usual.high))
    )


def _fits(unit: Typical, found: tuple[float, float]) -> bool:
    low, high = found
    return unit.low[0] <= low <= unit.low[1] and unit.high[0] <= high <= unit.high[1]


def _is_impossible(mark: float, unit: Conversion, name: str, others: Floats) -> bool:
    column = schema.catalogue()[name]
    if unit.logarithmic:
        return bool(mark < 0 and (others > 0).all())
    value = float(unit.values(np.array([float(mark)]))[0])
    too_small = column.minimum is not None and value < column.minimum
    nothing = column.exclusive_minimum is not None and value <= column.exclusive_minimum
    return too_small or nothing or (column.maximum is not None and value > column.maximum)


def _range(found: tuple[float, float]) -> str:
    return f"{found[0]:.4g} to {found[1]:.4g}"
