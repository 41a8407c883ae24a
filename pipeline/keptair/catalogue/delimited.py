"""CSV and its kin: comma, tab, semicolon or pipe between the cells."""

from __future__ import annotations

import csv
import io
from collections import deque
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import numpy as np

from keptair.catalogue.showing import shown
from keptair.catalogue.streams import Readable, TableText, encoding_of
from keptair.catalogue.table import Block, RawTable
from keptair.errors import CatalogueError

DELIMITERS = {",": "CSV", "\t": "TSV", ";": "text with semicolons", "|": "text with bars", " ": "text with blanks"}
ROWS = 1 << 16  # in one block, where they do not come parsed
MOST_COLUMNS = 100_000
BLOCK = 8 << 20  # bytes parsed together; a row must fit into one block


def open_delimited(path: Path, comment: str, delimiter: str = "") -> RawTable:
    """The table of a text file whose first line that is no comment names the columns; the delimiter shows there."""
    encoding = encoding_of(path)
    header, _ = TableText(path, encoding, comment).first_record()
    if not header.strip():
        raise CatalogueError(f"{path.name}: the file is empty")
    text = header.decode("utf-8", errors="replace").rstrip("\r\n")
    delimiter = delimiter or delimiter_of(text)
    if text.count(delimiter) >= MOST_COLUMNS:
        raise CatalogueError(f"{path.name}: the first line has more than {MOST_COLUMNS} cells; this is no table")
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
                if not batch.num_rows:
                    continue
                rows = ragged.rows_of_valid(valid, batch.num_rows)
                valid += batch.num_rows
                cells = {position: batch.column(place) for place, position in enumerate(positions)}
                yield ragged.merged(Block(rows, np.zeros(len(rows), dtype=np.int64), cells))
        except pa.ArrowInvalid as error:
            raise CatalogueError(f"{self.path.name}: {_sentence(error)}") from None
        yield from ragged.remaining()
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
        source = Readable(_chain(first, rest))
        try:
            yield from arrow_csv.open_csv(
                source,
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
        finally:
            source.stop()


class _Ragged:
    """Rows with the wrong number of cells, on their way to their place among the others."""

    def __init__(self, positions: tuple[int, ...], delimiter: str) -> None:
        self.positions = positions
        self.delimiter = delimiter
        self._left = 0  # how many have found their place
        self._waiting: deque[tuple[int, int, str]] = deque()  # row number, cells found, text

    def note(self, row: Any) -> str:
        self._waiting.append((row.number, row.actual_columns, row.text))
        return "skip"

    def rows_of_valid(self, before: int, count: int) -> Any:
        """Row numbers of `count` good rows that follow `before` good ones."""
        ordinal = np.arange(before, before + count, dtype=np.int64)
        numbers = np.fromiter((row[0] for row in self._waiting), dtype=np.int64, count=len(self._waiting))
        good_before_bad = numbers - 1 - np.arange(self._left, self._left + len(numbers))
        return ordinal + 1 + self._left + np.searchsorted(good_before_bad, ordinal, side="right")

    def merged(self, block: Block) -> Block:
        """The block with the bad rows that come before its last row put in their places."""
        due = []
        while self._waiting and self._waiting[0][0] < block.rows[-1]:
            due.append(self._waiting.popleft())
        return self._joined(block, due) if due else block

    def remaining(self) -> Iterator[Block]:
        """Blocks of the bad rows after the last good one."""
        while self._waiting:
            due = [self._waiting.popleft() for _ in range(min(ROWS, len(self._waiting)))]
            yield self._joined(Block.empty(self.positions), due)

    def _joined(self, block: Block, due: list[tuple[int, int, str]]) -> Block:
        import pyarrow as pa

        self._left += len(due)
        rows = np.concatenate([block.rows, np.array([number for number, _, _ in due], dtype=np.int64)])
        wrong = np.concatenate([block.wrong_cells, np.array([found for _, found, _ in due], dtype=np.int64)])
        order = np.argsort(rows)
        read = [cells_of(text, self.delimiter) for _, _, text in due]
        columns = {}
        for position in self.positions:
            extra = pa.array([cells[position] if position < len(cells) else "" for cells in read], pa.string())
            columns[position] = pa.concat_arrays([block.cells[position], extra]).take(pa.array(order))
        return Block(rows[order], wrong[order], columns)


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
