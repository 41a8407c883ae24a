"""Exobases: how hot, how high and how tightly bound, against standard atmospheres and spacecraft."""

from __future__ import annotations

from functools import cache, partial

import numpy as np

from handbook import thermospheres
from handbook.check import Check
from handbook.thermospheres import ACTIVE, EARTH_RADIUS, MEAN, QUIET
from handmade import make_batch, solar_system
from keptair import stages
from keptair.physics import bulk, exobase, kinetics
from keptair.physics.constants import ATOMIC_MASS, EARTH_MASS, GRAVITATION
from keptair.reference import load_gases
from keptair.settings import Settings

MSIS = "NRLMSIS 2.1 by pymsis, global mean, F10.7 = 140"
STANDARD = "US Standard Atmosphere 1976 by ussa1976"
BY_HAND = "CODATA 2018 and IAU 2015 by hand, 1000 K, 500 km above 6371 km"
CATLING = "Catling & Zahnle 2009, Scientific American 300(5), 36"
KOSKINEN = "Koskinen et al. 2013, doi:10.1016/j.icarus.2013.07.037"
CROSS_SECTIONS = (2e-19, 3e-19)  # [m2] usual for the Earth's exobase; the nitrogen background has the first
COLLISION_DIAMETER = 3.65e-10  # [m] of the Standard Atmosphere
FREE_PATH_SIGMA = np.sqrt(2) * np.pi * COLLISION_DIAMETER**2  # 1/(n σ) is its mean free path


def bound(gas: str, temperature: float, distance: float, mass: float = EARTH_MASS) -> float:
    """λ of a gas."""
    return float(kinetics.jeans_parameter(mass, distance, temperature, load_gases()[gas].mass_u * ATOMIC_MASS))


def effusion(gas: str, temperature: float, distance: float) -> float:
    speed = kinetics.most_probable_speed(temperature, load_gases()[gas].mass_u * ATOMIC_MASS)
    return float(kinetics.effusion_speed(speed, bound(gas, temperature, distance)))


@cache
def through_the_pipeline(body: str, background: str) -> dict[str, float]:
    """Exobase of a body of the Solar System as published, and λ of every gas."""
    settings = Settings.read(None, {"xuv.scatter_dex": 0.2})
    planets = stages.assess(make_batch(solar_system(body, background=background)), settings).planets
    wanted = ["exobase_temperature_k", "exobase_altitude_km", "exobase_escape_speed_km_s"]
    wanted += [f"jeans_parameter_{gas}" for gas in load_gases()]
    return {name: float(planets[name][0]) for name in wanted}


def pipeline(body: str, background: str, name: str) -> float:
    return through_the_pipeline(body, background)[name]


def msis_exobase() -> thermospheres.Thermosphere:
    """MSIS where n σ H is 1 for the cross-section of the nitrogen background."""
    model = thermospheres.msis(MEAN)
    return model.at(model.exobase(CROSS_SECTIONS[0]))


def msis_altitudes() -> tuple[float, float]:
    """Where n σ H is 1 for the ends of the usual cross-sections [km]."""
    low, high = (thermospheres.msis(MEAN).exobase(section) / 1e3 for section in CROSS_SECTIONS)
    return low, high


def msis_jeans_parameter() -> float:
    here = msis_exobase()
    return thermospheres.jeans_parameter(float(here.altitude[0]), float(here.temperature[0]), 1.008)


def exobase_of_the_standard() -> float:
    """Altitude [km] at which our exobase density is the Standard Atmosphere's density."""
    model = thermospheres.standard()
    ours = np.array(
        [
            exobase.exobase_density(EARTH_MASS, EARTH_RADIUS + altitude, temperature, mass, FREE_PATH_SIGMA)
            for altitude, temperature, mass in zip(model.altitude, model.temperature, model.mean_mass, strict=True)
        ]
    )
    return float(np.interp(0.0, np.log(ours / model.density), model.altitude)) / 1e3


