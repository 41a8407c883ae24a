"""Escape: what limits the loss of hydrogen and helium, and outflows of hot planets seen by telescopes."""

from __future__ import annotations

from functools import cache, partial
from typing import Any

import numpy as np

from handbook.check import Check, words
from handbook.exobases import msis_flux
from handbook.thermospheres import ACTIVE, MEAN, QUIET
from handmade import make_batch, solar_system
from keptair import stages
from keptair.physics import time
from keptair.physics.constants import YEAR
from keptair.settings import Settings

CATLING = "Catling & Zahnle 2009, Scientific American 300(5), 36"
LIMIT = "Catling & Kasting 2017, doi:10.1017/9781139020558: 2.5e13 cm-2 s-1 per unit of H (value from memory)"
EARTH_HYDROGEN = 13.8e-6  # H atoms in all forms per particle at the homopause: 2.5e13 of it are 93 000 t/yr
H_MASS = 1.008 * 1.66053906660e-27  # [kg]
EARTH_AREA = 5.1007e14  # [m2]
TONNE, CM2 = 1e3, 1e4
EXOPLANETS: dict[str, dict[str, Any]] = {
    "GJ 436 b": {  # NASA Exoplanet Archive, composite of 2024-11-05
        "planet_mass_mearth": 22.1,
        "planet_mass_mearth_err": 2.3,
        "planet_radius_rearth": 4.17,
        "planet_radius_rearth_err": 0.168,
        "semi_major_axis_au": 0.0291,
        "eccentricity": 0.13827,
        "stellar_teff_k": 3586.0,
        "stellar_radius_rsun": 0.455,
        "stellar_mass_msun": 0.47,
        "stellar_age_gyr": 6.0,
        "stellar_age_gyr_err": 5.0,
    },
    "GJ 3470 b": {  # the same; age from Bourrier et al. 2018
        "planet_mass_mearth": 13.9,
        "planet_mass_mearth_err": 1.5,
        "planet_radius_rearth": 4.57,
        "planet_radius_rearth_err": 0.18,
        "semi_major_axis_au": 0.0355,
        "eccentricity": 0.017,
        "stellar_teff_k": 3600.0,
        "stellar_radius_rsun": 0.547,
        "stellar_mass_msun": 0.539,
        "stellar_age_gyr": 2.0,
    },
    "WASP-69 b": {  # Anderson et al. 2014, doi:10.1093/mnras/stu1737: 0.260 MJup, 1.057 RJup
        "planet_mass_mearth": 0.260 * 317.83,
        "planet_mass_mearth_err": 0.017 * 317.83,
        "planet_radius_rearth": 1.057 * 11.209,
        "planet_radius_rearth_err": 0.047 * 11.209,
        "semi_major_axis_au": 0.04525,
        "stellar_teff_k": 4715.0,
        "stellar_radius_rsun": 0.813,
        "stellar_mass_msun": 0.826,
        "stellar_age_gyr": 2.0,
    },
    "HD 209458 b": {  # Torres et al. 2008, doi:10.1086/529429 (value from memory)
        "planet_mass_mearth": 0.685 * 317.83,
        "planet_radius_rearth": 1.359 * 11.209,
        "semi_major_axis_au": 0.04707,
        "stellar_teff_k": 6065.0,
        "stellar_radius_rsun": 1.155,
        "stellar_mass_msun": 1.119,
        "stellar_age_gyr": 4.0,
    },
}
OUTFLOWS = (  # planet, loss [g s-1], source
    ("GJ 436 b", (1e8, 1e9), "Ehrenreich et al. 2015, doi:10.1038/nature14501: 1e8 to 1e9 g/s"),
    ("GJ 3470 b", 1e10, "Bourrier et al. 2018, doi:10.1051/0004-6361/201833675: about 1e10 g/s"),
    ("WASP-69 b", 9e10, "Lampón et al. 2023, doi:10.1051/0004-6361/202245649: (0.9 ± 0.5)e11 g/s"),
    (
        "HD 209458 b",
        7e10,
        "Lampón et al. 2020, doi:10.1051/0004-6361/201937175: 0.42 to 1.00e11 g/s (value from memory)",
    ),
)


