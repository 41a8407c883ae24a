"""Numbers with their sources, as TOML, and the one loader that reads them."""

from __future__ import annotations

import tomllib
from functools import cache
from importlib import resources
from typing import Any

from keptair.reference.models import (
    Background,
    Bands,
    ChenKipping,
    DiffusionPair,
    ExtremeUltraviolet,
    Gas,
    Otegi,
    PowerLaw,
    XrayDecline,
)


@cache
def read_toml(name: str) -> dict[str, Any]:
    """One TOML file of this folder, as it stands."""
    return tomllib.loads((resources.files(__package__) / f"{name}.toml").read_text(encoding="utf-8"))


@cache
def load_gases() -> dict[str, Gas]:
    """The built-in gases, in the order the tables list them."""
    return {key: Gas.model_validate(entry) for key, entry in read_toml("gases").items()}


@cache
def load_backgrounds() -> dict[str, Background]:
    """The built-in backgrounds."""
    return {key: Background.model_validate(entry) for key, entry in read_toml("backgrounds").items()}


@cache
def load_diffusion() -> dict[tuple[str, str], DiffusionPair]:
    """The measured binary diffusion parameters by gas and partner."""
    pairs = [DiffusionPair.model_validate(entry) for entry in read_toml("diffusion")["pairs"]]
    return {(pair.gas, pair.partner): pair for pair in pairs}


def diffusion_pair(gas: str, partners: tuple[str, ...]) -> DiffusionPair | None:
    """The pair of a gas with the first partner the table knows it with; None asks for hard spheres.

    Either way round: H2 through N2 and N2 through H2 have the same b.
    """
    table = load_diffusion()
    pairs = (pair for partner in partners for pair in ((gas, partner), (partner, gas)))
    return next((table[pair] for pair in pairs if pair in table), None)


@cache
def load_main_sequence() -> dict[str, tuple[float, ...]]:
    """Mean dwarf stars, coolest first: a tuple per column."""
    sequence = read_toml("main_sequence")
    return dict(zip(sequence["columns"], zip(*sequence["dwarfs"], strict=True), strict=True))


@cache
def load_chen_kipping() -> ChenKipping:
    """The mass–radius relation chen-kipping-2017."""
    return ChenKipping.model_validate(read_toml("mass_radius")["chen-kipping-2017"])


@cache
def load_otegi() -> Otegi:
    """The mass–radius relation otegi-2020."""
    return Otegi.model_validate(read_toml("mass_radius")["otegi-2020"])


@cache
def load_power_law() -> PowerLaw:
    """The activity law saturated-power-law: defaults of the settings."""
    return PowerLaw.model_validate(read_toml("activity")["saturated-power-law"])


@cache
def load_bands() -> Bands:
    """The activity law ribas-2005."""
    return Bands.model_validate(read_toml("activity")["ribas-2005"])


@cache
def load_xray_decline() -> XrayDecline:
    """The activity law sanz-forcada-2011."""
    return XrayDecline.model_validate(read_toml("activity")["sanz-forcada-2011"])


@cache
def load_extreme_ultraviolet() -> ExtremeUltraviolet:
    """What goes with an X-ray luminosity."""
    return ExtremeUltraviolet.model_validate(read_toml("activity")["extreme-ultraviolet"])
