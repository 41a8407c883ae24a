"""A column map proposed for tables of many styles reads back what the tables say."""

from __future__ import annotations

import csv
import math
import tomllib
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from keptair.catalogue import open_catalogue
from keptair.catalogue.proposing import Proposal, propose, sampling
from keptair.errors import CatalogueError

JUPITER_RADIUS = 71492.0 / 6378.1  # Earth radii, IAU 2015 Resolution B3
JUPITER_MASS = 1.2668653e17 / 3.986004e14  # Earth masses, the same
ROWS = 40
Cells = Sequence[object]
Table = dict[str, Cells]


def invented() -> dict[str, list[Any]]:
    """Planets in canonical units: every second one small, orbits that keep Kepler's third law."""
    steps = [row / (ROWS - 1) for row in range(ROWS)]
    star_mass = [0.4 + 0.9 * (7 * step % 1) for step in steps]
    period = [0.9 * 600 ** (11 * step % 1) for step in steps]
    small = [row % 2 == 0 for row in range(ROWS)]
    return {
        "planet": [f"Zor {row // 2 + 1} {'bc'[row % 2]}" for row in range(ROWS)],
        "star": [f"Zor {row // 2 + 1}" for row in range(ROWS)],
        "radius": [0.7 + 2 * (3 * s % 1) if tiny else 9 + 5 * s for s, tiny in zip(steps, small, strict=True)],
        "mass": [0.4 + 6 * (3 * s % 1) if tiny else 60 + 900 * s for s, tiny in zip(steps, small, strict=True)],
        "period": period,
        "axis": [(m * (p / 365.25) ** 2) ** (1 / 3) for m, p in zip(star_mass, period, strict=True)],
        "eccentricity": [0.5 * (5 * step % 1) for step in steps],
        "star_mass": star_mass,
        "star_radius": [mass**0.9 for mass in star_mass],
        "temperature": [5772 * mass**0.55 for mass in star_mass],
        "luminosity": [mass**4 for mass in star_mass],
        "age": [0.4 + 11 * step for step in steps],
        "distance": [9 * 60 ** (13 * step % 1) for step in steps],
        "ra": [350 * (17 * step % 1) + 2 for step in steps],
        "dec": [150 * (19 * step % 1) - 75 for step in steps],
        "j": [6 + 7 * step for step in steps],
        "k": [5.5 + 7 * step for step in steps],
    }


TRUE = invented()
ERRORS = {name: [0.05 * abs(value) for value in TRUE[name]] for name in TRUE if name not in ("planet", "star")}


def times(name: str, factor: float) -> list[float]:
    return [value * factor for value in TRUE[name]]


def log(name: str, plus: float = 0.0) -> list[float]:
    return [math.log10(value) + plus for value in TRUE[name]]


def minus(name: str) -> list[float]:
    return [-error for error in ERRORS[name]]


def write(folder: Path, table: Table) -> Path:
    path = folder / "table.csv"
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(table)
        writer.writerows(zip(*table.values(), strict=True))
    return path


def proposed(folder: Path, table: Table) -> Proposal:
    return propose(write(folder, table))


def entry(proposal: Proposal, name: str) -> dict[str, Any]:
    found: dict[str, Any] = tomllib.loads(proposal.toml)["columns"].get(name, {})
    return found


def sure(proposal: Proposal, name: str) -> str:
    return next((guess.confidence for guess in proposal.guesses if guess.name == name), "")


def open_question(proposal: Proposal, name: str) -> str:
    assert name not in {guess.name for guess in proposal.guesses}
    return next((question.text for question in proposal.questions if question.name == name), "")


def read(path: Path, proposal: Proposal) -> dict[str, Any]:
    """The catalogue read with the TOML as it is printed."""
    map_file = path.with_suffix(".toml")
    map_file.write_text(proposal.toml, encoding="utf-8")
    [batch] = open_catalogue(path, map_file).batches(1000)
    return batch.columns


