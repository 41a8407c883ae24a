"""Seconds spent, by what they were spent on."""

from __future__ import annotations

import time
from collections import defaultdict
from collections.abc import Iterable, Iterator, Mapping
from contextlib import contextmanager
from typing import TypeVar

Item = TypeVar("Item")


class Clock:
    """Adds up seconds. Stages run side by side, so their sum may exceed `total`."""

    def __init__(self) -> None:
        self._began = time.perf_counter()
        self._spent: dict[str, float] = defaultdict(float)

    @contextmanager
    def measure(self, name: str) -> Iterator[None]:
        began = time.perf_counter()
        try:
            yield
        finally:
            self._spent[name] += time.perf_counter() - began

    def each(self, name: str, items: Iterable[Item]) -> Iterator[Item]:
        """The same items; the wait for each of them counts."""
        source = iter(items)
        while True:
            with self.measure(name):
                try:
                    item = next(source)
                except StopIteration:
                    return
            yield item

    def add(self, seconds: Mapping[str, float]) -> None:
        for name, spent in seconds.items():
            self._spent[name] += spent

    def seconds(self) -> dict[str, float]:
        """To the millisecond, in the order things were first done, the total so far last."""
        return {name: round(spent, 3) for name, spent in [*self._spent.items(), ("total", self.total())]}

    def total(self) -> float:
        return time.perf_counter() - self._began
