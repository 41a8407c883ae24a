"""A catalogue opened: what it is, and its rows in batches, as often as asked."""

from __future__ import annotations

import hashlib
import shutil
import weakref
from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Literal

import numpy as np

from keptair.batch import Array, Batch
from keptair.catalogue import cells, converting, fetching, filters
from keptair.catalogue.columns import ColumnMap, cannot_be_used, looked_up
from keptair.catalogue.formats import open_table
from keptair.catalogue.identity import Duplicates, Identifiers
from keptair.catalogue.parquet import files_of
from keptair.catalogue.resolving import Plan, resolve
from keptair.catalogue.showing import listed, quoted
from keptair.catalogue.table import Block, RawTable
from keptair.errors import CatalogueError, ColumnMapError

MOST_WORDS = 8  # of a kind column that are complained about one by one


@dataclass(frozen=True)
class Catalogue:
    """Somebody's table and how it is read.

    carried : input_<name> → number or text, the columns taken along.
    rows_read : data rows of the file; rows_filtered : those the column map leaves out.
    remarks : what the user should know but need not act on.
    """

    source: str
    bytes: int
    sha256: str
    format: str
    column_map: ColumnMap
    carried: dict[str, Literal["number", "text"]]
    rows_read: int
    rows_filtered: int
    remarks: list[str]
    _path: Path
    _table: RawTable
    _plan: Plan
    _duplicates: Duplicates
    _state: tuple[tuple[str, int, int], ...]

    def batches(self, size: int) -> Iterator[Batch]:
        """Every row that is not filtered, in file order, `size` at a time; each call sweeps the file from its start."""
        positions = self._plan.canonical_positions | set(self._plan.carried.values())
        for columns in converting.regrouped(self._pieces(positions), size):
            yield Batch(columns)

    def _pieces(self, positions: set[int]) -> Iterator[dict[str, Array]]:
        if _state_of(self._path) != self._state:
            raise CatalogueError(f"{self._path.name}: changed while it was read", hint="run again when it is complete")
        for block in _kept_blocks(self._table, self._plan, positions):
            columns = converting.canonical(block, self._plan)
            columns["duplicate_of"] = self._duplicates.of(block.rows)
            for name, position in self._plan.carried.items():
                columns[name] = self._carried(block, name, position)
            yield columns

    def _carried(self, block: Block, name: str, position: int) -> Array:
        column = block.cells[position]
        if self.carried[name] == "text":
            return cells.objects(cells.texts(column, frozenset([""])))
        values, _ = cells.numbers(column, self._plan.missing)
        return np.where(block.wrong_cells > 0, np.nan, values)


def open_catalogue(
    source: str | Path, column_map: str | Path | Mapping[str, Any] | ColumnMap | None = None
) -> Catalogue:
    """Read the map, fetch what lies elsewhere, recognise the format, sweep the file once.

    Everything wrong with the map is told at once. What is fetched stays as long as the catalogue is in use.
    """
    wanted = ColumnMap.read(column_map, with_mistakes=True)
    if not fetching.is_elsewhere(str(source)):
        said = str(source).encode("utf-8", errors="replace").decode("utf-8")  # a file's name may be any bytes
        return _opened(Path(source), said, wanted)
    with fetching.temporary_folder() as folder:
        path = fetching.fetch(str(source), folder)
        catalogue = _opened(path, fetching.without_secrets(str(source)), wanted)
    weakref.finalize(catalogue, shutil.rmtree, folder, ignore_errors=True)
    return catalogue


def _opened(path: Path, source: str, wanted: ColumnMap) -> Catalogue:
    try:
        if not path.exists():
            raise CatalogueError(f"{path}: there is no such file")
        if not path.is_file() and not path.is_dir():
            raise CatalogueError(
                f"{path}: is neither a file nor a folder; it is read more than once, so make it a file"
            )
        state = _state_of(path)
        digest = _sha256(path)
        table = open_table(path, wanted.file.comment)
        plan = resolve(table, wanted)
        sweep = _swept(path, table, plan)
        duplicates = sweep.duplicates()
    except OSError as error:
        raise CatalogueError(f"{path}: cannot be read ({error.strerror or error})") from None
    return Catalogue(
        source=source,
        bytes=sum(size for _, size, _ in state),
        sha256=digest,
        format=table.format,
        column_map=plan.column_map,
        carried=sweep.carried(),
        rows_read=sweep.read,
        rows_filtered=sweep.filtered,
        remarks=[*table.remarks, *plan.remarks, *sweep.remarks, *sweep.names.remarks()],
        _path=path,
        _table=table,
        _plan=plan,
        _duplicates=duplicates,
        _state=state,
    )


