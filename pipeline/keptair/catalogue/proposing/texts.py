"""The canonical texts: transits, dates of change, backgrounds and kinds, by what stands in the cells."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import UTC, datetime
from itertools import islice
from typing import Any

import numpy as np
from numpy.typing import NDArray

from keptair.catalogue.cells import without_point_zero
from keptair.catalogue.columns import KINDS, looked_up
from keptair.catalogue.proposing.model import Confidence, Guess, Question, confidence
from keptair.catalogue.proposing.naming import Reading
from keptair.catalogue.proposing.sampling import Column
from keptair.catalogue.proposing.vocabulary import plain, words
from keptair.catalogue.showing import listed, quoted

Read = tuple[Column, Reading, Reading]  # a column, its name, its description
Found = tuple[Guess | None, Question | None, list[Column]]
NOTHING: Found = (None, None, [])

CANONICAL = "it has the canonical name"
MOST_WORDS = 12  # of a flag; a column with more says something else
MOST_METHODS = 40
DATES_LOOKED_AT = 3000
FORMATS = (
    "%Y-%m-%d", "%Y/%m/%d", "%Y.%m.%d", "%Y%m%d", "%y-%m-%d", "%y/%m/%d", "%d.%m.%Y", "%d/%m/%Y", "%m/%d/%Y",
    "%d-%m-%Y", "%d.%m.%y", "%d/%m/%y", "%m/%d/%y", "%d %b %Y", "%d %B %Y", "%d-%b-%Y", "%b %d %Y", "%b %d, %Y",
    "%B %d, %Y", "%Y %b %d", "%Y-%b-%d", "%Y/%m/%d %H:%M:%S", "%d.%m.%Y %H:%M", "%d/%m/%Y %H:%M", "%m/%d/%Y %H:%M",
)  # fmt: skip
OLDEST = 1980  # tables were not kept before


def guess_transits(columns: Sequence[Read]) -> Found:
    """A flag of transits, else the method by which the planet was found."""
    for column, name, description in sorted(columns, key=lambda read: read[0].name != "transits"):
        own = column.name == "transits"
        said = "transit" in (name.quantity, description.quantity) and not name.other
        if not own and not (said and 0 < len(column.words) <= MOST_WORDS):
            continue
        translated = {word: words().transits.get(plain(without_point_zero(word)), "") for word in column.words}
        known = sum(count for word, count in column.words.items() if translated[word])
        sure = "high" if own else confidence(len(name.unknown))
        if own and not known:
            return Guess("transits", (column.reference,), "high", CANONICAL), None, [column]
        if own or (sure and known > 0.5 * column.words.total()):
            reason = CANONICAL if own else "its name says transit"
            return _with_words("transits", column, translated, sure, reason), None, [column]
    return _by_method(columns)


def _by_method(columns: Sequence[Read]) -> Found:
    for column, name, description in columns:
        if "method" in (name.quantity, description.quantity) and len(column.words) <= MOST_METHODS:
            yes = [word for word in column.words if words().transits.get(plain(word).removesuffix("s")) == "yes"]
            yes = [word for word in yes if "transit" in word.lower()]
            if yes:
                reason = "planets found by their transits do transit; of others nothing is known"
                entry = {"words": {**dict.fromkeys(yes, "yes"), "*": ""}}
                return Guess("transits", (column.reference,), "fair", reason, entry=entry), None, [column]
    return NOTHING


def transiting(guess: Guess | None, columns: Sequence[Column]) -> NDArray[np.bool_] | None:
    """Which rows the guess says transit."""
    column = next((column for column in columns if guess and column.reference in guess.sources), None)
    if guess is None or column is None:
        return None
    answers: dict[str, str] = guess.entry.get("words", {"yes": "yes"})
    yes = [word for word in column.words if looked_up(word, answers) == "yes"]
    return np.isin(column.texts, np.array(yes, dtype=object))


def guess_updated(columns: Sequence[Read]) -> Found:
    """The date the row was last changed, and how it is written."""
    ranked = sorted(columns, key=lambda read: (read[0].name != "updated", read[1].usually, len(read[1].unknown)))
    for column, name, description in ranked:
        own = column.name == "updated"
        if not own and (name.other or "updated" not in (name.quantity, description.quantity) or not column.words):
            continue
        seen = list(islice(column.words, DATES_LOOKED_AT))
        fitting = _patterns(seen)
        sure = "high" if own else confidence(len(name.unknown) + name.usually)
        question = None
        if len(fitting) > 1:
            written = " or ".join(f'"{pattern}"' for pattern in fitting)
            question = Question("updated", f"{quoted(column.name)} ({listed(seen, 2)}) may be {written}; say date = …")
        if own and len(fitting) != 1:
            return Guess("updated", (column.reference,), "low", CANONICAL), question, [column]
        if question:
            return None, question, []
        if fitting and sure:
            entry = {"date": fitting[0]} if fitting[0] else {}
            reason = f"its name says so; {listed(seen, 1)} are dates" if seen else CANONICAL
            return Guess("updated", (column.reference,), sure, reason, entry=entry), None, [column]
    return NOTHING


def _patterns(seen: Sequence[str]) -> list[str]:
    """The ways all of the dates may be written, "" for ISO 8601, which excludes all others."""
    if all(_is_iso(word) for word in seen):
        return [""]
    return [pattern for pattern in FORMATS if all(_is_date(word, pattern) for word in seen)]


def guess_background(columns: Sequence[Read]) -> Found:
    """A column whose words are keys of backgrounds."""
    from keptair.reference import load_backgrounds

    keys = load_backgrounds()
    for column, name, description in columns:
        own = column.name == "background"
        said = "background" in (name.quantity, description.quantity)
        if not own and (name.other or name.unknown or not 0 < len(column.words) <= len(keys) + MOST_WORDS):
            continue
        known = sum(count for word, count in column.words.items() if word in keys)
        if own or (known > 0.5 * column.words.total() and (said or known == column.words.total())):
            unknown = [word for word in column.words if word not in keys]
            remarks = (f"no background is called {listed(unknown)}; such cells are emptied",) if unknown else ()
            reason = f"its words are names of backgrounds ({listed(sorted(set(column.words) & set(keys)), 4)})"
            sure: Confidence = "high" if own or (said and not unknown) else "fair"
            return Guess("background", (column.reference,), sure, reason, remarks=remarks), None, [column]
        if said and column.words:
            text = f"{quoted(column.name)} says {listed(list(column.words), 4)}, which are no names of backgrounds"
            return None, Question("background", text), []
    return NOTHING


def own_kinds(columns: Sequence[Column]) -> list[tuple[Guess, Column]]:
    """Kinds under their canonical names."""
    kinds = {kind for kind, _ in KINDS.values()}
    return [
        (Guess(column.name, (column.reference,), "high", CANONICAL), column)
        for column in columns
        if column.name in kinds
    ]


def _with_words(name: str, column: Column, translated: dict[str, str], sure: Any, reason: str) -> Guess:
    """The words that have a meaning, and all others as nothing."""
    known = {without_point_zero(word): answer for word, answer in translated.items() if answer}
    unknown = [word for word, answer in translated.items() if not answer]
    if all(word == answer for word, answer in known.items()) and not unknown:
        return Guess(name, (column.reference,), sure, reason)
    remarks = (f"taken as unknown: {listed(unknown)}",) if unknown else ()
    entry = {"words": {**known, **({"*": ""} if unknown else {})}}
    return Guess(name, (column.reference,), sure, reason, entry=entry, remarks=remarks)


def _is_iso(word: str) -> bool:
    if len(word) < 10 or not word[:4].isdigit() or word[4] != "-":
        return False
    try:
        datetime.fromisoformat(word)
    except ValueError:
        return False
    return True


def _is_date(word: str, pattern: str) -> bool:
    """Whether it is a date so written, at which a table may have been changed."""
    try:
        year = datetime.strptime(word, pattern).year
    except ValueError:
        return False
    return OLDEST <= year <= datetime.now(UTC).year + 1
