"""A column map and a file brought together: which column is read for what, and everything that does not fit."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from keptair.catalogue.cells import missing_words
from keptair.catalogue.columns import KINDS, MOST_NAMES, ColumnEntry, ColumnMap, Reference, close_to, kinds_from
from keptair.catalogue.showing import listed, quoted
from keptair.catalogue.table import RawTable
from keptair.catalogue.units import Conversion, UnitError, conversion, error_conversion
from keptair.tables import schema

AS_IT_IS = Conversion()
MOST_REMARKS = 20  # about columns that are not read


@dataclass(frozen=True)
class Source:
    """A column of the file and what turns its numbers into the canonical unit."""

    position: int
    conversion: Conversion = AS_IT_IS


@dataclass(frozen=True)
class NumberPlan:
    """Where one canonical number comes from."""

    name: str
    values: tuple[Source, ...] = ()
    plus: Source | None = None
    minus: Source | None = None
    bound: int | None = None
    upper: Source | None = None
    lower: Source | None = None
    kind: int | None = None
    kinds: Mapping[str, str] = field(default_factory=dict)
    without_error: str = "measured"
    missing_numbers: tuple[float, ...] = ()
    missing: frozenset[str] = frozenset()
    constant: float | None = None

    @property
    def positions(self) -> set[int]:
        parts = (*self.values, self.plus, self.minus, self.upper, self.lower)
        found = {source.position for source in parts if source is not None}
        return found | {position for position in (self.bound, self.kind) if position is not None}


@dataclass(frozen=True)
class TextPlan:
    """Where one canonical text comes from."""

    name: str
    values: tuple[int, ...] = ()
    words: Mapping[str, str] = field(default_factory=dict)
    date: str = ""
    missing: frozenset[str] = frozenset()
    constant: str | None = None


@dataclass(frozen=True)
class Plan:
    """Everything that is read from a file."""

    numbers: tuple[NumberPlan, ...]
    texts: tuple[TextPlan, ...]
    keep: Mapping[int, tuple[Any, ...]]
    drop: Mapping[int, tuple[Any, ...]]
    carried: Mapping[str, int]  # input_<name> → position
    missing: frozenset[str]
    column_map: ColumnMap
    problems: tuple[str, ...]
    remarks: tuple[str, ...]

    @property
    def identifier(self) -> TextPlan:
        return next(text for text in self.texts if text.name == "planet_id")

    @property
    def of_kinds(self) -> tuple[NumberPlan, ...]:
        """Numbers with a column that says what they are."""
        return tuple(number for number in self.numbers if number.kind is not None)

    @property
    def canonical_positions(self) -> set[int]:
        texts = {position for text in self.texts for position in text.values}
        return texts.union(*(number.positions for number in self.numbers))


def resolve(table: RawTable, column_map: ColumnMap) -> Plan:
    """The plan, with all problems at once; whoever calls decides when to raise them."""
    return _Resolver(table, column_map).plan()


class _Resolver:
    def __init__(self, table: RawTable, column_map: ColumnMap) -> None:
        self.table = table
        self.map = column_map
        self.problems = column_map.mistakes()
        self.remarks: list[str] = []
        self.repeated = {name: count for name, count in Counter(table.names).items() if count > 1}
        self.serves: dict[int, set[str]] = {}  # position → canonical columns it is mapped to
        self.entries: dict[str, ColumnEntry] = {}  # as resolved

    def plan(self) -> Plan:
        missing = missing_words(self.map.file.missing)
        inputs = schema.inputs()
        numbers = tuple(self._number(column.name, missing) for column in inputs if column.type == "number")
        texts = tuple(self._text(column.name, missing) for column in inputs if column.type == "string")
        keep = self._filters("keep")
        drop = self._filters("drop")
        carried = self._carried()
        for position, names in self.serves.items():
            if len(names) > 1:
                column = quoted(self.table.names[position])
                self.problems.append(f"[columns]: the column {column} is mapped to {' and '.join(sorted(names))}")
        resolved = self.map.model_copy(update={"columns": self.entries})
        self._note_near_misses()
        return Plan(numbers, texts, keep, drop, carried, missing, resolved, tuple(self.problems), tuple(self.remarks))

    def _number(self, name: str, missing: frozenset[str]) -> NumberPlan:
        if name in self.map.constants:
            self._note_overruled(name)
            constant = self.map.constants[name]
            return NumberPlan(name, constant=constant if isinstance(constant, float | int) else math.nan)
        entry = self._entry(name)
        values = tuple(
            Source(position, self._conversion(name, position, entry))
            for position in self._positions(name, "from", entry.sources)
        )
        of_value = values[0].conversion if values else self._stated(name, entry)
        kind = self._position(name, "kind", entry.kind, shared=True) if name in KINDS else None
        numbers = tuple(_as_float(word) for word in entry.missing if not isinstance(word, str))
        words = [word for word in entry.missing if isinstance(word, str)]
        return NumberPlan(
            name,
            values,
            plus=self._error_source(name, "plus", entry.plus, of_value),
            minus=self._error_source(name, "minus", entry.minus, of_value),
            upper=self._limit_source(name, "upper", entry.upper, entry),
            lower=self._limit_source(name, "lower", entry.lower, entry),
            bound=self._position(name, "bound", entry.bound, shared=True),
            kind=kind,
            kinds=kinds_from(entry, name) if kind is not None else {},
            without_error=entry.without_error,
            missing_numbers=numbers,
            missing=missing | missing_words(words) if words else missing,
        )

    def _text(self, name: str, missing: frozenset[str]) -> TextPlan:
        if name in self.map.constants:
            self._note_overruled(name)
            return TextPlan(name, constant=str(self.map.constants[name]))
        number = next((number for number, (kind, _) in KINDS.items() if kind == name), "")
        if number and self.map.columns.get(number, ColumnEntry()).kind is not None:
            return TextPlan(name)  # the map's own kind column says it
        entry = self._entry(name)
        positions = tuple(self._positions(name, "from", entry.sources))
        words = [str(word) for word in entry.missing]
        date = entry.date if name == "updated" else ""
        return TextPlan(name, positions, entry.words, date, missing | missing_words(words) if words else missing)

    def _entry(self, name: str) -> ColumnEntry:
        """The map's entry; columns of the file that have the canonical names themselves stand in for what it lacks."""
        entry = self.map.columns.get(name, ColumnEntry())
        filled: dict[str, Any] = {}
        if not entry.sources and name in self.table.names and not (entry.upper or entry.lower):
            filled["sources"] = (name,)
        if name in (filled.get("sources") or entry.sources):
            for key, suffix in (("plus", "_err_plus"), ("minus", "_err_minus"), ("bound", "_bound")):
                if getattr(entry, key) is None and name + suffix in self.table.names:
                    filled[key] = name + suffix
        if name in self.map.columns and not (entry.sources or filled or entry.upper or entry.lower):
            where = self.map.place("columns", name)
            self.problems.append(f"{where}: from is missing; say which column of the file it is")
        entry = entry.model_copy(update=filled)
        if entry.sources or entry.upper is not None or entry.lower is not None:
            self.entries[name] = entry
        return entry

    def _positions(self, name: str, key: str, references: tuple[Reference, ...]) -> list[int]:
        found = [self._position(name, key, reference) for reference in references]
        return [position for position in found if position is not None]

    def _position(self, name: str, key: str, reference: Reference | None, shared: bool = False) -> int | None:
        """Where a column is; shared: it may serve several canonical columns."""
        if reference is None:
            return None
        position = self._find(reference, "columns", name, key)
        if position is not None and not shared:
            self.serves.setdefault(position, set()).add(name)
        return position

    def _find(self, reference: Reference, *place: str) -> int | None:
        names = self.table.names
        if isinstance(reference, int):
            if 1 <= reference <= len(names):
                return reference - 1
            self._complain(reference, f"there is no such position; the file has {len(names)} columns", *place)
        elif reference in self.repeated:
            count = self.repeated[reference]
            reason = f"stands {count} times in the header; say which by its position, counted from 1"
            self._complain(reference, reason, *place)
        elif reference in names:
            return names.index(reference)
        else:
            near = close_to(reference, list(names))
            has = f"the file has {quoted(near)}" if near else f"the file has {listed(list(names))}"
            self._complain(reference, f"no such column; {has}", *place)
        return None

    def _complain(self, reference: Reference, reason: str, *place: str) -> None:
        said = "" if place[0] == "rows" else f" = {quoted(reference) if isinstance(reference, str) else reference}"
        self.problems.append(f"{self.map.place(*place)}{said}: {reason}")

    def _conversion(self, name: str, position: int, entry: ColumnEntry) -> Conversion:
        """The map's unit, else the file's own, else the canonical one."""
        unit = entry.unit or self.table.units[position]
        try:
            return conversion(unit, name)
        except UnitError as error:
            if entry.unit:
                self._complain_once(f"{self.map.place('columns', name, 'unit')} = {quoted(unit)}: {error}")
            else:
                column = quoted(self.table.names[position])
                self._complain_once(f"the column {column}, read as {name}, has the unit {quoted(unit)}: {error}")
            return Conversion()

    def _stated(self, name: str, entry: ColumnEntry) -> Conversion:
        try:
            return conversion(entry.unit, name)
        except UnitError:
            return Conversion()

    def _limit_source(self, name: str, key: str, reference: Reference | None, entry: ColumnEntry) -> Source | None:
        position = self._position(name, key, reference)
        return None if position is None else Source(position, self._conversion(name, position, entry))

    def _error_source(self, name: str, key: str, reference: Reference | None, of_value: Conversion) -> Source | None:
        position = self._position(name, key, reference)
        if position is None:
            return None
        unit = self.table.units[position]
        try:
            return Source(position, error_conversion(unit, name, of_value))
        except UnitError as error:
            column = quoted(self.table.names[position])
            self._complain_once(f"the column {column}, an error of {name}, has the unit {quoted(unit)}: {error}")
            return Source(position)

    def _complain_once(self, problem: str) -> None:
        if problem not in self.problems:
            self.problems.append(problem)

    def _filters(self, side: str) -> dict[int, tuple[Any, ...]]:
        filters = {}
        for name, words in getattr(self.map.rows, side).items():
            position = self._find(name, "rows", side, name)
            if position is not None:
                filters[position] = words
        return filters

    def _carried(self) -> dict[str, int]:
        carried: dict[str, int] = {}
        wanted = [name for name in self.map.file.carry if name != "*"]
        if "*" in self.map.file.carry:
            wanted = list(dict.fromkeys([*wanted, *self.table.names]))
        for name in wanted:
            position = self._find(name, "file", "carry")
            if position is not None:
                carried[f"input_{name}"] = position
        return carried

    def _note_overruled(self, name: str) -> None:
        if name in self.table.names:
            self.remarks.append(f"the column {quoted(name)} of the file is not read: [constants] gives it")

    def _note_near_misses(self) -> None:
        """Columns nobody reads whose names nearly are canonical ones."""
        read = {name for entry in self.entries.values() for name in entry.sources}
        canonical = [name for name in schema.catalogue().names if name not in self.table.names]
        used = set(self.serves) | {position for position, name in enumerate(self.table.names) if name in read}
        known = set(schema.catalogue().names)
        remarks = []
        for position, name in enumerate(self.table.names[:MOST_NAMES]):
            near = "" if position in used or name in known else close_to(name, canonical, likeness=0.9)
            if near and near.split("_err_")[0].removesuffix("_bound") not in self.map.columns:
                remarks.append(f"the column {quoted(name)} is not read; {near} was meant?")
        self.remarks += remarks[:MOST_REMARKS]
        if len(remarks) > MOST_REMARKS:
            self.remarks.append(f"{len(remarks) - MOST_REMARKS} more columns are not read whose names nearly fit")


def _as_float(number: float) -> float:
    try:
        return float(number)
    except OverflowError:  # cells that large are read as infinite, too
        return math.inf if number > 0 else -math.inf
