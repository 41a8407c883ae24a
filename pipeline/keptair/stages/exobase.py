"""Exobase: which gas rules the upper air, how hot it is there and how high."""

from __future__ import annotations

import numpy as np

from keptair import draws
from keptair.batch import Array, Batch
from keptair.physics import bulk, frost
from keptair.settings import Settings
from keptair.stages.irradiate import with_range
from keptair.stages.upper_air import foundation, upper_air

HYDROGEN = "h2"
TEMPERATE, ICY = "co2", "n2_icy"


def run(batch: Batch, settings: Settings) -> Batch:
    """Choose the row's two backgrounds, then find the exobase of every one that is asked for."""
    frozen = frozen_gases(batch, settings)
    chosen = choose(batch, settings, frozen)
    batch = batch.adding({**{f"frozen.{gas}": mask for gas, mask in frozen.items()}, **chosen})
    now: dict[str, Array] = {}
    for key, background in settings.backgrounds.items():
        if not batch.columns[f"worked.{key}"].any():
            continue
        air = upper_air(foundation(batch, background, settings), background, settings, batch.draws["xuv_now"])
        now |= {
            f"conductive.{key}": air.conductive,
            f"exobase_temperature.{key}": air.temperature,
            f"exobase_radius.{key}": np.where(air.bound, air.radius, np.nan),
        }
    batch = batch.with_draws(**now)
    return batch.adding(published(batch, settings))


def frozen_gases(batch: Batch, settings: Settings) -> dict[str, Array]:
    """Gases whose saturation pressure at the median equilibrium temperature is under the frost setting."""
    temperature = np.where(batch.columns["is.assessed"], batch.columns["equilibrium_temperature_k"], np.inf)
    masks = {}
    for key, gas in settings.gases.items():
        masks[key] = np.zeros(len(batch), dtype=bool)
        if gas.frost is not None:
            ice = gas.frost
            pressure = frost.saturation_pressure(
                temperature,
                ice.triple_point_k,
                ice.triple_point_pa,
                ice.critical_temperature_k,
                ice.sublimation_kj_mol * 1e3,
                ice.vaporisation_kj_mol * 1e3,
            )
            masks[key] = pressure < settings.frost_pressure_pa
    return masks


def choose(batch: Batch, settings: Settings, frozen: dict[str, Array]) -> dict[str, Array]:
    """The secondary background (the row's own, else CO2, else nitrogen where CO2 freezes) and the published one.

    h2 for envelopes and where the catalogue says so; else the row's own; else co2; else, where CO2 is frozen, n2_icy

    Notes
    -----
    Of the columns that stay inside, worked.<key> holds the rows the background is worked out for, listed.<key> those it
    has lines in gases for.
    """
    assessed, own = batch.columns["is.assessed"], batch.columns["catalogue.background"]
    cold = frozen[settings.backgrounds[TEMPERATE].main_gas]
    secondary = np.where(cold, ICY, TEMPERATE).astype(object)
    own_secondary = (own != "") & (own != HYDROGEN)
    secondary[own_secondary] = own[own_secondary]
    envelope = batch.columns["envelope_probability"] >= settings.verdict.envelope
    background = np.where(envelope | (own == HYDROGEN), HYDROGEN, secondary).astype(object)
    source = np.where((own != "") & (own == background), "given", "chosen").astype(object)
    for column in (secondary, background, source):
        column[~assessed] = ""
    columns = {"background": background, "secondary_background": secondary, "background_source": source}
    main_gas = {key: frozen[entry.main_gas] for key, entry in settings.backgrounds.items()}
    nowhere = np.zeros(len(batch), dtype=bool)
    for key in settings.backgrounds:
        rows_own = (background == key) | (secondary == key)
        asked = (cold if key == ICY else ~nowhere) if key in settings.use_backgrounds else nowhere
        if settings.gas_rows != "all":
            asked = nowhere
        columns[f"worked.{key}"] = assessed & (asked | rows_own | (key == HYDROGEN))
        lines = {"all": asked | rows_own, "chosen": background == key, "none": nowhere}[settings.gas_rows]
        columns[f"listed.{key}"] = assessed & lines
    columns["is.frozen"] = pick_column(secondary, main_gas)
    columns["flag.frozen_out"] = pick_column(background, main_gas)
    return columns


def pick(batch: Batch, name: str, keys: Array) -> Array:
    """Draws of the background each row names; missing where it names none."""
    chosen = np.full((len(batch), 1), np.nan)
    for key in np.unique(keys.astype(str)):
        values = batch.draws.get(f"{name}.{key}")
        if values is not None:
            chosen = np.where((keys == key)[:, None], values, chosen)
    return chosen


def pick_column(keys: Array, columns: dict[str, Array]) -> Array:
    """The same for a column per background of truth values."""
    chosen = np.zeros(len(keys), dtype=bool)
    for key, values in columns.items():
        chosen |= (keys == key) & values
    return chosen


def published(batch: Batch, settings: Settings) -> dict[str, Array]:
    """Exobase of the row's background, and the flags that speak of it."""
    assessed, background = batch.columns["is.assessed"], batch.columns["background"]
    shape = batch.draws["gravity"].shape
    temperature = np.broadcast_to(pick(batch, "exobase_temperature", background), shape)
    conductive = np.broadcast_to(pick(batch, "conductive", background), shape)
    radius = np.broadcast_to(pick(batch, "exobase_radius", background), shape)
    altitude = (radius - batch.draws["input.planet_radius_rearth"]) / 1e3
    speed = bulk.escape_speed(batch.draws["input.planet_mass_mearth"], radius)
    hydrogen = background == HYDROGEN
    sized, share = batch.columns["is.sized"], draws.median(batch.draws["hydrogen_share"])
    return {
        **with_range("exobase_temperature_k", temperature, assessed),
        **with_range("exobase_altitude_km", altitude, assessed),
        "exobase_escape_speed_km_s": draws.median(speed) / 1e3,
        "flag.beyond_conduction": assessed & (draws.share(conductive > settings.conduction_limit_k) >= 0.5),
        "flag.unbound": assessed & (draws.share(~np.isnan(radius)) < 0.5),
        "flag.no_hydrogen_asked": hydrogen & sized & (share < settings.backgrounds[HYDROGEN].inventory_floor),
        "flag.hydrogen_share_extrapolated": hydrogen & sized & (share > 0.20),
    }
