"""Columns of numpy arrays → one Parquet file: types, nulls, row groups and footers as the schema says."""

from __future__ import annotations

import base64
from collections.abc import Mapping
from contextlib import suppress
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from keptair.tables import footers
from keptair.tables.schema import Column, Table

if TYPE_CHECKING:
    import pyarrow as pa

ROW_GROUP = 65_536  # rows; never the batch size, so that no batching shows in the bytes
SMALLEST = 1e-37  # derived numbers below are written 0: float32 has no full precision there
LARGEST = float(np.finfo(np.float32).max)

Array = NDArray[Any]


class Writer:
    """One table on its way to disk: takes columns in pieces of any size, writes whole row groups.

    The same rows give the same bytes, however they are cut into pieces.
    """

    def __init__(self, path: Path, table: Table) -> None:
        from pyarrow import parquet

        self.table = table
        self.schema = arrow_schema(table)
        self.rows = 0
        self._lengths = {column.name: max(column.max_length, 1) for column in table if column.storage == "text"}
        self._held: list[pa.Table] = []
        self._held_rows = 0
        self._file = parquet.ParquetWriter(
            path, self.schema, compression="zstd", use_dictionary=list(self._lengths), store_schema=False
        )

    def write(self, columns: Mapping[str, Array]) -> None:
        piece = to_arrow(columns, self.table)
        self._note_lengths(piece)
        self.rows += piece.num_rows
        self._held.append(piece)
        self._held_rows += piece.num_rows
        if self._held_rows >= ROW_GROUP:
            self._write_groups()

    def close(self) -> None:
        """Write what is held, then the footers."""
        self._write_groups(everything=True)
        said = footers.of_file(self.table, self._lengths)
        described = self.schema.with_metadata(said).serialize()
        # Only now is it known how long carried texts are, so the Arrow schema follows its rows too.
        self._file.add_key_value_metadata({**said, "ARROW:schema": base64.b64encode(described).decode("ascii")})
        self._file.close()

    def abandon(self) -> None:
        """Let go of the file without finishing it; of a finished one, nothing."""
        with suppress(OSError):  # the disk said no before, and that error is on its way
            self._file.close()

    def _write_groups(self, everything: bool = False) -> None:
        import pyarrow as pa

        if not self._held:
            return
        # one chunk per column: chunk borders would show in the pages
        waiting = pa.concat_tables(self._held).combine_chunks()
        start = 0
        while waiting.num_rows - start >= ROW_GROUP or (everything and start < waiting.num_rows):
            self._file.write_table(waiting.slice(start, ROW_GROUP).combine_chunks(), row_group_size=ROW_GROUP)
            start += ROW_GROUP
        self._held = [waiting.slice(start)]
        self._held_rows = self._held[0].num_rows

    def _note_lengths(self, piece: pa.Table) -> None:
        import pyarrow.compute as pc

        for name, length in self._lengths.items():
            longest = pc.max(pc.utf8_length(piece[name])).as_py()
            self._lengths[name] = max(length, longest or 0)


def arrow_schema(table: Table) -> pa.Schema:
    """The columns as Arrow fields: texts and whole numbers never null; units and meanings with each field."""
    import pyarrow as pa

    types = {"text": pa.string(), "int64": pa.int64(), "float32": pa.float32(), "float64": pa.float64()}
    return pa.schema(
        [
            pa.field(
                column.name,
                types[column.storage],
                nullable=column.storage.startswith("float"),
                metadata=footers.of_field(column),
            )
            for column in table
        ]
    )


def to_arrow(columns: Mapping[str, Array], table: Table) -> pa.Table:
    """Arrays by name → an Arrow table with exactly the schema's columns, in its order."""
    import pyarrow as pa

    missing = [name for name in table.names if name not in columns]
    unknown = sorted(columns.keys() - set(table.names))
    if missing or unknown:
        raise ValueError(f"{table.name}: columns missing: {missing}; not in the schema: {unknown}")
    schema = arrow_schema(table)
    arrays = [_to_arrow(columns[column.name], column, schema.field(column.name).type) for column in table]
    return pa.Table.from_arrays(arrays, schema=schema)


def _to_arrow(values: Array, column: Column, kind: pa.DataType) -> pa.Array:
    import pyarrow as pa

    if column.storage == "text":
        texts = pa.array(np.asarray(values, dtype=object), type=kind, from_pandas=False)
        if texts.null_count:
            raise ValueError(f"{column.name}: {texts.null_count} texts are missing where they should be empty")
        return texts
    if column.storage == "int64":
        return pa.array(np.asarray(values).astype(np.int64, casting="safe"), type=kind)
    numbers = np.asarray(values, dtype=np.float64)
    absent = ~np.isfinite(numbers)
    if column.storage == "float32":
        # an overflowing number stays a number: the largest there is
        numbers = np.where(np.abs(numbers) < SMALLEST, 0.0, np.clip(numbers, -LARGEST, LARGEST)).astype(np.float32)
    return pa.array(numbers, type=kind, mask=absent)
