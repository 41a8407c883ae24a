"""Small files of every format the reader knows, made by code; the fuzzer begins with them."""

from __future__ import annotations

import csv
import gzip
import io
import warnings
from collections.abc import Callable
from random import Random
from typing import Any
from xml.sax.saxutils import escape, quoteattr

import numpy as np
import pyarrow as pa
import pyarrow.parquet as pq
from astropy.io import ascii as astropy_ascii
from astropy.io import fits
from astropy.io.votable import from_table
from astropy.table import Table

from fuzz import words

Rows = list[list[str]]


def usual() -> tuple[list[str], Rows]:
    """Three sound planets in canonical columns."""
    names = [
        "planet_id",
        "planet_radius_rearth",
        "planet_radius_rearth_err_plus",
        "planet_mass_mearth",
        "stellar_age_gyr",
    ]
    names += ["stellar_teff_k", "background", "updated", "transits", "planet_mass_kind"]
    rows = [
        ["Kea 1 b", "1.1", "0.1", "1.3", "4.5", "5700", "co2", "2024-01-01", "yes", "measured"],
        ["Kea 1 c", "2.5", "", "6", "13.9", "5700", "", "", "", "minimum"],
        ["Weka 2 b", "11", "0.3", "300", "", "6100", "h2", "2023-05", "no", ""],
    ]
    return names, rows


def table(random: Random) -> tuple[list[str], Rows]:
    """A table of a few columns and rows, any of them strange."""
    names = words.headers(random, random.randrange(1, 9))
    tame = [random.random() < 0.5 for _ in names]  # columns of nothing but numbers
    rows = [
        [random.choice(words.USUAL) if quiet else words.cell(random) for quiet in tame]
        for _ in range(random.choice((0, 1, 2, 3, 5, 30)))
    ]
    if rows and random.random() < 0.2:
        rows.append(list(random.choice(rows)))
    return names, rows


def delimited(names: list[str], rows: Rows, random: Random) -> bytes:
    mark = random.choice(",,,\t;|")
    text = io.StringIO()
    quoting = random.choice((csv.QUOTE_MINIMAL, csv.QUOTE_MINIMAL, csv.QUOTE_ALL))
    writer = csv.writer(text, delimiter=mark, lineterminator=random.choice(("\n", "\r\n", "\r")), quoting=quoting)
    writer.writerows([names, *rows])
    encoding = random.choice(("utf-8", "utf-8", "utf-8-sig", "utf-16", "latin-1"))
    return text.getvalue().encode(encoding, errors="replace")


def parquet(names: list[str], rows: Rows, random: Random) -> bytes:
    columns = [_column([row[place] for row in rows], random) for place in range(len(names))]
    fields = [
        pa.field(name, column.type, metadata={"unit": random.choice(words.UNITS)} if random.random() < 0.1 else None)
        for name, column in zip(names, columns, strict=True)
    ]
    footer = {"table_meta_yaml": yaml_of(names, random), "IVOA.VOTable-Parquet.content": votable(names, [], random)}
    schema = pa.schema(fields, metadata=footer if random.random() < 0.1 else None)
    sink = io.BytesIO()
    pq.write_table(
        pa.Table.from_arrays(columns, schema=schema),
        sink,
        row_group_size=random.choice((1, 2, 1000)),
        compression=random.choice(("none", "snappy", "zstd")),
        use_dictionary=random.random() < 0.5,
        data_page_version=random.choice(("1.0", "2.0")),
    )
    return sink.getvalue()


