"""The bytes of a text file as a stream: inflated, as UTF-8, without comment lines and repeated headers."""

from __future__ import annotations

import codecs
import io
import tempfile
import threading
import zlib
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from keptair.errors import CatalogueError

CHUNK = 1 << 20
LONGEST_LINE = 64 << 20  # bytes; a longer one is no row of a table, and would have to be held in memory whole
INFLATION_LIMIT = 200  # inflated bytes for each one on disk; tables reach 20, a gzip bomb 1000
INFLATION_FLOOR = 100 << 20  # below this size nobody is hurt, whatever the ratio
MOMENT = 0.2  # seconds for Arrow to see that a file has ended
GZIP_MARK = b"\x1f\x8b"


def is_gzip(path: Path) -> bool:
    with path.open("rb") as file:
        return file.read(len(GZIP_MARK)) == GZIP_MARK


def chunks(path: Path) -> Iterator[bytes]:
    """The file's bytes, inflated if it is a gzip file."""
    zipped = is_gzip(path)
    with path.open("rb") as file:
        raw = iter(lambda: file.read(CHUNK), b"")
        yield from inflated(raw, path) if zipped else raw


def inflated(raw: Iterator[bytes], path: Path) -> Iterator[bytes]:
    """What a gzip file holds, in pieces of at most CHUNK bytes; stops where no table would inflate so far."""
    limit = max(INFLATION_FLOOR, INFLATION_LIMIT * path.stat().st_size)
    total = 0
    member = zlib.decompressobj(wbits=31)
    for chunk in raw:
        waiting = chunk
        while waiting:
            if member.eof:
                member = zlib.decompressobj(wbits=31)
            try:
                piece = member.decompress(waiting, CHUNK)
            except zlib.error as error:
                raise CatalogueError(f"{path.name}: the gzip file is damaged ({error})") from None
            total += len(piece)
            if total > limit:
                raise CatalogueError(
                    f"{path.name}: inflates to more than {limit / 1e6:.0f} MB, {INFLATION_LIMIT} times its size",
                    hint="inflate it yourself if it is what you think it is",
                )
            if piece:
                yield piece
            waiting = member.unused_data.lstrip(b"\0") if member.eof else member.unconsumed_tail
    if not member.eof:
        raise CatalogueError(f"{path.name}: the gzip file ends too early; it was not copied whole")


@contextmanager
def inflated_copy(path: Path) -> Iterator[Path]:
    """The file itself, or, of a gzip file, a temporary file that holds what it inflates to."""
    if not is_gzip(path):
        yield path
        return
    with tempfile.TemporaryDirectory(prefix="keptair-") as folder:
        copy = Path(folder) / path.name.removesuffix(".gz")
        with copy.open("wb") as file:
            for chunk in chunks(path):
                file.write(chunk)
        yield copy


def beginning(path: Path, size: int = 4096) -> bytes:
    """The first bytes of what the file holds."""
    start = b""
    for chunk in chunks(path):
        start += chunk
        if len(start) >= size:
            break
    return start[:size]


def encoding_of(path: Path) -> str:
    """utf-8 or utf-16 where the file is that, else latin-1, in which every byte is a letter."""
    start = beginning(path, 4)
    if start.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        return "utf-16"
    decoder = codecs.getincrementaldecoder("utf-8")()
    try:
        for chunk in chunks(path):
            decoder.decode(chunk)
        decoder.decode(b"", final=True)
    except UnicodeDecodeError:
        return "latin-1"
    return "utf-8"


def as_utf8(raw: Iterator[bytes], encoding: str) -> Iterator[bytes]:
    """The same text in UTF-8, without a byte order mark."""
    if encoding == "utf-8":
        first = next(raw, b"")
        yield first.removeprefix(codecs.BOM_UTF8)
        yield from raw
        return
    decoder = codecs.getincrementaldecoder(encoding)(errors="replace")
    for chunk in raw:
        yield decoder.decode(chunk).encode("utf-8")
    yield decoder.decode(b"", final=True).encode("utf-8")


