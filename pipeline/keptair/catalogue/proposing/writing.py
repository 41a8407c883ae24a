"""A proposal as TOML: every guess with its reason, what is open and what is left over as comments."""

from __future__ import annotations

import textwrap
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from keptair.catalogue.proposing.model import Guess, Question
from keptair.catalogue.showing import quoted, shown

WIDTH = 110
LEFT_OVER = 60  # columns named at the end
ESCAPES = {'"': '\\"', "\\": "\\\\", "\n": "\\n", "\t": "\\t", "\r": "\\r", "\b": "\\b", "\f": "\\f"}
TABLES = ("kinds", "words")


def toml(
    about: str,
    guesses: Sequence[Guess],
    questions: Sequence[Question],
    drops: Sequence[tuple[str, Sequence[str]]],
    nothing_for: Sequence[str],
    left_over: Sequence[str],
) -> str:
    """The column map. about : the file in a few words; drops : columns and words of rows to leave out, as a hint."""
    lines = [*_comment(about), ""]
    for guess in guesses:
        if guess.sources:
            lines += [*_entry(guess), ""]
    constants = [guess for guess in guesses if not guess.sources]
    if constants:
        lines.append("[constants]")
        for guess in constants:
            lines += [*_comment(f"{guess.confidence}: {guess.reason}"), f"{guess.name} = {literal(guess.constant)}"]
        lines.append("")
    if questions:
        lines.append("# Not guessed:")
        for question in questions:
            lines += _comment(f"{question.name}: {question.text}", "  ")
    for column, words in drops:
        lines += _comment("Rows of planets that are none, as it seems; without the # they are left out:")
        lines += ["# [rows.drop]", f"# {literal(column)} = {literal(list(words))}"]
    if nothing_for:
        lines += _comment(f"Nothing found for {', '.join(nothing_for)}.")
    if left_over:
        more = len(left_over) - LEFT_OVER
        named = ", ".join(quoted(name, 40) for name in left_over[:LEFT_OVER])
        lines += _comment(f"Not used: {named}{f' and {more} more' if more > 0 else ''}.")
    return "\n".join(lines).rstrip("\n") + "\n"


def literal(value: Any) -> str:
    """A value as TOML writes it."""
    if isinstance(value, str):
        return f'"{"".join(_escaped(letter) for letter in value)}"'
    if isinstance(value, list | tuple):
        return f"[{', '.join(literal(part) for part in value)}]"
    return repr(value)


def _entry(guess: Guess) -> Iterator[str]:
    yield f"[columns.{guess.name}]"
    yield from _comment(f"{guess.confidence}: {guess.reason}")
    for remark in guess.remarks:
        yield from _comment(remark)
    sources = guess.sources[0] if len(guess.sources) == 1 else list(guess.sources)
    yield f"from = {literal(sources)}"
    if guess.unit:
        yield f"unit = {literal(guess.unit)}"
    for key, value in guess.entry.items():
        if key not in TABLES:
            yield f"{key} = {literal(value)}"
    for key in TABLES:
        if key in guess.entry:
            yield from _table(f"columns.{guess.name}.{key}", guess.entry[key])


def _table(name: str, words: Mapping[str, str]) -> Iterator[str]:
    yield f"[{name}]"
    for word, meaning in words.items():
        yield f"{literal(word)} = {literal(meaning)}"


def _comment(text: str, indent: str = "") -> list[str]:
    """Comment lines; whatever the text holds, it stays in them."""
    safe = shown(" ".join(text.split()), 4000)
    return textwrap.wrap(
        safe, WIDTH, initial_indent=f"# {indent}", subsequent_indent=f"# {indent}  ", break_on_hyphens=False
    ) or ["#"]


def _escaped(letter: str) -> str:
    if letter in ESCAPES:
        return ESCAPES[letter]
    code = ord(letter)
    if code < 0x20 or code == 0x7F:
        return f"\\u{code:04X}"
    return letter
