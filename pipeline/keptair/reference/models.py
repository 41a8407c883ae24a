"""What a gas, a background and a diffusion pair must say for themselves."""

from __future__ import annotations

from typing import Annotated, Self

from pydantic import BaseModel, ConfigDict, Field, model_validator

Positive = Annotated[float, Field(gt=0)]
Share = Annotated[float, Field(gt=0, le=1)]
Source = Annotated[str, Field(min_length=8, description="published source with DOI, or 'value from memory'")]
Key = Annotated[str, Field(pattern=r"^[a-z][a-z0-9_]*$", max_length=32)]


class Entry(BaseModel):
    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False)


class Frost(Entry):
    """Where a gas freezes: its triple point and the latent heats there."""

    triple_point_k: Annotated[float, Field(gt=0, lt=2000)]
    triple_point_pa: Annotated[float, Field(gt=0, lt=1e8)]
    critical_temperature_k: Annotated[float, Field(gt=0, lt=5000)]
    sublimation_kj_mol: Annotated[float, Field(gt=0, lt=500)]
    vaporisation_kj_mol: Annotated[float, Field(gt=0, lt=500)]
    source: Source

    @model_validator(mode="after")
    def in_order(self) -> Self:
        if self.critical_temperature_k <= self.triple_point_k:
            raise ValueError("critical_temperature_k must be above triple_point_k")
        return self


class Gas(Entry):
    """One kind of particle."""

    title: Annotated[str, Field(min_length=1, max_length=32)]
    mass_u: Annotated[float, Field(gt=0.5, lt=1000)]
    mass_source: Source
    diameter_pm: Annotated[float, Field(gt=50, lt=2000)]
    diameter_source: Source
    frost: Frost | None = None


class Anchor(Entry):
    """The body a background's conductive scaling is normalised on."""

    body: Annotated[str, Field(min_length=1)]
    exobase_temperature_k: Positive
    xuv_flux_earth: Positive
    gravity_m_s2: Positive
    base_temperature_k: Positive

    @model_validator(mode="after")
    def heated(self) -> Self:
        if self.exobase_temperature_k <= self.base_temperature_k:
            raise ValueError("exobase_temperature_k must be above base_temperature_k: heat is conducted downwards")
        return self


class Background(Entry):
    """The main gas of an upper air, and how that air is heated and lost."""

    title: Annotated[str, Field(min_length=1)]
    main_gas: Key
    mean_mass_u: Annotated[float, Field(gt=0.5, lt=1000)]
    upper_mass_u: Annotated[float, Field(gt=0.5, lt=1000)]
    key_escaper: Key
    key_share: Share = 1.0
    lost_mass_share: Share = 1.0
    cross_section_m2: Annotated[float, Field(gt=1e-21, lt=1e-17)]
    inventory: tuple[Share, Share]
    inventory_from_radius: bool = False
    inventory_floor: Share = 0.001
    efficiency: tuple[Share, Share]
    absorption_radius_cap: Annotated[float, Field(ge=1, le=30)] = 3.0
    diffusion_partners: Annotated[tuple[Key, ...], Field(min_length=1)]
    anchor: Anchor
    source: Source

    @model_validator(mode="after")
    def ranges_in_order(self) -> Self:
        for name in ("inventory", "efficiency"):
            low, high = getattr(self, name)
            if low > high:
                raise ValueError(f"{name} must be [low, high]")
        return self


class DiffusionPair(Entry):
    """Binary diffusion parameter b = A T^s of one gas through another."""

    gas: Key
    partner: Key
    coefficient_cm: Positive
    exponent: Annotated[float, Field(ge=0, le=2)]
    source: Source


Line = tuple[float, float]


class ChenKipping(Entry):
    """A broken power law with scatter."""

    source: Source
    branches: tuple[tuple[Positive, float, Positive], ...]
    mass_breaks_mearth: tuple[Positive, ...]
    radius_breaks_rearth: tuple[Positive, ...]
    degenerate_masses_mearth: tuple[Positive, Positive]


class Otegi(Entry):
    """A rocky and a volatile power law."""

    source: Source
    rocky: tuple[Positive, Positive]
    volatile: tuple[Positive, Positive]
    radius_break_rearth: Positive


class PowerLaw(Entry):
    """Saturation, then a decline: the defaults of the settings xuv.*."""

    source: Source
    saturation_log10: float
    saturation_gyr: Positive
    saturation_mass_exponent: float
    saturation_mass_cap_msun: Positive
    decline_exponent: Positive
    scatter_dex: Positive
    scatter_source: Source


class Bands(Entry):
    """Fluxes of bands, each with its own decline."""

    source: Source
    bands: tuple[Line, ...]
    constant_below_gyr: Positive


class XrayDecline(Entry):
    """X-rays of a dwarf by age."""

    source: Source
    saturated_share: Positive
    xray_at_one_gyr_w: Positive
    decline: float


class ExtremeUltraviolet(Entry):
    """The extreme ultraviolet that goes with X-rays."""

    source: Source
    intercept: float
    slope: Positive
