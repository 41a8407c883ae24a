"""Units as people spell them → factors to the canonical units. One table of spellings first, then astropy."""

from __future__ import annotations

import math
import re
import warnings
from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np

from keptair.catalogue.cells import Floats
from keptair.catalogue.showing import quoted
from keptair.tables import schema

# Spellings without blanks, underscores and cases → astropy's name, by the dimension that is asked for:
# astropy reads some of them as something else (M_e: an electron mass, MJ: a megajoule) or as a unit of its own.
SPELLINGS = {
    "length": {
        "earthRad": "rearth re earthrad earthradius earthradii rgeo georad r⊕ rterra",
        "jupiterRad": "rjup rj jupiterrad jupiterradius jupiterradii rjupiter rjov jovrad r♃",
        "solRad": "rsun rs rsol solrad sunrad solarradius solarradii r☉ r⊙",
        "AU": "au astronomicalunit astronomicalunits ua",
        "pc": "parsec parsecs",
        "lyr": "ly lightyear lightyears",
    },
    "mass": {
        "earthMass": "mearth me earthmass earthmasses mgeo geomass m⊕ mterra",
        "jupiterMass": "mjup mj jupitermass jupitermasses mjupiter mjov jovmass m♃",
        "solMass": "msun ms msol solmass sunmass solarmass solarmasses m☉ m⊙",
    },
    "power": {"solLum": "lsun ls lsol sollum sunlum solarluminosity solarluminosities l☉ l⊙"},
    "flux": {"earthFlux": "searth fearth earthflux earthinsolation insolationearth solarconstant earth s⊕ f⊕"},
    "time": {
        "d": "days day",
        "yr": "year years",
        "Myr": "myrs ma megayear megayears",
        "Gyr": "gyrs ga gigayear gigayears",
        "h": "hr hrs hour hours",
        "min": "minute minutes mins",
        "s": "sec secs second seconds",
    },
    "temperature": {"K": "kelvin kelvins degk", "deg_C": "degc celsius °c c"},
    "angle": {"deg": "degree degrees °", "hourangle": "h hr hour hours"},
    "magnitude": {"mag": "mags magnitude magnitudes"},
    "number": {"%": "percent"},
}
BODIES = ("length", "mass", "power", "flux")  # their spellings mean the same in every column
NO_UNIT = ("", "-", "--", "---", "none", "unitless", "dimensionless", "1", "null", "nan")
NAMES = {
    "length": "a length",
    "mass": "a mass",
    "power": "a luminosity",
    "flux": "a flux",
    "time": "a time",
    "temperature": "a temperature",
    "angle": "an angle",
    "magnitude": "a magnitude",
    "number": "a plain number",
}
LOGARITHM = re.compile(r"^(?:dex|log|log10|lg)\s*\((?P<of>.*)\)$|^\[(?P<within>.+)\]$", re.IGNORECASE)
LONGEST = 100  # characters
SOLAR_CONSTANT = "1361 W m-2"  # IAU 2015 Resolution B3, nominal total solar irradiance


class UnitError(ValueError):
    """The unit cannot be turned into the canonical one; the message says why."""


@dataclass(frozen=True)
class Conversion:
    """From the file's unit to the canonical one. Logarithmic: the file holds log10 of the value in `factor`'s unit."""

    factor: float = 1.0
    offset: float = 0.0
    logarithmic: bool = False

    def values(self, written: Floats) -> Floats:
        with np.errstate(over="ignore"):
            if self.logarithmic:
                return np.power(10.0, written) * self.factor
            return written * self.factor + self.offset

    def error(self, written: Floats, values: Floats, side: int) -> Floats:
        """The size of an error on the upper (+1) or lower (-1) side of the converted values."""
        size = np.abs(written)
        with np.errstate(over="ignore", invalid="ignore"):
            if self.logarithmic:
                return np.abs(values * (np.power(10.0, side * size) - 1.0))
            return size * self.factor


