"""Light of stars: temperatures it keeps, luminosities, and the X-rays and extreme ultraviolet."""

from __future__ import annotations

from functools import cache, partial

import numpy as np

from handbook.check import Check
from handmade import make_batch
from keptair import stages
from keptair.physics import activity, irradiation
from keptair.physics.constants import (
    ASTRONOMICAL_UNIT,
    EARTH_XUV_FLUX,
    SOLAR_CONSTANT,
    SOLAR_LUMINOSITY,
    SOLAR_MASS,
    SOLAR_RADIUS,
)
from keptair.reference import load_bands
from keptair.settings import Settings
from keptair.stages.starlight import with_extreme_ultraviolet

HEAT_BALANCE = "PDS Atmospheres Node, Heat Balance table (S0 = 1370 W m-2)"
FACT_SHEET = "NASA planetary fact sheets (value from memory)"
MALLAMA = "Mallama 2017, arXiv:1703.02670: 436.3 K as mean over the orbit"
RIBAS_SUN = "Ribas et al. 2005, doi:10.1086/427977"
RIBAS_PROXIMA = "Ribas et al. 2017, doi:10.1051/0004-6361/201730582"
AGOL = "Agol et al. 2021, doi:10.3847/PSJ/abd022 (value from memory)"
SEQUENCE = "Pecaut & Mamajek 2013, doi:10.1088/0067-0049/208/1/9, table of 2022-04-16"
BALANCE = (  # body, F_sun [W m-2], Bond albedo, T_eq [K] of the table; spheres only
    ("Venus", 2618.4628, 0.750, 231.89),
    ("Earth", 1370.0, 0.306, 254.49),
    ("Mars", 590.1023, 0.250, 210.18),
    ("Titan", 15.0117, 0.220, 84.80),
)
BLACK_BODIES = (  # body, solar irradiance [W m-2], Bond albedo, black-body temperature [K]
    ("Mercury", 9082.7, 0.068, 439.6),
    ("the Moon", 1361.0, 0.11, 270.4),
)
DWARFS = (  # spectral type, log L, mass [Msun]
    ("G2V", 0.01, 1.0),
    ("K0V", -0.34, 0.88),
    ("M0V", -1.16, 0.57),
    ("M3V", -1.79, 0.37),
    ("M4V", -2.14, 0.23),
    ("M8V", -3.28, 0.085),
)


def balance(flux: float, albedo: float) -> float:
    return float(irradiation.equilibrium_temperature(flux / SOLAR_CONSTANT, albedo))


def mercury_over_its_orbit() -> float:
    """Mean over time of the temperature at each distance; equal steps of mean anomaly by Kepler's equation."""
    eccentricity, anomaly = 0.20563593, np.linspace(0, 2 * np.pi, 20001)
    distance = 0.38709927 * (1 - eccentricity * np.cos(anomaly))
    weight = 1 - eccentricity * np.cos(anomaly)  # time spent per step of eccentric anomaly
    temperature = irradiation.equilibrium_temperature(1 / distance**2, 0.088)
    return float(np.average(temperature[:-1], weights=weight[:-1]))


def luminosity(radius: float, temperature: float) -> float:
    return float(irradiation.luminosity(radius * SOLAR_RADIUS, temperature)) / SOLAR_LUMINOSITY


def mass_of_a_dwarf(log_luminosity: float) -> float:
    return float(irradiation.mass_from_luminosity(10**log_luminosity * SOLAR_LUMINOSITY)) / SOLAR_MASS


def solar_xuv(age: float) -> float:
    """In units of the flux taken for the Earth."""
    return float(activity.xuv_flux(1.0, activity.power_law_xuv_share(age, activity.saturation_age(SOLAR_MASS))))


def saturation_age(mass: float) -> float:
    return float(activity.saturation_age(mass * SOLAR_MASS))


@cache
def proxima() -> dict[str, float]:
    """Proxima b through the pipeline, star and orbit of the paper the flux is from."""
    star = {
        "stellar_luminosity_lsun": 0.00151,
        "stellar_mass_msun": 0.120,
        "stellar_radius_rsun": 0.146,
        "stellar_teff_k": 2980.0,
        "stellar_age_gyr": 4.8,
    }
    batch = make_batch([{**star, "planet_mass_mearth": 1.27, "semi_major_axis_au": 0.0485}])
    planets = stages.assess(batch, Settings()).planets
    return {name: float(planets[name][0]) for name in ("xuv_flux_earth", "insolation_earth")}


