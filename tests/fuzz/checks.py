"""One case read, screened and fingerprinted, and everything about it that should not be."""

from __future__ import annotations

import json
import os
import re
import signal
import sys
import traceback
import unicodedata
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np

from fuzz.case import Case
from keptair.batch import Batch
from keptair.catalogue import Catalogue, ColumnMap, open_catalogue
from keptair.catalogue.checking import check
from keptair.errors import KeptairError
from keptair.settings import Settings
from keptair.stages import screen
from keptair.tables import rules, schema

SECONDS = 10  # a small input may take no longer
MEMORY = 1 << 30  # bytes it may take
LONGEST_MESSAGE = 6000
MOST_BATCHES = 30
HIDDEN = {"Cc", "Cf", "Cs", "Zl", "Zp"}
UNIVERSE_GYR = 13.8
SETTINGS = Settings()


class Hang(BaseException):
    """Too long; no handler of ordinary errors swallows it."""


@dataclass
class Outcome:
    """accepted: rows came out; refused: an error of ours. `unclean` says what should not be, each with what it is."""

    accepted: bool = False
    refusal: str = ""
    unclean: list[str] = field(default_factory=list)

    @property
    def word(self) -> str:
        return "unclean" if self.unclean else "refused" if self.refusal else "accepted"


def attempt(case: Case, folder: Path) -> Outcome:
    """Read a case through; nothing it does gets out of here."""
    outcome = Outcome()
    path = folder / case.name
    path.write_bytes(case.data)
    unraisable: list[str] = []
    before, hook = sys.getrecursionlimit(), sys.unraisablehook
    sys.unraisablehook = lambda found: unraisable.append(
        f"in the background: {found.exc_type.__name__}: {found.exc_value}"
    )
    peak = _Peak()
    try:
        with warnings.catch_warnings(record=True) as caught, _at_most(SECONDS):
            warnings.simplefilter("always")
            outcome.unclean += _read_through(path, _map_of(case, folder), case.rows)
            outcome.accepted = True
    except KeptairError as error:
        outcome.refusal = str(error)
        outcome.unclean += [f"refusal: {wrong}" for wrong in wrong_with_message(outcome.refusal)]
    except Hang:
        outcome.unclean.append(f"hang: more than {SECONDS} s, in {_where(sys.exc_info()[2])}")
    except Exception as error:
        outcome.unclean.append(f"{type(error).__name__} in {_where(error.__traceback__)}: {str(error)[:200]}")
    finally:
        sys.unraisablehook = hook
        sys.setrecursionlimit(before)
        path.unlink()
    outcome.unclean += [
        f"warning: {each.category.__name__} {each.filename}:{each.lineno} {each.message}"[:300] for each in caught
    ]
    outcome.unclean += unraisable
    if (grown := peak.grown()) > MEMORY:
        outcome.unclean.append(f"memory: {grown >> 20} MB")
    return outcome


def wrong_with_message(text: str) -> list[str]:
    """What a message to a user may not be: long, or with anything in it that moves a cursor or turns a line round."""
    wrong = [f"message of {len(text)} characters"] if len(text) > LONGEST_MESSAGE else []
    hidden = {letter for letter in text if letter != "\n" and unicodedata.category(letter) in HIDDEN}
    return wrong + [f"hidden characters in a message: {sorted(map(ascii, hidden))[:5]}"] * bool(hidden)


def _map_of(case: Case, folder: Path) -> Any:
    if not isinstance(case.map, str):
        return case.map
    path = folder / "map.toml"
    path.write_bytes(case.map.encode("utf-8", errors="surrogatepass"))
    return path


