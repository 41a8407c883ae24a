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
SAME = 0.01  # relative difference, half of the rows
FEWEST = 5  # rows to judge by


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
        densities = _densities(mass.values, values) if candidate is radius else _densities(values, radius.values)
        if len(densities) >= FEWEST and DENSITIES[0] < float(np.median(densities)) < DENSITIES[1]:
            likely.append((unit, factor, float(np.median(densities))))
    if len(likely) == 1:
        [(unit, factor, density)] = likely
        candidate.in_unit(UnitGuess(unit, factor))
        candidate.because.append(f"in {unit} the median density is {density:.2g} g/cm3")
        candidate.doubts.append(f"only the densities say {unit}")


def confirmed_by_kepler(period: Candidate, axis: Candidate, mass: Candidate | None) -> bool:
    """Whether P² M = a³ holds, in years, solar masses and au; the Sun's mass stands in for missing ones."""
    masses = np.ones(len(period.values)) if mass is None else np.where(mass.values > 0, mass.values, 1.0)
    ratio = np.log10((period.values / DAYS) ** 2 * masses / axis.values**3)
    ratio = ratio[np.isfinite(ratio)]
    return len(ratio) >= FEWEST and abs(float(np.median(ratio))) < AGREES


def is_same(one: Candidate, other: Candidate) -> bool:
    """Whether two columns hold the same measurements, be it in different units."""
    difference = np.abs(one.values / other.values - 1.0)
    difference = difference[np.isfinite(difference)]
    return len(difference) >= FEWEST and float(np.median(difference)) < SAME


def _densities(mass: Floats, radius: Floats) -> Floats:
    density = EARTH_DENSITY * mass / radius**3
    return density[np.isfinite(density) & (density > 0)]
