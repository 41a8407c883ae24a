"""What a run would read, set aside, empty and fill: a catalogue looked through without working anything out."""

from __future__ import annotations

import textwrap
from collections import defaultdict
from collections.abc import Mapping
from dataclasses import asdict, dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from keptair.batch import Batch
from keptair.catalogue.columns import ColumnMap
from keptair.catalogue.reading import Catalogue, open_catalogue
from keptair.catalogue.showing import shown
from keptair.stages.fill import LIMIT_IS_MISSING
from keptair.tables import rules, schema

if TYPE_CHECKING:
    from keptair.settings import Settings

WIDTH = 80
ROWS = 1 << 13  # looked at together
FIRST_ROWS = 5  # row numbers named for each rule
FILLED_BY = {
    "planet_radius_rearth": "relation",
    "planet_mass_mearth": "relation",
    "semi_major_axis_au": "computed",
    "eccentricity": "assumed",
    "insolation_earth": "computed",
    "bond_albedo": "prior",
    "stellar_radius_rsun": "relation",
    "stellar_mass_msun": "relation",
    "stellar_luminosity_lsun": "computed",
    "stellar_age_gyr": "prior",
    "j_mag": "relation",
    "k_mag": "relation",
}


@dataclass
class ColumnCheck:
    """Cells of one canonical column, in the rows that would be accepted.

    given = in_bounds + emptied, in_bounds = measured + limits + minimum + relation; lacking counts the rows without a
    value the pipeline can use, filled_by says how it would get one ("" where it cannot).
    """

    name: str
    read_from: tuple[str, ...] = ()
    given: int = 0
    missing: int = 0
    in_bounds: int = 0
    emptied: int = 0
    measured: int = 0
    limits: int = 0
    minimum: int = 0
    relation: int = 0
    lacking: int = 0
    filled_by: str = ""


@dataclass
class RuleCheck:
    """How many rows or cells break a rule, and the first few rows that do."""

    count: int = 0
    first_rows: list[int] = field(default_factory=list)

    def add(self, rows: NDArray[np.int64]) -> None:
        self.count += len(rows)
        self.first_rows += rows[: FIRST_ROWS - len(self.first_rows)].tolist()


@dataclass(frozen=True)
class CheckReport:
    """What `keptair check` tells."""

    source: str
    format: str
    bytes: int
    sha256: str
    rows: dict[str, int]
    set_aside: dict[str, RuleCheck]  # by row rule
    emptied: dict[str, dict[str, RuleCheck]]  # by column, then by cell rule
    columns: list[ColumnCheck]
    remarks: list[str]

    def as_dict(self) -> dict[str, Any]:
        """The same, ready for JSON."""
        return asdict(self)

    def lines(self) -> list[str]:
        """The same for a person, 80 columns wide."""
        rows = self.rows
        head = f"{shown(Path(self.source).name, 50)}: {self.format}, {self.bytes:,} bytes"
        counts = (
            f"{rows['read']:,} rows read = {rows['filtered']:,} filtered + {rows['set_aside']:,} set aside "
            f"+ {rows['accepted']:,} accepted"
        )
        lines = [head, *_wrapped(counts)]
        for rule, check in self.set_aside.items():
            lines += _wrapped(f"set aside, {rule}: {check.count:,} ({_rows(check)})")
        lines += ["", *_table(self.columns)]
        for column in self.columns:
            if column.minimum:
                lines += _wrapped(f"{column.name}: {column.minimum:,} more are M sin i")
            if column.relation:
                lines += _wrapped(f"{column.name}: {column.relation:,} come from a relation; ours is used instead")
        if self.emptied:
            lines += ["", "Cells that would be emptied, then filled like any gap:"]
        for name, found in self.emptied.items():
            for rule, check in found.items():
                lines += _wrapped(f"{name}: {rules.CELL_RULES[rule]}, {check.count:,} ({_rows(check)})", "  ")
        lines += [""] * bool(self.remarks)
        return lines + [line for remark in self.remarks for line in _wrapped(f"note: {remark}")]


def check(
    source: str | Path, column_map: str | Path | Mapping[str, Any] | ColumnMap | None, settings: Settings
) -> CheckReport:
    """Look through a catalogue as a run would read it."""
    catalogue = open_catalogue(source, column_map)
    tally = _Tally(catalogue)
    for batch in catalogue.batches(ROWS):
        tally.add(batch, settings)
    accepted = catalogue.rows_read - catalogue.rows_filtered - tally.gone
    counts = (catalogue.rows_read, catalogue.rows_filtered, tally.gone, accepted)
    return CheckReport(
        source=catalogue.source,
        format=catalogue.format,
        bytes=catalogue.bytes,
        sha256=catalogue.sha256,
        rows=dict(zip(("read", "filtered", "set_aside", "accepted"), counts, strict=True)),
        set_aside={rule: found for rule, found in tally.set_aside.items() if found.count},
        emptied={name: dict(found) for name, found in tally.emptied.items()},
        columns=list(tally.columns.values()),
        remarks=catalogue.remarks,
    )