@cache
def gas(body: str, background: str, name: str, mixing_ratio: float) -> dict[str, Any]:
    """One line of the table of gases for a body of the Solar System."""
    flags = {"xuv.scatter_dex": 0.2, "trace_mixing_ratio": mixing_ratio, "use_backgrounds": (background,)}
    gases = stages.assess(make_batch(solar_system(body, background=background)), Settings.read(None, flags)).gases
    place = np.flatnonzero((gases["background"] == background) & (gases["gas"] == name))[0]
    return {column: values[place] for column, values in gases.items()}


def supply(body: str, background: str, name: str, mixing_ratio: float) -> float:
    """Flux that diffusion can bring up [m-2 s-1]."""
    return float(gas(body, background, name, mixing_ratio)["supply_flux_m2_s"])


def tonnes_a_year(name: str) -> float:
    """Loss of the Earth's hydrogen were it all H or all H2 up to the exobase."""
    line = gas("earth", "n2", name, EARTH_HYDROGEN if name == "h" else EARTH_HYDROGEN / 2)
    return supply_of_hydrogen(line) * H_MASS * EARTH_AREA * YEAR / TONNE


def supply_of_hydrogen(line: dict[str, Any]) -> float:
    """Atoms of H that the supply carries [m-2 s-1]."""
    return float(line["supply_flux_m2_s"]) * (2 if line["gas"] == "h2" else 1)


def mars_hydrogen() -> float:
    """Atoms of H that leave as or by way of H2 [cm-2 s-1]."""
    line = gas("mars", "co2", "h2", 15e-6)
    area = 4 * np.pi * 3.3895e6**2
    return float(2 * line["loss_rate_kg_s"] / (2 * H_MASS) / area) / CM2


def jeans_share_of_the_earth() -> float:
    """Jeans flux over the solar cycle as a share of all hydrogen that leaves."""
    mean = np.mean([msis_flux(f107, ours=True) for f107 in (QUIET, MEAN, ACTIVE)])
    return float(mean * EARTH_AREA * H_MASS * YEAR / (93_000 * TONNE))


def kinetic_share(body: str, background: str, name: str) -> float:
    line = gas(body, background, name, 1e-6)
    return float(line["jeans_flux_m2_s"] / line["supply_flux_m2_s"])


@cache
def outflow_of(planet: str) -> dict[str, Any]:
    """What the pipeline says of an exoplanet's hydrogen; loss in g/s."""
    assessed = stages.assess(
        make_batch([{"planet_id": planet, **EXOPLANETS[planet]}]), Settings(use_backgrounds=("h2",))
    )
    gases = assessed.gases
    place = np.flatnonzero((gases["background"] == "h2") & (gases["is_background"] == 1))[0]
    return {
        "loss": float(gases["loss_rate_kg_s"][place]) * 1e3,
        "verdict": str(assessed.planets["verdict"][0]),
        "regime": str(assessed.planets["regime"][0]),
    }


def outflow(planet: str, what: str) -> Any:
    return outflow_of(planet)[what]


