"""What a table on disk looks like to those who read it."""

import warnings
from dataclasses import replace

import numpy as np
import pyarrow as pa
import pyarrow.parquet as pq
import pytest
from astropy import units
from astropy.table import QTable, Table
from astropy.units import Quantity
from hypothesis import given, settings
from hypothesis import strategies as st

from keptair.tables import parquet, schema
from keptair.tables.parquet import ROW_GROUP, Writer

PUBLISHED = ("planets", "gases", "rejects", "changes")
READERS = ("parquet", "parquet.votable")


def made_up(table, count):
    """Rows that obey the schema: words of the enum, bounds kept, every third number missing."""
    numbers = np.arange(count)
    columns = {}
    for column in table:
        if column.storage == "text":
            words = column.enum or ("", "α Cen", "plain")
            columns[column.name] = np.array([words[number % len(words)] for number in numbers], dtype=object)
        elif column.storage == "int64":
            columns[column.name] = numbers % 2
        else:
            columns[column.name] = np.where(numbers % 3 == 0, np.nan, 0.25)
    return columns


def written(path, table, *pieces):
    writer = Writer(path, table)
    for piece in pieces:
        writer.write(piece)
    writer.close()
    return path


@pytest.fixture
def small():
    """A number of each storage and a text."""
    return schema.Table(
        "small",
        "Small",
        "A table for tests.",
        (),
        (
            schema.Column("name", "string", "Name.", max_length=4),
            schema.Column("count", "integer", "Count."),
            schema.Column("given", "number", "As given.", unit="earthRad", ucd="phys.size.radius"),
            schema.Column("derived", "number", "Worked out.", unit="m s-2", derived_by="keptair.physics.bulk"),
        ),
    )


def row(name="a", count=1, given=1.0, derived=1.0):
    return {
        "name": np.array([name], dtype=object),
        "count": np.array([count]),
        "given": np.array([given]),
        "derived": np.array([derived]),
    }


@pytest.mark.parametrize("name", PUBLISHED)
@pytest.mark.parametrize("count", [0, 1, 7])
@pytest.mark.parametrize("reader", READERS)
def test_every_table_opens_silently_in_astropy(tmp_path, name, count, reader):
    table = schema.table(name)
    file = written(tmp_path / "t.parquet", table, made_up(table, count))
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        read = Table.read(file, format=reader)
    assert len(read) == count
    assert tuple(read.colnames) == table.names


@pytest.mark.parametrize("name", PUBLISHED)
@pytest.mark.parametrize("reader", READERS)
def test_every_unit_and_description_reaches_astropy(tmp_path, name, reader):
    table = schema.table(name)
    read = Table.read(written(tmp_path / "t.parquet", table, made_up(table, 2)), format=reader)
    for column in table:
        said = read[column.name]
        assert said.description.startswith(column.description)
        if column.unit:
            assert said.unit == units.Unit(column.unit)
            assert said.unit.is_equivalent(units.Unit(column.unit))
        else:
            assert said.unit is None


def test_units_convert(tmp_path):
    table = schema.table("planets")
    read = QTable.read(written(tmp_path / "t.parquet", table, made_up(table, 2)), format="parquet")
    # IAU 2015 Resolution B3: nominal equatorial radius of the Earth 6378.1 km
    assert read["planet_radius_rearth"][1].to_value(units.km) == pytest.approx(0.25 * 6378.1)
    assert read["surface_gravity_m_s2"][1].to_value(units.cm / units.s**2) == pytest.approx(25.0)
    assert isinstance(read["j_mag"], Quantity)


@pytest.mark.parametrize("name", PUBLISHED)
def test_every_table_opens_in_pandas_with_its_types(tmp_path, name):
    import pandas as pd

    table = schema.table(name)
    frame = pd.read_parquet(written(tmp_path / "t.parquet", table, made_up(table, 4)))
    assert len(frame) == 4
    for column in table:
        if column.storage == "text":
            assert not frame[column.name].isna().any()
        else:
            assert frame[column.name].dtype == column.storage


def test_units_meanings_and_ucds_stand_with_each_arrow_field(small, tmp_path):
    fields = pq.read_schema(written(tmp_path / "t.parquet", small, row()))
    assert fields.field("given").metadata == {
        b"unit": b"earthRad",
        b"description": b"As given.",
        b"ucd": b"phys.size.radius",
    }
    assert fields.field("name").metadata == {b"description": b"Name."}


def test_the_votable_names_every_column_in_order_and_leaves_earth_units_to_the_words(small, tmp_path):
    from xml.etree import ElementTree

    footer = pq.ParquetFile(written(tmp_path / "t.parquet", small, row())).metadata.metadata
    assert footer[b"IVOA.VOTable-Parquet.version"] == b"1.0"
    fields = ElementTree.fromstring(footer[b"IVOA.VOTable-Parquet.content"]).findall(".//{*}FIELD")
    assert [field.get("name") for field in fields] == ["name", "count", "given", "derived"]
    assert [field.get("datatype") for field in fields] == ["unicodeChar", "long", "double", "float"]
    assert fields[0].get("arraysize") == "4"
    assert fields[2].get("unit") is None
    assert fields[2].findtext("{*}DESCRIPTION") == "As given. Unit: earthRad."
    assert fields[3].get("unit") == "m.s**-2"  # VOUnits 1.0


