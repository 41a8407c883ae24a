"""The words and number formats of the report and of `targets`: what names mean, how numbers are written."""

from __future__ import annotations

import json
import math
import unicodedata
from datetime import datetime

VERDICTS = {
    "envelope": "lighter than rock of any core: it holds hydrogen, steam or much water",
    "secondary": "air of its own making outlasts thermal escape; an upper bound",
    "undecided": "the draws disagree: kept in some, lost in others",
    "bare": "air of its own making is lost, or lies frozen on the ground",
    "unassessed": "too little is known to say anything",
}
VERDICT_PHRASES = {
    "envelope": ("has an envelope", "have an envelope"),
    "secondary": ("keeps air of its own", "keep air of their own"),
    "undecided": ("is undecided", "are undecided"),
    "bare": ("is bare", "are bare"),
    "unassessed": ("could not be assessed", "could not be assessed"),
}
REASONS = {
    "density": "mass and radius put it above the rock line",
    "radius_only": "no measured mass; larger than any rock is thought to be",
    "mass_only": "no measured radius; the one filled from its mass is too large for rock",
    "kept": "thermal loss over its age took less than one inventory",
    "lost_by_evaporation": "lost mostly particle by particle, from a quiet exobase",
    "lost_by_outflow": "lost mostly in a wind of its own gas",
    "frozen": "the background’s main gas freezes out at its temperature",
    "uncertain": "the chance of keeping air lies between the thresholds",
    "missing_input": "neither mass nor radius is usable, or no insolation can be worked out",
}
BRIEF_REASONS = {
    "density": "bulk density",
    "radius_only": "radius alone",
    "mass_only": "mass alone",
    "kept": "air kept",
    "lost_by_evaporation": "lost by evaporation",
    "lost_by_outflow": "lost by outflow",
    "frozen": "frozen out",
    "uncertain": "uncertain",
    "missing_input": "missing input",
}
SOURCES = {
    "measured": "measured",
    "measured_no_error": "measured, no error given",
    "limit": "a limit, drawn",
    "minimum": "M\u00a0sin\u00a0i, drawn",
    "given": "given in the column map",
    "computed": "computed from other inputs",
    "relation": "from a relation",
    "prior": "drawn from a prior",
    "assumed": "assumed",
    "": "not known",
}
BRIEF_SOURCES = {
    "measured": "measured",
    "measured_no_error": "measured without error",
    "limit": "a limit",
    "minimum": "M\u00a0sin\u00a0i",
    "given": "given",
    "computed": "computed",
    "relation": "by relation",
    "prior": "by prior",
    "assumed": "assumed",
    "": "not known",
}
INPUTS = {
    "planet_radius_rearth": "radius",
    "planet_mass_mearth": "mass",
    "orbital_period_d": "orbital period",
    "semi_major_axis_au": "semi-major axis",
    "eccentricity": "eccentricity",
    "insolation_earth": "insolation",
    "bond_albedo": "albedo",
    "stellar_teff_k": "star’s temperature",
    "stellar_radius_rsun": "star’s radius",
    "stellar_mass_msun": "star’s mass",
    "stellar_luminosity_lsun": "star’s luminosity",
    "stellar_age_gyr": "age",
    "stellar_xray_luminosity_w": "X-ray luminosity",
    "j_mag": "J magnitude",
    "k_mag": "K magnitude",
    "distance_pc": "distance",
    "ra_deg": "right ascension",
    "dec_deg": "declination",
}
CHANGES = {
    "new": "new in the catalogue",
    "gone": "gone from the catalogue",
    "set_aside": "set aside",
    "verdict": "another verdict",
    "value": "air probability moved by 0.05 or more",
}
RULES = {
    "identifier": "no usable identifier",
    "duplicate": "another row of the same planet is newer or fuller",
    "cells": "wrong number of cells",
}

THIN_SPACE = "\u202f"  # does not break
MINUS = "\u2212"
UNSHOWN = "\ufffd"
BIDIRECTIONAL_CONTROLS = frozenset("\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069")


def input_name(name: str) -> str:
    """A canonical input in the trade's words."""
    return INPUTS.get(name, name.replace("_", " "))


