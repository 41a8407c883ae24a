"""The cosmic shoreline: an empirical second opinion."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import SOLAR_LUMINOSITY

MARS_INSOLATION = 0.431  # [solar constants]
MARS_ESCAPE_SPEED = 5027.0  # [m s-1]


def shoreline_offset(speed: Numbers, star_luminosity: Numbers, insolation: Numbers) -> Numbers:
    """How far a planet lies beyond the line that parts worlds with air from worlds without.

    log10[ S (L/L☉)^−0.6 / (0.431 (v/5.027 km/s)⁴) ]

    Parameters
    ----------
    speed : array [m s-1]
        Escape speed at the catalogue radius.
    star_luminosity : array [W]
    insolation : array [1]
        In solar constants, without the eccentricity factor.

    Returns
    -------
    array [dex]
        Negative on the side of air.

    Notes
    -----
    Zahnle & Catling 2017, doi:10.3847/1538-4357/aa7846 (exponent 0.6: value from memory); the line put through Mars.
    Fuzzy by some tenths; meant for thin secondary air.

    Examples
    --------
    The Earth, one decade on the side of air:

    >>> round(float(shoreline_offset(11186.0, 3.828e26, 1.0)), 2)
    -1.02
    """
    light = insolation * (star_luminosity / SOLAR_LUMINOSITY) ** -0.6
    return np.log10(light / (MARS_INSOLATION * (speed / MARS_ESCAPE_SPEED) ** 4))
