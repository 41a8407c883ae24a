"""What a killed process, a full disk or a broken file leaves behind: nothing that looks like a run."""

import json
import os
import re
import resource
import shutil
import signal
import subprocess
import sys
import time
from concurrent.futures import Executor, Future
from concurrent.futures.process import BrokenProcessPool
from pathlib import Path

import pyarrow.csv
import pyarrow.parquet as pq
import pytest

import keptair
from keptair import Settings
from keptair.errors import OutputError

SURVEY = Path(__file__).parents[2] / "sample_data" / "survey.csv"
QUICK = "draws = 256\nepochs = 4\n"
SLOW = "draws = 2048\nepochs = 256\n"  # takes many times longer than a signal to arrive


@pytest.fixture
def catalogue(tmp_path):
    """The first planets of the sample survey."""
    file = tmp_path / "catalogue.csv"
    file.write_text("".join(SURVEY.read_text(encoding="utf-8").splitlines(keepends=True)[:13]), encoding="utf-8")
    return file


@pytest.fixture
def out(catalogue, tmp_path):
    """A folder of runs with one run in it."""
    keptair.run(catalogue, tmp_path / "out", Settings(draws=256, epochs=4))
    return tmp_path / "out"


def command(catalogue, out, settings):
    file = out.parent / "settings.toml"
    file.write_text(settings)
    return [sys.executable, "-m", "keptair", "run", str(catalogue), "--out", str(out), "--settings", str(file)]


def state(out):
    """Everything in the folder of runs that is not being written."""
    return {
        "runs": {run.name: sorted(file.name for file in run.iterdir()) for run in (out / "runs").iterdir()},
        "latest": (out / "latest.json").read_text(encoding="utf-8"),
        "link": (out / "latest").readlink(),
    }


def parts(out):
    return [file.name for file in out.glob(".part-*")]


def begun(process, out):
    """Wait until the run has begun to write."""
    deadline = time.monotonic() + 60
    while not any((part / "planets.parquet").exists() for part in out.glob(".part-*")):
        assert process.poll() is None, "the run was over before it could be stopped"
        assert time.monotonic() < deadline, "the run did not begin"
        time.sleep(0.01)


def test_a_killed_run_leaves_no_run_and_the_next_one_cleans_up(catalogue, out):
    before = state(out)
    with subprocess.Popen(command(SURVEY, out, SLOW), stdout=subprocess.PIPE, stderr=subprocess.PIPE) as process:
        begun(process, out)
        process.kill()
        said = process.communicate()
    assert process.returncode == -signal.SIGKILL
    assert said[0] == b""
    assert state(out) == before
    assert len(parts(out)) == 1
    done = subprocess.run(command(catalogue, out, QUICK), capture_output=True, text=True, check=True)
    assert parts(out) == []
    assert json.loads((out / "latest.json").read_text())["run"] == Path(done.stdout.strip()).name
    assert len(state(out)["runs"]) == 2


@pytest.mark.parametrize(("number", "code"), [(signal.SIGTERM, 143), (signal.SIGINT, 130)])
def test_a_stopped_run_publishes_nothing_and_cleans_up(out, number, code):
    before = state(out)
    with subprocess.Popen(
        command(SURVEY, out, SLOW), stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True
    ) as process:
        begun(process, out)
        process.send_signal(number)
        said = process.communicate()
    assert process.returncode == code
    assert said == ("", "stopped; nothing was published\n")
    assert state(out) == before
    assert parts(out) == []


@pytest.mark.parametrize("room", [0, 1_000, 10_000, 200_000])
def test_a_disk_without_room_publishes_nothing_and_says_so(catalogue, out, room):
    before = state(out)

    def little_room():
        resource.setrlimit(resource.RLIMIT_FSIZE, (room, room))

    done = subprocess.run(
        command(SURVEY, out, QUICK), capture_output=True, text=True, check=False, preexec_fn=little_room
    )
    assert (done.returncode, done.stdout) == (6, "")
    assert done.stderr.startswith(f"{out}: cannot be written (File too large); nothing was published\n")
    assert "Traceback" not in done.stderr
    assert "Exception ignored" not in done.stderr
    assert state(out) == before
    assert parts(out) == []
    subprocess.run(command(catalogue, out, QUICK), capture_output=True, check=True)


@pytest.mark.parametrize("place", ["out", "out/runs"])
def test_a_file_where_a_folder_belongs_is_said(catalogue, tmp_path, place):
    (tmp_path / place).parent.mkdir(exist_ok=True)
    (tmp_path / place).write_text("mine")
    out = tmp_path / "out"
    done = subprocess.run(command(catalogue, out, QUICK), capture_output=True, text=True, check=False)
    assert (done.returncode, done.stdout) == (6, "")
    assert re.match(r".*out: cannot be written \((Not a directory|File exists)\); nothing was published\n", done.stderr)
    assert (tmp_path / place).read_text() == "mine"


def test_a_folder_that_vanishes_during_the_run_is_said(catalogue, out):
    before = state(out)

    def vanish(*_):
        for part in out.glob(".part-*"):
            shutil.rmtree(part)

    with pytest.raises(OutputError, match="No such file or directory"):
        keptair.run(catalogue, out, Settings(draws=256, epochs=4), progress=vanish)
    assert state(out) == before


def test_a_cluster_that_breaks_down_publishes_nothing(catalogue, out):
    class Broken(Executor):
        def submit(self, *_, **__):
            future = Future()
            future.set_exception(BrokenProcessPool("a worker died"))
            return future

    before = state(out)
    with pytest.raises(BrokenProcessPool):
        keptair.run(catalogue, out, Settings(draws=256), executor=Broken())
    assert state(out) == before
    assert parts(out) == []


@pytest.mark.parametrize("share", [0.0, 0.2, 0.5, 0.9, 0.999])
def test_a_cut_off_parquet_catalogue_is_said_and_nothing_is_made(tmp_path, share):
    whole, cut = tmp_path / "whole.parquet", tmp_path / "cut.parquet"
    pq.write_table(pyarrow.csv.read_csv(SURVEY), whole)
    content = whole.read_bytes()
    cut.write_bytes(content[: int(len(content) * share)])
    out = tmp_path / "out"
    done = subprocess.run(command(cut, out, QUICK), capture_output=True, text=True, check=False)
    assert (done.returncode, done.stdout) == (3, "")
    assert str(cut) in done.stderr or cut.name in done.stderr
    assert "Traceback" not in done.stderr
    assert not out.exists()


def test_a_parquet_catalogue_with_a_hole_in_its_data_publishes_nothing(out, tmp_path):
    file = tmp_path / "hole.parquet"
    pq.write_table(pyarrow.csv.read_csv(SURVEY), file, compression="gzip")
    content = bytearray(file.read_bytes())
    content[2_000:6_000] = os.urandom(4_000)
    file.write_bytes(content)
    before = state(out)
    done = subprocess.run(command(file, out, QUICK), capture_output=True, text=True, check=False)
    assert (done.returncode, done.stdout) == (3, "")
    assert "Traceback" not in done.stderr
    assert state(out) == before
    assert parts(out) == []
