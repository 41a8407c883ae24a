"""The invented sky: what stars and planets there are, before anybody catalogues them."""

import math
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from .dice import Dice, invented_names
from .digits import as_catalogued

Values = dict[str, float]

# Mean dwarfs: mass, radius (Sun = 1), effective temperature (K), absolute J and K magnitude
# (Pecaut & Mamajek 2013, doi:10.1088/0067-0049/208/1/9, version 2022.04.16; M8 to F5).
MASS, RADIUS, TEFF, ABSOLUTE_J, ABSOLUTE_K = np.array([
    (0.085, 0.114, 2570, 11.05, 9.92), (0.102, 0.137, 2810, 10.18, 9.22), (0.162, 0.196, 3060, 9.09, 8.20),
    (0.230, 0.274, 3210, 8.20, 7.36), (0.370, 0.361, 3430, 7.38, 6.55), (0.440, 0.446, 3560, 6.81, 5.98),
    (0.500, 0.501, 3660, 6.48, 5.64), (0.570, 0.588, 3850, 5.97, 5.15), (0.640, 0.630, 4100, 5.59, 4.81),
    (0.700, 0.701, 4440, 5.10, 4.397), (0.820, 0.783, 5100, 4.46, 3.938), (0.880, 0.813, 5270, 4.31, 3.827),
    (0.940, 0.914, 5480, 3.96, 3.532), (1.000, 1.012, 5770, 3.60, 3.236), (1.060, 1.100, 5930, 3.37, 3.043),
    (1.180, 1.221, 6180, 3.05, 2.76), (1.330, 1.473, 6550, 2.52, 2.291),
]).T  # fmt: skip
SUN_TEFF_K, SUN_LUMINOSITY_W, YEAR_D = 5772.0, 3.828e26, 365.2569  # IAU 2015 B3; year of one au round one Sun


@dataclass(frozen=True)
class Population:
    """One kind of system: its star, its innermost planet's light, its planets, and how they were found."""

    hosts: int
    planets_per_host: tuple[int, ...]
    star: str  # dwarf, giant, unseen
    star_mass: tuple[float, float]
    age: tuple[float, float]
    insolation: tuple[float, float]
    planet_mass: tuple[float, float]
    build: str  # rock, volatile, gas
    method: str = "transit"
    weighed: float = 0.0
    withdrawn: bool = False


@dataclass(frozen=True)
class System:
    """A star and its planets, from the inside out."""

    population: Population
    host: str
    star: Values
    planets: list[Values]


POPULATIONS = (
    # scorched rocks, temperate rocks of quiet stars, rocks of red dwarfs, sub-Neptunes
    Population(40, (1, 1, 2), "dwarf", (0.75, 1.15), (0.6, 10), (300, 3000), (0.05, 3), "rock", weighed=0.3),
    Population(34, (1, 2, 1), "dwarf", (0.66, 1.0), (3, 9), (0.8, 2), (0.9, 2.2), "rock", weighed=0.45),
    Population(26, (1, 3, 2, 4), "dwarf", (0.085, 0.5), (1, 10), (1, 60), (0.3, 2.5), "rock", weighed=0.4),
    Population(48, (1, 2, 1, 3), "dwarf", (0.4, 1.2), (0.5, 10), (3, 500), (3.5, 18), "volatile", weighed=0.65),
    # hot, warm and cold giants, light planets found by radial velocity
    Population(34, (1,), "dwarf", (0.95, 1.33), (0.5, 8), (200, 1800), (90, 2500), "gas", weighed=1.0),
    Population(22, (1, 1, 2), "dwarf", (0.6, 1.3), (0.5, 9), (3, 80), (40, 1500), "gas", weighed=0.8),
    Population(24, (1, 2), "dwarf", (0.5, 1.3), (1, 10), (0.003, 0.5), (60, 5500), "gas", "radial velocity"),
    Population(25, (1, 2, 1), "dwarf", (0.3, 1.1), (1, 10), (0.5, 300), (1.5, 40), "volatile", "radial velocity"),
    # planets of giant stars, wide young giants, planets whose star nobody described, and what was taken back
    Population(9, (1,), "giant", (1.0, 2.0), (1, 8), (5, 200), (300, 3000), "gas", "radial velocity"),
    Population(6, (1,), "dwarf", (1.1, 1.33), (0.02, 0.3), (1e-4, 0.01), (500, 4000), "gas", "imaging", weighed=0.6),
    Population(7, (1,), "unseen", (0.5, 1.0), (1, 9), (1, 100), (1, 12), "volatile", weighed=0.3),
    Population(12, (1,), "dwarf", (0.3, 1.2), (1, 9), (1, 1000), (1, 300), "volatile", weighed=0.5, withdrawn=True),
)


