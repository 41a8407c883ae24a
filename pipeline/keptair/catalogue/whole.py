"""Formats astropy reads whole: FITS, IPAC and journal tables. They are in memory while the catalogue is open."""

from __future__ import annotations

import warnings
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import numpy as np

from keptair.catalogue.showing import quoted, shown
from keptair.catalogue.streams import INFLATION_FLOOR, INFLATION_LIMIT, inflated_copy
from keptair.catalogue.table import Block, RawTable
from keptair.errors import CatalogueError

ROWS = 1 << 16  # in one block
MOST_FIELDS = 999  # FITS standard 4.0, section 7.3.1


def open_fits(path: Path, comment: str) -> RawTable:  # noqa: ARG001 - every format is opened alike
    """The first table extension of a FITS file."""
    with inflated_copy(path) as plain, reading("FITS", path):
        from astropy.io import fits
        from astropy.table import Table

        # a file of our own: astropy leaves its own open where it fails
        with plain.open("rb") as file, fits.open(file, memmap=False) as extensions:
            tables = [part for part in extensions if isinstance(part, fits.BinTableHDU | fits.TableHDU)]
            if tables:
                _check_size(tables[0].header, path, plain.stat().st_size)
            if not tables:
                raise CatalogueError(f"{path.name}: the FITS file holds no table, only images")
            table = Table.read(tables[0], format="fits", unit_parse_strict="silent")
            names, units = list(tables[0].columns.names), [unit or "" for unit in tables[0].columns.units]
    remarks = [f"the file holds {len(tables)} tables; the first was read"] if len(tables) > 1 else []
    return in_memory("FITS", path, names, units, _columns(table), remarks)


def open_ipac(path: Path, comment: str) -> RawTable:  # noqa: ARG001
    """An IPAC table: names, types, units and nulls between bars."""
    return _open_ascii(path, "IPAC table", "ascii.ipac")


def open_journal_table(path: Path, comment: str) -> RawTable:  # noqa: ARG001
    """A machine-readable table of the AAS journals, or one of the CDS with its description in front."""
    return _open_ascii(path, "machine-readable table", "ascii.mrt")


def in_memory(
    kind: str, path: Path, names: Sequence[str], units: Sequence[str], columns: Sequence[Any], remarks: list[str]
) -> RawTable:
    """A table of masked numpy columns."""

    def blocks(positions: tuple[int, ...], remarks: list[str]) -> Iterator[Block]:  # noqa: ARG001
        size = len(columns[0]) if columns else 0
        for start in range(0, size, ROWS):
            stop = min(start + ROWS, size)
            cells = {place: _arrow(columns[place][start:stop], names[place], path) for place in positions}
            rows = np.arange(start + 1, stop + 1, dtype=np.int64)
            yield Block(rows, np.zeros(len(rows), dtype=np.int64), cells)

    return RawTable(kind, tuple(names), tuple(units), blocks, remarks)


@contextmanager
def reading(kind: str, path: Path) -> Iterator[None]:
    """Somebody else's reader at work: it may complain as it likes, and fail in any way, in one sentence."""
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            yield
    except (CatalogueError, FileNotFoundError, PermissionError):
        raise
    except Exception as error:  # readers of damaged files raise whatever they stumble over
        first = str(error).strip().split("\n")[0] or type(error).__name__
        raise CatalogueError(f"{path.name}: cannot be read as {kind} ({shown(first, 120)})") from None


def _open_ascii(path: Path, kind: str, astropy_format: str) -> RawTable:
    with inflated_copy(path) as plain, reading(kind, path):
        from astropy.table import Table

        _check_lines(path, plain)
        table = Table.read(str(plain), format=astropy_format)
        units = [str(table[name].unit or "") for name in table.colnames]
    return in_memory(kind, path, table.colnames, units, _columns(table), [])


def _check_size(header: Any, path: Path, size: int) -> None:
    """astropy makes room for as many rows as the header says, and looks only then how many there are."""
    width, rows, heap = header["NAXIS1"], header["NAXIS2"], header.get("PCOUNT", 0)
    said = width * rows + heap
    if min(width, rows, heap) < 0 or said > size:
        raise CatalogueError(f"{path.name}: says it has {said} bytes of rows; the whole file has {size}")
    if header.get("TFIELDS", 0) > MOST_FIELDS:
        raise CatalogueError(f"{path.name}: says it has {header['TFIELDS']} columns; FITS knows {MOST_FIELDS}")


def _check_lines(path: Path, plain: Path) -> None:
    """astropy keeps every cell as wide as the widest of its column."""
    count, longest = 0, 0
    with plain.open("rb") as file:
        for line in file:
            count, longest = count + 1, max(longest, len(line))
    check_room(path, plain, 4 * count * longest)


def check_room(path: Path, plain: Path, needed: int) -> None:
    """Refuses a table that would take far more memory than its file has bytes."""
    limit = max(INFLATION_FLOOR, INFLATION_LIMIT * plain.stat().st_size)
    if needed > limit:
        raise CatalogueError(
            f"{path.name}: would take {needed / 1e6:.0f} MB of memory, more than {INFLATION_LIMIT} times its size",
            hint="save it as CSV or Parquet if it is what you think it is",
        )


def _columns(table: Any) -> list[Any]:
    return [np.ma.masked_array(column.data, mask=getattr(column, "mask", False)) for column in table.columns.values()]


def _arrow(column: Any, name: str, path: Path) -> Any:
    import pyarrow as pa

    values, mask = np.ma.getdata(column), np.ma.getmaskarray(column)
    if values.ndim > 1 or values.dtype.kind in "cV":
        raise CatalogueError(f"{path.name}: the column {quoted(name)} holds arrays, not one value a row")
    if values.dtype.kind in "biuf":
        native = np.ascontiguousarray(values.astype(values.dtype.newbyteorder("=")))
        return pa.array(native, mask=mask)
    texts = [None if gone else _text(value) for value, gone in zip(values.tolist(), mask.tolist(), strict=True)]
    return pa.array(texts, pa.string())


def _text(value: object) -> str:
    return value.decode("utf-8", errors="replace") if isinstance(value, bytes) else str(value)
