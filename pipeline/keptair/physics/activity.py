"""High-energy light of stars: how much, and how it fades."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import EARTH_XUV_FLUX, SOLAR_CONSTANT, SOLAR_LUMINOSITY, SOLAR_MASS


def saturation_age(
    star_mass: Numbers, solar_saturation: float = 0.066, exponent: float = -1.6, mass_cap: float = 1.3
) -> Numbers:
    """Age at which a star's high-energy light begins to fade.

    t_sat = 0.066 Gyr (min(M*, 1.3) / M☉)^−1.6

    Parameters
    ----------
    star_mass : array [kg]
    solar_saturation : float [Gyr]
    exponent : float [1]
    mass_cap : float [Msun]

    Returns
    -------
    array [Gyr]

    Notes
    -----
    A power law through the Sun, early M dwarfs (0.24 Gyr, Loyd et al. 2021, doi:10.3847/1538-4357/abc68e) and
    0.09 M☉ (3.1 Gyr, Birky et al. 2021, arXiv:2103.13427).

    Examples
    --------
    >>> round(float(saturation_age(0.09 * 1.98841e30)), 1)
    3.1
    """
    return solar_saturation * np.minimum(star_mass / SOLAR_MASS, mass_cap) ** exponent


def power_law_xuv_share(
    age: Numbers, saturation: Numbers, saturated_log10: float = -3.2, decline: float = 1.23
) -> Numbers:
    """Share of the bolometric light that leaves as X-rays and extreme ultraviolet.

    L_XUV / L = f_sat for t < t_sat, f_sat (t/t_sat)^−β after

    Parameters
    ----------
    age : array [Gyr]
    saturation : array [Gyr]
    saturated_log10 : float [dex]
        log10 of f_sat.
    decline : float [1]
        β.

    Returns
    -------
    array [1]

    Notes
    -----
    Exponent of Ribas et al. 2005, doi:10.1086/427977. Dwarfs of 2400–6500 K.

    Examples
    --------
    The Sun now, at 1 au, in erg cm⁻² s⁻¹ (Ribas et al. 2005: 4.64):

    >>> round(float(power_law_xuv_share(4.57, 0.066)) * 1361e3, 1)
    4.7
    """
    return 10.0**saturated_log10 * np.maximum(age / saturation, 1.0) ** -decline


def coronal_share(star_luminosity: Numbers, star_mass: Numbers) -> Numbers:
    """Share of a star's light that a dwarf of its mass would give.

    min(L, 2 L☉ (M*/M☉)⁴) / L for M* > 0.6 M☉, 1 below

    Parameters
    ----------
    star_luminosity : array [W]
    star_mass : array [kg]

    Returns
    -------
    array [1]

    Notes
    -----
    Derived for this project: a giant's light is not its corona's. The factor 2 leaves room for a dwarf's own
    brightening on the main sequence.

    Examples
    --------
    A giant of one solar mass and 60 solar luminosities counts as 2 (by definition):

    >>> round(float(coronal_share(60 * 3.828e26, 1.98841e30)), 4)
    0.0333
    """
    ratio = star_mass / SOLAR_MASS
    dwarf = 2 * SOLAR_LUMINOSITY * np.square(np.square(ratio))
    return np.where(ratio > 0.6, np.minimum(1.0, dwarf / star_luminosity), 1.0)


def xuv_flux(mean_flux: Numbers, xuv_share: Numbers) -> Numbers:
    """High-energy flux at the planet in units of the Earth's.

    F = (L_XUV/L) · 1361 W m⁻² · ⟨S⟩ / 4.64e-3 W m⁻²

    Parameters
    ----------
    mean_flux : array [1]
        Orbit-mean flux in solar constants.
    xuv_share : array [1]
        L_XUV / L.

    Returns
    -------
    array [1]

    Notes
    -----
    Unit: the Sun's flux at 1 au now, Ribas et al. 2005, doi:10.1086/427977.

    Examples
    --------
    The Sun's published 4.64 erg cm⁻² s⁻¹ is 3.409e-6 of its light:

    >>> round(xuv_flux(1.0, 3.409e-6), 3)
    1.0
    """
    return xuv_share * mean_flux * (SOLAR_CONSTANT / EARTH_XUV_FLUX)
