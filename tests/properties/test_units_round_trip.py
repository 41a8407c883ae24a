"""Values written in any unit come back as they were: from canonical to the unit and through the reader's conversion."""

from __future__ import annotations

from itertools import combinations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from keptair.catalogue.units import UnitError, conversion, error_conversion
from keptair.tables import schema

UNITS = {
    "planet_radius_rearth": ("earthRad", "jupiterRad", "solRad", "km", "AU"),
    "planet_mass_mearth": ("earthMass", "jupiterMass", "solMass", "kg", "g"),
    "orbital_period_d": ("d", "h", "yr", "s"),
    "semi_major_axis_au": ("AU", "solRad", "km", "pc"),
    "stellar_teff_k": ("K", "kK"),
    "stellar_radius_rsun": ("solRad", "km", "jupiterRad"),
    "stellar_mass_msun": ("solMass", "kg", "jupiterMass"),
    "stellar_luminosity_lsun": ("solLum", "W", "erg s-1"),
    "stellar_age_gyr": ("Gyr", "Myr", "yr"),
    "stellar_xray_luminosity_w": ("W", "erg s-1", "solLum"),
    "distance_pc": ("pc", "kpc", "lyr", "km"),
    "ra_deg": ("deg", "rad", "hourangle"),
    "dec_deg": ("deg", "rad", "arcmin"),
}
PAIRS = [(column, unit) for column, units in UNITS.items() for unit in units]
MIXED_UP = [
    ("planet_radius_rearth", "earthMass"), ("planet_mass_mearth", "jupiterRad"), ("orbital_period_d", "km"),
    ("semi_major_axis_au", "kg"), ("stellar_teff_k", "W"), ("stellar_luminosity_lsun", "K"), ("ra_deg", "d"),
    ("eccentricity", "deg"), ("insolation_earth", "W"),
]  # fmt: skip


@given(pair=st.sampled_from(PAIRS), power=st.floats(-6, 6), error=st.floats(1e-3, 0.5))
@settings(deadline=None)
def test_a_value_and_its_error_come_back_from_any_unit(pair: tuple[str, str], power: float, error: float) -> None:
    """astropy is the one who writes them in the unit."""
    from astropy import units

    column, unit = pair
    value = 10**power
    written = (value * units.Unit(schema.catalogue()[column].unit)).to_value(unit)
    found = conversion(unit, column)
    assert found.values(np.array([written]))[0] == pytest.approx(value, rel=1e-12)
    size = error_conversion("", column, found).error(np.array([-error * written]), np.array([value]), -1)[0]
    assert size == pytest.approx(error * value, rel=1e-12)


@given(pair=st.sampled_from(PAIRS), value=st.floats(1e-3, 1e3), dex=st.floats(1e-3, 2), side=st.sampled_from([1, -1]))
@settings(deadline=None)
def test_a_logarithm_and_its_error_come_back_from_any_unit(
    pair: tuple[str, str], value: float, dex: float, side: int
) -> None:
    from astropy import units

    column, unit = pair
    plain = (value * units.Unit(schema.catalogue()[column].unit)).to_value(unit)
    found = conversion(f"dex({unit})", column)
    assert found.values(np.array([np.log10(plain)]))[0] == pytest.approx(value, rel=1e-9)
    size = error_conversion("", column, found).error(np.array([dex]), np.array([value]), side)[0]
    assert value + side * size == pytest.approx(value * 10 ** (side * dex), rel=1e-9)


@given(flux=st.floats(1e-6, 1e6))
@settings(deadline=None)
def test_insolation_comes_back_from_watts(flux: float) -> None:
    """IAU 2015 Resolution B3: the solar constant is 1361 W m⁻²."""
    for unit, written in (("W m-2", 1361 * flux), ("erg s-1 cm-2", 1361e3 * flux), ("earthFlux", flux)):
        found = conversion(unit, "insolation_earth").values(np.array([written]))[0]
        assert found == pytest.approx(flux, rel=1e-12)


def test_any_two_columns_agree_on_the_ratio_of_two_units() -> None:
    for (one, units), (other, others) in combinations(UNITS.items(), 2):
        for unit, another in combinations([unit for unit in units if unit in others], 2):
            ratios = [conversion(unit, column).factor / conversion(another, column).factor for column in (one, other)]
            assert ratios[0] == pytest.approx(ratios[1], rel=1e-12)


@pytest.mark.parametrize(("column", "unit"), MIXED_UP)
def test_a_unit_of_another_dimension_is_refused(column: str, unit: str) -> None:
    with pytest.raises(UnitError):
        conversion(unit, column)
