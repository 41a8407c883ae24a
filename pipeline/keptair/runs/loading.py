"""A finished run's tables, back in Python with their units."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Literal, overload

from keptair.errors import NotThereError, UsageError
from keptair.runs.publish import read_latest

if TYPE_CHECKING:
    import pandas
    from astropy.table import QTable

PACKAGE = "datapackage.json"
TABLES = ("planets", "gases", "rejects", "changes")


def find(where: str | Path) -> Path:
    """The run folder meant by a run folder or by a folder of runs (then its latest)."""
    folder = Path(where)
    if (folder / PACKAGE).is_file():
        return folder
    pointer = read_latest(folder)
    if pointer is None:
        raise NotThereError(
            f"{where}: is neither a run nor a folder with a finished run in it",
            hint=f"keptair run CATALOGUE --out {where}",
        )
    run = folder / str(pointer["path"])
    if not (run / PACKAGE).is_file():
        raise NotThereError(
            f"{where}: its latest run, {pointer['path']}, is not there any more", hint=f"ls {where}/runs"
        )
    return run


@contextmanager
def whole(where: str | Path) -> Iterator[None]:
    """A run whose files somebody has damaged is said so, whatever library stumbles over them."""
    try:
        yield
    except (KeyError, TypeError, ValueError, OSError) as error:
        raise NotThereError(
            f"{where}: the run cannot be read; a file of it is damaged ({type(error).__name__})",
            hint="run the catalogue again",
        ) from None


@overload
def load(where: str | Path, table: str = ..., as_: Literal["pandas"] = ...) -> pandas.DataFrame: ...
@overload
def load(where: str | Path, table: str = ..., *, as_: Literal["astropy"]) -> QTable: ...
def load(
    where: str | Path, table: str = "planets", as_: Literal["pandas", "astropy"] = "pandas"
) -> pandas.DataFrame | QTable:
    """One table of a run.

    Parameters
    ----------
    where : a run folder, or a folder of runs (then its latest)
    table : planets, gases, rejects or changes
    as_ : "pandas": a DataFrame with the units by column in ``.attrs["units"]``; "astropy": a QTable

    Returns
    -------
    What is missing is NaN in both.
    """
    if table not in TABLES:
        raise NotThereError(f"there is no table {table!r}: a run has {', '.join(TABLES)}")
    if as_ not in ("pandas", "astropy"):
        raise UsageError(f"as_ = {as_!r}: should be 'pandas' or 'astropy'")
    file = find(where) / f"{table}.parquet"
    if not file.is_file():
        raise NotThereError(f"{file}: is not there; the run is not whole")
    return _as_pandas(file) if as_ == "pandas" else _as_astropy(file)


def _as_pandas(file: Path) -> pandas.DataFrame:
    from pyarrow import parquet

    rows = parquet.read_table(file)
    frame: pandas.DataFrame = rows.to_pandas()
    # a round trip through pandas drops what the file says about its columns
    said = {field.name: field.metadata or {} for field in rows.schema}
    frame.attrs["units"] = {name: words[b"unit"].decode() for name, words in said.items() if b"unit" in words}
    return frame


def _as_astropy(file: Path) -> QTable:
    from astropy.table import QTable

    return QTable.read(file, format="parquet")
