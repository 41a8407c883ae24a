"""The command, as a person and as a cron job meets it."""

import json
import os
import re
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

import keptair
from keptair import Settings, cli
from keptair.runs import running
from keptair.tables import schema

CATALOGUE = """\
planet_id,planet_radius_rearth,planet_mass_mearth,orbital_period_d,stellar_teff_k,stellar_radius_rsun,stellar_mass_msun
Aster b,1.05,1.2,11.2,3100,0.2,0.17
Boreal b,11.3,300,4.2,5900,1.1,1.05
Cirro b,0.7,far,88,5750,1.0,1.0
,1,1,10,5700,1,1
"""
COMMANDS = ("run", "check", "map", "targets", "trace", "verify", "columns", "settings")


@pytest.fixture
def catalogue(tmp_path):
    file = tmp_path / "catalogue.csv"
    file.write_text(CATALOGUE)
    return file


@pytest.fixture
def quick(tmp_path):
    file = tmp_path / "settings.toml"
    file.write_text("draws = 256\nepochs = 4\nmax_rejects = 0.5\n")
    return file


@pytest.fixture(scope="module")
def finished(tmp_path_factory):
    folder = tmp_path_factory.mktemp("finished")
    (folder / "catalogue.csv").write_text(CATALOGUE)
    return keptair.run(folder / "catalogue.csv", folder / "out", Settings(draws=256, epochs=4, max_rejects=0.5))


def arguments(command, *options):
    return [str(argument) for argument in (command, *options)]


def test_run_prints_the_folder_of_the_run_and_nothing_else(catalogue, quick, tmp_path, capsys):
    assert cli.main(arguments("run", catalogue, "--out", tmp_path / "out", "--settings", quick)) == 0
    said = capsys.readouterr()
    printed = said.out.splitlines()
    assert len(printed) == 1
    assert (tmp_path / "out" / "latest").resolve().samefile(printed[0])
    assert "4 rows read = 0 filtered + 1 set aside + 3 accepted" in said.err
    assert "1 cell emptied" in said.err


def test_the_closing_summary_fits_80_columns_but_for_paths(catalogue, quick, tmp_path, capsys):
    cli.main(arguments("run", catalogue, "--out", tmp_path / "out", "--settings", quick))
    lines = capsys.readouterr().err.splitlines()
    assert all(len(line) <= 80 for line in lines if str(tmp_path) not in line)
    assert any(line.endswith("/planets.parquet") for line in lines)
    assert any(line.endswith("/report.html") for line in lines)
    assert re.fullmatch(r"\d+\.\d s", lines[-1])


def test_a_summary_of_millions_of_planets_is_wrapped(finished):
    from keptair.rendering import closing_summary

    manifest = finished.manifest | {"verdicts": dict.fromkeys(finished.manifest["verdicts"], 12_345_678)}
    manifest["rows"] = dict.fromkeys(manifest["rows"], 123_456_789)
    lines = closing_summary(running.Run(finished.path, manifest, 0)).splitlines()
    assert all(len(line) <= 80 for line in lines if str(finished.path) not in line)
    assert "unassessed 12,345,678" in " ".join(lines)


def test_quiet_is_silent_on_stderr(catalogue, quick, tmp_path, capsys):
    assert cli.main(arguments("run", catalogue, "--out", tmp_path / "out", "--settings", quick, "--quiet")) == 0
    assert capsys.readouterr().err == ""


def test_json_prints_the_run_object(catalogue, quick, tmp_path, capsys):
    assert cli.main(arguments("run", catalogue, "--out", tmp_path / "out", "--settings", quick, "--json")) == 0
    printed = json.loads(capsys.readouterr().out)
    package = json.loads((tmp_path / "out" / "latest" / "datapackage.json").read_text(encoding="utf-8"))
    assert printed == package["run"]


def test_too_many_rejects_are_exit_4_with_the_folder_and_a_way_out(catalogue, quick, tmp_path, capsys):
    options = ("--settings", quick, "--max-rejects", "0.2", "--quiet")
    assert cli.main(arguments("run", catalogue, "--out", tmp_path / "out", *options)) == 4
    said = capsys.readouterr()
    assert (tmp_path / "out" / "runs").samefile(said.out.strip() + "/..")
    assert said.err.startswith("1 of 4 rows were set aside, more than the share 0.2 that may be")
    assert "rejects.csv" in said.err
    assert not (tmp_path / "out" / "latest.json").exists()


def test_workers_change_no_number(catalogue, quick, tmp_path, capsys):
    for workers in (1, 2):
        cli.main(arguments("run", catalogue, "--out", tmp_path / "out", "--settings", quick, "--workers", workers))
    first, second = (keptair.load(run) for run in capsys.readouterr().out.split())
    assert first.equals(second)


