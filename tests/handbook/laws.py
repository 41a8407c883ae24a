"""Constants, probability and radiation against astropy and scipy."""

from __future__ import annotations

import importlib
from functools import partial
from typing import Any

import numpy as np

from handbook.check import Check
from keptair import draws
from keptair.physics import constants, irradiation, kinetics, orbit, spectroscopy, time

CODATA = "CODATA 2018 as in astropy.constants.codata2018"
NOMINAL = "IAU 2015 Resolution B3 as in astropy.constants.iau2015"
SCIPY = "scipy.stats"
CONSTANTS = (  # keptair's name, astropy's name, where astropy keeps it, the sentence's words
    ("BOLTZMANN", "k_B", "codata2018", "Boltzmann's constant"),
    ("AVOGADRO", "N_A", "codata2018", "Avogadro's constant"),
    ("PLANCK", "h", "codata2018", "Planck's constant"),
    ("LIGHT_SPEED", "c", "codata2018", "the speed of light"),
    ("STEFAN_BOLTZMANN", "sigma_sb", "codata2018", "the Stefan-Boltzmann constant"),
    ("GRAVITATION", "G", "codata2018", "the constant of gravitation"),
    ("ATOMIC_MASS", "u", "codata2018", "the atomic mass unit"),
    ("GAS_CONSTANT", "R", "codata2018", "the gas constant"),
    ("ASTRONOMICAL_UNIT", "au", "iau2015", "the astronomical unit"),
    ("SOLAR_LUMINOSITY", "L_sun", "iau2015", "the Sun's luminosity"),
    ("SOLAR_RADIUS", "R_sun", "iau2015", "the Sun's radius"),
    ("EARTH_RADIUS", "R_earth", "iau2015", "the Earth's radius"),
    ("JUPITER_RADIUS", "R_jup", "iau2015", "Jupiter's radius"),
)
MASSES = (
    ("SOLAR_MASS", "GM_sun", "the Sun"),
    ("EARTH_MASS", "GM_earth", "the Earth"),
    ("JUPITER_MASS", "GM_jup", "Jupiter"),
)
U = np.linspace(0.001, 0.999, 997)


def astropy_constant(name: str, where: str) -> float:
    library = importlib.import_module(f"astropy.constants.{where}")
    return float(getattr(library, name).si.value)


def own_constant(name: str) -> float:
    return float(getattr(constants, name))


def nominal_gm(name: str) -> float:
    return own_constant(name) * constants.GRAVITATION


def largest_difference(distribution: str, parameters: dict[str, float], own: np.ndarray[Any, Any]) -> float:
    """Largest distance of our quantiles from those of a distribution of scipy.stats."""
    from scipy import stats

    theirs = getattr(stats, distribution).ppf(U, **parameters)
    return float(np.max(np.abs(own / theirs - 1)))


def measured(value: float, error: float, bounds: tuple[float, float]) -> np.ndarray[Any, Any]:
    """Our quantiles of one measured value, the central draw left out."""
    one = np.array([value])
    error_array = np.array([error])
    return draws.measured(one, error_array, error_array, bounds, np.concatenate([[0.5], U])[None, :])[0, 1:]


def two_upper_errors() -> float:
    """Of 10 (+3 −1), the 97.725 % quantile: two upper errors above the value."""
    u = np.array([[0.5, 0.9772498680518208]])
    return float(draws.measured(np.array([10.0]), np.array([3.0]), np.array([1.0]), (-np.inf, np.inf), u)[0, 1])


def black_body_ratio() -> float:
    from astropy import units
    from astropy.modeling.models import BlackBody

    wavelength = 7.5 * units.micron
    return float(BlackBody(1000 * units.K)(wavelength) / BlackBody(5772 * units.K)(wavelength))


def temperature_with_units() -> float:
    """A planet of albedo 0.3 at 0.05 au of a 3300 K, 0.3 R☉ star, the energy balance in astropy's units."""
    from astropy import constants as library
    from astropy import units

    light = 4 * np.pi * (0.3 * library.R_sun) ** 2 * library.sigma_sb * (3300 * units.K) ** 4
    absorbed = light / (4 * np.pi * (0.05 * units.au) ** 2) * 0.7 / 4
    return float(((absorbed / library.sigma_sb) ** 0.25).to_value(units.K))


def own_temperature() -> float:
    light = irradiation.luminosity(0.3 * constants.SOLAR_RADIUS, 3300.0)
    flux = irradiation.insolation(light, 0.05 * constants.ASTRONOMICAL_UNIT)
    return float(irradiation.equilibrium_temperature(flux, 0.3))


def time_mean_of_inverse_square(eccentricity: float) -> float:
    """Mean of (a/r)² over time, Kepler's equation integrated in eccentric anomaly."""
    from scipy.integrate import quad

    total, _ = quad(lambda anomaly: 1 / (1 - eccentricity * np.cos(anomaly)), 0, 2 * np.pi)
    return float(total / (2 * np.pi))


def fading_light() -> float:
    """Integral of t^−1.23 over 0.22–4.57 Gyr."""
    from scipy.integrate import quad

    return float(quad(lambda age: age**-1.23, 0.22, 4.57)[0])


def own_fading_light(epochs: int = 16) -> float:
    ages = [time.epoch_age(0.22, 4.57, epoch, epochs) for epoch in range(epochs)]
    weights = [time.epoch_weight(0.22, 4.57, age, epoch, epochs) for epoch, age in enumerate(ages)]
    return float(sum(weight * age**-1.23 for weight, age in zip(weights, ages, strict=True)))