UNDERSCORED: Table = {
    "pl_name": TRUE["planet"], "hostname": TRUE["star"], "pl_rade": TRUE["radius"], "pl_radeerr1": ERRORS["radius"],
    "pl_radeerr2": minus("radius"), "pl_masse": TRUE["mass"], "pl_masseerr1": ERRORS["mass"],
    "pl_masseerr2": minus("mass"), "pl_orbper": TRUE["period"], "pl_orbsmax": TRUE["axis"],
    "pl_orbeccen": TRUE["eccentricity"], "pl_orbincl": [89.0] * ROWS, "pl_eqt": times("temperature", 0.2),
    "st_teff": TRUE["temperature"], "st_rad": TRUE["star_radius"], "st_mass": TRUE["star_mass"], "st_age": TRUE["age"],
    "st_logg": [4.4] * ROWS, "sy_dist": TRUE["distance"], "sy_plx": [1000 / d for d in TRUE["distance"]],
    "ra": TRUE["ra"], "dec": TRUE["dec"], "sy_jmag": TRUE["j"], "sy_hmag": TRUE["j"], "sy_kmag": TRUE["k"],
}  # fmt: skip
CAMELS: Table = {
    "planetName": TRUE["planet"], "hostStar": TRUE["star"], "planetRadiusJup": times("radius", 1 / JUPITER_RADIUS),
    "planetRadiusJupErrUp": times("radius", 0.05 / JUPITER_RADIUS),
    "planetRadiusJupErrLow": times("radius", -0.05 / JUPITER_RADIUS), "planetMassEarth": TRUE["mass"],
    "planetMassEarthUnc": ERRORS["mass"], "orbitalPeriodDays": TRUE["period"], "semiMajorAxisAu": TRUE["axis"],
    "orbitalEccentricity": TRUE["eccentricity"], "stellarTeff": TRUE["temperature"],
    "stellarRadius": TRUE["star_radius"], "stellarMass": TRUE["star_mass"], "stellarAgeMyr": times("age", 1000),
    "distanceParsec": TRUE["distance"], "raDeg": TRUE["ra"], "decDeg": TRUE["dec"], "magJ": TRUE["j"],
    "magKs": TRUE["k"],
}  # fmt: skip
JOURNAL: Table = {
    "Planet": TRUE["planet"], "Star": TRUE["star"], "Rp": TRUE["radius"], "E_Rp": ERRORS["radius"],
    "e_Rp": ERRORS["radius"], "Mp": TRUE["mass"], "e_Mp": ERRORS["mass"], "Per": TRUE["period"], "a": TRUE["axis"],
    "e": TRUE["eccentricity"], "e_e": ERRORS["eccentricity"], "Teff": TRUE["temperature"], "R*": TRUE["star_radius"],
    "M*": TRUE["star_mass"], "logAge": log("age", 9), "Dist": TRUE["distance"], "RAdeg": TRUE["ra"],
    "DEdeg": TRUE["dec"], "Jmag": TRUE["j"], "Ksmag": TRUE["k"], "[Fe/H]": [0.1] * ROWS,
}  # fmt: skip
SHEET: Table = {
    "Planet name": TRUE["planet"], "Host": TRUE["star"], "Radius (R_J)": times("radius", 1 / JUPITER_RADIUS),
    "Radius error + (R_J)": times("radius", 0.05 / JUPITER_RADIUS),
    "Radius error - (R_J)": times("radius", 0.05 / JUPITER_RADIUS), "Mass [MJ]": times("mass", 1 / JUPITER_MASS),
    "Mass [MJ] err": times("mass", 0.05 / JUPITER_MASS), "P [yr]": times("period", 1 / 365.25), "a [AU]": TRUE["axis"],
    "Ecc.": TRUE["eccentricity"], "Stellar eff. temp. (K)": TRUE["temperature"], "Rstar [Rsun]": TRUE["star_radius"],
    "Mstar [Msun]": TRUE["star_mass"], "log(age/yr)": log("age", 9), "Distance (pc)": TRUE["distance"],
    "RA (h)": times("ra", 1 / 15), "Dec (deg)": TRUE["dec"], "J (mag)": TRUE["j"], "K (mag)": TRUE["k"],
}  # fmt: skip
GLUED: Table = {
    "plname": TRUE["planet"], "hname": TRUE["star"], "vr1_prad": TRUE["radius"], "vr1_prad_hi_err": ERRORS["radius"],
    "vr1_prad_lo_err": ERRORS["radius"], "vr1_pmass": TRUE["mass"], "sig_vr1_pmass": ERRORS["mass"],
    "vr1_period": TRUE["period"], "vr1_sma": TRUE["axis"], "vr1_ecc": TRUE["eccentricity"],
    "vr1_steff": TRUE["temperature"], "vr1_srad": TRUE["star_radius"], "vr1_smass": TRUE["star_mass"],
    "vr1_sage": TRUE["age"], "vr1_dist": TRUE["distance"], "vr1_ra": TRUE["ra"], "vr1_dec": TRUE["dec"],
    "vr1_jmag": TRUE["j"], "vr1_kmag": TRUE["k"], "vr1_srho": [1.4] * ROWS,
}  # fmt: skip
CANONICAL = {
    "planet_radius_rearth": "radius", "planet_mass_mearth": "mass", "orbital_period_d": "period",
    "semi_major_axis_au": "axis", "eccentricity": "eccentricity", "stellar_teff_k": "temperature",
    "stellar_radius_rsun": "star_radius", "stellar_mass_msun": "star_mass", "stellar_age_gyr": "age",
    "distance_pc": "distance", "ra_deg": "ra", "dec_deg": "dec", "j_mag": "j", "k_mag": "k",
}  # fmt: skip
STYLES = {"underscored": UNDERSCORED, "camels": CAMELS, "journal": JOURNAL, "sheet": SHEET, "glued": GLUED}


