"""Screen: rows that break a row rule leave with a reason; cells that break a cell rule become missing."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from keptair import fingerprint
from keptair.batch import Batch
from keptair.tables import rules, schema

if TYPE_CHECKING:
    from keptair.settings import Settings

Array = NDArray[Any]


@dataclass(frozen=True)
class Screened:
    """Planets that go on, lines about rows that do not, and how many cells each rule emptied."""

    batch: Batch
    rejects: dict[str, Array]
    emptied: dict[tuple[str, str], int]


def run(batch: Batch, settings: Settings) -> Screened:
    """Set rows aside, empty cells, and give every planet that stays its fingerprint."""
    broken_rows = rules.broken_rows(batch.columns)
    set_aside = np.zeros(len(batch), dtype=bool)
    for broken in broken_rows:
        set_aside[broken.rows] = True
    accepted = batch.take(~set_aside)
    clean = rules.empty_broken_cells(accepted.columns, settings.backgrounds.keys())
    flagged = np.zeros(len(accepted), dtype=bool)
    for mask in clean.broken.values():
        flagged |= mask
    columns = {"row": accepted.columns["row"], **clean.columns, "flag.cell_emptied": flagged, **_passed_on(accepted)}
    columns["fingerprint"] = fingerprint.of_rows(columns, fingerprint.context(settings))
    counts = {key: int(mask.sum()) for key, mask in clean.broken.items()}
    return Screened(Batch(columns), _rejects(batch, broken_rows), counts)


def _passed_on(batch: Batch) -> dict[str, Array]:
    """Carried columns, and which values are constants of the column map."""
    return {name: values for name, values in batch.columns.items() if name.startswith(("input_", "given."))}


def _rejects(batch: Batch, broken_rows: list[rules.BrokenRow]) -> dict[str, Array]:
    """One line per broken row rule, in file order."""
    lines = sorted(
        (int(batch.columns["row"][row]), order, broken.rule, broken.column, int(row), value, reason)
        for order, broken in enumerate(broken_rows)
        for row, value, reason in zip(broken.rows, broken.values, broken.reasons, strict=True)
    )
    table = schema.table("rejects", {})
    names = batch.columns["read.planet_id"]
    columns: dict[str, list[Any]] = {
        "row": [line[0] for line in lines],
        "planet_id": [names[line[4]] for line in lines],
        "column": [line[3] for line in lines],
        "value": [line[5] for line in lines],
        "rule": [line[2] for line in lines],
        "reason": [line[6] for line in lines],
    }
    return {
        column.name: np.array(columns[column.name], dtype=np.int64)
        if column.type == "integer"
        else _shortened(columns[column.name], column.max_length)
        for column in table
    }


def _shortened(texts: list[str], longest: int) -> Array:
    shortened = np.empty(len(texts), dtype=object)
    shortened[:] = [text if len(text) <= longest else f"{text[: longest - 1]}…" for text in texts]
    return shortened