def standard_flux(ours: bool) -> float:
    """Jeans flux of H at 500 km of the Standard Atmosphere [m-2 s-1 of exobase]."""
    here = thermospheres.standard().at(500e3)
    temperature, density = float(here.temperature[0]), float(here.hydrogen[0])
    if ours:
        speed = kinetics.most_probable_speed(temperature, 1.008 * ATOMIC_MASS)
        jeans = bound("h", temperature, EARTH_RADIUS + 500e3)
        return float(kinetics.jeans_flux(1.0, density, speed, jeans))
    jeans = thermospheres.jeans_parameter(500e3, temperature, 1.008)
    return density * thermospheres.leaving_speed(jeans, temperature, 1.008)


def msis_flux(f107: float, ours: bool) -> float:
    """Jeans flux of H at the exobase of MSIS [m-2 s-1 of surface]."""
    model = thermospheres.msis(f107)
    altitude = model.exobase(CROSS_SECTIONS[0])
    here = model.at(altitude)
    temperature, density = float(here.temperature[0]), float(here.hydrogen[0])
    ratio = 1 + altitude / EARTH_RADIUS
    if ours:
        speed = kinetics.most_probable_speed(temperature, 1.008 * ATOMIC_MASS)
        jeans = bound("h", temperature, EARTH_RADIUS + altitude)
        return float(kinetics.jeans_flux(ratio, density, speed, jeans))
    jeans = thermospheres.jeans_parameter(altitude, temperature, 1.008)
    return density * ratio**2 * thermospheres.leaving_speed(jeans, temperature, 1.008)


def body_mass(gm: float) -> float:
    return gm / GRAVITATION