def _swept(path: Path, table: RawTable, plan: Plan) -> _Sweep:
    """The first look at every row; raises what is wrong with the map, all of it."""
    if not plan.identifier.values and not any("[columns.planet_id]" in problem for problem in plan.problems):
        raise _no_identifier(path, table, plan)
    sweep = _Sweep(table, plan)
    problems = [*plan.problems, *sweep.problems()]
    if problems:
        summary = f"{path.name}: {cannot_be_used(problems)}"
        raise ColumnMapError(summary, problems, f"keptair map {path.name}")
    return sweep


class _Sweep:
    """The first look at every row: counts, identifiers, words of kind columns, types of carried columns."""

    def __init__(self, table: RawTable, plan: Plan) -> None:
        self.table = table
        self.plan = plan
        self.read = 0
        self.filtered = 0
        self.remarks: list[str] = []
        self.names = Identifiers()
        self._kind_words: dict[str, Counter[str]] = {number.name: Counter() for number in plan.of_kinds}
        self._texts: set[str] = set()  # carried columns that hold something else than numbers
        positions = {*plan.identifier.values, *plan.carried.values()}
        positions |= {number.kind for number in plan.of_kinds if number.kind is not None}
        for block in _blocks(table, plan, positions, self.remarks):
            self._look_at(block)

    def _look_at(self, block: Block) -> None:
        self.read += len(block.rows)
        kept = block.where(filters.kept(block, self.plan))
        self.filtered += len(block.rows) - len(kept.rows)
        sound = kept.where(kept.wrong_cells == 0)
        self.names.add(sound.rows, converting.read_text(sound, self.plan.identifier, len(sound.rows)))
        for number in self.plan.of_kinds:
            assert number.kind is not None
            words = cells.counts(cells.texts(sound.cells[number.kind], number.missing))
            self._kind_words[number.name].update(words)
        for name, position in self.plan.carried.items():
            if name not in self._texts and not cells.carries_numbers(sound.cells[position], self.plan.missing):
                self._texts.add(name)

    def problems(self) -> list[str]:
        """Words of kind columns the map does not know."""
        problems = []
        for number in self.plan.of_kinds:
            where = self.plan.column_map.place("columns", number.name, "kinds")
            words = self._kind_words[number.name].most_common()
            unknown = [(word, count) for word, count in words if word and looked_up(word, number.kinds) is None]
            for word, count in unknown[:MOST_WORDS]:
                rows = f"{count} row{'s' if count > 1 else ''}"
                problems.append(f'{where}: the file also says {quoted(word)} ({rows}); add it, or "*"')
            if len(unknown) > MOST_WORDS:
                problems.append(f"{where}: and {len(unknown) - MOST_WORDS} more words; is it the right column?")
        return problems

    def duplicates(self) -> Duplicates:
        """A second look, only at rows whose identifier may stand there twice, and only if there are any."""
        repeated = self.names.repeated()
        if not repeated:
            return Duplicates((), repeated)
        blocks = _kept_blocks(self.table, self.plan, self.plan.canonical_positions)
        return Duplicates((converting.canonical(block, self.plan) for block in blocks), repeated)

    def carried(self) -> dict[str, Literal["number", "text"]]:
        return {name: "text" if name in self._texts else "number" for name in self.plan.carried}


def _blocks(table: RawTable, plan: Plan, positions: set[int], remarks: list[str]) -> Iterator[Block]:
    """Every block, with the columns wanted and those the filters look at."""
    return table.blocks(tuple(sorted(positions.union(plan.keep, plan.drop))), remarks)


def _kept_blocks(table: RawTable, plan: Plan, positions: set[int]) -> Iterator[Block]:
    for block in _blocks(table, plan, positions, []):
        yield block.where(filters.kept(block, plan))


def _no_identifier(path: Path, table: RawTable, plan: Plan) -> CatalogueError:
    has = listed(list(table.names))
    near = [remark for remark in plan.remarks if "planet_id" in remark]
    if plan.column_map.columns or plan.column_map.constants:
        return ColumnMapError(
            f"{path.name}: the column map does not say which column names the planet: [columns.planet_id] from = …",
            [f"the file has {has}"],
            f"keptair map {path.name}",
        )
    return CatalogueError(
        f"{path.name}: there is no planet_id column and no column map",
        near or [f"the file has {has}"],
        f"keptair map {path.name}",
    )


def _state_of(path: Path) -> tuple[tuple[str, int, int], ...]:
    """Name, size and time of change of every file read."""
    return tuple((file.name, file.stat().st_size, file.stat().st_mtime_ns) for file in files_of(path))


def _sha256(path: Path) -> str:
    """Of the file as it lies there; of a folder, over its files in the order of their names."""
    digest = hashlib.sha256()
    for file in files_of(path):
        with file.open("rb") as opened:
            while chunk := opened.read(1 << 20):
                digest.update(chunk)
    return digest.hexdigest()
