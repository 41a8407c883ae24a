"""What became of how many: the counts of summary.json, taken from a run's finished tables."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from keptair.tables import schema
from keptair.tables.schema import Table

Counts = dict[str, int]


def rows(read: int, filtered: int, set_aside: int, accepted: int) -> Counts:
    """Every row of the catalogue is in exactly one of the last three, or this is a bug worth a loud end."""
    if filtered + set_aside + accepted != read:
        raise RuntimeError(f"{read} rows read, but {filtered} filtered + {set_aside} set aside + {accepted} accepted")
    return {"read": read, "filtered": filtered, "set_aside": set_aside, "accepted": accepted, "reused": 0}


def summarise(part: Path, planets: Table, rows: Counts, emptied: Mapping[tuple[str, str], int]) -> dict[str, Any]:
    """Counts only. Verdicts, reasons, flags and rules are there with 0 too, other words where they occur."""
    from pyarrow import parquet

    inputs = [column.subject for column in planets if column.template == "{input}_source"]
    words = ["verdict", "verdict_reason", "background", "secondary_background", "regime", "flags"]
    table = parquet.read_table(part / "planets.parquet", columns=words + [f"{name}_source" for name in inputs])
    found = {name: _values(table[name]) for name in table.column_names if name != "flags"}
    rejects = schema.table("rejects")
    broken = _values(parquet.read_table(part / "rejects.parquet", columns=["rule"])["rule"])
    mask = table["flags"].to_numpy()
    return {
        "rows": rows,
        "rejects": {rule: broken.get(rule, 0) for rule in rejects["rule"].enum},
        "cells_emptied": _by_column(emptied),
        "verdicts": {verdict: found["verdict"].get(verdict, 0) for verdict in planets["verdict"].enum},
        "verdict_reasons": {
            reason: found["verdict_reason"].get(reason, 0) for reason in planets["verdict_reason"].enum
        },
        "flags": {flag.name: int((mask >> flag.bit & 1).sum()) for flag in schema.flags()},
        "backgrounds": found["background"],
        "secondary_backgrounds": found["secondary_background"],
        "regimes": found["regime"],
        "sources": {name: found[f"{name}_source"] for name in inputs},
    }


def _values(column: Any) -> Counts:
    """How often each word stands in a column, the empty one left out."""
    counted = {pair["values"]: pair["counts"] for pair in column.value_counts().to_pylist()}
    return {word: counted[word] for word in sorted(counted) if word}


def _by_column(emptied: Mapping[tuple[str, str], int]) -> dict[str, Counts]:
    columns: dict[str, Counts] = {}
    for (column, rule), count in sorted(emptied.items()):
        columns.setdefault(column, {})[rule] = count
    return columns
