"""Delimited text as people really write it."""

from __future__ import annotations

import gzip
import os
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from keptair.catalogue import open_catalogue
from keptair.errors import CatalogueError

Write = Callable[[str | bytes], Path]
HEADER = "planet_id,host_id,planet_radius_rearth\n"


def read(path: Path, column_map: object = None) -> tuple[list[int], list[str], list[float]]:
    """Rows, identifiers and radii."""
    batches = list(open_catalogue(path, column_map).batches(10_000))  # type: ignore[arg-type]
    parts = [
        [value for batch in batches for value in batch.columns[name].tolist()]
        for name in ("row", "read.planet_id", "read.planet_radius_rearth")
    ]
    return parts[0], parts[1], parts[2]


@pytest.mark.parametrize("newline", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("mark", ["", "\ufeff"])
@pytest.mark.parametrize("delimiter", [",", "\t", ";", "|"])
def test_newlines_byte_order_marks_and_delimiters_make_no_difference(
    write_csv: Write, newline: str, mark: str, delimiter: str
) -> None:
    text = (mark + HEADER + 'a,"x",1\n"b",,2.5\n').replace(",", delimiter).replace("\n", newline)
    assert read(write_csv(text)) == ([1, 2], ["a", "b"], [1.0, 2.5])


def test_comment_lines_before_the_header_and_between_rows_are_skipped_but_not_inside_a_cell(write_csv: Write) -> None:
    text = '# made "today\n#\n' + HEADER + 'a,x,1\n# b,x,9\n"c\n# not a comment",x,3\n'
    path = write_csv(text)
    assert read(path) == ([1, 2], ["a", "c\n# not a comment"], [1.0, 3.0])
    assert open_catalogue(path).remarks == ["skipped after the header: lines that start with # (1)"]


def test_another_comment_mark_comes_from_the_map(write_csv: Write) -> None:
    path = write_csv("% one\n" + HEADER + "#1,x,1\n%2,x,1\n")
    assert read(path, {"file": {"comment": "%"}}) == ([1], ["#1"], [1.0])


def test_a_header_that_stands_there_again_is_no_planet(write_csv: Write) -> None:
    path = write_csv(HEADER + "a,x,1\n" + HEADER + "b,x,2\n")
    assert read(path) == ([1, 2], ["a", "b"], [1.0, 2.0])
    assert open_catalogue(path).remarks == ["the header stands 2 times in the file; the later ones were skipped"]


def test_blank_lines_are_no_rows(write_csv: Write) -> None:
    assert read(write_csv("\n\n" + HEADER + "\n\na,x,1\n\nb,x,2\n\n")) == ([1, 2], ["a", "b"], [1.0, 2.0])


def test_latin_1_is_read_when_it_is_not_utf_8_and_said(write_csv: Write) -> None:
    path = write_csv((HEADER + "Caf\xe9,x,1\n").encode("latin-1"))
    assert read(path)[1] == ["Caf\xe9"]
    assert open_catalogue(path).remarks == ["the file is not UTF-8; it was read as latin-1"]


def test_utf_16_is_read(write_csv: Write) -> None:
    assert read(write_csv((HEADER + "Caf\xe9,x,1\n").encode("utf-16"))) == ([1], ["Caf\xe9"], [1.0])


def test_rows_with_the_wrong_number_of_cells_stay_at_their_row_with_their_identifier(write_csv: Write) -> None:
    path = write_csv(HEADER + 'a,x,1\nb,x\nc,x,3\n"d\ne",x,4,5\nf\n"g",x,"7"\n')
    [batch] = open_catalogue(path).batches(100)
    assert batch.columns["row"].tolist() == [1, 2, 3, 4, 5, 6]
    assert batch.columns["wrong_cells"].tolist() == [0, 2, 0, 4, 1, 0]
    assert batch.columns["read.planet_id"].tolist() == ["a", "b", "c", "d\ne", "f", "g"]
    np.testing.assert_array_equal(batch.columns["read.planet_radius_rearth"], [1.0, np.nan, 3.0, np.nan, np.nan, 7.0])
    assert batch.columns["read.host_id"].tolist() == ["x", "", "x", "", "", "x"]


def test_bad_rows_keep_their_places_over_many_blocks(write_csv: Write, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("keptair.catalogue.delimited.BLOCK", 200)
    lines = [f"p{row},x,{row}" if row % 7 else f"p{row},x" for row in range(1, 400)]
    path = write_csv(HEADER + "\n".join(lines))
    rows, names, radii = read(path)
    assert rows == list(range(1, 400))
    assert names == [f"p{row}" for row in rows]
    assert [radius for row, radius in zip(rows, radii, strict=True) if row % 7] == [row for row in rows if row % 7]


def test_a_file_of_bad_rows_alone_is_read(write_csv: Write) -> None:
    assert read(write_csv(HEADER + "a\nb\n"))[:2] == ([1, 2], ["a", "b"])


def test_a_header_alone_is_a_catalogue_of_no_rows(write_csv: Write) -> None:
    catalogue = open_catalogue(write_csv(HEADER))
    assert (catalogue.rows_read, list(catalogue.batches(10))) == (0, [])


@pytest.mark.parametrize("content", ["", "\n\n", "# only a comment\n"])
def test_an_empty_file_is_an_error(write_csv: Write, content: str) -> None:
    with pytest.raises(CatalogueError, match="the file is empty"):
        open_catalogue(write_csv(content))


def test_repeated_names_matter_only_where_they_are_read(write_csv: Write) -> None:
    path = write_csv("planet_id,note,note,planet_radius_rearth\na,1,2,3\n")
    assert read(path) == ([1], ["a"], [3.0])
    with pytest.raises(CatalogueError, match="stands 2 times in the header; say which by its position"):
        open_catalogue(path, {"columns": {"host_id": {"from": "note"}}})
    [batch] = open_catalogue(path, {"columns": {"host_id": {"from": 3}}}).batches(10)
    assert batch.columns["read.host_id"].tolist() == ["2"]


def test_a_quote_never_closed_is_an_error_or_a_row_set_aside_but_never_a_traceback(write_csv: Write) -> None:
    rows, names, _ = read(write_csv(HEADER + 'a,x,1\n"b,x,2\nc,x,3\n'))
    assert (rows, names[0]) == ([1, 2], "a")
    with pytest.raises(CatalogueError, match="is a quote"):
        read(write_csv(HEADER + 'a,x,1\n"b,x,2\n' + "c,x,3\n" * 2_000_000))


def test_a_million_characters_in_a_cell_are_read(write_csv: Write) -> None:
    name = "x" * 1_000_000
    assert read(write_csv(HEADER + f"{name},x,1\n"))[1] == [name]


def test_a_gzip_file_that_ends_too_early_or_is_damaged_is_one_sentence(write_csv: Write) -> None:
    whole = gzip.compress((HEADER + "a,x,1\n" * 1000).encode())
    with pytest.raises(CatalogueError, match="ends too early"):
        open_catalogue(write_csv(whole[:-20]))
    with pytest.raises(CatalogueError, match="damaged"):
        open_catalogue(write_csv(whole[:40] + b"\xff\xff\xff\xff" + whole[44:]))


def test_several_gzip_members_are_one_file(write_csv: Write) -> None:
    path = write_csv(gzip.compress(HEADER.encode()) + gzip.compress(b"a,x,1\n"))
    assert read(path) == ([1], ["a"], [1.0])


def test_a_gzip_bomb_is_stopped(write_csv: Write, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("keptair.catalogue.streams.INFLATION_FLOOR", 1 << 20)
    path = write_csv(gzip.compress(HEADER.encode() + b"a,x,1\n" + b"\n" * (64 << 20)))
    with pytest.raises(CatalogueError, match="inflates to more than"):
        open_catalogue(path)


@pytest.mark.parametrize(
    ("content", "reason"),
    [(b"PK\x03\x04rest", "zip archive"), (b"<!DOCTYPE html><p>", "web page"), (b"\x89HDF\r\n", "HDF5")],
)
def test_what_is_no_table_is_named(write_csv: Write, content: bytes, reason: str) -> None:
    with pytest.raises(CatalogueError, match=reason):
        open_catalogue(write_csv(content))


def test_a_line_without_end_is_stopped_before_it_fills_the_memory(
    write_csv: Write, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("keptair.catalogue.streams.LONGEST_LINE", 2 << 20)
    for text in ("x" * (5 << 20), HEADER + "a,x,1\n" + "y" * (5 << 20)):
        with pytest.raises(CatalogueError, match="a line is longer than 2 MB"):
            open_catalogue(write_csv(text))


def test_a_pipe_is_refused_before_anything_is_read_from_it(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe.csv")
    with pytest.raises(CatalogueError, match="is neither a file nor a folder"):
        open_catalogue(tmp_path / "pipe.csv")
