"""Rows that had better be left out: nothing is filtered by a guess, but the lines to do it are there."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

import numpy as np

from keptair.catalogue.proposing.identifiers import DIFFERENT
from keptair.catalogue.proposing.model import Hint
from keptair.catalogue.proposing.naming import Reading
from keptair.catalogue.proposing.sampling import Column
from keptair.catalogue.proposing.vocabulary import plain

NO_PLANETS = ("false", "refuted", "retracted", "withdrawn", "rejected")
MOST_WORDS = 12  # of a column that says what a row is


def hints(columns: Sequence[tuple[Column, Reading]], planet: Sequence[Column]) -> list[Hint]:
    """Planets that are none, and tables with several rows for each planet."""
    return [*_no_planets(columns), *_one_row_each([column for column, _ in columns], planet)]


def _no_planets(columns: Iterable[tuple[Column, Reading]]) -> Iterable[Hint]:
    for column, name in columns:
        if name.quantity == "disposition" and column.reference == column.name and 0 < len(column.words) <= MOST_WORDS:
            gone = [word for word in column.words if _says_none(word)]
            if gone:
                yield Hint("rows that are no planets, as it seems", "drop", column.name, tuple(gone))


def _says_none(word: str) -> bool:
    return plain(word) == "fp" or any(part in word.lower() for part in NO_PLANETS)


def _one_row_each(columns: Sequence[Column], planet: Sequence[Column]) -> Iterable[Hint]:
    """A flag that is 1 in one row of each planet."""
    if not planet or len(planet[0].words) > DIFFERENT * planet[0].words.total():
        return
    names = planet[0].texts
    for column in columns:
        if set(column.words) != {"0", "1"} or column.reference != column.name:
            continue
        flagged = names[column.numbers == 1]
        different = len(np.unique(flagged))
        if different == len(flagged) and different > DIFFERENT * len(planet[0].words):
            yield Hint("one row for each planet", "keep", column.name, ("1",))
            return
