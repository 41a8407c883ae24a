"""Irradiate: which star, orbit and flux a planet is given, and how each is marked."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from handmade import make_batch
from keptair.batch import Batch
from keptair.settings import Settings
from keptair.stages import fill, irradiate

QUICK = {"draws": 256}
EARTH = {"planet_mass_mearth": 1.0, "planet_radius_rearth": 1.0, "semi_major_axis_au": 1.0, "bond_albedo": 0.0,
         "eccentricity": 0.0}  # fmt: skip
NO_ORBIT = {name: value for name, value in EARTH.items() if name != "semi_major_axis_au"}
SUN = {"stellar_luminosity_lsun": 1.0, "stellar_mass_msun": 1.0, "stellar_age_gyr": 4.57}
BLACK_AT_ONE_AU = 278.32  # K at S = 1 and zero albedo: (1361 W m⁻² / 4σ)^¼


def lit(*rows: dict[str, Any], **changed: Any) -> Batch:
    settings = Settings(**QUICK, **changed)
    return irradiate.run(fill.run(make_batch(rows), settings), settings)


def column(batch: Batch, name: str) -> list[Any]:
    return batch.columns[name].tolist()


def test_luminosity_is_the_catalogues_else_that_of_radius_and_temperature() -> None:
    star = {"stellar_radius_rsun": 2.0, "stellar_teff_k": 5772.0, "stellar_mass_msun": 1.0}
    batch = lit(EARTH | SUN, EARTH | star, EARTH | star | {"stellar_luminosity_lsun": 3.0})
    assert column(batch, "stellar_luminosity_lsun_source") == ["measured_no_error", "computed", "measured_no_error"]
    # the Sun's own temperature with twice its radius: four times its light
    assert column(batch, "stellar_luminosity_lsun") == pytest.approx([1.0, 4.0, 3.0], rel=1e-3)


def test_mass_of_the_star_follows_its_light_where_the_catalogue_has_none() -> None:
    lights = [1.0, 16.0, 0.0625, 0.0023]
    batch = lit(*(EARTH | {"stellar_luminosity_lsun": light} for light in lights))
    # fourth roots, and (0.01)^(1/2.3) below 0.033 L☉
    assert column(batch, "stellar_mass_msun") == pytest.approx([1.0, 2.0, 0.5, 0.135], rel=2e-3)
    assert column(batch, "stellar_mass_msun_source") == ["relation"] * 4


def test_axis_is_the_catalogues_else_keplers() -> None:
    year = {name: value for name, value in EARTH.items() if name != "semi_major_axis_au"} | {
        "orbital_period_d": 365.256
    }
    batch = lit(EARTH | SUN | {"orbital_period_d": 10.0}, year | SUN, year | SUN | {"stellar_mass_msun": 8.0})
    assert column(batch, "semi_major_axis_au_source") == ["measured_no_error", "computed", "computed"]
    assert column(batch, "semi_major_axis_au") == pytest.approx([1.0, 1.0, 2.0], rel=1e-5)


def test_flux_is_that_of_star_and_orbit_else_the_catalogues() -> None:
    batch = lit(
        EARTH | SUN | {"semi_major_axis_au": 0.5},
        EARTH | SUN | {"insolation_earth": 1.05},
        NO_ORBIT | SUN | {"insolation_earth": 7.0},
        EARTH | {"stellar_mass_msun": 1.0, "insolation_earth": 7.0},
    )
    assert column(batch, "insolation_earth") == pytest.approx([4.0, 1.0, 7.0, 7.0])
    assert column(batch, "insolation_earth_source") == [
        "computed",
        "computed",
        "measured_no_error",
        "measured_no_error",
    ]
    assert column(batch, "flag.no_orbit") == [False, False, True, False]
    assert np.isinf(batch.draws["roche_ratio"][2]).all()


@pytest.mark.parametrize(
    ("insolation", "error", "axis_error", "disagrees"),
    [
        (1.14, None, None, False),
        (0.88, None, None, False),
        (1.25, None, None, True),
        (0.80, None, None, True),
        (1.25, 0.05, None, True),
        (1.25, 0.10, None, True),
        (1.25, 0.14, None, False),
        (1.25, 0.20, None, False),
        (1.25, None, 0.10, False),
        (1.25, None, 0.02, True),
        (1.10, 0.01, None, False),
    ],
)
def test_two_fluxes_disagree_beyond_fifteen_percent_and_two_sigma(
    insolation: float, error: float | None, axis_error: float | None, disagrees: bool
) -> None:
    row = EARTH | SUN | {"insolation_earth": insolation}
    row |= {} if error is None else {"insolation_earth_err": error}
    row |= {} if axis_error is None else {"semi_major_axis_au_err": axis_error}
    assert column(lit(row), "flag.insolation_disagrees") == [disagrees]


def test_without_flux_or_star_or_bulk_a_row_is_unassessed_and_never_dark() -> None:
    bulk = {"planet_mass_mearth": 1.0, "planet_radius_rearth": 1.0}
    batch = lit(
        EARTH | SUN,
        bulk | SUN,
        bulk | {"orbital_period_d": 10.0},
        bulk | {"insolation_earth": 1.0},
        SUN | {"semi_major_axis_au": 1.0},
    )
    assert column(batch, "is.assessed") == [True, False, False, False, False]
    assert np.isnan(batch.columns["insolation_earth"][1:3]).all()
    temperature = batch.columns["equilibrium_temperature_k"]
    assert np.isnan(temperature[1:3]).all()
    assert (temperature[3:] > 200).all()  # how hot it is needs no mass
    assert np.isnan(batch.columns["xuv_flux_earth"][1:]).all()


def test_temperature_is_that_of_the_orbit_mean_flux_and_insolation_is_without_it() -> None:
    batch = lit(EARTH | SUN, EARTH | SUN | {"eccentricity": 0.6}, EARTH | SUN | {"bond_albedo": 0.75})
    # ⟨S⟩ = S/√(1 − 0.36) = 1.25 S; an albedo of ¾ divides T by √2
    expected = [BLACK_AT_ONE_AU, BLACK_AT_ONE_AU * 1.25**0.25, BLACK_AT_ONE_AU / 2**0.5]
    assert column(batch, "equilibrium_temperature_k") == pytest.approx(expected, rel=2e-5)
    assert column(batch, "equilibrium_temperature_black_k")[2] == pytest.approx(BLACK_AT_ONE_AU, rel=2e-5)
    assert column(batch, "insolation_earth") == pytest.approx([1.0, 1.0, 1.0])


@pytest.mark.parametrize(("redistribution", "ratio"), [(0.25, 1.0), (0.5, 2**0.25), (1.0, 2**0.5)])
def test_less_redistribution_makes_a_hotter_day(redistribution: float, ratio: float) -> None:
    batch = lit(EARTH | SUN, redistribution=redistribution)
    assert column(batch, "equilibrium_temperature_k") == pytest.approx([BLACK_AT_ONE_AU * ratio], rel=2e-5)


def test_percentiles_of_the_temperature_stand_beside_its_median() -> None:
    batch = lit(EARTH | SUN | {"eccentricity": 0.3, "eccentricity_err": 0.2})
    low, middle, high = (batch.columns[f"equilibrium_temperature_k{end}"][0] for end in ("_p16", "", "_p84"))
    made = batch.draws["equilibrium"][0, 1:]
    assert [low, middle, high] == pytest.approx(np.percentile(made, [16, 50, 84]), rel=1e-9)
    assert low < middle < high


def test_high_energy_light_of_the_sun_now_and_of_a_saturated_star() -> None:
    """4.64 erg cm⁻² s⁻¹ now (Ribas et al. 2005, value from memory); 10^−3.2 of the light until 0.066 Gyr."""
    young = SUN | {"stellar_age_gyr": 0.05}
    batch = lit(
        EARTH | SUN, EARTH | young, EARTH | young | {"stellar_age_gyr": 0.02}, EARTH | SUN | {"eccentricity": 0.6}
    )
    now, saturated, younger, eccentric = batch.draws["xuv_now"][:, 0]
    assert now == pytest.approx(4.68 / 4.64, rel=2e-3)
    assert saturated == pytest.approx(10**-3.2 * 1361 / 4.64e-3, rel=1e-9)
    assert younger == saturated
    assert eccentric == pytest.approx(1.25 * now, rel=1e-9)


def test_a_lighter_star_stays_saturated_longer_and_none_less_than_one_of_1_3_suns() -> None:
    masses = [0.5, 1.0, 1.3, 5.0]
    batch = lit(*(EARTH | SUN | {"stellar_mass_msun": mass} for mass in masses))
    ages = batch.draws["saturation_age"][:, 0]
    assert ages == pytest.approx([0.066 * 0.5**-1.6, 0.066, 0.066 * 1.3**-1.6, 0.066 * 1.3**-1.6], rel=1e-9)


def test_scatter_of_high_energy_light_is_one_deviate_per_star() -> None:
    batch = lit(EARTH | SUN, EARTH | SUN, xuv={"scatter_dex": 0.2})
    spread = np.log10(batch.draws["xuv_now"][0, 1:] / batch.draws["xuv_now"][0, 0])
    np.testing.assert_allclose(np.percentile(spread, [15.87, 50, 84.13]), [-0.2, 0, 0.2], atol=0.01)


def test_a_giants_light_is_not_its_coronas() -> None:
    """Above 0.6 M☉ the law is given at most 2 L☉ (M/M☉)⁴; below, whatever the star shines with."""
    stars = [(1.0, 60.0), (1.0, 1.9), (0.5, 60.0)]
    rows = [EARTH | SUN | {"stellar_mass_msun": mass, "stellar_luminosity_lsun": light} for mass, light in stars]
    batch = lit(*rows)
    per_light = batch.draws["xuv_now"][:, 0] / batch.draws["mean_flux"][:, 0]
    of_the_sun = lit(EARTH | SUN).draws["xuv_now"][0, 0]
    assert per_light[0] == pytest.approx(of_the_sun * 2 / 60, rel=1e-9)
    assert per_light[1] == pytest.approx(of_the_sun, rel=1e-9)
    assert per_light[2] == pytest.approx(of_the_sun * (0.5**-1.6) ** 1.23, rel=1e-9)


@pytest.mark.parametrize(
    ("star", "flagged"),
    [
        ({}, False),
        ({"stellar_radius_rsun": 2.4}, False),
        ({"stellar_radius_rsun": 2.6}, True),
        ({"stellar_teff_k": 6600.0}, True),
        ({"stellar_teff_k": 6400.0}, False),
        ({"stellar_teff_k": 2300.0}, True),
        ({"stellar_teff_k": 2500.0}, False),
    ],
)
def test_giants_and_stars_hotter_or_cooler_than_the_law_was_made_for_are_flagged(
    star: dict[str, float], flagged: bool
) -> None:
    row = EARTH | SUN | {"stellar_radius_rsun": 1.0, "stellar_teff_k": 5000.0} | star
    assert column(lit(row), "flag.xuv_extrapolated") == [flagged]


def test_inputs_without_a_usable_value_are_named_in_the_order_of_the_schema() -> None:
    full = EARTH | SUN | {"orbital_period_d": 365.25, "stellar_teff_k": 5772.0, "stellar_radius_rsun": 1.0}
    no_albedo = {name: value for name, value in full.items() if name not in ("bond_albedo", "stellar_age_gyr")}
    limited = full | {"stellar_mass_msun_bound": "upper"}
    batch = lit(full, no_albedo, limited, {"planet_radius_rearth": 1.0} | SUN)
    names = column(batch, "missing_inputs")
    assert names[0] == ""
    assert names[1] == "bond_albedo stellar_age_gyr"
    assert names[2] == "stellar_mass_msun"
    for name in ("planet_mass_mearth", "semi_major_axis_au", "insolation_earth", "orbital_period_d"):
        assert name in names[3].split()
    assert "planet_radius_rearth" not in names[3].split()


def test_bulk_is_that_of_the_earth() -> None:
    """Gravity, density and escape speed at the nominal mass and equatorial radius, worked by hand."""
    batch = lit(EARTH | SUN)
    assert column(batch, "surface_gravity_m_s2") == pytest.approx([9.798], abs=1e-3)
    assert column(batch, "bulk_density_g_cm3") == pytest.approx([5.495], abs=1e-3)
    assert column(batch, "escape_speed_km_s") == pytest.approx([11.180], abs=1e-3)


def test_hydrogen_share_uses_the_flux_without_the_eccentricity_factor() -> None:
    row = EARTH | SUN | {"planet_radius_rearth": 2.5, "planet_mass_mearth": 5.0}
    round_orbit, eccentric = lit(row, row | {"eccentricity": 0.8}).draws["hydrogen_share"][:, 0]
    assert round_orbit == eccentric
