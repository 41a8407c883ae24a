"""Bulk and orbits of planets: gravity, escape speed, density, Kepler's third law, sunlight, Roche lobes."""

from __future__ import annotations

from functools import partial

from handbook.bodies import MOONS, MOONS_SOURCE, ORBITS_SOURCE, PLANETS, PLANETS_SOURCE, Planet
from handbook.check import Check
from keptair.physics import bulk, irradiation, orbit
from keptair.physics.constants import (
    ASTRONOMICAL_UNIT,
    DAY,
    EARTH_MASS,
    GRAVITATION,
    JUPITER_MASS,
    SOLAR_LUMINOSITY,
    SOLAR_MASS,
    YEAR,
)
from keptair.reference import read_toml

HEAT_BALANCE = "PDS Atmospheres Node, Heat Balance table: F_sun at S0 = 1370 W m-2"
AGOL = "Agol et al. 2021, doi:10.3847/PSJ/abd022 (value from memory)"
HILL = "NASA Solar System Exploration: the Earth's Hill sphere reaches 1.5 million km"
KILOMETRE = 1e3  # [m]
# F_sun [W m-2] of the heat-balance table; it takes older orbits for the planets farther out.
SUNLIGHT = {"Venus": 2618.4628, "Mars": 590.1023, "Jupiter": 50.6160}


def gravity(planet: Planet) -> float:
    return float(bulk.surface_gravity(planet.mass_kg, planet.equatorial_radius_km * KILOMETRE))


def escape_speed(planet: Planet) -> float:
    return float(bulk.escape_speed(planet.mass_kg, planet.mean_radius_km * KILOMETRE)) / KILOMETRE


def density(planet: Planet) -> float:
    return float(bulk.bulk_density(planet.mass_kg, planet.mean_radius_km * KILOMETRE)) / 1e3


def axis(period: float, star_mass: float = SOLAR_MASS) -> float:
    return float(orbit.semi_major_axis(period, star_mass)) / ASTRONOMICAL_UNIT


def insolation(planet: Planet) -> float:
    return float(irradiation.insolation(SOLAR_LUMINOSITY, planet.axis_au * ASTRONOMICAL_UNIT))


def reference_body(name: str, key: str) -> float:
    return float(read_toml("solar_system")["bodies"][name.lower()][key])


def energy_to_the_roche_lobe(distance: float, mass_ratio: float) -> float:
    """Energy from the surface to the inner Lagrange point over G M/R, both bodies as points in the turning frame.

    distance : of the star, in planet radii; mass_ratio : planet over star.
    """
    from scipy.optimize import brentq

    turning = (1 + 1 / mass_ratio) / distance**3
    centre = distance / (1 + mass_ratio)  # of mass, from the planet

    def potential(r: float) -> float:
        return -1 / r - 1 / (mass_ratio * (distance - r)) - turning * (centre - r) ** 2 / 2

    def pull(r: float) -> float:
        return 1 / r**2 - 1 / (mass_ratio * (distance - r) ** 2) + turning * (centre - r)

    lagrange = brentq(pull, 1.0, distance / 2)
    return potential(lagrange) - potential(1.0)


def roche_factor(distance: float, mass_ratio: float) -> float:
    radius = 7e7
    ratio = orbit.roche_ratio(mass_ratio * SOLAR_MASS, radius, distance * radius, 0.0, SOLAR_MASS)
    return float(orbit.roche_factor(ratio, 0.0))


CHECKS = [
    *(
        Check(
            f"{name} has its published gravity",
            PLANETS_SOURCE,
            planet.gravity_m_s2,
            partial(gravity, planet),
            "m s-2",
            absolute=0.006,
        )
        for name, planet in PLANETS.items()
    ),
    *(
        Check(
            f"{name} has its published escape speed",
            PLANETS_SOURCE,
            planet.escape_speed_km_s,
            partial(escape_speed, planet),
            "km s-1",
            absolute=0.006,
        )
        for name, planet in PLANETS.items()
    ),
    *(
        Check(
            f"{name} has its published density",
            PLANETS_SOURCE,
            planet.density_g_cm3,
            partial(density, planet),
            "g cm-3",
            relative=5e-4,
        )
        for name, planet in PLANETS.items()
    ),
    *(
        Check(
            f"{name}'s year gives its orbit",
            f"{PLANETS_SOURCE}; {ORBITS_SOURCE}",
            planet.axis_au,
            partial(axis, planet.sidereal_year * YEAR),
            "AU",
            relative=1e-3,
        )
        for name, planet in PLANETS.items()
    ),
    Check(
        "TRAPPIST-1 e's period gives its orbit",
        f"{AGOL}: 6.101013 d round 0.0898 solar masses",
        0.02925,
        partial(axis, 6.101013 * DAY, 0.0898 * SOLAR_MASS),
        "AU",
        relative=1e-3,
    ),
    *(
        Check(
            f"{name} gets its published share of sunlight",
            HEAT_BALANCE,
            flux / 1370.0,
            partial(insolation, PLANETS[name]),
            "of the Earth's",
            relative=1e-3,
        )
        for name, flux in SUNLIGHT.items()
    ),
    *(
        Check(
            f"{name} in the reference data has the published mass",
            PLANETS_SOURCE,
            planet.mass_kg * GRAVITATION,
            partial(reference_body, name, "gm_m3_s2"),
            "m3 s-2",
            relative=2e-4,
        )
        for name, planet in PLANETS.items()
    ),
    *(
        Check(
            f"{name} in the reference data has the published mass",
            MOONS_SOURCE,
            gm * 1e9,
            partial(reference_body, name, "gm_m3_s2"),
            "m3 s-2",
            relative=1e-6,
        )
        for name, (gm, _) in MOONS.items()
    ),
    *(
        Check(
            f"{name} in the reference data has the published radius",
            PLANETS_SOURCE if name in PLANETS else MOONS_SOURCE,
            radius * KILOMETRE,
            partial(reference_body, name, "radius_m"),
            "m",
            relative=1e-6,
        )
        for name, radius in (
            *((name, planet.mean_radius_km) for name, planet in PLANETS.items()),
            *((name, radius) for name, (_, radius) in MOONS.items()),
        )
    ),
    Check(
        "The Earth's Roche lobe is its Hill sphere",
        HILL,
        1.5e6,
        lambda: orbit.roche_ratio(EARTH_MASS, 1e3, ASTRONOMICAL_UNIT, 0.0, SOLAR_MASS),
        "km",
        relative=0.01,
    ),
    *(
        Check(
            f"Tide at {distance:g} radii lowers the binding energy as the potential says",
            "Potential between planet and L1 with scipy.optimize.brentq; approximation of Erkaev et al. 2007",
            partial(energy_to_the_roche_lobe, distance, JUPITER_MASS / SOLAR_MASS),
            partial(roche_factor, distance, JUPITER_MASS / SOLAR_MASS),
            relative=0.05,
        )
        for distance in (60.0, 100.0, 300.0)
    ),
]