CHECKS = [
    Check(
        "The Earth's exobase under n2 is as hot as MSIS has it",
        MSIS,
        lambda: float(msis_exobase().temperature[0]),
        partial(pipeline, "earth", "n2", "exobase_temperature_k"),
        "K",
        relative=0.03,
    ),
    Check(
        "The Earth's exobase under n2 is as high as MSIS has it",
        f"{MSIS}, n σ H = 1 for σ of 2 to 3e-19 m2",
        msis_altitudes,
        partial(pipeline, "earth", "n2", "exobase_altitude_km"),
        "km",
        relative=0.2,
    ),
    Check(
        "The Earth's exobase under n2 is in the range textbooks give",
        "Catling & Kasting 2017, doi:10.1017/9781139020558: about 500 km, to 1000 km when the Sun is active",
        (500.0, 1000.0),
        partial(pipeline, "earth", "n2", "exobase_altitude_km"),
        "km",
    ),
    Check(
        "λ of H at the Earth's exobase under n2 is that of MSIS",
        MSIS,
        msis_jeans_parameter,
        partial(pipeline, "earth", "n2", "jeans_parameter_h"),
        relative=0.03,
    ),
    Check(
        "The pipeline has 10.8 km/s at the Earth's exobase",
        f"{CATLING}: 10.8 km/s",
        10.8,
        partial(pipeline, "earth", "n2", "exobase_escape_speed_km_s"),
        "km s-1",
        absolute=0.05,
    ),
    Check(
        "Escape speed 500 km above the Earth is 10.8 km/s",
        f"{CATLING}: 10.8 km/s",
        10.8,
        lambda: bulk.escape_speed(EARTH_MASS, 6.871e6) / 1e3,
        "km s-1",
        absolute=0.05,
    ),
    *(
        Check(
            f"λ of {load_gases()[gas].title} at the Earth's exobase is {jeans:g}",
            BY_HAND,
            jeans,
            partial(bound, gas, 1000.0, 6.871e6),
            relative=1e-3,
        )
        for gas, jeans in (("h", 7.033), ("he", 27.93), ("o", 111.6))
    ),
    Check(
        "Hydrogen effuses from the Earth's exobase at 8.12 m/s",
        BY_HAND,
        8.120,
        partial(effusion, "h", 1000.0, 6.871e6),
        "m s-1",
        relative=1e-3,
    ),
    Check(
        "1e5 H atoms per cm3 at the Earth's exobase give 8.12e7 a second",
        BY_HAND,
        8.12e7,
        lambda: 1e5 * 1e2 * effusion("h", 1000.0, 6.871e6),
        "cm-2 s-1",
        relative=1e-3,
    ),
    Check(
        "Free path equals scale height where the Standard Atmosphere has it",
        STANDARD,
        lambda: thermospheres.standard_exobase() / 1e3,
        exobase_of_the_standard,
        "km",
        absolute=2.0,
    ),
    Check(
        "λ of H at 500 km is that of the Standard Atmosphere",
        STANDARD,
        lambda: thermospheres.jeans_parameter(500e3, float(thermospheres.standard().at(500e3).temperature[0]), 1.008),
        lambda: bound("h", float(thermospheres.standard().at(500e3).temperature[0]), 6.871e6),
        relative=1e-3,
    ),
    Check(
        "Hydrogen effuses from the Standard Atmosphere as Maxwell has it",
        f"{STANDARD}; Maxwell's distribution by scipy.integrate.quad",
        lambda: standard_flux(ours=False) / float(thermospheres.standard().at(500e3).hydrogen[0]),
        lambda: effusion("h", float(thermospheres.standard().at(500e3).temperature[0]), EARTH_RADIUS + 500e3),
        "m s-1",
        relative=1e-3,
    ),
    Check(
        "Hydrogen leaves the Standard Atmosphere as Maxwell has it",
        f"{STANDARD}, its 8.0e10 H per m3; Maxwell's distribution by scipy.integrate.quad",
        partial(standard_flux, ours=False),
        partial(standard_flux, ours=True),
        "m-2 s-1",
        relative=1e-3,
    ),
    *(
        Check(
            f"Hydrogen leaves MSIS at F10.7 = {f107:g} as Maxwell has it",
            "NRLMSIS 2.1 by pymsis, its H at its exobase; Maxwell's distribution by scipy.integrate.quad",
            partial(msis_flux, f107, ours=False),
            partial(msis_flux, f107, ours=True),
            "m-2 s-1",
            relative=1e-3,
        )
        for f107 in (QUIET, MEAN, ACTIVE)
    ),
    Check(
        "Mars' exobase under co2 is as hot as measured",
        "Bhardwaj et al. 2016, doi:10.1002/2016GL067707, MENCA, evening: 271 ± 5 K",
        271.0,
        partial(pipeline, "mars", "co2", "exobase_temperature_k"),
        "K",
        relative=0.2,
    ),
    Check(
        "Venus' exobase under co2 is as high as models of its air have it",
        "Hodges 2000, doi:10.1029/1999JE001138: 200-210 km, 1 bar at 49.5 km (value from memory)",
        205.0,
        lambda: 49.5 + pipeline("venus", "co2", "exobase_altitude_km"),
        "km",
        relative=0.1,
    ),
    Check(
        "H2 is bound to Saturn's exobase as occultations show",
        f"{KOSKINEN}: thermal escape parameter 260 to 340",
        (260.0, 340.0),
        partial(pipeline, "saturn", "h2", "jeans_parameter_h2"),
        relative=0.25,
    ),
    Check(
        "H2 is bound at most 340-fold at Saturn's coldest exobase",
        f"{KOSKINEN}: at most 340 for 370 K at 2700 km; oblateness aside",
        340.0,
        lambda: bound("h2", 370.0, 60.268e6 + 2.7e6, body_mass(3.7931206234e16)),
        relative=0.25,
    ),
    Check(
        "H2 is bound at least 260-fold at Saturn's hottest exobase",
        f"{KOSKINEN}: at least 260 for 540 K at 3000 km; oblateness aside",
        260.0,
        lambda: bound("h2", 540.0, 60.268e6 + 3.0e6, body_mass(3.7931206234e16)),
        relative=0.05,
    ),
    Check(
        "λ of H at Mars' exobase of 240 K and 200 km is 6.03",
        "CODATA 2018 and JPL's GM by hand",
        6.03,
        lambda: bound("h", 240.0, 3.5895e6, body_mass(4.282837362e13)),
        relative=2e-3,
    ),
    Check(
        "λ of H2 at Titan's exobase of 150 K and 1500 km is 3.56",
        "CODATA 2018 and JPL's GM by hand",
        3.56,
        lambda: bound("h2", 150.0, 4.07476e6, body_mass(8.978137e12)),
        relative=2e-3,
    ),
]
