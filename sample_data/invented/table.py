"""The survey's table: what is catalogued of the sky, with error bars, limits and gaps."""

import datetime
import math
from collections.abc import Iterator

from .dice import Dice
from .digits import DIGITS, shown
from .sky import Population, System, Values, draw_systems

Cells = dict[str, str]

# Error bars as a share of the value (of a magnitude: in magnitudes), and shares of cells left empty or limited.
ERROR_SHARE = {
    "planet_radius_rearth": (0.02, 0.08), "planet_mass_mearth": (0.04, 0.25), "orbital_period_d": (1e-6, 2e-5),
    "semi_major_axis_au": (0.005, 0.02), "eccentricity": (0.1, 0.5), "insolation_earth": (0.04, 0.12),
    "bond_albedo": (0.2, 0.5), "stellar_teff_k": (0.008, 0.02), "stellar_radius_rsun": (0.02, 0.05),
    "stellar_mass_msun": (0.03, 0.06), "stellar_luminosity_lsun": (0.03, 0.08), "stellar_age_gyr": (0.1, 0.6),
    "stellar_xray_luminosity_w": (0.1, 0.4), "j_mag": (0.015, 0.04), "k_mag": (0.015, 0.04),
    "distance_pc": (0.001, 0.01),
}  # fmt: skip
GAPS = {
    "semi_major_axis_au": 0.12, "eccentricity": 0.35, "insolation_earth": 0.25, "bond_albedo": 0.93,
    "stellar_teff_k": 0.03, "stellar_radius_rsun": 0.04, "stellar_mass_msun": 0.03, "stellar_luminosity_lsun": 0.2,
    "stellar_age_gyr": 0.45, "stellar_xray_luminosity_w": 0.82, "j_mag": 0.05, "k_mag": 0.05, "distance_pc": 0.06,
}  # fmt: skip
LIMITS = {
    "eccentricity": (0.2, "upper"),
    "stellar_age_gyr": (0.05, "lower"),
    "stellar_xray_luminosity_w": (0.2, "upper"),
}
TRANSITS = {"transit": ["yes"] * 11 + [""], "radial velocity": ["no", "no", ""], "imaging": [""]}
BACKGROUNDS = {"rock": ["co2", "n2"], "volatile": ["h2", "steam"], "gas": ["h2"]}
STANDING, WITHDRAWN = ["confirmed"] * 6 + ["candidate"], ["false positive", "candidate (withdrawn)"]
MAGNITUDES = ("j_mag", "k_mag")
RADIUS, MASS = "planet_radius_rearth", "planet_mass_mearth"
KINDS = {RADIUS: "planet_radius_kind", MASS: "planet_mass_kind"}


def columns() -> list[str]:
    """The canonical header."""
    names = ["planet_id", "host_id"]
    for number in DIGITS:
        names += [number, *([f"{number}_err_plus", f"{number}_err_minus"] if number in ERROR_SHARE else [])]
        names += [f"{number}_bound"] if number in (MASS, *LIMITS) else []
        names += [KINDS[number]] if number in KINDS else []
        names += ["transits"] if number == MASS else []
    return [*names, "background", "updated"]


def measured(dice: Dice, name: str, value: float) -> Cells:
    """The cells of a number: stars have one error for both sides, planets and ages two."""
    cells = {name: shown(value, DIGITS[name])}
    if value and name in ERROR_SHARE:
        plus = dice.between(*ERROR_SHARE[name]) * (1 if name in MAGNITUDES else value)
        lopsided = name.startswith("planet_") or name == "stellar_age_gyr"
        minus = plus * dice.between(0.8, 1.25) if lopsided else plus
        cells |= {f"{name}_err_plus": shown(plus, 2), f"{name}_err_minus": shown(minus, 2)}
    return cells


def limit(name: str, value: float, bound: str) -> Cells:
    return {name: shown(value, DIGITS[name]), f"{name}_bound": bound}


