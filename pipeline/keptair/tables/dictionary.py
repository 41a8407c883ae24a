"""The data dictionary: checks the schemas and writes schemas/README.md from them and the formulas' docstrings."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from pathlib import Path

from keptair.tables import schema
from keptair.tables.formulas import formula

HEAD = """# Data dictionary

Written by `make schemas` from the TOML files of this folder and the docstrings of the formulas; do not edit it by
hand. `keptair columns` prints the same tables in a terminal.

Numbers worked out by the pipeline are medians over the draws unless they say otherwise. `measured` columns stand as
catalogued; the `_source` beside each input says what became of it:

| source | meaning |
|---|---|
| measured | catalogued, with an error on at least one side |
| measured_no_error | catalogued without error; taken as exact, flagged |
| limit | an upper or lower limit, drawn over the range it leaves |
| minimum | M sin i; the inclination is drawn unless the planet transits |
| given | a constant of the column map |
| computed | worked out from other inputs of the row |
| relation | from a relation: mass and radius, a dwarf's mass and light, the mean dwarf of a temperature |
| prior | drawn from a prior (albedo, age) |
| assumed | set to a fixed value (eccentricity 0) |
"""


def problems() -> list[str]:
    """Everything wrong with the schemas, one line each."""
    import astropy.units as u
    from astropy.io.votable.ucd import check_ucd

    found = []
    for name in schema.TABLES:
        table = schema.table(name)
        twice = {column.name for column in table if table.names.count(column.name) > 1}
        found += [f"{name}.{column}: named twice" for column in sorted(twice)]
        for column in table:
            where = f"{name}.{column.name}"
            if not column.description:
                found.append(f"{where}: has no description")
            if column.type == "string" and column.name != "updated" and not column.max_length:
                found.append(f"{where}: has no maxLength")
            if column.unit:
                try:
                    u.Unit(column.unit)
                except ValueError:
                    found.append(f"{where}: {column.unit!r} is no unit astropy knows")
            if not check_ucd(column.ucd, check_controlled_vocabulary=True, has_colon=False):
                found.append(f"{where}: {column.ucd!r} is no UCD1+")
            if column.derived_by:
                try:
                    formula(column.derived_by)
                except ValueError as error:
                    found.append(f"{where}: {error}")
    bits = [flag.bit for flag in schema.flags()]
    if bits != list(range(len(bits))):
        found.append("flags: bits must count up from 0")
    return found


def page() -> str:
    """The whole dictionary as Markdown."""
    parts = [HEAD]
    for name in schema.TABLES:
        table = schema.table(name)
        parts.append(f"## {name}\n\n{table.description}\n")
        parts.append("| column | type | unit | UCD | meaning |\n|---|---|---|---|---|")
        parts[-1] += "".join("\n" + _row(column) for column in _distinct(table)) + "\n"
    parts.append("## Flags\n\nBits of `planets.flags`; `flag_names` says them in words.\n")
    parts.append("| bit | name | raised by | meaning |\n|---|---|---|---|")
    parts[-1] += "".join(f"\n| {one.bit} | `{one.name}` | {one.stage} | {one.description} |" for one in schema.flags())
    parts.append("\n## Formulas\n\nFormula, source and validity behind every derived column.\n")
    parts += list(_formulas())
    return "\n".join(parts).rstrip() + "\n"


def _distinct(table: schema.Table) -> Iterator[schema.Column]:
    """The columns with those of a template shown once."""
    seen = set()
    for column in table:
        if column.template and "{gas}" in column.template:
            if column.template in seen:
                continue
            seen.add(column.template)
        yield column


def _row(column: schema.Column) -> str:
    name, description = column.name, column.description
    if "{gas}" in column.template:
        name = column.template
    unit = column.unit or ("1" if column.type == "number" else "")
    return f"| `{name}` | {column.type} | {unit} | {column.ucd} | {description.replace('|', '/')} |"


def _formulas() -> Iterator[str]:
    by_function: dict[str, list[str]] = {}
    sources: dict[str, list[str]] = {}
    names: tuple[schema.TableName, ...] = ("planets", "gases")
    for name in names:
        for column in _distinct(schema.table(name)):
            if column.derived_by:
                shown = column.template if "{gas}" in column.template else column.name
                by_function.setdefault(column.derived_by, []).append(f"`{name}.{shown}`")
                if column.source and column.source not in sources.setdefault(column.derived_by, []):
                    sources[column.derived_by].append(column.source)
    for dotted, columns in by_function.items():
        told = formula(dotted)
        lines = [f"### {dotted.removeprefix('keptair.')}\n", f"Behind {', '.join(columns)}.\n", told.summary]
        if told.equation:
            lines.append(f"\n> {told.equation}")
        if told.parameters:
            units = ", ".join(f"{name} [{unit}]" for name, unit in told.parameters.items())
            lines.append(f"\nFrom {units}; gives [{told.returns}].")
        if told.notes:
            lines.append(f"\n{told.notes}")
        if dotted in sources:
            lines.append(f"\nSource: {'; '.join(sources[dotted])}.")
        yield "\n".join(lines) + "\n"


def main() -> int:
    """Check the schemas; write the page into the checkout where all is well."""
    found = problems()
    for problem in found:
        print(problem, file=sys.stderr)
    if found:
        return 1
    path = Path(str(schema.schema_folder())) / "README.md"
    path.write_text(page(), encoding="utf-8")
    print(path)
    return 0


if __name__ == "__main__":
    sys.exit(main())
