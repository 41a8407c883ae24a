"""Formats with units and types of their own: the unit in the file wins, missing is missing, nothing else is opened."""

from __future__ import annotations

import gzip
import warnings
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.parquet as pq
import pytest
from astropy.io import fits
from astropy.table import MaskedColumn, Table

from keptair.catalogue import open_catalogue
from keptair.errors import CatalogueError, ColumnMapError

NAMES = ["Asha b", "Asha c", "Bron b"]
# nominal equatorial radii of Jupiter and Earth, IAU 2015 Resolution B3
JUPITER_IN_EARTH_RADII = 7.1492e7 / 6.3781e6


def survey(radius_unit: str = "jupiterRad") -> Table:
    """Three planets; the second has no radius, the first no count."""
    table = Table()
    table["planet_id"] = NAMES
    table["planet_radius_rearth"] = MaskedColumn([1.0, 9.0, 0.5], mask=[False, True, False], unit=radius_unit)
    table["transits"] = ["yes", "", "no"]
    table["count"] = MaskedColumn([9, 2, 3], mask=[True, False, False])
    return table


def as_votable(path: Path) -> None:
    document = VOTABLE.replace("UNIT", "jupiterRad")
    path.write_text(document)


def as_binary_votable(path: Path) -> None:
    survey().write(path, format="votable", tabledata_format="binary2")


def as_fits(path: Path) -> None:
    columns = [
        fits.Column("planet_id", "10A", array=NAMES),
        fits.Column("planet_radius_rearth", "D", unit="Rjup", array=np.array([1.0, np.nan, 0.5])),
        fits.Column("transits", "3A", array=["yes", "", "no"]),
        fits.Column("count", "J", null=-9, array=np.array([-9, 2, 3])),
    ]
    image = fits.PrimaryHDU(np.zeros((2, 2)))
    fits.HDUList([image, fits.BinTableHDU.from_columns(columns)]).writeto(path)


def as_ecsv(path: Path) -> None:
    survey().write(path, format="ascii.ecsv")


def as_ecsv_with_commas(path: Path) -> None:
    survey().write(path, format="ascii.ecsv", delimiter=",")


def as_ipac(path: Path) -> None:
    survey().write(path, format="ascii.ipac")


def as_journal_table(path: Path) -> None:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        survey().write(path, format="ascii.mrt")


def as_astropy_parquet(path: Path) -> None:
    survey().write(path, format="parquet")


def as_votable_in_parquet(path: Path) -> None:
    """Units only in the VOTable of the footer."""
    columns = {"planet_id": NAMES, "planet_radius_rearth": [1.0, None, 0.5], "transits": ["yes", "", "no"]}
    head = VOTABLE.replace("UNIT", "jupiterRad").split("<DATA>")[0] + "</TABLE></RESOURCE></VOTABLE>"
    table = pa.table(columns | {"count": [None, 2, 3]})
    pq.write_table(table.replace_schema_metadata({"IVOA.VOTable-Parquet.content": head}), path)


def as_arrow_parquet(path: Path) -> None:
    """Units in the metadata of the fields."""
    radius = pa.field("planet_radius_rearth", pa.float64(), metadata={"unit": "jupiterRad"})
    fields = [pa.field("planet_id", pa.large_string()), radius, ("transits", pa.dictionary(pa.int8(), pa.string()))]
    arrays = [NAMES, [1.0, None, 0.5], pa.array(["yes", "", "no"]).dictionary_encode(), [None, 2, 3]]
    schema = pa.schema([*fields, ("count", pa.int16())])
    columns = [
        pa.array(values, kind.type) for values, kind in zip(arrays, schema, strict=True) if isinstance(values, list)
    ]
    columns.insert(2, arrays[2].cast(schema.field("transits").type))
    pq.write_table(pa.table(columns, schema=schema), path)


VOTABLE = """<?xml version="1.0"?>
<VOTABLE version="1.4" xmlns="http://www.ivoa.net/xml/VOTable/v1.3"><RESOURCE><TABLE>
<FIELD name="planet_id" datatype="char" arraysize="*"/>
<FIELD name="planet_radius_rearth" datatype="double" unit="UNIT"/>
<FIELD name="transits" datatype="char" arraysize="*"/>
<FIELD name="count" datatype="int"><VALUES null="-9"/></FIELD>
<DATA><TABLEDATA>
<TR><TD>Asha b</TD><TD>1</TD><TD>yes</TD><TD>-9</TD></TR>
<TR><TD>Asha c</TD><TD/><TD/><TD>2</TD></TR>
<TR><TD>Bron b</TD><TD>0.5</TD><TD>no</TD><TD>3</TD></TR>
</TABLEDATA></DATA></TABLE></RESOURCE></VOTABLE>
"""
WRITERS = [
    as_votable,
    as_binary_votable,
    as_fits,
    as_ecsv,
    as_ecsv_with_commas,
    as_ipac,
    as_journal_table,
    as_astropy_parquet,
    as_votable_in_parquet,
    as_arrow_parquet,
]


