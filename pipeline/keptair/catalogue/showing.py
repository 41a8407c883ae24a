"""Strangers' text made safe to print: short, on one line, nothing invisible."""

from __future__ import annotations

import unicodedata

_HIDDEN = {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}  # control, format and bidirectional marks, line separators


def shown(text: str, longest: int = 60) -> str:
    """The text for a message: hidden characters written out, shortened in the middle."""
    if len(text) > longest:
        half = (longest - 1) // 2
        text = f"{text[:half]}…{text[-half:]}"
    return "".join(_written_out(letter) if unicodedata.category(letter) in _HIDDEN else letter for letter in text)


def quoted(text: str, longest: int = 60) -> str:
    """The same between quotes."""
    return f'"{shown(text, longest)}"'


def listed(texts: list[str], most: int = 8) -> str:
    """Some of the texts between quotes, and how many more there are."""
    some = ", ".join(quoted(text) for text in texts[:most])
    return f"{some} and {len(texts) - most} more" if len(texts) > most else some


def _written_out(letter: str) -> str:
    return letter.encode("unicode_escape").decode("ascii")
