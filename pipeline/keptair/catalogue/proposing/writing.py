"""A proposal as TOML: every guess with its reason, what is open and what is left over as comments."""

from __future__ import annotations

import textwrap
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from keptair.catalogue.proposing.model import Guess, Hint, Question
from keptair.catalogue.showing import quoted, shown

WIDTH = 110
LEFT_OVER = 60  # columns named at the end
ESCAPES = {'"': '\\"', "\\": "\\\\", "\n": "\\n", "\t": "\\t", "\r": "\\r", "\b": "\\b", "\f": "\\f"}
PLAIN = ("missing", "plus", "minus", "bound", "upper", "lower", "without_error", "kind", "date")  # keys in this order
TABLES = ("kinds", "words")


def toml(
    about: str,
    guesses: Sequence[Guess],
    questions: Sequence[Question],
    hints: Sequence[Hint],
    nothing_for: Sequence[str],
    left_over: Sequence[str],
) -> str:
    """The column map. about : the file in a few words; nothing_for : inputs; left_over : columns."""
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
    for hint in hints:
        lines += _comment(f"To {hint.side} {hint.text}, take away the #:")
        lines += [f"# [rows.{hint.side}]", f"# {literal(hint.column)} = {literal(list(hint.words))}"]
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
    for key in PLAIN:
        if key in guess.entry:
            yield f"{key} = {literal(guess.entry[key])}"
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
    if letter.isprintable():
        return letter
    return f"\\u{code:04X}" if code < 0x10000 else f"\\U{code:08X}"
