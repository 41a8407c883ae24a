"""A run from catalogue to folder."""

import json
import multiprocessing
import re
from concurrent.futures import ProcessPoolExecutor

import pyarrow.parquet as pq
import pytest

import keptair
from keptair import Settings
from keptair.catalogue.columns import ColumnMap
from keptair.errors import CatalogueError, OutputError, SettingsError, UsageError
from keptair.runs import publish

FILES = {
    "planets.parquet",
    "gases.parquet",
    "rejects.parquet",
    "rejects.csv",
    "changes.parquet",
    "report.html",
    "summary.json",
    "datapackage.json",
}
TABLES = sorted(name for name in FILES if name.endswith((".parquet", ".csv")))
# contract: the `run` object of datapackage.json
KEYS = {
    "catalogue": {"path", "bytes", "sha256"},
    "column_map": None,
    "settings": None,
    "versions": {"python", "keptair", "numpy", "scipy", "pyarrow", "astropy"},
    "rows": {"read", "filtered", "set_aside", "accepted", "reused"},
    "cells_emptied": None,
    "verdicts": {"envelope", "secondary", "bare", "undecided", "unassessed"},
    "seconds": {
        *("read", "screen", "fill", "irradiate", "exobase", "escape", "retain", "judge", "observe"),
        *("write", "report", "total"),
    },
    "previous": None,
    "changes": None,
}


def tables_of(run):
    return {name: (run.path / name).read_bytes() for name in TABLES}


def test_a_run_folder_holds_every_file_and_the_output_folder_nothing_else(finished):
    assert {file.name for file in finished.run.path.iterdir()} == FILES
    assert {file.name for file in finished.out.iterdir()} == {"runs", "latest", "latest.json"}
    assert finished.run.path.parent == finished.out / "runs"
    assert re.fullmatch(r"\d{8}T\d{6}Z-[0-9a-f]{8}", finished.run.path.name)
    assert finished.run.exit_code == 0


def test_the_manifest_has_every_key_and_is_the_one_on_disk(finished):
    on_disk = json.loads((finished.run.path / "datapackage.json").read_text(encoding="utf-8"))["run"]
    assert on_disk == finished.run.manifest
    assert on_disk.keys() >= KEYS.keys()
    for key, inner in KEYS.items():
        if inner is not None:
            assert set(on_disk[key]) == inner, key
    assert on_disk["name"] == finished.run.path.name


def test_every_row_is_accounted_for(finished):
    rows = finished.run.manifest["rows"]
    assert rows == {"read": 7, "filtered": 0, "set_aside": 2, "accepted": 5, "reused": 0}
    assert sum(finished.run.manifest["verdicts"].values()) == 5
    assert finished.run.manifest["cells_emptied"] == 1
    planets = pq.read_table(finished.run.path / "planets.parquet")
    assert planets["planet_id"].to_pylist() == ["Aster b", "Aster c", "=Boreal b", "Cirro b", "Dune b"]
    assert planets["row"].to_pylist() == [1, 2, 5, 6, 7]
    assert planets["input_note"].to_pylist() == ["first", "=1+1", "a note that is rather long", "", ""]


def test_gases_stand_in_planet_order_and_leave_out_the_unassessed(finished):
    gases = pq.read_table(finished.run.path / "gases.parquet")
    assert list(dict.fromkeys(gases["planet_id"].to_pylist())) == ["Aster b", "Aster c", "=Boreal b", "Cirro b"]


@pytest.mark.parametrize(("workers", "batch_planets"), [(1, 1), (2, 2), (3, 100)])
def test_workers_and_batches_change_no_byte(finished, catalogue, column_map, quick, tmp_path, workers, batch_planets):
    settings = quick.model_copy(update={"batch_planets": batch_planets})
    again = keptair.run(catalogue, tmp_path, settings, column_map, workers)
    assert tables_of(again) == tables_of(finished.run)


def test_an_executor_of_other_processes_changes_no_byte(finished, catalogue, column_map, quick, tmp_path):
    settings = quick.model_copy(update={"batch_planets": 3})
    with ProcessPoolExecutor(2, mp_context=multiprocessing.get_context("spawn")) as executor:
        again = keptair.run(catalogue, tmp_path, settings, column_map, workers=2, executor=executor)
    assert tables_of(again) == tables_of(finished.run)


def test_a_map_may_be_a_path_or_one_read_already(finished, catalogue, column_map, quick, tmp_path):
    again = keptair.run(catalogue, tmp_path, quick, ColumnMap.read(column_map))
    assert tables_of(again) == tables_of(finished.run)
    assert again.manifest["column_map"] == finished.run.manifest["column_map"]


def test_the_same_inputs_give_the_same_digest_and_others_another(finished, catalogue, column_map, quick, tmp_path):
    def digest(settings):
        return keptair.run(catalogue, tmp_path, settings, column_map).path.name.partition("-")[2]

    assert digest(quick) == finished.run.path.name.partition("-")[2]
    assert digest(quick.model_copy(update={"seed": 2})) != finished.run.path.name.partition("-")[2]


def test_two_runs_of_the_same_inputs_in_one_second_have_a_folder_each(catalogue, quick, tmp_path, monkeypatch):
    clock = iter(["2026-12-01T03:15:00.2+00:00"] * 3 + ["2026-12-01T03:15:01.2+00:00"] * 2)
    waited = []
    monkeypatch.setattr(publish, "_now", lambda: publish.datetime.fromisoformat(next(clock)))
    monkeypatch.setattr(publish.time, "sleep", waited.append)
    first = keptair.run(catalogue, tmp_path, quick)
    second = keptair.run(catalogue, tmp_path, quick)
    assert first.path.name.startswith("20261201T031500Z-")
    assert second.path.name.startswith("20261201T031501Z-")
    assert waited == [pytest.approx(0.8)]
    assert {run.name for run in (tmp_path / "runs").iterdir()} == {first.path.name, second.path.name}


