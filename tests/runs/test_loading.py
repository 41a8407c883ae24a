"""Tables of a run, back in Python."""

import shutil

import pytest
from astropy import units
from astropy.table import QTable

import keptair
from keptair.errors import NotThereError, UsageError
from keptair.runs.loading import find


@pytest.mark.parametrize("table", ["planets", "gases", "rejects", "changes"])
def test_a_table_comes_from_a_run_folder_from_the_output_folder_and_through_the_link(finished, table):
    frames = [keptair.load(where, table) for where in (finished.run.path, finished.out, str(finished.out / "latest"))]
    assert frames[0].equals(frames[1])
    assert frames[0].equals(frames[2])


def test_pandas_gets_the_units_by_column(finished):
    frame = keptair.load(finished.out)
    assert frame.attrs["units"]["planet_radius_rearth"] == "earthRad"
    assert frame.attrs["units"]["exobase_altitude_km"] == "km"
    assert "eccentricity" not in frame.attrs["units"]
    assert frame["planet_id"].iloc[0] == "Aster b"


def test_astropy_gets_quantities(finished):
    table = keptair.load(finished.out, as_="astropy")
    assert isinstance(table, QTable)
    # IAU 2015 Resolution B3: nominal equatorial radius of the Earth 6378.1 km; 1.05 of it is the catalogue's
    assert table["planet_radius_rearth"][0].to_value(units.km) == pytest.approx(1.05 * 6378.1)


def test_a_moved_output_folder_still_knows_its_latest(finished, tmp_path):
    shutil.copytree(finished.out, tmp_path / "moved", symlinks=True)
    assert find(tmp_path / "moved") == tmp_path / "moved" / "runs" / finished.run.path.name


def test_no_link_is_needed(finished, tmp_path):
    shutil.copytree(finished.out, tmp_path / "moved", symlinks=True)
    (tmp_path / "moved" / "latest").unlink()
    assert len(keptair.load(tmp_path / "moved")) == 5


def test_a_folder_that_holds_no_run_is_said(tmp_path):
    for where in (tmp_path, tmp_path / "nowhere"):
        with pytest.raises(NotThereError, match="is neither a run nor a folder with a finished run in it"):
            keptair.load(where)


def test_a_latest_run_that_was_deleted_is_said(finished, tmp_path):
    shutil.copytree(finished.out, tmp_path / "moved", symlinks=True)
    shutil.rmtree(tmp_path / "moved" / "runs")
    with pytest.raises(NotThereError, match=f"its latest run, runs/{finished.run.path.name}, is not there any more"):
        keptair.load(tmp_path / "moved")


def test_a_table_that_was_deleted_is_said(finished, tmp_path):
    shutil.copytree(finished.run.path, tmp_path / "run")
    (tmp_path / "run" / "gases.parquet").unlink()
    with pytest.raises(NotThereError, match="the run is not whole"):
        keptair.load(tmp_path / "run", "gases")


def test_unknown_tables_and_kinds_are_said(finished):
    with pytest.raises(NotThereError, match="there is no table 'planet': a run has planets, gases, rejects, changes"):
        keptair.load(finished.out, "planet")
    with pytest.raises(UsageError, match="should be 'pandas' or 'astropy'"):
        keptair.load(finished.out, as_="polars")