def votable(names: list[str], rows: Rows, random: Random) -> bytes:
    numeric = [all(_number(row[place]) is not None for row in rows) for place in range(len(names))]
    kinds = [random.choice(("double", "float", "double") if whole else ("char", "unicodeChar")) for whole in numeric]
    if random.random() < 0.3:
        kinds[random.randrange(len(kinds))] = random.choice(
            ("int", "boolean", "short", "bit", "long", "floatComplex", "x")
        )
    fields = [
        f"<FIELD name={quoteattr(_xml(name))} datatype={quoteattr(kind)}"
        + (' arraysize="*"' if kind.lower().endswith("char") else "")
        + (f" unit={quoteattr(_xml(random.choice(words.UNITS)))}" if random.random() < 0.1 else "")
        + "/>"
        for name, kind in zip(names, kinds, strict=True)
    ]
    body = "".join("<TR>" + "".join(f"<TD>{escape(_xml(cell))}</TD>" for cell in row) + "</TR>" for row in rows)
    return (
        '<?xml version="1.0"?>\n<VOTABLE version="1.4" xmlns="http://www.ivoa.net/xml/VOTable/v1.3"><RESOURCE><TABLE>'
        f"{''.join(fields)}<DATA><TABLEDATA>{body}</TABLEDATA></DATA></TABLE></RESOURCE></VOTABLE>"
    ).encode("utf-8", errors="replace")


def votable_binary(names: list[str], rows: Rows, random: Random) -> bytes:
    sink = io.BytesIO()
    from_table(_astropy(names, rows, random)).to_xml(sink, tabledata_format=random.choice(("binary", "binary2")))
    return sink.getvalue()


def ecsv(names: list[str], rows: Rows, random: Random) -> bytes:
    mark = random.choice(" ,")
    text = io.StringIO()
    csv.writer(text, delimiter=mark, lineterminator="\n").writerows([names, *rows])
    head = "".join(f"# {line}\n" for line in yaml_of(names, random).splitlines())
    head = head.replace("# ---", f"# ---\n# delimiter: '{mark}'", 1)
    return f"# %ECSV 1.0\n{head}{text.getvalue()}".encode("utf-8", errors="replace")


def yaml_of(names: list[str], random: Random) -> str:
    lines = ["---", "datatype:"]
    for name in names:
        unit = f", unit: {random.choice(words.UNITS)!r}" if random.random() < 0.1 else ""
        lines.append(f"- {{name: {name!r}, datatype: float64{unit}}}")
    return "\n".join(lines)


def fits_table(names: list[str], rows: Rows, random: Random) -> bytes:
    sink = io.BytesIO()
    fits.HDUList([fits.PrimaryHDU(), fits.table_to_hdu(_astropy(names, rows, random))]).writeto(sink)
    return sink.getvalue()


def ipac(names: list[str], rows: Rows, random: Random) -> bytes:
    return _ascii(names, rows, random, "ipac")


def journal(names: list[str], rows: Rows, random: Random) -> bytes:
    return _ascii(names, rows, random, "mrt")


FORMATS: dict[str, Callable[[list[str], Rows, Random], bytes]] = {
    "csv": delimited,
    "parquet": parquet,
    "vot": votable,
    "xml": votable_binary,
    "ecsv": ecsv,
    "fits": fits_table,
    "tbl": ipac,
    "mrt": journal,
}