@pytest.fixture(params=WRITERS, ids=lambda writer: writer.__name__)
def path(request: pytest.FixtureRequest, tmp_path: Path) -> Path:
    """The survey in one of the formats, under a name that says nothing."""
    target = tmp_path / "survey.dat"
    writer: Callable[[Path], None] = request.param
    writer(target)
    return target


def read(path: Path, column_map: dict[str, Any] | None = None) -> dict[str, Any]:
    [batch] = open_catalogue(path, column_map).batches(1000)
    return dict(batch.columns)


def test_the_unit_in_the_file_wins_over_the_one_in_the_name(path: Path) -> None:
    columns = read(path, {"file": {"carry": "count"}})
    assert columns["row"].tolist() == [1, 2, 3]
    assert columns["read.planet_id"].tolist() == NAMES
    np.testing.assert_allclose(
        columns["read.planet_radius_rearth"], np.array([1.0, np.nan, 0.5]) * JUPITER_IN_EARTH_RADII, rtol=1e-12
    )
    assert columns["read.transits"].tolist() == ["yes", "", "no"]
    np.testing.assert_array_equal(columns["input_count"], [np.nan, 2, 3])


def test_the_unit_in_the_map_wins_over_the_one_in_the_file(path: Path) -> None:
    columns = read(path, {"columns": {"planet_radius_rearth": {"unit": "earthRad"}}})
    np.testing.assert_array_equal(columns["read.planet_radius_rearth"], [1.0, np.nan, 0.5])


def test_a_unit_in_the_file_of_the_wrong_dimension_names_both(path: Path) -> None:
    renamed = {"planet_id": {"from": 1}, "planet_mass_mearth": {"from": "planet_radius_rearth"}}
    with pytest.raises(
        ColumnMapError, match=r"read as planet_mass_mearth, has the unit .*: a length, but a mass is needed"
    ):
        open_catalogue(path, {"columns": renamed})


def test_a_gzip_file_of_it_is_read_alike(path: Path) -> None:
    zipped = path.with_suffix(".gz")
    zipped.write_bytes(gzip.compress(path.read_bytes()))
    if path.read_bytes().startswith(b"PAR1"):
        with pytest.raises(CatalogueError, match="inflate it"):
            open_catalogue(zipped)
        return
    plain = read(path)
    for name, values in read(zipped).items():
        np.testing.assert_array_equal(values, plain[name], err_msg=name)


def test_a_file_cut_short_is_one_sentence_or_fewer_rows_but_no_traceback(path: Path) -> None:
    content = path.read_bytes()
    for share in (0.3, 0.6, 0.9, 0.99):
        path.write_bytes(content[: int(share * len(content))])
        try:
            assert open_catalogue(path).rows_read <= 3
        except CatalogueError as error:
            assert len(str(error).splitlines()) <= 3  # noqa: PT017 - either outcome is right


def test_errors_with_a_unit_of_their_own_are_converted(tmp_path: Path) -> None:
    table = Table({"planet_id": ["a"], "stellar_age_gyr": [4.0], "stellar_age_gyr_err_plus": [500.0]})
    table["stellar_age_gyr_err_plus"].unit = "Myr"
    table.write(tmp_path / "t.ecsv")
    assert read(tmp_path / "t.ecsv")["read.stellar_age_gyr_err_plus"].tolist() == [0.5]


@pytest.mark.parametrize("unit", ["R_earth", "earthRad", "Rgeo", "Re", "R⊕"])
def test_spellings_astropy_reads_as_a_unit_apart_are_earth_radii(tmp_path: Path, unit: str) -> None:
    (tmp_path / "t.vot").write_text(VOTABLE.replace("UNIT", unit), encoding="utf-8")
    np.testing.assert_array_equal(read(tmp_path / "t.vot")["read.planet_radius_rearth"], [1.0, np.nan, 0.5])


@pytest.mark.parametrize(
    "hostile",
    [
        '<!DOCTYPE VOTABLE [<!ENTITY secret SYSTEM "SECRET">]>',
        '<!DOCTYPE VOTABLE [<!ENTITY % all SYSTEM "SECRET"> %all;]>',
        '<!DOCTYPE VOTABLE [<!ENTITY a "aaaa"><!ENTITY b "&a;&a;&a;">]>',
    ],
)
def test_a_votable_with_entities_is_refused_and_nothing_else_is_read(tmp_path: Path, hostile: str) -> None:
    secret = tmp_path / "secret.txt"
    secret.write_text("not for you")
    head, body = VOTABLE.split("?>\n")
    document = f"{head}?>{hostile.replace('SECRET', secret.as_uri())}{body.replace('Asha b', '&secret;')}"
    (tmp_path / "t.vot").write_text(document)
    with pytest.raises(CatalogueError, match="declares XML entities") as failure:
        open_catalogue(tmp_path / "t.vot")
    assert "not for you" not in str(failure.value)


