"""Escape: every background and gas, now and over the planet's life; the tightest throttle rules."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from keptair import draws
from keptair.batch import Array, Batch
from keptair.physics import diffusion, exobase, kinetics, orbit, outflow, time
from keptair.physics.constants import ATOMIC_MASS, EARTH_XUV_FLUX, GIGAYEAR
from keptair.reference import diffusion_pair
from keptair.reference.models import Background, Gas
from keptair.settings import Settings
from keptair.stages.starlight import xuv_at
from keptair.stages.upper_air import Foundation, UpperAir, foundation, upper_air

THROTTLES = ("energy", "supply", "kinetic")  # in the order that breaks ties
ENERGY, SUPPLY, KINETIC = range(3)


@dataclass(frozen=True)
class Loss:
    """How a background leaves at one epoch."""

    carrier: Array  # Jeans flux of 1 u particles but for (1 + λ) e^−λ [m-2 s-1]
    unit_jeans: Array  # λ of 1 u
    key_flux: Array  # Jeans flux of the key escaper [m-2 s-1]
    energy: Array  # energy-limited flux [kg m-2 s-1]
    outflow: Array  # bool
    flux: Array  # loss [kg m-2 s-1]
    outflow_other: Array  # the same two, were excess heat treated the other way
    flux_other: Array


def run(batch: Batch, settings: Settings) -> Batch:
    """Follow each background through the epochs, for the rows that ask for it."""
    made: dict[str, Array] = {}
    for key, background in settings.backgrounds.items():
        rows = np.flatnonzero(batch.columns[f"worked.{key}"])
        if len(rows) == 0:
            continue
        part = batch if len(rows) == len(batch) else batch.take(rows)
        for name, values in Follower(part, key, background, settings).through_time().items():
            made[name] = values if part is batch else scattered(values, rows, len(batch))
    inside = (batch.draws["roche_ratio"] <= 1) & batch.columns["is.assessed"][:, None]
    return batch.adding({"flag.inside_roche": draws.share(inside) >= 0.5}, made)


def scattered(values: Array, rows: Array, size: int) -> Array:
    """Back to one row per planet of the batch; rows that do not ask for the background hold nothing."""
    nothing = np.nan if values.dtype.kind == "f" else 0
    full = np.full((size, *values.shape[1:]), nothing, dtype=values.dtype)
    full[rows] = values
    return full


class Follower:
    """One background on some planets, from the start of the integration to now."""

    def __init__(self, batch: Batch, key: str, background: Background, settings: Settings) -> None:
        self.batch, self.key, self.background, self.settings = batch, key, background, settings
        made = batch.draws
        self.ground = foundation(batch, background, settings)
        self.age = made["input.stellar_age_gyr"]
        self.start = np.minimum(draws.log_between(*settings.start_gyr, made["u.start_gyr"]), self.age / 2)
        self.efficiency = draws.log_between(*background.efficiency, made["u.efficiency"])
        self.correction = draws.log_between(*settings.jeans_factor, made["u.jeans_factor"])
        self.column = (
            inventory(batch, background, settings.largest_hydrogen_share)
            * made["input.planet_mass_mearth"]
            / (4 * np.pi * np.square(made["input.planet_radius_rearth"]))
        )
        self.roche = orbit.roche_factor(made["roche_ratio"], settings.roche_factor_floor)
        self.gases = {name: gas for name, gas in settings.gases.items() if name != background.main_gas}
        self.supply = {name: self.supply_of(name, gas) for name, gas in self.gases.items()}
        # particles of the air below: what a unit mixing ratio of a trace holds, and what an outflow lifts
        self.air_mass = exobase.particle_mass(background.mean_mass_u)

    def supply_of(self, name: str, gas: Gas) -> Array:
        """Diffusion flux per unit mixing ratio, negative for a gas heavier than the air below."""
        return diffusion.supply_flux(
            self.batch.draws["gravity"],
            self.ground.base,
            exobase.particle_mass(self.background.mean_mass_u),
            exobase.particle_mass(gas.mass_u),
            diffusion_parameter(name, self.background, self.settings, self.ground.base),
        )

    def through_time(self) -> dict[str, Array]:
        """Losses added up over the epochs; what the last epoch says is said of now."""
        epochs = self.settings.epochs
        shape = self.age.shape
        lost, lost_flowing, lost_other = np.zeros(shape), np.zeros(shape), np.zeros(shape)
        lost_gas = {name: np.zeros(shape) for name in self.gases}
        held = self.column * self.background.lost_mass_share
        for epoch in range(epochs):
            at = time.epoch_age(self.start, self.age, epoch, epochs)
            weight = GIGAYEAR * time.epoch_weight(self.start, self.age, at, epoch, epochs)
            loss = self.loss_at(xuv_at(self.batch, self.settings, at))
            step = weight * loss.flux / held
            lost += step
            lost_flowing += np.where(loss.outflow, step, 0.0)
            lost_other += weight * loss.flux_other / held
            wind = loss.energy / (self.background.lost_mass_share * self.air_mass)
            share = weight * self.air_mass / self.column
            for name, gas in self.gases.items():
                _, flux = self.trace(name, gas, loss, wind)
                flux *= share
                lost_gas[name] += flux
        made = {
            f"held.{self.key}": held,
            f"loss.{self.key}": loss.flux,
            f"lost.{self.key}": lost,
            f"lost_flowing.{self.key}": lost_flowing,
            f"lost_other.{self.key}": lost_other,
            f"outflow.{self.key}": loss.outflow,
            f"key_flux.{self.key}": loss.key_flux,
            f"limited.{self.key}": np.where(
                loss.outflow | (loss.energy <= loss.key_flux * self.key_mass), ENERGY, KINETIC
            ).astype(np.int8),
            f"particles.{self.key}": self.column / self.air_mass,
        }
        for name, gas in self.gases.items():
            kinetic, flux = self.trace(name, gas, loss, wind)
            supplied = (gas.mass_u < self.background.mean_mass_u) & (self.supply[name] < kinetic)
            made |= {
                f"jeans_flux.{self.key}.{name}": kinetic,
                f"supply_flux.{self.key}.{name}": self.supply[name],
                f"loss.{self.key}.{name}": flux,
                f"lost.{self.key}.{name}": lost_gas[name],
                f"limited.{self.key}.{name}": np.where(
                    loss.outflow, ENERGY, np.where(supplied, SUPPLY, KINETIC)
                ).astype(np.int8),
            }
        return made

    @property
    def key_mass(self) -> float:
        return exobase.particle_mass(self.settings.gases[self.background.key_escaper].mass_u)

    def loss_at(self, xuv: Array) -> Loss:
        """Evaporation or outflow of the background under a given high-energy flux."""
        background, settings, ground = self.background, self.settings, self.ground
        air = upper_air(ground, background, settings, xuv)
        mean_mass = exobase.particle_mass(background.upper_mass_u)
        density = exobase.exobase_density(
            ground.planet_mass, air.radius, air.temperature, mean_mass, background.cross_section_m2
        )
        unit_jeans = kinetics.jeans_parameter(ground.planet_mass, air.radius, air.temperature, ATOMIC_MASS)
        carrier = (
            self.correction
            * density
            * np.square(air.radius / ground.planet_radius)
            * kinetics.most_probable_speed(air.temperature, ATOMIC_MASS)
            / (2 * np.sqrt(np.pi))
        )
        key = settings.gases[background.key_escaper]
        key_flux = kinetics.trace_jeans_flux(carrier, unit_jeans, 0.0, key.mass_u, background.upper_mass_u)
        key_flux = background.key_share * key_flux
        energy = self.energy_limit(air, ground, xuv)
        evaporation = np.minimum(key_flux * self.key_mass, energy)
        flowing, flowing_other = (
            outflow.flows_out(
                air.bound,
                air.conductive,
                key.mass_u * unit_jeans,
                settings.conduction_limit_k,
                settings.outflow_jeans_parameter,
                radiate,
            )
            for radiate in (settings.excess_heat == "radiate", settings.excess_heat != "radiate")
        )
        return Loss(
            carrier,
            unit_jeans,
            key_flux,
            energy,
            flowing,
            np.where(flowing, energy, evaporation),
            flowing_other,
            np.where(flowing_other, energy, evaporation),
        )

    def energy_limit(self, air: UpperAir, ground: Foundation, xuv: Array) -> Array:
        absorption = outflow.absorption_radius(
            ground.planet_radius,
            air.radius,
            self.batch.draws["roche_ratio"],
            air.bound,
            self.background.absorption_radius_cap,
        )
        return outflow.energy_limited_flux(
            ground.planet_mass, ground.planet_radius, absorption, self.roche, xuv * EARTH_XUV_FLUX, self.efficiency
        )

    def trace(self, name: str, gas: Gas, loss: Loss, wind: Array) -> tuple[Array, Array]:
        """Jeans flux and flux of a trace, both per unit mixing ratio at the homopause: the tightest throttle rules.

        φ_J and φ_D in series while the background evaporates; carried along by the energy-limited wind in an outflow

        Notes
        -----
        A background is lost at the energy limit while it flows out, else at the smaller of that and the Jeans flux of
        its key escaper. Traces have no energy limit of their own; those not lighter than the air below have no supply
        limit. Ties go to energy, then supply.
        """
        kinetic = kinetics.trace_jeans_flux(
            loss.carrier, loss.unit_jeans, self.ground.upper_heights, gas.mass_u, self.background.upper_mass_u
        )
        supply = self.supply[name]
        lighter = gas.mass_u < self.background.mean_mass_u
        flux = diffusion.in_series(kinetic, supply) if lighter else kinetic.copy()
        np.copyto(flux, diffusion.carried_flux(wind, supply), where=loss.outflow)
        return kinetic, flux


def inventory(batch: Batch, background: Background, largest: float) -> Array:
    """Share of the planet's mass the background starts with: read off a measured radius, or drawn."""
    drawn = draws.log_between(*background.inventory, batch.draws["u.inventory"])
    if not background.inventory_from_radius:
        return drawn
    asked = np.clip(batch.draws["hydrogen_share"], background.inventory_floor, largest)
    return np.where(batch.columns["is.sized"][:, None], asked, drawn)


def diffusion_parameter(name: str, background: Background, settings: Settings, temperature: Array) -> Array:
    """b of a gas through the air below: from the table, else hard spheres."""
    pair = diffusion_pair(name, background.diffusion_partners)
    if pair is not None:
        return diffusion.diffusion_parameter(pair.coefficient_cm * 100, pair.exponent, temperature)
    partner = next(settings.gases[key] for key in background.diffusion_partners if key in settings.gases)
    gas = settings.gases[name]
    return diffusion.hard_sphere_parameter(
        gas.diameter_pm * 1e-12,
        partner.diameter_pm * 1e-12,
        exobase.particle_mass(gas.mass_u),
        exobase.particle_mass(partner.mass_u),
        temperature,
    )
