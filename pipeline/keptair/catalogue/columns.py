"""The column map: which column of a file is which canonical input, as its TOML says."""

from __future__ import annotations

import copy
import re
from collections.abc import Iterable, Mapping
from datetime import datetime
from difflib import get_close_matches
from pathlib import Path
from typing import Annotated, Any, Literal

from pydantic import BaseModel, BeforeValidator, ConfigDict, Field, PrivateAttr, StrictInt, StrictStr, ValidationError

from keptair import toml_files
from keptair.catalogue.showing import listed, quoted, shown
from keptair.errors import ColumnMapError
from keptair.tables import rules, schema

KINDS = {
    "planet_radius_rearth": ("planet_radius_kind", ("measured", "relation")),
    "planet_mass_mearth": ("planet_mass_kind", ("measured", "minimum", "relation")),
}
MOST_NAMES = 2000  # of a file that are looked through for a slip of the pen: each takes 0.2 ms
FOR_NUMBERS = ("unit", "plus", "minus", "bound", "upper", "lower")
FOR_KINDS = ("without_error", "kind", "kinds")
FOR_TEXTS = ("words",)


def _as_list(value: Any) -> Any:
    return value if isinstance(value, list | tuple) else [value]


Reference = StrictStr | StrictInt  # a column's name, or its position from 1
Word = StrictStr | bool | StrictInt | float


class _Part(BaseModel):
    model_config = ConfigDict(frozen=True, extra="forbid", populate_by_name=True)


class FileEntry(_Part):
    """[file]"""

    comment: StrictStr = "#"
    missing: tuple[StrictStr, ...] = ()
    carry: Annotated[tuple[StrictStr, ...], BeforeValidator(_as_list)] = ()


class ColumnEntry(_Part):
    """[columns.<canonical name>]"""

    sources: Annotated[tuple[Reference, ...], BeforeValidator(_as_list)] = Field((), alias="from")
    unit: StrictStr = ""
    missing: Annotated[tuple[Word, ...], BeforeValidator(_as_list)] = ()
    plus: Reference | None = None
    minus: Reference | None = None
    bound: Reference | None = None
    upper: Reference | None = None
    lower: Reference | None = None
    without_error: Literal["measured", "relation"] = "measured"
    kind: Reference | None = None
    kinds: dict[str, str] = {}
    words: dict[str, str] = {}
    date: StrictStr = ""


class RowsEntry(_Part):
    """[rows.keep] and [rows.drop]"""

    keep: dict[str, Annotated[tuple[Word, ...], BeforeValidator(_as_list)]] = {}
    drop: dict[str, Annotated[tuple[Word, ...], BeforeValidator(_as_list)]] = {}


