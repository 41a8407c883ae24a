"""Molecular speeds and what they let go at the exobase."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import BOLTZMANN, GRAVITATION, SMALLEST_EXPONENT, SQRT_PI


def most_probable_speed(temperature: Numbers, particle_mass: Numbers | float) -> Numbers:
    """Most probable speed of a Maxwellian gas.

    v_p = √(2kT/m)

    Parameters
    ----------
    temperature : array [K]
    particle_mass : array [kg]

    Returns
    -------
    array [m s-1]

    Notes
    -----
    Maxwell 1860.

    Examples
    --------
    N2 at 300 K, 422 m s⁻¹ (common practice):

    >>> round(most_probable_speed(300.0, 28.0134 * 1.66053907e-27))
    422
    """
    return np.sqrt(2 * BOLTZMANN * temperature / particle_mass)


def mean_speed(temperature: Numbers, particle_mass: Numbers | float) -> Numbers:
    """Mean speed of a Maxwellian gas.

    v_mean = √(8kT/πm)

    Parameters
    ----------
    temperature : array [K]
    particle_mass : array [kg]

    Returns
    -------
    array [m s-1]

    Notes
    -----
    Maxwell 1860.

    Examples
    --------
    N2 at 300 K, 476 m s⁻¹ (common practice):

    >>> round(mean_speed(300.0, 28.0134 * 1.66053907e-27))
    476
    """
    return np.sqrt(8 * BOLTZMANN * temperature / (np.pi * particle_mass))


def rms_speed(temperature: Numbers, particle_mass: Numbers | float) -> Numbers:
    """Root-mean-square speed of a Maxwellian gas.

    v_rms = √(3kT/m)

    Parameters
    ----------
    temperature : array [K]
    particle_mass : array [kg]

    Returns
    -------
    array [m s-1]

    Notes
    -----
    Maxwell 1860.

    Examples
    --------
    N2 at 300 K, 517 m s⁻¹ (common practice):

    >>> round(rms_speed(300.0, 28.0134 * 1.66053907e-27))
    517
    """
    return np.sqrt(3 * BOLTZMANN * temperature / particle_mass)


def jeans_parameter(
    planet_mass: Numbers, distance: Numbers, temperature: Numbers, particle_mass: Numbers | float
) -> Numbers:
    """Ratio of a particle's binding energy to its thermal energy at the exobase.

    λ = G M m / (k T r) = (escape speed / most probable speed)²

    Parameters
    ----------
    planet_mass : array [kg]
    distance : array [m]
        Of the exobase from the centre.
    temperature : array [K]
    particle_mass : array [kg]

    Returns
    -------
    array [1]
        Draws without an exobase are masked by the caller.

    Notes
    -----
    Jeans 1925, The Dynamical Theory of Gases, ch. XV. Holds while the gas is collisional up to the exobase; below about
    2.5 the outflow is hydrodynamic (Volkov et al. 2011, doi:10.1088/2041-8205/729/2/L24).

    Examples
    --------
    Hydrogen at 500 km above the Earth's mean radius and 1000 K (IAU 2015 GM; value 7.033 worked by hand):

    >>> round(jeans_parameter(5.97217e24, 6.871e6, 1000.0, 1.008 * 1.66053907e-27), 2)
    7.03
    """
    return GRAVITATION * planet_mass * particle_mass / (BOLTZMANN * temperature * distance)


def speed_ratio(jeans: Numbers) -> Numbers:
    """Escape speed over rms speed.

    q = v_esc / v_rms = √(λ / 1.5)

    Parameters
    ----------
    jeans : array [1]
        λ.

    Returns
    -------
    array [1]

    Notes
    -----
    The rule that a gas is kept for q above 6 is common practice without a source.

    Examples
    --------
    The rule's 6 is λ = 54 (exact):

    >>> float(speed_ratio(54.0))
    6.0
    """
    return np.sqrt(jeans / 1.5)


def effusion_speed(most_probable: Numbers, jeans: Numbers) -> Numbers:
    """Mean outward speed of the particles that leave for good.

    w = v_p/(2√π) · (1 + λ) e^−λ

    Parameters
    ----------
    most_probable : array [m s-1]
    jeans : array [1]
        λ.

    Returns
    -------
    array [m s-1]

    Notes
    -----
    Jeans 1925, The Dynamical Theory of Gases.

    Examples
    --------
    Hydrogen at the Earth's exobase, λ = 7.033, v_p = 4062 m s⁻¹ (8.12 m s⁻¹ worked by hand):

    >>> round(float(effusion_speed(4062.0, 7.033)), 1)
    8.1
    """
    return most_probable / (2 * SQRT_PI) * (1 + jeans) * np.exp(np.maximum(-jeans, SMALLEST_EXPONENT))


def jeans_flux(
    distance_ratio: Numbers, density: Numbers, most_probable: Numbers, jeans: Numbers, correction: Numbers | float = 1.0
) -> Numbers:
    """Jeans flux per area of the planet's surface.

    φ_J = B n v_p/(2√π) (1 + λ) e^−λ (r/R)²

    Parameters
    ----------
    distance_ratio : array [1]
        r/R of the exobase.
    density : array [m-3]
        Of the escaping gas at the exobase.
    most_probable : array [m s-1]
    jeans : array [1]
        λ.
    correction : array [1]
        B.

    Returns
    -------
    array [m-2 s-1]

    Notes
    -----
    Jeans 1925; B from 0.5–0.8 (Chamberlain & Hunten 1987, value from memory) to 1.4–1.7 (kinetic simulations, Volkov
    et al. 2011, doi:10.1088/2041-8205/729/2/L24).

    Examples
    --------
    1e5 hydrogen atoms per cm³ at the Earth's exobase: 8.1e7 cm⁻² s⁻¹ of exobase (worked by hand):

    >>> f"{jeans_flux(1.0, 1e11, 4062.0, 7.033) / 1e4:.1e}"
    '8.1e+07'
    """
    return correction * density * np.square(distance_ratio) * effusion_speed(most_probable, jeans)


def trace_jeans_flux(
    carrier: Numbers, unit_jeans: Numbers, upper_scale_heights: Numbers | float, mass_in_u: float, mean_mass_in_u: float
) -> Numbers:
    """Jeans flux of a trace per unit of its mixing ratio at the homopause.

    φ_J/X_h = B n v_p/(2√π) (r/R)² (1 + λ) exp[−λ − (m/μ − 1) ln(p_h/p_exo)]

    Parameters
    ----------
    carrier : array [m-2 s-1]
        B n v_p/(2√π) (r/R)² for all the gas at the exobase, were its particles of 1 u.
    unit_jeans : array [1]
        λ of a particle of 1 u.
    upper_scale_heights : array [1]
        ln(p_h/p_exo).
    mass_in_u : float [u]
        m of the trace.
    mean_mass_in_u : float [u]
        μ, mean mass above the homopause.

    Returns
    -------
    array [m-2 s-1]

    Notes
    -----
    Jeans 1925 with diffusive separation above the homopause, every gas with its own scale height (Chamberlain & Hunten
    1987, Theory of Planetary Atmospheres; value from memory). One exponent, since its parts alone can underflow.

    Examples
    --------
    A gas of the mean mass keeps its share up to the exobase, so its flux is the plain Jeans flux (exact):

    >>> plain = jeans_flux(1.0, 1.0, 1.0, 7.0)
    >>> bool(np.isclose(trace_jeans_flux(1 / (2 * SQRT_PI), 7.0, 11.0, 1.0, 1.0), plain, rtol=1e-14))
    True
    """
    # in place: this is the innermost loop, and a fresh array costs more than a pass over an old one
    flux = np.asarray(mass_in_u * np.asarray(unit_jeans))
    exponent = np.asarray((1 - mass_in_u / mean_mass_in_u) * np.asarray(upper_scale_heights) - flux)
    np.maximum(exponent, SMALLEST_EXPONENT, out=exponent)
    np.exp(exponent, out=exponent)
    flux += 1
    flux *= exponent
    flux *= carrier
    flux *= 1 / np.sqrt(mass_in_u)
    return flux
