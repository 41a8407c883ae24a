"""Numbers with their sources, as TOML, and the one loader that reads them."""

from __future__ import annotations

import tomllib
from functools import cache
from importlib import resources
from typing import Any

from keptair.reference.models import Background, DiffusionPair, Gas


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
