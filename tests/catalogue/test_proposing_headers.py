"""Units, UCDs and descriptions in a file's header say what names do not, in every format that has them."""

from __future__ import annotations

import csv
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.parquet as pq
import pytest
from astropy.io import fits
from astropy.table import Table

from keptair.catalogue import open_catalogue
from keptair.catalogue.proposing import propose

ROWS = 12
# name, cells, unit, description, UCD
COLUMNS: list[tuple[str, list[Any], str, str, str]] = [
    ("c1", [f"Zor {row} b" for row in range(ROWS)], "", "Name of the planet", "meta.id;meta.main"),
    ("c2", [0.1 * row + 0.2 for row in range(ROWS)], "jupiterRad", "Radius of the planet", "phys.size.radius"),
    ("e_c2", [0.01] * ROWS, "jupiterRad", "Error of c2", "stat.error;phys.size.radius"),
    ("c3", [0.5 + 0.1 * row for row in range(ROWS)], "solMass", "Mass of the host star", "phys.mass"),
    ("c4", [2.0 + row for row in range(ROWS)], "d", "Orbital period", "time.period"),
    ("c5", [8.5 + 0.1 * row for row in range(ROWS)], "dex(yr)", "Age of the star", "time.age"),
    ("rad", [1.0 + row for row in range(ROWS)], "mas", "Angular size of the disc", "phys.angSize"),
]
READ = {
    "planet_radius_rearth": ("c2", "high"),
    "stellar_mass_msun": ("c3", "high"),
    "orbital_period_d": ("c4", "high"),
    "stellar_age_gyr": ("c5", "high"),
}


def described_table() -> Table:
    table = Table()
    for name, cells, unit, description, ucd in COLUMNS:
        table[name] = cells
        table[name].unit = unit or None
        table[name].description = description
        table[name].meta["ucd"] = ucd
    return table


def as_votable(folder: Path) -> Path:
    fields = ""
    for name, _, unit, text, ucd in COLUMNS:
        kind = 'datatype="char" arraysize="*"' if name == "c1" else 'datatype="double"'
        fields += f'<FIELD name="{name}" ucd="{ucd}" unit="{unit}" {kind}><DESCRIPTION>{text}</DESCRIPTION></FIELD>'
    rows = "".join(
        f"<TR>{''.join(f'<TD>{cell}</TD>' for cell in row)}</TR>" for row in zip(*(c[1] for c in COLUMNS), strict=True)
    )
    path = folder / "table.vot"
    path.write_text(
        '<?xml version="1.0"?><VOTABLE version="1.4" xmlns="http://www.ivoa.net/xml/VOTable/v1.3"><RESOURCE><TABLE>'
        f"{fields}<DATA><TABLEDATA>{rows}</TABLEDATA></DATA></TABLE></RESOURCE></VOTABLE>"
    )
    return path


def as_fits(folder: Path) -> Path:
    path = folder / "table.fits"
    columns = [
        fits.Column(name=name, format="A20" if name == "c1" else "D", array=np.array(cells), unit=unit or None)
        for name, cells, unit, _, _ in COLUMNS
    ]
    extension = fits.BinTableHDU.from_columns(columns)
    for number, (_, _, _, description, ucd) in enumerate(COLUMNS, start=1):
        extension.header[f"TCOMM{number}"] = description
        extension.header[f"TUCD{number}"] = ucd
    extension.writeto(path)
    return path


def as_ecsv(folder: Path) -> Path:
    described_table().write(folder / "table.ecsv")
    return folder / "table.ecsv"


def as_journal_table(folder: Path) -> Path:
    """Byte by byte, as the journals print it."""
    lines, start = [], 1
    for name, _, unit, description, _ in COLUMNS:
        kind = "A10" if name == "c1" else "F10.4"
        written = {"": "---", "dex(yr)": "[yr]", "jupiterRad": "Rjup", "solMass": "Msun"}.get(unit, unit)
        lines.append(f"{start:4d}-{start + 9:4d} {kind:6s} {written:6s} {name:6s} {description}")
        start += 11
    rows = [
        " ".join(f"{cell:10s}" if isinstance(cell, str) else f"{cell:10.4f}" for cell in row)
        for row in zip(*(column[1] for column in COLUMNS), strict=True)
    ]
    rule, thin = "=" * 80, "-" * 80
    head = ["Title: T", "Authors: A", "Table: Table 1", rule, "Byte-by-byte Description of file: table.txt", thin]
    head += ["   Bytes Format Units  Label  Explanations", thin, *lines, thin]
    path = folder / "table.txt"
    path.write_text("\n".join([*head, *rows]) + "\n")
    return path


