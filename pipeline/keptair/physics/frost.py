"""Where a gas freezes out."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import GAS_CONSTANT


def saturation_pressure(
    temperature: Numbers,
    triple_temperature: float,
    triple_pressure: float,
    critical_temperature: float,
    sublimation_heat: float,
    vaporisation_heat: float,
) -> Numbers:
    """Pressure of a gas over its own ice or liquid.

    p = p_t exp[(L/R) (1/T_t − 1/T)]: L of sublimation below the triple point, of vaporisation above

    Parameters
    ----------
    temperature : array [K]
    triple_temperature : float [K]
    triple_pressure : float [Pa]
    critical_temperature : float [K]
    sublimation_heat : float [J mol-1]
        At the triple point.
    vaporisation_heat : float [J mol-1]
        At the triple point.

    Returns
    -------
    array [Pa]
        Infinite above the critical temperature.

    Notes
    -----
    Clausius–Clapeyron with constant latent heat; triple points from the NIST Chemistry WebBook, doi:10.18434/T4D303.

    Examples
    --------
    CO2 has 10 Pa at 124 K (Span & Wagner 1996, doi:10.1063/1.555991: 124.4 K):

    >>> round(float(saturation_pressure(123.9, 216.592, 517950.0, 304.128, 26100.0, 15300.0)))
    10
    """
    heat = np.where(np.asarray(temperature) < triple_temperature, sublimation_heat, vaporisation_heat)
    exponent = heat / GAS_CONSTANT * (1 / triple_temperature - 1 / np.asarray(temperature))
    pressure = triple_pressure * np.exp(np.maximum(exponent, -600.0))
    return np.where(np.asarray(temperature) > critical_temperature, np.inf, pressure)
