"""The data dictionary: checks the schemas and writes schemas/README.md from them and the formulas' docstrings."""

from __future__ import annotations

import sys
from dataclasses import dataclass
from pathlib import Path

from keptair.tables import schema
from keptair.tables.formulas import Formula, formula

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
        table = _with_templates(name)
        parts.append(f"## {name}\n\n{table.description}\n")
        parts.append("| column | type | unit | UCD | meaning |\n|---|---|---|---|---|")
        parts[-1] += "".join("\n" + _row(column) for column in table) + "\n"
    parts.append("## Flags\n\nBits of `planets.flags`; `flag_names` says them in words.\n")
    parts.append("| bit | name | raised by | meaning |\n|---|---|---|---|")
    parts[-1] += "".join(f"\n| {one.bit} | `{one.name}` | {one.stage} | {one.description} |" for one in schema.flags())
    parts.append("\n## Formulas\n\nFormula, source and validity behind every derived column.\n")
    parts += [_written(behind) for behind in formulas()]
    return "\n".join(parts).rstrip() + "\n"


def _with_templates(name: schema.TableName) -> schema.Table:
    """A table with what stands for every gas shown once."""
    return schema.table(name, {"{gas}": "the gas"})


def _row(column: schema.Column) -> str:
    unit = column.unit or ("1" if column.type == "number" else "")
    return f"| `{column.name}` | {column.type} | {unit} | {column.ucd} | {column.description.replace('|', '/')} |"


@dataclass(frozen=True)
class Behind:
    """A formula, the columns it stands behind, and the sources their schema entries name."""

    told: Formula
    columns: tuple[str, ...]
    sources: tuple[str, ...]


def formulas() -> list[Behind]:
    """Formula, source and validity of every derived column, in the order of the tables."""
    found: dict[str, Behind] = {}
    names: tuple[schema.TableName, ...] = ("planets", "gases")
    for name in names:
        for column in _with_templates(name):
            if not column.derived_by:
                continue
            known = found.get(column.derived_by, Behind(formula(column.derived_by), (), ()))
            sources = (column.source,) if column.source and column.source not in known.sources else ()
            found[column.derived_by] = Behind(
                known.told, (*known.columns, f"{name}.{column.name}"), (*known.sources, *sources)
            )
    return list(found.values())


def _written(behind: Behind) -> str:
    told = behind.told
    lines = [f"### {told.name.removeprefix('keptair.')}\n"]
    lines += [f"Behind {', '.join(f'`{column}`' for column in behind.columns)}.\n", told.summary]
    if told.equation:
        lines.append(f"\n> {told.equation}")
    if told.parameters:
        units = ", ".join(f"{name} [{unit}]" for name, unit in told.parameters.items())
        lines.append(f"\nFrom {units}; gives [{told.returns}].")
    if told.notes:
        lines.append(f"\n{told.notes}")
    if behind.sources:
        lines.append(f"\nSource: {'; '.join(behind.sources)}.")
    return "\n".join(lines) + "\n"


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
