"""The invented survey is what its README says: reproducible, consistent, and dirty where it should be."""

import csv
import datetime
import math
import subprocess
import sys
import tomllib
from collections import Counter
from fnmatch import fnmatchcase
from pathlib import Path
from typing import Any

import pytest

ROOT = Path(__file__).parents[2]
SAMPLE = ROOT / "sample_data"
FILES = ("survey.csv", "survey_dirty.csv", "survey_other_names.csv")
REAL_PREFIXES = (
    "kepler", "koi", "kic", "k2", "epic", "toi", "tic", "gj", "gliese", "hd", "hip", "trappist", "lhs", "ltt", "wasp",
    "hat", "kelt", "corot", "qatar", "tres", "xo", "ngts", "ogle", "moa", "wolf", "ross", "barnard", "proxima", "psr",
)  # fmt: skip
FIELDS = {
    field["name"]: field
    for field in tomllib.loads((ROOT / "schemas" / "catalogue.toml").read_text(encoding="utf-8"))["fields"]
}
NUMBERS = [name for name, field in FIELDS.items() if field["type"] == "number"]
BACKGROUNDS = {"", "co2", "n2", "n2_icy", "h2", "steam"}

# IAU 2015 Resolution B3: nominal equatorial radii [km] and GM [m3 s-2] of Earth and Jupiter, T_eff of the Sun [K].
JUPITERS = {"jupiterRad": 71492.0 / 6378.1, "jupiterMass": 1.2668653e17 / 3.986004e14}
SUN_TEFF = 5772.0
# 2 pi sqrt(au^3 / GM_sun) [d], from the au of IAU 2012 B2 and the nominal GM of the Sun, 1.3271244e20 m3 s-2.
YEAR = 2 * math.pi * math.sqrt(149597870700.0**3 / 1.3271244e20) / 86400

Row = dict[str, str]


def lines(name: str) -> list[list[str]]:
    with (SAMPLE / name).open(encoding="utf-8", newline="") as file:
        return list(csv.reader(line for line in file if not line.startswith("#")))


def rows(name: str) -> list[Row]:
    header, *cells = lines(name)
    return [dict(zip(header, line, strict=True)) for line in cells]


@pytest.fixture(scope="module")
def survey() -> list[Row]:
    return rows("survey.csv")


@pytest.fixture(scope="module")
def column_map() -> dict[str, Any]:
    return tomllib.loads((SAMPLE / "survey_other_names.toml").read_text(encoding="utf-8"))


def given(survey: list[Row], *names: str) -> list[tuple[float, ...]]:
    """Those numbers, from the rows that have them all."""
    return [tuple(float(row[name]) for name in names) for row in survey if all(row[name] for name in names)]


def broken_rules(row: Row) -> list[str]:
    """Columns whose own rule a row breaks."""
    broken = [name for name in NUMBERS if row[name] and not _within_bounds(name, row[name])]
    broken += [name for name in ("planet_radius_kind", "planet_mass_kind", "transits") if not _is_word(name, row[name])]
    broken += ["background"] if row["background"] not in BACKGROUNDS else []
    broken += ["planet_id"] if not 1 <= len(row["planet_id"]) <= 128 else []
    try:
        datetime.date.fromisoformat(row["updated"])
    except ValueError:
        broken.append("updated")
    return broken


def _within_bounds(name: str, text: str) -> bool:
    try:
        value = float(text)
    except ValueError:
        return False
    bounds = FIELDS[name]["constraints"]
    return math.isfinite(value) and bounds.get("minimum", 0.0) <= value <= bounds["maximum"]


def _is_word(name: str, text: str) -> bool:
    return text in FIELDS[name]["constraints"]["enum"]


