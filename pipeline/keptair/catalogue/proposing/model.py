"""What a proposal is made of: guesses with their reasons, and what is left open."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Literal

Confidence = Literal["high", "fair", "low"]
Reference = str | int  # a column's name, or its position from 1

BY_DOUBTS: tuple[Confidence, ...] = ("high", "fair", "low")  # more doubts: not guessed


@dataclass(frozen=True)
class Guess:
    """One canonical input and the columns it is proposed from.

    sources : columns, the first that has a value counts; none where `constant` says it for every row.
    unit : as the map spells it, "" for texts and plain numbers.
    entry : everything else the map says of it: errors, limits, kinds, words, date.
    remarks : what a user should look at.
    """

    name: str
    sources: tuple[Reference, ...]
    confidence: Confidence
    reason: str
    unit: str = ""
    entry: Mapping[str, Any] = field(default_factory=dict)
    remarks: tuple[str, ...] = ()
    constant: str = ""

    def as_dict(self) -> dict[str, Any]:
        """The guess for JSON."""
        source: Any = self.sources[0] if len(self.sources) == 1 else list(self.sources)
        return {
            "name": self.name,
            "from": source,
            "unit": self.unit,
            "confidence": self.confidence,
            "reason": self.reason,
            **({"entry": dict(self.entry)} if self.entry else {}),
            **({"constant": self.constant} if self.constant else {}),
            **({"remarks": list(self.remarks)} if self.remarks else {}),
        }


@dataclass(frozen=True)
class Question:
    """Something that is not guessed, and why."""

    name: str
    text: str


@dataclass(frozen=True)
class Hint:
    """A filter of rows the user may want; side is keep or drop."""

    text: str
    side: Literal["keep", "drop"]
    column: str
    words: tuple[str, ...]


@dataclass(frozen=True)
class Proposal:
    """A column map for somebody to read, correct and use.

    toml : the map, with reasons as comments; `keptair run --map` takes it as it is.
    """

    toml: str
    guesses: tuple[Guess, ...]
    questions: tuple[Question, ...]

    def as_dict(self) -> dict[str, Any]:
        """The proposal for JSON."""
        return {
            "guesses": [guess.as_dict() for guess in self.guesses],
            "questions": {question.name: question.text for question in self.questions},
            "toml": self.toml,
        }


def confidence(doubts: int) -> Confidence | None:
    """How sure a guess with so many doubts is; None: too many to guess."""
    return BY_DOUBTS[doubts] if doubts < len(BY_DOUBTS) else None
