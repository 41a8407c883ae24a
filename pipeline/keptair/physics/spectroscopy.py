"""How well a planet's air can be seen."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import BOLTZMANN, EARTH_MASS, EARTH_RADIUS, LIGHT_SPEED, PLANCK, SOLAR_RADIUS

SIZE_BOUNDS = (1.5, 2.75, 4.0)  # [R⊕]
SCALES = (0.190, 1.26, 1.28, 1.15)
CUT_OFFS = (10.0, 90.0)  # below and above 1.5 R⊕
EMISSION_SCALE = 4.29e6
EMISSION_WAVELENGTH = 7.5e-6  # [m]
DAY_SIDE = 1.10  # day-side over equilibrium temperature


def transmission_metric(
    planet_mass: Numbers, planet_radius: Numbers, equilibrium: Numbers, star_radius: Numbers, j_magnitude: Numbers
) -> Numbers:
    """Transmission spectroscopy metric.

    TSM = s R³ T_eq / (M R*²) · 10^(−J/5), R and M in Earth units, R* in solar

    Parameters
    ----------
    planet_mass : array [kg]
    planet_radius : array [m]
    equilibrium : array [K]
        At zero albedo and full redistribution.
    star_radius : array [m]
    j_magnitude : array [mag]

    Returns
    -------
    array [1]

    Notes
    -----
    Kempton et al. 2018, doi:10.1088/1538-3873/aadf6f: s = 0.190, 1.26, 1.28, 1.15 by size class; made up to 10 R⊕.

    Examples
    --------
    8.17 M⊕, 2.742 R⊕, 596 K, 0.215 R☉, J = 9.750 (worked by hand from the paper's formula: 460):

    >>> float(np.round(transmission_metric(8.17 * 5.97217e24, 2.742 * 6.3781e6, 596.0, 0.215 * 6.957e8, 9.750)))
    460.0
    """
    radius = np.asarray(planet_radius / EARTH_RADIUS)
    scale = np.take(SCALES, np.searchsorted(SIZE_BOUNDS, radius, side="right"))
    return (
        scale
        * radius**3
        * equilibrium
        / (planet_mass / EARTH_MASS * np.square(star_radius / SOLAR_RADIUS))
        * 10 ** (-np.asarray(j_magnitude) / 5)
    )


def planck_ratio(temperature: Numbers, star_temperature: Numbers, wavelength: float) -> Numbers:
    """Brightness of one black body over that of another at one wavelength.

    B(T)/B(T*) = (e^(x*) − 1)/(e^x − 1), x = hc/(λkT)

    Parameters
    ----------
    temperature : array [K]
    star_temperature : array [K]
    wavelength : float [m]

    Returns
    -------
    array [1]

    Notes
    -----
    Planck's law.

    Examples
    --------
    >>> float(planck_ratio(1500.0, 1500.0, 7.5e-6))
    1.0
    """
    unit = PLANCK * LIGHT_SPEED / (wavelength * BOLTZMANN)
    planet = np.expm1(np.minimum(unit / np.asarray(temperature), 700.0))
    star = np.expm1(np.minimum(unit / np.asarray(star_temperature), 700.0))
    return star / planet


def emission_metric(
    planet_radius: Numbers, equilibrium: Numbers, star_radius: Numbers, star_temperature: Numbers, k_magnitude: Numbers
) -> Numbers:
    """Emission spectroscopy metric.

    ESM = 4.29e6 · B(7.5 µm, 1.10 T_eq)/B(7.5 µm, T*) · (R/R*)² · 10^(−K/5)

    Parameters
    ----------
    planet_radius : array [m]
    equilibrium : array [K]
        At zero albedo and full redistribution.
    star_radius : array [m]
    star_temperature : array [K]
    k_magnitude : array [mag]

    Returns
    -------
    array [1]

    Notes
    -----
    Kempton et al. 2018, doi:10.1088/1538-3873/aadf6f.

    Examples
    --------
    A planet as large and bright as its star at K = 0 has the scale itself, brightness at 1.10 T_eq (by definition):

    >>> round(float(emission_metric(6.957e8, 1000.0, 6.957e8, 1100.0, 0.0)))
    4290000
    """
    bright = planck_ratio(DAY_SIDE * np.asarray(equilibrium), star_temperature, EMISSION_WAVELENGTH)
    return EMISSION_SCALE * bright * np.square(planet_radius / star_radius) * 10 ** (-np.asarray(k_magnitude) / 5)


def priority(planet_radius: Numbers, air_probability: Numbers, transmission: Numbers) -> Numbers:
    """Chance of air times how far the metric passes its class's cut-off.

    air_probability · TSM / cut-off, 10 below 1.5 R⊕ and 90 above

    Parameters
    ----------
    planet_radius : array [m]
    air_probability : array [1]
    transmission : array [1]
        TSM.

    Returns
    -------
    array [1]

    Notes
    -----
    Cut-offs of Kempton et al. 2018, doi:10.1088/1538-3873/aadf6f; the product is this project's.

    Examples
    --------
    >>> float(priority(6.3781e6, 1.0, 10.0))
    1.0
    """
    small, large = CUT_OFFS
    cut_off = np.where(np.asarray(planet_radius) / EARTH_RADIUS < SIZE_BOUNDS[0], small, large)
    return air_probability * transmission / cut_off
