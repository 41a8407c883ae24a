"""A catalogue in any format gives the same canonical columns, and no row is lost."""

from __future__ import annotations

import hashlib
import math
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from keptair.batch import Batch
from keptair.catalogue import Catalogue, open_catalogue
from keptair.errors import CatalogueError
from keptair.stages import screen

ROWS = [
    {"name": "Asha b", "Rp": "1.5", "Rp_hi": "0.1", "Rp_lo": "-0.2", "lim": "0", "Mp": "4.0", "from": "RV", "st": "ok"},
    {"name": "Asha c", "Rp": "2.25", "Rp_hi": "", "Rp_lo": "0.3", "lim": "1", "Mp": "", "from": "", "st": "ok"},
    {"name": "Bron b", "Rp": "-1", "Rp_hi": "0", "Rp_lo": "0", "lim": "0", "Mp": "7.5", "from": "guess", "st": "no"},
    {"name": "Cato b", "Rp": "0.5", "Rp_hi": "0", "Rp_lo": "0", "lim": "-1", "Mp": "7.5", "from": "guess", "st": "ok"},
]
MAP = {
    "file": {"carry": ["lim", "st"]},
    "rows": {"drop": {"st": "n*"}},
    "columns": {
        "planet_id": {"from": "name"},
        "planet_radius_rearth": {"from": "Rp", "plus": "Rp_hi", "minus": "Rp_lo", "bound": "lim", "missing": [-1]},
        "planet_mass_mearth": {"from": "Mp", "kind": "from", "kinds": {"RV": "minimum", "guess": "relation"}},
    },
}


def everything(catalogue: Catalogue, size: int = 1000) -> Batch:
    """All batches as one."""
    batches = list(catalogue.batches(size))
    names = {name for batch in batches for name in batch.columns}
    return Batch({name: np.concatenate([batch.columns[name] for batch in batches]) for name in names})


def test_every_format_gives_the_same_canonical_columns(write: Callable[..., Path], tmp_path: Path) -> None:
    catalogue = open_catalogue(write(tmp_path, ROWS), MAP)
    columns = everything(catalogue).columns
    assert (catalogue.rows_read, catalogue.rows_filtered) == (4, 1)
    assert columns["row"].tolist() == [1, 2, 4]
    assert columns["read.planet_id"].tolist() == ["Asha b", "Asha c", "Cato b"]
    assert columns["read.planet_radius_rearth"].tolist() == [1.5, 2.25, 0.5]
    assert columns["read.planet_radius_rearth_bound"].tolist() == ["", "upper", "lower"]
    np.testing.assert_array_equal(columns["read.planet_radius_rearth_err_plus"], [0.1, np.nan, np.nan])
    np.testing.assert_array_equal(columns["read.planet_radius_rearth_err_minus"], [0.2, 0.3, np.nan])
    np.testing.assert_array_equal(columns["read.planet_mass_mearth"], [4.0, np.nan, 7.5])
    assert columns["read.planet_mass_kind"].tolist() == ["minimum", "", "relation"]
    assert columns["read.planet_radius_kind"].tolist() == ["measured"] * 3
    assert catalogue.carried == {"input_lim": "number", "input_st": "text"}
    assert columns["input_lim"].tolist() == [0, 1, -1]
    assert columns["input_st"].tolist() == ["ok"] * 3
    assert np.isnan(columns["read.stellar_age_gyr"]).all()
    assert columns["read.host_id"].tolist() == [""] * 3


def test_every_size_of_batch_gives_the_same_rows_and_a_catalogue_can_be_read_again(
    write: Callable[..., Path], tmp_path: Path
) -> None:
    catalogue = open_catalogue(write(tmp_path, ROWS), MAP)
    whole = everything(catalogue).columns
    assert [len(batch) for batch in catalogue.batches(2)] == [2, 1]
    for size in (1, 2, 3):
        for name, values in everything(catalogue, size).columns.items():
            np.testing.assert_array_equal(values, whole[name], err_msg=name)


def test_the_resolved_map_reads_the_file_in_the_same_way(write: Callable[..., Path], tmp_path: Path) -> None:
    catalogue = open_catalogue(write(tmp_path, ROWS), MAP)
    again = open_catalogue(catalogue.source, catalogue.column_map.as_dict())
    for name, values in everything(again).columns.items():
        np.testing.assert_array_equal(values, everything(catalogue).columns[name], err_msg=name)


def test_bytes_and_hash_are_those_of_the_file_as_it_lies_there(write: Callable[..., Path], tmp_path: Path) -> None:
    path = write(tmp_path, ROWS)
    catalogue = open_catalogue(path, MAP)
    assert catalogue.sha256 == hashlib.sha256(path.read_bytes()).hexdigest()
    assert catalogue.bytes == path.stat().st_size


