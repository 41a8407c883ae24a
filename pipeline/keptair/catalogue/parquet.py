"""Parquet: a file, or a folder of files read one after the other in the order of their names."""

from __future__ import annotations

from collections import Counter
from collections.abc import Container, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import numpy as np

from keptair.catalogue.ecsv import description, units_of
from keptair.catalogue.showing import quoted, shown
from keptair.catalogue.streams import INFLATION_FLOOR, INFLATION_LIMIT
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
    count = Counter(schema.names)
    masks_there = {field.name for field in schema if _is_mask(field, count)}
    fields = [field for field in schema if field.name not in masks_there]
    names = tuple(field.name for field in fields)
    described = _described_units(schema)
    units = tuple(_unit(field) or described.get(field.name, "") for field in fields)

    def blocks(positions: tuple[int, ...], remarks: list[str]) -> Iterator[Block]:  # noqa: ARG001
        row = 1
        for file in files:
            with _readable(file) as parquet:
                if parquet.schema_arrow.names != schema.names:
                    raise CatalogueError(f"{file.name}: has other columns than {files[0].name}; put them into one form")
                wanted = [names[position] for position in positions]
                masks = [f"{name}.mask" for name in wanted if f"{name}.mask" in masks_there]
                for name in wanted + masks:
                    if count[name] > 1:
                        raise CatalogueError(f"{file.name}: two columns are called {quoted(name)}; rename one of them")
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
            _check_room(parquet.metadata, file)
            yield parquet
    except (pa.ArrowException, OSError, MemoryError, OverflowError, ValueError) as error:
        raise CatalogueError(f"{file.name}: cannot be read as Parquet ({shown(str(error), 160)})") from None


def _check_room(metadata: Any, file: Path) -> None:
    """A row group is in memory whole, whatever it inflates to."""
    largest = max((metadata.row_group(place).total_byte_size for place in range(metadata.num_row_groups)), default=0)
    if largest > max(INFLATION_FLOOR, INFLATION_LIMIT * file.stat().st_size):
        raise CatalogueError(
            f"{file.name}: a row group inflates to {largest / 1e6:.0f} MB, more than {INFLATION_LIMIT} times the file",
            hint="write it in smaller row groups if it is what you think it is",
        )


def _is_mask(field: Any, names: Container[str]) -> bool:
    import pyarrow as pa

    of = field.name.removesuffix(".mask")
    return of != field.name and of in names and bool(pa.types.is_boolean(field.type))


def _unit(field: Any) -> str:
    """The unit in the field's metadata, where pyarrow users put it."""
    metadata = field.metadata or {}
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
    if isinstance(column, pa.ExtensionArray):
        column = column.storage
    if pa.types.is_dictionary(column.type):
        column = pc.cast(column, column.type.value_type)
    if pa.types.is_timestamp(column.type) and column.type.tz:  # as text it would need the zone's own rules
        column = column.cast(pa.timestamp(column.type.unit, "UTC"))
    if pa.types.is_nested(column.type):
        raise CatalogueError(f"{file.name}: the column {quoted(name)} holds lists or structures, not one value a row")
    for is_view, plain in ((pa.types.is_string_view, pa.string()), (pa.types.is_binary_view, pa.binary())):
        if is_view(column.type):  # which Arrow cannot filter
            column = pc.cast(column, plain)
    if pa.types.is_string(column.type) or pa.types.is_large_string(column.type):
        column = _text_or_bytes(column)
    mask = f"{name}.mask"
    if mask in batch.schema.names and pa.types.is_boolean(batch.column(mask).type):
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