@pytest.mark.parametrize("style", STYLES)
def test_the_proposed_map_reads_what_the_table_says(style: str, tmp_path: Path) -> None:
    path = write(tmp_path, STYLES[style])
    proposal = propose(path)
    columns = read(path, proposal)
    assert columns["read.planet_id"].tolist() == TRUE["planet"]
    for canonical, name in CANONICAL.items():
        np.testing.assert_allclose(columns[f"read.{canonical}"], TRUE[name], rtol=2e-4, err_msg=f"{style} {canonical}")
    for canonical in ("planet_radius_rearth", "planet_mass_mearth"):
        errors = ERRORS[CANONICAL[canonical]]
        np.testing.assert_allclose(columns[f"read.{canonical}_err_plus"], errors, rtol=2e-4)
        if "minus" in entry(proposal, canonical):  # one error alone serves both sides, later
            np.testing.assert_allclose(columns[f"read.{canonical}_err_minus"], errors, rtol=2e-4)


@pytest.mark.parametrize("style", ["underscored", "camels", "sheet"])
def test_where_names_say_quantity_body_and_unit_every_guess_is_sure(style: str, tmp_path: Path) -> None:
    proposal = proposed(tmp_path, STYLES[style])
    assert {sure(proposal, name) for name in ("planet_id", "host_id", *CANONICAL)} == {"high"}


def test_what_is_no_input_is_not_proposed(tmp_path: Path) -> None:
    named = {source for guess in proposed(tmp_path, UNDERSCORED).guesses for source in guess.sources}
    assert not named & {"pl_orbincl", "pl_eqt", "st_logg", "sy_plx", "sy_hmag"}


def test_units_left_unsaid_are_guessed_from_the_values_and_said_to_be(tmp_path: Path) -> None:
    table = {"name": TRUE["planet"], "radius": times("radius", 1 / JUPITER_RADIUS), "mass": TRUE["mass"]}
    proposal = proposed(tmp_path, {**table, "star_radius": TRUE["star_radius"], "star_mass": TRUE["star_mass"]})
    assert entry(proposal, "planet_radius_rearth") == {"from": "radius", "unit": "jupiterRad"}
    assert entry(proposal, "planet_mass_mearth") == {"from": "mass", "unit": "earthMass"}
    assert sure(proposal, "planet_radius_rearth") == sure(proposal, "planet_mass_mearth") == "fair"


