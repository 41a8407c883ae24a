"""summary.json against its tables."""

import json
from collections import Counter

import pytest

import keptair
from keptair.runs import counting
from keptair.tables import schema


@pytest.fixture(scope="module")
def summary(finished):
    return json.loads((finished.run.path / "summary.json").read_text(encoding="utf-8"))


def test_it_holds_counts_only(summary):
    def leaves(value):
        return [leaf for inner in value.values() for leaf in leaves(inner)] if isinstance(value, dict) else [value]

    assert all(isinstance(leaf, int) for leaf in leaves(summary))


def test_rows_rules_and_emptied_cells_are_those_of_the_catalogue(summary):
    assert summary["rows"] == {"read": 7, "filtered": 0, "set_aside": 2, "accepted": 5, "reused": 0}
    assert summary["rejects"] == {"identifier": 1, "duplicate": 1, "cells": 0}
    assert {column: sum(rules.values()) for column, rules in summary["cells_emptied"].items()} == {"j_mag": 1}


@pytest.mark.parametrize(
    ("counted", "column"),
    [("verdicts", "verdict"), ("verdict_reasons", "verdict_reason"), ("backgrounds", "background")],
)
def test_words_are_counted_as_they_stand_in_the_table(finished, summary, counted, column):
    words = Counter(word for word in keptair.load(finished.run.path)[column] if word)
    assert {word: count for word, count in summary[counted].items() if count} == words


def test_words_nobody_has_are_counted_too(summary):
    assert list(summary["verdicts"]) == ["envelope", "secondary", "bare", "undecided", "unassessed"]
    assert list(summary["flags"]) == [flag.name for flag in schema.flags()]


def test_flags_are_counted_as_their_names_stand_in_the_table(finished, summary):
    names = Counter(name for names in keptair.load(finished.run.path)["flag_names"] for name in names.split())
    assert {name: count for name, count in summary["flags"].items() if count} == names
    assert names["cell_emptied"] == 1


def test_sources_of_every_input_are_counted(finished, summary):
    planets = keptair.load(finished.run.path)
    assert list(summary["sources"]) == list(schema.measured_inputs())
    for name, sources in summary["sources"].items():
        assert sources == Counter(source for source in planets[f"{name}_source"] if source)


def test_a_row_that_went_missing_is_no_small_matter():
    with pytest.raises(RuntimeError, match="7 rows read, but 1 filtered"):
        counting.rows(7, 1, 2, 3)
