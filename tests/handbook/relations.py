"""Relations between mass, radius and make, the shoreline, and how well a planet can be seen."""

from __future__ import annotations

from functools import cache, partial
from typing import Any

import numpy as np

from handbook.bodies import PLANETS, PLANETS_SOURCE
from handbook.check import Check, words
from handmade import make_batch, solar_system
from keptair import stages
from keptair.physics import bulk, mass_radius, shoreline, spectroscopy
from keptair.physics.constants import EARTH_MASS, EARTH_RADIUS, SOLAR_LUMINOSITY, SOLAR_RADIUS
from keptair.reference import load_chen_kipping
from keptair.settings import Settings

CHEN = "Chen & Kipping 2017, doi:10.3847/1538-4357/834/1/17"
CHEN_BY_HAND = f"{CHEN}: C M^S with its published coefficients (value from memory), by hand"
CHEN = load_chen_kipping()
OTEGI = "Otegi et al. 2020, doi:10.1051/0004-6361/201936482"
ZAHNLE = "Zahnle & Catling 2017, doi:10.3847/1538-4357/aa7846"
KEMPTON = "Kempton et al. 2018, doi:10.1088/1538-3873/aadf6f"
HELLED = "Helled et al. 2011, doi:10.1088/0004-637X/726/1/15 (value from memory)"
# log10[S / (0.431 (v/5.027)⁴)] by hand from JPL's escape speeds and Standish's orbits
SHORELINE = {"mars": 0.00, "earth": -1.02, "venus": -0.61, "ganymede": -0.01, "titan": -0.48, "mercury": 1.48}
WITH_AIR = ("venus", "earth", "titan", "triton", "pluto", "jupiter", "saturn", "uranus", "neptune")
WITHOUT_AIR = ("mercury", "moon", "io", "callisto")
FORECASTS = {  # name: intrinsic scatter of its branch
    "Earth": 0.040,
    "Venus": 0.040,
    "Mars": 0.040,
    "Uranus": 0.146,
    "Neptune": 0.146,
    "Saturn": 0.146,
}
TRANSITS: dict[str, dict[str, Any]] = {
    "TOI-1231 b": {
        "planet_mass_mearth": 15.4,
        "planet_radius_rearth": 3.65,
        "semi_major_axis_au": 0.1288,
        "stellar_teff_k": 3553.0,
        "stellar_radius_rsun": 0.476,
        "stellar_mass_msun": 0.485,
        "j_mag": 8.876,
        "k_mag": 8.069,
    },
    "LTT 1445 A b": {
        "planet_mass_mearth": 2.87,
        "planet_radius_rearth": 1.305,
        "semi_major_axis_au": 0.03813,
        "stellar_teff_k": 3337.0,
        "stellar_radius_rsun": 0.2683,
        "stellar_mass_msun": 0.257,
        "j_mag": 7.294,
        "k_mag": 6.496,
    },
    "GJ 1252 b": {
        "planet_mass_mearth": 2.09,
        "planet_radius_rearth": 1.193,
        "semi_major_axis_au": 0.00916,
        "stellar_teff_k": 3458.0,
        "stellar_radius_rsun": 0.391,
        "stellar_mass_msun": 0.381,
        "j_mag": 8.697,
        "k_mag": 7.915,
    },
}
METRICS = (  # planet, column, published, source; the papers' own masses, radii, stars
    ("TOI-1231 b", "tsm", 99.0, "Burt et al. 2021, doi:10.3847/1538-3881/ac0432: TSM 99 ± 25"),
    ("LTT 1445 A b", "tsm", 30.0, "Winters et al. 2022, doi:10.3847/1538-3881/ac50a9: TSM 30"),
    ("LTT 1445 A b", "esm", 5.7, "Winters et al. 2022, doi:10.3847/1538-3881/ac50a9: ESM 5.7"),
    ("GJ 1252 b", "esm", 16.4, "Crossfield et al. 2022, doi:10.3847/2041-8213/ac886b: ESM 16.4"),
)