def mass_cells(dice: Dice, population: Population, mass: float) -> Cells:
    """Weighed, M sin i, an upper limit, worked out by the catalogue, or nothing."""
    if population.method == "radial velocity":
        return measured(dice, MASS, mass * math.sqrt(1 - dice.between(0, 0.95) ** 2)) | {KINDS[MASS]: "minimum"}
    if dice.chance(population.weighed):
        return measured(dice, MASS, mass) | {KINDS[MASS]: dice.pick(["measured"] * 9 + [""])}
    if dice.chance(0.2):
        return limit(MASS, mass * dice.between(1.3, 2.5), "upper") | {KINDS[MASS]: "measured"}
    return {MASS: shown(mass, 3), KINDS[MASS]: "relation"} if dice.chance(0.25) else {}


def radius_cells(dice: Dice, population: Population, radius: float) -> Cells:
    """Measured where it transits, else at times worked out by the catalogue."""
    if population.method == "transit":
        return measured(dice, RADIUS, radius) | {KINDS[RADIUS]: dice.pick(["measured"] * 9 + [""])}
    return {RADIUS: shown(radius, 3), KINDS[RADIUS]: "relation"} if dice.chance(0.4) else {}


def without_some_errors(dice: Dice, cells: Cells) -> Cells:
    """Now and then a table gives no errors of radius and mass, or those of one side."""
    sides = dice.pick(["both", "minus", *["none"] * 10])
    lost = {"both": ("plus", "minus"), "minus": ("minus",), "none": ()}[sides]
    return {name: text for name, text in cells.items() if not name.endswith(tuple(f"_err_{side}" for side in lost))}


def known_cells(dice: Dice, values: dict[str, float]) -> Cells:
    """Numbers as catalogued: with gaps and a few limits."""
    cells: Cells = {}
    for name, value in values.items():
        if dice.chance(GAPS.get(name, 0)):
            continue
        limited = value > 0 and dice.chance(LIMITS.get(name, (0, ""))[0])
        cells |= limit(name, value, LIMITS[name][1]) if limited else measured(dice, name, value)
    return cells


def planet_cells(dice: Dice, population: Population, planet: Values) -> Cells:
    """One planet's own cells, and three words the canonical columns have no place for."""
    orbit = {name: value for name, value in planet.items() if name not in (MASS, RADIUS)}
    if population.method == "imaging":
        del orbit["orbital_period_d"]
    if population.star == "unseen":
        del orbit["insolation_earth"]
    body = mass_cells(dice, population, planet[MASS]) | radius_cells(dice, population, planet[RADIUS])
    day = datetime.date(2023, 1, 1) + datetime.timedelta(days=int(dice.between(0, 1100)))
    words = {
        "transits": dice.pick(TRANSITS[population.method]),
        "background": dice.pick(BACKGROUNDS[population.build]) if dice.chance(0.05) else "",
        "updated": day.isoformat(),
        "method": population.method,
        "status": dice.pick(WITHDRAWN if population.withdrawn else STANDING),
    }
    return known_cells(dice, orbit) | without_some_errors(dice, body) | words


def system_rows(dice: Dice, system: System) -> Iterator[Cells]:
    """A row per planet; the star's cells are the same in each."""
    unseen = system.population.star == "unseen"
    star = {name: value for name, value in system.star.items() if not unseen or name in ("ra_deg", "dec_deg")}
    shared = known_cells(dice, star) | {"host_id": system.host, "field": str(int(dice.between(1, 25)))}
    for letter, planet in zip("bcdefg", system.planets, strict=False):
        yield {"planet_id": f"{system.host} {letter}"} | shared | planet_cells(dice, system.population, planet)


def survey_rows(seed: int) -> list[Cells]:
    """The whole survey by name, with what was withdrawn."""
    dice = Dice(seed)
    systems = list(draw_systems(dice))
    return sorted((row for system in systems for row in system_rows(dice, system)), key=lambda row: row["planet_id"])
