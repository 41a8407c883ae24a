"""Constants of nature and nominal units, SI.

CODATA 2018 (doi:10.1103/RevModPhys.93.025010), IAU 2012 Resolution B2 and IAU 2015 Resolution B3
(doi:10.3847/0004-6256/152/2/41). Masses are nominal GM divided by G.
"""

import math

BOLTZMANN = 1.380649e-23  # [J K-1]
AVOGADRO = 6.02214076e23  # [mol-1]
PLANCK = 6.62607015e-34  # [J s]
LIGHT_SPEED = 299792458.0  # [m s-1]
STEFAN_BOLTZMANN = 5.670374419e-8  # [W m-2 K-4]
GRAVITATION = 6.67430e-11  # [m3 kg-1 s-2]
ATOMIC_MASS = 1.66053906660e-27  # [kg]
GAS_CONSTANT = BOLTZMANN * AVOGADRO  # [J mol-1 K-1]

ASTRONOMICAL_UNIT = 149597870700.0  # [m]
DAY = 86400.0  # [s]
YEAR = 365.25 * DAY  # [s]
GIGAYEAR = 1e9 * YEAR  # [s]

SOLAR_RADIUS = 6.957e8  # [m]
SOLAR_LUMINOSITY = 3.828e26  # [W]
SOLAR_MASS = 1.3271244e20 / GRAVITATION  # [kg]
SOLAR_TEMPERATURE = 5772.0  # [K]
SOLAR_CONSTANT = 1361.0  # [W m-2]
EARTH_RADIUS = 6.3781e6  # [m], equatorial
EARTH_MASS = 3.986004e14 / GRAVITATION  # [kg]
JUPITER_RADIUS = 7.1492e7  # [m], equatorial
JUPITER_MASS = 1.2668653e17 / GRAVITATION  # [kg]

EARTH_XUV_FLUX = 4.64e-3  # [W m-2], the Sun now at 1 au (Ribas et al. 2005, doi:10.1086/427977)
SMALLEST_EXPONENT = -600.0  # exp() below it is slow (denormal numbers) and nothing physical is left

SQRT_PI = math.sqrt(math.pi)