class ColumnMap(_Part):
    """A column map; once resolved against a file, every entry names the columns that are read."""

    file: FileEntry = FileEntry()
    rows: RowsEntry = RowsEntry()
    columns: dict[str, ColumnEntry] = {}
    constants: dict[str, Word] = {}

    _lines: dict[tuple[str, ...], int] = PrivateAttr(default_factory=dict)
    _misshapen: list[str] = PrivateAttr(default_factory=list)

    @classmethod
    def read(
        cls, source: str | Path | Mapping[str, Any] | ColumnMap | None, *, with_mistakes: bool = False
    ) -> ColumnMap:
        """From a TOML file, a dictionary of the same shape, or nothing.

        with_mistakes : keys of the wrong shape are left out and told by `mistakes`, together with all the others,
            instead of being an error of their own
        """
        if isinstance(source, ColumnMap):
            return source
        if source is None:
            return cls()
        if isinstance(source, Mapping):
            return cls._checked(source, "the column map", {}, with_mistakes)
        path = Path(source)
        values, text = toml_files.read(path, ColumnMapError, "the column map")
        return cls._checked(values, path.name, _lines_of(text), with_mistakes)

    @classmethod
    def _checked(
        cls, values: Mapping[str, Any], name: str, lines: dict[tuple[str, ...], int], with_mistakes: bool
    ) -> ColumnMap:
        problems: list[str] = []
        try:
            column_map = cls.model_validate(values)
        except ValidationError as error:
            problems = [_sentence(problem, lines) for problem in error.errors()]
            refused = ColumnMapError(f"{name}: {cannot_be_used(problems)}", problems, "keptair map CATALOGUE")
            if not with_mistakes:
                raise refused from None
            try:
                column_map = cls.model_validate(_without(values, [problem["loc"] for problem in error.errors()]))
            except ValidationError:
                raise refused from None
        column_map._lines = lines
        column_map._misshapen = problems
        return column_map

    def as_dict(self) -> dict[str, Any]:
        """The map in the shape of its TOML; reading that gives this map again."""
        return self.model_dump(mode="json", by_alias=True, exclude_defaults=True)

    def place(self, *keys: str) -> str:
        """Where something stands, for a message: `line 7 [columns.planet_id] from`."""
        return _place(keys, self._lines)

    def mistakes(self) -> list[str]:
        """Everything wrong that can be seen without the file."""
        problems = list(self._misshapen)
        known = {column.name: column for column in schema.inputs()}
        for name, entry in self.columns.items():
            if name in known:
                problems += self._mistakes_of_entry(known[name], entry)
            else:
                problems.append(f"{self.place('columns', name)}: {_no_such_input(name)}")
        for name, value in self.constants.items():
            where = self.place("constants", name)
            if name not in known or name == "planet_id":
                problems.append(f"{where}: {_no_such_input(name)}")
            elif name in self.columns:
                problems.append(f"{where}: [columns.{name}] gives it too; keep one")
            else:
                wrong = rules.complaint(known[name], value)
                problems += [f"{where} = {_written(value)}: {wrong}"] if wrong else []
        return problems

    def _mistakes_of_entry(self, column: schema.Column, entry: ColumnEntry) -> list[str]:
        problems, name = [], column.name
        allowed = (FOR_NUMBERS if column.type == "number" else FOR_TEXTS) + (FOR_KINDS if name in KINDS else ())
        allowed += ("date",) if name == "updated" else ()
        for key in sorted(entry.model_fields_set - {"sources", "missing", *allowed}):
            reason = f"means nothing for {name}; possible are from, missing, {', '.join(allowed)}"
            problems.append(f"{self.place('columns', name, key)}: {reason}")
        possible = {"kinds": KINDS[name][1] if name in KINDS else (), "words": column.enum}
        for key, words in (("kinds", entry.kinds), ("words", entry.words)):
            for word, ours in words.items():
                if possible[key] and ours not in possible[key]:
                    where = self.place("columns", name, key, word)
                    problems.append(f"{where} = {quoted(ours)}: should be {listed(list(possible[key]))}")
        if entry.date and not _is_date_pattern(entry.date):
            where = self.place("columns", name, "date")
            problems.append(f'{where} = {quoted(entry.date)}: no pattern of dates; 24/12/31 is "%y/%m/%d"')
        if entry.kinds and entry.kind is None:
            problems.append(f"{self.place('columns', name, 'kinds')}: say which column holds these words, kind = …")
        if name in KINDS and entry.kind is not None and KINDS[name][0] in self.columns:
            problems.append(f"{self.place('columns', name, 'kind')}: [columns.{KINDS[name][0]}] gives it too; keep one")
        return problems


def kinds_from(entry: ColumnEntry, name: str) -> dict[str, str]:
    """Words of a kind column → kinds; the kinds themselves where the map gives no words."""
    return entry.kinds or {kind: kind for kind in KINDS[name][1]}


def looked_up(word: str, words: Mapping[str, str]) -> str | None:
    """What a word stands for: as written, whatever its case, `1.0` as `1`, then "*" for any other."""
    from keptair.catalogue.cells import without_point_zero

    for spelling in (word, without_point_zero(word)):
        if spelling in words:
            return words[spelling]
    folded = {key.casefold(): value for key, value in words.items()}
    return folded.get(word.casefold(), words.get("*"))


def _is_date_pattern(pattern: str) -> bool:
    try:
        datetime.strptime(datetime(2024, 12, 31).strftime(pattern), pattern)
    except (ValueError, re.error):  # re.error: Python's own reader stumbles over a directive that stands twice
        return False
    return "%" in pattern


