"""Mass–radius relations that fill a missing mass or radius."""

from typing import TypeAlias

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import EARTH_MASS, EARTH_RADIUS

Branches: TypeAlias = tuple[tuple[float, float, float], ...]
Pair: TypeAlias = tuple[float, float]


def chen_kipping_radius(
    planet_mass: Numbers, branches: Branches, mass_breaks: tuple[float, ...], deviate: Numbers | float = 0.0
) -> Numbers:
    """Radius of a planet of given mass.

    R = C M^S e^(σN): Terran, Neptunian and Jovian branch by mass

    Parameters
    ----------
    planet_mass : array [kg]
    branches : array [1]
        Coefficient [R⊕], slope and scatter in ln R of the Terran, Neptunian and Jovian branch.
    mass_breaks : array [Mearth]
    deviate : array [1]
        Standard normal deviate of the scatter.

    Returns
    -------
    array [m]

    Notes
    -----
    Chen & Kipping 2017, doi:10.3847/1538-4357/834/1/17 (coefficients in reference/mass_radius.toml).

    Examples
    --------
    Neptune's 17.15 M⊕ (JPL) gives 4.31 R⊕:

    >>> branches = ((1.008, 0.279, 0.040), (0.808, 0.589, 0.146), (17.74, -0.044, 0.074))
    >>> round(float(chen_kipping_radius(17.15 * 5.97217e24, branches, (2.04, 131.6))) / 6.3781e6, 2)
    4.31
    """
    mass = np.asarray(planet_mass / EARTH_MASS)
    branch = np.searchsorted(mass_breaks, mass, side="right")
    coefficient, slope, scatter = (np.take(column, branch) for column in zip(*branches, strict=True))
    return EARTH_RADIUS * coefficient * mass**slope * np.exp(scatter * deviate)


def chen_kipping_mass(
    planet_radius: Numbers,
    branches: Branches,
    radius_breaks: tuple[float, ...],
    degenerate_masses: tuple[float, float],
    deviate: Numbers | float = 0.0,
    uniform: Numbers | float = 0.5,
) -> Numbers:
    """Mass of a planet of given radius.

    M = (R/C)^(1/S) e^(σN/S) on the Terran and Neptunian branch; above 9 R⊕ ln M uniform over 60–4000 M⊕

    Parameters
    ----------
    planet_radius : array [m]
    branches : array [1]
        Coefficient [R⊕], slope and scatter in ln R of the Terran, Neptunian and Jovian branch.
    radius_breaks : array [Rearth]
    degenerate_masses : array [Mearth]
        Ends of the masses that giant radii leave open.
    deviate : array [1]
        Standard normal deviate of the scatter.
    uniform : array [1]
        Between 0 and 1: where on the degenerate branch.

    Returns
    -------
    array [kg]

    Notes
    -----
    Inverse of Chen & Kipping 2017, doi:10.3847/1538-4357/834/1/17 (coefficients in reference/mass_radius.toml); Jovian
    radii hardly depend on mass.

    Examples
    --------
    The Terran branch at its coefficient, 1.008 R⊕, gives one Earth mass (by definition):

    >>> branches = ((1.008, 0.279, 0.040), (0.808, 0.589, 0.146), (17.74, -0.044, 0.074))
    >>> round(float(chen_kipping_mass(1.008 * 6.3781e6, branches, (1.23, 9.0), (60.0, 4000.0))) / 5.97217e24, 3)
    1.0
    """
    radius = np.asarray(planet_radius / EARTH_RADIUS)
    branch = (radius >= radius_breaks[0]).astype(int) + (radius > radius_breaks[1])
    coefficient, slope, scatter = (np.take(column, np.minimum(branch, 1)) for column in zip(*branches, strict=True))
    single = (radius / coefficient) ** (1 / slope) * np.exp(scatter / slope * deviate)
    low, high = degenerate_masses
    degenerate = low * (high / low) ** np.asarray(uniform)
    return EARTH_MASS * np.where(branch == 2, degenerate, single)


def otegi_mass(planet_radius: Numbers, rocky: Pair, volatile: Pair, radius_break: float) -> Numbers:
    """Mass of a planet of given radius, rocky below 1.8 R⊕, rich in volatiles above.

    M = 0.90 R^3.45 to 1.8 R⊕, 1.74 R^1.58 above

    Parameters
    ----------
    planet_radius : array [m]
    rocky : array [1]
        Coefficient and exponent of M(R) in Earth units.
    volatile : array [1]
    radius_break : float [Rearth]

    Returns
    -------
    array [kg]

    Notes
    -----
    Otegi, Bouchy & Helled 2020, doi:10.1051/0004-6361/201936482; planets up to 120 M⊕; no scatter.

    Examples
    --------
    By the relation's own constant, a rocky Earth radius weighs 0.90 M⊕:

    >>> round(float(otegi_mass(6.3781e6, (0.90, 3.45), (1.74, 1.58), 1.8)) / 5.97217e24, 2)
    0.9
    """
    radius = np.asarray(planet_radius / EARTH_RADIUS)
    return EARTH_MASS * np.where(
        radius <= radius_break, rocky[0] * radius ** rocky[1], volatile[0] * radius ** volatile[1]
    )


def otegi_radius(planet_mass: Numbers, rocky: Pair, volatile: Pair, radius_break: float) -> Numbers:
    """Radius of a planet of given mass: the rocky relation as far as it reaches, else the other.

    R = (M/0.90)^(1/3.45) to 1.8 R⊕, (M/1.74)^(1/1.58) above

    Parameters
    ----------
    planet_mass : array [kg]
    rocky : array [1]
        Coefficient and exponent of M(R) in Earth units.
    volatile : array [1]
    radius_break : float [Rearth]

    Returns
    -------
    array [m]

    Notes
    -----
    Otegi, Bouchy & Helled 2020, doi:10.1051/0004-6361/201936482, inverted as given; between 4.4 and 6.8 M⊕ both
    branches exist and the rocky one is taken.

    Examples
    --------
    >>> round(float(otegi_radius(0.9 * 5.97217e24, (0.90, 3.45), (1.74, 1.58), 1.8)) / 6.3781e6, 2)
    1.0
    """
    mass = np.asarray(planet_mass / EARTH_MASS)
    solid = (mass / rocky[0]) ** (1 / rocky[1])
    return EARTH_RADIUS * np.where(solid <= radius_break, solid, (mass / volatile[0]) ** (1 / volatile[1]))
