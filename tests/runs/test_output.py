"""Tables on their way to disk."""

import csv

import numpy as np
import pytest

from keptair import Settings
from keptair.batches import Finished
from keptair.runs import output
from keptair.tables import schema

NASTY = ("=1+1", "+1", "-1", "@x", "plain", "a=b", "", '"quoted", with a comma', "two\nlines", "'=x")


def rejects(values):
    count = len(values)
    texts = {name: np.array(values, dtype=object) for name in ("planet_id", "value", "reason")}
    columns = {"column": ["planet_id"] * count, "rule": ["identifier"] * count}
    return {"row": np.arange(count), **texts, **{name: np.array(x, dtype=object) for name, x in columns.items()}}


def test_no_cell_of_the_sheet_is_a_formula_and_every_other_is_as_it_was(tmp_path):
    part = tmp_path / "part"
    part.mkdir()
    with output.opened(part, output.tables(Settings(), {})) as files:
        files.write(Finished(len(NASTY), rejects(NASTY), {}))
    with (part / "rejects.csv").open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    assert list(rows[0]) == list(schema.table("rejects").names)
    shown = [row["planet_id"] for row in rows]
    assert not any(cell.startswith(("=", "+", "-", "@")) for cell in shown)
    assert shown == ["'=1+1", "'+1", "'-1", "'@x", *NASTY[4:]]


def test_columns_taken_along_stand_last():
    table = output.tables(Settings(), {"input_note": "text", "input_year": "number"})["planets"]
    assert table.names[-2:] == ("input_note", "input_year")
    assert [column.storage for column in table.columns[-2:]] == ["text", "float64"]


def test_an_error_of_the_catalogue_is_not_taken_for_one_of_the_disk(tmp_path):
    part = tmp_path / "part"
    part.mkdir()
    with pytest.raises(OSError, match="the catalogue's disk"), output.opened(part, output.tables(Settings(), {})):
        raise OSError(5, "the catalogue's disk")
