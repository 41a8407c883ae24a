"""Which planets to look at first: rows of planets.parquet put in order, as text, CSV, JSON or VOTable."""

from __future__ import annotations

import io
import json
import unicodedata
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from keptair.errors import NotThereError, UsageError
from keptair.report import words
from keptair.tables.sheets import Sheet

if TYPE_CHECKING:
    import pyarrow as pa

COLUMNS = (
    "planet_id",
    "verdict",
    "verdict_reason",
    "air_probability",
    "priority",
    "tsm",
    "esm",
    "equilibrium_temperature_k",
    "planet_radius_rearth",
    "planet_radius_rearth_source",
    "distance_pc",
    "decisive_input",
    "decisive_share",
    "flag_names",
)
SORTS = {"priority": "priority", "tsm": "tsm", "esm": "esm", "decisive": "decisive_share"}


def select(run_path: Path, verdicts: Iterable[str] = (), top: int | None = 20, sort: str = "priority") -> pa.Table:
    """The first `top` planets of a run (all of them for None), strongest first; those without a value come last.

    `decisive` puts first the planets whose verdict one better input would do most for.
    """
    import pyarrow.parquet as parquet

    file = Path(run_path) / "planets.parquet"
    if not file.is_file():
        raise NotThereError(f"{run_path}: is not a run folder: there is no planets.parquet in it")
    return ranked(parquet.read_table(file, columns=list(COLUMNS)), verdicts, top, sort)


def ranked(planets: pa.Table, verdicts: Iterable[str] = (), top: int | None = 20, sort: str = "priority") -> pa.Table:
    """The same of a table already read; every column it has is kept, decisive_share to one digit."""
    import pyarrow as pa
    import pyarrow.compute as compute

    verdicts = tuple(verdicts)
    _check(verdicts, top, sort)
    share = compute.round(planets["decisive_share"], ndigits=1)  # more digits move with the seed
    place = planets.schema.get_field_index("decisive_share")
    planets = planets.set_column(place, planets.schema.field(place), share)
    if verdicts:
        planets = planets.filter(compute.is_in(planets["verdict"], pa.array(verdicts)))
    keys = [(SORTS[sort], "descending"), ("planet_id", "ascending")]
    return planets.take(compute.sort_indices(planets, sort_keys=keys)[:top])


def _check(verdicts: Sequence[str], top: int | None, sort: str) -> None:
    problems = [
        f"verdict {name!r}: is none of {', '.join(words.VERDICTS)}" for name in verdicts if name not in words.VERDICTS
    ]
    if sort not in SORTS:
        problems.append(f"sort {sort!r}: is none of {', '.join(SORTS)}")
    if top is not None and top < 1:
        problems.append(f"top {top}: should be 1 or more")
    if problems:
        raise UsageError(f"the targets cannot be chosen ({len(problems)} problems)", problems, "keptair targets --help")


def as_csv(table: pa.Table) -> str:
    """Comma-separated text; the column names carry the units. Text cells no spreadsheet takes for a formula."""
    written = io.StringIO()
    sheet = Sheet(written)
    sheet.write(table.column_names)
    for row in _rows(table):
        sheet.write(row.values())
    return written.getvalue()


def as_json(table: pa.Table) -> str:
    """A list of objects; the names carry the units, what is missing is null."""
    return json.dumps(_rows(table), ensure_ascii=False, indent=2, allow_nan=False) + "\n"


def as_votable(table: pa.Table) -> str:
    """A VOTable with units, UCDs and descriptions; a number that is missing is an empty cell."""
    from xml.sax.saxutils import escape

    from keptair.tables import footers, schema

    rows = [[words.visible(cell) if isinstance(cell, str) else cell for cell in row.values()] for row in _rows(table)]
    published = schema.table("planets")
    columns = tuple(published[name] for name in table.column_names)
    described = schema.Table("targets", "Targets", "Planets of a run, strongest first.", (), columns)
    longest = [
        max([1, *(len(row[index]) for row in rows if isinstance(row[index], str))]) for index in range(len(columns))
    ]
    lengths = {column.name: longest[index] for index, column in enumerate(columns) if column.storage == "text"}
    head, tail = footers.of_file(described, lengths)["IVOA.VOTable-Parquet.content"].split("</TABLE>")
    cells = ["".join(f"<TD>{'' if cell is None else escape(str(cell))}</TD>" for cell in row) for row in rows]
    data = "".join(f"<TR>{line}</TR>\n" for line in cells)
    return f"{head}<DATA><TABLEDATA>\n{data}</TABLEDATA></DATA></TABLE>{tail}\n"


