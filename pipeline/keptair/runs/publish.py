"""A run on disk is complete or absent: written aside, synced, renamed, and only then made the latest."""

from __future__ import annotations

import errno
import json
import os
import shutil
import signal
import threading
import time
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from keptair.errors import OutputError

PART = ".part-"
LATEST = "latest.json"


@dataclass(frozen=True)
class Part:
    """A run being written: out of sight until `publish`."""

    out: Path
    name: str
    started: datetime

    @property
    def path(self) -> Path:
        return self.out / (PART + self.name)

    def publish(self, as_latest: bool) -> Path:
        """Give the folder its name, and make it the latest run unless told not to; the run's folder."""
        run = self.out / "runs" / self.name
        with writing(self.out):
            for file in self.path.iterdir():
                _sync(file)
            _sync(self.path)
        with undisturbed(), writing(self.out):
            latest = self._prepare_latest() if as_latest else {}
            self.path.rename(run)
            _sync(run.parent)
            for prepared, name in latest.items():
                prepared.replace(self.out / name)
            _sync(self.out)
        return run

    def _prepare_latest(self) -> dict[Path, str]:
        """Link and pointer ready to be renamed, link first: what needs room on the disk is done by then."""
        previous = read_latest(self.out)
        place = f"runs/{self.name}"
        finished = _iso(_now())
        pointer = {
            "run": self.name,
            "path": place,
            "started": _iso(self.started),
            "finished": finished,
            "checked": finished,
            "previous": previous["run"] if previous else None,
        }
        link, file = self.out / f"{PART}latest", self.out / f"{PART}{LATEST}"
        file.write_text(json.dumps(pointer, indent=2) + "\n", encoding="utf-8")
        _sync(file)
        try:
            link.symlink_to(place, target_is_directory=True)
        except (OSError, NotImplementedError):
            return {file: LATEST}  # a file system without links; latest.json is what counts
        return {link: "latest", file: LATEST}


@contextmanager
def begin(out: Path, digest: str) -> Iterator[Part]:
    """An empty folder for a run; whatever stands in it and was not published at the end goes."""
    with writing(out):
        _make_ready(out)
        part = _claim(out, digest)
    try:
        yield part
    finally:
        shutil.rmtree(part.path, ignore_errors=True)


@contextmanager
def writing(folder: Path) -> Iterator[None]:
    """What the disk refuses becomes a sentence about the folder."""
    try:
        yield
    except OSError as error:
        number = error.errno or (errno.ENOENT if isinstance(error, FileNotFoundError) else 0)
        refused = os.strerror(number) if number else str(error)
        raise OutputError(
            f"{folder}: cannot be written ({refused}); nothing was published",
            hint="a folder of your own on a disk with room, as --out DIR",
        ) from error


@contextmanager
def undisturbed() -> Iterator[None]:
    """Between a run's name and its place as the latest no Ctrl-C and no SIGTERM: by then the work is done."""
    if threading.current_thread() is not threading.main_thread():
        yield  # signals only ever reach the main thread
        return
    before = {number: signal.signal(number, _too_late) for number in (signal.SIGINT, signal.SIGTERM)}
    try:
        yield
    finally:
        for number, handler in before.items():
            signal.signal(number, signal.SIG_DFL if handler is None else handler)


def read_latest(out: Path) -> Mapping[str, Any] | None:
    """latest.json of a folder; None where there is none or it is not ours."""
    try:
        pointer = json.loads((out / LATEST).read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return None
    return pointer if isinstance(pointer, dict) and {"run", "path"} <= pointer.keys() else None


def _make_ready(out: Path) -> None:
    """The folders, without what a run that was cut off left behind."""
    (out / "runs").mkdir(parents=True, exist_ok=True)
    for name, in_the_way in (("latest", not (out / "latest").is_symlink()), (LATEST, (out / LATEST).is_dir())):
        if in_the_way and (out / name).exists():
            raise OutputError(
                f"{out / name}: stands where the name of the latest run belongs", hint="move it elsewhere"
            )
    for leftover in out.glob(f"{PART}*"):
        if leftover.is_dir() and not leftover.is_symlink():
            shutil.rmtree(leftover)
        else:
            leftover.unlink()


def _claim(out: Path, digest: str) -> Part:
    while True:
        started = _now()
        part = Part(out, f"{started:%Y%m%dT%H%M%SZ}-{digest[:8]}", started)
        if not (out / "runs" / part.name).exists():
            part.path.mkdir()
            return part
        # the same inputs had a run this very second; the next second's name is free
        time.sleep(1 - started.microsecond / 1e6)


def _too_late(_: int, __: object) -> None:
    """A signal that comes once a run is being named changes nothing."""


def _sync(path: Path) -> None:
    """Have the disk itself hold a file, or a folder's names."""
    if path.is_dir() and not hasattr(os, "O_DIRECTORY"):
        return  # where folders cannot be opened, as on Windows
    descriptor = os.open(path, os.O_RDONLY)
    try:
        os.fsync(descriptor)
    finally:
        os.close(descriptor)


def _now() -> datetime:
    return datetime.now(UTC)


def _iso(moment: datetime) -> str:
    return f"{moment:%Y-%m-%dT%H:%M:%SZ}"
