"""Laws that tie columns together and so tell in which units they are: Kepler's, and the densities planets have."""

from __future__ import annotations

import numpy as np

from keptair.catalogue.cells import Floats
from keptair.catalogue.proposing.candidates import Candidate
from keptair.catalogue.proposing.values import UnitGuess, rough
from keptair.catalogue.units import conversion

EARTH_DENSITY = 5.51  # g/cm3
DENSITIES = (0.15, 20.0)  # g/cm3, between which the median of a catalogue lies
DAYS = 365.25
AGREES = 0.05  # dex: so near Kepler's third law must come, half of the planets
FEWEST = 5


def settled_by_density(radius: Candidate, mass: Candidate) -> None:
    """A unit left open of one is settled if only one of the possible ones gives the density of a planet."""
    open_ones = [candidate for candidate in (radius, mass) if candidate.unit.possible]
    if len(open_ones) != 1:
        return
    [candidate] = open_ones
    likely = []
    for unit in candidate.unit.possible:
        factor = conversion(unit, candidate.input.name)
        values = factor.values(rough(candidate.column.numbers))
        density = _density(mass.values, values) if candidate is radius else _density(values, radius.values)
        if len(density) >= FEWEST and DENSITIES[0] < float(np.median(density)) < DENSITIES[1]:
            likely.append((unit, factor, float(np.median(density))))
    if len(likely) == 1:
        [(unit, factor, density)] = likely
        candidate.in_unit(UnitGuess(unit, factor))
        candidate.because.append(f"in {unit} the median density is {density:.2g} g/cm3")
        candidate.doubts.append(f"only the densities say {unit}")


def confirmed_by_kepler(period: Candidate, axis: Candidate, mass: Candidate | None) -> bool:
    """Whether P² M = a³ holds, in years, solar masses and au; the Sun's mass stands in for missing ones."""
    masses = np.ones(len(period.values)) if mass is None else np.where(mass.values > 0, mass.values, 1.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.log10((period.values / DAYS) ** 2 * masses / axis.values**3)
    ratio = ratio[np.isfinite(ratio)]
    return len(ratio) >= FEWEST and abs(float(np.median(ratio))) < AGREES


def is_same(one: Candidate, other: Candidate) -> bool:
    """Whether two columns hold the same measurements, be it in different units."""
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = one.column.numbers / other.column.numbers
    ratio = ratio[np.isfinite(ratio) & (ratio > 0)]
    if not len(ratio):
        return False
    middle = float(np.median(ratio))
    return float(np.median(np.abs(ratio / middle - 1.0))) < 0.01


def _density(mass: Floats, radius: Floats) -> Floats:
    with np.errstate(divide="ignore", invalid="ignore"):
        density = EARTH_DENSITY * mass / radius**3
    return density[np.isfinite(density) & (density > 0)]
