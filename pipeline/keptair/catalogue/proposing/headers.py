"""What a file's header says of its columns beside name and unit: descriptions and UCDs."""

from __future__ import annotations

import re
from collections.abc import Iterator
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path
from xml.parsers import expat

from keptair.catalogue.ecsv import description
from keptair.catalogue.parquet import files_of
from keptair.catalogue.streams import beginning, inflated_copy
from keptair.errors import CatalogueError

LONGEST_HEADER = 1 << 20  # bytes
LONGEST_DESCRIPTION = 300
LONGEST_LINE = 1000  # that may describe a column
COMMENTED = re.compile(r"^\s*[#\\%]+\s*(?:COLUMN\s+)?([^\s:=#]+)\s*[:=]\s+(\S.*)$")
BYTES = re.compile(r"^\s*\d+(?:\s*-\s*\d+)?\s+[AIFED]\d[\d.]*\s+\S+\s+(\S+)\s+(\S.*)$")


@dataclass(frozen=True)
class Described:
    """What the header says of one column."""

    description: str = ""
    ucd: str = ""


def described(path: Path, kind: str) -> dict[str, Described]:
    """Name → what the header says; nothing where it cannot be read, for a description is only a help."""
    with suppress(CatalogueError, OSError, ValueError):
        if kind == "Parquet":
            return dict(_of_parquet(files_of(path)[0]))
        if kind == "FITS":
            return dict(_of_fits(path))
        start = beginning(path, LONGEST_HEADER)
        if kind == "VOTable":
            return _of_votable(start)
        text = start.decode("utf-8", errors="replace")
        return dict(_of_ecsv(text) if kind == "ECSV" else _of_lines(text))
    return {}


def _of_votable(start: bytes) -> dict[str, Described]:
    """FIELD elements, as far as they stand in the first bytes."""
    found: dict[str, Described] = {}
    name, text = "", ""
    parser = expat.ParserCreate()

    def begins(tag: str, attributes: dict[str, str]) -> None:
        nonlocal name, text
        if tag.rpartition(":")[2] == "FIELD":
            name = attributes.get("name", "")
            found.setdefault(name, Described(ucd=attributes.get("ucd", "")))
        text = ""

    def says(words: str) -> None:
        nonlocal text
        if len(text) < LONGEST_DESCRIPTION:
            text += words

    def ends(tag: str) -> None:
        nonlocal name
        kind = tag.rpartition(":")[2]
        if kind == "DESCRIPTION" and name and not found[name].description:
            found[name] = Described(_short(text), found[name].ucd)
        elif kind == "FIELD":
            name = ""

    parser.StartElementHandler, parser.EndElementHandler, parser.CharacterDataHandler = begins, ends, says
    with suppress(expat.ExpatError):
        parser.Parse(start, False)
    return found


def _of_ecsv(text: str) -> Iterator[tuple[str, Described]]:
    lines = [line[1:].removeprefix(" ") for line in text.splitlines() if line.startswith("#")]
    yield from _of_yaml("\n".join(line for line in lines if not line.startswith("%ECSV")))


def _of_yaml(text: str) -> Iterator[tuple[str, Described]]:
    columns = description(text, "header").get("datatype")
    for column in columns if isinstance(columns, list) else []:
        if isinstance(column, dict):
            meta = column.get("meta")
            if isinstance(meta, list):  # an ordered mapping
                meta = dict(pair for pair in meta if isinstance(pair, tuple))
            ucd = meta.get("ucd", "") if isinstance(meta, dict) else ""
            yield str(column.get("name")), Described(_short(column.get("description")), _short(ucd))


def _of_lines(text: str) -> Iterator[tuple[str, Described]]:
    """Comment lines that describe a column, and the byte-by-byte description of journal tables."""
    for line in text.splitlines():
        found = (COMMENTED.match(line) or BYTES.match(line)) if len(line) <= LONGEST_LINE else None
        if found:
            yield found[1], Described(_short(found[2]))


def _of_fits(path: Path) -> Iterator[tuple[str, Described]]:
    with inflated_copy(path) as plain:
        from astropy.io import fits

        with fits.open(plain) as extensions:
            table = next(part for part in extensions if isinstance(part, fits.BinTableHDU | fits.TableHDU))
            header = table.header
            for number in range(1, int(header["TFIELDS"]) + 1):
                about = header.get(f"TCOMM{number}") or header.comments[f"TTYPE{number}"]
                ucd = header.get(f"TUCD{number}", "")
                yield str(header.get(f"TTYPE{number}", "")), Described(_short(about), _short(ucd))


def _of_parquet(file: Path) -> Iterator[tuple[str, Described]]:
    import pyarrow as pa
    import pyarrow.parquet as pq

    try:
        schema = pq.read_schema(file)
    except pa.ArrowException:
        return
    metadata = schema.metadata or {}
    with suppress(CatalogueError):
        yield from _of_yaml(metadata.get(b"table_meta_yaml", b"").decode("utf-8", "replace"))
    with suppress(CatalogueError):
        yield from _of_votable(metadata.get(b"IVOA.VOTable-Parquet.content", b"")).items()
    for field in schema:
        about = {
            key.decode("latin-1"): value.decode("utf-8", "replace") for key, value in (field.metadata or {}).items()
        }
        if "description" in about or "ucd" in about:
            yield field.name, Described(_short(about.get("description")), about.get("ucd", ""))


def _short(text: object) -> str:
    return " ".join(str(text).split())[:LONGEST_DESCRIPTION] if isinstance(text, str) else ""
