"""New cases: tables made afresh, and old cases changed in their bytes, lines, cells or map."""

from __future__ import annotations

import gzip
from dataclasses import replace
from random import Random

from fuzz import maps, seeds, words
from fuzz.case import Case

LONGEST = 1 << 16  # bytes of a case: what is small must be quick
ROWS = (1, 2, 7, 1000)
MARKS = (
    b"PAR1", b"\x1f\x8b\x08", b"SIMPLE  =", b"\xef\xbb\xbf", b"\xff\xfe", b"\xfe\xff", b"# %ECSV 1.0\n",
    b"|a|b|\n|c|d|\n", b"\\x = 1\n", b"Title: x\nByte-by-byte Description of file: t\n",
    b"<?xml version='1.0' encoding='utf-7'?>", b"<VOTABLE>", b"<!DOCTYPE a [<!ENTITY b 'c'>]>",
    b"<STREAM href='file:///etc/passwd'/>", b"<STREAM encoding='base64'>", b"]]>", b"END", b"TFORM1  = '1PE(99999)'",
    b"NAXIS2  =           2147483647", b"TNULL1  = 'x'", b"datatype: !!python/name:os", b"# - {name: &a [*a]}\n",
    b"\x00" * 80, b"\xff" * 8, b"\x80", b"\xc0\x80", b"\xed\xa0\x80", b'"', b'""', b"\r", b"\n\n",
    b"arraysize='999999999'", b"arraysize='2x3'", b"datatype='floatComplex'", b"<GROUP/>", b"<TD/>", b"<TR></TR>",
    b" ", b"\t", b"-" * 80, b"XTENSION= 'BINTABLE'", b"TDIM1   = '(2,3)'", b"TSCAL1  = 1E300", b"TZERO1  = 32768",
    b"THEAP   = 99",
)  # fmt: skip


def fresh(random: Random) -> Case:
    """A table of random content in a random format with a random map."""
    names, rows = seeds.usual() if random.random() < 0.1 else seeds.table(random)
    suffix = random.choice([*seeds.FORMATS, "csv", "csv", "csv"])
    data = seeds.written(suffix, names, rows, random)
    return Case(_name(random, suffix), data, maps.column_map(random, names), random.choice(ROWS))


def changed(random: Random, case: Case, other: Case) -> Case:
    """An old case a little different; `other` lends it a piece now and then."""
    kind = random.random()
    if kind < 0.2:
        return replace(case, map=maps.changed(random, case.map, names_of(case.data)))
    data = case.data
    for _ in range(random.choice((1, 1, 2, 4, 10))):
        data = _changed_bytes(random, data, other.data)
    if random.random() < 0.1:
        case = replace(case, map=maps.column_map(random, names_of(data)))
    return replace(case, data=data[:LONGEST], rows=random.choice(ROWS))


def names_of(data: bytes) -> list[str]:
    """What the first line of a text file may name; canonical columns besides."""
    line = data[:2000].decode("utf-8", errors="replace").lstrip("\ufeff\r\n").partition("\n")[0]
    names = [name.strip('" \r')[:100] for name in line.split(max(",\t;|", key=line.count))]
    return [*names[:30], "planet_id", *words.NUMBERS[:3]]


def _changed_bytes(random: Random, data: bytes, other: bytes) -> bytes:
    if data.startswith(b"\x1f\x8b") and random.random() < 0.6:
        return _within_gzip(random, data, other)
    if not data or random.random() < 0.25:
        return _changed_cell(random, data)
    start = random.randrange(len(data))
    end = min(len(data), start + random.choice((1, 1, 2, 4, 8, 64, 1000)))
    kind = random.randrange(9)
    if kind == 0:
        return data[:start] + data[end:]
    if kind == 1:
        return data[:start] + bytes([data[start] ^ (1 << random.randrange(8))]) + data[start + 1 :]
    if kind == 2:
        return data[:start] + random.choice(MARKS) + data[random.choice((start, end)) :]
    if kind == 3:
        return data[:start] + data[start:end] * random.choice((2, 3, 50)) + data[end:]
    if kind == 4:
        piece = random.randrange(len(other) + 1)
        return data[:start] + other[piece : piece + random.choice((4, 40, 4000))] + data[end:]
    if kind == 5:
        return data[:start]
    if kind == 6:
        number = random.choice((0, 1, 127, 128, 255, 65535, 1 << 31, (1 << 31) - 1, (1 << 32) - 1))
        width = random.choice((1, 2, 4))
        written = (number % (1 << 8 * width)).to_bytes(width, random.choice(("little", "big")))
        return data[:start] + written + data[start + width :]
    if kind == 7:
        return data[:start] + random.randbytes(end - start) + data[end:]
    return _changed_lines(random, data)


def _changed_cell(random: Random, data: bytes) -> bytes:
    """One cell of a line replaced, whatever the delimiter is."""
    lines = data.split(b"\n")
    place = random.randrange(len(lines))
    mark = max((b",", b"\t", b";", b"|", b" ", b"<TD>"), key=lines[place].count)
    cells = lines[place].split(mark)
    text = words.header(random) if place == 0 else words.cell(random)
    cells[random.randrange(len(cells))] = text.encode("utf-8", errors="surrogatepass")
    lines[place] = mark.join(cells)
    return b"\n".join(lines)


def _changed_lines(random: Random, data: bytes) -> bytes:
    lines = data.split(b"\n")
    one, two = random.randrange(len(lines)), random.randrange(len(lines))
    kind = random.randrange(4)
    if kind == 0:
        lines[one], lines[two] = lines[two], lines[one]
    elif kind == 1:
        lines.insert(two, lines[one])
    elif kind == 2:
        lines[one : one + 1] = lines[one : one + 1] * random.choice((2, 100))
    else:
        lines[one] = random.choice((b"", b"#", b"# x", b",,,", b'"', lines[0], lines[one] + b",", lines[one] + b"\r"))
    return b"\n".join(lines)


def _within_gzip(random: Random, data: bytes, other: bytes) -> bytes:
    try:
        inside = gzip.decompress(data)
    except Exception:  # damaged already
        return data[: random.randrange(len(data) + 1)]
    return gzip.compress(_changed_bytes(random, inside, other), compresslevel=1, mtime=0)


def _name(random: Random, suffix: str) -> str:
    if random.random() < 0.97:
        return f"catalogue.{suffix}"
    return random.choice(
        ("x", "\x1b[2J.csv", "a\nb.csv", "\u202egpj.csv", "n" * 200, "-", "a.csv.gz", " ", "é.vot", "*.csv")
    )
