"""Enough epochs and draws: retention is near what many more of them give."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from handmade import make_batch
from keptair import stages
from keptair.settings import Settings

LARGEST_RMS, LARGEST = 0.01, 0.04
BULK_ERRORS = ("planet_mass_mearth_err", "planet_radius_rearth_err", "stellar_age_gyr_err")

Rows = list[dict[str, Any]]


def bodies(count: int) -> Rows:
    """Rocks of all sizes round all stars, with error bars as catalogues have them."""
    chance, rows = np.random.default_rng(7), []
    for number in range(count):
        mass, star, age = 10 ** chance.uniform(-1.5, 1.0), 10 ** chance.uniform(-0.9, 0.1), chance.uniform(1, 10)
        radius = mass**0.279 * chance.uniform(0.95, 1.1)
        rows.append(
            {
                "planet_id": f"Aster {number}", "planet_mass_mearth": mass, "planet_mass_mearth_err": 0.15 * mass,
                "planet_radius_rearth": radius, "planet_radius_rearth_err": 0.05 * radius,
                "insolation_earth": 10 ** chance.uniform(-1.5, 1.5), "stellar_mass_msun": star,
                "stellar_age_gyr": age, "stellar_age_gyr_err": 0.3 * age, "bond_albedo": 0.3, "eccentricity": 0.0,
            }
        )  # fmt: skip
    return rows


def retention(rows: Rows, **changed: Any) -> np.ndarray:
    how = Settings(gas_rows="none", **changed)
    return stages.through(make_batch(rows), how).columns["secondary_probability"]


def undecided(rows: Rows) -> Rows:
    share = retention(rows, draws=256, epochs=8)
    chosen = [row for row, kept in zip(rows, share, strict=True) if 0.2 < kept < 0.8]
    assert len(chosen) >= 40
    return chosen[:40]


@pytest.fixture(scope="module")
def well_known() -> tuple[Rows, np.ndarray]:
    """Undecided bodies of exact mass, radius and age, like those of the Solar System, and their retention."""
    exact = [{name: value for name, value in row.items() if name not in BULK_ERRORS} for row in bodies(200)]
    rows = undecided(exact)
    return rows, retention(rows, draws=2048, epochs=64)


@pytest.fixture(scope="module")
def loosely_known() -> tuple[Rows, np.ndarray]:
    """The same with wide error bars, three dimensions more."""
    rows = undecided(bodies(200))
    return rows, retention(rows, draws=2048, epochs=64)


def errors(known: tuple[Rows, np.ndarray], **changed: Any) -> tuple[float, float, float]:
    """Root mean square, largest and mean error."""
    rows, settled = known
    error = retention(rows, **changed) - settled
    return float(np.sqrt(np.mean(np.square(error)))), float(np.abs(error).max()), float(np.mean(error))


def test_the_default_epochs_and_draws_are_enough(well_known: tuple[Rows, np.ndarray]) -> None:
    rms, largest, mean = errors(well_known)
    assert rms <= LARGEST_RMS
    assert largest <= LARGEST
    assert abs(mean) < 0.004


def test_with_wide_error_bars_they_are_enough_too(loosely_known: tuple[Rows, np.ndarray]) -> None:
    rms, largest, _ = errors(loosely_known)
    assert rms <= LARGEST_RMS
    assert largest <= LARGEST


def test_the_default_epochs_alone_err_by_less(well_known: tuple[Rows, np.ndarray]) -> None:
    _, largest, _ = errors(well_known, draws=2048)
    assert largest <= 0.01


@pytest.mark.parametrize("draws", [256, 512, 1024])
def test_draws_of_the_lattice_err_by_less_than_independent_ones(
    loosely_known: tuple[Rows, np.ndarray], draws: int
) -> None:
    """Those would err by √(P(1 − P)/n)."""
    _, settled = loosely_known
    rms, _, _ = errors(loosely_known, draws=draws)
    assert rms < 0.7 * np.sqrt(np.mean(settled * (1 - settled)) / draws)
