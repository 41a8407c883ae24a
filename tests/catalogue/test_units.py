"""Units as people spell them, against the nominal values of IAU 2015 Resolution B3."""

from __future__ import annotations

import contextlib

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from keptair.catalogue.units import Conversion, UnitError, conversion, error_conversion
from keptair.tables import schema

# IAU 2015 Resolution B3 (Prsa et al. 2016, AJ 152, 41), SI; au: IAU 2012 Resolution B2; pc: 648000/pi au.
EARTH_RADIUS, JUPITER_RADIUS, SUN_RADIUS = 6.3781e6, 7.1492e7, 6.957e8
EARTH_GM, JUPITER_GM, SUN_GM = 3.986004e14, 1.2668653e17, 1.3271244e20
SUN_LUMINOSITY, SOLAR_CONSTANT, AU = 3.828e26, 1361.0, 149597870700.0


@pytest.mark.handbook(source="IAU 2015 Resolution B3, nominal solar and planetary conversion constants")
@pytest.mark.parametrize(
    ("spellings", "column", "factor"),
    [
        ("jupiterRad R_jup Rjup RJ R_J jovRad Rjupiter", "planet_radius_rearth", JUPITER_RADIUS / EARTH_RADIUS),
        ("earthRad R_earth Rearth Re R⊕ Rgeo", "planet_radius_rearth", 1.0),
        ("R_sun Rsun solRad", "planet_radius_rearth", SUN_RADIUS / EARTH_RADIUS),
        ("km", "planet_radius_rearth", 1e3 / EARTH_RADIUS),
        ("MJ Mjup M_jup jupiterMass jovMass", "planet_mass_mearth", JUPITER_GM / EARTH_GM),
        ("M_e Me M_earth earthMass geoMass", "planet_mass_mearth", 1.0),
        ("M_sun Msun solMass M☉", "planet_mass_mearth", SUN_GM / EARTH_GM),
        ("W m-2|W/m2|W/m^2|W m**-2", "insolation_earth", 1 / SOLAR_CONSTANT),
        ("erg s-1 cm-2|erg/s/cm2", "insolation_earth", 1e-3 / SOLAR_CONSTANT),
        ("S_earth Searth earthFlux", "insolation_earth", 1.0),
        ("L_sun Lsun solLum L☉", "stellar_luminosity_lsun", 1.0),
        ("W", "stellar_luminosity_lsun", 1 / SUN_LUMINOSITY),
        ("erg/s|erg s-1", "stellar_xray_luminosity_w", 1e-7),
        ("Rsun", "semi_major_axis_au", SUN_RADIUS / AU),
        ("km", "semi_major_axis_au", 1e3 / AU),
        ("Myr Ma", "stellar_age_gyr", 1e-3),
        ("yr years a", "stellar_age_gyr", 1e-9),
        ("h hr hours", "orbital_period_d", 1 / 24),
        ("h hourangle", "ra_deg", 15.0),
        ("kpc", "distance_pc", 1e3),
        ("%", "eccentricity", 0.01),
    ],
)
def test_spellings_become_factors(spellings: str, column: str, factor: float) -> None:
    for spelling in spellings.split("|") if "|" in spellings else spellings.split():
        found = conversion(spelling, column)
        assert not found.logarithmic
        assert found.factor == pytest.approx(factor, rel=1e-9), spelling


def test_the_canonical_unit_and_no_unit_change_nothing() -> None:
    for column in schema.inputs():
        if column.type == "number":
            for unit in (column.unit, "", "-", "---", "none"):
                assert conversion(unit, column.name) == Conversion()


@pytest.mark.parametrize("spelling", ["dex(yr)", "log10(yr)", "log(yr)", "lg( yr )", "[yr]"])
def test_logarithms_are_read_with_their_errors_in_dex(spelling: str) -> None:
    found = conversion(spelling, "stellar_age_gyr")
    values = found.values(np.array([9.0, 10.0]))
    np.testing.assert_allclose(values, [1.0, 10.0], rtol=1e-12)
    of_errors = error_conversion("", "stellar_age_gyr", found)
    # 10^(9+0.3) = 1.9953 Gyr and 10^(9-0.3) = 0.5012 Gyr: the tables of logarithms
    assert of_errors.error(np.array([0.3, 0.0]), values, +1)[0] == pytest.approx(0.9953, abs=1e-4)
    assert of_errors.error(np.array([-0.3, 0.0]), values, -1)[0] == pytest.approx(1 - 0.5012, abs=1e-4)


def test_temperatures_in_celsius_are_shifted_and_their_errors_are_not() -> None:
    found = conversion("degC", "stellar_teff_k")
    values = found.values(np.array([5500.0]))
    assert values[0] == 5773.15
    assert error_conversion("", "stellar_teff_k", found).error(np.array([50.0]), values, +1)[0] == 50.0


def test_errors_may_have_a_unit_of_their_own() -> None:
    age = conversion("Gyr", "stellar_age_gyr")
    assert error_conversion("Myr", "stellar_age_gyr", age).error(np.array([-500.0]), np.array([4.0]), -1)[0] == 0.5


@pytest.mark.parametrize(
    ("unit", "column", "reason"),
    [
        ("R_jup", "planet_mass_mearth", "a length, but a mass is needed"),
        ("MJ", "planet_radius_rearth", "a mass, but a length is needed"),
        ("mas", "distance_pc", "an angle, but a length is needed"),
        ("K", "eccentricity", "a temperature, but a plain number is needed"),
        ("W", "insolation_earth", "a luminosity, but a flux is needed"),
        ("mag", "distance_pc", "a magnitude, but a length is needed"),
        ("km/s", "orbital_period_d", "of dimension speed/velocity, but a time is needed"),
        ("dex(Msun)", "stellar_age_gyr", "a mass, but a time is needed"),
        ("furlong-ish", "distance_pc", "no such unit is known"),
        ("1e-40099999", "distance_pc", "no such unit can be reckoned with"),
        ("10 Jy99999", "distance_pc", "no such unit can be reckoned with"),
        ("dex", "stellar_age_gyr", "a logarithm, but of what"),
        ("] [", "stellar_age_gyr", "no such unit is known"),
    ],
)
def test_a_unit_of_the_wrong_dimension_names_both(unit: str, column: str, reason: str) -> None:
    with pytest.raises(UnitError, match=reason):
        conversion(unit, column)


@given(st.text(max_size=12))
def test_any_text_is_a_unit_or_a_unit_error(text: str) -> None:
    with contextlib.suppress(UnitError):
        assert conversion(text, "planet_mass_mearth").factor != 0
