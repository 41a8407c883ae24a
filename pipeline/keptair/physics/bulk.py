"""Bulk of a planet: gravity, density, escape speed, and what its radius says of its make."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import EARTH_MASS, EARTH_RADIUS, GRAVITATION

LARGEST_ROCK = 3.6  # [R⊕]


def surface_gravity(planet_mass: Numbers, planet_radius: Numbers) -> Numbers:
    """Gravity at the catalogue radius.

    g = G M / R²

    Parameters
    ----------
    planet_mass : array [kg]
    planet_radius : array [m]

    Returns
    -------
    array [m s-2]

    Notes
    -----
    Newton's law; rotation and oblateness left out.

    Examples
    --------
    Venus, 8.87 m s⁻² (JPL Planetary Physical Parameters):

    >>> float(round(surface_gravity(4.86731e24, 6.0518e6), 2))
    8.87
    """
    return GRAVITATION * planet_mass / np.square(planet_radius)


def bulk_density(planet_mass: Numbers, planet_radius: Numbers) -> Numbers:
    """Mass over the volume of a sphere.

    ρ = 3M / (4π R³)

    Parameters
    ----------
    planet_mass : array [kg]
    planet_radius : array [m]

    Returns
    -------
    array [kg m-3]

    Notes
    -----
    Definition.

    Examples
    --------
    The Earth, 5513 kg m⁻³ (JPL Planetary Physical Parameters: 5.5134 g cm⁻³):

    >>> round(bulk_density(5.97217e24, 6.3710084e6))
    5513
    """
    return 3 * planet_mass / (4 * np.pi * np.asarray(planet_radius) ** 3)


def escape_speed(planet_mass: Numbers, distance: Numbers) -> Numbers:
    """Speed that just leaves a body from a distance of its centre.

    v = √(2 G M / r)

    Parameters
    ----------
    planet_mass : array [kg]
    distance : array [m]

    Returns
    -------
    array [m s-1]

    Notes
    -----
    Energy conservation.

    Examples
    --------
    The Earth, 11.19 km s⁻¹ (JPL Planetary Physical Parameters):

    >>> float(round(escape_speed(5.97217e24, 6.3710084e6) / 1e3, 2))
    11.19
    """
    return np.sqrt(2 * GRAVITATION * planet_mass / distance)


def silicate_radius(planet_mass: Numbers) -> Numbers:
    """Radius of a ball of rock without an iron core: nothing solid is larger.

    R = min(1.07 (M/M⊕)^(1/3.7), 3.6) R⊕

    Parameters
    ----------
    planet_mass : array [kg]

    Returns
    -------
    array [m]

    Notes
    -----
    Zeng, Sasselov & Jacobsen 2016, doi:10.3847/0004-637X/819/2/127, at core mass fraction 0; made for 1–8 M⊕. Under its
    own pressure rock stops growing: Seager et al. 2007, doi:10.1086/521346 (value from memory), find no silicate ball
    above 3.6 R⊕ at any mass. Without that end a brown dwarf would pass for rock.

    Examples
    --------
    At one Earth mass, by the fit's own constant:

    >>> float(round(silicate_radius(5.97217e24) / 6.3781e6, 2))
    1.07
    """
    growing = 1.07 * (planet_mass / EARTH_MASS) ** (1 / 3.7)
    return EARTH_RADIUS * np.minimum(growing, LARGEST_ROCK)


def hydrogen_share(planet_mass: Numbers, planet_radius: Numbers, flux: Numbers, age: Numbers) -> Numbers:
    """Share of the mass in a hydrogen envelope that a radius asks for.

    R_env = R − 1.00 R⊕ (M/M⊕)^(1/3.7) = 2.06 R⊕ (M/M⊕)^−0.21 (f/5 %)^0.59 (S/S⊕)^0.044 (t/5 Gyr)^−0.18, solved for f

    Parameters
    ----------
    planet_mass : array [kg]
    planet_radius : array [m]
    flux : array [1]
        In solar constants.
    age : array [Gyr]

    Returns
    -------
    array [1]
        0 where the radius asks for none; not clipped.

    Notes
    -----
    Lopez & Fortney 2014, doi:10.1088/0004-637X/792/1/1 (value from memory), made for 1–20 M⊕ and 0.01–20 %; the core
    as Zeng et al. 2016, doi:10.3847/0004-637X/819/2/127.

    Examples
    --------
    By its own constants: 1 M⊕ at S = 1, 5 Gyr and 3.06 R⊕ carries 5 %:

    >>> float(round(hydrogen_share(5.97217e24, 3.06 * 6.3781e6, 1.0, 5.0), 3))
    0.05
    """
    mass = planet_mass / EARTH_MASS
    envelope = np.maximum(planet_radius / EARTH_RADIUS - mass ** (1 / 3.7), 0.0)
    unit = 2.06 * mass**-0.21 * flux**0.044 * (age / 5.0) ** -0.18
    return 0.05 * (envelope / unit) ** (1 / 0.59)