def test_the_script_reproduces_the_files_byte_for_byte(tmp_path: Path) -> None:
    subprocess.run([sys.executable, "-B", str(SAMPLE / "make_survey.py"), str(tmp_path)], check=True)
    assert sorted(path.name for path in tmp_path.iterdir()) == sorted(FILES)
    for name in FILES:
        assert (tmp_path / name).read_bytes() == (SAMPLE / name).read_bytes(), name


def test_names_are_unique_and_of_no_real_catalogue(survey: list[Row]) -> None:
    names = [row["planet_id"] for row in survey]
    assert len(names) == len(set(names)) == 400
    assert [name for name in names if name.lower().startswith(REAL_PREFIXES)] == []
    assert all(row["planet_id"].rsplit(" ", 1)[0] == row["host_id"] for row in survey)


def test_every_column_is_canonical(survey: list[Row]) -> None:
    allowed = set(FIELDS) | {name + end for name in NUMBERS for end in ("_err_plus", "_err_minus", "_bound")}
    assert set(survey[0]) <= allowed
    assert set(FIELDS) <= set(survey[0])


def test_no_clean_row_breaks_a_rule(survey: list[Row]) -> None:
    assert [(row["planet_id"], broken) for row in survey if (broken := broken_rules(row))] == []
    errors = [float(row[name]) for row in survey for name in row if "_err_" in name and row[name]]
    assert min(errors) > 0


def test_orbits_keep_keplers_third_law(survey: list[Row]) -> None:
    orbits = given(survey, "semi_major_axis_au", "orbital_period_d", "stellar_mass_msun")
    assert len(orbits) > 250
    for axis, period, mass in orbits:
        assert axis == pytest.approx(math.cbrt(mass * (period / YEAR) ** 2), rel=1e-4)


def test_insolation_is_luminosity_over_distance_squared(survey: list[Row]) -> None:
    lit = given(survey, "insolation_earth", "stellar_luminosity_lsun", "semi_major_axis_au")
    assert len(lit) > 180
    for insolation, luminosity, axis in lit:
        assert insolation == pytest.approx(luminosity / axis**2, rel=2e-3)


def test_stars_keep_stefan_and_boltzmanns_law(survey: list[Row]) -> None:
    stars = given(survey, "stellar_luminosity_lsun", "stellar_radius_rsun", "stellar_teff_k")
    assert len(stars) > 250
    for luminosity, radius, teff in stars:
        assert luminosity == pytest.approx(radius**2 * (teff / SUN_TEFF) ** 4, rel=1e-3)


def test_planets_of_one_star_give_the_same_star(survey: list[Row]) -> None:
    star_columns = [name for name in survey[0] if name.startswith(("stellar_", "j_", "k_", "distance", "ra_", "dec_"))]
    stars = {(row["host_id"], *(row[name] for name in star_columns)) for row in survey}
    hosts = Counter(row["host_id"] for row in survey)
    assert len(stars) == len(hosts)
    assert sum(count > 1 for count in hosts.values()) > 60
    assert max(hosts.values()) == 4


def test_masses_and_radii_come_in_every_kind(survey: list[Row]) -> None:
    with_mass = [row for row in survey if row["planet_mass_mearth"]]
    with_radius = [row for row in survey if row["planet_radius_rearth"]]
    mass_kinds = Counter(row["planet_mass_kind"] for row in with_mass)
    radius_kinds = Counter(row["planet_radius_kind"] for row in with_radius)
    assert mass_kinds["measured"] > 150
    assert mass_kinds["minimum"] > 60
    assert mass_kinds["relation"] >= 15
    assert mass_kinds[""] >= 5
    assert radius_kinds["measured"] > 250
    assert radius_kinds["relation"] >= 20
    assert sum(row["planet_mass_kind"] == row["planet_radius_kind"] == "relation" for row in survey) >= 1
    assert sum(row["planet_mass_mearth_bound"] == "upper" for row in survey) >= 20