@pytest.mark.parametrize(
    ("options", "code", "words"),
    [
        (("run", "nowhere.csv", "--out", "out"), 3, "nowhere.csv"),
        (("run", "catalogue.csv", "--out", "out", "--settings", "nowhere.toml"), 2, "nowhere.toml: cannot be read"),
        (("run", "catalogue.csv", "--out", "out", "--map", "nowhere.toml"), 3, "nowhere.toml"),
        (("run", "catalogue.csv", "--out", "out", "--max-rejects", "2"), 2, "max_rejects = 2"),
        (("run", "catalogue.csv", "--out", "out", "--workers", "0"), 2, "workers = 0"),
        (("run", "catalogue.csv", "--out", "catalogue.csv"), 6, "catalogue.csv: cannot be written"),
        (("check", "nowhere.csv"), 3, "nowhere.csv"),
        (("targets", "nowhere"), 2, "nowhere: is neither a run nor a folder"),
        (("columns", "planet"), 2, "there is no table 'planet'"),
        (("settings", "--settings", "catalogue.csv"), 2, "catalogue.csv: is not TOML"),
    ],
)
def test_what_cannot_be_done_is_said_in_a_sentence(catalogue, capsys, monkeypatch, options, code, words):
    monkeypatch.chdir(catalogue.parent)
    assert cli.main(options) == code
    said = capsys.readouterr()
    assert said.out == ""
    assert words in said.err
    assert "Traceback" not in said.err
    assert not (catalogue.parent / "out").exists()


@pytest.mark.parametrize(
    "options",
    [
        (),
        ("run",),
        ("run", "c.csv"),
        ("run", "c.csv", "--out", "o", "--workers", "two"),
        ("targets", "r", "--sort", "size"),
        ("planets",),
        ("run", "c.csv", "--out", "o", "--unknown"),
    ],
)
def test_wrong_usage_is_exit_2(options, capsys):
    with pytest.raises(SystemExit) as stopped:
        cli.main(options)
    assert stopped.value.code == 2
    assert "usage: keptair" in capsys.readouterr().err


@pytest.mark.parametrize("command", COMMANDS)
def test_every_command_has_help(command, capsys):
    with pytest.raises(SystemExit) as stopped:
        cli.main([command, "--help"])
    assert stopped.value.code == 0
    assert f"usage: keptair {command}" in capsys.readouterr().out


def test_an_unexpected_end_asks_for_a_report_and_hides_the_traceback(catalogue, tmp_path, capsys, monkeypatch):
    def broken(*_, **__):
        raise ZeroDivisionError("division by zero")

    monkeypatch.setattr(running, "run", broken)
    monkeypatch.delenv("KEPTAIR_DEBUG", raising=False)
    assert cli.main(arguments("run", catalogue, "--out", tmp_path / "out")) == 1
    said = capsys.readouterr().err
    assert said.startswith("keptair: something unexpected went wrong: ZeroDivisionError: division by zero\n")
    assert "please report it" in said
    assert "Traceback" not in said
    monkeypatch.setenv("KEPTAIR_DEBUG", "1")
    assert cli.main(arguments("run", catalogue, "--out", tmp_path / "out")) == 1
    assert "Traceback" in capsys.readouterr().err


def test_check_says_what_a_run_would_do(catalogue, quick, tmp_path, capsys):
    assert cli.main(arguments("check", catalogue)) == 0
    said = capsys.readouterr()
    assert said.err == ""
    assert "4 rows read = 0 filtered + 1 set aside + 3 accepted" in said.out
    assert cli.main(arguments("check", catalogue, "--json")) == 0
    rows = json.loads(capsys.readouterr().out)["rows"]
    cli.main(arguments("run", catalogue, "--out", tmp_path / "out", "--settings", quick, "--json"))
    assert rows.items() <= json.loads(capsys.readouterr().out)["rows"].items()


def test_what_the_reader_remarks_is_said_at_the_end(finished):
    from keptair.rendering import closing_summary

    noted = running.Run(finished.path, finished.manifest | {"remarks": ["two hosts are called alike"]}, 0)
    assert "note: two hosts are called alike" in closing_summary(noted).splitlines()


def test_targets_come_as_table_csv_and_json(finished, capsys):
    out = finished.path.parents[1]
    for where in (out, finished.path):
        assert cli.main(arguments("targets", where, "--top", 2)) == 0
        assert "Boreal b" in capsys.readouterr().out
    assert cli.main(arguments("targets", out, "--format", "json", "--sort", "esm")) == 0
    planets = json.loads(capsys.readouterr().out)
    assert {planet["planet_id"] for planet in planets} == {"Aster b", "Boreal b", "Cirro b"}
    assert cli.main(arguments("targets", out, "--format", "csv", "--top", 1)) == 0
    assert len(capsys.readouterr().out.splitlines()) == 2