def test_a_votable_whose_rows_lie_elsewhere_is_refused(tmp_path: Path) -> None:
    secret = tmp_path / "rows.bin"
    secret.write_bytes(b"\0" * 100)
    stream = f'<BINARY><STREAM href="{secret.as_uri()}"/></BINARY>'
    start, end = VOTABLE.index("<TABLEDATA>"), VOTABLE.index("</TABLEDATA>") + len("</TABLEDATA>")
    (tmp_path / "t.vot").write_text(VOTABLE[:start] + stream + VOTABLE[end:])
    with pytest.raises(CatalogueError, match="its rows lie elsewhere"):
        open_catalogue(tmp_path / "t.vot")


def test_of_several_tables_the_first_with_rows_is_read_and_said(tmp_path: Path) -> None:
    empty = '<TABLE><FIELD name="note" datatype="int"/></TABLE>'
    (tmp_path / "t.vot").write_text(VOTABLE.replace("<RESOURCE>", f"<RESOURCE>{empty}").replace("UNIT", "Re"))
    catalogue = open_catalogue(tmp_path / "t.vot")
    assert catalogue.rows_read == 3
    assert catalogue.remarks == ["the file holds 2 tables; the first with rows was read"]


def test_a_column_of_arrays_is_refused_only_where_it_is_read(tmp_path: Path) -> None:
    table = Table({"planet_id": ["a", "b"], "spectrum": [[1.0, 2.0], [3.0, 4.0]]})
    table.write(tmp_path / "t.fits")
    pq.write_table(pa.table({"planet_id": ["a", "b"], "spectrum": [[1.0, 2.0], [3.0]]}), tmp_path / "t.parquet")
    for path in (tmp_path / "t.fits", tmp_path / "t.parquet"):
        assert read(path)["read.planet_id"].tolist() == ["a", "b"]
        with pytest.raises(CatalogueError, match='the column "spectrum" holds'):
            open_catalogue(path, {"file": {"carry": "spectrum"}})


def test_a_folder_of_parquet_files_is_read_in_the_order_of_their_names(tmp_path: Path) -> None:
    for name, planets in (("b.parquet", ["c"]), ("a.parquet", ["a", "b"])):
        pq.write_table(pa.table({"planet_id": planets}), tmp_path / name)
    columns = read(tmp_path)
    assert columns["read.planet_id"].tolist() == ["a", "b", "c"]
    assert columns["row"].tolist() == [1, 2, 3]
    before = open_catalogue(tmp_path).sha256
    pq.write_table(pa.table({"planet_id": ["d"]}), tmp_path / "b.parquet")
    assert open_catalogue(tmp_path).sha256 != before


def test_parquet_files_of_different_columns_are_not_one_catalogue(tmp_path: Path) -> None:
    pq.write_table(pa.table({"planet_id": ["a"]}), tmp_path / "a.parquet")
    pq.write_table(pa.table({"planet_id": ["a"], "k_mag": [1.0]}), tmp_path / "b.parquet")
    with pytest.raises(CatalogueError, match=r"b\.parquet: has other columns than a\.parquet"):
        open_catalogue(tmp_path)


def test_an_empty_folder_is_an_error(tmp_path: Path) -> None:
    with pytest.raises(CatalogueError, match=r"holds no \.parquet file"):
        open_catalogue(tmp_path)


@pytest.mark.parametrize(
    "metadata",
    [
        {"table_meta_yaml": "[" * 10_000},
        {"table_meta_yaml": b"\xff\xfe: ["},
        {"table_meta_yaml": "datatype: {name: 3}"},
        {"table_meta_yaml": "!!python/object/apply:os.system ['true']"},
        {"IVOA.VOTable-Parquet.content": "<VOTABLE"},
        {"IVOA.VOTable-Parquet.content": '<!DOCTYPE a [<!ENTITY b "c">]><VOTABLE/>'},
        {"x" * 100_000: "y"},
    ],
)
def test_a_parquet_footer_nobody_can_read_says_nothing(tmp_path: Path, metadata: dict[str, str]) -> None:
    table = pa.table({"planet_id": ["a"], "k_mag": [1.0]})
    pq.write_table(table.replace_schema_metadata(metadata), tmp_path / "t.parquet")
    assert read(tmp_path / "t.parquet")["read.k_mag"].tolist() == [1.0]


def test_parquet_text_that_is_not_utf_8_is_read_as_latin_1(tmp_path: Path) -> None:
    wrong = _not_utf_8()
    pq.write_table(pa.table({"planet_id": wrong}), tmp_path / "t.parquet")
    assert read(tmp_path / "t.parquet")["read.planet_id"].tolist() == ["Caf\xe9", "b"]


def _not_utf_8() -> pa.Array:
    offsets, letters = pa.py_buffer(np.array([0, 4, 5], dtype=np.int32)), pa.py_buffer(b"Caf\xe9b")
    return pa.Array.from_buffers(pa.string(), 2, [None, offsets, letters])