def conversion(unit: str, column: str) -> Conversion:
    """From a unit as written to the canonical unit of a column; UnitError where that cannot be."""
    written = unit.strip()
    if len(written) > LONGEST:
        raise UnitError("too long for a unit")
    logarithm = LOGARITHM.match(written)
    if logarithm:
        inner = conversion(logarithm["of"] or logarithm["within"] or "", column)
        if inner.offset or inner.logarithmic:
            raise UnitError("a logarithm of that cannot be read")
        return Conversion(inner.factor, logarithmic=True)
    if written.lower() in NO_UNIT or written == schema_unit(column):
        return Conversion()
    if written.lower() == "dex":
        raise UnitError("a logarithm, but of what? Write for example dex(yr)")
    return _conversion(written, column)


def error_conversion(unit: str, column: str, of_value: Conversion) -> Conversion:
    """The same for a column of errors: without a unit of its own it has its value's, `dex` alone is a logarithm's."""
    written = unit.strip().lower()
    if written in NO_UNIT:
        return of_value
    if written in ("dex", "[-]"):
        return Conversion(logarithmic=True)
    found = conversion(unit, column)
    return Conversion(found.factor, logarithmic=found.logarithmic)


def schema_unit(column: str) -> str:
    return next(entry.unit for entry in schema.inputs() if entry.name == column)


def dimension_of(column: str) -> str:
    """What kind of quantity a canonical column holds."""
    if column == "insolation_earth":
        return "flux"
    return {
        "earthRad": "length",
        "solRad": "length",
        "AU": "length",
        "pc": "length",
        "earthMass": "mass",
        "solMass": "mass",
        "solLum": "power",
        "W": "power",
        "d": "time",
        "Gyr": "time",
        "K": "temperature",
        "deg": "angle",
        "mag": "magnitude",
        "": "number",
    }[schema_unit(column)]


@cache
def _conversion(written: str, column: str) -> Conversion:
    from astropy import units

    wanted = dimension_of(column)
    target = _earth_flux() if wanted == "flux" else units.Unit(schema_unit(column))
    try:
        unit = _parsed(written, wanted)
        if unit == units.deg_C and wanted == "temperature":
            return Conversion(1.0, 273.15)
        if unit.is_equivalent(target):
            factor = float(f"{unit.to(target):.15g}")  # 15, not 14.999999999999998
            if not 0 < factor < math.inf:
                raise ArithmeticError
            return Conversion(factor)
        raise UnitError(f"{_dimension_name(unit)}, but {NAMES[wanted]} is needed")
    except (ArithmeticError, units.UnitScaleError):
        raise UnitError("no such unit can be reckoned with: its scale is no number") from None


def _parsed(written: str, wanted: str) -> Any:
    plain = re.sub(r"[\s_]", "", written).lower()
    spelled = (_own_spelling(plain, kind) for kind in (wanted, *BODIES))
    own = next((name for name in spelled if name), written)
    unit = _earth_flux() if own == "earthFlux" else _understood(own)
    if unit is None:
        raise UnitError("no such unit is known; write it as astropy does, for example earthRad, jupiterMass, dex(yr)")
    return unit


@cache
def _own_spelling(plain: str, wanted: str) -> str | None:
    return next((name for name, spellings in SPELLINGS[wanted].items() if plain in spellings.split()), None)


@cache
def _understood(written: str) -> Any:
    from astropy import units

    for style in (None, "cds", "vounit"):
        try:
            with warnings.catch_warnings():
                warnings.simplefilter("ignore")  # that a spelling is out of fashion
                found = units.Unit(written, format=style, parse_strict="raise")
        except (ValueError, TypeError):
            continue
        if isinstance(found, units.UnitBase) and not isinstance(found, units.UnrecognizedUnit):
            return found
    return None


@cache
def _earth_flux() -> Any:
    from astropy import units

    return units.def_unit("earthFlux", units.Unit(SOLAR_CONSTANT))


def _dimension_name(unit: Any) -> str:
    if str(unit) == "mag":
        return NAMES["magnitude"]
    kinds = {str(kind) for kind in getattr(unit, "physical_type", ())}
    names = {
        "power": "power",
        "radiant flux": "power",
        "energy flux": "flux",
        "irradiance": "flux",
        "dimensionless": "number",
    }
    for kind in sorted(kinds):
        name = names.get(kind, kind)
        if name in NAMES:
            return NAMES[name]
    return f"of dimension {'/'.join(sorted(kinds))}" if kinds - {"unknown"} else f"{quoted(str(unit))}, a unit apart"
