"""What diffusion brings up to the exobase, and what an outflow carries along."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import BOLTZMANN


def diffusion_parameter(coefficient: float, exponent: float, temperature: Numbers) -> Numbers:
    """Binary diffusion parameter from a fit.

    b = A T^s

    Parameters
    ----------
    coefficient : float [m-1 s-1]
        A, with T in K.
    exponent : float [1]
        s.
    temperature : array [K]

    Returns
    -------
    array [m-1 s-1]

    Notes
    -----
    Fits to the CRC Handbook of Chemistry and Physics, "Diffusion in gases", 200–673 K.

    Examples
    --------
    H2 in air at 273.15 K: D = 0.668 cm² s⁻¹ at 1 atm (CRC Handbook), so b = n D = 1.79e19 cm⁻¹ s⁻¹:

    >>> f"{diffusion_parameter(2.67e19, 0.750, 273.15):.2e}"
    '1.79e+21'
    """
    return coefficient * temperature**exponent


def hard_sphere_parameter(
    diameter: float, other_diameter: float, particle_mass: float, other_mass: float, temperature: Numbers
) -> Numbers:
    """Binary diffusion parameter of hard spheres.

    b = 3/(8 d²) √(kT (m₁ + m₂) / (2π m₁ m₂)), d = (d₁ + d₂)/2

    Parameters
    ----------
    diameter : float [m]
    other_diameter : float [m]
    particle_mass : float [kg]
    other_mass : float [kg]
    temperature : array [K]

    Returns
    -------
    array [m-1 s-1]

    Notes
    -----
    Chapman & Cowling 1970, The Mathematical Theory of Non-uniform Gases, first approximation. Good to 25 % at 100–300 K
    with diameters from viscosity.

    Examples
    --------
    O2 in N2 at 273 K: D = 0.18 cm² s⁻¹ at 1 atm (CRC Handbook), so b = 4.8e18 cm⁻¹ s⁻¹, to 25 %:

    >>> b = hard_sphere_parameter(355e-12, 370e-12, 5.314e-26, 4.652e-26, 273.15)
    >>> bool(0.75 < b / 4.8e20 < 1.25)
    True
    """
    mean_diameter = (diameter + other_diameter) / 2
    reduced = particle_mass * other_mass / (particle_mass + other_mass)
    return 3 / (8 * mean_diameter**2) * np.sqrt(BOLTZMANN * temperature / (2 * np.pi * reduced))


def supply_flux(
    gravity: Numbers, temperature: Numbers, mean_mass: float, particle_mass: float, parameter: Numbers
) -> Numbers:
    """Flux that diffusion can carry up per unit mixing ratio; negative where the gas is the heavier.

    φ_D / X = b (m̄ − m) g / (k T)

    Parameters
    ----------
    gravity : array [m s-2]
    temperature : array [K]
        At the homopause, T_b.
    mean_mass : float [kg]
        m̄ of the air below.
    particle_mass : float [kg]
    parameter : array [m-1 s-1]
        b.

    Returns
    -------
    array [m-2 s-1]

    Notes
    -----
    Hunten 1973, doi:10.1175/1520-0469(1973)030<1481:TEOLGF>2.0.CO;2. Per area of surface: g r² is constant.

    Examples
    --------
    Earth, 13.8 ppm of hydrogen as H2: 3.1e8 cm⁻² s⁻¹ (3.45e8 observed lies between this and the value for H):

    >>> u = 1.66053907e-27
    >>> b = diffusion_parameter(2.67e19, 0.750, 214.0)
    >>> f"{13.8e-6 * supply_flux(9.80, 214.0, 28.97 * u, 2.016 * u, b) / 1e4:.1e}"
    '3.1e+08'
    """
    return parameter * (mean_mass - particle_mass) * gravity / (BOLTZMANN * temperature)


def in_series(kinetic: Numbers, supply: Numbers) -> Numbers:
    """Flux through two resistances one behind the other.

    φ = φ_J φ_D / (φ_J + φ_D), 0 where both are 0

    Parameters
    ----------
    kinetic : array [m-2 s-1]
    supply : array [m-2 s-1]

    Returns
    -------
    array [m-2 s-1]

    Notes
    -----
    Derived for this project; the smaller of the two where they are far apart.

    Examples
    --------
    Equal resistances halve the flux (exact):

    >>> float(in_series(2.0, 2.0))
    1.0
    """
    total = np.asarray(kinetic + supply, dtype=float)
    np.maximum(total, np.finfo(float).tiny, out=total)
    np.divide(kinetic, total, out=total)
    total *= supply
    return total


def carried_flux(wind: Numbers, supply: Numbers) -> Numbers:
    """Flux of a trace carried along in an outflow, per unit mixing ratio.

    φ/X = max(0, N/τ + b (m̄ − m) g/(kT)): nothing above the crossover mass

    Parameters
    ----------
    wind : array [m-2 s-1]
        N/τ: particles of the air below that the outflow lifts.
    supply : array [m-2 s-1]
        `supply_flux` of the trace, negative for a heavy one.

    Returns
    -------
    array [m-2 s-1]

    Notes
    -----
    Hunten, Pepin & Walker 1987, doi:10.1016/0019-1035(87)90022-4, in a form without 0/0.

    Examples
    --------
    A gas of the mean mass leaves with the air itself (exact):

    >>> float(carried_flux(5.0, 0.0))
    5.0
    """
    flux = np.asarray(wind + supply)
    return np.maximum(flux, 0.0, out=flux)
