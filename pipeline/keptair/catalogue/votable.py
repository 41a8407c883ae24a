"""VOTable: looked through for anything that would reach outside the file, then read by astropy."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from pathlib import Path
from typing import Any
from xml.parsers import expat

from keptair.catalogue.showing import shown
from keptair.catalogue.streams import CHUNK, inflated_copy
from keptair.catalogue.table import RawTable
from keptair.catalogue.whole import check_room, in_memory, reading
from keptair.errors import CatalogueError

Fields = list[tuple[str, str]]  # name and unit, as written
OBJECT = 9  # bytes astropy needs for a cell of any length, with its mask
BYTES = {"double": 9, "long": 9, "floatComplex": 9, "doubleComplex": 17}
LETTER_OR_NUMBER = 5  # bytes of an element of any other type, at most


def open_votable(path: Path, comment: str) -> RawTable:  # noqa: ARG001 - every format is opened alike
    """The first table of a VOTable that has rows, or else the first."""
    with inflated_copy(path) as plain:
        with plain.open("rb") as file:
            looked = _Look(path.name)
            while chunk := file.read(CHUNK):
                looked.feed(chunk)
            looked.feed(b"", final=True)
        check_room(path, plain, looked.room)
        with reading("VOTable", path):
            from astropy.io import votable

            tables = list(votable.parse(plain, verify="ignore").iter_tables())
    if not tables:
        raise CatalogueError(f"{path.name}: the VOTable holds no table")
    table = next((table for table in tables if len(table.array)), tables[0])
    names = [field.name or field.ID or "" for field in table.fields]
    written = next((fields for fields in looked.tables if [name for name, _ in fields] == names), None)
    units = [unit for _, unit in written] if written else [str(field.unit or "") for field in table.fields]
    columns = [table.array[name] for name in table.array.dtype.names or ()]
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


@dataclass
class _Size:
    """A table's rows, as said and as found, and the bytes of one."""

    said: int
    found: int = 0
    width: int = 0


def _bytes_of(field: dict[str, str]) -> int:
    shape = field.get("arraysize", "1")
    if "*" in shape:
        return OBJECT
    return math.prod(map(int, re.findall(r"\d+", shape))) * BYTES.get(field.get("datatype", ""), LETTER_OR_NUMBER)


class _Look:
    """Reads names, units and sizes, and refuses entities and streams: nothing but the file itself is ever opened."""

    def __init__(self, name: str) -> None:
        self.name = name
        self.tables: list[Fields] = []
        self._sizes: list[_Size] = []
        self._parser = expat.ParserCreate()
        self._parser.StartElementHandler = self._element
        self._parser.EntityDeclHandler = self._entity

    @property
    def room(self) -> int:
        """Bytes the tables would take in memory, by what the file says of itself."""
        return sum(max(size.said, size.found) * size.width for size in self._sizes)

    def feed(self, chunk: bytes, final: bool = False) -> None:
        try:
            self._parser.Parse(chunk, final)
        except (expat.ExpatError, ValueError, LookupError) as error:
            raise CatalogueError(f"{self.name}: cannot be read as VOTable ({shown(str(error), 120)})") from None

    def _element(self, tag: str, attributes: dict[str, str]) -> None:
        kind = tag.rpartition(":")[2]
        if kind == "TABLE":
            self.tables.append([])
            rows = attributes.get("nrows", "")
            self._sizes.append(_Size(int(rows) if rows.isdecimal() else 0))
        elif kind == "FIELD" and self.tables:
            self.tables[-1].append((attributes.get("name", ""), attributes.get("unit", "")))
            self._sizes[-1].width += _bytes_of(attributes)
        elif kind == "TR" and self.tables:
            self._sizes[-1].found += 1
        elif kind == "STREAM" and "href" in attributes:
            where = shown(attributes["href"])
            raise CatalogueError(f"{self.name}: its rows lie elsewhere ({where}); only the file itself is read")

    def _entity(self, *_: Any) -> None:
        raise CatalogueError(f"{self.name}: declares XML entities, which no table needs; it is not read")
