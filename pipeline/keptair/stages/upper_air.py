"""The upper air of one background at one level of high-energy light; now and in every epoch alike."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from keptair.batch import Array, Batch
from keptair.physics import exobase
from keptair.reference.models import Background
from keptair.settings import Settings


@dataclass(frozen=True)
class Foundation:
    """What does not change with the star's activity."""

    planet_mass: Array
    planet_radius: Array
    equilibrium: Array
    base: Array
    damping: Array
    base_power: Array
    conduction: Array
    upper_heights: Array
    smallest_inverse: Array


@dataclass(frozen=True)
class UpperAir:
    """Conductive and actual exobase temperature, distance from the centre, and whether the air has a top."""

    conductive: Array
    temperature: Array
    radius: Array
    bound: Array


def foundation(batch: Batch, background: Background, settings: Settings) -> Foundation:
    """The parts of the exobase that stay the same at every epoch."""
    made = batch.draws
    low, high = settings.damping_exponent
    damping = low + (high - low) * made["u.damping_exponent"]
    anchor = background.anchor
    upper_mass = exobase.particle_mass(background.upper_mass_u)
    pressure = exobase.exobase_pressure(made["gravity"], upper_mass, background.cross_section_m2)
    return Foundation(
        planet_mass=made["input.planet_mass_mearth"],
        planet_radius=made["input.planet_radius_rearth"],
        equilibrium=made["equilibrium"],
        base=made["base"],
        damping=damping,
        base_power=made["base"] ** damping,
        conduction=exobase.conduction_constant(
            made["gravity"],
            damping,
            anchor.exobase_temperature_k,
            anchor.base_temperature_k,
            anchor.xuv_flux_earth,
            anchor.gravity_m_s2,
        ),
        upper_heights=np.log(settings.homopause_pressure_pa / pressure),
        smallest_inverse=exobase.smallest_inverse_radius(
            made["input.planet_radius_rearth"], made["roche_ratio"], settings.exobase_radius_cap
        ),
    )


def upper_air(ground: Foundation, background: Background, settings: Settings, xuv: Array) -> UpperAir:
    """Temperature and height of the exobase under a given high-energy flux."""
    conductive = exobase.conductive_temperature(ground.base_power, ground.conduction, xuv, ground.damping)
    temperature = exobase.exobase_temperature(conductive, settings.conduction_limit_k)
    inverse = exobase.inverse_exobase_radius(
        ground.planet_mass,
        ground.planet_radius,
        ground.equilibrium,
        ground.base,
        temperature,
        exobase.particle_mass(background.mean_mass_u),
        exobase.particle_mass(background.upper_mass_u),
        exobase.lower_scale_heights(settings.reference_pressure_pa, settings.homopause_pressure_pa),
        ground.upper_heights,
        settings.exobase_weight,
    )
    bound = inverse >= ground.smallest_inverse
    return UpperAir(conductive, temperature, 1 / np.maximum(inverse, ground.smallest_inverse), bound)