CHECKS = [
    *(
        Check(
            f"{body} keeps the temperature of its heat balance",
            HEAT_BALANCE,
            temperature,
            partial(balance, flux, albedo),
            "K",
            relative=1e-3,
        )
        for body, flux, albedo, temperature in BALANCE
    ),
    *(
        Check(
            f"Sunlight keeps {body} at its black-body temperature",
            FACT_SHEET,
            temperature,
            partial(balance, flux, albedo),
            "K",
            relative=1e-3,
        )
        for body, flux, albedo, temperature in BLACK_BODIES
    ),
    Check(
        "Mercury's temperature averages 436 K over its orbit",
        MALLAMA,
        436.3,
        mercury_over_its_orbit,
        "K",
        relative=1e-3,
    ),
    Check(
        "Earth's skin temperature is 214 K",
        "Catling & Kasting 2017, doi:10.1017/9781139020558 (value from memory)",
        214.0,
        lambda: irradiation.skin_temperature(254.5),
        "K",
        absolute=0.5,
    ),
    Check(
        "The nominal Sun has the nominal luminosity",
        "IAU 2015 Resolution B3, doi:10.3847/0004-6256/152/2/41: 5772 K, 6.957e8 m, 3.828e26 W",
        1.0,
        partial(luminosity, 1.0, 5772.0),
        "Lsun",
        relative=2e-4,
    ),
    Check(
        "TRAPPIST-1's radius and temperature give its luminosity",
        f"{AGOL}: 0.1192 Rsun, 2566 K",
        5.53e-4,
        partial(luminosity, 0.1192, 2566.0),
        "Lsun",
        relative=0.01,
    ),
    Check(
        "Proxima's radius and temperature give its luminosity",
        f"{RIBAS_PROXIMA} (value from memory): 0.146 Rsun, 2980 K",
        0.00151,
        partial(luminosity, 0.146, 2980.0),
        "Lsun",
        relative=0.05,
    ),
    *(
        Check(
            f"Luminosity of a mean {kind} star gives its mass",
            SEQUENCE,
            mass,
            partial(mass_of_a_dwarf, log_luminosity),
            "Msun",
            relative=0.17,
        )
        for kind, log_luminosity, mass in DWARFS
    ),
    Check(
        "The Sun's high-energy flux at 1 au is the measured one",
        f"{RIBAS_SUN} (value from memory): 4.64 erg cm-2 s-1",
        4.64,
        lambda: 1e3 * EARTH_XUV_FLUX * solar_xuv(4.57),
        "erg cm-2 s-1",
        relative=0.02,
    ),
    Check(
        "The unit of high-energy flux is the Sun's of a mean cycle",
        "Richards et al. 1994 (EUVAC), doi:10.1029/94JA00518, 5-105 nm: 2.47 at F10.7 = 70, 7.35 at 230",
        (2.47, 7.35),
        lambda: 1e3 * EARTH_XUV_FLUX,
        "erg cm-2 s-1",
    ),
    Check(
        "The Sun shone 2.5 times brighter in XUV 2.5 Gyr ago",
        f"{RIBAS_SUN}, abstract: about 2.5 times",
        2.5,
        lambda: solar_xuv(4.57 - 2.5) / solar_xuv(4.57),
        "times",
        relative=0.1,
    ),
    Check(
        "The Sun shone 6 times brighter in XUV 3.5 Gyr ago",
        f"{RIBAS_SUN}, abstract: about 6 times",
        6.0,
        lambda: solar_xuv(4.57 - 3.5) / solar_xuv(4.57),
        "times",
        relative=0.1,
    ),
    Check(
        "Early M dwarfs (0.3-0.6 Msun) stay saturated for 240 Myr",
        "Loyd et al. 2021, arXiv:2011.10158: 240 ± 30 Myr",
        0.24,
        partial(saturation_age, 0.45),
        "Gyr",
        absolute=0.03,
    ),
    Check(
        "A star of 0.09 Msun stays saturated for 3 Gyr",
        "Birky, Barnes & Fleming 2021, RNAAS 5, 122: 3.1 Gyr",
        3.1,
        partial(saturation_age, 0.09),
        "Gyr",
        relative=0.05,
    ),
    Check(
        "Saturated late M dwarfs give a thousandth of their light as XUV",
        "Fleming et al. 2020, doi:10.3847/1538-4357/ab77ad: log10 = −3.03 (+0.23 −0.12) for TRAPPIST-1",
        10**-3.03,
        lambda: activity.power_law_xuv_share(0.1, saturation_age(0.089)),
        factor=2.0,
    ),
    Check(
        "The pipeline gives Proxima b its high-energy flux",
        f"{RIBAS_PROXIMA}, abstract: 0.293 W m-2",
        293.0,
        lambda: 1e3 * EARTH_XUV_FLUX * proxima()["xuv_flux_earth"],
        "erg cm-2 s-1",
        factor=2.5,
    ),
    Check(
        "The pipeline gives Proxima b its insolation",
        f"{RIBAS_PROXIMA}, abstract: 877 ± 44 W m-2",
        877.0,
        lambda: SOLAR_CONSTANT * proxima()["insolation_earth"],
        "W m-2",
        absolute=44.0,
    ),
    Check(
        "An astronomical unit from the Sun gets the solar constant",
        "IAU 2015 Resolution B3, doi:10.3847/0004-6256/152/2/41: 1361 W m-2",
        1361.0,
        lambda: SOLAR_LUMINOSITY / (4 * np.pi * ASTRONOMICAL_UNIT**2),
        "W m-2",
        absolute=0.5,
    ),
    Check(
        "The five bands of the solar-type stars add up to the Sun's own flux",
        f"{RIBAS_SUN}: 4.64 erg cm-2 s-1 at 4.56 Gyr",
        4.64,
        lambda: 1e3 * SOLAR_CONSTANT * activity.ribas_xuv_share(4.56, load_bands().bands),
        "erg cm-2 s-1",
        relative=0.01,
    ),
    Check(
        "The Sun's X-rays bring the extreme ultraviolet that is seen with them",
        "X-rays 10^27.35 erg/s, Judge et al. 2003, doi:10.1086/376405 (value from memory); 4.58 mW m-2 of 5-105 nm at "
        "F10.7 = 140, EUVAC, Richards et al. 1994, doi:10.1029/94JA00518",
        4.58e-3,
        lambda: (with_extreme_ultraviolet(10**20.35) - 10**20.35) / (4 * np.pi * ASTRONOMICAL_UNIT**2),
        "W m-2",
        factor=2.0,
    ),
    Check(
        "A measured Sun of a third of its age is as bright as the young suns of the survey",
        f"{RIBAS_SUN}: their 29.7 τ^-1.23 erg cm-2 s-1, from 4.64 now",
        29.7 * 1.523**-1.23,
        lambda: activity.traced_back_luminosity(4.64, 4.57, 4.57 / 3, 1e9),
        "erg cm-2 s-1",
        relative=0.05,
    ),
]
