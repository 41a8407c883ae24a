"""One check of keptair against something outside the project: a published number or a reference library."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, TypeAlias

ROUNDING = 1e-6  # a smaller relative tolerance leaves room for nothing else
Expected: TypeAlias = float | tuple[float, float] | frozenset[str]


@dataclass(frozen=True)
class Check:
    """What keptair says, what others say, and how far apart the two may be.

    expected : a number, the two ends of a published range, or the verdicts that are right; or a function that asks
        a reference library for one of them
    obtained : asks keptair
    relative, absolute, factor : exactly one, in words of the source; none for verdicts and for a range as it stands
    """

    name: str
    source: str
    expected: Expected | Callable[[], Expected]
    obtained: Callable[[], Any]
    unit: str = ""
    relative: float = 0.0
    absolute: float = 0.0
    factor: float = 1.0

    def wanted(self) -> Expected:
        """The expected value, asked for if it comes from a library."""
        return self.expected() if callable(self.expected) else self.expected

    def holds(self, wanted: Expected, obtained: Any) -> bool:
        """Whether the two agree within the tolerance."""
        if isinstance(wanted, frozenset):
            return obtained in wanted
        low, high = wanted if isinstance(wanted, tuple) else (wanted, wanted)
        least = low / self.factor - self.relative * abs(low) - self.absolute
        most = high * self.factor + self.relative * abs(high) + self.absolute
        return bool(least <= obtained <= most)

    def tolerance(self) -> str:
        """The tolerance in words."""
        if self.factor != 1.0:
            return f"factor {self.factor:g}"
        if self.relative:
            return f"{100 * self.relative:g} %" if self.relative > ROUNDING else "rounding"
        return f"{self.absolute:g} {self.unit}".rstrip() if self.absolute else "none"

    def written(self, value: Any) -> str:
        """An expected or obtained value with its unit."""
        if isinstance(value, frozenset):
            return " or ".join(sorted(value))
        if isinstance(value, str):
            return value
        numbers = value if isinstance(value, tuple) else (value,)
        return f"{' to '.join(f'{number:.5g}' for number in numbers)} {self.unit}".rstrip()


def words(*verdicts: str) -> frozenset[str]:
    """Any of these words is right."""
    return frozenset(verdicts)
