"""Batches on their way through an executor."""

import pickle
import threading
import time
from concurrent.futures import Executor, Future
from types import SimpleNamespace

import numpy as np
import pytest

from keptair import Settings, batches
from keptair.batch import Batch


class AtOnce(Executor):
    """Works on everything when it is handed in, and counts."""

    def __init__(self):
        self.handed_in = 0

    def submit(self, function, /, *arguments, **named):
        self.handed_in += 1
        future = Future()
        try:
            future.set_result(function(*arguments, **named))
        except Exception as error:
            future.set_exception(error)
        return future


def batch(*rows):
    return Batch({"row": np.array(rows)})


@pytest.fixture
def stand_ins(monkeypatch):
    """Screen and stages that take their time and touch nothing: odd rows are set aside."""

    def screen(batch, _):
        rows = batch.columns["row"]
        even = rows % 2 == 0
        return SimpleNamespace(batch=batch.take(even), rejects={"row": rows[~even]}, emptied={("j_mag", "bounds"): 1})

    def assess(batch, _):
        first = batch.columns["row"][0]
        time.sleep(0.02 if first % 4 == 0 else 0)
        if first == 98:
            raise ArithmeticError("a stage failed")
        names = np.array([f"p{row}" for row in batch.columns["row"]], dtype=object)
        return SimpleNamespace(planets={"planet_id": names}, gases={}, seconds={"judge": 1.0})

    monkeypatch.setattr(batches.screen, "run", screen)
    monkeypatch.setattr(batches.stages, "assess", assess)


@pytest.mark.usefixtures("stand_ins")
def test_results_come_in_catalogue_order_however_long_each_takes():
    cut = [batch(2 * number, 2 * number + 1) for number in range(1, 20)]
    with batches.threads(3) as executor:
        finished = list(batches.in_order(cut, Settings(), executor, 3))
    assert [list(done.planets["planet_id"]) for done in finished] == [[f"p{2 * number}"] for number in range(1, 20)]
    assert [list(done.rejects["row"]) for done in finished] == [[2 * number + 1] for number in range(1, 20)]


@pytest.mark.usefixtures("stand_ins")
def test_only_a_few_batches_are_under_way_at_a_time():
    executor = AtOnce()
    taken = 0
    for _ in batches.in_order((batch(2 * number) for number in range(1, 40)), Settings(), executor, workers=2):
        taken += 1
        assert executor.handed_in - taken < batches.AHEAD * 2
    assert taken == 39


@pytest.mark.usefixtures("stand_ins")
def test_a_batch_set_aside_whole_has_no_planets():
    done = batches.work_through(batch(1, 3, 5), Settings())
    assert done.accepted == 0
    assert done.rows == 3
    assert list(done.rejects["row"]) == [1, 3, 5]
    assert list(done.seconds) == ["screen"]


@pytest.mark.usefixtures("stand_ins")
def test_a_stage_that_fails_says_in_which_rows():
    with pytest.raises(ArithmeticError) as failed:
        list(batches.in_order([batch(2, 4), batch(98, 99)], Settings(), AtOnce(), 1))
    assert failed.value.__notes__ == ["rows 98 to 99 of the catalogue"]


@pytest.mark.usefixtures("stand_ins")
def test_what_waits_is_dropped_when_the_rest_is_not_wanted():
    go_on = threading.Event()
    with batches.threads(1) as executor:
        blocked = executor.submit(go_on.wait)
        finished = batches.in_order([batch(2), batch(4), batch(6)], Settings(), executor, 1)
        later = threading.Timer(0.05, go_on.set)
        later.start()
        next(finished)
        finished.close()
        later.join()
    assert blocked.result()


def test_any_executor_can_take_the_work():
    assert pickle.loads(pickle.dumps(batches.work_through)) is batches.work_through
    settings = pickle.loads(pickle.dumps(Settings(draws=256)))
    assert settings == Settings(draws=256)


def test_there_is_a_processor():
    assert batches.processors() >= 1
