"""Mass–radius relations that fill a missing mass or radius."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import EARTH_MASS, EARTH_RADIUS

# Chen & Kipping 2017: coefficient [R⊕], slope, scatter in ln R, and where each branch ends [M⊕].
BRANCHES = ((1.008, 0.279, 0.040), (0.808, 0.589, 0.146), (17.74, -0.044, 0.074))
MASS_BREAKS = (2.04, 131.6)
RADIUS_BREAKS = (1.23, 9.0)
DEGENERATE_MASSES = (60.0, 4000.0)


def chen_kipping_radius(planet_mass: Numbers, deviate: Numbers | float = 0.0) -> Numbers:
    """Radius of a planet of given mass.

    R = C M^S e^(σN): Terran, Neptunian and Jovian branch by mass

    Parameters
    ----------
    planet_mass : array [kg]
    deviate : array [1]
        Standard normal deviate of the scatter.

    Returns
    -------
    array [m]

    Notes
    -----
    Chen & Kipping 2017, doi:10.3847/1538-4357/834/1/17 (coefficients: value from memory).

    Examples
    --------
    Neptune's 17.15 M⊕ (JPL) gives 4.31 R⊕:

    >>> round(float(chen_kipping_radius(17.15 * 5.97217e24)) / 6.3781e6, 2)
    4.31
    """
    mass = np.asarray(planet_mass / EARTH_MASS)
    branch = np.searchsorted(MASS_BREAKS, mass, side="right")
    coefficient, slope, scatter = (np.take(column, branch) for column in zip(*BRANCHES, strict=True))
    return EARTH_RADIUS * coefficient * mass**slope * np.exp(scatter * deviate)


def chen_kipping_mass(
    planet_radius: Numbers, deviate: Numbers | float = 0.0, uniform: Numbers | float = 0.5
) -> Numbers:
    """Mass of a planet of given radius.

    M = (R/C)^(1/S) e^(σN/S) on the Terran and Neptunian branch; above 9 R⊕ ln M uniform over 60–4000 M⊕

    Parameters
    ----------
    planet_radius : array [m]
    deviate : array [1]
        Standard normal deviate of the scatter.
    uniform : array [1]
        Between 0 and 1: where on the degenerate branch.

    Returns
    -------
    array [kg]

    Notes
    -----
    Inverse of Chen & Kipping 2017, doi:10.3847/1538-4357/834/1/17 (coefficients: value from memory); Jovian radii
    hardly depend on mass.

    Examples
    --------
    The Terran branch at its coefficient, 1.008 R⊕, gives one Earth mass (by definition):

    >>> round(float(chen_kipping_mass(1.008 * 6.3781e6)) / 5.97217e24, 3)
    1.0
    """
    radius = np.asarray(planet_radius / EARTH_RADIUS)
    branch = (radius >= RADIUS_BREAKS[0]).astype(int) + (radius > RADIUS_BREAKS[1])
    coefficient, slope, scatter = (np.take(column, np.minimum(branch, 1)) for column in zip(*BRANCHES, strict=True))
    single = (radius / coefficient) ** (1 / slope) * np.exp(scatter / slope * deviate)
    low, high = DEGENERATE_MASSES
    degenerate = low * (high / low) ** np.asarray(uniform)
    return EARTH_MASS * np.where(branch == 2, degenerate, single)


OTEGI_ROCKY = (0.90, 3.45)  # M = 0.90 R^3.45, in Earth units
OTEGI_VOLATILE = (1.74, 1.58)
OTEGI_BREAK = 1.8  # [R⊕]


def otegi_mass(planet_radius: Numbers) -> Numbers:
    """Mass of a planet of given radius, rocky below 1.8 R⊕, rich in volatiles above.

    M = 0.90 R^3.45 to 1.8 R⊕, 1.74 R^1.58 above

    Parameters
    ----------
    planet_radius : array [m]

    Returns
    -------
    array [kg]

    Notes
    -----
    Otegi, Bouchy & Helled 2020, doi:10.1051/0004-6361/201936482; planets up to 120 M⊕; no scatter.

    Examples
    --------
    By the relation's own constant, a rocky Earth radius weighs 0.90 M⊕:

    >>> round(float(otegi_mass(6.3781e6)) / 5.97217e24, 2)
    0.9
    """
    radius = np.asarray(planet_radius / EARTH_RADIUS)
    (rocky, rocky_slope), (volatile, volatile_slope) = OTEGI_ROCKY, OTEGI_VOLATILE
    return EARTH_MASS * np.where(radius <= OTEGI_BREAK, rocky * radius**rocky_slope, volatile * radius**volatile_slope)


def otegi_radius(planet_mass: Numbers) -> Numbers:
    """Radius of a planet of given mass: the rocky relation as far as it reaches, else the other.

    R = (M/0.90)^(1/3.45) to 1.8 R⊕, (M/1.74)^(1/1.58) above

    Parameters
    ----------
    planet_mass : array [kg]

    Returns
    -------
    array [m]

    Notes
    -----
    Otegi, Bouchy & Helled 2020, doi:10.1051/0004-6361/201936482, inverted as given; between 4.4 and 6.8 M⊕ both
    branches exist and the rocky one is taken.

    Examples
    --------
    >>> round(float(otegi_radius(0.9 * 5.97217e24)) / 6.3781e6, 2)
    1.0
    """
    mass = np.asarray(planet_mass / EARTH_MASS)
    (rocky, rocky_slope), (volatile, volatile_slope) = OTEGI_ROCKY, OTEGI_VOLATILE
    solid = (mass / rocky) ** (1 / rocky_slope)
    return EARTH_RADIUS * np.where(solid <= OTEGI_BREAK, solid, (mass / volatile) ** (1 / volatile_slope))
