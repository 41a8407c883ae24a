"""Run folders made by hand, from the schema alone."""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from types import MappingProxyType
from typing import Any

import pyarrow as pa
import pyarrow.parquet as parquet
import pytest

from keptair.tables import schema

TYPES = {"text": pa.string(), "int64": pa.int64(), "float32": pa.float32(), "float64": pa.float64()}
RUN = {
    "name": "20261201T031500Z-1a2b3c4d",
    "catalogue": {"path": "/data/survey.csv", "bytes": 2_345_678, "sha256": "ab" * 32},
    "column_map": {},
    "settings": {},
    "versions": {"keptair": "0.1.0", "numpy": "2.4.6"},
    "rows": {"read": 0, "filtered": 0, "set_aside": 0, "accepted": 0, "reused": 0},
    "cells_emptied": 0,
    "verdicts": {},
    "seconds": {},
    "previous": None,
    "changes": None,
}


def table(name: schema.TableName, rows: Sequence[dict[str, Any]]) -> pa.Table:
    """Rows of a published table; what a row does not say is empty, 0 or null, as its type has it."""
    columns = schema.table(name)
    said = {key for row in rows for key in row}
    assert said <= set(columns.names), said - set(columns.names)
    blank = {"text": "", "int64": 0, "float32": None, "float64": None}
    fields = pa.schema([(column.name, TYPES[column.storage]) for column in columns])
    arrays = {
        column.name: pa.array([row.get(column.name, blank[column.storage]) for row in rows], TYPES[column.storage])
        if column.name in said
        else pa.repeat(pa.scalar(blank[column.storage], TYPES[column.storage]), len(rows))
        for column in columns
    }
    return pa.table(arrays, schema=fields)


def planet(planet_id: str, verdict: str = "secondary", **others: Any) -> dict[str, Any]:
    """One row of planets with the columns the report cares for."""
    reasons = {
        "envelope": "density",
        "secondary": "kept",
        "undecided": "uncertain",
        "bare": "lost_by_evaporation",
        "unassessed": "missing_input",
    }
    row = {
        "planet_id": planet_id,
        "verdict": verdict,
        "verdict_reason": reasons[verdict],
        "planet_mass_mearth_source": "measured",
        "planet_radius_rearth": 1.5,
        "planet_radius_rearth_source": "measured",
        "stellar_age_gyr_source": "prior",
        "bond_albedo_source": "prior",
    }
    if verdict != "unassessed":
        row |= {
            "air_probability": 0.5,
            "secondary_probability": 0.5,
            "secondary_probability_radiative": 0.5,
            "equilibrium_temperature_k": 300.0,
            "equilibrium_temperature_k_p16": 280.0,
            "equilibrium_temperature_k_p84": 320.0,
            "escape_speed_km_s": 11.0,
            "shoreline_dex": -0.5,
            "background": "h2" if verdict == "envelope" else "co2",
            "background_source": "chosen",
        }
    return row | others


@pytest.fixture
def run_folder(tmp_path: Path) -> Callable[..., Path]:
    """Makes a folder with the tables and the manifest `keptair.report.write` reads."""

    def make(
        planets: Sequence[dict[str, Any]] = (),
        rejects: Sequence[dict[str, Any]] = (),
        changes: Sequence[dict[str, Any]] = (),
        emptied: Mapping[str, Mapping[str, int]] = MappingProxyType({}),
        **run: Any,
    ) -> Path:
        folder = tmp_path / f"run-{len(list(tmp_path.iterdir()))}"
        folder.mkdir()
        parquet.write_table(table("planets", planets), folder / "planets.parquet")
        parquet.write_table(table("rejects", rejects), folder / "rejects.parquet")
        parquet.write_table(table("changes", changes), folder / "changes.parquet")
        accepted, aside = len(planets), len({reject["row"] for reject in rejects})
        rows = {"read": accepted + aside, "filtered": 0, "set_aside": aside, "accepted": accepted, "reused": 0}
        run["cells_emptied"] = sum(number for rules in emptied.values() for number in rules.values())
        manifest = {"name": "run", "resources": [], "run": RUN | {"rows": rows} | run}
        (folder / "datapackage.json").write_text(json.dumps(manifest), encoding="utf-8")
        (folder / "summary.json").write_text(
            json.dumps({"rows": rows, "cells_emptied": dict(emptied)}), encoding="utf-8"
        )
        return folder

    return make


@pytest.fixture
def a_planet() -> Callable[..., dict[str, Any]]:
    return planet
