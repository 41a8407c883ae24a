"""What the fuzzer and attacks by hand once found, and that the fuzzer itself sees what it should."""

from __future__ import annotations

import io
import subprocess
import sys
from pathlib import Path
from random import Random
from typing import Any

import pyarrow as pa
import pyarrow.parquet as pq
import pytest
from astropy import units

from fuzz import checks, mutating, seeds
from fuzz.case import Case
from keptair.catalogue import ColumnMap, open_catalogue
from keptair.catalogue.units import UnitError, conversion
from keptair.errors import CatalogueError, ColumnMapError, KeptairError, SettingsError
from keptair.settings import Settings
from keptair.tables import footers, schema

CSV = b"planet_id,k_mag,x\na,1,2\nb,3,4\n"
IDENTIFIER = {"planet_id": {"from": "planet_id"}}
VOTABLE = (
    "<VOTABLE><RESOURCE><TABLE{table}>{fields}<DATA><TABLEDATA>{rows}</TABLEDATA></DATA></TABLE></RESOURCE></VOTABLE>"
)
NAME = '<FIELD name="planet_id" datatype="char" arraysize="*"/>'


class Tame(Random):
    """Takes the first choice, and what is done more often than not."""

    def random(self) -> float:
        return 0.45

    def choice(self, seq: Any) -> Any:
        return seq[0]


def refusal(case: Case, folder: Path) -> str:
    outcome = checks.attempt(case, folder)
    assert outcome.unclean == []
    return outcome.refusal


def with_columns(**columns: Any) -> dict[str, Any]:
    return {"columns": IDENTIFIER | columns}


@pytest.mark.parametrize(
    ("column_map", "said"),
    [
        (with_columns(stellar_age_gyr={"from": "x", "kind": "k_mag"}), "kind: means nothing for stellar_age_gyr"),
        (with_columns(updated={"from": "x", "date": "%Y %Y"}), "no pattern of dates"),
        ({"columns": {"planet_id": {"from": "planet_id", "date": "%Y %Y"}}}, "date: means nothing for planet_id"),
        ({"constants": {"k_mag": 10**400}, "columns": IDENTIFIER}, "not a finite number"),
        (with_columns(host_id={f"key {number}": 1 for number in range(300)}), "more"),
        (with_columns(stellar_teff_k={"from": "x", "unit": "1e400 K"}), "its scale is no number"),
        (with_columns(stellar_teff_k={"from": "x", "unit": "-1 K"}), "its scale is no number"),
        (with_columns(stellar_teff_k={"from": "x", "unit": "dex(" * 5000 + ")" * 5000}), "too long for a unit"),
        ("seed = 0x" + "f" * 20000, "more than 64 bits"),
        ("seed = " + "9" * 5000, "is not TOML"),
        ("a = " + "[" * 5000 + "]" * 5000, "nested too deeply"),
        ("[" + ".".join("a" * 3000) + "]", "nested too deeply"),
    ],
)
def test_a_map_that_cannot_be_used_is_refused_in_a_few_sentences(column_map: Any, said: str, tmp_path: Path) -> None:
    assert said in refusal(Case("a.csv", CSV, column_map), tmp_path)


def test_a_number_too_large_to_be_a_float_may_be_called_missing(tmp_path: Path) -> None:
    case = Case("a.csv", b"planet_id,k_mag\na,1e999\nb,3\n", with_columns(k_mag={"from": "k_mag", "missing": 10**400}))
    assert refusal(case, tmp_path) == ""


def test_wildcards_do_not_take_for_ever(tmp_path: Path) -> None:
    data = b"planet_id\n" + b"a" * 3000 + b"\n[a]\n"
    case = Case("a.csv", data, {"columns": IDENTIFIER, "rows": {"drop": {"planet_id": ["*a" * 30 + "*b", "[a]"]}}})
    assert refusal(case, tmp_path) == ""
    (tmp_path / "a.csv").write_bytes(data)
    assert open_catalogue(tmp_path / "a.csv", case.map).rows_filtered == 1


def test_lines_of_a_map_are_numbered_however_long_they_are() -> None:
    with pytest.raises(ColumnMapError, match="no such key"):
        ColumnMap.read({"x": "\n[" + " " * 60000})


def test_hidden_characters_of_a_file_name_are_written_out(tmp_path: Path) -> None:
    assert "\\x1b[2J.csv" in refusal(Case("\x1b[2J.csv", b"PK\x03\x04"), tmp_path)


def test_a_header_of_nothing_but_commas_is_refused(tmp_path: Path) -> None:
    assert "this is no table" in refusal(Case("a.csv", b"planet_id" + b"," * 2_000_000), tmp_path)


