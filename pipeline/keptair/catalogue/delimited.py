"""CSV and its kin: comma, tab, semicolon or pipe between the cells."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import numpy as np

from keptair.catalogue.showing import shown
from keptair.catalogue.streams import Readable, TableText, encoding_of
from keptair.catalogue.table import Block, RawTable
from keptair.errors import CatalogueError

DELIMITERS = {",": "CSV", "\t": "TSV", ";": "text with semicolons", "|": "text with bars", " ": "text with blanks"}
BLOCK = 8 << 20  # bytes parsed together; a row must fit into one block


def open_delimited(path: Path, comment: str, delimiter: str = "") -> RawTable:
    """The table of a text file whose first line that is no comment names the columns; the delimiter shows there."""
    encoding = encoding_of(path)
    header, _ = TableText(path, encoding, comment).first_record()
    if not header.strip():
        raise CatalogueError(f"{path.name}: the file is empty")
    text = header.decode("utf-8", errors="replace").rstrip("\r\n")
    delimiter = delimiter or delimiter_of(text)
    names = tuple(name.strip() for name in cells_of(text, delimiter))
    reader = _Reader(path, encoding, comment, header, delimiter, len(names))
    remarks = [] if encoding == "utf-8" else [f"the file is not UTF-8; it was read as {encoding}"]
    return RawTable(DELIMITERS[delimiter], names, ("",) * len(names), reader.blocks, remarks)


def delimiter_of(header: str) -> str:
    """The delimiter that stands most often in the header, outside quotes; comma where there is none."""
    bare = "".join(header.split('"')[::2])
    return max((mark for mark in DELIMITERS if mark != " "), key=bare.count)


def cells_of(line: str, delimiter: str) -> list[str]:
    """The cells of one record."""
    limit = csv.field_size_limit(max(csv.field_size_limit(), len(line) + 1))
    try:
        return next(csv.reader(io.StringIO(line, newline=""), delimiter=delimiter), [])
    finally:
        csv.field_size_limit(limit)


class _Reader:
    """Sweeps one file from its start, as often as asked."""

    def __init__(self, path: Path, encoding: str, comment: str, header: bytes, delimiter: str, width: int) -> None:
        self.path = path
        self.encoding = encoding
        self.comment = comment
        self.header = header
        self.delimiter = delimiter
        self.width = width

    def blocks(self, positions: tuple[int, ...], remarks: list[str]) -> Iterator[Block]:
        """Blocks of rows; a row with the wrong number of cells stands in its place, marked."""
        import pyarrow as pa

        lines = TableText(self.path, self.encoding, self.comment, header=self.header)
        _, rest = lines.first_record()
        ragged = _Ragged(positions, self.delimiter)
        valid = 0
        try:
            for batch in self._parse(rest, positions, ragged):
                rows = ragged.rows_of_valid(valid, batch.num_rows)
                valid += batch.num_rows
                cells = {position: batch.column(place) for place, position in enumerate(positions)}
                yield ragged.merged(Block(rows, np.zeros(len(rows), dtype=np.int64), cells))
        except pa.ArrowInvalid as error:
            raise CatalogueError(f"{self.path.name}: {_sentence(error)}") from None
        if ragged.waiting():
            yield ragged.merged(Block.empty(positions))
        remarks += _remarks(lines)

    def _parse(self, rest: Iterator[bytes], positions: tuple[int, ...], ragged: _Ragged) -> Iterator[Any]:
        import pyarrow as pa
        from pyarrow import csv as arrow_csv

        first = next(rest, None)
        while first is not None and not first.strip():
            first = next(rest, None)
        if first is None:
            return
        names = [str(position) for position in range(self.width)]
        wanted = [str(position) for position in positions]
        yield from arrow_csv.open_csv(
            Readable(_chain(first, rest)),
            read_options=arrow_csv.ReadOptions(use_threads=False, block_size=BLOCK, column_names=names),
            parse_options=arrow_csv.ParseOptions(
                delimiter=self.delimiter, newlines_in_values=True, invalid_row_handler=ragged.note
            ),
            convert_options=arrow_csv.ConvertOptions(
                column_types={name: pa.string() for name in wanted},
                include_columns=wanted,
                strings_can_be_null=False,
            ),
        )


class _Ragged:
    """Rows with the wrong number of cells, on their way to their place among the others."""

    def __init__(self, positions: tuple[int, ...], delimiter: str) -> None:
        self.positions = positions
        self.delimiter = delimiter
        self.numbers: list[int] = []  # of all seen so far
        self.found: list[int] = []
        self.cells: list[list[str]] = []
        self.given = 0  # how many have left

    def note(self, row: Any) -> str:
        cells = cells_of(row.text, self.delimiter)
        self.numbers.append(row.number)
        self.found.append(row.actual_columns)
        self.cells.append([cells[place] if place < len(cells) else "" for place in self.positions])
        return "skip"

    def waiting(self) -> bool:
        return self.given < len(self.numbers)

    def rows_of_valid(self, before: int, count: int) -> Any:
        """Row numbers of `count` good rows that follow `before` good ones."""
        ordinal = np.arange(before, before + count, dtype=np.int64)
        good_before_bad = np.asarray(self.numbers, dtype=np.int64) - 1 - np.arange(len(self.numbers))
        return ordinal + 1 + np.searchsorted(good_before_bad, ordinal, side="right")

    def merged(self, block: Block) -> Block:
        """The block with the bad rows that are due put in their places."""
        import pyarrow as pa

        last = block.rows[-1] if len(block.rows) else max(self.numbers, default=0)
        due = slice(self.given, int(np.searchsorted(self.numbers, last, side="right")))
        numbers = np.asarray(self.numbers[due], dtype=np.int64)
        if not len(numbers):
            return block
        self.given = due.stop
        rows = np.concatenate([block.rows, numbers])
        wrong = np.concatenate([block.wrong_cells, np.asarray(self.found[due], dtype=np.int64)])
        order = np.argsort(rows)
        cells = {}
        for place, position in enumerate(self.positions):
            extra = pa.array([row[place] for row in self.cells[due]], pa.string())
            cells[position] = pa.concat_arrays([block.cells[position], extra]).take(pa.array(order))
        self.cells[due] = [[] for _ in numbers]
        return Block(rows[order], wrong[order], cells)


def _remarks(lines: TableText) -> list[str]:
    remarks = []
    if lines.comments:
        remarks.append(
            f"skipped after the header: lines that start with {shown(lines.comment.decode())} ({lines.comments})"
        )
    if lines.headers > 1:
        remarks.append(f"the header stands {lines.headers} times in the file; the later ones were skipped")
    return remarks


def _sentence(error: Exception) -> str:
    message = str(error)
    if "straddling" in message:
        return f'a row is longer than {BLOCK >> 20} MB; is a quote (") opened that is never closed?'
    return f"cannot be read as delimited text ({shown(message, 120)})"


def _chain(first: bytes, rest: Iterator[bytes]) -> Iterator[bytes]:
    yield first
    yield from rest
