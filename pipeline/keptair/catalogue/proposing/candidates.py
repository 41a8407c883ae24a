"""Which columns may be which canonical number, with everything that speaks for and against it."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass, field

import numpy as np

from keptair.catalogue.cells import Floats
from keptair.catalogue.proposing.naming import Reading, read_ucd
from keptair.catalogue.proposing.sampling import Column
from keptair.catalogue.proposing.values import UnitGuess, guess_unit, missing_marks, rough, without
from keptair.catalogue.proposing.vocabulary import Input, inputs, words
from keptair.catalogue.showing import quoted
from keptair.catalogue.units import NO_UNIT, UnitError, conversion
from keptair.tables import schema

COOLEST_STARS = 2300.0  # K: a column of temperatures that lie mostly above is one of stars
SPARSE = 0.02  # a column filled in fewer rows is hardly the one that is meant
OF_THE_ORBIT = ("period", "axis", "eccentricity", "albedo")
OF_BOTH = ("age", "distance")
OF_THE_LIGHT = ("luminosity", "xray")
BODIES = {  # dimension; a number in Earths; how many Earths are a star: Jupiter has 11 and 318, the Sun 109 and 333 000
    "radius": ("length", "planet_radius_rearth", 50.0),
    "mass": ("mass", "planet_mass_mearth", 1e4),
}
EARTHS = 0.5  # a unit of fewer Earths is named after no body


@dataclass
class Candidate:
    """A column that may be a canonical number."""

    input: Input
    column: Column
    because: list[str]
    doubts: list[str]
    unit: UnitGuess
    minimum: bool = False  # M sin i
    marks: list[int | float] = field(default_factory=list)  # numbers that mean missing
    values: Floats = field(default_factory=lambda: np.zeros(0))  # in the canonical unit, NaN where missing

    @property
    def count(self) -> int:
        return int(np.isfinite(self.values).sum())

    def in_unit(self, unit: UnitGuess) -> None:
        """Read the column in a unit."""
        numbers = self.column.numbers
        self.unit = unit
        self.marks = missing_marks(numbers, unit.conversion, self.input.name)
        cleaned = without(np.where(np.isfinite(numbers), numbers, np.nan), self.marks)
        self.values = unit.conversion.values(cleaned)


@dataclass(frozen=True)
class Meaning:
    """The quantity a column holds and whose it is, with what says so and what speaks against it."""

    quantity: str
    subject: str
    because: tuple[str, ...]
    doubts: tuple[str, ...]
    readings: tuple[Reading, Reading]


def meaning(column: Column, name: Reading, description: Reading) -> Meaning | None:
    """From the name, else the description, else the UCD; None where nothing says it or it is something else."""
    if column.name in schema.catalogue().names:
        return _canonical(column, name, description)
    ucd = read_ucd(column.about.ucd)
    named = "" if name.other else name.quantity
    doubts: list[str] = []
    if named:
        quantity, because = named, "its name"
        if description.other or (description.quantity and _base(description.quantity) != _base(named)):
            doubts.append("its description speaks of something else")
        if ucd and _base(ucd) != _base(named):
            doubts.append(f"its UCD is {quoted(column.about.ucd)}")
        doubts += _doubts_of_name(name, description)
    elif name.other:
        return None
    elif description.quantity and not description.other:
        quantity, because = description.quantity, "its description"
    elif ucd and not description.other:
        quantity, because = ucd, "its UCD"
        doubts.append("only its UCD says so")
    else:
        return None
    subject = name.subject or description.subject or _body(column, name, description, quantity)
    said = " ".join(part for part in (subject, quantity.replace("_", " ")) if part)
    return Meaning(quantity, subject, (f"{because} says {said}",), tuple(doubts), (name, description))


def candidates(column: Column, found: Meaning, said: Collection[str]) -> list[Candidate]:
    """The canonical numbers a column may be. said : whose the same quantity of other columns is."""
    made = []
    for input in inputs():
        if input.quantity == _base(found.quantity) or column.name == input.name:
            doubts = _doubts_of_subject(input, column, found, said)
            if doubts is not None:
                made.append(_candidate(input, column, found, doubts))
    return made


def _candidate(input: Input, column: Column, found: Meaning, doubts: list[str]) -> Candidate:
    unit = guess_unit(input, column, found.readings, rough(column.numbers))
    because = [*found.because, *([unit.because] if unit.because else [])]
    candidate = Candidate(input, column, because, [*found.doubts, *doubts, *unit.doubts], unit)
    candidate.minimum = found.quantity == "minimum_mass"
    candidate.in_unit(unit)
    if not column.is_numeric and column.words and column.name != input.name:
        candidate.unit = UnitGuess(wrong=f"it holds text such as {quoted(next(iter(column.words)))}")
    if 0 < candidate.count < SPARSE * len(column.numbers):
        candidate.doubts.append(f"only {candidate.count} of {len(column.numbers)} rows have it")
    return candidate


def _canonical(column: Column, name: Reading, description: Reading) -> Meaning | None:
    for input in inputs():
        if input.name == column.name:
            because = ("it has the canonical name",)
            return Meaning(input.quantity, input.subject, because, (), (name, description))
    return None


def _doubts_of_name(name: Reading, description: Reading) -> list[str]:
    doubts = [f"{quoted(word, 20)} in its name is not understood" for word in name.unknown[:1]]
    if name.quantity == description.quantity:
        return doubts
    if name.usually:
        doubts.append("the word has other meanings")
    if name.brief and not (name.subject or name.unit or name.unit_words):
        doubts.append("its name is only a letter")
    if name.glued:
        doubts.append("its name says it in one letter")
    return doubts


def _doubts_of_subject(input: Input, column: Column, found: Meaning, said: Collection[str]) -> list[str] | None:
    """None where it is the other body's."""
    subject = found.subject
    if input.must_say:
        if subject:
            return [] if subject == input.subject else None
        return _whose(input, column, said)
    if found.quantity in OF_THE_ORBIT and subject == "star":
        return None
    if found.quantity in OF_THE_LIGHT and subject == "planet":
        return None
    return ["it is said to be the planet's"] if found.quantity in OF_BOTH and subject == "planet" else []


def _whose(input: Input, column: Column, said: Collection[str]) -> list[str] | None:
    """Nothing says whose it is: what the other columns leave over, else the planet's; temperatures by their values."""
    if input.quantity == "temperature":
        hot = column.numbers[column.numbers > 0]
        stars = bool(len(hot)) and float(np.median(hot)) > COOLEST_STARS
        logarithm = bool(len(hot)) and 3.2 < float(np.median(hot)) < 5
        return ["only the values say it is the star's"] if stars or logarithm else None
    if said == {"star"} or said == {"planet"}:
        return [] if input.subject not in said else None
    return [f"whose {input.quantity} it is, nothing says"] if input.subject == "planet" else None


def _body(column: Column, name: Reading, description: Reading, quantity: str) -> str:
    """Whose radius or mass it is, by the body its unit is named after."""
    base = _base(quantity)
    if base not in BODIES:
        return ""
    dimension, canonical, largest = BODIES[base]
    spelled = [words().units[word].spellings.get(dimension, "") for word in (*name.unit_words, *description.unit_words)]
    for unit in (column.unit, name.unit, description.unit, *spelled):
        if unit.strip().lower() in NO_UNIT:
            continue
        try:
            factor = conversion(unit, canonical).factor
        except UnitError:
            continue
        if factor > EARTHS:
            return "planet" if factor < largest else "star"
    return ""


def _base(quantity: str) -> str:
    return "mass" if quantity == "minimum_mass" else quantity
