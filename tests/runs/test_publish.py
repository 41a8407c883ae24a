"""A run on disk is complete or absent."""

import json
import os
import re
import signal
import stat
import threading
from pathlib import Path

import pytest

from keptair.errors import OutputError
from keptair.runs import publish

DIGEST = "0123456789abcdef"


def published(out, as_latest=True):
    with publish.begin(out, DIGEST) as part:
        (part.path / "table").write_text("whole")
        return part.publish(as_latest)


def pointer(out):
    return json.loads((out / "latest.json").read_text(encoding="utf-8"))


@pytest.fixture(autouse=True)
def seconds(monkeypatch):
    """A clock that goes on by one second each time it is read, so that every run has a name."""
    ticks = (publish.datetime(2026, 12, 1, 3, 15, number, tzinfo=publish.UTC) for number in range(60))
    monkeypatch.setattr(publish, "_now", lambda: next(ticks))


def test_a_run_appears_whole_and_is_the_latest(tmp_path):
    run = published(tmp_path)
    assert run == tmp_path / "runs" / "20261201T031500Z-01234567"
    assert (run / "table").read_text() == "whole"
    assert pointer(tmp_path) == {
        "run": "20261201T031500Z-01234567",
        "path": "runs/20261201T031500Z-01234567",
        "started": "2026-12-01T03:15:00Z",
        "finished": "2026-12-01T03:15:01Z",
        "checked": "2026-12-01T03:15:01Z",
        "previous": None,
    }
    assert (tmp_path / "latest").readlink() == Path("runs/20261201T031500Z-01234567")


def test_the_next_run_takes_over_and_names_the_one_before(tmp_path):
    first, second = published(tmp_path), published(tmp_path)
    assert pointer(tmp_path)["run"] == second.name
    assert pointer(tmp_path)["previous"] == first.name
    assert (tmp_path / "latest").resolve() == second.resolve()
    assert (first / "table").read_text() == "whole"


def test_a_run_may_be_kept_without_being_the_latest(tmp_path):
    first, second = published(tmp_path), published(tmp_path, as_latest=False)
    assert pointer(tmp_path)["run"] == first.name
    assert (tmp_path / "latest").resolve() == first.resolve()
    assert second.is_dir()


def test_nothing_stays_of_a_run_that_fails(tmp_path):
    def failing():
        with publish.begin(tmp_path, DIGEST) as part:
            (part.path / "table").write_text("half")
            raise ZeroDivisionError

    with pytest.raises(ZeroDivisionError):
        failing()
    assert [file.name for file in tmp_path.iterdir()] == ["runs"]
    assert not list((tmp_path / "runs").iterdir())


def test_leftovers_of_a_run_cut_off_go_at_the_next_start(tmp_path):
    (tmp_path / ".part-20261130T031500Z-01234567").mkdir()
    (tmp_path / ".part-20261130T031500Z-01234567" / "planets.parquet").write_text("half")
    (tmp_path / ".part-latest.json").write_text("{")
    (tmp_path / ".part-latest").symlink_to("nowhere")
    (tmp_path / "mine").write_text("stays")
    published(tmp_path)
    assert {file.name for file in tmp_path.iterdir()} == {"runs", "latest", "latest.json", "mine"}


def test_others_may_read_what_the_umask_lets_them(tmp_path):
    before = os.umask(0o027)
    try:
        run = published(tmp_path / "out")
    finally:
        os.umask(before)
    modes = [stat.S_IMODE(path.stat().st_mode) for path in (run, run / "table", tmp_path / "out" / "latest.json")]
    assert modes == [0o750, 0o640, 0o640]


@pytest.mark.parametrize("name", ["latest", "latest.json"])
def test_a_folder_in_place_of_the_link_or_pointer_is_not_touched(tmp_path, name):
    (tmp_path / name).mkdir()
    (tmp_path / name / "mine").write_text("stays")
    with pytest.raises(OutputError, match=f"{name}: stands where the name of the latest run belongs"):
        published(tmp_path)
    assert (tmp_path / name / "mine").read_text() == "stays"


def test_a_file_in_place_of_the_link_is_not_touched(tmp_path):
    (tmp_path / "latest").write_text("mine")
    with pytest.raises(OutputError, match="latest: stands where the name of the latest run belongs"):
        published(tmp_path)
    assert (tmp_path / "latest").read_text() == "mine"


def test_where_there_are_no_links_the_pointer_alone_will_do(tmp_path, monkeypatch):
    def no_links(*_, **__):
        raise OSError(1, "Operation not permitted")

    monkeypatch.setattr(Path, "symlink_to", no_links)
    run = published(tmp_path)
    assert pointer(tmp_path)["run"] == run.name
    assert not (tmp_path / "latest").exists()


def test_a_folder_that_has_the_runs_name_is_not_overwritten(tmp_path):
    with publish.begin(tmp_path, DIGEST) as part:
        (tmp_path / "runs" / part.name).mkdir()
        (tmp_path / "runs" / part.name / "table").write_text("another's")
        with pytest.raises(OutputError, match="Directory not empty"):
            part.publish(as_latest=True)
    assert (tmp_path / "runs" / part.name / "table").read_text() == "another's"
    assert not (tmp_path / "latest.json").exists()


def test_a_disk_that_refuses_the_pointer_publishes_nothing(tmp_path, monkeypatch):
    first = published(tmp_path)

    def full(*_, **__):
        raise OSError(28, "No space left on device")

    with publish.begin(tmp_path, DIGEST) as part:
        monkeypatch.setattr(Path, "write_text", full)
        with pytest.raises(OutputError, match=re.escape("(No space left on device); nothing was published")):
            part.publish(as_latest=True)
    assert [run.name for run in (tmp_path / "runs").iterdir()] == [first.name]
    assert pointer(tmp_path)["run"] == first.name


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
def test_a_signal_while_a_run_gets_its_name_comes_too_late(number):
    before = signal.getsignal(number)
    with publish.undisturbed():
        signal.raise_signal(number)
    assert signal.getsignal(number) is before


def test_a_run_can_be_published_from_another_thread(tmp_path):
    runs = []
    thread = threading.Thread(target=lambda: runs.append(published(tmp_path)))
    thread.start()
    thread.join()
    assert pointer(tmp_path)["run"] == runs[0].name


@pytest.mark.parametrize("content", ["", "[]", "{}", '{"run": 1}', "\x00"])
def test_a_pointer_that_is_not_ours_is_none(tmp_path, content):
    (tmp_path / "latest.json").write_text(content)
    assert publish.read_latest(tmp_path) is None
