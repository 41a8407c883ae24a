"""ECSV: delimited text with the columns described in YAML in its comment lines."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

from keptair.catalogue.delimited import open_delimited
from keptair.catalogue.showing import shown
from keptair.catalogue.streams import as_utf8, chunks
from keptair.catalogue.table import RawTable
from keptair.errors import CatalogueError

MARK = b"# %ECSV"
LONGEST_HEADER = 4 << 20  # bytes


def open_ecsv(path: Path, comment: str) -> RawTable:  # noqa: ARG001 - ECSV's own comment mark is part of the format
    """Read like any delimited text; units and delimiter come from the description."""
    described = description(_header(path), path.name)
    delimiter = described.get("delimiter", " ")
    table = open_delimited(path, "#", delimiter if delimiter in (" ", ",") else " ")
    units = units_of(described)
    return replace(table, format="ECSV", units=tuple(units.get(name, "") for name in table.names))


def description(text: str, name: str) -> dict[str, Any]:
    """The YAML that describes a table, tags of foreign objects left out."""
    import yaml

    loader: Any = type("PlainLoader", (yaml.SafeLoader,), {})  # builds plain values only, whatever a tag asks for
    loader.add_multi_constructor("!", lambda loader, suffix, node: None)  # noqa: ARG005
    try:
        found = yaml.load(text, loader)
    except (yaml.YAMLError, RecursionError, ValueError) as error:
        raise CatalogueError(f"{name}: its description is not YAML ({shown(str(error), 120)})") from None
    return found if isinstance(found, dict) else {}


def units_of(described: dict[str, Any]) -> dict[str, str]:
    """Name → unit, as far as the description has any."""
    columns = described.get("datatype")
    entries = [entry for entry in columns if isinstance(entry, dict)] if isinstance(columns, list) else []
    return {str(entry.get("name")): str(entry["unit"]) for entry in entries if isinstance(entry.get("unit"), str)}


def _header(path: Path) -> str:
    """The comment lines at the beginning, without their mark."""
    lines: list[bytes] = []
    rest = b""
    for chunk in as_utf8(chunks(path), "utf-8"):
        *whole, rest = (rest + chunk).split(b"\n")
        for line in whole:
            if not line.startswith(b"#"):
                return b"\n".join(lines).decode("utf-8", errors="replace")
            if not line.startswith(MARK):
                lines.append(line[1:].removeprefix(b" ").rstrip(b"\r"))
        if sum(map(len, lines)) + len(rest) > LONGEST_HEADER:
            raise CatalogueError(f"{path.name}: its description is longer than {LONGEST_HEADER >> 20} MB")
    return b"\n".join(lines).decode("utf-8", errors="replace")