def forecast(mass_in_earths: float) -> float:
    return (
        float(mass_radius.chen_kipping_radius(mass_in_earths * EARTH_MASS, CHEN.branches, CHEN.mass_breaks_mearth))
        / EARTH_RADIUS
    )


def weighed(radius_in_earths: float) -> float:
    return (
        float(
            mass_radius.chen_kipping_mass(
                radius_in_earths * EARTH_RADIUS, CHEN.branches, CHEN.radius_breaks_rearth, CHEN.degenerate_masses_mearth
            )
        )
        / EARTH_MASS
    )


def otegi(radius_in_earths: float) -> float:
    return float(mass_radius.otegi_mass(radius_in_earths * EARTH_RADIUS, (0.90, 3.45), (1.74, 1.58), 1.8)) / EARTH_MASS


def hydrogen_share(name: str) -> float:
    """Share of hydrogen and helium that the radius of an ice giant asks for."""
    planet = PLANETS[name]
    radius, flux = planet.mean_radius_km * 1e3, 1 / planet.axis_au**2
    return float(bulk.hydrogen_share(planet.mass_kg, radius, flux, 4.57))


def rock_radii(name: str) -> float:
    """Radius of a planet over that of rock without a core of its mass."""
    planet = PLANETS[name]
    return planet.mean_radius_km * 1e3 / float(bulk.silicate_radius(planet.mass_kg))


@cache
def shoreline_of_the_solar_system() -> dict[str, float]:
    planets = stages.assess(make_batch(solar_system()), Settings()).planets
    return dict(zip(planets["planet_id"], planets["shoreline_dex"].tolist(), strict=True))


def offset(body: str) -> float:
    return shoreline_of_the_solar_system()[body]


def side(body: str) -> str:
    return "air" if offset(body) < 0 else "no air"


@cache
def metrics() -> dict[str, dict[str, float]]:
    """Both metrics of the transiting planets, through the pipeline."""
    rows = [{"planet_id": name, **values} for name, values in TRANSITS.items()]
    planets = stages.assess(make_batch(rows), Settings()).planets
    return {
        name: {column: float(planets[column][place]) for column in ("tsm", "esm")}
        for place, name in enumerate(TRANSITS)
    }


def metric(planet: str, column: str) -> float:
    return metrics()[planet][column]


