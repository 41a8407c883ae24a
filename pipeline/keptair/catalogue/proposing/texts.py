"""The canonical texts: transits, dates of change, backgrounds and kinds, by what stands in the cells."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from datetime import UTC, datetime
from itertools import islice
from typing import Any

import numpy as np
from numpy.typing import NDArray

from keptair.catalogue.cells import without_point_zero
from keptair.catalogue.columns import KINDS, looked_up
from keptair.catalogue.proposing.model import Guess, Question, confidence
from keptair.catalogue.proposing.naming import Reading
from keptair.catalogue.proposing.sampling import Column
from keptair.catalogue.proposing.vocabulary import plain, words
from keptair.catalogue.showing import listed, quoted

Read = tuple[Column, Reading, Reading]  # a column, its name, its description
Found = tuple[Guess | None, Question | None, list[Column]]
NOTHING: Found = (None, None, [])

MOST_WORDS = 12  # of a flag; a column with more says something else
DATES_LOOKED_AT = 3000
FORMATS = (
    "%Y-%m-%d", "%Y/%m/%d", "%Y.%m.%d", "%Y%m%d", "%y-%m-%d", "%y/%m/%d", "%d.%m.%Y", "%d/%m/%Y", "%m/%d/%Y", "%d-%m-%Y",
    "%d.%m.%y", "%d/%m/%y", "%m/%d/%y", "%d %b %Y", "%d %B %Y", "%d-%b-%Y", "%b %d %Y", "%b %d, %Y", "%B %d, %Y",
    "%Y %b %d", "%Y-%b-%d", "%Y-%m", "%Y/%m/%d %H:%M:%S", "%d.%m.%Y %H:%M", "%d/%m/%Y %H:%M", "%m/%d/%Y %H:%M",
)  # fmt: skip
OLDEST = 1980  # tables were not kept before


def guess_transits(columns: Sequence[Read]) -> Found:
    """A flag of transits, else the method by which the planet was found."""
    for column, name, description in columns:
        if column.name == "transits":
            return Guess("transits", (column.reference,), "high", "it has the canonical name"), None, [column]
        if "transit" in (name.quantity, description.quantity) and not name.other and 0 < len(column.words) <= MOST_WORDS:
            translated = {word: words().transits.get(plain(without_point_zero(word)), "") for word in column.words}
            known = sum(count for word, count in column.words.items() if translated[word])
            sure = confidence(len(name.unknown))
            if sure and known > 0.5 * column.words.total():
                return _with_words("transits", column, translated, sure, "its name says transit"), None, [column]
    for column, name, description in columns:
        if "method" in (name.quantity, description.quantity) and column.words:
            yes = {word: "yes" for word in column.words if words().transits.get(plain(word).removesuffix("s")) == "yes"}
            yes = {word: answer for word, answer in yes.items() if plain(word) not in ("1", "y", "t", "true")}
            if yes:
                reason = "planets found by their transits do transit; of others nothing is known"
                entry = {"words": {**yes, "*": ""}}
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
    for column, name, description in columns:
        own = column.name == "updated"
        if not own and (name.other or "updated" not in (name.quantity, description.quantity) or not column.words):
            continue
        seen = list(islice(column.words, DATES_LOOKED_AT))
        if all(_is_iso(word) for word in seen):
            fitting = [""]
        else:
            fitting = [pattern for pattern in FORMATS if all(_is_date(word, pattern) for word in seen)]
        if len(fitting) > 1:
            written = " or ".join(f'"{pattern}"' for pattern in fitting)
            text = f"{quoted(column.name)} ({listed(seen, 2)}) may be written {written}; say which"
            return None, Question("updated", text), []
        doubts = len(name.unknown) + name.usually if not own else 0
        sure = confidence(doubts)
        if fitting and sure:
            entry = {"date": fitting[0]} if fitting[0] else {}
            reason = f"its name says so; {listed(seen, 1)} and all others are dates" if seen else "it has the canonical name"
            return Guess("updated", (column.reference,), sure, reason, entry=entry), None, [column]
    return NOTHING


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
            sure = "high" if own or (said and not unknown) else "fair"
            return Guess("background", (column.reference,), sure, reason, remarks=remarks), None, [column]
        if said and column.words:
            text = f"{quoted(column.name)} says {listed(list(column.words), 4)}, which are no names of backgrounds"
            return None, Question("background", text), []
    return NOTHING


def own_kinds(columns: Sequence[Column]) -> list[tuple[Guess, Column]]:
    """Kinds under their canonical names."""
    kinds = {kind for kind, _ in KINDS.values()}
    return [
        (Guess(column.name, (column.reference,), "high", "it has the canonical name"), column)
        for column in columns
        if column.name in kinds and not column.repeated
    ]


def dropped(columns: Sequence[Read]) -> list[tuple[Column, list[str]]]:
    """Columns of dispositions and their words for planets that are none."""
    none = ("false", "refuted", "retracted", "withdrawn", "rejected")
    found = []
    for column, name, _ in columns:
        if name.quantity == "disposition" and 0 < len(column.words) <= MOST_WORDS:
            gone = [word for word in column.words if any(part in word.lower() for part in none)]
            found += [(column, gone)] if gone else []
    return found


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
    return _succeeds(lambda: datetime.fromisoformat(word.replace("Z", "+00:00")))


def _is_date(word: str, pattern: str) -> bool:
    """Whether it is a date so written, at which a table may have been changed."""
    if not _succeeds(lambda: datetime.strptime(word, pattern)):
        return False
    return OLDEST <= datetime.strptime(word, pattern).year <= datetime.now(UTC).year + 1


def _succeeds(parse: Callable[[], object]) -> bool:
    try:
        parse()
    except (ValueError, OverflowError):
        return False
    return True
