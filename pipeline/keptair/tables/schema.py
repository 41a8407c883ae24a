"""The tables of schemas/ as objects: columns, templates written out, flags."""

from __future__ import annotations

import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cache, cached_property
from importlib import resources
from importlib.resources.abc import Traversable
from itertools import groupby
from pathlib import Path
from typing import Any, Literal

TableName = Literal["catalogue", "planets", "gases", "rejects", "changes"]
TABLES: tuple[TableName, ...] = ("catalogue", "planets", "gases", "rejects", "changes")
COMPANIONS = ("_err_plus", "_err_minus", "_bound")  # what may stand beside a number of the catalogue


@dataclass(frozen=True)
class Column:
    """One column of one table."""

    name: str
    type: Literal["string", "integer", "number"]
    description: str
    unit: str = ""
    ucd: str = ""
    stage: str = ""
    derived_by: str = ""
    source: str = ""
    on_failure: Literal["", "row", "cell"] = ""
    format: str = ""
    minimum: float | None = None
    maximum: float | None = None
    exclusive_minimum: float | None = None
    enum: tuple[str, ...] = ()
    max_length: int = 0
    template: str = ""  # the entry it was written out from, if any
    subject: str = ""  # the gas or input it speaks of

    @property
    def storage(self) -> Literal["text", "int64", "float32", "float64"]:
        """How it is kept on disk: derived numbers to seven digits, inputs as they were given."""
        if self.type == "string":
            return "text"
        if self.type == "integer":
            return "int64"
        return "float32" if self.derived_by else "float64"


@dataclass(frozen=True)
class Table:
    """One table: its columns in order."""

    name: str
    title: str
    description: str
    primary_key: tuple[str, ...]
    columns: tuple[Column, ...]

    @property
    def names(self) -> tuple[str, ...]:
        return tuple(column.name for column in self.columns)

    @cached_property
    def by_name(self) -> Mapping[str, Column]:
        return {column.name: column for column in self.columns}

    def __getitem__(self, name: str) -> Column:
        return self.by_name[name]

    def __iter__(self) -> Iterator[Column]:
        return iter(self.columns)


@dataclass(frozen=True)
class Flag:
    """One warning: a bit of planets.flags that keeps its meaning for good."""

    bit: int
    name: str
    stage: str
    description: str


def schema_folder() -> Traversable:
    """The folder of the TOML files: the installed package's own, else the checkout's."""
    installed = resources.files("keptair") / "schemas"
    if installed.is_dir():
        return installed
    checkout = Path(__file__).resolve().parents[3] / "schemas"
    if checkout.is_dir():
        return checkout
    raise FileNotFoundError(f"the schemas are in neither place they can be: {installed}, {checkout}")


@cache
def read_toml(name: str) -> dict[str, Any]:
    return tomllib.loads((schema_folder() / f"{name}.toml").read_text(encoding="utf-8"))


@cache
def flags() -> tuple[Flag, ...]:
    return tuple(Flag(**entry) for entry in read_toml("flags")["flags"])


@cache
def catalogue() -> Table:
    """The canonical inputs; every number has its companions behind it."""
    return _table(
        "catalogue", [column for entry in read_toml("catalogue")["fields"] for column in _with_companions(entry)]
    )


@cache
def inputs() -> tuple[Column, ...]:
    """The canonical inputs without their companions."""
    return tuple(_column(entry) for entry in read_toml("catalogue")["fields"])


def measured_inputs() -> tuple[str, ...]:
    """Names of the inputs that are numbers: those that may carry errors and limits."""
    return tuple(column.name for column in inputs() if column.type == "number")


def table(name: TableName, gases: Mapping[str, str] | None = None) -> Table:
    """A table with its templates written out.

    gases : key → title of every gas the per-gas columns are for; the built-in ones where none is given.
    """
    if name == "catalogue":
        return catalogue()
    if gases is None:
        from keptair.reference import load_gases

        gases = {key: gas.title for key, gas in load_gases().items()}
    return _published(name, tuple(gases.items()))


@cache
def _published(name: TableName, gases: tuple[tuple[str, str], ...]) -> Table:
    columns: list[Column] = []
    for subject, group in groupby(read_toml(name)["fields"], key=lambda entry: entry.get("for_each", "")):
        entries = list(group)
        if subject == "gas":
            columns += [_fill_in(entry, gas, {"gas": gas, "title": title}) for gas, title in gases for entry in entries]
        elif subject == "input":
            columns += _published_inputs(entries)
        else:
            columns += [_column(entry) for entry in entries]
    return _table(name, columns)


def _published_inputs(entries: list[dict[str, Any]]) -> list[Column]:
    """The inputs as used: numbers with companions and source, texts alone.

    `background` is left out: three columns of the exobase say what became of it.
    """
    columns: list[Column] = []
    for entry in read_toml("catalogue")["fields"]:
        values, companions = {**entry, "input": entry["name"]}, entries[1:]
        if entry["name"] == "background":
            continue
        if entry["type"] == "string":
            keep = {key: value for key, value in entry.items() if key != "on_failure"}
            columns.append(_column({**keep, "stage": "screen"}))
            continue
        inherited = {"type": "number", "unit": entry.get("unit", ""), "ucd": entry["ucd"]}
        settled = {"stage": entry.get("stage", entries[0]["stage"])}
        columns.append(_fill_in(inherited | entries[0] | settled, entry["name"], values))
        for companion in companions:
            unit = {"unit": entry.get("unit", "")} if companion["type"] == "number" else {}
            stage = companion["stage"]
            if companion["name"] == "{input}_source":  # settled together with the value
                stage = entry.get("stage", stage)
            columns.append(_fill_in({**companion, **unit, "stage": stage}, entry["name"], values))
    return columns


def _with_companions(entry: dict[str, Any]) -> list[Column]:
    columns = [_column(entry)]
    if entry["type"] == "number":
        name, unit = entry["name"], entry.get("unit", "")
        for suffix, side in (("_err_plus", "Upper"), ("_err_minus", "Lower")):
            columns.append(
                Column(
                    name + suffix,
                    "number",
                    f"{side} error of {name}, of any sign.",
                    unit=unit,
                    ucd=f"stat.error;{entry['ucd']}",
                    on_failure="cell",
                    subject=name,
                )
            )
        columns.append(
            Column(
                name + "_bound",
                "string",
                f"Whether {name} is a limit.",
                ucd="meta.code.qual",
                on_failure="cell",
                enum=("", "upper", "lower"),
                max_length=5,
                subject=name,
            )
        )
    return columns


def _fill_in(entry: dict[str, Any], subject: str, values: Mapping[str, Any]) -> Column:
    written = {key: value.format_map(values) if isinstance(value, str) else value for key, value in entry.items()}
    return _column({**written, "template": entry["name"], "subject": subject})


def _column(entry: dict[str, Any]) -> Column:
    constraints = {**entry.get("constraints", {})}
    constraints |= {key.split(".", 1)[1]: value for key, value in entry.items() if key.startswith("constraints.")}
    plain = {
        key: value
        for key, value in entry.items()
        if key not in ("constraints", "for_each") and not key.startswith("constraints.")
    }
    return Column(
        **plain,
        minimum=constraints.get("minimum"),
        maximum=constraints.get("maximum"),
        exclusive_minimum=constraints.get("exclusiveMinimum"),
        enum=tuple(constraints.get("enum", ())),
        max_length=constraints.get("maxLength", 0),
    )


def _table(name: TableName, columns: list[Column]) -> Table:
    head = read_toml(name)
    return Table(name, head["title"], head["description"], tuple(head.get("primaryKey", ())), tuple(columns))