def test_a_long_list_of_problems_is_cut_and_counted() -> None:
    message = str(KeptairError("summary", [f"problem {number} {'x' * 90}" for number in range(1000)], "hint"))
    assert len(message) < 6000
    assert message.endswith(f"  and {1000 - message.count('problem')} more\nTry: hint")


def test_a_short_list_of_problems_is_whole() -> None:
    assert str(KeptairError("summary", ["one", "two"], "hint")) == "summary\n  one\n  two\nTry: hint"


@pytest.mark.parametrize(
    ("columns", "said"),
    [
        ({"planet_id": pa.array(["a", "b"], pa.string_view())}, ""),
        ({"planet_id": pa.array([b"\xff", b"b"], pa.binary_view())}, ""),
        ({"planet_id": pa.array([1, 2], pa.timestamp("ns", "Nowhere/Land"))}, ""),
        ({"planet_id": pa.ExtensionArray.from_storage(pa.uuid(), pa.array([bytes(16), b"b" * 16], pa.binary(16)))}, ""),
        ({"planet_id": pa.array(["a", "b"]), "planet_id.mask": pa.array([1.0, 2.0])}, ""),
        ({"planet_id": pa.array([["a"], ["b"]])}, "holds lists or structures"),
    ],
)
def test_columns_of_any_parquet_type_are_read_or_refused(
    columns: dict[str, pa.Array], said: str, tmp_path: Path
) -> None:
    sink = io.BytesIO()
    pq.write_table(pa.table(columns), sink)
    assert said in refusal(Case("a.parquet", sink.getvalue(), rows=1), tmp_path)


@pytest.mark.parametrize("name", ["k_mag", "k_mag.mask"])
def test_two_parquet_columns_of_one_name_are_refused_only_where_they_are_read(name: str, tmp_path: Path) -> None:
    columns = [pa.array(["a"]), pa.array([1.0]), pa.array([True]), pa.array([True])]
    for others in (["x", "x"], [name, name]):
        sink = io.BytesIO()
        pq.write_table(pa.Table.from_arrays(columns, names=["planet_id", "k_mag", *others]), sink)
        said = refusal(Case("a.parquet", sink.getvalue(), with_columns(k_mag={"from": 2})), tmp_path)
        assert said == ("" if "x" in others else f'a.parquet: two columns are called "{name}"; rename one of them')


def test_a_votable_without_columns_is_refused(tmp_path: Path) -> None:
    assert "planet_id" in refusal(Case("a.vot", VOTABLE.format(table="", fields="", rows="").encode()), tmp_path)


@pytest.mark.parametrize(
    ("table", "fields", "rows"),
    [
        (' nrows="2000000000"', NAME, "<TR><TD>a</TD></TR>"),
        ("", NAME + '<FIELD name="x" datatype="double" arraysize="1000x1000"/>', "<TR><TD>a</TD><TD/></TR>" * 100),
        ("", NAME + '<FIELD name="x" datatype="char" arraysize="99999999"/>', "<TR><TD>a</TD><TD/></TR>"),
    ],
)
def test_a_votable_that_asks_for_far_more_memory_than_it_has_bytes_is_refused(
    table: str, fields: str, rows: str, tmp_path: Path
) -> None:
    case = Case("a.vot", VOTABLE.format(table=table, fields=fields, rows=rows).encode())
    assert "MB of memory" in refusal(case, tmp_path)


@pytest.mark.parametrize(
    ("key", "value"), [("NAXIS2", 2**40), ("NAXIS1", 2**31), ("PCOUNT", 2**31), ("TFIELDS", 99999999)]
)
def test_a_fits_header_that_promises_more_than_there_is_is_refused(key: str, value: int, tmp_path: Path) -> None:
    data = seeds.fits_table(["planet_id"], [["a"], ["b"]], Tame())
    place = data.index(b"XTENSION")
    start = data.index(key.encode().ljust(8) + b"=", place)
    data = data[:start] + f"{key:8}= {value:20}".encode() + data[start + 30 :]
    assert "says it has" in refusal(Case("a.fits", data), tmp_path)


def test_an_ipac_table_with_one_endless_cell_is_refused(tmp_path: Path) -> None:
    wide = b" " * 1500
    data = b"|planet_id" + wide + b"|\n|char     " + wide + b"|\n " + b"a" * 1500 + b"\n" + b" a\n" * 30_000
    assert "MB of memory" in refusal(Case("a.tbl", data), tmp_path)


def test_a_parquet_row_group_that_inflates_without_measure_is_refused(tmp_path: Path) -> None:
    pq.write_table(pa.table({"planet_id": ["a" * 120_000_000]}), tmp_path / "a.parquet", compression="zstd")
    with pytest.raises(CatalogueError, match="a row group inflates to 120 MB"):
        open_catalogue(tmp_path / "a.parquet")