CHECKS = [
    Check(
        "Chen & Kipping give Neptune's mass 4.31 Earth radii",
        CHEN_BY_HAND,
        4.31,
        partial(forecast, 17.15),
        absolute=0.005,
    ),
    Check(
        "Chen & Kipping give Jupiter's mass 13.8 Earth radii",
        CHEN_BY_HAND,
        13.8,
        partial(forecast, 317.8),
        absolute=0.05,
    ),
    *(
        Check(
            f"Chen & Kipping forecast {name}'s radius to two scatters",
            f"{PLANETS_SOURCE}; scatter {100 * scatter:g} % of {CHEN}",
            PLANETS[name].mean_radius_km * 1e3 / EARTH_RADIUS,
            partial(forecast, PLANETS[name].mass_kg / EARTH_MASS),
            "Earth radii",
            factor=round(float(np.exp(2 * scatter)), 3),
        )
        for name, scatter in FORECASTS.items()
    ),
    Check(
        "Rock ends and Neptunes begin at two Earth masses",
        f"{CHEN}, abstract: 2.0 (+0.7 −0.6) Earth masses",
        (1.4, 2.7),
        lambda: CHEN.mass_breaks_mearth[0],
        "Earth masses",
    ),
    *(
        Check(
            f"Branches of Chen & Kipping meet at {mass:g} Earth masses",
            f"{CHEN}: continuous by construction",
            partial(forecast, mass * (1 - 1e-9)),
            partial(forecast, mass * (1 + 1e-9)),
            "Earth radii",
            relative=5e-3,
        )
        for mass in CHEN.mass_breaks_mearth
    ),
    Check(
        "Chen & Kipping weigh Venus by its radius",
        f"{PLANETS_SOURCE}; scatter 4 % in radius is 14 % in mass",
        4.86747e24 / EARTH_MASS,
        partial(weighed, 6.0518e6 / EARTH_RADIUS),
        "Earth masses",
        relative=0.29,
    ),
    Check(
        "Otegi's rock of one Earth radius weighs 0.90 Earths",
        f"{OTEGI}: (0.90 ± 0.06) R^(3.45 ± 0.12)",
        0.90,
        partial(otegi, 1.0),
        "Earth masses",
        relative=1e-6,
    ),
    Check(
        "Otegi's planet rich in volatiles of Neptune's radius weighs a Neptune",
        f"{OTEGI}: 1.74 R^1.58, dispersion about 50 %; {PLANETS_SOURCE}",
        17.15,
        partial(otegi, 3.865),
        "Earth masses",
        relative=0.5,
    ),
    *(
        Check(
            f"Nothing solid: {name} is larger than rock of any core",
            PLANETS_SOURCE,
            (1.0, 10.0),
            partial(rock_radii, name),
            "rock radii",
        )
        for name in ("Jupiter", "Saturn", "Uranus", "Neptune")
    ),
    Check(
        "The Earth, with a core, is smaller than rock without",
        PLANETS_SOURCE,
        (0.9, 1.0),
        partial(rock_radii, "Earth"),
        "rock radii",
    ),
    *(
        Check(
            f"{name}'s radius asks for the hydrogen its gravity field shows",
            f"{HELLED}: {100 * low:g} to {100 * high:g} %",
            (low, high),
            partial(hydrogen_share, name),
        )
        for name, low, high in (("Uranus", 0.08, 0.25), ("Neptune", 0.10, 0.24))
    ),
    *(
        Check(
            f"{body.capitalize()} lies {distance:+.2f} dex from the cosmic shoreline",
            f"{ZAHNLE}, line through Mars, by hand",
            distance,
            partial(offset, body),
            "dex",
            absolute=0.011,
        )
        for body, distance in SHORELINE.items()
    ),
    *(
        Check(
            f"{body.capitalize()} lies where bodies with air do",
            f"{ZAHNLE}, figure 1",
            words("air"),
            partial(side, body),
        )
        for body in WITH_AIR
    ),
    *(
        Check(
            f"{body.capitalize()} lies where bodies without air do",
            f"{ZAHNLE}, figure 1",
            words("no air"),
            partial(side, body),
        )
        for body in WITHOUT_AIR
    ),
    Check(
        "Light of a star of 0.01 suns counts 1.2 dex more at the shoreline",
        f"{ZAHNLE}: I L^-0.6 (value from memory)",
        1.2,
        lambda: (
            shoreline.shoreline_offset(5e3, 0.01 * SOLAR_LUMINOSITY, 1.0)
            - shoreline.shoreline_offset(5e3, SOLAR_LUMINOSITY, 1.0)
        ),
        "dex",
        absolute=1e-9,
    ),
    Check(
        "The numbers of GJ 1214 b give a TSM of 460",
        f"{KEMPTON}, formula by hand: 8.17, 2.742, 596 K, 0.215, J 9.750",
        459.96,
        lambda: spectroscopy.transmission_metric(
            8.17 * EARTH_MASS, 2.742 * EARTH_RADIUS, 596.0, 0.215 * SOLAR_RADIUS, 9.750
        ),
        absolute=0.01,
    ),
    *(
        Check(
            f"The pipeline gives {planet} the published {column.upper()}",
            f"{source} (value from memory)",
            published,
            partial(metric, planet, column),
            relative=0.03,
        )
        for planet, column, published, source in METRICS
    ),
]
