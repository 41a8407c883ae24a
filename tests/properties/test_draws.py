"""Draws: an even lattice, the same under a seed everywhere, truncated without pile-up, shared within a system."""

from __future__ import annotations

import hashlib
from itertools import combinations, product

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.special import ndtr, ndtri

from handmade import make_batch
from keptair import draws, stages
from keptair.settings import Settings
from keptair.stages import fill

COUNTS = (256, 512, 1024, 2048)
EVEN = draws.uniforms("bond_albedo", ["Aster b"], 512, 1)  # u of some planet, the central ½ first
STAR = {"stellar_mass_msun": 0.8, "stellar_mass_msun_err": 0.05, "stellar_teff_k": 4900.0, "stellar_teff_k_err": 90.0,
        "stellar_radius_rsun": 0.75, "stellar_radius_rsun_err": 0.02, "stellar_age_gyr": 5.0,
        "stellar_age_gyr_err": 2.0}  # fmt: skip


def spread(value: float, plus: float, minus: float, low: float, high: float, u: np.ndarray = EVEN) -> np.ndarray:
    """Draws of one measured value."""
    return draws.measured(np.array([value]), np.array([plus]), np.array([minus]), (low, high), u)[0]


@pytest.mark.parametrize("count", COUNTS)
def test_no_two_variables_move_together_on_the_lattice(count: int) -> None:
    generators = {name: round(draws.lattice(name, count)[1] * count) for name in draws.VARIABLES}
    steps = [pair for pair in product(range(-5, 6), repeat=2) if 0 < abs(pair[0]) + abs(pair[1]) < 6]
    together = [
        (one, other, pair)
        for (one, first), (other, second) in combinations(generators.items(), 2)
        for pair in steps
        if (pair[0] * first + pair[1] * second) % count == 0
    ]
    assert not together


@pytest.mark.parametrize("count", COUNTS)
def test_each_variable_takes_every_step_of_its_range_once(count: int) -> None:
    for name in draws.VARIABLES:
        points = draws.uniforms(name, ["Aster b"], count, 1)[0, 1:]
        assert sorted(np.floor(points * count)) == list(range(count))


def test_variables_of_the_model_and_of_every_drawn_input_have_a_dimension() -> None:
    named = {*fill.DRAWN, *fill.MODEL_DRAWS, "xuv_level", "mass_radius_scatter", "inclination"}
    assert named == set(draws.VARIABLES)
    assert len(set(draws.VARIABLES)) == len(draws.VARIABLES)


@pytest.mark.parametrize("seed", [1, 2, 987654321])
@pytest.mark.parametrize(("variable", "owner"), [("bond_albedo", "Aster b"), ("xuv_level", "Ñandú ☉ 3")])
def test_shifts_are_the_first_eight_bytes_of_a_hash(seed: int, variable: str, owner: str) -> None:
    digest = hashlib.sha256(b"\x1f".join(text.encode() for text in (str(seed), variable, owner))).digest()
    (shift,) = draws.shifts(variable, [owner], seed)
    assert shift == int.from_bytes(digest[:8], "big") / 2**64
    u = draws.uniforms(variable, [owner], 512, seed)[0]
    assert u[0] == 0.5
    assert u[1] == shift  # the lattice's own first point is 0


def test_a_few_values_under_a_seed_are_pinned() -> None:
    """Digits of `printf '1\\x1fbond_albedo\\x1fAster b' | sha256sum`: a change here changes every published number."""
    pinned = [
        (1, "bond_albedo", "Aster b", 0xEBCA93A953AED00A),
        (1, "xuv_level", "Aster", 0x7BB393CFE986B057),
        (2, "efficiency", "Aster b", 0x01ED1823F5940E97),
    ]
    for seed, variable, owner, digits in pinned:
        (shift,) = draws.shifts(variable, [owner], seed)
        assert shift == digits / 2**64


@pytest.mark.parametrize("count", COUNTS)
def test_no_draw_is_0_or_1_even_without_a_shift(monkeypatch: pytest.MonkeyPatch, count: int) -> None:
    monkeypatch.setattr(draws, "shifts", lambda _variable, owners, _seed: np.zeros(len(owners)))
    u = draws.uniforms("efficiency", ["Aster b"], count, 1)
    assert 0 < u.min() < u.max() < 1
    assert np.isfinite(ndtri(u)).all()
    monkeypatch.setattr(draws, "shifts", lambda _variable, owners, _seed: np.full(len(owners), 1 - 2.0**-54))
    u = draws.uniforms("efficiency", ["Aster b"], count, 1)
    assert 0 < u.min() < u.max() < 1


@given(
    value=st.floats(-10, 10),
    plus=st.floats(1e-3, 10),
    minus=st.floats(1e-3, 10),
    below=st.just(0.0) | st.floats(0.01, 20),
    above=st.just(0.0) | st.floats(0.01, 20),
)
@settings(max_examples=150, deadline=None)
def test_truncated_draws_stay_within_their_bounds_and_do_not_pile_up(
    value: float, plus: float, minus: float, below: float, above: float
) -> None:
    low, high = value - below * minus, value + above * plus
    if not low < high:
        return
    drawn = spread(value, plus, minus, low, high)[1:]
    assert low <= drawn.min() <= drawn.max() <= high
    assert np.count_nonzero(drawn == low) + np.count_nonzero(drawn == high) <= 2
    order = np.argsort(EVEN[0, 1:])
    assert (np.diff(drawn[order]) >= 0).all()
    assert len(np.unique(drawn)) >= 510


