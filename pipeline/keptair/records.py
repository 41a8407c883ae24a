"""A screened batch from rows given by hand: bodies to verify, one planet to trace."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from keptair.batch import Array, Batch
from keptair.tables import schema


def from_records(records: Sequence[Mapping[str, Any]]) -> Batch:
    """The batch the screen would make of these rows, each a mapping of canonical names to good values."""
    columns: dict[str, Array] = {"row": np.arange(1, len(records) + 1)}

    def numbers(name: str) -> Array:
        return np.array([_number(record.get(name)) for record in records], dtype=np.float64)

    def texts(name: str) -> Array:
        return np.array([record.get(name) or "" for record in records], dtype=object)

    for column in schema.inputs():
        name = column.name
        if column.type == "number":
            columns[f"catalogue.{name}"] = numbers(name)
            columns |= {name + side: numbers(name + side) for side in ("_err_plus", "_err_minus")}
            columns[f"{name}_bound"] = texts(f"{name}_bound")
            columns[f"given.{name}"] = np.array([bool(record.get(f"given.{name}")) for record in records])
        else:
            columns["catalogue.background" if name == "background" else name] = texts(name)
    for kind in ("planet_radius_kind", "planet_mass_kind"):
        value = columns[f"catalogue.{'planet_radius_rearth' if 'radius' in kind else 'planet_mass_mearth'}"]
        columns[kind][(columns[kind] == "") & ~np.isnan(value)] = "measured"
    columns["fingerprint"] = np.full(len(records), "", dtype=object)
    columns["flag.cell_emptied"] = np.zeros(len(records), dtype=bool)
    return Batch(columns)


def _number(value: Any) -> float:
    return np.nan if value is None else float(value)