def close_to(name: str, names: list[str], likeness: float = 0.6) -> str:
    """The most similar of the names, "" if none is."""
    folded = {re.sub(r"[\W_]", "", other).casefold(): other for other in reversed(names[:MOST_NAMES])}
    plain = re.sub(r"[\W_]", "", name).casefold()
    if len(plain) > 200:
        return ""
    found = get_close_matches(plain, [other for other in folded if len(other) <= 200], n=1, cutoff=likeness)
    return folded[found[0]] if found else ""


def _no_such_input(name: str) -> str:
    kinds = {kind for kind, _ in KINDS.values()} if "kind" not in name else set()
    near = close_to(name, [column.name for column in schema.inputs() if column.name not in kinds])
    return "no such canonical column" + (f"; {near} was meant?" if near else "")


def _written(value: object) -> str:
    return (
        quoted(value)
        if isinstance(value, str)
        else shown(str(value).lower() if isinstance(value, bool) else str(value))
    )


def cannot_be_used(problems: list[str]) -> str:
    """The summary of an error about a map."""
    return f"the column map cannot be used ({len(problems)} problem{'s' if len(problems) > 1 else ''})"


def _place(keys: tuple[str, ...], lines: Mapping[tuple[str, ...], int]) -> str:
    number = lines.get(keys) or lines.get(keys[:-1])
    if number is None:  # only a table below it is written out
        number = min((line for known, line in lines.items() if known[: len(keys)] == keys), default=None)
    line = f"line {number} " if number else ""
    table = {"columns": 2, "rows": 2}.get(keys[0], 1) + (keys[2:3] in (("kinds",), ("words",)))
    head, rest = keys[:table], keys[table:]
    return f"{line}[{shown('.'.join(head))}]" + (f" {shown('.'.join(rest))}" if rest else "")


def _sentence(problem: Any, lines: Mapping[tuple[str, ...], int]) -> str:
    keys = tuple(str(key) for key in problem["loc"] if not _is_union_branch(key))
    where = _place(keys, lines) if keys else "the map"
    if problem["type"] == "extra_forbidden":
        parts = {1: ColumnMap, 2: FileEntry if keys[0] == "file" else RowsEntry, 3: ColumnEntry}
        known = [field.alias or name for name, field in parts[min(len(keys), 3)].model_fields.items()]
        near = close_to(keys[-1], known)
        return f"{where}: no such key; {near + ' was meant?' if near else 'possible are ' + ', '.join(known)}"
    message = problem["msg"].removeprefix("Value error, ").removeprefix("Input ")
    return f"{where} = {_written(problem['input'])}: {message}"


def _without(values: Mapping[str, Any], places: Iterable[tuple[int | str, ...]]) -> dict[str, Any]:
    """The map without the keys at these places."""
    kept = copy.deepcopy(dict(values))
    for place in places:
        *groups, last = [str(key) for key in place if not _is_union_branch(key)] or [""]
        inner: Any = kept
        for group in groups:
            inner = inner.get(group) if isinstance(inner, dict) else None
        if isinstance(inner, dict):
            inner.pop(last, None)
    return kept


def _is_union_branch(key: object) -> bool:
    return isinstance(key, int) or key in ("constrained-str", "constrained-int", "str", "int", "bool", "float")


def _lines_of(text: str) -> dict[tuple[str, ...], int]:
    """Line numbers of the tables and keys of a TOML text, as far as they stand one on a line."""
    lines: dict[tuple[str, ...], int] = {}
    table: tuple[str, ...] = ()
    for number, line in enumerate(text.splitlines(), start=1):
        if head := re.match(r"\s*\[([^\[\]]+)\]", line):
            table = tuple(part.strip().strip("\"'") for part in head[1].split("."))
            lines.setdefault(table, number)
        elif key := re.match(r"""\s*("[^"]*"|'[^']*'|[\w-]+)\s*=""", line):
            lines.setdefault((*table, key[1].strip("\"'")), number)
    return lines
