"""What a Parquet file says about itself: units, meanings and text lengths, for every reader that looks for them."""

from __future__ import annotations

from collections.abc import Mapping
from xml.etree import ElementTree

from keptair.tables.schema import Column, Table

VOTABLE_NAMESPACE = "http://www.ivoa.net/xml/VOTable/v1.3"
VOTABLE_TYPES = {"text": "unicodeChar", "int64": "long", "float32": "float", "float64": "double"}


def of_field(column: Column) -> dict[str, str]:
    """For readers of Arrow: metadata of one field."""
    said = {"unit": column.unit, "description": column.description, "ucd": column.ucd}
    return {key: value for key, value in said.items() if value}


def of_file(table: Table, lengths: Mapping[str, int]) -> dict[str, str]:
    """For astropy and other readers of VOTables: metadata of the whole file.

    lengths : text column → most characters one of its cells may hold.
    """
    described = {column.name: _description(column) for column in table}
    return {
        "IVOA.VOTable-Parquet.version": "1.0",
        "IVOA.VOTable-Parquet.content": _votable(table, lengths, described),
        "table_meta_yaml": _yaml(table, lengths, described),
        # without these a table of no rows cannot be opened in astropy, and one of many rows warns
        **{f"table::len::{name}": str(length) for name, length in lengths.items()},
    }


def _description(column: Column) -> str:
    """The same words in every footer: astropy warns where two disagree."""
    if column.unit and not _votable_unit(column):
        return f"{column.description} Unit: {column.unit}."
    return column.description


def _votable_unit(column: Column) -> str:
    """The unit in the VOTable's spelling; empty where it has none, as for the Earth's and Jupiter's radius and mass."""
    from astropy.units import Unit

    # named here, since astropy takes them for VOTable units as soon as it has read a file that uses them so
    if not column.unit or "earth" in column.unit or "jupiter" in column.unit:
        return ""
    try:
        spelling = str(Unit(column.unit).to_string("vounit"))
    except ValueError:
        return ""
    return "" if spelling[0].isdigit() else spelling


def _votable(table: Table, lengths: Mapping[str, int], described: Mapping[str, str]) -> str:
    """A VOTable without data: one FIELD per column, in order."""
    root = ElementTree.Element("VOTABLE", {"version": "1.4", "xmlns": VOTABLE_NAMESPACE})
    resource = ElementTree.SubElement(root, "RESOURCE", {"type": "results"})
    holder = ElementTree.SubElement(resource, "TABLE", {"name": table.name})
    ElementTree.SubElement(holder, "DESCRIPTION").text = table.description
    for column in table:
        said = {"name": column.name, "datatype": VOTABLE_TYPES[column.storage]}
        if column.name in lengths:
            said["arraysize"] = str(lengths[column.name])
        if column.ucd:
            said["ucd"] = column.ucd
        if unit := _votable_unit(column):
            said["unit"] = unit
        field = ElementTree.SubElement(holder, "FIELD", said)
        ElementTree.SubElement(field, "DESCRIPTION").text = described[column.name]
    return '<?xml version="1.0" encoding="UTF-8"?>\n' + ElementTree.tostring(root, encoding="unicode")


def _yaml(table: Table, lengths: Mapping[str, int], described: Mapping[str, str]) -> str:
    """The header astropy writes itself: the only place its plain reader takes units and descriptions from."""
    import numpy as np
    from astropy.table import Column as AstropyColumn
    from astropy.table import Table as AstropyTable
    from astropy.table import meta

    empty = AstropyTable(
        [
            AstropyColumn(
                np.empty(0, dtype=f"U{lengths[column.name]}" if column.storage == "text" else column.storage),
                name=column.name,
                unit=column.unit or None,
                description=described[column.name],
            )
            for column in table
        ]
    )
    return "\n".join(meta.get_yaml_from_table(empty))