def test_texts_and_whole_numbers_cannot_be_null_and_numbers_can(small, tmp_path):
    read = pq.read_table(written(tmp_path / "t.parquet", small, row(given=np.nan, derived=np.nan)))
    assert [field.nullable for field in read.schema] == [False, False, True, True]
    assert read.to_pylist() == [{"name": "a", "count": 1, "given": None, "derived": None}]


@pytest.mark.parametrize("infinite", [np.inf, -np.inf])
def test_infinite_numbers_are_null(small, infinite):
    assert parquet.to_arrow(row(given=infinite, derived=infinite), small).to_pylist() == [
        {"name": "a", "count": 1, "given": None, "derived": None}
    ]


@pytest.mark.parametrize("value", [9e-38, -9e-38, 1e-300, 5e-324])
def test_derived_numbers_too_small_for_seven_digits_are_zero_and_given_ones_stay(small, value):
    read = parquet.to_arrow(row(given=value, derived=value), small).to_pylist()[0]
    assert read["derived"] == 0.0
    assert read["given"] == value


def test_derived_numbers_too_large_for_their_type_are_the_largest_there_is(small):
    largest = parquet.to_arrow(row(derived=1e300), small)["derived"][0].as_py()
    assert largest == pytest.approx(3.4028235e38)  # IEEE 754 single precision


@given(st.floats(min_value=1e-36, max_value=1e38))
def test_derived_numbers_keep_seven_digits(value):
    column = schema.Column("derived", "number", "Worked out.", derived_by="keptair.physics.bulk")
    table = schema.Table("one", "One", "One column.", (), (column,))
    assert parquet.to_arrow({"derived": np.array([value])}, table)["derived"][0].as_py() == pytest.approx(
        value, rel=1e-7
    )


def test_a_text_that_is_missing_is_refused(small):
    with pytest.raises(ValueError, match="name: 1 texts are missing"):
        parquet.to_arrow(row(name=None), small)


def test_columns_must_be_those_of_the_schema(small):
    columns = row()
    columns["other"] = columns.pop("given")
    with pytest.raises(ValueError, match=r"missing: \['given'\]; not in the schema: \['other'\]"):
        parquet.to_arrow(columns, small)


def test_a_whole_number_that_is_a_float_is_refused(small):
    with pytest.raises(TypeError, match="safe"):
        parquet.to_arrow(row(count=1.5), small)


def test_carried_texts_longer_than_expected_are_not_cut_in_astropy(small, tmp_path):
    carried = replace(small, columns=(*small.columns, schema.Column("input_note", "string", "Carried.")))
    notes = ["short", "long enough to be cut", "é" * 300]
    pieces = [{**row(), "input_note": np.array([note], dtype=object)} for note in notes]
    file = written(tmp_path / "t.parquet", carried, *pieces)
    for reader in READERS:
        assert list(Table.read(file, format=reader)["input_note"]) == notes


@pytest.fixture(scope="module")
def many():
    """More than two row groups."""
    count = 2 * ROW_GROUP + 777
    numbers = np.arange(count)
    return {
        "name": np.array([f"p{number % 997}" for number in numbers], dtype=object),
        "count": numbers,
        "given": np.where(numbers % 5 == 0, np.nan, numbers / 7),
        "derived": np.sqrt(numbers),
    }


def cut(columns, sizes):
    """Pieces of these sizes, the last one taking the rest."""
    edges = np.minimum(np.cumsum([0, *sizes]), len(columns["name"]))
    for start, end in zip(edges, [*edges[1:], len(columns["name"])], strict=True):
        yield {name: values[start:end] for name, values in columns.items()}


def test_rows_come_in_groups_of_65536_whatever_their_pieces(small, many, tmp_path):
    about = pq.ParquetFile(written(tmp_path / "t.parquet", small, *cut(many, [1000] * 131))).metadata
    assert [about.row_group(number).num_rows for number in range(about.num_row_groups)] == [65_536, 65_536, 777]
    assert pq.read_table(tmp_path / "t.parquet")["count"].to_pylist() == list(range(2 * 65_536 + 777))


@settings(max_examples=8, deadline=None)
@given(sizes=st.lists(st.integers(0, 90_000), max_size=5))
def test_any_cutting_gives_the_same_bytes(tmp_path_factory, many, sizes):
    table = schema.Table(
        "small",
        "Small",
        "A table for tests.",
        (),
        (
            schema.Column("name", "string", "Name."),
            schema.Column("count", "integer", "Count."),
            schema.Column("given", "number", "As given."),
            schema.Column("derived", "number", "Worked out.", derived_by="keptair.physics.bulk"),
        ),
    )
    folder = tmp_path_factory.mktemp("cut")
    whole = written(folder / "whole.parquet", table, many).read_bytes()
    assert written(folder / "cut.parquet", table, *cut(many, sizes)).read_bytes() == whole


def test_a_table_of_no_rows_keeps_its_types(tmp_path):
    table = schema.table("gases")
    read = pq.read_table(written(tmp_path / "t.parquet", table))
    assert read.num_rows == 0
    assert read.schema.field("jeans_parameter").type == pa.float32()


def test_an_abandoned_file_lets_go_of_the_disk(small, tmp_path):
    writer = Writer(tmp_path / "t.parquet", small)
    writer.write(row())
    writer.abandon()
    writer.abandon()
    assert pq.read_table(tmp_path / "t.parquet").num_rows == 0