def _read_through(path: Path, column_map: Any, rows: int) -> list[str]:
    catalogue = open_catalogue(path, column_map)
    wrong = [f"remark: {each}" for remark in catalogue.remarks for each in wrong_with_message(remark)]
    wrong += _wrong_with_map(catalogue.column_map)
    accepted, set_aside, last = 0, set(), 0
    names: set[str] = set()
    for batch in catalogue.batches(max(rows, catalogue.rows_read // MOST_BATCHES)):
        found = screen.run(batch, SETTINGS)
        numbers = batch.columns["row"]
        if not (np.diff(numbers) > 0).all() or numbers[0] <= last:
            wrong.append("rows out of order")
        last = int(numbers[-1])
        accepted += len(found.batch)
        set_aside.update(found.rejects["row"].tolist())
        wrong += _wrong_with_rejects(found.rejects) + _wrong_with_planets(found.batch, catalogue)
        wrong += ["the same planet_id twice"] * bool(names.intersection(found.batch.columns["planet_id"]))
        names.update(found.batch.columns["planet_id"])
    wrong += ["the same planet_id twice"] * (len(names) != accepted)
    if accepted + len(set_aside) != catalogue.rows_read - catalogue.rows_filtered:
        counts = f"{accepted} + {len(set_aside)} != {catalogue.rows_read} - {catalogue.rows_filtered}"
        wrong.append(f"accounting: {counts}")
    report = check(path, column_map, SETTINGS)
    json.dumps(report.as_dict())
    wrong += [f"check: {each}" for line in report.lines() for each in wrong_with_message(line)]
    if (report.rows["accepted"], report.rows["set_aside"]) != (accepted, len(set_aside)):
        wrong.append(f"accounting: check says {report.rows}, the screen {accepted} and {len(set_aside)}")
    return sorted(set(wrong))


def _wrong_with_map(column_map: ColumnMap) -> list[str]:
    again = ColumnMap.read(json.loads(json.dumps(column_map.as_dict())))
    return (
        []
        if json.dumps(again.as_dict()) == json.dumps(column_map.as_dict())
        else ["a map that changes when it is read again"]
    )


def _wrong_with_rejects(rejects: dict[str, Any]) -> list[str]:
    wrong = []
    for column in schema.table("rejects", {}):
        if column.type == "string":
            wrong += _wrong_with_texts(f"rejects.{column.name}", rejects[column.name])
            if any(len(text) > column.max_length for text in rejects[column.name]):
                wrong.append(f"rejects.{column.name}: too long")
    return wrong


def _wrong_with_planets(batch: Batch, catalogue: Catalogue) -> list[str]:
    columns = batch.columns
    wrong = [f"{name}: not one value a row" for name, values in columns.items() if len(values) != len(batch)]
    for name in schema.measured_inputs():
        wrong += _wrong_with_number(name, columns)
    for column in schema.inputs():
        if column.type == "string":
            name = "catalogue.background" if column.name == "background" else column.name
            wrong += _wrong_with_texts(name, columns[name]) + _wrong_with_words(column, columns[name])
    for name, kind in catalogue.carried.items():
        if kind == "text":
            wrong += _wrong_with_texts(name, columns[name])
        elif np.isinf(columns[name]).any():
            wrong.append(f"{name}: not finite")
    if not all(re.fullmatch("[0-9a-f]{16}", mark) for mark in columns["fingerprint"]):
        wrong.append("fingerprint: not 16 hexadecimal digits")
    return wrong


def _wrong_with_number(name: str, columns: Any) -> list[str]:
    values, plus, minus = columns[f"catalogue.{name}"], columns[f"{name}_err_plus"], columns[f"{name}_err_minus"]
    limit = columns[f"{name}_bound"]
    inside = rules.in_bounds(schema.catalogue()[name], values)
    if name == "stellar_age_gyr":
        inside |= values - np.where(np.isnan(minus), plus, minus) <= UNIVERSE_GYR
    none = np.isnan(values)
    errors = np.concatenate([plus, minus])
    wrong = {
        "out of bounds": ~inside.all(),
        "not finite": np.isinf(values).any(),
        "an error that is none": not (np.isnan(errors) | ((errors > 0) & np.isfinite(errors))).all(),
        "an error or limit of nothing": not (np.isnan(plus) & np.isnan(minus) & (limit == ""))[none].all(),
        "an unknown limit": not np.isin(limit, ("", "upper", "lower")).all(),
    }
    return [f"{name}: {what}" for what, there in wrong.items() if there]


def _wrong_with_words(column: schema.Column, texts: Any) -> list[str]:
    wrong = {
        "too long": any(column.max_length and len(text) > column.max_length for text in texts),
        "an unknown word": bool(column.enum) and not set(texts) <= {"", *column.enum},
        "empty": column.name == "planet_id" and "" in texts,
        "no date": column.name == "updated" and any(text and rules.timestamp(text) is None for text in texts),
        "no such background": column.name == "background" and not set(texts) <= {"", *SETTINGS.backgrounds},
    }
    return [f"{column.name}: {what}" for what, there in wrong.items() if there]


def _wrong_with_texts(name: str, texts: Any) -> list[str]:
    """Text has to be text, and such as can be written."""
    try:
        "".join(texts).encode("utf-8")
    except (TypeError, UnicodeEncodeError) as error:
        return [f"{name}: {error}"]
    return []


@contextmanager
def _at_most(seconds: float) -> Iterator[None]:
    def stop(*_: Any) -> None:
        raise Hang

    before = signal.signal(signal.SIGALRM, stop)
    signal.setitimer(signal.ITIMER_REAL, seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0)
        signal.signal(signal.SIGALRM, before)


class _Peak:
    """How far memory rises from here on; where the kernel does not say, not at all."""

    def __init__(self) -> None:
        try:
            Path("/proc/self/clear_refs").write_text("5", encoding="ascii")
            self.start = self._highest()
        except OSError:
            self.start = -1

    def grown(self) -> int:
        return 0 if self.start < 0 else self._highest() - self.start

    @staticmethod
    def _highest() -> int:
        status = Path("/proc/self/status").read_text(encoding="ascii")
        return int(re.search(r"VmHWM:\s+(\d+)", status)[1]) << 10  # type: ignore[index]


def _where(trace: Any) -> str:
    """The innermost line of ours, and the innermost line of all."""
    frames = traceback.extract_tb(trace)
    ours = [frame for frame in frames if f"{os.sep}keptair{os.sep}" in frame.filename]
    last = [*ours[-1:], *frames[-1:]]
    return " / ".join(dict.fromkeys(f"{Path(frame.filename).name}:{frame.lineno} {frame.name}" for frame in last))
