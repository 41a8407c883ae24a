"""The exobase: how hot the upper air is there, how high it lies and how thin it is."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import ATOMIC_MASS, BOLTZMANN, GRAVITATION


def conduction_constant(
    gravity: Numbers,
    damping: Numbers,
    anchor_temperature: float,
    anchor_base_temperature: float,
    anchor_xuv: float,
    anchor_gravity: float,
) -> Numbers:
    """What a unit of high-energy flux adds to T^s in the conductive scaling.

    C = (T_a^s − T_b,a^s) (g_a/g) / F_a

    Parameters
    ----------
    gravity : array [m s-2]
    damping : array [1]
        s: 0.7 is pure conduction, more stands for radiative damping.
    anchor_temperature : float [K]
    anchor_base_temperature : float [K]
    anchor_xuv : float [1]
        In units of the Earth's flux.
    anchor_gravity : float [m s-2]

    Returns
    -------
    array [K**s]

    Notes
    -----
    Scaling of Bauer & Lammer 2004, doi:10.1007/978-3-662-09362-7, after Bauer 1971, normalised on a body whose
    exobase is known.

    Examples
    --------
    At s = 1 on the anchor itself it is the rise over the base (by definition, Earth 1000 K over 214 K):

    >>> conduction_constant(9.8, 1.0, 1000.0, 214.0, 1.0, 9.8)
    786.0
    """
    rise = anchor_temperature**damping - anchor_base_temperature**damping
    return rise * (anchor_gravity / anchor_xuv) / gravity


def conductive_temperature(base_power: Numbers, constant: Numbers, xuv: Numbers, damping: Numbers) -> Numbers:
    """Exobase temperature at which conduction carries the absorbed heat down.

    T_cond = (T_b^s + C F_XUV)^(1/s)

    Parameters
    ----------
    base_power : array [K**s]
        T_b^s of the skin temperature.
    constant : array [K**s]
        C of `conduction_constant`.
    xuv : array [1]
        In units of the Earth's flux.
    damping : array [1]
        s.

    Returns
    -------
    array [K]

    Notes
    -----
    Bauer & Lammer 2004, doi:10.1007/978-3-662-09362-7. No temperature of a gas above about 10⁴ K, where it ionises and
    cools in lines.

    Examples
    --------
    The Earth's own flux over a 214 K base (US Standard Atmosphere 1976: 1000 K):

    >>> conductive_temperature(214.0, conduction_constant(9.8, 1.0, 1000.0, 214.0, 1.0, 9.8), 1.0, 1.0)
    1000.0
    """
    return (base_power + constant * xuv) ** (1 / damping)


def exobase_temperature(conductive: Numbers, limit: float = 1e4) -> Numbers:
    """Temperature at the exobase.

    T_exo = min(T_cond, 10⁴ K)

    Parameters
    ----------
    conductive : array [K]
    limit : float [K]

    Returns
    -------
    array [K]

    Notes
    -----
    Outflows seen in helium have 3 400–12 400 K (Lampón et al. 2023, doi:10.1051/0004-6361/202245649).

    Examples
    --------
    >>> float(exobase_temperature(2.5e5))
    10000.0
    """
    return np.minimum(conductive, limit)


def exobase_pressure(gravity: Numbers, particle_mass: float, cross_section: float) -> Numbers:
    """Pressure at which a particle's free path equals the scale height.

    p = μ g / σ

    Parameters
    ----------
    gravity : array [m s-2]
    particle_mass : float [kg]
        Mean mass above the homopause.
    cross_section : float [m2]

    Returns
    -------
    array [Pa]

    Notes
    -----
    From n σ H = 1 with H = kT/(μ g). Gravity at the catalogue radius stands for that at the exobase.

    Examples
    --------
    μ = 16 u, 9.8 m s⁻² and 2e-19 m² (worked by hand; the US Standard Atmosphere 1976 has it near 410 km):

    >>> f"{exobase_pressure(9.8, 16 * 1.66053907e-27, 2e-19):.1e}"
    '1.3e-06'
    """
    return particle_mass * gravity / cross_section


def inverse_exobase_radius(
    planet_mass: Numbers,
    planet_radius: Numbers,
    equilibrium: Numbers,
    base: Numbers,
    exobase: Numbers,
    lower_mass: float,
    upper_mass: float,
    lower_scale_heights: float,
    upper_scale_heights: Numbers,
    upper_weight: float = 0.75,
) -> Numbers:
    """Inverse distance of the exobase from the planet's centre.

    1/r = 1/R − (k T_eq / G M m̄) ln(p_ref/p_h) − (k T_u / G M μ) ln(p_h/p_exo), T_u = ¾ T_exo + ¼ T_b

    Parameters
    ----------
    planet_mass : array [kg]
    planet_radius : array [m]
    equilibrium : array [K]
        T_eq.
    base : array [K]
        T_b, skin temperature.
    exobase : array [K]
        T_exo.
    lower_mass : float [kg]
        m̄, mean mass below the homopause.
    upper_mass : float [kg]
        μ, mean mass above it.
    lower_scale_heights : float [1]
        ln(p_ref/p_h).
    upper_scale_heights : array [1]
        ln(p_h/p_exo).
    upper_weight : float [1]
        Share of T_exo in T_u, ¾.

    Returns
    -------
    array [m-1]
        Zero or negative where the air has no top: the caller decides below which value air is unbound.

    Notes
    -----
    Derived for this project: hydrostatic balance of two isothermal layers under gravity falling as r⁻².

    Examples
    --------
    Earth at 1000 K (US Standard Atmosphere 1976 puts the exobase near 500 km):

    >>> inverse = inverse_exobase_radius(5.97217e24, 6.371e6, 254.5, 214.0, 1000.0, 4.81e-26, 3.32e-26, 13.8155, 11.0)
    >>> 450 < (1 / inverse - 6.371e6) / 1e3 < 600
    True
    """
    well = GRAVITATION * planet_mass
    upper = upper_weight * exobase + (1 - upper_weight) * base
    lower_term = BOLTZMANN * lower_scale_heights / lower_mass * equilibrium
    upper_term = BOLTZMANN / upper_mass * upper * upper_scale_heights
    return 1 / planet_radius - (lower_term + upper_term) / well


def smallest_inverse_radius(planet_radius: Numbers, roche_ratio: Numbers, cap: float = 30.0) -> Numbers:
    """Inverse of the largest distance at which air is bound.

    max(1/(30 R), 1/(ξ R))

    Parameters
    ----------
    planet_radius : array [m]
    roche_ratio : array [1]
        ξ, Roche-lobe radius in planet radii.
    cap : float [1]
        In planet radii.

    Returns
    -------
    array [m-1]

    Notes
    -----
    Derived for this project. Infinite ξ where the orbit is not known.

    Examples
    --------
    >>> float(smallest_inverse_radius(1.0, 4.0))
    0.25
    """
    return 1 / (np.minimum(np.maximum(roche_ratio, 1e-3), cap) * planet_radius)


def exobase_density(
    planet_mass: Numbers, distance: Numbers, temperature: Numbers, particle_mass: float, cross_section: float
) -> Numbers:
    """Number density at the exobase.

    n = 1/(σ H), H = k T / (μ g(r))

    Parameters
    ----------
    planet_mass : array [kg]
    distance : array [m]
        Of the exobase from the centre.
    temperature : array [K]
    particle_mass : float [kg]
        Mean mass above the homopause.
    cross_section : float [m2]

    Returns
    -------
    array [m-3]

    Notes
    -----
    Jeans 1925, The Dynamical Theory of Gases: n σ H = 1.

    Examples
    --------
    The Earth at 500 km and 1000 K with 14 u and 2e-19 m²: 7e13 m⁻³ (the US Standard Atmosphere 1976 has 2.2e13 there,
    with a larger cross-section):

    >>> bool(4e13 < exobase_density(5.97217e24, 6.871e6, 1000.0, 14 * 1.66053907e-27, 2e-19) < 1e14)
    True
    """
    gravity = GRAVITATION * planet_mass / np.square(distance)
    return particle_mass * gravity / (cross_section * BOLTZMANN * temperature)


def lower_scale_heights(reference_pressure: float, homopause_pressure: float) -> float:
    """Scale heights between the catalogue radius and the homopause.

    ln(p_ref/p_h)

    Parameters
    ----------
    reference_pressure : float [Pa]
    homopause_pressure : float [Pa]

    Returns
    -------
    float [1]

    Notes
    -----
    Barometric law.

    Examples
    --------
    >>> round(lower_scale_heights(1e5, 0.1), 4)
    13.8155
    """
    return float(np.log(reference_pressure / homopause_pressure))


def particle_mass(mass_in_u: float) -> float:
    """Mass of a particle given in atomic mass units.

    m = m_u · u

    Parameters
    ----------
    mass_in_u : float [u]

    Returns
    -------
    float [kg]

    Notes
    -----
    CODATA 2018, doi:10.1103/RevModPhys.93.025010.

    Examples
    --------
    >>> f"{particle_mass(1.008):.4e}"
    '1.6738e-27'
    """
    return mass_in_u * ATOMIC_MASS