@given(plus=st.floats(1e-3, 5), minus=st.floats(1e-3, 5))
@settings(deadline=None)
def test_draws_far_from_their_bounds_have_the_value_as_median_and_the_errors_as_percentiles(
    plus: float, minus: float
) -> None:
    drawn = spread(3.0, plus, minus, 3.0 - 9 * minus, 3.0 + 9 * plus)
    low, middle, high = (float(column[0]) for column in draws.percentiles(drawn[None, :], (15.87, 50, 84.13)))
    assert middle == pytest.approx(3.0, abs=0.01 * max(plus, minus))
    assert high - 3.0 == pytest.approx(plus, rel=0.02)
    assert 3.0 - low == pytest.approx(minus, rel=0.02)
    assert drawn[0] == 3.0


@given(
    value=st.floats(0, 1),
    error=st.floats(0.05, 3),
    low=st.floats(-1, 0),
    high=st.floats(1, 2),
    share=st.floats(0, 1),
)
@settings(deadline=None)
def test_truncation_rescales_the_normal_law_between_its_bounds(
    value: float, error: float, low: float, high: float, share: float
) -> None:
    """Of a truncated normal law, the share below x is (Φ(x) − Φ(low)) / (Φ(high) − Φ(low))."""
    x = low + share * (high - low)
    start, at, end = (float(ndtr((place - value) / error)) for place in (low, x, high))
    drawn = spread(value, error, error, low, high)[1:]
    assert np.count_nonzero(drawn < x) / 512 == pytest.approx((at - start) / (end - start), abs=2.1 / 512)


def test_a_value_without_an_error_is_exact_and_one_beyond_its_bounds_is_kept_inside() -> None:
    assert (spread(0.3, 0.0, 0.0, 0.0, 1.0) == 0.3).all()
    assert (spread(1.0, 0.0, 0.0, 0.0, 0.95) == 0.95).all()
    old = spread(14.1, 1.0, 1.0, 0.01, 13.8)
    assert 0.01 <= old.min() < old.max() <= 13.8
    assert old[0] < 13.8


def test_percentiles_are_over_the_draws_that_have_a_value_if_half_of_them_do() -> None:
    values = np.full((3, 9), 7.0)
    values[:, 1:] = [1, 2, 3, 4, np.nan, np.nan, np.nan, np.nan]
    values[1, 5] = 5
    values[2, 4] = np.nan
    low, middle, high = draws.percentiles(values, (0, 50, 100))
    np.testing.assert_array_equal(low, [1, 1, np.nan])
    np.testing.assert_array_equal(middle, [2.5, 3, np.nan])
    np.testing.assert_array_equal(high, [4, 5, np.nan])


@given(values=st.lists(st.floats(-1e6, 1e6), min_size=4, max_size=64), percent=st.floats(0, 100))
@settings(deadline=None)
def test_percentiles_are_linear_between_order_statistics(values: list[float], percent: float) -> None:
    """numpy's own definition, which is the usual one."""
    mine = draws.percentiles(np.array([[0.0, *values]]), (percent,))[0][0]
    assert mine == pytest.approx(np.percentile(values, percent), rel=1e-9, abs=1e-9)


def test_planets_of_one_host_share_the_draws_of_their_star_and_nothing_else() -> None:
    planet = {"orbital_period_d": 20.0, "planet_radius_rearth": 1.1, "planet_radius_rearth_err": 0.1, **STAR}
    rows = [
        {"planet_id": "Aster b", "host_id": "Aster", **planet},
        {"planet_id": "Aster c", "host_id": "Aster", **planet},
        {"planet_id": "Boreal b", "host_id": "Boreal", **planet},
        {"planet_id": "Cirro b", **planet},
    ]
    batch = stages.through(make_batch(rows), Settings(draws=256, epochs=4))
    stellar = ["input.stellar_age_gyr", "input.stellar_mass_msun", "input.stellar_teff_k", "xuv_deviate", "luminosity"]
    own = ["input.planet_radius_rearth", "input.bond_albedo", *(f"u.{name}" for name in fill.MODEL_DRAWS)]
    for name in stellar:
        one, twin, other, hostless = batch.draws[name]
        assert (one == twin).all()
        assert (one[1:] != other[1:]).any()
        assert (one[1:] != hostless[1:]).any()
    for name in own:
        one, twin, *_ = batch.draws[name]
        assert (one[1:] != twin[1:]).all(), name


def test_a_star_without_a_name_has_the_draws_of_its_planet() -> None:
    named = draws.Sampler(["Cirro b"], ["Cirro b"], 256, 1)
    nameless = draws.Sampler(["Cirro b"], [""], 256, 1)
    assert (named("xuv_level") == nameless("xuv_level")).all()