def draw_star(dice: Dice, population: Population) -> Values:
    """A star whose radius, temperature and luminosity agree (Stefan and Boltzmann)."""
    mass, age = dice.scale(*population.star_mass), dice.between(*population.age)
    dwarf_radius, teff, j_mag, k_mag = (float(np.interp(mass, MASS, y)) for y in (RADIUS, TEFF, ABSOLUTE_J, ABSOLUTE_K))
    radius = dwarf_radius * (1 + dice.normal(0.03))
    if population.star == "giant":
        radius, teff, j_mag = dice.scale(4, 15), 5000 - 900 * math.log10(radius), k_mag + 0.6
    teff *= 1 + dice.normal(0.01)
    star = as_catalogued({"stellar_mass_msun": mass, "stellar_radius_rsun": radius, "stellar_teff_k": teff})
    luminosity = star["stellar_radius_rsun"] ** 2 * (star["stellar_teff_k"] / SUN_TEFF_K) ** 4
    distance = dice.scale(4, 60) if mass < 0.6 else dice.scale(15, 300)
    fainter = 5 * math.log10(distance / 10) - 5 * math.log10(radius / dwarf_radius)
    # half a thousandth of the star's light in youth, then fading with age
    fading = max(1, age / (0.066 * mass**-1.6)) ** -1.5 * 10 ** dice.normal(0.3)
    return star | as_catalogued({
        "stellar_luminosity_lsun": luminosity,
        "stellar_age_gyr": age,
        "stellar_xray_luminosity_w": 5e-4 * fading * min(luminosity, 2 * mass**4) * SUN_LUMINOSITY_W,
        "j_mag": j_mag + fainter,
        "k_mag": k_mag + fainter,
        "distance_pc": distance,
        "ra_deg": dice.between(0, 360),
        "dec_deg": math.degrees(math.asin(dice.between(-1, 1))),
    })  # fmt: skip


def draw_size(dice: Dice, build: str, mass: float, insolation: float) -> float:
    """Radius from mass: rock a little under pure silicate, gas puffed up by light."""
    rock = math.pow(mass, 1 / 3.7)
    if build == "rock":
        return rock * (1 + dice.normal(0.02))
    if build == "volatile":
        return max(1.2 * rock, 0.81 * math.pow(mass, 0.59) * math.exp(dice.normal(0.1)))
    heat = 1 + 0.12 * max(0, math.log10(insolation / 150))
    return 11.5 * heat * min(1, math.pow(mass / 130, 0.25)) * math.exp(dice.normal(0.06))


def draw_planet(dice: Dice, population: Population, star: Values, insolation: float) -> Values:
    """A planet on an orbit that keeps Kepler's third law with its star's catalogued mass and light."""
    luminosity, star_mass = star["stellar_luminosity_lsun"], star["stellar_mass_msun"]
    distance = math.sqrt(luminosity / insolation)
    period = as_catalogued({"orbital_period_d": YEAR_D * math.sqrt(distance**3 / star_mass)})
    axis = as_catalogued({"semi_major_axis_au": math.cbrt(star_mass * (period["orbital_period_d"] / YEAR_D) ** 2)})
    mass = dice.scale(*population.planet_mass)
    wild = 0.9 if population.build == "gas" else 0.25
    return period | axis | {
        "planet_mass_mearth": mass,
        "planet_radius_rearth": draw_size(dice, population.build, mass, insolation),
        "eccentricity": 0.0 if period["orbital_period_d"] < 5 else wild * dice.between(0.1, 1) ** 2,
        "insolation_earth": luminosity / axis["semi_major_axis_au"] ** 2,
        "bond_albedo": dice.between(0.04, 0.35),
    }  # fmt: skip


def draw_system(dice: Dice, population: Population, planets: int, host: str) -> System:
    """Each planet's year is 1.6 to 2.8 times that of the one inside it."""
    star = draw_star(dice, population)
    insolation = dice.scale(*population.insolation)
    drawn = []
    for _ in range(planets):
        drawn.append(draw_planet(dice, population, star, insolation))
        insolation *= dice.between(1.6, 2.8) ** (-4 / 3)
    return System(population, host, star, drawn)


def draw_systems(dice: Dice) -> Iterator[System]:
    """Every population in turn."""
    names = invented_names(dice)
    for population in POPULATIONS:
        for host in range(population.hosts):
            planets = population.planets_per_host[host % len(population.planets_per_host)]
            yield draw_system(dice, population, planets, next(names))
