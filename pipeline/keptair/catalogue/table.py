"""What every format gives: named columns, their units, and blocks of cells in file order."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray


@dataclass(frozen=True)
class Block:
    """Neighbouring rows of a file.

    rows : number of each data row, from 1.
    wrong_cells : 0, or how many cells a row has that should have as many as the header.
    cells : column position (from 0) → Arrow array.
    """

    rows: NDArray[np.int64]
    wrong_cells: NDArray[np.int64]
    cells: dict[int, Any]

    @staticmethod
    def empty(positions: tuple[int, ...]) -> Block:
        import pyarrow as pa

        nothing = np.zeros(0, dtype=np.int64)
        return Block(nothing, nothing, {position: pa.array([], pa.string()) for position in positions})

    def where(self, keep: NDArray[np.bool_]) -> Block:
        import pyarrow as pa

        if keep.all():
            return self
        mask = pa.array(keep)
        return Block(
            self.rows[keep],
            self.wrong_cells[keep],
            {position: column.filter(mask) for position, column in self.cells.items()},
        )


@dataclass(frozen=True)
class RawTable:
    """A table as it lies there.

    units : as the file spells them, "" where it says nothing.
    blocks : positions of the columns wanted, a list that takes remarks → blocks from the start of the file.
    """

    format: str
    names: tuple[str, ...]
    units: tuple[str, ...]
    blocks: Callable[[tuple[int, ...], list[str]], Iterator[Block]]
    remarks: list[str] = field(default_factory=list)