def test_gaps_errors_and_limits_are_those_of_a_real_catalogue(survey: list[Row]) -> None:
    def count(name: str) -> int:
        return sum(bool(row[name]) for row in survey)

    small = [
        row for row in survey if row["planet_radius_kind"] == "measured" and float(row["planet_radius_rearth"]) < 1.5
    ]
    weighed = [
        row for row in small if row["planet_mass_kind"] in ("measured", "") and row["planet_mass_mearth_err_plus"]
    ]
    assert len(weighed) < len(small) / 2
    assert 160 < count("stellar_age_gyr") < 240
    assert count("planet_radius_rearth") < 380
    assert count("bond_albedo") >= 15
    assert count("stellar_xray_luminosity_w") >= 40
    assert count("background") >= 10
    plus, minus = (
        {row["planet_id"] for row in survey if row[f"planet_radius_rearth_err_{side}"]} for side in ("plus", "minus")
    )
    assert len(plus - minus) >= 10
    assert {row["transits"] for row in survey} == {"yes", "no", ""}
    bounds = Counter(row[name] for row in survey for name in row if name.endswith("_bound"))
    assert bounds["upper"] > 50
    assert bounds["lower"] >= 5


def test_some_planets_have_neither_star_nor_insolation(survey: list[Row]) -> None:
    star = ("stellar_teff_k", "stellar_radius_rsun", "stellar_mass_msun", "stellar_luminosity_lsun", "insolation_earth")
    assert sum(not any(row[name] for name in star) for row in survey) == 7


def test_the_dirty_file_starts_with_sixty_clean_rows() -> None:
    assert lines("survey_dirty.csv")[:61] == lines("survey.csv")[:61]


def test_the_dirty_file_ends_with_fifteen_rows_each_broken_in_one_way() -> None:
    header, *cells = lines("survey_dirty.csv")
    dirty = cells[60:]
    assert len(dirty) == 15
    assert [len(line) - len(header) for line in dirty] == [0, 0, -1, 1, *[0] * 11]
    whole = [dict(zip(header, line, strict=True)) for line in dirty if len(line) == len(header)]
    nameless, repeated, endless, *emptied = whole
    assert broken_rules(nameless) == ["planet_id"]
    assert nameless["planet_id"] == ""
    assert broken_rules(endless) == ["planet_id"]
    assert endless["planet_id"].startswith("=")
    first = next(line for line in cells[:60] if line[0] == repeated["planet_id"])
    assert repeated["updated"] < first[-1]
    assert [broken_rules(row) for row in emptied] == [
        ["stellar_mass_msun"],
        ["orbital_period_d"],
        ["planet_mass_mearth"],
        ["eccentricity"],
        ["bond_albedo"],
        ["stellar_age_gyr"],
        ["stellar_teff_k"],
        ["background"],
        ["transits"],
        ["updated"],
    ]
    assert emptied[-1]["planet_id"] == "=cmd()"


def test_the_column_map_names_every_column_and_only_those(column_map: dict[str, Any]) -> None:
    header = lines("survey_other_names.csv")[0]
    named = set(column_map["file"]["carry"]) | set(column_map["rows"]["keep"]) | set(column_map["rows"]["drop"])
    for column in column_map["columns"].values():
        named.update([column["from"]] if isinstance(column["from"], str) else column["from"])
        named.update(column[key] for key in ("plus", "minus", "bound", "upper", "lower", "kind") if key in column)
    assert named == set(header)
    assert set(column_map["columns"]) | {"planet_radius_kind", "planet_mass_kind"} == set(FIELDS)


def kept(row: Row, column_map: dict[str, Any]) -> bool:
    keep, drop = column_map["rows"]["keep"]["status"], column_map["rows"]["drop"]["status"]
    status = row["status"]
    return any(fnmatchcase(status, pattern) for pattern in keep) and not any(fnmatchcase(status, p) for p in drop)


