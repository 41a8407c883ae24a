"""The Earth's upper air in two standard models, run in the test: NRLMSIS 2.1 and the US Standard Atmosphere 1976."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from keptair.physics.constants import BOLTZMANN

# WGS 84 GM and the mean radius, written out here so that the expected values owe nothing to keptair
EARTH_GM = 3.986004418e14  # [m3 s-2]
EARTH_RADIUS = 6.3710084e6  # [m]
QUIET, MEAN, ACTIVE = 70.0, 140.0, 230.0  # F10.7 [sfu]; at 140 the Sun's XUV is that taken for the Earth
AP = 9.0  # geomagnetic activity of an average day
UNIT = 1.66053906660e-27  # [kg]


@dataclass(frozen=True)
class Thermosphere:
    """A profile: altitude [m], temperature [K], number density of all particles and of H [m-3], mean mass [kg]."""

    altitude: NDArray[Any]
    temperature: NDArray[Any]
    density: NDArray[Any]
    hydrogen: NDArray[Any]
    mean_mass: NDArray[Any]

    def scale_height(self) -> NDArray[Any]:
        gravity = EARTH_GM / (EARTH_RADIUS + self.altitude) ** 2
        return np.asarray(BOLTZMANN * self.temperature / (self.mean_mass * gravity))

    def exobase(self, cross_section: float) -> float:
        """Altitude at which n σ H is 1."""
        paths = np.log(self.density * cross_section * self.scale_height())
        return float(np.interp(0.0, -paths, self.altitude))

    def at(self, altitude: float) -> Thermosphere:
        """The profile at one altitude; densities between the levels go exponentially."""
        here = np.array([altitude])
        temperature = np.interp(here, self.altitude, self.temperature)
        mean_mass = np.interp(here, self.altitude, self.mean_mass)
        density, hydrogen = (
            np.exp(np.interp(here, self.altitude, np.log(values))) for values in (self.density, self.hydrogen)
        )
        return Thermosphere(here, temperature, density, hydrogen, mean_mass)


@cache
def msis(f107: float) -> Thermosphere:
    """Global mean of NRLMSIS 2.1 over 300–700 km.

    Mean of the equinoxes and solstices at noon UT, every 30° of longitude (so every two hours of local time) and every
    10° of latitude weighted by its cosine. F10.7, its 81-day mean and ap are given, so nothing is fetched.
    """
    import pymsis

    dates = np.array([f"2001-{day}T12:00" for day in ("03-20", "06-21", "09-22", "12-21")], dtype="datetime64[m]")
    longitudes, latitudes = np.arange(0.0, 360.0, 30.0), np.arange(-85.0, 86.0, 10.0)
    altitudes = np.arange(300.0, 701.0, 5.0)
    flux, activity = np.full(len(dates), f107), np.full((len(dates), 7), AP)
    levels = pymsis.calculate(dates, longitudes, latitudes, altitudes, flux, flux, activity)
    weight = np.cos(np.radians(latitudes))
    mean = np.average(levels.mean(axis=(0, 1)), axis=0, weights=weight)
    variable = pymsis.Variable
    particles = mean[:, [variable.N2, variable.O2, variable.O, variable.HE, variable.H, variable.AR, variable.N]]
    total = particles.sum(axis=1)
    return Thermosphere(
        altitudes * 1e3,
        mean[:, variable.TEMPERATURE],
        total,
        mean[:, variable.H],
        mean[:, variable.MASS_DENSITY] / total,
    )


@cache
def standard() -> Thermosphere:
    """The US Standard Atmosphere 1976 over 300–700 km."""
    import ussa1976

    model = ussa1976.compute(z=np.arange(300e3, 700.5e3, 1e3), variables=["t", "n", "n_tot", "rho"])
    total = model["n_tot"].values
    return Thermosphere(
        model["z"].values,
        model["t"].values,
        total,
        model["n"].sel(s="H").values,
        model["rho"].values / total,
    )


@cache
def standard_exobase() -> float:
    """Altitude [m] at which the Standard Atmosphere's own mean free path equals its own scale height."""
    import ussa1976

    model = ussa1976.compute(z=np.arange(300e3, 700.5e3, 1e3), variables=["mfp", "hp"])
    return float(np.interp(0.0, np.log(model["mfp"].values / model["hp"].values), model["z"].values))


def jeans_parameter(altitude: float, temperature: float, mass_in_u: float) -> float:
    """λ by its definition."""
    return float(EARTH_GM * mass_in_u * UNIT / (BOLTZMANN * temperature * (EARTH_RADIUS + altitude)))


def leaving_speed(jeans: float, temperature: float, mass_in_u: float) -> float:
    """Mean outward speed of particles faster than escape, integrated over Maxwell's distribution [m s-1]."""
    from scipy.integrate import quad
    from scipy.stats import maxwell

    spread = np.sqrt(BOLTZMANN * temperature / (mass_in_u * UNIT))
    density = maxwell().pdf
    return float(spread * quad(lambda speed: speed * density(speed) / 4, np.sqrt(2 * jeans), np.inf)[0])