CHECKS = [
    Check(
        "The Earth's hydrogen leaves as fast as diffusion brings it up, as H2",
        LIMIT,
        2.5e17,
        lambda: supply("earth", "n2", "h2", 1.0),
        "m-2 s-1",
        relative=0.3,
    ),
    Check(
        "The Earth's hydrogen leaves as fast as diffusion brings it up, as H",
        LIMIT,
        2.5e17,
        lambda: supply("earth", "n2", "h", 1.0),
        "m-2 s-1",
        relative=0.3,
    ),
    Check(
        "Were it all H2, a little less hydrogen would leave the Earth than does",
        f"{CATLING}: 93 000 t/yr",
        (0.75 * 93_000, 93_000.0),
        partial(tonnes_a_year, "h2"),
        "t/yr",
    ),
    Check(
        "Were it all H, a little more hydrogen would leave the Earth than does",
        f"{CATLING}: 93 000 t/yr",
        (93_000.0, 1.35 * 93_000),
        partial(tonnes_a_year, "h"),
        "t/yr",
    ),
    Check(
        "Jeans escape is the smaller part of the Earth's hydrogen loss",
        f"{CATLING}: about 30 %; H of NRLMSIS 2.1 at F10.7 = 70, 140 and 230",
        0.30,
        jeans_share_of_the_earth,
        factor=1.5,
    ),
    Check(
        "Hydrogen is limited by its supply on the Earth",
        CATLING,
        words("supply"),
        lambda: gas("earth", "n2", "h", EARTH_HYDROGEN)["limited_by"],
    ),
    Check(
        "Jeans escape takes about a millionth of the helium the Earth loses",
        f"{CATLING}: 50 g/s in all, one atom in a million by Jeans escape",
        1e-6,
        lambda: gas("earth", "n2", "he", 5.24e-6)["loss_rate_kg_s"] / 0.05,
        factor=10.0,
    ),
    Check(
        "Hydrogen is limited by its heat on Venus",
        f"{CATLING}: Jeans escape is under 0.01 % of the hydrogen lost",
        words("kinetic"),
        lambda: gas("venus", "co2", "h", 1e-6)["limited_by"],
    ),
    Check(
        "Jeans escape takes under a thousandth of the hydrogen Venus' air could bring up",
        f"{CATLING}: Jeans escape is under 0.01 % of the hydrogen lost",
        (0.0, 1e-3),
        partial(kinetic_share, "venus", "co2", "h"),
    ),
    Check(
        "Titan's H2 leaves as fast as diffusion brings it up",
        "Cui et al. 2008, doi:10.1029/2007JE003032: 1.37e10 cm-2 s-1 at 0.4 % H2 (value from memory)",
        1.37e10,
        lambda: supply("titan", "n2_icy", "h2", 4e-3) / CM2,
        "cm-2 s-1",
        relative=0.5,
    ),
    Check(
        "Titan's H2 is limited by its supply",
        "Hunten 1973, doi:10.1175/1520-0469(1973)030<1481:TEOLGF>2.0.CO;2",
        words("supply"),
        lambda: gas("titan", "n2_icy", "h2", 1e-3)["limited_by"],
    ),
    Check(
        "Mars' 15 ppm of H2 feed the hydrogen seen leaving",
        "Krasnopolsky & Feldman 2001, doi:10.1126/science.1065569: 15 ppm; Anderson 1974: 1.8e8 H (value from memory)",
        1.8e8,
        mars_hydrogen,
        "cm-2 s-1",
        factor=2.0,
    ),
    *(
        Check(
            f"{planet} loses hydrogen as fast as seen",
            source,
            loss,
            partial(outflow, planet, "loss"),
            "g/s",
            factor=10.0,
        )
        for planet, loss, source in OUTFLOWS
    ),
    *(
        Check(
            f"{planet}'s hydrogen flows out",
            source,
            words("outflow"),
            partial(outflow, planet, "regime"),
        )
        for planet, _, source in OUTFLOWS
    ),
    *(
        Check(
            f"{planet} has an envelope of hydrogen",
            source,
            words("envelope"),
            partial(outflow, planet, "verdict"),
        )
        for planet, _, source in OUTFLOWS
    ),
    Check(
        "Three kilograms a second would take 54 Gyr to carry off the Earth's air",
        "Trenberth & Smith 2005, doi:10.1175/JCLI-3299.1: 5.1480e18 kg; 3 kg/s of Catling & Zahnle 2009",
        5.1480e18 / 3 / (1e9 * 365.25 * 86400),
        lambda: time.escape_time(5.1480e18 / EARTH_AREA, 3 / EARTH_AREA),
        "Gyr",
        relative=1e-9,
    ),
]
