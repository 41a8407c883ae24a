"""The same survey as another team might keep it: other names, units, signs and words for what is missing."""

import datetime
import math

from .digits import shown
from .table import KINDS, LIMITS, MASS, RADIUS, Cells

# Nominal values of IAU 2015 Resolution B3: equatorial radii and GM.
FACTORS = {RADIUS: 6378.1 / 71492.0, MASS: 3.986004e14 / 1.2668653e17}
AGE, XRAYS = "stellar_age_gyr", "stellar_xray_luminosity_w"
TWO_SIDED = {RADIUS: "rp", MASS: "mp", "orbital_period_d": "per", "eccentricity": "ecc"}
ONE_ERROR = {
    "semi_major_axis_au": "axis", "insolation_earth": "flux", "bond_albedo": "albedo", "stellar_teff_k": "temp",
    "stellar_radius_rsun": "rs", "stellar_mass_msun": "ms", "stellar_luminosity_lsun": "lum", "j_mag": "jmag",
    "k_mag": "kmag", "distance_pc": "dist",
}  # fmt: skip
MISSING = {RADIUS: "-1", MASS: "-1", "stellar_teff_k": "--", "stellar_radius_rsun": "--", "stellar_mass_msun": "--"}
FLAGS = {"": "0", "upper": "1", "lower": "-1"}
KIND_WORDS = {
    RADIUS: {"measured": "light curve", "relation": "from mass"},
    MASS: {"measured": "weighed", "minimum": "m sin i", "relation": "from radius"},
}
TRANSIT_WORDS = {"yes": "1", "no": "0", "": "?"}


def rescaled(ours: str, text: str, sign: int = 1) -> str:
    """Into Jupiters where it is a radius or mass, with six digits."""
    if not text or (sign == 1 and ours not in FACTORS):
        return text
    return shown(sign * float(text) * FACTORS.get(ours, 1.0), 6)


def two_sided_cells(row: Cells, ours: str, stem: str) -> Cells:
    """Value, upper error, lower error below zero; of a period with no error, a zero."""
    nothing = "0" if ours == "orbital_period_d" else ""
    cells = {
        stem: rescaled(ours, row.get(ours, "")) or MISSING.get(ours, ""),
        f"{stem}_up": rescaled(ours, row.get(f"{ours}_err_plus", "")) or nothing,
        f"{stem}_dn": rescaled(ours, row.get(f"{ours}_err_minus", ""), sign=-1) or nothing,
    }
    if ours == MASS or ours in LIMITS:
        cells[f"{stem}_lim"] = FLAGS[row.get(f"{ours}_bound", "")]
    if ours in KINDS:
        cells[f"{stem}_from"] = KIND_WORDS[ours].get(row.get(KINDS[ours], ""), "")
    return cells


def age_cells(row: Cells) -> Cells:
    """Decimal logarithm of years, errors in dex."""
    cells = {"logage": "-1", "logage_up": "", "logage_dn": "", "logage_lim": FLAGS[row.get(f"{AGE}_bound", "")]}
    if row.get(AGE):
        value = float(row[AGE])
        cells["logage"] = f"{math.log10(value * 1e9):.6f}"
        if f"{AGE}_err_plus" in row:
            cells["logage_up"] = f"{math.log10(1 + float(row[f'{AGE}_err_plus']) / value):.6f}"
            cells["logage_dn"] = f"{math.log10(1 - float(row[f'{AGE}_err_minus']) / value):.6f}"
    return cells


def xray_cells(row: Cells) -> Cells:
    """Upper limits stand in a column of their own."""
    limited = row.get(f"{XRAYS}_bound") == "upper"
    return {
        "lx": "" if limited else row.get(XRAYS, ""),
        "lx_err": row.get(f"{XRAYS}_err_plus", ""),
        "lx_max": row.get(XRAYS, "") if limited else "",
    }


def renamed(row: Cells) -> Cells:
    """One planet; a candidate has its name in a column of its own."""
    named = row["status"] == "confirmed"
    cells = {
        "star": row["host_id"],
        "name": row["planet_id"] if named else "",
        "candidate": "" if named else row["planet_id"],
        "status": row["status"],
        "method": row["method"],
        "field": row["field"],
        "tr": TRANSIT_WORDS[row["transits"]],
    }
    for ours, stem in TWO_SIDED.items():
        cells |= two_sided_cells(row, ours, stem)
    for ours, stem in ONE_ERROR.items():
        cells[stem] = row.get(ours) or MISSING.get(ours, "")
        cells[f"{stem}_err"] = row.get(f"{ours}_err_plus", "")
    day = datetime.date.fromisoformat(row["updated"])
    return cells | age_cells(row) | xray_cells(row) | {
        "ra": row["ra_deg"],
        "dec": row["dec_deg"],
        "air": row["background"],
        "changed": day.strftime("%d.%m.%Y"),
    }  # fmt: skip
