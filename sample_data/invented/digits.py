"""How many significant digits the survey prints of each number."""

import numpy as np

DIGITS = {
    "planet_radius_rearth": 4, "planet_mass_mearth": 4, "orbital_period_d": 8, "semi_major_axis_au": 5,
    "eccentricity": 2, "insolation_earth": 4, "bond_albedo": 2, "stellar_teff_k": 4, "stellar_radius_rsun": 4,
    "stellar_mass_msun": 4, "stellar_luminosity_lsun": 4, "stellar_age_gyr": 3, "stellar_xray_luminosity_w": 3,
    "j_mag": 5, "k_mag": 5, "distance_pc": 5, "ra_deg": 7, "dec_deg": 7,
}  # fmt: skip


def shown(value: float, digits: int) -> str:
    if value >= 1e9:
        return f"{value:.{digits - 1}e}"
    return np.format_float_positional(value, precision=digits, fractional=False, trim="-")


def as_catalogued(values: dict[str, float]) -> dict[str, float]:
    """Rounded first, so that what is worked out from a catalogued number agrees with it."""
    return {name: float(shown(value, DIGITS[name])) for name, value in values.items()}
