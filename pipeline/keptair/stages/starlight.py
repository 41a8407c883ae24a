"""A star's high-energy light at its planet, at any age; now and in every epoch alike."""

from __future__ import annotations

import numpy as np

from keptair.batch import Array, Batch
from keptair.physics import activity
from keptair.reference import load_bands, load_extreme_ultraviolet, load_xray_decline
from keptair.settings import Settings


def activity_draws(batch: Batch, light: Array, star_mass: Array, settings: Settings) -> dict[str, Array]:
    """What the activity laws need of the star; where its light is not known, that of a dwarf of its mass."""
    law = settings.xuv
    bolometric = np.where(np.isnan(light), activity.dwarf_luminosity(star_mass), light)
    x_ray = batch.draws["input.stellar_xray_luminosity_w"]
    measured = ~np.isnan(x_ray)
    scatter = np.where(measured, law.measured_scatter_dex, law.scatter_dex)
    return {
        "bolometric": bolometric,
        "coronal": activity.coronal_luminosity(bolometric, star_mass, law.coronal_cap, law.coronal_cap_above_msun),
        "saturation_age": activity.saturation_age(
            star_mass, law.saturation_gyr, law.saturation_mass_exponent, law.saturation_mass_cap_msun
        ),
        "xuv_measured": with_extreme_ultraviolet(x_ray),
        "xuv_level": 10 ** (scatter * batch.draws["xuv_deviate"]),
    }


def with_extreme_ultraviolet(x_ray: Array) -> Array:
    """All the high-energy light that goes with an X-ray luminosity."""
    relation = load_extreme_ultraviolet()
    return x_ray + activity.extreme_ultraviolet(x_ray, relation.intercept, relation.slope)


def xuv_at(batch: Batch, settings: Settings, age: Array) -> Array:
    """High-energy flux at `age` [Gyr] in units of the Earth's, shape (planet, draw)."""
    star, law = batch.draws, settings.xuv
    share = law_share(batch, settings, age)
    measured = ~np.isnan(star["xuv_measured"][:, 0])
    if measured.any():
        traced = activity.traced_back_luminosity(
            star["xuv_measured"][measured],
            star["input.stellar_age_gyr"][measured],
            age[measured],
            10**law.saturation_log10 * star["coronal"][measured],
            law.decline_exponent,
        )
        share[measured] = traced / star["bolometric"][measured]
    return activity.xuv_flux(star["mean_flux"], share * star["xuv_level"])


def law_share(batch: Batch, settings: Settings, age: Array) -> Array:
    """L_XUV over L_bol by the chosen law."""
    star, law = batch.draws, settings.xuv
    coronal_share = star["coronal"] / star["bolometric"]
    if law.law == "ribas-2005":
        bands = load_bands()
        return activity.ribas_xuv_share(age, bands.bands, bands.constant_below_gyr) * coronal_share
    if law.law == "sanz-forcada-2011":
        fade = load_xray_decline()
        x_ray = activity.xray_luminosity(
            age, star["coronal"], fade.saturated_share, fade.xray_at_one_gyr_w, fade.decline
        )
        return with_extreme_ultraviolet(x_ray) / star["bolometric"]
    share = activity.power_law_xuv_share(age, star["saturation_age"], law.saturation_log10, law.decline_exponent)
    return share * coronal_share
