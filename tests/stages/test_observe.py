"""Observe: who gets spectroscopy metrics, what they are of, and how flags become a mask."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from handmade import make_batch
from keptair import stages
from keptair.batch import Batch
from keptair.settings import Settings
from keptair.tables import flags, schema

STAR = {"stellar_radius_rsun": 0.5, "stellar_teff_k": 3700.0, "stellar_mass_msun": 0.5, "stellar_age_gyr": 5.0,
        "j_mag": 9.0, "k_mag": 8.2}  # fmt: skip
PLANET = {"planet_mass_mearth": 3.0, "planet_radius_rearth": 1.4, "orbital_period_d": 8.0, "eccentricity": 0.0,
          "bond_albedo": 0.3} | STAR  # fmt: skip


def observed(*rows: dict[str, Any], **changed: Any) -> Batch:
    return stages.through(make_batch(rows), Settings.read(None, {"draws": 256, "epochs": 4} | changed))


def column(batch: Batch, name: str) -> list[Any]:
    return batch.columns[name].tolist()


def without(row: dict[str, Any], *names: str) -> dict[str, Any]:
    return {name: value for name, value in row.items() if name not in names}


@pytest.mark.handbook(source="Kempton et al. 2018, doi:10.1088/1538-3873/aadf6f, formula 1, worked by hand")
def test_transmission_metric_of_a_known_planet() -> None:
    """M 8.17, R 2.742, T 596 K, R* 0.215, J 9.750 → 459.96 (the radius is in the bin of 1.26)."""
    planet = {"planet_mass_mearth": 8.17, "planet_radius_rearth": 2.742, "insolation_earth": (596.0 / 278.32) ** 4}
    star = {"stellar_radius_rsun": 0.215, "stellar_mass_msun": 0.2, "stellar_age_gyr": 5.0, "j_mag": 9.75}
    assert column(observed(planet | star), "tsm") == pytest.approx([459.96], rel=1e-4)


def test_metrics_are_of_a_black_planet_and_the_flux_without_the_eccentricity_factor() -> None:
    batch = observed(
        PLANET,
        PLANET | {"eccentricity": 0.7},
        PLANET | {"bond_albedo": 0.0},
        PLANET | {"planet_mass_mearth_err": 1.0, "planet_radius_rearth_err": 0.3, "stellar_teff_k_err": 100.0},
    )
    for name in ("tsm", "esm"):
        np.testing.assert_allclose(batch.columns[name], batch.columns[name][0], rtol=1e-12)
    half_the_sky = observed(PLANET, redistribution=0.5)
    assert half_the_sky.columns["tsm"][0] == batch.columns["tsm"][0]


@pytest.mark.parametrize(
    ("radius", "scale"),
    [(1.49, 0.190), (1.5, 1.26), (2.74, 1.26), (2.75, 1.28), (3.99, 1.28), (4.0, 1.15), (15.0, 1.15)],
)
def test_a_boundary_of_size_belongs_to_the_upper_class(radius: float, scale: float) -> None:
    batch = observed(PLANET | {"planet_radius_rearth": radius})
    temperature = batch.columns["equilibrium_temperature_black_k"][0]
    plain = radius**3 * temperature / (3.0 * 0.5**2) * 10 ** (-9.0 / 5)
    assert batch.columns["tsm"][0] / plain == pytest.approx(scale, rel=1e-6)


def test_emission_metric_by_plancks_law_at_seven_and_a_half_microns() -> None:
    """4.29e6 B(1.10 T_eq)/B(T*) (R/R*)² 10^(−K/5), Kempton et al. 2018."""
    batch = observed(PLANET)
    day = 1.10 * batch.columns["equilibrium_temperature_black_k"][0]
    unit = 6.62607015e-34 * 299792458.0 / (7.5e-6 * 1.380649e-23)
    bright = np.expm1(unit / 3700.0) / np.expm1(unit / day)
    size = 1.4 * 6.3781e6 / (0.5 * 6.957e8)
    assert batch.columns["esm"][0] == pytest.approx(4.29e6 * bright * size**2 * 10 ** (-8.2 / 5), rel=1e-6)


@pytest.mark.parametrize(
    ("row", "seen"),
    [
        (PLANET, True),
        (PLANET | {"transits": "yes"}, True),
        (PLANET | {"transits": "no"}, False),
        (PLANET | {"planet_radius_kind": "relation"}, False),
        (PLANET | {"planet_radius_rearth_bound": "upper"}, False),
        (without(PLANET, "planet_radius_rearth"), False),
        (without(PLANET, "planet_mass_mearth"), True),
    ],
)
def test_only_a_measured_radius_that_may_transit_has_metrics(row: dict[str, Any], seen: bool) -> None:
    batch = observed(row)
    for name in ("tsm", "esm", "priority"):
        assert np.isnan(batch.columns[name][0]) != seen
    assert column(batch, "flag.no_transit_radius") == [not seen]
    assert ("no_transit_radius" in batch.columns["flag_names"][0].split()) != seen


def test_each_metric_needs_its_magnitude() -> None:
    batch = observed(without(PLANET, "j_mag"), without(PLANET, "k_mag"))
    assert np.isnan(batch.columns["tsm"]).tolist() == [True, False]
    assert np.isnan(batch.columns["esm"]).tolist() == [False, True]
    assert np.isnan(batch.columns["priority"]).tolist() == [True, False]
    assert column(batch, "flag.no_transit_radius") == [False, False]


@pytest.mark.parametrize(("radius", "cut_off"), [(1.49, 10.0), (1.5, 90.0), (3.0, 90.0)])
def test_priority_is_the_chance_of_air_times_the_metric_over_its_cut_off(radius: float, cut_off: float) -> None:
    batch = observed(PLANET | {"planet_radius_rearth": radius, "planet_mass_mearth_err": 1.0})
    expected = batch.columns["air_probability"][0] * batch.columns["tsm"][0] / cut_off
    assert batch.columns["priority"][0] == pytest.approx(expected, rel=1e-12)


def test_the_metric_above_ten_earth_radii_is_flagged_where_there_is_one() -> None:
    large = PLANET | {"planet_radius_rearth": 11.0, "planet_mass_mearth": 200.0}
    batch = observed(large, large | {"planet_radius_rearth": 9.9}, large | {"transits": "no"}, without(large, "j_mag"))
    assert column(batch, "flag.tsm_extrapolated") == [True, False, False, False]


def test_flags_are_one_mask_and_their_names_in_bit_order() -> None:
    batch = observed(PLANET, without(PLANET, "stellar_age_gyr", "bond_albedo"), {"planet_radius_rearth": 12.0}, {})
    bits = {flag.name: flag.bit for flag in schema.flags()}
    for planet, (mask, names) in enumerate(zip(batch.columns["flags"], batch.columns["flag_names"], strict=True)):
        raised = names.split()
        assert [bits[name] for name in raised] == sorted(bits[name] for name in raised)
        assert mask == sum(1 << bits[name] for name in raised)
        for name in bits:
            column_of = batch.columns.get(f"flag.{name}")
            assert (name in raised) == (column_of is not None and bool(column_of[planet])), name
    assert batch.columns["flags"].dtype == np.int64
    assert "age_from_prior" in batch.columns["flag_names"][1].split()
    assert "value_without_error" in batch.columns["flag_names"][0].split()


def test_every_flag_a_stage_raises_has_an_entry_and_every_entry_a_stage() -> None:
    batch = observed(PLANET)
    raised = {name.removeprefix("flag.") for name in batch.columns if name.startswith("flag.")}
    assert raised == {flag.name for flag in schema.flags()}


def test_a_flag_no_table_knows_is_a_mistake() -> None:
    with pytest.raises(ValueError, match="wonderful"):
        flags.pack({"wonderful": np.array([True])})
