"""The energy limit, and when air flows out as a whole."""

import numpy as np
from numpy.typing import NDArray

from keptair.physics.arrays import Numbers
from keptair.physics.constants import GRAVITATION


def absorption_radius(
    planet_radius: Numbers, exobase_radius: Numbers, roche_ratio: Numbers, bound: NDArray[np.bool_], cap: float
) -> Numbers:
    """Distance from the centre at which high-energy light is absorbed.

    r_x = min(r_exo, cap · R, ξ R), never below R; without r_exo where the air is unbound

    Parameters
    ----------
    planet_radius : array [m]
    exobase_radius : array [m]
        Any value where not bound.
    roche_ratio : array [1]
        ξ, Roche-lobe radius in planet radii.
    bound : array [bool]
    cap : float [1]
        In planet radii.

    Returns
    -------
    array [m]

    Notes
    -----
    Erkaev et al. 2007, doi:10.1051/0004-6361:20066929; the cap of 3 radii is this project's choice, 1.3 for hydrogen.

    Examples
    --------
    >>> float(absorption_radius(1.0, 9.0, 50.0, np.True_, 3.0))
    3.0
    """
    widest = planet_radius * np.clip(roche_ratio, 1.0, cap)
    return np.where(bound, np.clip(exobase_radius, planet_radius, widest), widest)


def energy_limited_flux(
    planet_mass: Numbers,
    planet_radius: Numbers,
    absorption: Numbers,
    roche_factor: Numbers,
    xuv: Numbers,
    efficiency: Numbers,
) -> Numbers:
    """Mass loss per area of surface that the absorbed light can lift.

    φ_E = ε F (r_x/R)² R / (4 G M K)

    Parameters
    ----------
    planet_mass : array [kg]
    planet_radius : array [m]
    absorption : array [m]
        r_x.
    roche_factor : array [1]
        K.
    xuv : array [W m-2]
    efficiency : array [1]
        ε.

    Returns
    -------
    array [kg m-2 s-1]

    Notes
    -----
    Watson, Donahue & Walker 1981, doi:10.1016/0019-1035(81)90101-9; tides after Erkaev et al. 2007,
    doi:10.1051/0004-6361:20066929.

    Examples
    --------
    A hot Neptune like GJ 436 b (21 M⊕, 4.1 R⊕, about 1 W m⁻² of XUV) loses 1e8–1e9 g/s (Ehrenreich et al. 2015,
    doi:10.1038/nature14501); at 10 % the limit is 1.3e9, within 1 dex:

    >>> flux = energy_limited_flux(1.3e26, 2.6e7, 1.3 * 2.6e7, 0.8, 1.0, 0.1)
    >>> bool(1e8 < flux * 4 * np.pi * 2.6e7**2 * 1e3 < 1e10)
    True
    """
    return (
        efficiency
        * xuv
        * np.square(absorption / planet_radius)
        * planet_radius
        / (4 * GRAVITATION * planet_mass * roche_factor)
    )


def flows_out(
    bound: NDArray[np.bool_],
    conductive: Numbers,
    key_jeans: Numbers,
    conduction_limit: float,
    jeans_limit: float,
    radiate: bool,
) -> NDArray[np.bool_]:
    """Whether the background leaves as an outflow rather than particle by particle.

    unbound, or T_cond > 10⁴ K (unless that heat is radiated), or λ(key escaper) < 2.5

    Parameters
    ----------
    bound : array [bool]
    conductive : array [K]
        T_cond.
    key_jeans : array [1]
        λ of the key escaper.
    conduction_limit : float [K]
    jeans_limit : float [1]
    radiate : bool [bool]

    Returns
    -------
    array [bool]

    Notes
    -----
    λ: Volkov et al. 2011, doi:10.1088/2041-8205/729/2/L24 (transition 2–3). Outflow of heat that conduction cannot
    carry: Johnstone et al. 2019, doi:10.1051/0004-6361/201935279; radiation: Tian 2009,
    doi:10.1088/0004-637X/703/1/905.

    Examples
    --------
    >>> bool(flows_out(np.True_, 1000.0, 7.0, 1e4, 2.5, False))
    False
    """
    escaping = ~np.asarray(bound) | (np.asarray(key_jeans) < jeans_limit)
    return escaping if radiate else escaping | (np.asarray(conductive) > conduction_limit)
