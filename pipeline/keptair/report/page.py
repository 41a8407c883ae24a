"""The report page: the tables of a run → numbers → one HTML file that needs nothing but itself."""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping
from importlib import resources
from pathlib import Path
from typing import TYPE_CHECKING, Any

from keptair.report import counts, figures, targets, words
from keptair.settings import Settings
from keptair.tables import dictionary, schema
from keptair.verification import verify

if TYPE_CHECKING:
    import pyarrow as pa
    from jinja2 import Environment

TOP = 15
WITHOUT_ENVELOPE = 10
RANKED = 10  # of each list, those marked in the picture
FEW = 5  # examples of rows set aside, for each rule
CHANGES = 12
NOT_IN_THE_CHAIN = ("distance_pc", "ra_deg", "dec_deg")
RESTING_ON = ("planet_mass_mearth", "planet_radius_rearth", "stellar_age_gyr", "bond_albedo")


def write(part: Path, settings: Settings) -> None:
    """Write report.html beside the tables in the folder `part`; the same tables give the same bytes."""
    page = _environment().get_template("report.html.j2").render(_context(Path(part), settings))
    (Path(part) / "report.html").write_bytes(page.encode())


def _environment() -> Environment:
    """Templates that escape everything: names in a catalogue are anybody's text."""
    from jinja2 import Environment, FunctionLoader, StrictUndefined

    assets = resources.files("keptair.report") / "assets"
    environment = Environment(
        loader=FunctionLoader(lambda name: (assets / name).read_text(encoding="utf-8")),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    environment.filters |= {
        "count": words.count,
        "planets": words.planets,
        "significant": words.significant,
        "probability": words.probability,
        "plain": words.plain,
        "size": words.size,
        "started": words.started,
        "visible": words.visible,
        "input": words.input_name,
    }
    environment.globals |= {"share": words.share, "words": words}
    return environment


def _context(part: Path, settings: Settings) -> dict[str, Any]:
    import pyarrow.parquet as parquet

    inputs = tuple(name for name in schema.measured_inputs() if name not in NOT_IN_THE_CHAIN)
    planets = parquet.read_table(part / "planets.parquet", columns=_columns(inputs))
    rejects = parquet.read_table(part / "rejects.parquet")
    first = _targets(planets, TOP, words.VERDICTS)
    others = _targets(planets, WITHOUT_ENVELOPE, [verdict for verdict in words.VERDICTS if verdict != "envelope"])
    if not any(target["verdict"] == "envelope" for target in first):
        others = []  # the first list says it all
    named = {target["planet_id"]: chr(ord("a") + place) for place, target in enumerate(others[:RANKED])}
    named |= {target["planet_id"]: str(place) for place, target in enumerate(first[:RANKED], start=1)}
    run = _read_json(part / "datapackage.json")["run"]
    summary = _read_json(part / "summary.json")
    return {
        "run": run,
        "emptied": {"total": run["cells_emptied"], "cells": _by_column(summary["cells_emptied"])},
        "settings": settings,
        "total": len(planets),
        "verdicts": counts.verdicts(planets),
        "targets": first,
        "others": others,
        "picture": figures.shoreline(planets, named),
        "rejects": _rejects(rejects),
        "changes": _changes(part / "changes.parquet"),
        "sources": counts.sources(planets, inputs),
        "excess_heat": counts.excess_heat(planets, settings.verdict),
        "opinions": counts.opinions(planets),
        "flags": counts.flags(planets),
        "backgrounds": counts.backgrounds(planets, settings),
        "exobases": counts.exobases(planets, settings),
        "known_worlds": verify(settings),
        "formulas": dictionary.formulas(),
        "changed_settings": counts.changed_settings(settings),
    }


def _read_json(file: Path) -> Any:
    return json.loads(file.read_text(encoding="utf-8"))


def _columns(inputs: tuple[str, ...]) -> list[str]:
    wanted = {*targets.COLUMNS, *(f"{name}_source" for name in inputs)}
    wanted |= {
        "background",
        "background_source",
        "equilibrium_temperature_k_p16",
        "equilibrium_temperature_k_p84",
        "escape_speed_km_s",
        "exobase_altitude_km",
        "exobase_temperature_k",
        "flags",
        "quick_rule_verdict",
        "secondary_probability_radiative",
        "shoreline_dex",
    }
    return sorted(wanted)


def _targets(planets: pa.Table, top: int, verdicts: Iterable[str]) -> list[dict[str, Any]]:
    """The first planets by priority, those that have one, each with what its air probability rests on."""
    rows = targets.ranked(planets, verdicts, top).to_pylist()
    return [{**row, "rests_on": _rests_on(row)} for row in rows if row["priority"] is not None]


def _rests_on(row: Mapping[str, Any]) -> str:
    """Where mass, radius, age and albedo came from."""
    by_source: dict[str, list[str]] = {}
    for name in RESTING_ON:
        by_source.setdefault(row[f"{name}_source"], []).append(words.input_name(name))
    known = [source for source in words.SOURCES if source in by_source]
    return "; ".join(f"{', '.join(by_source[source])} {words.BRIEF_SOURCES[source]}" for source in known)


def _rejects(rejects: pa.Table) -> dict[str, Any]:
    """Rows set aside: how many lines for each rule, and the first few of each."""
    by_rule: dict[str, list[dict[str, Any]]] = {}
    for line in rejects.to_pylist():
        by_rule.setdefault(line["rule"], []).append(line)
    rules = sorted(by_rule.items(), key=lambda item: (-len(item[1]), item[0]))
    return {
        "rows": len(set(rejects["row"].to_pylist())),
        "rules": [{"rule": rule, "lines": len(lines), "first": lines[:FEW]} for rule, lines in rules],
    }


def _changes(file: Path) -> dict[str, Any]:
    """What is different from the previous run: how many of each kind, and the strongest."""
    import pyarrow.parquet as parquet

    table = parquet.read_table(file)
    return {
        "rows": len(table),
        "kinds": [(kind, number) for (kind,), number in counts.tally(table, "change").items()],
        "first": table.slice(0, CHANGES).to_pylist(),
    }


def _by_column(emptied: Mapping[str, Mapping[str, int]]) -> list[tuple[str, int]]:
    """Cells emptied in each column, the most first."""
    summed = [(name, sum(rules.values())) for name, rules in emptied.items()]
    return sorted(summed, key=lambda column: (-column[1], column[0]))
