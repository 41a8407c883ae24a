"""What the commands print."""

from __future__ import annotations

import json
import sys
import textwrap
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any

from pydantic import BaseModel

from keptair.errors import NotThereError

if TYPE_CHECKING:
    from keptair.runs.running import Progress, Run
    from keptair.settings import Settings
    from keptair.tables.schema import Table
    from keptair.verification import Outcome

WIDTH = 80


def as_json(content: Mapping[str, Any]) -> str:
    return json.dumps(content, indent=2, ensure_ascii=False)


@contextmanager
def progress_bar(quiet: bool) -> Iterator[Progress | None]:
    """A bar on stderr where a person watches; elsewhere nothing."""
    if quiet or not sys.stderr.isatty():
        yield None
        return
    from rich.console import Console
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeRemainingColumn

    columns = (TextColumn("rows"), BarColumn(), MofNCompleteColumn(), TimeRemainingColumn())
    with Progress(*columns, console=Console(stderr=True), transient=True) as bar:
        task = bar.add_task("rows", total=None)
        yield lambda done, total: bar.update(task, completed=done, total=total)


def closing_summary(run: Run) -> str:
    """What became of the catalogue, for a person: 80 columns, paths never cut."""
    rows, emptied, verdicts = (run.manifest[key] for key in ("rows", "cells_emptied", "verdicts"))
    lines = [
        f"{rows['read']:,} rows read = {rows['filtered']:,} filtered + {rows['set_aside']:,} set aside "
        f"+ {rows['accepted']:,} accepted",
        f"{emptied:,} {'cell' if emptied == 1 else 'cells'} emptied (filled like any gap, and flagged)",
        ", ".join(f"{verdict} {count:,}" for verdict, count in verdicts.items()),
    ]
    lines += [f"note: {remark}" for remark in run.manifest["remarks"]]
    wrapped = [part for line in lines for part in textwrap.wrap(line, WIDTH, subsequent_indent="  ")]
    found = [f"table   {run.path / 'planets.parquet'}", f"report  {run.path / 'report.html'}"]
    return "\n".join([*wrapped, *found, f"{run.manifest['seconds']['total']:.1f} s"])


def verification(outcomes: Sequence[Outcome]) -> str:
    """A line for each body of the Solar System, and how many passed."""
    lines = [f"{'body':10} {'expected':24} {'obtained':11} {'because of':20} {'P(air)':>6}"]
    for one in outcomes:
        probability = one.envelope_probability if one.obtained == "envelope" else one.secondary_probability
        mark = "" if one.passed else "  <- not as expected"
        expected = " or ".join(one.expected)
        lines.append(f"{one.body:10} {expected:24} {one.obtained:11} {one.reason:20} {probability:6.2f}{mark}")
    passed = sum(one.passed for one in outcomes)
    lines += [
        "",
        f"{passed} of {len(outcomes)} bodies as expected.",
        "P(air): share of draws that keep a secondary air; for an envelope, of those",
        "lighter than rock.",
    ]
    return "\n".join(lines)


def data_dictionary(name: str | None) -> str:
    """The columns of one table, or of all: name, type, unit, meaning."""
    from keptair.tables import schema

    if name is not None and name not in schema.TABLES:
        raise NotThereError(f"there is no table {name!r}: there are {', '.join(schema.TABLES)}")
    names = schema.TABLES if name is None else (name,)
    return "\n\n".join(_columns_of(schema.table(table)) for table in names)


def _columns_of(table: Table) -> str:
    rows = [(column.name, column.storage, column.unit or "-", column.description) for column in table]
    name, kind, unit = (max(len(row[place]) for row in rows) for place in range(3))
    return "\n".join(
        [
            f"# {table.name}: {table.title}. {table.description}",
            *(f"{row[0]:{name}}  {row[1]:{kind}}  {row[2]:{unit}}  {row[3]}" for row in rows),
        ]
    )


def settings_as_toml(settings: Settings) -> str:
    """Every setting as TOML that can be used as a settings file; comments say meaning, unit and origin."""
    return "\n".join(["# value  # meaning [unit] (where the value came from)", *_group(settings, "", settings.origin)])


def _group(model: BaseModel, prefix: str, origin: Callable[[str], str]) -> list[str]:
    """Values first, then groups: what follows a [group] belongs to it."""
    values: list[str] = []
    groups: list[str] = []
    for name, about in type(model).model_fields.items():
        value = getattr(model, name)
        for key, inner in _models(name, value):
            groups += ["", f"[{prefix}{key}]", *_group(inner, f"{prefix}{key}.", origin)]
        if value is not None and not isinstance(value, BaseModel | dict):
            extra = about.json_schema_extra
            unit = extra.get("unit") if isinstance(extra, dict) else ""
            said = [about.description or "", f"[{unit}]" if unit else "", f"({origin(prefix + name)})"]
            values.append(f"{name} = {_toml(value)}  # {' '.join(filter(None, said))}")
    return values + groups


def _models(name: str, value: object) -> list[tuple[str, BaseModel]]:
    if isinstance(value, BaseModel):
        return [(name, value)]
    return [(f"{name}.{key}", inner) for key, inner in value.items()] if isinstance(value, dict) else []


def _toml(value: Any) -> str:
    """TOML writes texts, true, false and lists as JSON does."""
    return json.dumps(value, ensure_ascii=False)
