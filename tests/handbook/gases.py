"""Gases: molar masses, speeds, diffusion through one another, frost."""

from __future__ import annotations

from functools import partial

import numpy as np

from handbook.check import Check
from keptair.physics import diffusion, exobase, frost, kinetics
from keptair.physics.constants import ATOMIC_MASS, BOLTZMANN
from keptair.reference import diffusion_pair, load_gases

WEIGHTS = "periodictable (CIAAW standard atomic weights)"
COMMON = "common practice, 3 k T/m by hand"
TEXTBOOK = "Rms speeds at 0 °C of physics textbooks (value from memory)"
CRC = "CRC Handbook of Chemistry and Physics, Diffusion in gases, 101.325 kPa"
BIRD = "Bird, Stewart & Lightfoot, Transport Phenomena, table 17.1-1, 1 atm"
ICES = "Fray & Schmitt 2009, doi:10.1016/j.pss.2009.09.011"
ATMOSPHERE = 101325.0  # [Pa]
SPEEDS = (("h2", 1838.0), ("n2", 493.0), ("o2", 461.0), ("co2", 393.0))  # [m s-1] at 0 °C
DIFFUSION = (  # gas, partner, T [K], D [cm2 s-1]
    ("h2", "air", 273.15, 0.668),
    ("h2", "n2", 200.0, 0.408),
    ("h2", "n2", 273.15, 0.686),
    ("h2", "co2", 273.15, 0.552),
    ("he", "air", 273.15, 0.617),
    ("he", "n2", 273.15, 0.619),
    ("he", "co2", 200.0, 0.300),
    ("he", "co2", 273.15, 0.513),
    ("ch4", "n2", 293.15, 0.208),
    ("ch4", "h2", 293.15, 0.708),
    ("co", "air", 293.15, 0.208),
    ("ar", "air", 273.15, 0.167),
    ("h2o", "air", 293.15, 0.242),
    ("co2", "air", 293.15, 0.160),
)
ROUGH_FITS = {"h2o": 0.045, "co2": 0.01}  # what diffusion.toml says of its own fit
HARD_SPHERES = (  # gas, partner, T [K], D [cm2 s-1]
    ("n2", "o2", 273.2, 0.181, BIRD),
    ("co2", "n2", 273.2, 0.144, BIRD),
    ("co2", "co", 273.2, 0.139, BIRD),
    ("h2", "n2", 273.2, 0.674, BIRD),
    ("h2", "ch4", 298.2, 0.726, BIRD),
    ("nh3", "n2", 298.0, 0.233, BIRD),
    ("h2o", "n2", 308.0, 0.259, BIRD),
    ("h2", "co2", 273.15, 0.552, CRC),
    ("he", "n2", 273.15, 0.619, CRC),
    ("he", "co2", 273.15, 0.513, CRC),
    ("ar", "n2", 273.15, 0.168, CRC),
    ("ne", "n2", 293.15, 0.317, f"{CRC} (value from memory)"),
)
FROST_PRESSURE = 10.0  # [Pa]
# ln(p/bar) as a polynomial in 1/T; CO2 as read, the others value from memory: each gives its triple point to 4 %
SUBLIMATION = {
    "co2": (14.76, -2571.0, -7.781e4, 4.325e6, -1.207e8, 1.350e9),
    "n2": (8.514, -458.4, -1.987e4, 4.800e5, -4.524e6),
    "ch4": (10.51, -1110.0, -4341.0, 1.035e5, -7.910e5),
    "co": (10.43, -721.3, -1.074e4, 2.341e5, -2.392e6, 9.478e6),
    "nh3": (15.96, -3537.0, -3.310e4, 1.742e6, -2.995e7),
    "ar": (10.69, -893.2, -3567.0, 6.574e4, -4.280e5),
}
# Gases whose triple point lies near one atmosphere; farther from it one latent heat is not enough, and far above the
# pressure that decides on frost.
BOILING = (("n2", 77.355), ("ch4", 111.67), ("ar", 87.302), ("co", 81.64))


def molar_mass(gas: str) -> float:
    import periodictable

    return float(periodictable.formula(load_gases()[gas].title).mass)


def rms_speed(mass_in_u: float, temperature: float) -> float:
    return float(kinetics.rms_speed(temperature, mass_in_u * ATOMIC_MASS))


def from_diffusivity(diffusivity: float, temperature: float) -> float:
    """b = n D of a gas at one atmosphere [m-1 s-1]; D in cm2 s-1."""
    return diffusivity * 1e-4 * ATMOSPHERE / (BOLTZMANN * temperature)


def fitted(gas: str, partner: str, temperature: float) -> float:
    pair = diffusion_pair(gas, (partner,))
    if pair is None:
        raise LookupError(f"{gas} in {partner} is not in diffusion.toml")
    return float(diffusion.diffusion_parameter(pair.coefficient_cm * 100, pair.exponent, temperature))


def hard_spheres(gas: str, partner: str, temperature: float) -> float:
    one, other = load_gases()[gas], load_gases()[partner]
    diameters = one.diameter_pm * 1e-12, other.diameter_pm * 1e-12
    masses = exobase.particle_mass(one.mass_u), exobase.particle_mass(other.mass_u)
    return float(diffusion.hard_sphere_parameter(*diameters, *masses, temperature))


def saturation(gas: str, temperature: float) -> float:
    ice = load_gases()[gas].frost
    if ice is None:
        raise LookupError(f"{gas} never freezes in gases.toml")
    return float(
        frost.saturation_pressure(
            temperature,
            ice.triple_point_k,
            ice.triple_point_pa,
            ice.critical_temperature_k,
            ice.sublimation_kj_mol * 1e3,
            ice.vaporisation_kj_mol * 1e3,
        )
    )


