"""The formats a catalogue may come in: recognised by what the file holds, then by its name."""

from __future__ import annotations

import codecs
import re
from collections.abc import Callable
from pathlib import Path

from keptair.catalogue.delimited import open_delimited
from keptair.catalogue.ecsv import MARK as ECSV_MARK
from keptair.catalogue.ecsv import open_ecsv
from keptair.catalogue.parquet import open_parquet
from keptair.catalogue.streams import beginning, is_gzip
from keptair.catalogue.table import RawTable
from keptair.catalogue.votable import open_votable
from keptair.catalogue.whole import open_fits, open_ipac, open_journal_table
from keptair.errors import CatalogueError

Opener = Callable[[Path, str], RawTable]  # path, comment mark → table

NOT_TABLES = {
    b"PK\x03\x04": "is a zip archive or a spreadsheet; save it as CSV",
    b"\x89HDF": "is HDF5; save it as Parquet",
    b"SQLite format 3": "is a database; export the table as CSV",
    b"BZh": "is bzip2; use gzip or none",
    b"\xfd7zXZ": "is xz; use gzip or none",
    b"\x28\xb5\x2f\xfd": "is zstd; use gzip or none",
    b"%PDF": "is a PDF",
}


def open_table(path: Path, comment: str) -> RawTable:
    """The table in the format its content shows."""
    return recognise(path)(path, comment)


def recognise(path: Path) -> Opener:
    """Which function opens a file."""
    if path.is_dir():
        return open_parquet
    start = beginning(path)
    for mark, reason in NOT_TABLES.items():
        if start.startswith(mark):
            raise CatalogueError(f"{path.name}: {reason}")
    if start.startswith(b"PAR1"):
        if is_gzip(path):
            raise CatalogueError(
                f"{path.name}: is a gzip file of a Parquet file; inflate it, Parquet is compressed itself"
            )
        return open_parquet
    if start.startswith(b"SIMPLE  ="):
        return open_fits
    text = start.removeprefix(codecs.BOM_UTF8).lstrip()
    if text.lower().startswith((b"<!doctype html", b"<html")):
        raise CatalogueError(f"{path.name}: is a web page, not a table")
    if text.startswith(b"<"):
        return open_votable
    if text.startswith(ECSV_MARK):
        return open_ecsv
    if re.match(rb"\\|\|[^\n]*\|\s*\n\s*\|", text):
        return open_ipac
    if text.startswith(b"Title:") and b"Byte-by-byte Description" in beginning(path, 1 << 20):
        return open_journal_table
    return open_delimited
