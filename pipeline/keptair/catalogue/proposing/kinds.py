"""What a radius or mass is: measured, M sin i or from a relation, by the words of the columns beside it."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from keptair.catalogue.columns import KINDS
from keptair.catalogue.proposing.beside import Beside
from keptair.catalogue.proposing.candidates import Candidate
from keptair.catalogue.proposing.companions import Companion
from keptair.catalogue.proposing.sampling import Column
from keptair.catalogue.proposing.vocabulary import words
from keptair.catalogue.showing import listed, quoted

MOST_WORDS = 24  # of a column of kinds; one with more holds remarks
FEWEST_BARE = 5  # values without error that make one wonder
BARE = 0.02  # share of them


def kinds_of(
    candidate: Candidate, companions: Sequence[Companion], texts: Iterable[Column], found: Beside
) -> Column | None:
    """The column that says what the values are, put into the entry; those beside the number first, then any other."""
    possible = KINDS[candidate.input.name][1]
    own = [companion.column for companion in companions if companion.role in ("kind", "remark")]
    for column in own:
        kinds = _translated(column, possible)
        if kinds and set(kinds.values()) - {"measured", ""}:
            return _taken(column, kinds, found)
    if candidate.input.quantity == "mass":
        for column in texts:
            kinds = _translated(column, possible)
            if "minimum" in kinds.values() and column not in own:
                found.remarks.append(
                    f"{quoted(column.name)} speaks of M sin i; it was taken for the kinds of this mass"
                )
                return _taken(column, kinds, found)
    return None


def kind_of(word: str, possible: Sequence[str]) -> str:
    """measured, minimum or relation; "" where the word says neither."""
    known = words().kinds
    letters = re.sub(r"[^a-z/]", "", word.lower())
    for spelling in (letters, letters.replace("/", "")):
        if known.get(spelling) in possible:
            return known[spelling]
    parts = set(re.findall(r"[a-z]+", word.lower()))
    if "minimum" in possible and ("msin" in letters or "minimum" in parts) and "/sin" not in letters:
        return "minimum"
    for kind in ("relation", "measured"):
        if any(known.get(part) == kind and len(part) > 3 for part in parts):
            return kind
    return ""


def bare_relation(candidate: Candidate, errors: Sequence[Column], transiting: NDArray[np.bool_] | None) -> str:
    """Whether values without error are likely from a relation, because planets that never transit have them."""
    if not errors:
        return ""
    value = np.isfinite(candidate.values)
    bare = value.copy()
    for column in errors:
        bare &= ~(np.isfinite(column.numbers) & (column.numbers != 0))
    if bare.sum() < FEWEST_BARE or bare.sum() < BARE * value.sum() or bare.sum() == value.sum():
        return ""
    told = f"{bare.sum()} of {value.sum()} values have no error"
    if transiting is None:
        return f'{told}; if they are from a relation, say without_error = "relation"'
    with_error, without = transiting[value & ~bare].mean(), transiting[bare].mean()
    if without < 0.5 < with_error:
        return f"{told}, and {1 - without:.0%} of those planets are not known to transit"
    return f'{told}; if they are from a relation, say without_error = "relation"'


def _taken(column: Column, kinds: dict[str, str], found: Beside) -> Column:
    unknown = [word for word, kind in kinds.items() if not kind]
    if unknown:
        found.remarks.append(f"taken as measured, check: {listed(unknown)}")
    found.entry["kind"] = column.reference
    found.entry["kinds"] = {word: kind or "measured" for word, kind in kinds.items()}
    return column


def _translated(column: Column, possible: Sequence[str]) -> dict[str, Any]:
    """Each word of a column and its kind, "" where it is not known; nothing if it is no column of kinds."""
    if column.is_numeric or not 0 < len(column.words) <= MOST_WORDS:
        return {}
    return {word: kind_of(word, possible) for word, _ in column.words.most_common()}
