"""Maps the batches of a catalogue over an executor and hands them back in catalogue order."""

from __future__ import annotations

import os
import time
from collections import deque
from collections.abc import Generator, Iterable, Iterator, Mapping
from concurrent.futures import Executor, Future, ThreadPoolExecutor
from contextlib import contextmanager
from dataclasses import dataclass, field
from typing import Any

from numpy.typing import NDArray

from keptair import stages
from keptair.batch import Batch
from keptair.settings import Settings
from keptair.stages import screen

Columns = Mapping[str, NDArray[Any]]
AHEAD = 3  # batches per worker that wait or are under way: enough that none idles, few enough to stay small


@dataclass(frozen=True)
class Finished:
    """What became of one batch. `planets` and `gases` are empty where every row was set aside."""

    rows: int
    rejects: Columns
    emptied: Mapping[tuple[str, str], int]
    planets: Columns = field(default_factory=dict)
    gases: Columns = field(default_factory=dict)
    seconds: Mapping[str, float] = field(default_factory=dict)

    @property
    def accepted(self) -> int:
        return len(self.planets["planet_id"]) if self.planets else 0


def work_through(batch: Batch, settings: Settings) -> Finished:
    """Take one batch from the catalogue's columns to the published ones.

    At the top of its module and free of outside state, so that any executor can send it anywhere.
    """
    began = time.perf_counter()
    screened = screen.run(batch, settings)
    seconds = {"screen": time.perf_counter() - began}
    if not len(screened.batch):
        return Finished(len(batch), screened.rejects, screened.emptied, seconds=seconds)
    assessed = stages.assess(screened.batch, settings)
    seconds |= assessed.seconds
    return Finished(len(batch), screened.rejects, screened.emptied, assessed.planets, assessed.gases, seconds)


def in_order(
    batches: Iterable[Batch], settings: Settings, executor: Executor, workers: int
) -> Generator[Finished, None, None]:
    """Every batch worked through, in the order they come, however the executor takes turns."""
    under_way: deque[tuple[str, Future[Finished]]] = deque()
    try:
        for batch in batches:
            rows = f"rows {batch.columns['row'][0]} to {batch.columns['row'][-1]}"
            under_way.append((rows, executor.submit(work_through, batch, settings)))
            if len(under_way) >= AHEAD * workers:
                yield _result(*under_way.popleft())
        while under_way:
            yield _result(*under_way.popleft())
    finally:
        for _, future in under_way:
            future.cancel()


@contextmanager
def threads(workers: int) -> Iterator[Executor]:
    """The executor of one machine. When stopped it drops what waits and does not wait for what runs."""
    executor = ThreadPoolExecutor(workers, thread_name_prefix="keptair")
    try:
        yield executor
    except BaseException:
        executor.shutdown(wait=False, cancel_futures=True)
        raise
    executor.shutdown()


def processors() -> int:
    """Processors this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


def _result(rows: str, future: Future[Finished]) -> Finished:
    try:
        return future.result()
    except Exception as error:
        error.add_note(f"{rows} of the catalogue")
        raise
