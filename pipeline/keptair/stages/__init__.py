"""The stages in order: each takes a batch and the settings and gives the batch with more in it."""

from __future__ import annotations

import time
from dataclasses import dataclass

import numpy as np

from keptair.batch import Array, Batch
from keptair.settings import Settings
from keptair.stages import escape, exobase, fill, irradiate, judge, observe, retain
from keptair.stages.gas_rows import gas_rows
from keptair.tables import schema

STAGES = {
    "fill": fill.run,
    "irradiate": irradiate.run,
    "exobase": exobase.run,
    "escape": escape.run,
    "retain": retain.run,
    "judge": judge.run,
    "observe": observe.run,
}


@dataclass(frozen=True)
class Assessed:
    """What is published of a batch: the columns of planets and of gases, and the seconds each stage took."""

    planets: dict[str, Array]
    gases: dict[str, Array]
    seconds: dict[str, float]


def through(batch: Batch, settings: Settings, seconds: dict[str, float] | None = None) -> Batch:
    """A screened batch through every stage."""
    for name, stage in STAGES.items():
        start = time.perf_counter()
        batch = stage(batch, settings)
        if seconds is not None:
            seconds[name] = time.perf_counter() - start
    return batch


def assess(batch: Batch, settings: Settings) -> Assessed:
    """A screened batch through every stage, down to what is published."""
    seconds: dict[str, float] = {}
    table = schema.table("planets", {key: gas.title for key, gas in settings.gases.items()})
    carried = [name for name in batch.columns if name.startswith("input_")]
    done = through(batch, settings, seconds)
    unassessed = ~done.columns["is.assessed"]
    planets = {name: done.columns[name] for name in (*table.names, *carried)}
    for column in table:
        if column.derived_by and column.type == "number" and column.stage in ("exobase", "retain", "judge", "observe"):
            planets[column.name] = np.where(unassessed, np.nan, planets[column.name])
    return Assessed(planets, gas_rows(done, settings), seconds)
