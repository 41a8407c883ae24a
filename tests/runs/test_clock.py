"""Seconds by what they were spent on."""

import itertools

import pytest

from keptair.runs import clock


@pytest.fixture(autouse=True)
def ticking(monkeypatch):
    """A clock that goes on by one second each time it is read."""
    ticks = itertools.count()
    monkeypatch.setattr(clock.time, "perf_counter", lambda: next(ticks))


def test_seconds_of_the_same_name_add_up_and_the_total_stands_last():
    watch = clock.Clock()
    with watch.measure("write"):
        pass
    watch.add({"judge": 0.25, "write": 0.5})
    assert list(watch.each("read", "ab")) == ["a", "b"]
    assert watch.seconds() == {"write": 1.5, "judge": 0.25, "read": 3, "total": 9}
