"""The worked sheet of one planet: every step, with symbol, formula, value, unit and source."""

from __future__ import annotations

import difflib
import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from keptair.errors import NotThereError
from keptair.records import from_records
from keptair.settings import Settings
from keptair.stages import through
from keptair.tables import schema
from keptair.worksheet.rendering import as_text
from keptair.worksheet.sections import sections
from keptair.worksheet.sheet import Sheet


def trace(planet: str, where: str | Path) -> str:
    """The worked sheet of one planet of a run, as plain text at 80 columns.

    Parameters
    ----------
    planet : its planet_id
    where : a run folder, or a folder of runs (then its latest)
    """
    return as_text(worked_sheet(planet, where))


def worked_sheet(planet: str, where: str | Path) -> Sheet:
    """Work one planet of a run out again, step by step, by the same functions and settings."""
    from keptair import __version__
    from keptair.runs.loading import find

    folder = find(where)
    manifest = json.loads((folder / "datapackage.json").read_text(encoding="utf-8"))["run"]
    settings = Settings.model_validate(manifest["settings"])
    row = find_planet(planet, folder)
    batch = through(from_records([record_of(row)]), settings)
    remarks = []
    if manifest["versions"]["keptair"] != __version__:
        remarks.append(f"the run was made by version {manifest['versions']['keptair']}, this sheet by {__version__}")
    if row["verdict"] != batch.columns["verdict"][0]:
        remarks.append(f"the run's verdict was {row['verdict']}: code or libraries have changed since")
    return Sheet(planet, str(folder), tuple(sections(batch, settings)), tuple(remarks))


def find_planet(planet: str, folder: Path) -> dict[str, Any]:
    """The planet's row of the published table."""
    from pyarrow import parquet

    file = folder / "planets.parquet"
    found = parquet.read_table(file, filters=[("planet_id", "==", planet)]).to_pylist()
    if not found:
        names = parquet.read_table(file, columns=["planet_id"])["planet_id"].to_pylist()
        lower = {name.lower(): name for name in names}
        near = [lower[name] for name in difflib.get_close_matches(planet.lower(), lower, 3)]
        meant = f"; did you mean {' or '.join(repr(name) for name in near)}?" if near else ""
        raise NotThereError(f"there is no planet {planet!r} in {folder}{meant}", hint="keptair targets RUN")
    return dict(found[0])


def record_of(row: Mapping[str, Any]) -> dict[str, Any]:
    """What the catalogue said of a published planet."""
    record = {column.name: row.get(column.name) for column in schema.inputs() if column.type == "string"}
    for name in schema.measured_inputs():
        record[name] = row[f"{name}_catalogued"]
        record |= {name + side: row[name + side] for side in schema.COMPANIONS}
        record[f"given.{name}"] = row[f"{name}_source"] == "given"
    given = row["background_source"] == "given"
    # a background the rule would choose anyway changes nothing but its mark
    record["background"] = row["background"] if given else row["secondary_background"]
    return record
