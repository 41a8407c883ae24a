"""The trade's words and what the canonical numbers usually hold, from words.toml and inputs.toml."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib import resources
from typing import Any


@dataclass(frozen=True)
class UnitWord:
    """A word for a unit: how the unit is written for each dimension, and the quantity it alone speaks of."""

    spellings: Mapping[str, str]
    implies: str = ""


@dataclass(frozen=True)
class Words:
    """Words in lower case, without separators → what they say."""

    quantities: Mapping[str, str]
    usual: Mapping[str, str]
    symbols: Mapping[str, tuple[str, str]]  # quantity, subject
    letters: Mapping[str, str]
    subjects: Mapping[str, str]
    subject_letters: Mapping[str, str]
    units: Mapping[str, UnitWord]
    logarithm: frozenset[str]
    fillers: frozenset[str]
    others: frozenset[str]
    unlike: frozenset[str]
    ucds: Mapping[str, str]
    errors: tuple[str, ...]
    sides: Mapping[str, str]
    bare_sides: Mapping[str, str]
    limits: Mapping[str, str]  # → "", plus, minus
    kind_columns: tuple[str, ...]
    remarks: tuple[str, ...]
    transits: Mapping[str, str]
    kinds: Mapping[str, str]

    def knows(self, word: str) -> bool:
        """Whether a word of more than one letter says anything."""
        return len(word) > 1 and (
            word in self.quantities
            or word in self.usual
            or word in self.symbols
            or word in self.subjects
            or word in self.units
            or word in self.letters
            or word in self.others
            or word in self.fillers
            or word in self.logarithm
        )


@dataclass(frozen=True)
class Typical:
    """A unit and where the lowest and highest twentieth of the values usually begin in it."""

    unit: str
    low: tuple[float, float]
    high: tuple[float, float]
    rare: bool = False


@dataclass(frozen=True)
class Input:
    """A canonical number as a catalogue's columns speak of it."""

    name: str
    quantity: str
    subject: str
    units: tuple[Typical, ...]
    must_say: bool = False
    any_unit: bool = False


@cache
def words() -> Words:
    """The words of words.toml."""
    read = _toml("words")
    units: dict[str, UnitWord] = {}
    for entry in read["units"].values():
        spellings = {key: value for key, value in entry.items() if key not in ("words", "implies")}
        units |= dict.fromkeys(entry["words"].split(), UnitWord(spellings, entry.get("implies", "")))
    limits = dict.fromkeys(read["limits"]["words"].split(), "")
    limits |= dict.fromkeys(read["limits"]["upper"].split(), "plus")
    limits |= dict.fromkeys(read["limits"]["lower"].split(), "minus")
    return Words(
        quantities=_turned(read["quantities"]),
        usual=_turned(read["usual"]),
        symbols={word: (quantity, subject) for word, (quantity, subject) in read["symbols"].items()},
        letters=read["letters"],
        subjects=_turned(read["subjects"]),
        subject_letters=read["subject_letters"],
        units=units,
        logarithm=frozenset(read["logarithm"]["words"].split()),
        fillers=frozenset(read["fillers"]["words"].split()),
        others=frozenset(read["others"]["words"].split()),
        unlike=frozenset(read["unlike"]["words"].split()),
        ucds=read["ucds"],
        errors=tuple(read["errors"]["words"].split()),
        sides=_turned(read["sides"]),
        bare_sides=_turned(read["bare_sides"]),
        limits=limits,
        kind_columns=tuple(read["kind_columns"]["words"].split()),
        remarks=tuple(read["remarks"]["words"].split()),
        transits=_turned(read["transits"]),
        kinds=_turned(read["kinds"]),
    )


@cache
def inputs() -> tuple[Input, ...]:
    """The canonical numbers of inputs.toml."""
    return tuple(
        Input(
            name,
            entry["quantity"],
            entry["subject"],
            tuple(
                Typical(unit["unit"], tuple(unit["low"]), tuple(unit["high"]), unit.get("rare", False))
                for unit in entry["units"]
            ),
            entry.get("must_say", False),
            entry.get("any_unit", False),
        )
        for name, entry in _toml("inputs").items()
    )


def plain(text: str) -> str:
    """Lower case, without anything but letters, digits, signs and the stroke of a fraction."""
    return re.sub(r"[^\w+/-]|_", "", text.lower())


def _turned(entries: Mapping[str, str]) -> dict[str, str]:
    """Meaning → its words, as word → meaning."""
    return {word: meaning for meaning, listed in entries.items() for word in listed.split()}


def _toml(name: str) -> dict[str, Any]:
    return tomllib.loads((resources.files(__package__) / f"{name}.toml").read_text(encoding="utf-8"))
