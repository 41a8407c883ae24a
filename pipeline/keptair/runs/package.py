"""datapackage.json: each file of a run with its schema, size and hash, and how the run came about."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np

from keptair.tables.schema import Column, Table

PROFILES = "https://datapackage.org/profiles/2.0"
MEDIA_TYPES = {
    "csv": "text/csv",
    "html": "text/html",
    "json": "application/json",
    "parquet": "application/vnd.apache.parquet",
}
FILES = (  # what a run holds, in the order it is listed: file, its table if it is one, what it is
    ("planets.parquet", "planets", ""),
    ("gases.parquet", "gases", ""),
    ("rejects.parquet", "rejects", ""),
    ("rejects.csv", "rejects", ""),
    ("changes.parquet", "changes", ""),
    ("summary.json", "", "What became of how many: counts only."),
    ("report.html", "", "The run as a page."),
)


def write(part: Path, tables: Mapping[str, Table], run: Mapping[str, Any]) -> None:
    """Describe the files that are in the folder by now."""
    described = {
        "$schema": f"{PROFILES}/datapackage.json",
        "name": run["name"].lower(),
        "title": "keptair run",
        "description": "Which planets of a catalogue still hold an atmosphere against thermal escape.",
        "resources": [
            _resource(part / file, tables.get(table), about) for file, table, about in FILES if (part / file).is_file()
        ],
        "run": run,
    }
    write_json(part / "datapackage.json", described)


def write_json(file: Path, content: Any) -> None:
    file.write_text(json.dumps(content, indent=2, ensure_ascii=False, allow_nan=False) + "\n", encoding="utf-8")


def table_schema(table: Table) -> dict[str, Any]:
    """The table as a Table Schema, with our own keys for unit, meaning and origin."""
    described: dict[str, Any] = {
        "$schema": f"{PROFILES}/tableschema.json",
        "fields": [_field(column) for column in table],
    }
    if table.primary_key:
        described["primaryKey"] = list(table.primary_key)
    return described


def _resource(file: Path, table: Table | None, about: str) -> dict[str, Any]:
    kind = file.suffix.removeprefix(".")
    described: dict[str, Any] = {
        "$schema": f"{PROFILES}/dataresource.json",
        "name": file.stem if kind != "csv" else f"{file.stem}-csv",
        "path": file.name,
        "title": table.title if table else file.stem,
        "description": table.description if table else about,
        "format": kind,
        "mediatype": MEDIA_TYPES[kind],
        "bytes": file.stat().st_size,
        "hash": f"sha256:{sha256(file)}",
    }
    if kind != "parquet":
        described["encoding"] = "utf-8"
    if table:
        described |= {"type": "table", "schema": table_schema(table)}
    return described


def _field(column: Column) -> dict[str, Any]:
    constraints = {
        "required": True if column.storage == "int64" else None,
        "minimum": _stored(column.minimum, column),
        "maximum": _stored(column.maximum, column),
        "exclusiveMinimum": _stored(column.exclusive_minimum, column),
        "enum": list(column.enum) or None,
        "maxLength": column.max_length or None,
    }
    said = {
        "name": column.name,
        "type": column.type,
        "description": column.description,
        "unit": column.unit,
        "ucd": column.ucd,
        "stage": column.stage,
        "derived_by": column.derived_by,
        "source": column.source,
        "constraints": {key: value for key, value in constraints.items() if value is not None},
    }
    return {key: value for key, value in said.items() if value}


def _stored(bound: float | None, column: Column) -> float | None:
    """A bound as exact as the column is: 1e30 in single precision is a little more than 1e30."""
    return float(np.float32(bound)) if bound is not None and column.storage == "float32" else bound


def sha256(file: Path) -> str:
    with file.open("rb") as stream:
        return hashlib.file_digest(stream, "sha256").hexdigest()
