"""Columns that speak of other columns: errors, limits, kinds and remarks, found by what their names have in common."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cache
from itertools import chain
from typing import Literal

from keptair.catalogue.proposing.naming import LONGEST_NAME, Reading, read_ucd, without_units
from keptair.catalogue.proposing.sampling import Column
from keptair.catalogue.proposing.vocabulary import words

Role = Literal["error", "plus", "minus", "limit", "upper", "lower", "bare plus", "bare minus", "kind", "remark"]
SHORTEST_INSIDE = 3  # letters; shorter marks must stand by themselves
LAST_PIECE = re.compile(r"(?:[A-Z]?[a-z]+|[A-Z]+|\d+)$")
LONE_SIGN = re.compile(r"(?<![^\W_])[+-](?![^\W_])|[+-]$")
BEFORE = {"e": "error", "l": "limit", "f": "remark", "n": "remark", "r": "remark", "q": "remark", "u": "remark"}


@dataclass(frozen=True)
class Companion:
    """A column and what it is to another."""

    role: Role
    column: Column


def companions(
    columns: Sequence[Column], readings: Sequence[Reading], descriptions: Sequence[Reading]
) -> dict[int, list[Companion]]:
    """Position of a column → those that speak of it. A kind may be that of a quantity given in two units.

    readings, descriptions : of each column's name and description.
    """
    by_stem: dict[str, list[Column]] = {}
    by_bare_stem: dict[str, list[Column]] = {}
    meant: set[int] = set()  # columns of which something is said
    for column, reading, description in zip(columns, readings, descriptions, strict=True):
        by_stem.setdefault(stem(column.name), []).append(column)
        if reading.quantity or description.quantity or read_ucd(column.about.ucd) not in ("", "error"):
            meant.add(column.position)
        if reading.quantity:
            by_bare_stem.setdefault(without_units(column.name), []).append(column)
    found: dict[int, list[Companion]] = {}
    for column in columns:
        before = list(_before(column.name))
        for role, rest in chain(before, _roles(column.name)):
            of = [other for other in by_stem.get(rest, by_bare_stem.get(rest, ())) if other is not column]
            if role == "remark" or (role, rest) in before:  # one letter says little
                of = [other for other in of if other.position in meant]
            if len(of) == 1 or (of and role == "kind"):
                for other in of:
                    found.setdefault(other.position, []).append(Companion(role, column))
                break
    return found


def is_companion(column: Column, found: dict[int, list[Companion]]) -> bool:
    """Whether a column speaks of another, by its name or its UCD."""
    if read_ucd(column.about.ucd) == "error":
        return True
    return any(companion.column is column for several in found.values() for companion in several)


def stem(name: str) -> str:
    """A name without separators and cases, a sign that stands alone or at the end in words."""
    signed = LONE_SIGN.sub(lambda sign: "plus" if sign[0] == "+" else "minus", name.lower())
    return re.sub(r"[\W_]", "", signed)


def _roles(name: str) -> Iterator[tuple[Role, str]]:
    """What a name may be to another column, and the stem that must then be the other's."""
    if len(name) > LONGEST_NAME:
        return
    whole = stem(name)
    last = LAST_PIECE.search(name)
    for mark, role in _marks():
        alone = last is not None and last[0].lower() == mark
        if len(mark) >= SHORTEST_INSIDE and not role.startswith(("bare", "kind", "remark")):
            start = whole.rfind(mark)
            while start >= 0:
                yield role, whole[:start] + whole[start + len(mark) :]
                start = whole.rfind(mark, 0, start)
        elif alone or (whole.endswith(mark) and role in ("kind", "remark")):
            yield role, whole[: -len(mark)]


def _before(name: str) -> Iterator[tuple[Role, str]]:
    """e_Rp, E_Rp, l_Rp, as the tables of journals have them: E the upper error where both are there."""
    letter, separator = name[:1], name[1:2]
    if separator not in ("_", " ") or not separator or len(name) > LONGEST_NAME or stem(name) in words().symbols:
        return
    if letter == "E":
        yield "plus", stem(name[2:])
    elif letter in BEFORE:
        role: Role = BEFORE[letter]  # type: ignore[assignment]
        yield role, stem(name[2:])


@cache
def _marks() -> tuple[tuple[str, Role], ...]:
    """Marks in names and their roles, the longest first."""
    known = words()
    marks: dict[str, Role] = dict.fromkeys(known.remarks, "remark")
    marks |= dict.fromkeys(known.kind_columns, "kind")
    sides: dict[str, Role] = {"plus": "plus", "minus": "minus"}
    bare: dict[str, Role] = {"plus": "bare plus", "minus": "bare minus"}
    limits: dict[str, Role] = {"": "limit", "plus": "upper", "minus": "lower"}
    marks |= {word: bare[side] for word, side in known.bare_sides.items()}
    marks |= dict.fromkeys(known.errors, "error")
    for word in known.errors:
        for side, which in known.sides.items():
            marks[word + side] = marks[side + word] = sides[which]
    marks |= {word: limits[side] for word, side in known.limits.items()}
    return tuple(sorted(marks.items(), key=lambda item: -len(item[0])))