def written(suffix: str, names: list[str], rows: Rows, random: Random) -> bytes:
    """The table in a format; as CSV where that format's own writer refuses it."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        try:
            data = FORMATS[suffix](names, rows, random)
        except Exception:  # somebody else's writer; what it refuses is of no interest here
            data = delimited(names, rows, random)
    return gzip.compress(data, mtime=0) if random.random() < 0.1 else data


def _column(cells: list[str], random: Random) -> pa.Array:
    numbers = [_number(cell) for cell in cells]
    whole = [None if number is None or abs(number) > 100 else int(number) for number in numbers]
    small = [number if number is not None and abs(number) < 6e4 else None for number in numbers]
    choices: list[Callable[[], pa.Array]] = [
        lambda: pa.array(cells, pa.string()),
        lambda: pa.array(cells, pa.string()),
        lambda: pa.array(numbers, pa.float64()),
        lambda: pa.array(numbers, pa.float64()),
        lambda: pa.array(numbers, pa.float32()),
        lambda: pa.array(np.array([np.nan if number is None else number for number in small], dtype=np.float16)),
        lambda: pa.array(whole, random.choice((pa.int8(), pa.int64()))),
        lambda: pa.array([None if number is None else abs(number) for number in whole], pa.uint64()),
        lambda: pa.array([bool(number) for number in whole], pa.bool_()),
        lambda: pa.array(cells, pa.large_string()),
        lambda: pa.array(cells, pa.string_view()),
        lambda: pa.array([cell.encode("utf-16", "replace") for cell in cells], pa.binary()),
        lambda: pa.array([cell.encode("utf-8")[:4].ljust(4) for cell in cells], pa.binary(4)),
        lambda: pa.array(cells, pa.string()).dictionary_encode(),
        lambda: pa.array(numbers, pa.float64()).dictionary_encode(),
        lambda: pa.array(whole, pa.decimal128(38, 10)),
        lambda: pa.array(whole, pa.decimal256(76, 70)),
        lambda: pa.array(whole, pa.date32()),
        lambda: pa.array(whole, pa.timestamp(random.choice(("s", "us", "ns")))),
        lambda: pa.array(whole, pa.timestamp("ns", random.choice(("UTC", "Nowhere/Land", "+25:00")))),
        lambda: pa.array(whole, pa.duration("ms")),
        lambda: pa.array(whole, pa.time32("s")),
        lambda: pa.array([[cell] for cell in cells], pa.list_(pa.string())),
        lambda: pa.array([{"a": cell} for cell in cells], pa.struct([("a", pa.string())])),
        lambda: pa.array([[("a", cell)] for cell in cells], pa.map_(pa.string(), pa.string())),
        lambda: pa.nulls(len(cells)),
        lambda: pa.array([cell.encode("utf-16", "replace") for cell in cells], pa.binary_view()),
        lambda: pa.ExtensionArray.from_storage(pa.uuid(), pa.array([bytes(16) for _ in cells], pa.binary(16))),
        lambda: pa.ExtensionArray.from_storage(pa.json_(), pa.array(cells, pa.string())),
        lambda: pa.ExtensionArray.from_storage(pa.bool8(), pa.array([bool(n) for n in whole], pa.int8())),
    ]  # fmt: skip
    return random.choice(choices)()


def _astropy(names: list[str], rows: Rows, random: Random) -> Table:
    made = Table(masked=True)
    for place, name in enumerate(names):
        cells = [row[place] for row in rows]
        kind = random.random()
        numbers: Any = np.array([_number(cell) for cell in cells], dtype=np.float64)
        if kind < 0.5:
            made[name] = cells if cells else np.array([], dtype="U1")
        elif kind < 0.9:
            made[name] = numbers.astype(random.choice((np.float64, np.float32, np.int32, np.int16, np.uint8, bool)))
        elif kind < 0.95:
            made[name] = numbers.astype(complex)
        else:
            made[name] = np.stack([numbers, numbers], axis=-1)
        if random.random() < 0.2:
            made[name].mask = [random.random() < 0.3 for _ in cells]
        if random.random() < 0.1:
            made[name].unit = random.choice(
                ("m", "earthRad", "solMass", "yr", "K", "deg_C", "mag", "jupiterMass", "cm s-1")
            )
    return made


def _ascii(names: list[str], rows: Rows, random: Random, kind: str) -> bytes:
    sink = io.StringIO()
    astropy_ascii.write(_astropy(names, rows, random), sink, format=kind)
    return sink.getvalue().encode("utf-8", errors="replace")


def _number(cell: str) -> float | None:
    try:
        return float(cell)
    except ValueError:
        return None


def _xml(text: str) -> str:
    return "".join(letter for letter in text if letter >= " " and letter not in "\ufffe\uffff")
