"""Orbits: size, flux averaged over one turn, Roche lobe."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import GRAVITATION


def semi_major_axis(period: Numbers, star_mass: Numbers) -> Numbers:
    """Semi-major axis of a light body, from Kepler's third law.

    a = (G M P² / 4π²)^⅓

    Parameters
    ----------
    period : array [s]
    star_mass : array [kg]

    Returns
    -------
    array [m]

    Notes
    -----
    The planet's own mass is left out: 3e-4 of a for a Jupiter. Kepler 1619, Harmonices Mundi; GM of the Sun from
    IAU 2015 Resolution B3, doi:10.3847/0004-6256/152/2/41.

    Examples
    --------
    The Earth's sidereal year (365.256363 d, Astronomical Almanac) gives one astronomical unit:

    >>> float(round(semi_major_axis(365.256363 * 86400, 1.3271244e20 / 6.67430e-11) / 149597870700, 4))
    1.0
    """
    return np.cbrt(GRAVITATION * star_mass * np.square(period / (2 * np.pi)))


def orbit_mean_flux(flux: Numbers, eccentricity: Numbers) -> Numbers:
    """Flux averaged over one turn of an eccentric orbit.

    ⟨S⟩ = S / √(1 − e²)

    Parameters
    ----------
    flux : array [any]
        Flux at the distance of the semi-major axis.
    eccentricity : array [1]
        From 0 to below 1.

    Returns
    -------
    array [as flux]

    Notes
    -----
    Derived from Kepler's second law. The orbit mean of the *temperature* falls with e instead (Méndez &
    Rivera-Valentín 2017, doi:10.3847/2041-8213/aa5f13).

    Examples
    --------
    At e = 0.6 the mean is 1/0.8 of the flux at the semi-major axis (exact):

    >>> float(round(orbit_mean_flux(1.0, 0.6), 12))
    1.25
    """
    return flux / np.sqrt(1 - np.square(eccentricity))


def roche_ratio(
    planet_mass: Numbers, planet_radius: Numbers, axis: Numbers, eccentricity: Numbers, star_mass: Numbers
) -> Numbers:
    """Roche-lobe radius at periastron in planet radii.

    ξ = a(1 − e) (M / 3M*)^⅓ / R

    Parameters
    ----------
    planet_mass : array [kg]
    planet_radius : array [m]
    axis : array [m]
    eccentricity : array [1]
    star_mass : array [kg]

    Returns
    -------
    array [1]

    Notes
    -----
    Erkaev et al. 2007, doi:10.1051/0004-6361:20066929.

    Examples
    --------
    The Earth's Hill sphere is 1.5 million km (NASA Solar System Exploration), 235 Earth radii:

    >>> round(roche_ratio(5.9722e24, 6.3781e6, 1.495978707e11, 0.0, 1.98841e30))
    235
    """
    return axis * (1 - eccentricity) * np.cbrt(planet_mass / (3 * star_mass)) / planet_radius


def roche_factor(ratio: Numbers, floor: float) -> Numbers:
    """Share of the binding energy that is left when the star's tide helps.

    K = 1 − 3/(2ξ) + 1/(2ξ³), 0 for ξ ≤ 1, never below `floor`

    Parameters
    ----------
    ratio : array [1]
        ξ, Roche-lobe radius in planet radii; infinite where the orbit is not known.
    floor : float [1]

    Returns
    -------
    array [1]

    Notes
    -----
    Erkaev et al. 2007, doi:10.1051/0004-6361:20066929. The floor keeps the energy limit finite at the Roche limit.

    Examples
    --------
    At ξ = 2, K = 1 − 3/4 + 1/16 (exact):

    >>> float(roche_factor(2.0, 0.02))
    0.3125
    """
    inverse = 1 / np.maximum(ratio, 1.0)
    return np.maximum(1 - 1.5 * inverse + 0.5 * inverse**3, floor)