class TableText:
    """The lines of a table in whole lines, comments and repeated headers left out and counted.

    A line inside a quoted cell is never taken for a comment.
    """

    def __init__(self, path: Path, encoding: str, comment: str, header: bytes = b"") -> None:
        self.name = path.name
        self.comment = comment.encode()
        self.header = header.rstrip(b"\r\n")
        self.comments = 0  # after the header
        self.headers = 0
        self._raw = as_utf8(chunks(path), encoding)
        self._quoted = False
        self._begun = False

    def __iter__(self) -> Iterator[bytes]:
        for lines in self._whole_lines():
            if self._may_hold(lines, self.comment) or self._may_hold(lines, self.header):
                kept = b"".join(line for line in lines.splitlines(keepends=True) if self._stays(line))
                if kept:
                    yield kept
            else:
                self._begun = True
                self._quoted ^= bool(lines.count(b'"') & 1)
                yield lines

    def first_record(self) -> tuple[bytes, Iterator[bytes]]:
        """The header, blank lines before it left out, and everything after it."""
        pieces = iter(self)
        record = b""
        for piece in pieces:
            lines = piece.splitlines(keepends=True)
            for number, line in enumerate(lines, start=1):
                if record or line.strip():
                    record += line
                if record and not record.count(b'"') & 1:
                    return record, _chained(b"".join(lines[number:]), pieces)
        return record, iter(())

    def _stays(self, line: bytes) -> bool:
        if not self._quoted:
            if self.comment and line.startswith(self.comment):
                self.comments += self._begun
                return False
            self._begun |= bool(line.strip())
            if self.header and line.rstrip(b"\r\n") == self.header:
                self.headers += 1
                if self.headers > 1:
                    return False
        self._quoted ^= bool(line.count(b'"') & 1)
        return True

    @staticmethod
    def _may_hold(lines: bytes, mark: bytes) -> bool:
        return bool(mark) and (lines.startswith(mark) or b"\n" + mark in lines or b"\r" + mark in lines)

    def _whole_lines(self) -> Iterator[bytes]:
        rest = b""
        for chunk in self._raw:
            end = max(chunk.rfind(b"\n"), chunk.rfind(b"\r")) + 1
            if end:
                yield rest + chunk[:end]
                rest = chunk[end:]
            else:
                rest += chunk
            if len(rest) > LONGEST_LINE:
                raise CatalogueError(f"{self.name}: a line is longer than {LONGEST_LINE >> 20} MB; this is no table")
        if rest:
            yield rest


class Readable(io.RawIOBase):
    """An iterator of bytes as a file that can be read once.

    Arrow reads ahead in a thread of its own and never waits for it. If that thread is still in here when Python ends,
    Python aborts or hangs: whoever stops reading says so with `stop`.
    """

    def __init__(self, pieces: Iterator[bytes]) -> None:
        self._pieces = pieces
        self._buffer = memoryview(b"")
        self._at_work = threading.Lock()
        self._ended = threading.Event()

    def readable(self) -> bool:
        return True

    def readinto(self, buffer: memoryview) -> int:  # type: ignore[override]
        with self._at_work:
            while not self._buffer:
                piece = next(self._pieces, None)
                if piece is None:
                    self._ended.set()
                    return 0
                self._buffer = memoryview(piece)
            size = min(len(buffer), len(self._buffer))
            buffer[:size] = self._buffer[:size]
            self._buffer = self._buffer[size:]
            return size

    def stop(self) -> None:
        """The file ends here; back when nobody reads in it."""
        with self._at_work:
            self._pieces, self._buffer = iter(()), memoryview(b"")
        self._ended.wait(MOMENT)


def _chained(first: bytes, rest: Iterator[bytes]) -> Iterator[bytes]:
    if first:
        yield first
    yield from rest