def test_a_unit_that_may_be_two_is_not_guessed_but_asked(tmp_path: Path) -> None:
    proposal = proposed(tmp_path, {"name": TRUE["planet"], "rp": [0.8 + row / ROWS for row in range(ROWS)]})
    assert "earthRad or jupiterRad" in open_question(proposal, "planet_radius_rearth")
    assert '# Not guessed:\n#   planet_radius_rearth: "rp"' in proposal.toml


@pytest.mark.parametrize(
    ("unit", "factor", "relative_density"), [("earthRad", 1, 0.9), ("jupiterRad", JUPITER_RADIUS, 0.2)]
)
def test_the_density_tells_which_of_two_units_it_is(
    unit: str, factor: float, relative_density: float, tmp_path: Path
) -> None:
    radius = [0.8 + row / ROWS for row in range(ROWS)]
    mass = [relative_density * (value * factor) ** 3 for value in radius]
    proposal = proposed(tmp_path, {"name": TRUE["planet"], "rp": radius, "pl_mass_earth": mass})
    assert entry(proposal, "planet_radius_rearth") == {"from": "rp", "unit": unit}


def test_of_two_units_of_the_same_the_canonical_one_is_taken(tmp_path: Path) -> None:
    table = {"planet": TRUE["planet"], "pl_radj": times("radius", 1 / JUPITER_RADIUS), "pl_rade": TRUE["radius"]}
    proposal = proposed(tmp_path, table)
    assert entry(proposal, "planet_radius_rearth") == {"from": "pl_rade", "unit": "earthRad"}
    assert sure(proposal, "planet_radius_rearth") == "high"
    [reason] = [guess.reason for guess in proposal.guesses if guess.name == "planet_radius_rearth"]
    assert 'rather than "pl_radj" (the same in jupiterRad)' in reason


def test_of_several_measurements_the_fuller_then_the_finer_is_taken(tmp_path: Path) -> None:
    sparse = [age if row < 9 else "" for row, age in enumerate(TRUE["age"])]
    teff = TRUE["temperature"]
    table = {
        "planet": TRUE["planet"], "iso_age": sparse, "st_age": [1.02 * age for age in TRUE["age"]],
        "photo_teff": [1.03 * t for t in teff], "photo_teff_err": [300] * ROWS, "line_teff": teff,
        "line_teff_err": [60] * ROWS,
    }  # fmt: skip
    proposal = proposed(tmp_path, table)
    assert entry(proposal, "stellar_age_gyr")["from"] == "st_age"
    assert entry(proposal, "stellar_teff_k") == {"from": "line_teff", "unit": "K", "plus": "line_teff_err"}
    assert sure(proposal, "stellar_teff_k") == "low"  # the names' beginnings are not understood, and there are two


@pytest.mark.parametrize(
    ("name", "cells", "unit"),
    [
        ("age", TRUE["age"], "Gyr"),
        ("age", times("age", 1e3), "Myr"),
        ("age", times("age", 1e9), "yr"),
        ("log_age", log("age", 9), "dex(yr)"),
        ("lum", log("luminosity"), "dex(solLum)"),
        ("lum", TRUE["luminosity"], "solLum"),
        ("lx", [10 ** (20 + row / ROWS) for row in range(ROWS)], "W"),
        ("lx", [10 ** (27 + row / ROWS) for row in range(ROWS)], "erg/s"),
        ("log_lx", [27 + 3 * row / ROWS for row in range(ROWS)], "dex(erg/s)"),
        ("log_teff", log("temperature"), "dex(K)"),
    ],
)
def test_logarithms_and_powers_of_ten_show_in_the_values(name: str, cells: Cells, unit: str, tmp_path: Path) -> None:
    [guess] = [guess for guess in proposed(tmp_path, {"planet": TRUE["planet"], name: cells}).guesses if guess.unit]
    assert (guess.sources, guess.unit) == ((name,), unit)