def _rows(table: pa.Table) -> list[dict[str, Any]]:
    """Rows with numbers as short as their type is exact."""
    import numpy as np
    import pyarrow as pa

    single = {field.name for field in table.schema if pa.types.is_float32(field.type)}
    return [
        {
            name: float(str(np.float32(cell))) if name in single and cell is not None else cell
            for name, cell in row.items()
        }
        for row in table.to_pylist()
    ]


@dataclass(frozen=True)
class _Heading:
    """One column of the text table."""

    text: str
    cell: Callable[[dict[str, Any]], str]
    to_the_right: bool = False


def _number(name: str, digits: int = 3) -> Callable[[dict[str, Any]], str]:
    return lambda row: words.significant(row[name], digits)


def _decisive(row: dict[str, Any]) -> str:
    return f"{words.input_name(row['decisive_input'])} {row['decisive_share']:.1f}" if row["decisive_input"] else ""


_HEADINGS = {
    "planet": _Heading("planet", lambda row: words.visible(row["planet_id"])),
    "verdict": _Heading("verdict", lambda row: row["verdict"]),
    "reason": _Heading("because of", lambda row: words.BRIEF_REASONS.get(row["verdict_reason"], "")),
    "air": _Heading("P(air)", lambda row: words.probability(row["air_probability"]), True),
    "priority": _Heading("priority", _number("priority"), True),
    "tsm": _Heading("TSM", _number("tsm"), True),
    "esm": _Heading("ESM", _number("esm"), True),
    "temperature": _Heading("T_eq [K]", _number("equilibrium_temperature_k"), True),
    "radius": _Heading("R [R⊕]", _number("planet_radius_rearth"), True),
    "radius_source": _Heading("R is", lambda row: words.SOURCES.get(row["planet_radius_rearth_source"], "")),
    "distance": _Heading("d [pc]", _number("distance_pc"), True),
    "decisive": _Heading("decisive input", _decisive),
    "flags": _Heading("flags", lambda row: row["flag_names"]),
}
# Where the line is too short for all, the last of these go first.
_WEIGHT = (
    *("planet", "verdict", "air", "priority", "tsm", "temperature", "radius", "decisive"),
    *("distance", "esm", "reason", "radius_source", "flags"),
)
_GAP = "  "
_LONGEST_NAME = 26


def as_text(table: pa.Table, width: int = 80) -> str:
    """A table for people, no line longer than `width`; columns there is no room for are named below it."""
    rows = _rows(table)
    if not rows:
        return "no planet answers to this\n"
    cells = {key: [heading.cell(row) for row in rows] for key, heading in _HEADINGS.items()}
    cells["planet"] = [_shortened(name, _LONGEST_NAME) for name in cells["planet"]]
    widths = {key: max(map(_width, [_HEADINGS[key].text, *cells[key]])) for key in _HEADINGS}
    spoken = [key for key in _WEIGHT if any(cells[key])]
    shown: list[str] = []
    for key in spoken:
        if sum(widths[other] + len(_GAP) for other in shown) + widths[key] <= width or not shown:
            shown.append(key)
    shown = [key for key in _HEADINGS if key in shown]
    lines = [_line(shown, widths, {key: _HEADINGS[key].text for key in shown})]
    lines += [_line(shown, widths, {key: cells[key][index] for key in shown}) for index in range(len(rows))]
    left_out = [_HEADINGS[key].text for key in spoken if key not in shown]
    if left_out:
        lines += ["", "no room for: " + ", ".join(left_out)]
    return "\n".join(line if _width(line) <= width else _shortened(line, width) for line in lines) + "\n"


def _line(shown: Sequence[str], widths: dict[str, int], cells: dict[str, str]) -> str:
    padded = []
    for key in shown:
        blanks = " " * (widths[key] - _width(cells[key]))
        padded.append(blanks + cells[key] if _HEADINGS[key].to_the_right else cells[key] + blanks)
    return _GAP.join(padded).rstrip()


def _shortened(text: str, width: int) -> str:
    if _width(text) <= width:
        return text
    while text and _width(text) > width - 1:
        text = text[:-1]
    return text + "…"


def _width(text: str) -> int:
    """Places of a terminal the text takes: none for combining marks, two for wide characters."""
    return sum(
        0 if unicodedata.combining(character) else 2 if unicodedata.east_asian_width(character) in "WF" else 1
        for character in text
    )
