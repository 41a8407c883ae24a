"""Names and descriptions of columns are taken apart into the trade's words."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest

from keptair.catalogue import units
from keptair.catalogue.proposing import vocabulary
from keptair.catalogue.proposing.naming import read_description, read_name, read_names, read_ucd
from keptair.tables import schema


@pytest.mark.parametrize(
    ("name", "quantity", "subject"),
    [
        ("pl_rade", "radius", "planet"),
        ("PlanetRadius", "radius", "planet"),
        ("RADIUS_PLANET", "radius", "planet"),
        ("r_p", "radius", "planet"),
        ("prad", "radius", "planet"),
        ("R*", "radius", "star"),
        ("R_star", "radius", "star"),
        ("host radius", "radius", "star"),
        ("srad", "radius", "star"),
        ("radius", "radius", ""),
        ("M_pl", "mass", "planet"),
        ("bestmass", "mass", ""),
        ("Mstar", "mass", "star"),
        ("Msini", "minimum_mass", ""),
        ("m_sin_i", "minimum_mass", ""),
        ("T_eff", "temperature", "star"),
        ("steff", "temperature", "star"),
        ("stellar effective temperature", "temperature", "star"),
        ("pl_temp", "temperature", "planet"),
        ("orb_per", "period", ""),
        ("P", "period", ""),
        ("semi-major axis", "axis", ""),
        ("orbsmax", "axis", ""),
        ("a", "axis", ""),
        ("pl_e", "eccentricity", "planet"),
        ("S_inc", "insolation", ""),
        ("bond albedo", "albedo", ""),
        ("Lbol", "luminosity", ""),
        ("L_X", "xray", ""),
        ("X-ray luminosity", "xray", ""),
        ("isochrone_age", "age", ""),
        ("2MASS J mag", "j_magnitude", ""),
        ("Ks", "k_magnitude", ""),
        ("magK", "k_magnitude", ""),
        ("sy_dist", "distance", "system"),
        ("RAdeg", "right_ascension", ""),
        ("DEJ2000", "declination", ""),
        ("lastUpdate", "updated", ""),
        ("isTransiting", "transit", ""),
    ],
)
def test_a_name_says_its_quantity_and_whose_it_is(name: str, quantity: str, subject: str) -> None:
    reading = read_name(name)
    assert (reading.quantity, reading.subject, reading.other) == (quantity, subject, False)


OTHERS = """parallax radius_ratio rp/rs a/Rs pl_dens star_logg rotation_period kepmag angular_dist transit_depth pl_teq
discovery_year metratio srho num_planets mass_ref pmra"""


@pytest.mark.parametrize("name", OTHERS.split())
def test_other_things_of_the_trade_are_known_for_what_they_are(name: str) -> None:
    assert read_name(name).other or not read_name(name).quantity


@pytest.mark.parametrize("name", ["stage", "page", "rare", "message", "xyz", "isbadprad", "dosage2", "Теплота", ""])
def test_words_that_only_look_like_the_trades_are_not_taken_for_them(name: str) -> None:
    assert not read_name(name).quantity


@pytest.mark.parametrize(
    ("name", "unit", "words"),
    [
        ("Radius [R_Jup]", "R_Jup", ()),
        ("Period (days)", "days", ()),
        ("log(L/Lsun)", "", ("lsun",)),
        ("age_gyr", "", ("gyr",)),
        ("radj", "", ("j",)),
        ("bmasse", "", ("e",)),
        ("MpJup", "", ("jup",)),
        ("TeffK", "", ("k",)),
    ],
)
def test_units_are_found_in_names(name: str, unit: str, words: tuple[str, ...]) -> None:
    assert (read_name(name).unit, read_name(name).unit_words) == (unit, words)


def test_what_is_not_understood_is_kept_unless_many_columns_begin_with_it() -> None:
    alone, *others = read_names(["qr7_mass", "zzy_mass", "zzy_radius", "zzy_teff"])
    assert alone.unknown == ("qr7",)
    assert [reading.unknown for reading in others] == [(), (), ()]


@pytest.mark.parametrize(
    ("text", "quantity", "subject", "other"),
    [
        ("Planet radius in Earth radii, from the depth of its transits", "radius", "planet", False),
        ("Radius of the host star [solRad]", "radius", "star", False),
        ("Ratio of the planet's radius to the star's", "", "", True),
        ("Upper uncertainty of the mass", "", "", True),
        ("Apparent magnitude in the K band (2MASS)", "k_magnitude", "", False),
        ("Decimal logarithm of the age in years", "age", "", False),
        ("Something else entirely", "", "", False),
    ],
)
def test_a_description_speaks_of_what_it_says_first(text: str, quantity: str, subject: str, other: bool) -> None:
    reading = read_description(text)
    assert (reading.quantity, reading.subject, reading.other) == (quantity, subject, other)


@pytest.mark.parametrize(
    ("ucd", "quantity"),
    [
        ("phys.size.radius", "radius"),
        ("phys.luminosity;em.X-ray", "xray"),
        ("phys.luminosity", "luminosity"),
        ("stat.error;phys.mass", "error"),
        ("pos.eq.ra;meta.main", "right_ascension"),
        ("phys.angSize", ""),
        ("", ""),
    ],
)
def test_a_ucd_names_its_quantity(ucd: str, quantity: str) -> None:
    assert read_ucd(ucd) == quantity


def test_every_canonical_number_is_described_and_every_unit_can_be_read() -> None:
    assert {entry.name for entry in vocabulary.inputs()} == set(schema.measured_inputs())
    quantities = {*vocabulary.words().quantities.values()}
    for entry in vocabulary.inputs():
        assert entry.quantity in quantities
        assert entry.units[0].unit in (units.schema_unit(entry.name), "")
        for unit in entry.units:
            units.conversion(unit.unit, entry.name)
            assert unit.low[0] <= unit.low[1]
            assert unit.high[0] <= unit.high[1]


def test_every_word_for_a_unit_is_a_unit_of_its_dimension() -> None:
    by_dimension = {units.dimension_of(name): name for name in schema.measured_inputs()}
    for word in vocabulary.words().units.values():
        for dimension, spelled in word.spellings.items():
            units.conversion(spelled, by_dimension[dimension])


def test_no_word_stands_twice_in_a_list() -> None:
    folder = Path(vocabulary.__file__).parent
    read = tomllib.loads((folder / "words.toml").read_text(encoding="utf-8"))
    for table in ("quantities", "usual", "subjects", "sides", "bare_sides", "transits", "kinds", "limits"):
        words = [word for listed in read[table].values() for word in listed.split()]
        assert sorted(words) == sorted(set(words)), table
