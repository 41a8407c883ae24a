"""Published data of the Solar System's bodies."""

from __future__ import annotations

from dataclasses import dataclass

PLANETS_SOURCE = "JPL Solar System Dynamics, Planets and Pluto: Physical Characteristics"
MOONS_SOURCE = "JPL Solar System Dynamics, Planetary Satellite Physical Parameters (DE440, JUP365, SAT441)"
ORBITS_SOURCE = "Standish, Keplerian Elements for Approximate Positions of the Major Planets (JPL), table 1"


@dataclass(frozen=True)
class Planet:
    """One row of JPL's table of planets, with the orbit of Standish's."""

    equatorial_radius_km: float
    mean_radius_km: float
    mass_kg: float
    density_g_cm3: float
    sidereal_year: float  # [Julian years]
    gravity_m_s2: float  # equatorial, rotation left out
    escape_speed_km_s: float
    axis_au: float
    eccentricity: float


# The rows from Uranus' density on: value from memory.
PLANETS = {
    "Mercury": Planet(2440.53, 2439.4, 0.330114e24, 5.4291, 0.2408467, 3.70, 4.25, 0.38709927, 0.20563593),
    "Venus": Planet(6051.8, 6051.8, 4.86747e24, 5.243, 0.61519726, 8.87, 10.36, 0.72333566, 0.00677672),
    "Earth": Planet(6378.1366, 6371.0084, 5.97237e24, 5.5136, 1.0000174, 9.80, 11.19, 1.00000261, 0.01671123),
    "Mars": Planet(3396.19, 3389.50, 0.641712e24, 3.9341, 1.8808476, 3.71, 5.03, 1.52371034, 0.09339410),
    "Jupiter": Planet(71492.0, 69911.0, 1898.187e24, 1.3262, 11.862615, 24.79, 60.20, 5.20288700, 0.04838624),
    "Saturn": Planet(60268.0, 58232.0, 568.3174e24, 0.6871, 29.447498, 10.44, 36.09, 9.53667594, 0.05386179),
    "Uranus": Planet(25559.0, 25362.0, 86.8127e24, 1.270, 84.016846, 8.87, 21.38, 19.18916464, 0.04725744),
    "Neptune": Planet(24764.0, 24622.0, 102.4126e24, 1.638, 164.79132, 11.15, 23.56, 30.06992276, 0.00859048),
}
MOONS = {  # GM [km3 s-2], mean radius [km]
    "Moon": (4902.800, 1737.4),
    "Io": (5959.91547, 1821.49),
    "Ganymede": (9887.83275, 2631.20),
    "Callisto": (7179.28340, 2410.30),
    "Titan": (8978.13710, 2574.76),
}
