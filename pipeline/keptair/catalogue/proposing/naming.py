"""What a column's name, description or UCD says: quantity, whose it is, unit."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache

from keptair.catalogue.proposing.vocabulary import Words, words

PIECES = re.compile(r"[^\W_]+|[*⋆☉⊙⊕♃]")
CASES = re.compile(r"[A-Z]+(?![a-z])|[A-Z]?[a-z]+|\d+|[^\W_]")
BRACKETS = re.compile(r"[\[(]\s*([^\[\]()]+(?:\([^\[\]()]*\))?)\s*[\])]\s*$")
LONGEST_NAME = 120  # longer ones are not taken apart
LONGEST_PHRASE = 4  # words written apart that make one: semi_major_axis
COSTS = {1: 6, 2: 7, 3: 5}  # of a word by its letters: a long word is more likely meant than two short ones
COMMON = 3  # columns that begin with the same unknown word: it names a source, not a quantity


@dataclass(frozen=True)
class Reading:
    """What is understood.

    quantity : "" where nothing or too much is.
    unit : a unit written out in brackets; unit_words : words of units in the name.
    other : the trade knows it, and it is none of the inputs.
    unknown : pieces nobody understands.
    brief : the quantity is only a letter, or only the unit speaks of it.
    glued : whose it is stands as one letter without a separator.
    usually : the word usually means the quantity, but not always.
    """

    quantity: str = ""
    subject: str = ""
    unit: str = ""
    unit_words: tuple[str, ...] = ()
    logarithm: bool = False
    other: bool = False
    unknown: tuple[str, ...] = ()
    brief: bool = False
    glued: bool = False
    usually: bool = False


def read_names(names: Sequence[str]) -> list[Reading]:
    """Every name by itself, then unknown beginnings that many columns share taken for what they are: a source."""
    readings = [read_name(name) for name in names]
    beginnings = Counter(_beginning(name) for name in names)
    common = {word for word, count in beginnings.items() if count >= COMMON}
    styles = Counter((reading.glued, reading.subject) for reading in readings)
    return [
        replace(
            reading,
            unknown=tuple(word for word in reading.unknown if word not in common or word != _beginning(name)),
            glued=reading.glued and styles[True, reading.subject] < COMMON,
        )
        for name, reading in zip(names, readings, strict=True)
    ]


def read_name(name: str) -> Reading:
    """One name, taken apart."""
    if len(name) > LONGEST_NAME:
        return Reading(unknown=(name[:10],))
    brackets = BRACKETS.search(name)
    unit = brackets[1].strip() if brackets else ""
    bare = name[: brackets.start()] if brackets else name
    if all(piece.lower() in words().logarithm for piece in PIECES.findall(bare)):
        bare, unit = name, ""  # what is in brackets is the name: log(L)
    pieces = PIECES.findall(bare)
    tokens: list[str] = []
    glued = False
    for piece in _phrases(pieces):
        found, by_letter = _taken_apart(piece)
        tokens += found
        glued |= by_letter
    return replace(_understood(tokens), unit=unit, glued=glued)


def without_units(name: str) -> str:
    """The words of a name without those for units, joined."""
    if len(name) > LONGEST_NAME:
        return name.lower()
    brackets = BRACKETS.search(name)
    pieces = _phrases(PIECES.findall(name[: brackets.start()] if brackets else name))
    tokens = [token for piece in pieces for token in _taken_apart(piece)[0]]
    if len(tokens) > 1 and tokens[-1] in ("e", "j") and tokens[-2] in words().quantities:
        tokens.pop()
    return "".join(token for token in tokens if len(token) == 1 or token not in words().units)


def read_description(text: str) -> Reading:
    """A description: what it speaks of first counts; words it does not know do not."""
    brackets = BRACKETS.search(text.strip().rstrip("."))
    known = words()
    tokens = [piece.lower() for piece in _phrases(PIECES.findall(text)[:12])]
    logarithm = any(token in known.logarithm for token in tokens)
    reading = Reading(unit=brackets[1].strip() if brackets else "", logarithm=logarithm)
    for token in tokens:
        if token in known.others and not reading.quantity:
            return replace(reading, other=True)
        quantity, subject = _meaning(token, known)
        if subject and not reading.subject:
            reading = replace(reading, subject=subject)
        if quantity and not reading.quantity:
            reading = replace(reading, quantity=quantity, usually=token in known.usual)
        elif token in known.units and len(token) > 1 and reading.quantity:
            reading = replace(reading, unit_words=(*reading.unit_words, token))
    band = next((known.letters[token] for token in tokens if token in ("j", "k", "ks")), "")
    return replace(reading, quantity=band) if reading.quantity == "magnitude" and band else reading


def read_ucd(ucd: str) -> str:
    """The quantity a UCD names, "" if none; `error` for an error."""
    plain = ucd.lower().replace(" ", "")
    if plain.startswith("stat.error"):
        return "error"
    return next((quantity for start, quantity in words().ucds.items() if plain.startswith(start)), "")


def _meaning(token: str, known: Words) -> tuple[str, str]:
    """Quantity and subject of a word."""
    if token in known.symbols:
        return known.symbols[token]
    quantity = known.quantities.get(token) or known.usual.get(token) or ""
    return quantity, known.subjects.get(token, "")


def _understood(tokens: list[str]) -> Reading:
    known = words()
    owners = {known.symbols[token][1] for token in tokens if token in known.symbols}
    quantities: list[str] = []
    usual: list[str] = []
    subjects: list[str] = []
    unit_words: list[str] = []
    letters: list[str] = []
    unknown: list[str] = []
    for token in tokens:
        quantity, subject = _meaning(token, known)
        if len(token) == 1 and (token in known.letters or token in known.units):
            letters.append(token)
        elif token in known.usual:
            usual.append(known.usual[token])
        elif quantity:
            quantities.append(quantity)
        elif token in known.units:
            unit_words.append(token)
        elif token in known.letters:
            letters.append(token)
        elif not (subject or token in known.fillers or token in known.logarithm or token in known.others):
            unknown.append(token)
        if subject:
            subjects.append(subject)
    reading = Reading(
        subject=_one_subject(subjects),
        unit_words=tuple(unit_words),
        logarithm=any(token in known.logarithm for token in tokens),
        other=any(token in known.others for token in tokens) or len(owners) > 1,  # a radius over another
        unknown=tuple(unknown),
    )
    if not quantities and usual:
        quantities, reading = usual[:1], replace(reading, usually=True)
    elif "insolation" in usual and "insolation" not in quantities:
        quantities.append("insolation")  # the flux of something
    return _with_quantity(reading, list(dict.fromkeys(quantities)), letters)


def _with_quantity(reading: Reading, quantities: list[str], letters: list[str]) -> Reading:
    """The one quantity, and what the single letters mean beside it."""
    known = words()
    if "magnitude" in quantities and any(letter in ("j", "k", "ks") for letter in letters):
        quantities = [known.letters[next(letter for letter in letters if letter in ("j", "k", "ks"))]]
        letters = [letter for letter in letters if letter not in ("j", "k", "ks")]
    brief = False
    if not quantities and not reading.other:
        implied = [known.units[word].implies for word in reading.unit_words if known.units[word].implies]
        brief = True
        if letters and letters[0] in known.letters and not reading.unknown:
            quantities, letters = [known.letters[letters[0]]], letters[1:]
        else:
            quantities = implied[:1]
    for more in ({"xray", "luminosity"}, {"minimum_mass", "mass"}):
        if set(quantities) == more:
            quantities = ["xray" if "xray" in more else "minimum_mass"]
    as_subject = [known.subject_letters[letter] for letter in letters if letter in known.subject_letters]
    return replace(
        reading,
        quantity=quantities[0] if len(quantities) == 1 else "",
        other=reading.other or len(quantities) > 1,
        brief=brief,
        subject=_one_subject([reading.subject, *as_subject]),
        unit_words=(*reading.unit_words, *(letter for letter in letters if letter in known.units)),
        unknown=(
            *reading.unknown,
            *(letter for letter in letters if letter not in known.units and letter not in known.subject_letters),
        ),
    )


def _one_subject(subjects: list[str]) -> str:
    """A planet's host is a star; a system's planet is a planet."""
    for subject in ("star", "planet", "system"):
        if subject in subjects:
            return subject
    return ""


def _phrases(pieces: list[str]) -> list[str]:
    """Neighbouring pieces joined where together they are a word."""
    known = words()
    joined: list[str] = []
    start = 0
    while start < len(pieces):
        for size in range(min(LONGEST_PHRASE, len(pieces) - start), 1, -1):
            phrase = "".join(pieces[start : start + size]).lower()
            if known.knows(phrase):
                joined.append(phrase)
                start += size
                break
        else:
            joined.append(pieces[start])
            start += 1
    return joined


def _taken_apart(piece: str) -> tuple[list[str], bool]:
    """The words a piece is made of, itself where it is no word; whether a single letter says whose it is."""
    found, glued = _segmented(piece.lower())
    if found:
        return list(found), glued
    parts = CASES.findall(piece)
    if 1 < len(parts) <= LONGEST_PHRASE:
        several = [_segmented(part.lower()) for part in _phrases(parts)]
        if all(found for found, _ in several):
            return [word for found, _ in several for word in found], any(glued for _, glued in several)
    return [piece.lower()], False


@lru_cache(4096)
def _segmented(piece: str) -> tuple[tuple[str, ...], bool]:
    """The fewest known words that make up the piece; nothing if there are none.

    Of words glued together one must have three letters; single letters stand only at the ends.
    """
    known = words()
    if piece in known.unlike:
        return (), False
    if known.knows(piece) or (len(piece) == 1 and (piece in known.letters or piece in known.units)):
        return (piece,), False
    best: list[tuple[int, tuple[str, ...]] | None] = [(0, ())] + [None] * len(piece)
    for end in range(1, len(piece) + 1):
        for start in range(max(0, end - 24), end):
            word, before = piece[start:end], best[start]
            if before is None or not (known.knows(word) or _letter_at_the_end(word, start, end == len(piece))):
                continue
            cost = before[0] + COSTS.get(len(word), 4)
            there = best[end]
            if there is None or cost < there[0]:
                best[end] = (cost, (*before[1], word))
    found = best[-1]
    if found is None or not any(len(word) >= 3 for word in found[1]):
        return (), False
    pieces = found[1]
    glued = pieces[0] in known.subject_letters or pieces[-1] in known.subject_letters
    return pieces, glued


def _letter_at_the_end(word: str, start: int, last: bool) -> bool:
    if len(word) != 1:
        return False
    known = words()
    return (start == 0 and (word in known.subject_letters or word == "b")) or (
        last and start > 0 and (word in "ej" or word in known.subject_letters)
    )


def _beginning(name: str) -> str:
    pieces = PIECES.findall(name[:LONGEST_NAME])
    return pieces[0].lower() if pieces else ""