def test_canonical_names_need_no_map(write: Callable[..., Path], tmp_path: Path) -> None:
    rows = [
        {"planet_id": "Asha b", "stellar_age_gyr": "4.5", "stellar_age_gyr_err_plus": "1", "transits": "yes"},
        {"planet_id": "Asha c", "stellar_age_gyr": "", "stellar_age_gyr_err_plus": "", "transits": ""},
    ]
    columns = everything(open_catalogue(write(tmp_path, rows))).columns
    np.testing.assert_array_equal(columns["read.stellar_age_gyr"], [4.5, math.nan])
    np.testing.assert_array_equal(columns["read.stellar_age_gyr_err_plus"], [1.0, math.nan])
    assert columns["read.transits"].tolist() == ["yes", ""]


def test_a_nearly_canonical_name_is_remarked_on(write: Callable[..., Path], tmp_path: Path) -> None:
    rows = [{"planet_id": "Asha b", "planet_masss_mearth": "4.5", "colour": "blue"}]
    catalogue = open_catalogue(write(tmp_path, rows))
    assert catalogue.remarks == ['the column "planet_masss_mearth" is not read; planet_mass_mearth was meant?']


def test_a_file_with_neither_map_nor_planet_id_says_what_to_do(write: Callable[..., Path], tmp_path: Path) -> None:
    path = write(tmp_path, ROWS)
    with pytest.raises(CatalogueError) as failure:
        open_catalogue(path)
    assert failure.value.exit_code == 3
    assert failure.value.hint == f"keptair map {path.name}"
    assert "no planet_id column and no column map" in str(failure.value)


def test_a_file_that_is_not_there_is_one_sentence(tmp_path: Path) -> None:
    with pytest.raises(CatalogueError, match="there is no such file"):
        open_catalogue(tmp_path / "nowhere.csv")


def test_a_file_that_changes_while_it_is_read_is_refused(write: Callable[..., Path], tmp_path: Path) -> None:
    catalogue = open_catalogue(write(tmp_path, ROWS), MAP)
    write(tmp_path, ROWS[:2])
    with pytest.raises(CatalogueError, match="changed while it was read"):
        next(iter(catalogue.batches(10)))


def test_whole_numbers_too_long_for_a_float_and_leading_zeros_are_carried_as_text(
    write_csv: Callable[..., Path],
) -> None:
    path = write_csv("planet_id,gaia,code,n,mixed,none\na,2119583201145735808,007,1,1,\nb,2,8,nan,x,\n")
    catalogue = open_catalogue(path, {"file": {"carry": "*"}})
    assert catalogue.carried == {
        "input_planet_id": "text",
        "input_gaia": "text",
        "input_code": "text",
        "input_n": "number",
        "input_mixed": "text",
        "input_none": "number",
    }
    columns = everything(catalogue).columns
    assert columns["input_gaia"].tolist() == ["2119583201145735808", "2"]
    assert columns["input_code"].tolist() == ["007", "8"]


CELL = st.sampled_from(["", "1", "2.5", "-3", "1e3", "x", "nan", "inf", "1_000", "0x1", "5,5", "1.0D+05"])
LINE = st.tuples(st.sampled_from(["a", "b", "c", "", "d" * 200]), CELL, CELL, st.integers(0, 5))


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(lines=st.lists(LINE, max_size=30), size=st.integers(1, 7))
def test_accepted_and_distinct_rejected_rows_are_the_rows_read_without_the_filtered(
    tmp_path: Path, lines: list[tuple[str, str, str, int]], size: int
) -> None:
    from keptair.settings import Settings

    path = tmp_path / "dirty.csv"
    rows = [
        ",".join([name, f'"{one}"', f'"{two}"', *["z"] * (extra if extra > 3 else 0)])
        for name, one, two, extra in lines
    ]
    path.write_text("\n".join(["planet_id,planet_radius_rearth,stellar_age_gyr", *rows]))
    catalogue = open_catalogue(path, {"rows": {"drop": {"planet_radius_rearth": "x"}}})
    screened = [screen.run(batch, Settings()) for batch in catalogue.batches(size)]
    accepted = [row for part in screened for row in part.batch.columns["row"].tolist()]
    rejected = {row for part in screened for row in part.rejects["row"].tolist()}
    assert catalogue.rows_read == len(lines)
    assert len(accepted) + len(rejected) == catalogue.rows_read - catalogue.rows_filtered
    assert not rejected & set(accepted)
    assert accepted == sorted(accepted)
    names = [name for part in screened for name in part.batch.columns["planet_id"].tolist()]
    assert len(set(names)) == len(names)
