"""The estimator of first-order shares on functions whose shares are known in closed form."""

import numpy as np
import pytest

from keptair.draws import VARIABLES, Sampler
from keptair.physics.sensitivity import first_order_share

DRAWS = 2048
# Ishigami & Homma 1990, a = 7, b = 0.1; first-order indices in closed form
# (Saltelli et al. 2008, Global Sensitivity Analysis: The Primer, section 4.5)
ISHIGAMI = (0.3139, 0.4424, 0.0)
# Averaging a sine over bins of width w leaves (sin(w/2)/(w/2))² of its variance: π/4 for sin x1, π/2 for sin² x2.
LEFT_BY_EIGHT_BINS = ((np.sin(np.pi / 8) / (np.pi / 8)) ** 2, (np.sin(np.pi / 4) / (np.pi / 4)) ** 2, 1.0)


def ishigami(uniforms):
    x1, x2, x3 = (np.pi * (2 * uniform - 1) for uniform in uniforms)
    return np.sin(x1) + 7 * np.sin(x2) ** 2 + 0.1 * x3**4 * np.sin(x1), (x1, x2, x3)


@pytest.mark.parametrize("place", range(3))
def test_fine_bins_of_many_draws_find_the_indices_of_ishigami(place):
    result, inputs = ishigami(np.random.default_rng(1).random((3, 1, 2**17)))
    assert first_order_share(result, inputs[place], bins=64)[0] == pytest.approx(ISHIGAMI[place], abs=0.01)


@pytest.mark.parametrize("place", range(3))
def test_eight_bins_of_our_own_draws_find_them_but_for_what_they_average_away(place):
    sampler = Sampler(["Thulimar b"], [""], DRAWS, seed=1)
    result, inputs = ishigami([sampler(name)[:, 1:] for name in VARIABLES[:3]])
    expected = ISHIGAMI[place] * LEFT_BY_EIGHT_BINS[place]
    assert first_order_share(result, inputs[place])[0] == pytest.approx(expected, abs=0.02)


def test_the_shares_of_a_sum_are_those_of_its_variances():
    first, second = np.random.default_rng(2).random((2, 1, 2**17))
    shares = [first_order_share(3 * first + second, values, bins=64)[0] for values in (first, second)]
    assert shares == pytest.approx([0.9, 0.1], abs=0.01)  # variances 9 : 1


def test_an_input_or_a_result_that_does_not_vary_has_no_share():
    varying, constant = np.arange(512.0)[None, :], np.ones((1, 512))
    assert np.isnan(first_order_share(varying, constant)[0])
    assert np.isnan(first_order_share(constant, varying)[0])


def test_an_input_that_says_nothing_has_a_share_near_zero():
    sampler = Sampler(["Thulimar b"], [""], DRAWS, seed=1)
    result = (sampler(VARIABLES[0])[:, 1:] > 0.3).astype(float)
    assert first_order_share(result, sampler(VARIABLES[5])[:, 1:])[0] == pytest.approx(0.0, abs=0.02)
