"""Which column names the planet, and which its star."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import islice

import numpy as np
from numpy.typing import NDArray

from keptair.catalogue.proposing.model import Guess, Question, confidence
from keptair.catalogue.proposing.naming import Reading, read_ucd
from keptair.catalogue.proposing.sampling import Column
from keptair.catalogue.showing import quoted

LIKE_A_PLANET = re.compile(r"(?:[\s\d_)\]-][b-k]|\.0?\d{1,2})$")  # Brim 4 b, K00012.01
LOOKED_AT = 2000  # different names
DIFFERENT = 0.95  # share of different names a column of planets has at least
FULL = 0.98
FEWEST_STARS = 0.1  # for each planet


@dataclass(frozen=True)
class Names:
    """A column that may hold names."""

    column: Column
    subject: str
    doubts: tuple[str, ...]

    @property
    def filled(self) -> NDArray[np.bool_]:
        return np.asarray(self.column.texts != "")

    @property
    def share(self) -> float:
        return float(self.filled.mean()) if len(self.column.texts) else 0.0

    @property
    def different(self) -> float:
        count = self.column.words.total()
        return len(self.column.words) / count if count else 0.0


def guess_planet(names: Sequence[Names]) -> tuple[Guess | None, Question | None, list[Column]]:
    """The column of names that differ; a second one where the first has gaps."""
    possible = [name for name in names if name.subject not in ("star", "system")]
    own = [name for name in possible if name.column.name == "planet_id"]
    doubted = {name.column.position: _doubts_of_planet(name) for name in possible}
    ranked = sorted(own or possible, key=lambda name: (len(doubted[name.column.position]), -round(name.share, 2)))
    if not ranked or not (own or ranked[0].column.words):
        return None, Question("planet_id", "no column names the planet; say [columns.planet_id] from = …"), []
    best = ranked[0]
    doubts = doubted[best.column.position]
    columns = [best.column]
    if best.share < FULL and not own:
        rest = [name for name in ranked[1:] if _fills(name, best)]
        columns += [name.column for name in rest[:1]]
        doubts = [doubt for doubt in doubts if not (rest and doubt.endswith("rows"))]
    if own:
        doubts = []
    sure = confidence(len(doubts))
    listed = " and ".join(quoted(column.name) for column in columns)
    if sure is None:
        return None, Question("planet_id", f"{listed} may name the planet; {'; '.join(doubts)}"), []
    counts = f"{len(best.column.words)} different names in {best.column.words.total()} rows that have one"
    reason = "; ".join([counts, *(f"but {doubt}" for doubt in doubts)])
    if len(columns) > 1:
        reason += f"; {quoted(columns[1].name)} where it is empty"
    return Guess("planet_id", tuple(column.reference for column in columns), sure, reason), None, columns


def guess_host(names: Sequence[Names], planet: Sequence[Column]) -> tuple[Guess | None, Question | None, list[Column]]:
    """A star before a system; the planets' names may begin with it."""
    taken = {column.position for column in planet}
    possible = [name for name in names if name.subject in ("star", "system") and name.column.position not in taken]
    possible = [name for name in possible if name.column.words or name.column.name == "host_id"]
    if not possible:
        return None, None, []
    begins = {name.column.position: _begins(planet, name.column) for name in possible}

    def order(name: Names) -> tuple[float, ...]:
        return (
            name.column.name != "host_id",
            len(name.doubts),
            name.column.is_numeric,
            name.share < DIFFERENT,
            name.subject != "star",
            -round(begins[name.column.position], 1),
        )

    best, *others = sorted(possible, key=order)
    doubts = list(best.doubts)
    if best.column.is_numeric and best.column.name != "host_id":
        doubts.append("it holds only numbers")
    if planet and len(best.column.words) < FEWEST_STARS * len(planet[0].words) and best.column.name != "host_id":
        doubts.append(f"only {len(best.column.words)} differ")
    sure = confidence(len(doubts))
    if sure is None:
        return None, Question("host_id", f"{quoted(best.column.name)} may name the star; {'; '.join(doubts)}"), []
    reason = f"its name says {best.subject}; {len(best.column.words)} different names"
    if begins[best.column.position] > 0.5:
        reason += ", with which the planets' names begin"
    reason = "; ".join([reason, *(f"but {doubt}" for doubt in doubts)])
    if others:
        reason += "; rather than " + ", ".join(quoted(name.column.name) for name in others[:3])
    return Guess("host_id", (best.column.reference,), sure, reason), None, [best.column]


def columns_of_names(columns: Sequence[Column], readings: Sequence[tuple[Reading, Reading]]) -> list[Names]:
    """Columns that say they name something."""
    found = []
    for column, (name, description) in zip(columns, readings, strict=True):
        if column.name in ("planet_id", "host_id"):
            found.append(Names(column, "planet" if column.name == "planet_id" else "star", ()))
            continue
        named = name.quantity == "name" or (not name.quantity and name.subject and not name.unknown)
        described = description.quantity == "name" and not name.quantity
        if name.other:
            continue
        if not (named or described or read_ucd(column.about.ucd) == "name"):
            if name.unknown and not column.is_numeric and _alike(column) > 0.5:
                found.append(Names(column, "planet", ("only its words look like names of planets",)))
            continue
        doubts = [f"{quoted(word, 20)} in its name is not understood" for word in name.unknown[:1]]
        if name.usually:
            doubts.append("the word has other meanings")
        if description.quantity == "name":
            doubts = []
        found.append(Names(column, name.subject or description.subject, tuple(doubts)))
    return found


def _doubts_of_planet(name: Names) -> list[str]:
    column, doubts = name.column, list(name.doubts)
    alike = _alike(column)
    if name.subject != "planet" and alike < 0.5:
        doubts.append("nothing says that it is the planet's")
    if name.different < DIFFERENT:
        doubts.append(f"only {len(column.words)} of {column.words.total()} differ")
    if name.different < DIFFERENT / 2:
        doubts.append("most are there several times")
    if name.share < FULL:
        doubts.append(f"{int((~name.filled).sum())} are missing in {len(column.texts)} rows")
    if column.is_numeric and alike < 0.5:
        doubts.append("it holds only numbers")
    return doubts


def _alike(column: Column) -> float:
    """Share of the words that look like names of planets."""
    seen = list(islice(column.words, LOOKED_AT))
    return sum(bool(LIKE_A_PLANET.search(word)) for word in seen) / max(1, len(seen))


def _fills(other: Names, best: Names) -> bool:
    """Whether a column has names where the best has none, and they differ."""
    gaps = ~best.filled
    return other.different >= DIFFERENT and float(other.filled[gaps].mean()) > 0.5


def _begins(planet: Sequence[Column], host: Column) -> float:
    """Share of rows in which the planet's name begins with the star's."""
    if not planet:
        return 0.0
    pairs = list(zip(planet[0].texts[:LOOKED_AT], host.texts[:LOOKED_AT], strict=True))
    both = [(name, star) for name, star in pairs if name and star]
    return sum(name.startswith(star) for name, star in both) / max(1, len(both))