@pytest.mark.parametrize("unit", ["", "dex(K)"])
def test_values_out_of_the_range_of_floats_make_no_noise(unit: str, tmp_path: Path) -> None:
    data = b"planet_id,k_mag,x\na,1,1e308\nb,3,-1e308\nc,1,inf\n"
    entry = {"from": "x", "unit": unit or "1e200 K", "plus": "x"}
    assert refusal(Case("a.csv", data, with_columns(stellar_teff_k=entry)), tmp_path) == ""


def test_a_unit_out_of_fashion_makes_no_noise(tmp_path: Path) -> None:
    case = Case("a.csv", CSV, with_columns(stellar_teff_k={"from": "x", "unit": "G"}))
    assert "a temperature is needed" in refusal(case, tmp_path)


def test_a_unit_of_no_size_is_none() -> None:
    with pytest.raises(UnitError):
        conversion("0 K", "stellar_teff_k")


def test_a_quote_never_closed_ends_the_command_with_a_sentence(tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_bytes(b'planet_id,k_mag\n"a,1\n' + b"b,2\n" * 3_000_000)
    done = subprocess.run(
        [sys.executable, "-m", "keptair", "check", str(tmp_path / "a.csv")], capture_output=True, text=True, timeout=60
    )
    assert (done.returncode, done.stdout) == (3, "")
    assert done.stderr.count("\n") == 1
    assert "never closed" in done.stderr


@pytest.mark.parametrize("content", ["seed = 0x" + "f" * 20000, "seed = " + "9" * 5000, "a = " + "[" * 5000])
def test_settings_that_are_no_toml_are_refused(content: str, tmp_path: Path) -> None:
    (tmp_path / "s.toml").write_text(content, encoding="utf-8")
    with pytest.raises(SettingsError):
        Settings.read(tmp_path / "s.toml")


@pytest.mark.parametrize("reader", [ColumnMap.read, Settings.read])
def test_a_file_of_settings_that_never_ends_is_refused(reader: Any) -> None:
    with pytest.raises(KeptairError, match="longer than 4 MB"):
        reader("/dev/zero")


def test_a_votable_read_before_changes_no_byte_of_what_is_written() -> None:
    table = schema.table("planets")
    lengths = {column.name: 9 for column in table if column.storage == "text"}
    written = footers.of_file(table, lengths)
    units.Unit("earthRad", format="vounit", parse_strict="silent")  # what reading a VOTable in this unit does
    assert footers.of_file(table, lengths) == written
    assert 'unit="earthRad"' not in written["IVOA.VOTable-Parquet.content"]


@pytest.mark.parametrize("suffix", seeds.FORMATS)
def test_a_sound_table_is_read_in_every_format(suffix: str, tmp_path: Path) -> None:
    names, rows = seeds.usual()
    case = Case(f"a.{suffix}", seeds.FORMATS[suffix](names[:4], [row[:4] for row in rows], Tame()))
    assert checks.attempt(case, tmp_path).word == "accepted"
    (tmp_path / case.name).write_bytes(case.data)
    batch = next(iter(open_catalogue(tmp_path / case.name).batches(10)))
    assert list(batch.columns["read.planet_id"]) == ["Kea 1 b", "Kea 1 c", "Weka 2 b"]
    assert list(batch.columns["read.planet_mass_mearth"]) == [1.3, 6.0, 300.0]


def test_a_hundred_random_cases_end_cleanly(tmp_path: Path) -> None:
    random = Random(20)
    cases = [mutating.fresh(random) for _ in range(50)]
    cases += [mutating.changed(random, case, cases[0]) for case in cases]
    assert [outcome.unclean for case in cases if (outcome := checks.attempt(case, tmp_path)).unclean] == []


def test_a_case_comes_back_from_its_bytes() -> None:
    case = Case("a\u202e.csv", b"\x00\n\xff", {"columns": {"k_mag": {"from": [1, "x"]}}}, 3)
    assert Case.of_bytes(case.as_bytes()) == case
    assert Case.of_bytes(b"nonsense") is None


def test_the_fuzzer_sees_what_it_should(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    def breaks(*_: Any) -> None:
        raise ZeroDivisionError("why")

    monkeypatch.setattr(checks, "open_catalogue", breaks)
    assert checks.attempt(Case("a.csv", CSV), tmp_path).word == "unclean"
    assert checks.wrong_with_message("\x1b[2J") != []
    assert checks.wrong_with_message("x" * 10_000) != []
    assert checks.wrong_with_message("one\ntwo") == []
