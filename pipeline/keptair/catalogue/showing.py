"""Strangers' text made safe to print: short, on one line, nothing invisible."""

from __future__ import annotations

from keptair.errors import visible


def shown(text: str, longest: int = 60) -> str:
    """The text for a message: hidden characters written out, shortened in the middle."""
    if len(text) > longest:
        half = (longest - 1) // 2
        text = f"{text[:half]}…{text[-half:]}"
    return visible(text)


def quoted(text: str, longest: int = 60) -> str:
    """The same between quotes."""
    return f'"{shown(text, longest)}"'


def listed(texts: list[str], most: int = 8) -> str:
    """Some of the texts between quotes, and how many more there are."""
    some = ", ".join(quoted(text) for text in texts[:most])
    return f"{some} and {len(texts) - most} more" if len(texts) > most else some