def frost_point(gas: str) -> float:
    """Temperature at which a gas has the frost pressure."""
    from scipy.optimize import brentq

    return float(brentq(lambda temperature: np.log(saturation(gas, temperature) / FROST_PRESSURE), 15.0, 300.0))


def published_frost_point(gas: str) -> float:
    from scipy.optimize import brentq

    series = np.polynomial.Polynomial(SUBLIMATION[gas])
    return float(brentq(lambda temperature: series(1 / temperature) - np.log(FROST_PRESSURE / 1e5), 26.0, 190.0))


CHECKS = [
    *(
        Check(
            f"A mole of {gas.title} has its standard weight",
            WEIGHTS,
            partial(molar_mass, key),
            partial(float, gas.mass_u),
            "g mol-1",
            relative=2e-4,
        )
        for key, gas in load_gases().items()
    ),
    Check(
        "Nitrogen molecules at 300 K move at 517 m/s",
        COMMON,
        517.0,
        partial(rms_speed, 28.014, 300.0),
        "m s-1",
        absolute=0.6,
    ),
    Check(
        "Hydrogen molecules at 1000 K move at 3532 m/s if M = 2",
        COMMON,
        3532.0,
        partial(rms_speed, 2.0, 1000.0),
        "m s-1",
        absolute=0.6,
    ),
    Check(
        "Hydrogen molecules at 1000 K move at 3518 m/s",
        COMMON,
        3518.0,
        partial(rms_speed, 2.016, 1000.0),
        "m s-1",
        absolute=0.6,
    ),
    *(
        Check(
            f"{load_gases()[gas].title} molecules at 0 °C move at {speed:g} m/s",
            TEXTBOOK,
            speed,
            partial(rms_speed, load_gases()[gas].mass_u, 273.15),
            "m s-1",
            relative=3e-3,
        )
        for gas, speed in SPEEDS
    ),
    Check(
        "Hydrogen atoms at 1000 K move at 5 km/s",
        "Catling & Zahnle 2009, Scientific American 300(5), 36",
        5000.0,
        partial(rms_speed, 1.008, 1000.0),
        "m s-1",
        relative=0.03,
    ),
    *(
        Check(
            f"{gas} diffuses through {partner} at {temperature:g} K as measured",
            f"{CRC}: {diffusivity:g} cm2 s-1",
            from_diffusivity(diffusivity, temperature),
            partial(fitted, gas, partner, temperature),
            "m-1 s-1",
            relative=ROUGH_FITS.get(gas, 0.01),
        )
        for gas, partner, temperature, diffusivity in DIFFUSION
    ),
    *(
        Check(
            f"Hard spheres of {gas} and {partner} diffuse as the gases, {temperature:g} K",
            f"{source}: {diffusivity:g} cm2 s-1",
            from_diffusivity(diffusivity, temperature),
            partial(hard_spheres, gas, partner, temperature),
            "m-1 s-1",
            relative=0.25,
        )
        for gas, partner, temperature, diffusivity, source in HARD_SPHERES
    ),
    *(
        Check(
            f"{load_gases()[gas].title} freezes out at its frost point of 10 Pa",
            ICES,
            partial(published_frost_point, gas),
            partial(frost_point, gas),
            "K",
            relative=0.03,  # one latent heat cannot know of CO's change of crystal at 61.6 K
        )
        for gas in SUBLIMATION
    ),
    Check(
        "CO2 freezes out at 124.4 K at 10 Pa, by the equation of state",
        "Span & Wagner 1996, doi:10.1063/1.555991, sublimation line: 124.4 K",
        124.4,
        partial(frost_point, "co2"),
        "K",
        relative=0.01,
    ),
    Check(
        "SO2 freezes out at its frost point of 10 Pa",
        "Wagman 1979, p = 1.52e8 bar exp(−4510 K/T) (value from memory)",
        4510 / np.log(1.52e13 / FROST_PRESSURE),
        partial(frost_point, "so2"),
        "K",
        relative=0.02,
    ),
    Check(
        "Dry ice has one atmosphere at 194.69 K",
        "ITS-90 secondary reference point of CO2",
        ATMOSPHERE,
        partial(saturation, "co2", 194.686),
        "Pa",
        relative=0.1,
    ),
    Check(
        "Water ice at 200 K has a sixth of a pascal",
        "Murphy & Koop 2005, doi:10.1256/qj.04.94: 0.1632 Pa (value from memory)",
        0.1632,
        partial(saturation, "h2o", 200.0),
        "Pa",
        relative=0.05,
    ),
    Check(
        "Pluto's nitrogen ice of 36.93 K carries its air",
        "New Horizons: 11.5 µbar over ice of 36.93 ± 0.10 K (Lewis et al. 2021, arXiv:1912.02333)",
        1.15,
        partial(saturation, "n2", 36.93),
        "Pa",
        factor=1.5,
    ),
    Check(
        "Mars' polar caps of 148 K carry its air",
        "Mars (1992), p. 959: p = exp(23.3494 − 3182.48/T) hPa",
        float(100 * np.exp(23.3494 - 3182.48 / 148.0)),
        partial(saturation, "co2", 148.0),
        "Pa",
        relative=0.15,
    ),
    *(
        Check(
            f"Liquid {gas.upper()} boils at one atmosphere",
            "NIST Chemistry WebBook, doi:10.18434/T4D303 (value from memory)",
            ATMOSPHERE,
            partial(saturation, gas, temperature),
            "Pa",
            relative=0.05,
        )
        for gas, temperature in BOILING
    ),
]