def test_a_temperature_is_the_stars_only_where_it_is_hot_enough(tmp_path: Path) -> None:
    hot, cool = TRUE["temperature"], times("temperature", 0.2)
    assert entry(proposed(tmp_path, {"planet": TRUE["planet"], "temp": hot}), "stellar_teff_k")["from"] == "temp"
    assert not entry(proposed(tmp_path, {"planet": TRUE["planet"], "temp": cool}), "stellar_teff_k")


def test_numbers_that_mean_missing_are_found(tmp_path: Path) -> None:
    def with_marks(name: str, *marks: object) -> list[object]:
        return [*marks, *TRUE[name][len(marks) :]]

    table = {
        "planet": TRUE["planet"], "rp_earth": with_marks("radius", -1, 0), "ecc": with_marks("eccentricity", -1, 0),
        "dec": with_marks("dec", -1, -999), "logage": [-1, -1, *log("age", 9)[2:]], "kmag": with_marks("k", 99.99, 0),
        "teff": with_marks("temperature", "unknown", "unknown"),
    }  # fmt: skip
    proposal = proposed(tmp_path, table)
    assert set(entry(proposal, "planet_radius_rearth")["missing"]) == {-1, 0}
    assert entry(proposal, "eccentricity")["missing"] == [-1]  # a circle is no gap
    assert entry(proposal, "dec_deg")["missing"] == [-999]
    assert entry(proposal, "stellar_age_gyr")["missing"] == [-1]
    assert entry(proposal, "k_mag")["missing"] == [99.99]
    assert entry(proposal, "stellar_teff_k")["missing"] == ["unknown"]


def test_nothing_is_proposed_whose_values_cannot_be_it(tmp_path: Path) -> None:
    table = {"planet": TRUE["planet"], "eccentricities_ecc": TRUE["ra"], "teff": TRUE["j"], "dist": ["far"] * ROWS}
    proposal = proposed(tmp_path, table)
    assert "fit no unit" in open_question(proposal, "stellar_teff_k")
    assert 'text such as "far"' in open_question(proposal, "distance_pc")
    assert not entry(proposal, "eccentricity")


def test_a_proposal_says_what_it_found_nothing_for_and_what_it_did_not_use(tmp_path: Path) -> None:
    toml = proposed(tmp_path, {"planet": TRUE["planet"], "weather": [1] * ROWS}).toml
    assert "# Nothing found for host_id, planet_radius_rearth" in toml
    assert '# Not used: "weather".' in toml


def test_only_the_first_rows_are_looked_at(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sampling, "ROWS", 10)
    table = {"planet": TRUE["planet"], "rp_earth": [*TRUE["radius"][:10], *(["dust"] * (ROWS - 10))]}
    proposal = proposed(tmp_path, table)
    assert "the first 10 rows" in proposal.toml
    assert entry(proposal, "planet_radius_rearth")["from"] == "rp_earth"


def test_a_file_that_is_not_there_and_one_that_is_no_table_are_complained_about(
    tmp_path: Path, write_csv: Callable[[str | bytes], Path]
) -> None:
    for path in (tmp_path / "nowhere.csv", write_csv(b""), write_csv(b"%PDF-1.7")):
        with pytest.raises(CatalogueError) as failure:
            propose(path)
        assert failure.value.exit_code == 3


def test_a_header_alone_is_enough_for_the_names(write_csv: Callable[[str | bytes], Path]) -> None:
    proposal = propose(write_csv("planet_name,st_teff,pl_orbper_days\n"))
    assert entry(proposal, "stellar_teff_k") == {"from": "st_teff", "unit": "K"}
    assert entry(proposal, "orbital_period_d") == {"from": "pl_orbper_days", "unit": "d"}


def test_a_proposal_as_json_says_the_same(tmp_path: Path) -> None:
    said = proposed(tmp_path, UNDERSCORED).as_dict()
    radius = next(guess for guess in said["guesses"] if guess["name"] == "planet_radius_rearth")
    assert (radius["from"], radius["unit"], radius["confidence"]) == ("pl_rade", "earthRad", "high")
    assert radius["entry"] == {"plus": "pl_radeerr1", "minus": "pl_radeerr2"}
    assert said["toml"].startswith('# Column map proposed for "table.csv"')
