"""Batches made by hand: rows of canonical values become what the stages take, without a catalogue in between."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from keptair.batch import Array, Batch
from keptair.tables import schema

SIDES = ("_err_plus", "_err_minus")


def make_batch(rows: Sequence[Mapping[str, Any]]) -> Batch:
    """A screened batch.

    A row holds canonical names, each number's `_err_plus`, `_err_minus` and `_bound` where it has any, and an `_err`
    that stands for both errors. What a row leaves out is missing; a mass or radius counts as measured unless its
    kind says otherwise.
    """
    rows = [_spelled_out(row) for row in rows]
    columns: dict[str, Array] = {
        "row": np.arange(1, len(rows) + 1),
        "fingerprint": _texts(rows, "fingerprint", "0" * 16),
        "flag.cell_emptied": np.zeros(len(rows), dtype=bool),
    }
    for column in schema.inputs():
        name = column.name
        if column.type == "number":
            columns["catalogue." + name] = _numbers(rows, name)
            columns |= {name + side: _numbers(rows, name + side) for side in SIDES}
            columns[name + "_bound"] = _texts(rows, name + "_bound")
        elif name == "background":
            columns["catalogue.background"] = _texts(rows, name)
        elif name == "planet_id":
            columns[name] = np.array(
                [row.get(name, f"planet {number}") for number, row in enumerate(rows, 1)], dtype=object
            )
        else:
            columns[name] = _texts(rows, name, "measured" if name.endswith("_kind") else "")
    return Batch(columns)


def _spelled_out(row: Mapping[str, Any]) -> dict[str, Any]:
    """`<name>_err` written out as both errors; a name no table knows is a mistake of the test."""
    plain: dict[str, Any] = {}
    for name, value in row.items():
        if name.endswith("_err"):
            plain |= {name + side.removeprefix("_err"): value for side in SIDES}
        else:
            plain[name] = value
    unknown = plain.keys() - set(schema.catalogue().names) - {"fingerprint"}
    if unknown:
        raise KeyError(f"no such input: {', '.join(sorted(unknown))}")
    return plain


def _numbers(rows: Sequence[Mapping[str, Any]], name: str) -> Array:
    return np.array([row.get(name, np.nan) for row in rows], dtype=float)


def _texts(rows: Sequence[Mapping[str, Any]], name: str, blank: str = "") -> Array:
    return np.array([row.get(name, blank) for row in rows], dtype=object)
