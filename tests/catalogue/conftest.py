"""One catalogue in every format, so that one test body reads them all."""

from __future__ import annotations

import csv
import gzip
import io
from collections.abc import Callable, Sequence
from pathlib import Path

import pyarrow as pa
import pyarrow.parquet as pq
import pytest

Rows = Sequence[dict[str, str]]
Writer = Callable[[Path, Rows], Path]


def _text(rows: Rows, delimiter: str) -> str:
    out = io.StringIO()
    names = list(dict.fromkeys(name for row in rows for name in row))
    writer = csv.DictWriter(out, names, delimiter=delimiter, lineterminator="\n")
    writer.writeheader()
    writer.writerows(rows)
    return out.getvalue()


def as_csv(folder: Path, rows: Rows) -> Path:
    path = folder / "catalogue.csv"
    path.write_text(_text(rows, ","), encoding="utf-8", newline="")
    return path


def as_tsv(folder: Path, rows: Rows) -> Path:
    path = folder / "catalogue.tsv"
    path.write_text(_text(rows, "\t"), encoding="utf-8", newline="")
    return path


def as_zipped_csv(folder: Path, rows: Rows) -> Path:
    path = folder / "catalogue.csv.gz"
    path.write_bytes(gzip.compress(_text(rows, ",").encode()))
    return path


def as_parquet(folder: Path, rows: Rows) -> Path:
    """Columns of numbers as numbers, as anybody would write them."""
    path = folder / "catalogue.parquet"
    names = list(dict.fromkeys(name for row in rows for name in row))
    columns: dict[str, list[str | float | None]] = {}
    for name in names:
        texts = [row.get(name) for row in rows]
        try:
            columns[name] = [float(text) if text else None for text in texts]
        except ValueError:
            columns[name] = list(texts)
    pq.write_table(pa.table(columns), path)
    return path


@pytest.fixture(params=[as_csv, as_tsv, as_zipped_csv, as_parquet], ids=lambda writer: writer.__name__)
def write(request: pytest.FixtureRequest) -> Writer:
    """Writes rows as a file of one of the formats."""
    writer: Writer = request.param
    return writer


@pytest.fixture
def write_csv(tmp_path: Path) -> Callable[[str | bytes], Path]:
    """Writes a CSV file as it is given, byte by byte."""

    def to_file(content: str | bytes) -> Path:
        path = tmp_path / "planets.csv"
        path.write_bytes(content if isinstance(content, bytes) else content.encode())
        return path

    return to_file
