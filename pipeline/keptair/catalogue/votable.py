"""VOTable: looked through for anything that would reach outside the file, then read by astropy."""

from __future__ import annotations

from pathlib import Path
from typing import Any
from xml.parsers import expat

from keptair.catalogue.showing import shown
from keptair.catalogue.streams import CHUNK, inflated_copy
from keptair.catalogue.table import RawTable
from keptair.catalogue.whole import in_memory, reading
from keptair.errors import CatalogueError

Fields = list[tuple[str, str]]  # name and unit, as written


def open_votable(path: Path, comment: str) -> RawTable:  # noqa: ARG001 - every format is opened alike
    """The first table of a VOTable that has rows, or else the first."""
    with inflated_copy(path) as plain:
        with plain.open("rb") as file:
            looked = _Look(path.name)
            while chunk := file.read(CHUNK):
                looked.feed(chunk)
            looked.feed(b"", final=True)
        with reading("VOTable", path):
            from astropy.io import votable

            tables = list(votable.parse(plain, verify="ignore").iter_tables())
    if not tables:
        raise CatalogueError(f"{path.name}: the VOTable holds no table")
    table = next((table for table in tables if len(table.array)), tables[0])
    names = [field.name or field.ID or "" for field in table.fields]
    written = next((fields for fields in looked.tables if [name for name, _ in fields] == names), None)
    units = [unit for _, unit in written] if written else [str(field.unit or "") for field in table.fields]
    columns = [table.array[name] for name in table.array.dtype.names]
    remarks = [f"the file holds {len(tables)} tables; the first with rows was read"] if len(tables) > 1 else []
    return in_memory("VOTable", path, names, units, columns, remarks)


def fields_of(document: bytes) -> Fields:
    """Names and units of the first table of a VOTable held in memory; none if it is not one."""
    looked = _Look("metadata")
    try:
        looked.feed(document, final=True)
    except CatalogueError:
        return []
    return looked.tables[0] if looked.tables else []


class _Look:
    """Reads names and units, and refuses entities and streams: nothing but the file itself is ever opened."""

    def __init__(self, name: str) -> None:
        self.name = name
        self.tables: list[Fields] = []
        self._parser = expat.ParserCreate()
        self._parser.StartElementHandler = self._element
        self._parser.EntityDeclHandler = self._entity

    def feed(self, chunk: bytes, final: bool = False) -> None:
        try:
            self._parser.Parse(chunk, final)
        except (expat.ExpatError, ValueError, LookupError) as error:
            raise CatalogueError(f"{self.name}: cannot be read as VOTable ({shown(str(error), 120)})") from None

    def _element(self, tag: str, attributes: dict[str, str]) -> None:
        kind = tag.rpartition(":")[2]
        if kind == "TABLE":
            self.tables.append([])
        elif kind == "FIELD" and self.tables:
            self.tables[-1].append((attributes.get("name", ""), attributes.get("unit", "")))
        elif kind == "STREAM" and "href" in attributes:
            where = shown(attributes["href"])
            raise CatalogueError(f"{self.name}: its rows lie elsewhere ({where}); only the file itself is read")

    def _entity(self, *_: Any) -> None:
        raise CatalogueError(f"{self.name}: declares XML entities, which no table needs; it is not read")
