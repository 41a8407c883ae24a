"""One input of the fuzzer: a file, the column map it is read with, and how many rows are taken at a time."""

from __future__ import annotations

import json
from dataclasses import dataclass
from typing import Any

ColumnMapText = str | dict[str, Any] | None


@dataclass(frozen=True)
class Case:
    """A catalogue and its map.

    map : TOML text, a dictionary of the same shape, or nothing.
    """

    name: str
    data: bytes
    map: ColumnMapText = None
    rows: int = 7

    def as_bytes(self) -> bytes:
        """A line of JSON, then the file: what a corpus keeps."""
        head = {"name": self.name, "map": self.map, "rows": self.rows}
        return json.dumps(head).encode("ascii") + b"\n" + self.data

    @staticmethod
    def of_bytes(raw: bytes) -> Case | None:
        """The case again; None where the bytes are none."""
        head, _, data = raw.partition(b"\n")
        try:
            found = json.loads(head)
            return Case(str(found["name"]), data, found["map"], int(found["rows"]))
        except (ValueError, KeyError, TypeError, RecursionError):
            return None