def visible(text: str) -> str:
    """Text of a catalogue with everything gone that could steer a terminal or turn a line around."""
    return "".join(UNSHOWN if _steers(character) else character for character in text)


def _steers(character: str) -> bool:
    return unicodedata.category(character) in ("Cc", "Zl", "Zp", "Cs") or character in BIDIRECTIONAL_CONTROLS


def count(number: int) -> str:
    """A whole number with its thousands set apart.

    >>> count(1234567).split(THIN_SPACE)
    ['1', '234', '567']
    """
    return f"{number:,}".replace(",", THIN_SPACE)


def verdict_phrase(verdict: str, number: int) -> str:
    """How many planets have a verdict, as part of a sentence."""
    one, many = VERDICT_PHRASES[verdict]
    return f"{count(number)} {one if number == 1 else many}"


def planets(number: int) -> str:
    return f"{count(number)}\u00a0planet" + ("" if number == 1 else "s")


def share(part: int, whole: int) -> str:
    """Part of a whole in percent; never 0 % or 100 % where that is not exactly so.

    >>> share(1, 3000).replace(THIN_SPACE, " "), share(2999, 3000).replace(THIN_SPACE, " ")
    ('< 1 %', '> 99 %')
    """
    if whole == 0:
        return "–"
    percent = 100 * part / whole
    if 0 < percent < 1:
        return f"<{THIN_SPACE}1{THIN_SPACE}%"
    if 99 < percent < 100:
        return f">{THIN_SPACE}99{THIN_SPACE}%"
    return f"{percent:.0f}{THIN_SPACE}%"


def significant(number: float | None, digits: int = 3) -> str:
    """A number to so many digits, in powers of ten only where zeros would have to be counted.

    >>> significant(1234.5), significant(0.012345), significant(-7.0)
    ('1230', '0.0123', '−7.00')
    >>> significant(10000.0).replace(THIN_SPACE, " ")
    '10 000'
    """
    if number is None or not math.isfinite(number):
        return "–"
    if number == 0:
        return "0"
    exponent = math.floor(math.log10(abs(float(f"{number:.{digits - 1}e}"))))
    if -4 <= exponent < 6:
        rounded = round(number, digits - 1 - exponent)
        text = f"{rounded:{',' if exponent > 3 else ''}.{max(digits - 1 - exponent, 0)}f}".replace(",", THIN_SPACE)
    else:
        mantissa = f"{number / 10.0**exponent:.{digits - 1}f}"
        text = f"{mantissa}\u2009×\u200910{superscript(exponent)}"
    return text.replace("-", MINUS)


def probability(number: float | None) -> str:
    """A probability to two digits; 0 and 1 only where it is exactly so.

    >>> probability(0.9987), probability(1.0), probability(0.0009)
    ('> 0.99', '1', '< 0.01')
    """
    if number is None or not math.isfinite(number):
        return "–"
    if number in (0, 1):
        return f"{number:.0f}"
    if number < 0.01:
        return "<\u00a00.01".replace("\u00a0", " ")
    return "> 0.99" if number > 0.99 else f"{number:.2f}"


def superscript(exponent: int) -> str:
    return str(exponent).translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))


def plain(value: object) -> str:
    """A setting as TOML would have it, near enough to be copied."""
    if value is None:
        return "–"
    return visible(value) if isinstance(value, str) else json.dumps(value, ensure_ascii=False)


def size(octets: int) -> str:
    """The size of a file in decimal units.

    >>> size(2_345_678).replace(THIN_SPACE, " ")
    '2.3 MB'
    """
    amount = float(octets)
    for unit in ("bytes", "kB", "MB"):
        if amount < 1000:
            return f"{amount:.{0 if unit == 'bytes' else 1}f}{THIN_SPACE}{unit}"
        amount /= 1000
    return f"{amount:.1f}{THIN_SPACE}GB"


def started(run: str) -> str:
    """The beginning of a run, from the run's name.

    >>> started("20261201T031500Z-1a2b3c4d").replace("\xa0", " ")
    '2026-12-01 03:15 UTC'
    """
    return f"{datetime.strptime(run.split('-')[0], '%Y%m%dT%H%M%SZ'):%Y-%m-%d\u00a0%H:%M}\u00a0UTC"
