"""Whatever a header and the cells hold, the proposal is a column map that reads and fits its file."""

from __future__ import annotations

import csv
import tempfile
import tomllib
from collections.abc import Sequence
from pathlib import Path

import pyarrow as pa
import pyarrow.parquet as pq
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from keptair.catalogue import ColumnMap, open_catalogue
from keptair.catalogue.proposing import Proposal, propose
from keptair.catalogue.proposing.naming import read_description, read_name, read_names
from keptair.catalogue.proposing.writing import literal
from keptair.errors import CatalogueError
from keptair.tables import schema

HOSTILE = [
    '=HYPERLINK("x")', "a]\nfrom = 1", '"""', "'", "\\", "\\u12", "# planet", "-- b", "🪐 mass", "Теплота", "\u202eb",
    "\x00", "mass\nradius", "columns.planet_id", "*", "", " ", "1", "radius (R_E)", "age [Gyr]", "log(L/Lsun)", "Rp\tr",
]  # fmt: skip
TRADE = """
planet name star host rp Rp_err Rp_lim Rp_max mp mass mass_err1 mass_err2 msini mass_type radius st_rad st_mass teff
temp per period_up period a e e_a ecc sma age logage lum lx flux jmag K ra dec dist plx transit method status updated
date air albedo default_flag
"""
CELLS = [
    "", "0", "1", "-1", "0.5", "3", "12.5", "300", "5772", "9.66", "1e22", "-999", "1e308", "inf", "nan", "--", "Msini",
    "yes", "b", "Zor 1 b", "2024-01-02", "03/04/2021", "co2", "upper", "=1+1", '"', "\n", "🪐", "1" * 300,
]  # fmt: skip
NAMES = st.one_of(
    st.sampled_from(schema.catalogue().names),
    st.sampled_from(TRADE.split()),
    st.sampled_from(HOSTILE),
    st.text(max_size=20),
)
PLANETS = ("planet", [f"Zor {row} b" for row in range(8)])
ANY_COLUMN = st.tuples(NAMES, st.lists(st.sampled_from(CELLS), min_size=8, max_size=8))
COLUMNS = st.lists(ANY_COLUMN, max_size=12).map(lambda columns: [*columns, PLANETS])


def as_csv(folder: Path, columns: Sequence[tuple[str, Sequence[str]]]) -> Path:
    path = folder / "hostile.csv"
    with path.open("w", encoding="utf-8", newline="", errors="replace") as file:
        writer = csv.writer(file)
        writer.writerow([name for name, _ in columns])
        writer.writerows(zip(*(cells for _, cells in columns), strict=True))
    return path


def as_parquet(folder: Path, columns: Sequence[tuple[str, Sequence[str]]]) -> Path:
    path = folder / "hostile.parquet"
    distinct = {name.encode("utf-8", "replace").decode(): cells for name, cells in columns}
    pq.write_table(pa.table({name: pa.array(cells) for name, cells in distinct.items()}), path)
    return path


def fits(path: Path, proposal: Proposal) -> None:
    """The TOML says what the guesses say, reads as a map, and the catalogue opens with it."""
    written = tomllib.loads(proposal.toml)
    ColumnMap.read(written)
    mapped = {*written.get("columns", {}), *written.get("constants", {})}
    assert mapped == {guess.name for guess in proposal.guesses}
    if "planet_id" in mapped:
        assert open_catalogue(path, written).rows_read >= 0


def proposal_of(path: Path) -> Proposal | None:
    """None where the file is no table."""
    try:
        return propose(path)
    except CatalogueError:
        return None


@given(COLUMNS)
@settings(deadline=None)
def test_a_proposal_for_any_csv_reads_and_fits(columns: list[tuple[str, list[str]]]) -> None:
    with tempfile.TemporaryDirectory() as folder:
        path = as_csv(Path(folder), columns)
        proposal = proposal_of(path)
        if proposal:
            fits(path, proposal)


@given(COLUMNS)
@settings(deadline=None)
def test_a_proposal_for_any_parquet_reads_and_fits(columns: list[tuple[str, list[str]]]) -> None:
    with tempfile.TemporaryDirectory() as folder:
        path = as_parquet(Path(folder), columns)
        proposal = proposal_of(path)
        if proposal:
            fits(path, proposal)


@given(st.text() | st.sampled_from(HOSTILE))
def test_any_text_is_written_so_that_toml_reads_it_back(text: str) -> None:
    assert tomllib.loads(f"{literal(text)} = {literal([text, 1, -0.5])}") == {text: [text, 1, -0.5]}


@given(st.text(max_size=200))
def test_any_name_and_description_is_read_the_same_twice(text: str) -> None:
    assert read_name(text) == read_name(text)
    assert read_description(text) == read_description(text)
    assert len(read_names([text, text])) == 2


@pytest.mark.parametrize("name", [*HOSTILE, "x" * 5000, "a_" * 3000, "rad" * 2000, "(" * 4000, "%" * 4000])
def test_a_name_that_breaks_things_breaks_nothing(name: str, tmp_path: Path) -> None:
    columns = [PLANETS, (name, ["1.5"] * 8), (name, ["2.5"] * 8)]
    path = as_parquet(tmp_path, columns)
    fits(path, propose(path))


def test_hidden_and_bidirectional_letters_are_not_printed(tmp_path: Path) -> None:
    path = as_parquet(tmp_path, [("planet\u202e name", ["Zor b", "Zor c"]), ("x\x1b[31m", ["a", "b"])])
    toml = propose(path).toml
    assert toml.isascii() or all(letter.isprintable() or letter == "\n" for letter in toml)
    assert 'from = "planet\\u202E name"' in toml