def test_targets_may_be_of_some_verdicts_only(finished, capsys):
    planets = keptair.load(finished.path)
    verdict = planets["verdict"].iloc[0]
    assert cli.main(arguments("targets", finished.path, "--verdict", verdict, "--format", "json")) == 0
    chosen = {planet["planet_id"] for planet in json.loads(capsys.readouterr().out)}
    assert chosen == set(planets["planet_id"][planets["verdict"] == verdict])


@pytest.mark.parametrize("name", schema.TABLES)
def test_columns_say_every_column_with_unit_and_meaning(name, capsys):
    assert cli.main(["columns", name]) == 0
    lines = capsys.readouterr().out.splitlines()[1:]
    table = schema.table(name)
    assert [line.split()[0] for line in lines] == list(table.names)
    assert all(line.endswith(column.description) for line, column in zip(lines, table, strict=True))
    assert all(column.unit in line for line, column in zip(lines, table, strict=True))


def test_columns_without_a_table_say_all_of_them(capsys):
    assert cli.main(["columns"]) == 0
    printed = capsys.readouterr().out
    assert all(f"# {name}: " in printed for name in schema.TABLES)


def test_settings_print_a_file_that_reads_back_as_the_same_settings(quick, tmp_path, capsys):
    assert cli.main(arguments("settings", "--settings", quick)) == 0
    printed = capsys.readouterr().out
    (tmp_path / "printed.toml").write_text(printed, encoding="utf-8")
    assert Settings.read(tmp_path / "printed.toml").model_dump() == Settings.read(quick).model_dump()
    assert f"draws = 256  # draws per planet ({quick})" in printed
    assert "seed = 1  # seed of the draws (default)" in printed


def test_settings_print_every_setting(capsys):
    assert cli.main(["settings"]) == 0
    printed = tomllib.loads(capsys.readouterr().out)
    assert set(printed) == set(Settings.model_fields)


def test_only_a_terminal_sees_progress(catalogue, quick, tmp_path):
    command = [sys.executable, "-m", "keptair", "run", str(catalogue), "--out", str(tmp_path / "out")]
    terminal, theirs = os.openpty()
    try:
        done = subprocess.run([*command, "--settings", str(quick)], stdout=subprocess.PIPE, stderr=theirs, check=True)
        shown = os.read(terminal, 100_000).decode()
    finally:
        os.close(theirs)
        os.close(terminal)
    assert "rows" in shown
    assert "4/4" in shown
    assert len(done.stdout.splitlines()) == 1
    silent = subprocess.run([*command, "--settings", str(quick)], capture_output=True, text=True, check=True)
    assert "4/4" not in silent.stderr


def test_python_dash_m_is_the_command():
    done = subprocess.run([sys.executable, "-m", "keptair", "--version"], capture_output=True, text=True, check=True)
    assert done.stdout == f"keptair {keptair.__version__}\n"


def test_a_reader_that_has_seen_enough_is_no_error():
    reader, writer = os.pipe()
    os.close(reader)
    try:
        command = [sys.executable, "-m", "keptair", "columns"]
        done = subprocess.run(command, stdout=writer, stderr=subprocess.PIPE, text=True, check=False)
    finally:
        os.close(writer)
    assert (done.returncode, done.stderr) == (0, "")


def test_a_damaged_run_is_one_sentence(tmp_path: Path) -> None:
    (tmp_path / "datapackage.json").write_text("{}", encoding="utf-8")
    (tmp_path / "planets.parquet").write_bytes(b"junk")
    for command in (["targets", str(tmp_path)], ["trace", "Thulimar b", str(tmp_path)]):
        done = subprocess.run([sys.executable, "-m", "keptair", *command], capture_output=True, text=True, check=False)
        assert done.returncode == 2
        assert "damaged" in done.stderr
        assert "Traceback" not in done.stderr


def test_output_that_finds_no_room_is_said_so() -> None:
    with Path("/dev/full").open("w") as full:
        command = [sys.executable, "-m", "keptair", "columns"]
        done = subprocess.run(command, stdout=full, stderr=subprocess.PIPE, text=True, check=False)
    assert done.returncode == 6
    assert "no room left" in done.stderr


def test_an_argument_that_is_not_text_is_refused() -> None:
    command = [sys.executable, "-m", "keptair", "trace", b"\xff", "."]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    assert done.returncode == 2
    assert "is not text" in done.stderr
