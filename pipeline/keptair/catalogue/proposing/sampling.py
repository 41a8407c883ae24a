"""The columns of a catalogue and their first rows, for somebody who wonders what they are."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Sequence
from contextlib import suppress
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import Any

import numpy as np

from keptair.catalogue import cells
from keptair.catalogue.cells import Floats, Objects
from keptair.catalogue.formats import open_table
from keptair.catalogue.proposing.headers import Described, described
from keptair.catalogue.table import Block, RawTable
from keptair.errors import CatalogueError

ROWS = 100_000  # looked at
CELLS = 10_000_000  # of wide tables fewer rows
FEWEST_ROWS = 1_000
UNWRITABLE = re.compile(r"[\ud800-\udfff]")  # halves of letters, which TOML cannot hold
NO_WORDS = cells.missing_words()


@dataclass(frozen=True)
class Column:
    """One column of the file: what the header says, and the first rows."""

    name: str
    position: int
    unit: str
    about: Described
    repeated: bool
    sample: Any  # an Arrow array

    @property
    def reference(self) -> str | int:
        """How a column map names it: by its position where the name does not do."""
        usable = self.name and not self.repeated and not UNWRITABLE.search(self.name)
        return self.name if usable else self.position + 1

    @cached_property
    def texts(self) -> Objects:
        """The cells as text, "" where missing."""
        return cells.objects(cells.texts(self.sample, NO_WORDS))

    @cached_property
    def words(self) -> Counter[str]:
        """How often each text stands there, missing ones left out."""
        found = Counter(cells.counts(cells.texts(self.sample, NO_WORDS)))
        del found[""]
        return found

    @cached_property
    def numbers(self) -> Floats:
        """The cells as numbers, NaN where missing or none."""
        return self._read[0]

    @cached_property
    def strange(self) -> Counter[str]:
        """Texts that are no numbers, and how often they stand there."""
        texts = self._read[1]
        return Counter() if texts is None else Counter(text for text in texts.tolist() if text)

    @cached_property
    def _read(self) -> tuple[Floats, Objects | None]:
        return cells.numbers(self.sample, NO_WORDS)

    @cached_property
    def is_numeric(self) -> bool:
        """Whether nearly every cell that says something is a number, or the others are one repeated word."""
        found = int(np.isfinite(self.numbers).sum())
        return found > 0 and (self.strange.total() <= 0.02 * found or len(self.strange) <= 2)


@dataclass(frozen=True)
class Sample:
    """A table's columns in file order, and how many rows were looked at."""

    format: str
    rows: int
    whole: bool
    columns: tuple[Column, ...]


def sample(path: Path) -> Sample:
    """The header and the first rows of a file."""
    if not path.exists():
        raise CatalogueError(f"{path}: there is no such file")
    try:
        table = open_table(path, "#")
        blocks, whole = _first_blocks(table)
        about = described(path, table.format)
    except OSError as error:
        raise CatalogueError(f"{path}: cannot be read ({error.strerror or error})") from None
    counts = Counter(table.names)
    columns = tuple(
        Column(
            name,
            position,
            table.units[position],
            about.get(name, Described()),
            counts[name] > 1,
            _joined([block.cells[position] for block in blocks]),
        )
        for position, name in enumerate(table.names)
        if not blocks or position in blocks[0].cells
    )
    return Sample(table.format, sum(len(block.rows) for block in blocks), whole, columns)


def _first_blocks(table: RawTable) -> tuple[list[Block], bool]:
    limit = min(ROWS, max(FEWEST_ROWS, CELLS // max(1, len(table.names))))
    blocks: list[Block] = []
    rows = 0
    for block in table.blocks(_readable(table), []):
        sound = block.where(block.wrong_cells == 0)
        if rows + len(sound.rows) >= limit:
            blocks.append(sound.where(np.arange(len(sound.rows)) < limit - rows))
            return blocks, False
        blocks.append(sound)
        rows += len(sound.rows)
    return blocks, True


def _readable(table: RawTable) -> tuple[int, ...]:
    """Positions of the columns that hold one value a row; others are nobody's input."""
    everything = tuple(range(len(table.names)))
    with suppress(CatalogueError):
        next(table.blocks(everything, []), None)
        return everything
    return tuple(position for position in everything if _is_readable(table, position))


def _is_readable(table: RawTable, position: int) -> bool:
    with suppress(CatalogueError):
        next(table.blocks((position,), []), None)
        return True
    return False


def _joined(pieces: Sequence[Any]) -> Any:
    import pyarrow as pa

    return pa.concat_arrays(pieces) if pieces else pa.array([], pa.string())
