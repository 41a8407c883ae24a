"""A star's high-energy light at its planet, at any age; now and in every epoch alike."""

from __future__ import annotations

from keptair.batch import Array, Batch
from keptair.physics import activity
from keptair.settings import Settings


def xuv_at(batch: Batch, settings: Settings, age: Array) -> Array:
    """High-energy flux at `age` [Gyr] in units of the Earth's, shape (planet, draw)."""
    law = settings.xuv
    share = activity.power_law_xuv_share(age, batch.draws["saturation_age"], law.saturation_log10, law.decline_exponent)
    return activity.xuv_flux(batch.draws["mean_flux"], share * batch.draws["xuv_level"])
