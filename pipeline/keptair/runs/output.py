"""The tables of a run on their way to disk, batch by batch."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from contextlib import ExitStack, contextmanager, suppress
from dataclasses import dataclass, replace
from pathlib import Path
from typing import IO, Literal

import numpy as np

from keptair.batches import Finished
from keptair.runs.publish import writing
from keptair.settings import Settings
from keptair.tables import schema
from keptair.tables.parquet import Writer
from keptair.tables.schema import Column, Table
from keptair.tables.sheets import Sheet


def tables(settings: Settings, carried: Mapping[str, Literal["number", "text"]]) -> dict[str, Table]:
    """The tables of a run with these settings: a column per gas, and the catalogue's columns taken along."""
    planets = schema.table("planets", {key: gas.title for key, gas in settings.gases.items()})
    along = tuple(
        Column(name, "string" if kind == "text" else "number", "As it stands in the catalogue.", stage="screen")
        for name, kind in carried.items()
    )
    return {
        "planets": replace(planets, columns=planets.columns + along),
        "gases": schema.table("gases"),
        "rejects": schema.table("rejects"),
        "changes": schema.table("changes"),
    }


@dataclass(frozen=True)
class Output:
    """Open files of a run."""

    part: Path
    planets: Writer
    gases: Writer
    rejects: Writer
    rejects_csv: Sheet

    def write(self, finished: Finished) -> None:
        with writing(self.part.parent):
            if finished.planets:
                self.planets.write(finished.planets)
            if finished.gases:
                self.gases.write(finished.gases)
            self.rejects.write(finished.rejects)
            columns = [np.asarray(finished.rejects[name]).tolist() for name in self.rejects.table.names]
            for row in zip(*columns, strict=True):
                self.rejects_csv.write(row)


@contextmanager
def opened(part: Path, described: Mapping[str, Table]) -> Iterator[Output]:
    """Files to write into; whole, with their footers, once this is left without an error."""
    with ExitStack() as at_the_end:
        with writing(part.parent):
            stream = (part / "rejects.csv").open("w", encoding="utf-8", newline="")
            at_the_end.callback(_let_go, stream)
            sheet = Sheet(stream)
            sheet.write(described["rejects"].names)
            writers = {}
            for name, table in described.items():
                writers[name] = Writer(part / f"{name}.parquet", table)
                at_the_end.callback(writers[name].abandon)
        yield Output(part, writers["planets"], writers["gases"], writers["rejects"], sheet)
        with writing(part.parent):
            for writer in writers.values():
                writer.close()
            stream.close()


def _let_go(stream: IO[str]) -> None:
    with suppress(OSError):  # what it could not write is no news: that error is on its way
        stream.close()
