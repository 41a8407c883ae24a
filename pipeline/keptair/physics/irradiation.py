"""Starlight and the temperature it keeps."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import (
    ASTRONOMICAL_UNIT,
    SOLAR_CONSTANT,
    SOLAR_LUMINOSITY,
    SOLAR_MASS,
    STEFAN_BOLTZMANN,
)


def luminosity(star_radius: Numbers, star_temperature: Numbers) -> Numbers:
    """Bolometric luminosity of a sphere of given effective temperature.

    L = 4π R*² σ T⁴

    Parameters
    ----------
    star_radius : array [m]
    star_temperature : array [K]

    Returns
    -------
    array [W]

    Notes
    -----
    Stefan–Boltzmann law.

    Examples
    --------
    The nominal Sun (IAU 2015 Resolution B3: 3.828e26 W):

    >>> f"{luminosity(6.957e8, 5772.0):.3e}"
    '3.828e+26'
    """
    return 4 * np.pi * np.square(star_radius) * STEFAN_BOLTZMANN * np.square(np.square(star_temperature))


def star_radius(star_luminosity: Numbers, star_temperature: Numbers) -> Numbers:
    """Radius of a sphere of given luminosity and effective temperature.

    R* = √(L / 4π σ T⁴)

    Parameters
    ----------
    star_luminosity : array [W]
    star_temperature : array [K]

    Returns
    -------
    array [m]

    Notes
    -----
    Stefan–Boltzmann law.

    Examples
    --------
    The nominal Sun (IAU 2015 Resolution B3: 6.957e8 m):

    >>> f"{star_radius(3.828e26, 5772.0):.3e}"
    '6.957e+08'
    """
    return np.sqrt(star_luminosity / (4 * np.pi * STEFAN_BOLTZMANN)) / np.square(star_temperature)


def insolation(star_luminosity: Numbers, axis: Numbers) -> Numbers:
    """Stellar flux at the semi-major axis, in solar constants.

    S = (L/L☉) / (a/au)²

    Parameters
    ----------
    star_luminosity : array [W]
    axis : array [m]

    Returns
    -------
    array [1]

    Notes
    -----
    Inverse-square law; nominal luminosity of IAU 2015 Resolution B3.

    Examples
    --------
    Jupiter at 5.2 au gets 0.037 of the Earth's sunlight (NASA planetary fact sheet):

    >>> float(round(insolation(3.828e26, 5.204 * 149597870700), 3))
    0.037
    """
    return star_luminosity / SOLAR_LUMINOSITY / np.square(axis / ASTRONOMICAL_UNIT)


def mass_from_luminosity(star_luminosity: Numbers) -> Numbers:
    """Mass of a dwarf of given luminosity.

    M = (L/0.23)^(1/2.3) below 0.033 L☉, L^(1/4) above, in solar units

    Parameters
    ----------
    star_luminosity : array [W]

    Returns
    -------
    array [kg]

    Notes
    -----
    Common practice; dwarfs only. Within 0.83–1.05 of the mean dwarf sequence of Pecaut & Mamajek 2013,
    doi:10.1088/0067-0049/208/1/9, from A5 to M8; too light below (0.69 at M9.5).

    Examples
    --------
    An M4V dwarf of 0.0072 L☉ has 0.23 M☉ (Pecaut & Mamajek 2013, doi:10.1088/0067-0049/208/1/9):

    >>> float(round(mass_from_luminosity(0.0072 * 3.828e26) / 1.98841e30, 2))
    0.22
    """
    ratio = star_luminosity / SOLAR_LUMINOSITY
    return SOLAR_MASS * np.where(ratio < 0.033, (ratio / 0.23) ** (1 / 2.3), ratio**0.25)


def equilibrium_temperature(
    mean_flux: Numbers, albedo: Numbers | float, redistribution: float = 0.25, emissivity: float = 1.0
) -> Numbers:
    """Temperature at which a planet radiates what it absorbs.

    T = [⟨S⟩ · 1361 W m⁻² · (1 − A) · f / (e_IR σ)]^¼

    Parameters
    ----------
    mean_flux : array [1]
        Orbit-mean flux in solar constants.
    albedo : array [1]
        Bond albedo.
    redistribution : float [1]
        f: 1/4 over the whole sphere, 1/2 over the day side, 2/3 a bare rock's day side, 1 the substellar point.
    emissivity : float [1]
        e_IR.

    Returns
    -------
    array [K]

    Notes
    -----
    Energy balance. Holds where the planet has no heat of its own.

    Examples
    --------
    Mercury with the albedo of Mallama 2017, arXiv:1703.02670 (0.088), from the orbit-mean flux of its 0.387 au and
    e = 0.2056: 439.5 K, worked by hand (his orbit mean of the temperature is 436.3 K):

    >>> round(float(equilibrium_temperature(1 / 0.387098**2 / (1 - 0.20563**2) ** 0.5, 0.088)), 1)
    439.5
    """
    absorbed = mean_flux * SOLAR_CONSTANT * (1 - albedo) * redistribution
    return np.sqrt(np.sqrt(absorbed / (emissivity * STEFAN_BOLTZMANN)))


def skin_temperature(equilibrium: Numbers) -> Numbers:
    """Temperature of thin grey air high above the surface.

    T_b = T_eq / 2^¼

    Parameters
    ----------
    equilibrium : array [K]

    Returns
    -------
    array [K]

    Notes
    -----
    Grey radiative equilibrium, Eddington approximation (Chandrasekhar 1960, Radiative Transfer).

    Examples
    --------
    The Earth's 254.5 K gives 214 K (Catling & Kasting 2017, doi:10.1017/9781139020558):

    >>> round(skin_temperature(254.5))
    214
    """
    return equilibrium / 2**0.25
