"""The table of gases in long form, from the statistics of every background and gas."""

from __future__ import annotations

import numpy as np

from keptair.batch import Array, Batch
from keptair.reference import diffusion_pair
from keptair.reference.models import Background
from keptair.settings import Settings
from keptair.stages.escape import THROTTLES
from keptair.stages.retain import worked


def gas_rows(batch: Batch, settings: Settings) -> dict[str, Array]:
    """The table of gases in long form: planet by planet, background by background, gas by gas."""
    keys = [key for key, _ in worked(batch, settings)]
    gases = list(settings.gases)
    if not keys:
        keys = list(settings.backgrounds)[:1]
        listed = np.zeros((len(batch), 1), dtype=bool)
    else:
        listed = np.stack([batch.columns[f"listed.{key}"] for key in keys], axis=1)
    rows, places = np.nonzero(listed)
    planets, whiches = np.repeat(rows, len(gases)), np.repeat(places, len(gases))
    kinds = np.tile(np.arange(len(gases)), len(rows))

    def gathered(name: str) -> Array:
        return grid(batch, name, keys, gases)[planets, whiches, kinds]

    names = np.array(gases, dtype=object)
    main = np.array([settings.backgrounds[key].main_gas for key in keys], dtype=object)
    diffusion = np.array(
        [
            [
                "" if gas == settings.backgrounds[key].main_gas else diffusion_source(gas, settings.backgrounds[key])
                for gas in gases
            ]
            for key in keys
        ],
        dtype=object,
    )
    frozen = np.stack([batch.columns[f"frozen.{gas}"] for gas in gases], axis=1)
    is_background = names[kinds] == main[whiches]
    throttles = np.array(THROTTLES, dtype=object)
    return {
        "planet_id": batch.columns["planet_id"][planets],
        "background": np.array(keys, dtype=object)[whiches],
        "gas": names[kinds],
        "is_background": is_background.astype(np.int64),
        "mass_u": np.array([settings.gases[gas].mass_u for gas in gases])[kinds],
        "rms_speed_m_s": gathered("rms_speed"),
        "jeans_parameter": gathered("jeans_parameter"),
        "speed_ratio": gathered("speed_ratio"),
        "mixing_ratio": np.where(is_background, 1.0, settings.trace_mixing_ratio),
        "jeans_flux_m2_s": gathered("jeans_flux"),
        "supply_flux_m2_s": gathered("supply_flux"),
        "loss_rate_kg_s": gathered("loss_rate"),
        "limited_by": throttles[np.nan_to_num(gathered("limited_by")).astype(np.intp)],
        "escape_time_gyr": gathered("escape_time_gyr"),
        "escape_time_p16_gyr": gathered("escape_time_p16_gyr"),
        "escape_time_p84_gyr": gathered("escape_time_p84_gyr"),
        "inventories_lost": gathered("inventories_lost"),
        "retention": gathered("retention"),
        "held_now_share": gathered("held_now_share"),
        "frozen_out": frozen[planets, kinds].astype(np.int64),
        "diffusion_source": diffusion[whiches, kinds],
    }


def grid(batch: Batch, name: str, keys: list[str], gases: list[str]) -> Array:
    """A statistic of every gas under every background, shape (planet, background, gas)."""
    nothing = np.full(len(batch), np.nan)
    under = [[batch.columns.get(f"{name}.{key}.{gas}", nothing) for gas in gases] for key in keys]
    return np.stack([np.stack(columns, axis=1) for columns in under], axis=1)


def diffusion_source(gas: str, background: Background) -> str:
    """Whether the diffusion table has the pair."""
    return "hard_sphere" if diffusion_pair(gas, background.diffusion_partners) is None else "table"