def as_parquet(folder: Path) -> Path:
    fields = [
        pa.field(name, pa.array(cells).type, metadata={"unit": unit, "description": description, "ucd": ucd})
        for name, cells, unit, description, ucd in COLUMNS
    ]
    path = folder / "table.parquet"
    pq.write_table(pa.table([pa.array(column[1]) for column in COLUMNS], schema=pa.schema(fields)), path)
    return path


def as_csv_with_comments(folder: Path) -> Path:
    path = folder / "table.csv"
    with path.open("w", newline="") as file:
        file.write("# Made up\n#\n")
        file.writelines(f"# COLUMN {name}:  {text} [{unit}]\n" for name, _, unit, text, _ in COLUMNS)
        csv.writer(file).writerows([[c[0] for c in COLUMNS], *zip(*(c[1] for c in COLUMNS), strict=True)])
    return path


FORMATS = [as_votable, as_fits, as_ecsv, as_journal_table, as_parquet, as_csv_with_comments]


@pytest.mark.parametrize("write", FORMATS, ids=lambda write: write.__name__)
def test_a_header_that_describes_its_columns_is_believed(write: Callable[[Path], Path], tmp_path: Path) -> None:
    path = write(tmp_path)
    proposal = propose(path)
    guesses = {guess.name: guess for guess in proposal.guesses}
    assert guesses["planet_id"].sources == ("c1",)
    assert {name: (guesses[name].sources[0], guesses[name].confidence) for name in READ} == READ
    assert guesses["planet_radius_rearth"].entry == {"plus": "e_c2"}
    assert "stellar_radius_rsun" not in guesses or guesses["stellar_radius_rsun"].confidence == "low"  # milliarcseconds
    map_file = tmp_path / "map.toml"
    map_file.write_text(proposal.toml)
    [batch] = open_catalogue(path, map_file).batches(100)
    radius = 71492.0 / 6378.1 * np.array(COLUMNS[1][1])  # IAU 2015 Resolution B3
    np.testing.assert_allclose(batch.columns["read.planet_radius_rearth"], radius, rtol=1e-3)
    np.testing.assert_allclose(batch.columns["read.stellar_age_gyr"], 10 ** (np.array(COLUMNS[5][1]) - 9), rtol=1e-3)


@pytest.mark.parametrize("write", [as_votable, as_fits, as_parquet], ids=lambda write: write.__name__)
def test_a_ucd_alone_is_half_believed(
    write: Callable[[Path], Path], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(__name__ + ".COLUMNS", [(name, cells, unit, "", ucd) for name, cells, unit, _, ucd in COLUMNS])
    guesses = {guess.name: guess for guess in propose(write(tmp_path)).guesses}
    for name in ("planet_radius_rearth", "stellar_mass_msun", "stellar_age_gyr"):
        assert (guesses[name].sources[0], guesses[name].confidence) == (READ[name][0], "fair")


def test_a_description_that_contradicts_the_name_makes_one_doubt(tmp_path: Path) -> None:
    path = tmp_path / "table.csv"
    rows = "".join(f"Zor {row} b,{5000 + row}\n" for row in range(ROWS))
    path.write_text("# teff: Distance of the star\nplanet,teff\n" + rows)
    [guess] = [guess for guess in propose(path).guesses if guess.name == "stellar_teff_k"]
    assert guess.confidence == "fair"
    assert "its description speaks of something else" in guess.reason


def test_the_headers_unit_wins_over_the_names(tmp_path: Path) -> None:
    fields = [pa.field("planet", pa.string()), pa.field("rp_earth", pa.float64(), metadata={"unit": "Rjup"})]
    table = pa.table(
        [[f"Zor {row} b" for row in range(ROWS)], [0.5 + 0.1 * row for row in range(ROWS)]], pa.schema(fields)
    )
    pq.write_table(table, tmp_path / "table.parquet")
    [guess] = [guess for guess in propose(tmp_path / "table.parquet").guesses if guess.name == "planet_radius_rearth"]
    assert guess.unit == "Rjup"


def test_columns_of_lists_and_flags_stand_in_nobodys_way(tmp_path: Path) -> None:
    table = pa.table({
        "planet": ["Zor 1 b", "Zor 2 b"], "spectrum": [[1.0], [2.0]], "transit": [True, False], "st_teff": [5000, 6000],
    })  # fmt: skip
    pq.write_table(table, tmp_path / "table.parquet")
    guesses = {guess.name: guess for guess in propose(tmp_path / "table.parquet").guesses}
    assert set(guesses) == {"planet_id", "transits", "stellar_teff_k"}
    assert guesses["transits"].entry["words"] == {"true": "yes", "false": "no"}