class _Tally:
    """Counts batch by batch."""

    def __init__(self, catalogue: Catalogue) -> None:
        self.gone = 0
        self.set_aside = {rule: RuleCheck() for rule in ("identifier", "duplicate", "cells")}
        self.emptied: defaultdict[str, defaultdict[str, RuleCheck]] = defaultdict(lambda: defaultdict(RuleCheck))
        self.columns = {
            column.name: ColumnCheck(
                column.name, _origin(catalogue, column.name), filled_by=FILLED_BY.get(column.name, "")
            )
            for column in schema.inputs()
        }

    def add(self, batch: Batch, settings: Settings) -> None:
        gone = np.zeros(len(batch), dtype=bool)
        for broken in rules.broken_rows(batch.columns):
            self.set_aside[broken.rule].add(batch.columns["row"][broken.rows])
            gone[broken.rows] = True
        self.gone += int(gone.sum())
        accepted = batch.take(~gone)
        clean = rules.empty_broken_cells(accepted.columns, settings.backgrounds.keys())
        for (name, rule), mask in clean.broken.items():
            self.emptied[name][rule].add(accepted.columns["row"][mask])
        for column in schema.inputs():
            if column.type == "number":
                self._count_numbers(column.name, accepted, clean)
            else:
                self._count_texts(column.name, accepted, clean)

    def _count_numbers(self, name: str, batch: Batch, clean: rules.Emptied) -> None:
        check = self.columns[name]
        given = ~np.isnan(batch.columns[f"read.{name}"])
        if f"unreadable.{name}" in batch.columns:
            given |= batch.columns[f"unreadable.{name}"] != ""
        left = ~np.isnan(clean.columns[f"catalogue.{name}"])
        kind = clean.columns.get(rules.KINDS_OF.get(name, ""), np.full(len(batch), ""))
        relation = left & (kind == "relation")
        limits = left & ~relation & (clean.columns[f"{name}_bound"] != "")
        minimum = left & ~limits & (kind == "minimum")
        unusable = ~left | relation | (limits if name in LIMIT_IS_MISSING else False)
        self._count(check, given, given & ~left)
        check.limits += int(limits.sum())
        check.minimum += int(minimum.sum())
        check.relation += int(relation.sum())
        check.measured += int((left & ~limits & ~relation & ~minimum).sum())
        check.lacking += int(unusable.sum())

    def _count_texts(self, name: str, batch: Batch, clean: rules.Emptied) -> None:
        emptied = np.zeros(len(batch), dtype=bool)
        for (column, _), mask in clean.broken.items():
            emptied |= mask if column == name else False
        self._count(self.columns[name], batch.columns[f"read.{name}"] != "", emptied)

    @staticmethod
    def _count(check: ColumnCheck, given: NDArray[np.bool_], emptied: NDArray[np.bool_]) -> None:
        check.given += int(given.sum())
        check.missing += int((~given).sum())
        check.in_bounds += int((given & ~emptied).sum())
        check.emptied += int(emptied.sum())


def _origin(catalogue: Catalogue, name: str) -> tuple[str, ...]:
    """The columns of the file a canonical one is read from."""
    if name in catalogue.column_map.constants:
        return ("[constants]",)
    entry = catalogue.column_map.columns.get(name)
    return tuple(str(source) for source in entry.sources) if entry else ()


def _table(columns: list[ColumnCheck]) -> list[str]:
    lines = [f"{'column':<25}{'given':>8}{'measured':>9}{'limits':>8}{'emptied':>8}{'lacking':>8}  filled by"]
    for column in columns:
        numbers = column.name in schema.measured_inputs()
        cells = (
            f"{column.given:>8}",
            f"{column.measured if numbers else '':>9}",
            f"{column.limits if numbers else '':>8}",
            f"{column.emptied:>8}",
            f"{column.lacking if numbers else '':>8}",
        )
        lines.append(f"{column.name:<25}{''.join(cells)}  {column.filled_by if column.lacking else ''}".rstrip())
    return lines


def _rows(check: RuleCheck) -> str:
    more = ", …" if check.count > len(check.first_rows) else ""
    return f"row{'s' if check.count > 1 else ''} {', '.join(map(str, check.first_rows))}{more}"


def _wrapped(line: str, indent: str = "") -> list[str]:
    return textwrap.wrap(line, WIDTH, initial_indent=indent, subsequent_indent=indent + "  ")