def test_more_rejects_than_allowed_keep_the_run_but_not_as_the_latest(catalogue, quick, tmp_path):
    good = keptair.run(catalogue, tmp_path, quick)
    strict = keptair.run(catalogue, tmp_path, quick.model_copy(update={"max_rejects": 0.28}))  # 2 of 7 are 0.2857
    assert strict.exit_code == 4
    assert {file.name for file in strict.path.iterdir()} == FILES
    assert json.loads((tmp_path / "latest.json").read_text())["run"] == good.path.name
    assert (tmp_path / "latest").resolve() == good.path.resolve()


def test_just_as_many_rejects_as_allowed_are_allowed(catalogue, quick, tmp_path):
    assert keptair.run(catalogue, tmp_path, quick.model_copy(update={"max_rejects": 2 / 7})).exit_code == 0


def test_what_is_not_default_is_recorded_with_its_origin(catalogue, tmp_path):
    file = tmp_path / "settings.toml"
    file.write_text(
        "draws = 256\nepochs = 16\n[verdict]\nkeep = 0.7\n[backgrounds.co2]\ncross_section_m2 = 4e-19\n"
        '[gases.kr]\ntitle = "Kr"\nmass_u = 83.798\nmass_source = "CIAAW standard atomic weights 2021"\n'
        'diameter_pm = 360\ndiameter_source = "value from memory"\n'
    )
    run = keptair.run(catalogue, tmp_path / "out", Settings.read(file, {"max_rejects": 0.5}))
    changed = run.manifest["settings_changed"]
    assert changed.pop("max_rejects") == "command line"
    assert set(changed.values()) == {str(file)}
    assert {"draws", "verdict.keep", "backgrounds.co2.cross_section_m2", "gases.kr.mass_u"} <= set(changed)
    assert "epochs" not in changed  # given, but the default
    assert run.manifest["settings"]["backgrounds"]["co2"]["cross_section_m2"] == 4e-19
    assert "retention_kr" in pq.read_schema(run.path / "planets.parquet").names
    assert keptair.load(run.path)["retention_kr"].notna().any()


def test_settings_given_in_python_say_so(finished):
    assert finished.run.manifest["settings_changed"]["draws"] == "given in Python"


def test_settings_may_be_a_path(catalogue, tmp_path):
    file = tmp_path / "settings.toml"
    file.write_text('draws = 256\nepochs = 4\nmax_rejects = 1\ngas_rows = "none"\n')
    run = keptair.run(catalogue, tmp_path / "out", file)
    assert pq.read_table(run.path / "gases.parquet").num_rows == 0


def test_a_catalogue_without_rows_gives_tables_without_rows(quick, tmp_path):
    file = tmp_path / "empty.csv"
    file.write_text("planet_id,planet_radius_rearth\n")
    run = keptair.run(file, tmp_path / "out", quick)
    assert run.exit_code == 0
    assert run.manifest["rows"] == {"read": 0, "filtered": 0, "set_aside": 0, "accepted": 0, "reused": 0}
    assert len(keptair.load(run.path, as_="astropy")) == 0


def test_a_map_that_calls_nan_missing_can_be_written_down(catalogue, quick, tmp_path):
    values = {"columns": {"planet_id": {"from": "planet_id"}, "j_mag": {"from": "j_mag", "missing": [float("nan")]}}}
    run = keptair.run(catalogue, tmp_path, quick, ColumnMap.read(values))
    assert run.manifest["column_map"]["columns"]["j_mag"]["missing"] == ["nan"]


def test_whoever_asks_is_told_of_the_progress(catalogue, quick, tmp_path):
    told = []
    settings = quick.model_copy(update={"batch_planets": 3})
    keptair.run(catalogue, tmp_path, settings, progress=lambda done, total: told.append((done, total)))
    assert told == [(3, 7), (6, 7), (7, 7)]


@pytest.mark.parametrize("workers", [0, -1])
def test_less_than_one_worker_is_refused(catalogue, tmp_path, workers):
    with pytest.raises(UsageError, match="should be 1 or more"):
        keptair.run(catalogue, tmp_path, workers=workers)


def test_nothing_is_made_for_a_catalogue_or_settings_that_cannot_be_read(catalogue, tmp_path):
    with pytest.raises(CatalogueError):
        keptair.run(tmp_path / "nowhere.csv", tmp_path / "out")
    with pytest.raises(SettingsError):
        keptair.run(catalogue, tmp_path / "out", tmp_path / "nowhere.toml")
    assert not (tmp_path / "out").exists()


def test_a_file_in_place_of_the_folder_is_said(catalogue, quick, tmp_path):
    (tmp_path / "out").write_text("mine")
    with pytest.raises(OutputError, match=r"out: cannot be written \(Not a directory\); nothing was published"):
        keptair.run(catalogue, tmp_path / "out", quick)
    assert (tmp_path / "out").read_text() == "mine"


@pytest.mark.parametrize(
    "step", ["keptair.report.write", "keptair.runs.package.write_json", "keptair.runs.publish._sync"]
)
def test_a_disk_that_fills_up_at_any_step_publishes_nothing(catalogue, quick, tmp_path, monkeypatch, step):
    def full(*_, **__):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(step, full)
    with pytest.raises(OutputError, match="No space left on device"):
        keptair.run(catalogue, tmp_path, quick)
    assert [file.name for file in tmp_path.iterdir()] == ["runs"]
    assert not list((tmp_path / "runs").iterdir())
