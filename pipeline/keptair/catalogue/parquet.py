"""Parquet: a file, or a folder of files read one after the other in the order of their names."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import numpy as np

from keptair.catalogue.ecsv import description, units_of
from keptair.catalogue.showing import quoted, shown
from keptair.catalogue.table import Block, RawTable
from keptair.catalogue.votable import fields_of
from keptair.errors import CatalogueError

ROWS = 1 << 16  # in one block


def files_of(path: Path) -> list[Path]:
    """The Parquet files of a folder, or the file itself."""
    if not path.is_dir():
        return [path]
    found = sorted(file for file in path.rglob("*.parquet") if file.is_file())
    if not found:
        raise CatalogueError(f"{path.name}: the folder holds no .parquet file")
    return found


def open_parquet(path: Path, comment: str) -> RawTable:  # noqa: ARG001 - every format is opened alike
    """A table whose types come from the file; a boolean column `x.mask`, as astropy writes it, marks x as missing."""
    files = files_of(path)
    with _readable(files[0]) as parquet:
        schema = parquet.schema_arrow
    names = tuple(name for name in schema.names if not _is_mask(name, schema))
    described = _described_units(schema)
    units = tuple(_unit(schema, name) or described.get(name, "") for name in names)

    def blocks(positions: tuple[int, ...], remarks: list[str]) -> Iterator[Block]:  # noqa: ARG001
        row = 1
        for file in files:
            with _readable(file) as parquet:
                if parquet.schema_arrow.names != schema.names:
                    raise CatalogueError(f"{file.name}: has other columns than {files[0].name}; put them into one form")
                wanted = [names[position] for position in positions]
                masks = [f"{name}.mask" for name in wanted if f"{name}.mask" in schema.names]
                for batch in parquet.iter_batches(batch_size=ROWS, columns=wanted + masks, use_threads=False):
                    rows = np.arange(row, row + batch.num_rows, dtype=np.int64)
                    row += batch.num_rows
                    columns = {position: _column(batch, names[position], file) for position in positions}
                    yield Block(rows, np.zeros(len(rows), dtype=np.int64), columns)

    return RawTable("Parquet", names, units, blocks)


@contextmanager
def _readable(file: Path) -> Iterator[Any]:
    """The opened file; whatever is wrong with it, in one sentence."""
    import pyarrow as pa
    import pyarrow.parquet as pq

    try:
        with pq.ParquetFile(file) as parquet:
            yield parquet
    except (pa.ArrowException, OSError, MemoryError, OverflowError, ValueError) as error:
        raise CatalogueError(f"{file.name}: cannot be read as Parquet ({shown(str(error), 160)})") from None


def _is_mask(name: str, schema: Any) -> bool:
    import pyarrow as pa

    of = name.removesuffix(".mask")
    return of != name and of in schema.names and bool(pa.types.is_boolean(schema.field(name).type))


def _unit(schema: Any, name: str) -> str:
    """The unit in the field's metadata, where pyarrow users put it."""
    metadata = schema.field(schema.names.index(name)).metadata or {}
    return (metadata.get(b"unit") or metadata.get(b"units") or b"").decode("utf-8", errors="replace")


def _described_units(schema: Any) -> dict[str, str]:
    """The units in the footer: a VOTable without data, or astropy's own YAML."""
    metadata = schema.metadata or {}
    units = {name: unit for name, unit in fields_of(metadata.get(b"IVOA.VOTable-Parquet.content", b"")) if unit}
    try:
        text = metadata.get(b"table_meta_yaml", b"").decode("utf-8", errors="replace")
        return units_of(description(text, "footer")) | units
    except CatalogueError:  # a footer nobody can read says nothing
        return units


def _column(batch: Any, name: str, file: Path) -> Any:
    import pyarrow as pa
    import pyarrow.compute as pc

    column = batch.column(name)
    if pa.types.is_dictionary(column.type):
        column = pc.cast(column, column.type.value_type)
    if pa.types.is_nested(column.type):
        raise CatalogueError(f"{file.name}: the column {quoted(name)} holds lists or structures, not one value a row")
    if pa.types.is_string(column.type) or pa.types.is_large_string(column.type):
        column = _text_or_bytes(column)
    mask = f"{name}.mask"
    if mask in batch.schema.names:
        column = pc.if_else(pc.fill_null(batch.column(mask), False), None, column)
    return column


def _text_or_bytes(column: Any) -> Any:
    """Text that is not the UTF-8 it should be, as bytes."""
    import pyarrow as pa

    try:
        column.validate(full=True)
    except pa.ArrowInvalid:
        return column.cast(pa.binary())
    return column
