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
    A power law through the Sun, early M dwarfs (0.24 Gyr, Loyd et al. 2021, arXiv:2011.10158) and 0.09 M☉
    (3.1 Gyr, Birky et al. 2021, RNAAS 5, 122).

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


def ribas_xuv_share(age: Numbers, bands: tuple[tuple[float, float], ...], constant_below: float = 0.1) -> Numbers:
    """Share of a solar-type star's light in five bands of high-energy light, added up.

    F(1 au) = 2.40 τ^−1.92 + 4.45 τ^−1.27 + 13.5 τ^−1.20 + 4.56 τ^−1.00 + 2.53 τ^−0.85 erg cm⁻² s⁻¹, over 1361 W m⁻²

    Parameters
    ----------
    age : array [Gyr]
        τ.
    bands : array [1]
        Flux at 1 au and 1 Gyr in erg cm⁻² s⁻¹, and exponent of τ, of each band.
    constant_below : float [Gyr]

    Returns
    -------
    array [1]

    Notes
    -----
    Ribas et al. 2005, doi:10.1086/427977 (value from memory): 0.1–120 nm, stars like the Sun; scaled with L here.

    Examples
    --------
    The Sun of 4.56 Gyr at 1 au, in erg cm⁻² s⁻¹; the paper's sum over the bands is 4.64, met to 1 %:

    >>> bands = ((2.40, -1.92), (4.45, -1.27), (13.5, -1.20), (4.56, -1.00), (2.53, -0.85))
    >>> round(float(ribas_xuv_share(4.56, bands)) * 1361e3, 2)
    4.66
    """
    tau = np.maximum(age, constant_below)
    total: Numbers = np.add.reduce([flux * tau**slope for flux, slope in bands])
    return total * 1e-3 / SOLAR_CONSTANT


def extreme_ultraviolet(x_ray: Numbers, intercept: float, slope: float) -> Numbers:
    """Extreme-ultraviolet luminosity that goes with an X-ray luminosity.

    log L_EUV = 4.80 + 0.860 log L_X, in erg/s

    Parameters
    ----------
    x_ray : array [W]
        0.1–2.4 keV.
    intercept : float [dex]
    slope : float [1]

    Returns
    -------
    array [W]
        10–92 nm.

    Notes
    -----
    Sanz-Forcada et al. 2011, doi:10.1051/0004-6361/201116594 (value from memory).

    Examples
    --------
    The quiet Sun, L_X = 2e27 erg/s, has some 1e28 erg/s (by the relation: 10^28.28):

    >>> round(float(np.log10(extreme_ultraviolet(2e20, 4.80, 0.860))) + 7, 2)
    28.28
    """
    return 10 ** (intercept + slope * np.log10(x_ray * 1e7)) / 1e7


def xray_luminosity(
    age: Numbers, star_luminosity: Numbers, saturated_share: float, at_one_gyr: float, decline: float
) -> Numbers:
    """X-ray luminosity of a dwarf of given age.

    L_X = min(6.3e-4 L, 1.89e28 erg/s τ^−1.55)

    Parameters
    ----------
    age : array [Gyr]
        τ.
    star_luminosity : array [W]
    saturated_share : float [1]
    at_one_gyr : float [W]
    decline : float [1]
        Exponent of τ.

    Returns
    -------
    array [W]

    Notes
    -----
    Sanz-Forcada et al. 2011, doi:10.1051/0004-6361/201116594 (value from memory); `extreme_ultraviolet` adds what goes
    with it.

    Examples
    --------
    At 1 Gyr a Sun has L_X = 1.89e28 erg/s (by the relation):

    >>> f"{xray_luminosity(1.0, 3.828e26, 6.3e-4, 1.89e21, -1.55) * 1e7:.2e}"
    '1.89e+28'
    """
    return np.minimum(saturated_share * star_luminosity, at_one_gyr * np.asarray(age) ** decline)


def traced_back_luminosity(
    now: Numbers, age: Numbers, at: Numbers, saturated: Numbers, decline: float = 1.23
) -> Numbers:
    """High-energy luminosity at another age of a star that was measured.

    L(t) = min(L_now (t/age)^−β, max(f_sat L_bol, L_now))

    Parameters
    ----------
    now : array [W]
        L_now.
    age : array [Gyr]
    at : array [Gyr]
        t.
    saturated : array [W]
        f_sat L_bol.
    decline : float [1]
        β.

    Returns
    -------
    array [W]

    Notes
    -----
    Exponent of Ribas et al. 2005, doi:10.1086/427977.

    Examples
    --------
    A measured star keeps its value at its own age (exact):

    >>> float(traced_back_luminosity(1e21, 5.0, 5.0, 1e24))
    1e+21
    """
    return np.minimum(now * (at / age) ** -decline, np.maximum(saturated, now))


def dwarf_luminosity(star_mass: Numbers) -> Numbers:
    """Luminosity of a dwarf of given mass.

    L = 0.23 M^2.3 below 0.43 M☉, M⁴ above, in solar units

    Parameters
    ----------
    star_mass : array [kg]

    Returns
    -------
    array [W]

    Notes
    -----
    Common practice; the inverse of `irradiation.mass_from_luminosity`.

    Examples
    --------
    By definition:

    >>> float(dwarf_luminosity(SOLAR_MASS) / SOLAR_LUMINOSITY)
    1.0
    """
    ratio = star_mass / SOLAR_MASS
    return SOLAR_LUMINOSITY * np.where(ratio < 0.43, 0.23 * ratio**2.3, ratio**4)


def coronal_luminosity(star_luminosity: Numbers, star_mass: Numbers, cap: float = 2.0, above: float = 0.6) -> Numbers:
    """Luminosity the activity laws are given: a giant's light is not its corona's.

    min(L, 2 L☉ (M*/M☉)⁴) for M* > 0.6 M☉, L below

    Parameters
    ----------
    star_luminosity : array [W]
    star_mass : array [kg]
    cap : float [1]
    above : float [Msun]

    Returns
    -------
    array [W]

    Notes
    -----
    Derived for this project. The factor 2 leaves room for a dwarf's own brightening on the main sequence.

    Examples
    --------
    A giant of one solar mass and 60 solar luminosities counts as 2 (by definition):

    >>> float(coronal_luminosity(60 * SOLAR_LUMINOSITY, SOLAR_MASS) / SOLAR_LUMINOSITY)
    2.0
    """
    ratio = star_mass / SOLAR_MASS
    dwarf = cap * SOLAR_LUMINOSITY * np.square(np.square(ratio))
    return np.where(ratio > above, np.minimum(star_luminosity, dwarf), star_luminosity)


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
