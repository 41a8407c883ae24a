"""One run from catalogue to published folder."""

from __future__ import annotations

import hashlib
import json
import math
import platform
from collections import Counter
from collections.abc import Callable, Iterable, Iterator, Mapping
from concurrent.futures import Executor
from contextlib import closing, nullcontext
from dataclasses import dataclass, field
from importlib.metadata import version
from pathlib import Path
from typing import Any

import numpy as np

import keptair
from keptair import batches, report
from keptair.batches import Finished
from keptair.catalogue import Catalogue, open_catalogue
from keptair.catalogue.columns import ColumnMap
from keptair.errors import TooManyRejectsError, UsageError
from keptair.runs import counting, output, package
from keptair.runs.clock import Clock
from keptair.runs.publish import Part, begin, writing
from keptair.settings import Settings
from keptair.tables.schema import Table

Progress = Callable[[int, int], None]
MOST_WORKERS_EACH = 4  # workers a processor: more only hold more batches in memory


@dataclass(frozen=True)
class Run:
    """A run that is on disk. `manifest` is the `run` object of its datapackage.json."""

    path: Path
    manifest: dict[str, Any]
    exit_code: int


def run(
    catalogue: str | Path,
    out: str | Path,
    settings: Settings | str | Path | None = None,
    column_map: ColumnMap | str | Path | None = None,
    workers: int | None = None,
    executor: Executor | None = None,
    *,
    progress: Progress | None = None,
) -> Run:
    """Take a catalogue through every stage and publish the run in a folder.

    Parameters
    ----------
    catalogue : path or address (https://, s3://) of the catalogue
    out : folder of runs; made if it is not there
    settings : Settings, or the path of a TOML file; the defaults without
    column_map : the path of a TOML file, or one read already; without, the catalogue has the canonical columns
    workers : batches worked on at the same time; the processors at hand without
    executor : any concurrent.futures.Executor to work on; threads of this process without
    progress : called with rows done and rows to do after each batch

    Returns
    -------
    The run. Its exit_code is 4 where more rows were set aside than `max_rejects`: it is kept, but not made the latest.
    """
    if workers is not None and workers < 1:
        raise UsageError(f"workers = {workers}: should be 1 or more")
    if str(out) == "":
        raise UsageError("out: say in which folder the runs shall be", hint="--out runs")
    clock = Clock()
    chosen = settings if isinstance(settings, Settings) else Settings.read(settings)
    with clock.measure("read"):
        source = open_catalogue(catalogue, column_map)
    tables = output.tables(chosen, source.carried)
    manifest = _known_before(source, chosen)
    at_hand = min(workers or batches.processors(), MOST_WORKERS_EACH * batches.processors())
    with begin(Path(out), _digest(manifest)) as part:
        with nullcontext(executor) if executor else batches.threads(at_hand) as at_work:
            raw = clock.each("read", source.batches(chosen.batch_planets))
            with closing(batches.in_order(raw, chosen, at_work, at_hand)) as finished:
                written = _write_tables(part, tables, _told(finished, source, progress), clock)
        rows = counting.rows(source.rows_read, source.rows_filtered, written.set_aside, written.accepted)
        manifest = {"name": part.name, **manifest, "rows": rows}
        manifest = _describe(part, tables, manifest, written.emptied, chosen, clock)
        too_many = rows["set_aside"] > chosen.max_rejects * (rows["read"] - rows["filtered"])
        path = part.publish(as_latest=not too_many)
    return Run(path, manifest, TooManyRejectsError.exit_code if too_many else 0)


@dataclass
class _Written:
    """How much has gone to disk."""

    accepted: int = 0
    set_aside: int = 0
    emptied: Counter[tuple[str, str]] = field(default_factory=Counter)


def _write_tables(part: Part, tables: Mapping[str, Table], finished: Iterable[Finished], clock: Clock) -> _Written:
    written = _Written()
    with output.opened(part.path, tables) as files:
        for batch in finished:
            clock.add(batch.seconds)
            with clock.measure("write"):
                files.write(batch)
            written.accepted += batch.accepted
            written.set_aside += len(np.unique(batch.rejects["row"]))  # one row may break several rules
            written.emptied.update(batch.emptied)
    return written


def _told(finished: Iterable[Finished], source: Catalogue, progress: Progress | None) -> Iterator[Finished]:
    """The same batches; whoever wants to know is told of each."""
    done = 0
    for batch in finished:
        yield batch
        done += batch.rows
        if progress:
            progress(done, source.rows_read - source.rows_filtered)


def _describe(
    part: Part,
    tables: Mapping[str, Table],
    manifest: dict[str, Any],
    emptied: Mapping[tuple[str, str], int],
    settings: Settings,
    clock: Clock,
) -> dict[str, Any]:
    """Summary, package and report of the tables; the manifest with what they found."""
    with writing(part.out):
        summary = counting.summarise(part.path, tables["planets"], manifest["rows"], emptied)
        package.write_json(part.path / "summary.json", summary)
        manifest |= {"cells_emptied": sum(emptied.values()), "verdicts": summary["verdicts"]}
        package.write(part.path, tables, manifest | {"seconds": clock.seconds()})
        with clock.measure("report"):
            report.write(part.path, settings)
        # again: the report reads the package, and the package lists the report
        manifest["seconds"] = clock.seconds()
        package.write(part.path, tables, manifest)
    return manifest


def _known_before(source: Catalogue, settings: Settings) -> dict[str, Any]:
    """The manifest of a run that has not begun: every key is there, in the order it is published."""
    return {
        "catalogue": {"path": source.source, "bytes": source.bytes, "sha256": source.sha256},
        "column_map": _for_json(source.column_map.as_dict()),
        "remarks": source.remarks,
        "settings": json.loads(settings.model_dump_json()),
        "settings_changed": _changed(settings),
        "versions": {
            "python": platform.python_version(),
            "keptair": keptair.__version__,
            **{library: version(library) for library in ("numpy", "scipy", "pyarrow", "astropy")},
        },
        "rows": {},
        "cells_emptied": 0,
        "verdicts": {},
        "seconds": {},
        "previous": None,
        "changes": None,
    }


def _for_json(value: Any) -> Any:
    """nan and inf, which a map may call missing, as words: JSON has no such numbers."""
    if isinstance(value, Mapping):
        return {key: _for_json(inner) for key, inner in value.items()}
    if isinstance(value, list):
        return [_for_json(inner) for inner in value]
    return str(value) if isinstance(value, float) and not math.isfinite(value) else value


def _digest(manifest: Mapping[str, Any]) -> str:
    """What makes two runs the same: catalogue, map, settings and version."""
    same = [manifest["catalogue"]["sha256"], manifest["column_map"], manifest["settings"], keptair.__version__]
    return hashlib.sha256(json.dumps(same, sort_keys=True).encode()).hexdigest()


def _changed(settings: Settings) -> dict[str, str]:
    """Where each setting that is not the default came from, gases and backgrounds included."""
    mine, built_in = (_flat(each.model_dump(exclude_none=True)) for each in (settings, Settings()))
    names = [*mine, *(name for name in built_in if name not in mine)]
    changed = [name for name in names if name not in mine or name not in built_in or mine[name] != built_in[name]]
    origins = {name: settings.origin(name) for name in changed}
    return {name: "given in Python" if origin == "default" else origin for name, origin in origins.items()}


def _flat(values: Mapping[str, Any], prefix: str = "") -> dict[str, Any]:
    flat: dict[str, Any] = {}
    for name, value in values.items():
        flat |= _flat(value, f"{prefix}{name}.") if isinstance(value, Mapping) else {prefix + name: value}
    return flat