def numbers_through_map(row: Row, column: dict[str, Any]) -> dict[str, Any]:
    """Value, errors, limit and kind of one planet's number, as the map says."""

    def number(key: str) -> float | None:
        text = row.get(column.get(key, ""), "")
        return None if text in ("", "--") or float(text) in column.get("missing", []) else float(text)

    value, plus, minus = number("from"), number("plus"), number("minus")
    limit = {"1": "upper", "-1": "lower"}.get(row.get(column.get("bound", ""), ""), "")
    if value is None and number("upper") is not None:
        value, limit = number("upper"), "upper"
    sizes = [abs(error) if error else None for error in (plus, minus)]
    if "minus" not in column:
        sizes = [sizes[0], sizes[0]]
    if column.get("unit") == "dex(yr)" and value is not None:
        years = 10**value / 1e9
        sizes = [
            abs(years * (10 ** (sign * size) - 1)) if size else None for sign, size in zip((1, -1), sizes, strict=True)
        ]
        value = years
    factor = JUPITERS.get(column.get("unit", ""), 1.0)
    scaled = [None if part is None else part * factor for part in (value, *sizes)]
    words = column.get("kinds", {"*": ""})
    kind = words.get(row.get(column.get("kind", ""), ""), words["*"])
    return {"numbers": scaled, "bound": limit if value is not None else "", "kind": kind if value is not None else ""}


def numbers_as_they_are(row: Row, name: str) -> dict[str, Any]:
    cells = [row[name], row.get(f"{name}_err_plus", ""), row.get(f"{name}_err_minus", "")]
    kind_column = {"planet_radius_rearth": "planet_radius_kind", "planet_mass_mearth": "planet_mass_kind"}.get(name, "")
    kind = (row[kind_column] or "measured") if kind_column and row[name] else ""
    numbers = [float(cell) if cell else None for cell in cells]
    return {"numbers": numbers, "bound": row.get(f"{name}_bound", ""), "kind": kind}


def near(found: float | None, wanted: float | None, tolerance: float = 1e-4) -> bool:
    if found is None or wanted is None:
        return found is wanted
    return math.isclose(found, wanted, rel_tol=tolerance)


def test_other_names_tell_of_the_same_planets(survey: list[Row], column_map: dict[str, Any]) -> None:
    everything = rows("survey_other_names.csv")
    others = {row["name"] or row["candidate"]: row for row in everything if kept(row, column_map)}
    assert len(everything) - len(others) == 12
    assert list(others) == [row["planet_id"] for row in survey]
    for planet in survey:
        other = others[planet["planet_id"]]
        for name in NUMBERS:
            found = numbers_through_map(other, column_map["columns"][name])
            wanted = numbers_as_they_are(planet, name)
            where = f"{planet['planet_id']} {name}"
            assert near(found["numbers"][0], wanted["numbers"][0], 1e-5), where
            assert all(map(near, found["numbers"][1:], wanted["numbers"][1:])), where
            assert (found["bound"], found["kind"]) == (wanted["bound"], wanted["kind"]), where


def test_other_names_tell_the_same_words(survey: list[Row], column_map: dict[str, Any]) -> None:
    others = [row for row in rows("survey_other_names.csv") if kept(row, column_map)]
    columns = column_map["columns"]
    transits = columns["transits"]["words"]
    for planet, other in zip(survey, others, strict=True):
        day = datetime.datetime.strptime(other["changed"], columns["updated"]["date"]).date()
        assert other["star"] == planet["host_id"]
        assert other["air"] == planet["background"]
        assert transits.get(other["tr"], transits["*"]) == planet["transits"]
        assert day.isoformat() == planet["updated"]


def test_the_settings_file_sets_the_documented_defaults() -> None:
    settings = tomllib.loads((SAMPLE / "settings.toml").read_text(encoding="utf-8"))
    assert (settings["draws"], settings["seed"]) == (512, 1)
    assert settings["verdict"] == {"keep": 0.8, "lose": 0.2, "envelope": 0.9}