def maxwell(statistic: str) -> float:
    """Speeds of a gas of most probable speed 1, from scipy's Maxwell distribution."""
    from scipy import stats

    gas = stats.maxwell(scale=np.sqrt(0.5))
    if statistic == "mode":
        speeds = np.linspace(0.5, 1.5, 100001)
        return float(speeds[np.argmax(gas.pdf(speeds))])
    return float(gas.mean() if statistic == "mean" else np.sqrt(gas.moment(2)))


def leaving_flux(jeans: float) -> float:
    """Flux of particles faster than escape, integrated over Maxwell's distribution in units of n v_p."""
    from scipy.integrate import quad
    from scipy.stats import maxwell as distribution

    density = distribution(scale=np.sqrt(0.5)).pdf
    # a quarter of n v through any plane comes from each speed of an isotropic gas
    return float(quad(lambda speed: speed * density(speed) / 4, np.sqrt(jeans), np.inf)[0])


UNIT_MASS = 2 * constants.BOLTZMANN  # [kg] most probable speed 1 m s⁻¹ at 1 K
CHECKS = [
    *(
        Check(
            f"{sentence[0].upper()}{sentence[1:]} is the recommended one",
            CODATA if where == "codata2018" else NOMINAL,
            partial(astropy_constant, name, where),
            partial(own_constant, own),
            relative=1e-9,
        )
        for own, name, where, sentence in CONSTANTS
    ),
    *(
        Check(
            f"Mass of {body} times G is the nominal GM",
            NOMINAL,
            partial(astropy_constant, name, "iau2015"),
            partial(nominal_gm, own),
            "m3 s-2",
            relative=1e-9,
        )
        for own, name, body in MASSES
    ),
    Check(
        "Draws of a measured value are normal",
        f"{SCIPY}.norm",
        0.0,
        lambda: largest_difference("norm", {"loc": 5.0, "scale": 0.7}, measured(5.0, 0.7, (-np.inf, np.inf))),
        absolute=1e-9,
    ),
    Check(
        "Draws near a bound are truncated-normal",
        f"{SCIPY}.truncnorm",
        0.0,
        lambda: largest_difference(
            "truncnorm", {"a": -1.0, "b": 3.0, "loc": 1.0, "scale": 1.0}, measured(1.0, 1.0, (0.0, 4.0))
        ),
        absolute=1e-9,
    ),
    Check(
        "An upper error reaches as far as it says",
        "Two-sigma quantile of the normal distribution, 97.725 % (scipy.stats.norm.cdf(2)): 10 + 2·3",
        16.0,
        two_upper_errors,
        relative=1e-9,
    ),
    Check(
        "Log-uniform draws are log-uniform",
        f"{SCIPY}.loguniform",
        0.0,
        lambda: largest_difference("loguniform", {"a": 1e-5, "b": 1e-3}, draws.log_between(1e-5, 1e-3, U)),
        absolute=1e-9,
    ),
    Check(
        "Brightness of two black bodies stands in Planck's ratio",
        "astropy.modeling.models.BlackBody, 1000 K over 5772 K at 7.5 µm",
        black_body_ratio,
        lambda: spectroscopy.planck_ratio(1000.0, 5772.0, 7.5e-6),
        relative=1e-6,
    ),
    Check(
        "A planet of a red dwarf has the temperature of the balance",
        "Energy balance in astropy.units with astropy.constants (solar constant 1361 rounds 1361.17)",
        temperature_with_units,
        own_temperature,
        "K",
        relative=1e-4,
    ),
    Check(
        "Flux averaged over an eccentric orbit is the time mean",
        "scipy.integrate.quad over Kepler's orbit, e = 0.6",
        lambda: time_mean_of_inverse_square(0.6),
        lambda: orbit.orbit_mean_flux(1.0, 0.6),
        relative=1e-9,
    ),
    Check(
        "Sixteen epochs are enough for light that fades as the Sun's",
        "scipy.integrate.quad of t^-1.23 over 0.22-4.57 Gyr",
        fading_light,
        own_fading_light,
        relative=0.005,
    ),
    Check(
        "Most probable speed is the mode of Maxwell's distribution",
        f"{SCIPY}.maxwell",
        lambda: maxwell("mode"),
        lambda: kinetics.most_probable_speed(1.0, UNIT_MASS),
        relative=1e-4,
    ),
    Check(
        "Mean speed is the mean of Maxwell's distribution",
        f"{SCIPY}.maxwell",
        lambda: maxwell("mean"),
        lambda: kinetics.mean_speed(1.0, UNIT_MASS),
        relative=1e-9,
    ),
    Check(
        "Rms speed is the second moment of Maxwell's distribution",
        f"{SCIPY}.maxwell",
        lambda: maxwell("rms"),
        lambda: kinetics.rms_speed(1.0, UNIT_MASS),
        relative=1e-9,
    ),
    *(
        Check(
            f"Jeans flux at λ = {jeans:g} is that of the particles faster than escape",
            "scipy.integrate.quad over scipy.stats.maxwell",
            partial(leaving_flux, jeans),
            partial(kinetics.jeans_flux, 1.0, 1.0, 1.0, jeans),
            relative=1e-6,
        )
        for jeans in (2.5, 7.0, 30.0)
    ),
]
