"""Which way things must go: heavier gases, more high-energy light, more massive planets."""

from __future__ import annotations

from typing import Any

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from handmade import make_batch
from keptair import stages
from keptair.batch import Batch
from keptair.physics import kinetics, orbit, outflow
from keptair.settings import Settings

KEYS = ("co2", "n2", "n2_icy", "steam")  # of a fixed share of the planet's mass
SUN = {"stellar_mass_msun": 1.0, "stellar_luminosity_lsun": 1.0, "stellar_age_gyr": 5.0}
SMALL = {"draws": 256, "epochs": 6, "use_backgrounds": (*KEYS, "h2")}

planets = st.fixed_dictionaries(
    {
        "planet_mass_mearth": st.floats(0.01, 20),
        "planet_radius_rearth": st.floats(0.2, 3),
        "semi_major_axis_au": st.floats(0.02, 20),
        "eccentricity": st.floats(0, 0.8),
        "stellar_mass_msun": st.floats(0.1, 1.4),
        "stellar_luminosity_lsun": st.floats(1e-3, 4),
        "stellar_age_gyr": st.floats(0.3, 13),
    }
)


def through(row: dict[str, Any], **changed: Any) -> Batch:
    xuv = {"saturation_log10": changed.pop("saturation_log10", -3.2)}
    return stages.through(make_batch([row]), Settings(**SMALL, xuv=xuv, **changed))


def lost(batch: Batch, key: str) -> np.ndarray:
    return batch.draws[f"lost.{key}"][0]


@given(
    jeans=st.floats(1e-3, 300), scale_heights=st.floats(0, 30), lighter=st.floats(0.5, 100), ratio=st.floats(1.001, 5)
)
@settings(deadline=None)
def test_of_two_traces_equally_mixed_below_the_heavier_never_has_the_larger_jeans_flux(
    jeans: float, scale_heights: float, lighter: float, ratio: float
) -> None:
    """`jeans` is λ of 1 u; down to the clip of the exponent, where nothing is left of either."""
    light, heavy = (
        kinetics.trace_jeans_flux(1.0, jeans, scale_heights, mass, 20.0) for mass in (lighter, ratio * lighter)
    )
    assert heavy <= light or light < 1e-250


@given(jeans=st.floats(1e-3, 300), lighter=st.floats(0.5, 100), ratio=st.floats(1.001, 5))
@settings(deadline=None)
def test_of_two_gases_equally_dense_at_the_exobase_the_heavier_leaves_more_slowly(
    jeans: float, lighter: float, ratio: float
) -> None:
    def speed(mass: float) -> float:
        return float(kinetics.effusion_speed(mass**-0.5, jeans * mass))

    assert speed(ratio * lighter) <= speed(lighter) or speed(lighter) < 1e-250


@given(row=planets)
@settings(max_examples=15, deadline=None)
def test_jeans_flux_and_speed_ratio_of_traces_are_in_the_order_of_their_masses(row: dict[str, Any]) -> None:
    batch = through(row)
    gases = sorted(Settings().gases.items(), key=lambda entry: entry[1].mass_u)
    for key in ("co2", "n2", "h2"):
        main = Settings().backgrounds[key].main_gas
        names = [name for name, _ in gases if name != main]
        fluxes = np.stack([batch.draws[f"jeans_flux.{key}.{name}"][0] for name in names])
        assert (np.diff(fluxes, axis=0) <= 1e-200).all()
        ratios = [batch.columns[f"speed_ratio.{key}.{name}"][0] for name, _ in gases]
        assert np.isnan(ratios).all() or (np.diff(ratios) > 0).all()


@given(row=planets, dex=st.floats(0.01, 1.5), heat=st.sampled_from(["outflow", "radiate"]))
@settings(max_examples=25, deadline=None)
def test_more_high_energy_light_never_leaves_more_of_a_background(row: dict[str, Any], dex: float, heat: str) -> None:
    """Of traces it is not true: a wind carries heavy ones up or leaves them behind."""
    dim = through(row, excess_heat=heat, saturation_log10=-3.8)
    bright = through(row, excess_heat=heat, saturation_log10=-3.8 + dex)
    for key in (*KEYS, "h2"):
        if dim.columns[f"worked.{key}"][0]:
            assert (lost(bright, key) >= lost(dim, key) * (1 - 1e-9) - 1e-100).all(), key
            name = f"retention.{key}.{Settings().backgrounds[key].main_gas}"
            assert bright.columns[name][0] <= dim.columns[name][0]


@given(row=planets, ratio=st.floats(1.01, 4))
@settings(max_examples=25, deadline=None)
def test_more_mass_in_the_same_ball_never_loses_a_larger_share_of_air(row: dict[str, Any], ratio: float) -> None:
    """Of every draw, for backgrounds whose inventory is a fixed share of the mass."""
    light, heavy = through(row), through({**row, "planet_mass_mearth": ratio * row["planet_mass_mearth"]})
    for key in KEYS:
        if light.columns[f"worked.{key}"][0]:
            assert (lost(heavy, key) <= lost(light, key) * (1 + 1e-9) + 1e-100).all(), key


def test_hydrogen_is_the_exception_since_a_heavier_core_leaves_less_room_for_it() -> None:
    """At 2.2 R⊕ a core of 9 M⊕ leaves 0.39 R⊕ for an envelope, one of 16 M⊕ 0.08 R⊕: a tenth of the share."""
    row = {"planet_radius_rearth": 2.2, "semi_major_axis_au": 0.1, "eccentricity": 0.0, **SUN}
    light, heavy = (through({**row, "planet_mass_mearth": mass}) for mass in (9.0, 16.0))
    assert heavy.columns["retention.h2.h2"][0] < light.columns["retention.h2.h2"][0] - 0.05


@given(st.floats(1e-3, 1e3))
@settings(deadline=None)
def test_the_tide_never_makes_escape_harder(ratio: float) -> None:
    factor = float(orbit.roche_factor(ratio, 0.02))
    assert 0.02 <= factor <= 1
    assert factor <= float(orbit.roche_factor(2 * ratio, 0.02))


@given(exobase=st.floats(1, 40), roche=st.floats(0.01, 100), cap=st.sampled_from([1.3, 3.0]), bound=st.booleans())
@settings(deadline=None)
def test_light_is_absorbed_between_the_surface_and_the_cap(
    exobase: float, roche: float, cap: float, bound: bool
) -> None:
    at = float(outflow.absorption_radius(1.0, exobase, roche, np.bool_(bound), cap))
    assert 1 <= at <= cap
    assert at <= max(1.0, roche)
    assert not bound or at <= exobase


def test_a_batch_of_one_planet_can_be_lost_and_kept() -> None:
    """Else the trends above would hold of nothing."""
    row = {"planet_radius_rearth": 0.9, "semi_major_axis_au": 0.7, "eccentricity": 0.0, **SUN}
    shares = [through({**row, "planet_mass_mearth": mass}).columns["retention.co2.co2"][0] for mass in (0.2, 0.6, 2.0)]
    assert shares[0] < 0.1 < shares[1] < 0.95 < shares[2]
