"""What a stage takes and gives: columns per planet and draws per planet."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

Array = NDArray[Any]


@dataclass(frozen=True)
class Batch:
    """Some planets of a catalogue, on their way through the stages.

    columns : name → array of shape (planet,). Names without a dot are published as they are.
    draws : name → array of shape (planet, 1 + draw), SI units. Column 0 is the central draw
        (values as catalogued, every other u = ½); statistics leave it out (see `statistics`).
    """

    columns: Mapping[str, Array]
    draws: Mapping[str, Array] = field(default_factory=dict)

    def __len__(self) -> int:
        return len(next(iter(self.columns.values())))

    def with_columns(self, **columns: Array) -> Batch:
        return self.adding(columns=columns)

    def with_draws(self, **draws: Array) -> Batch:
        return self.adding(draws=draws)

    def adding(self, columns: Mapping[str, Array] | None = None, draws: Mapping[str, Array] | None = None) -> Batch:
        """This batch with more in it; a stage adds, it never changes what an earlier one said."""
        columns, draws = columns or {}, draws or {}
        taken = sorted((columns.keys() & self.columns.keys()) | (draws.keys() & self.draws.keys()))
        if taken:
            raise ValueError(f"a stage may not change what is there already: {', '.join(taken)}")
        size = len(self) if self.columns else None
        wrong = [name for name, values in {**columns, **draws}.items() if size is not None and len(values) != size]
        if wrong:
            raise ValueError(f"not one value per planet: {', '.join(wrong)}")
        return Batch({**self.columns, **columns}, {**self.draws, **draws})

    def take(self, planets: Array) -> Batch:
        """The planets chosen by index or mask, in that order."""
        return Batch(
            {name: values[planets] for name, values in self.columns.items()},
            {name: values[planets] for name, values in self.draws.items()},
        )

    def flagged(self, names: Iterable[str]) -> dict[str, NDArray[np.bool_]]:
        """The flags raised so far, False where no stage spoke of one."""
        nothing = np.zeros(len(self), dtype=bool)
        return {name: self.columns.get(f"flag.{name}", nothing) for name in names}
