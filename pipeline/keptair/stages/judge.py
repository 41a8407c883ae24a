"""Judge: probabilities become a verdict, beside two second opinions."""

from __future__ import annotations

import numpy as np

from keptair import draws
from keptair.batch import Array, Batch
from keptair.physics import bulk, shoreline
from keptair.physics.constants import EARTH_MASS
from keptair.settings import Settings
from keptair.stages.decisive import decisive
from keptair.stages.exobase import HYDROGEN, pick

ROCK_LINE_MASSES = (1 * EARTH_MASS, 8 * EARTH_MASS)  # where the silicate line was made


def run(batch: Batch, settings: Settings) -> Batch:
    """What is kept, how sure that is, and what it rests on."""
    assessed, frozen = batch.columns["is.assessed"], batch.columns["is.frozen"]
    kept = kept_draws(batch, "lost") & ~frozen[:, None]
    kept_other = kept_draws(batch, "lost_other") & ~frozen[:, None]
    radiative = kept if settings.excess_heat == "radiate" else kept_other
    envelope = batch.draws["is_envelope"] & assessed[:, None]
    with_hydrogen = envelope & (batch.draws.get(f"lost.{HYDROGEN}", np.full((len(batch), 1), np.inf)) < 1)
    secondary_probability = draws.share(kept)
    envelope_probability = np.nan_to_num(batch.columns["envelope_probability"])
    verdict = verdicts(envelope_probability, secondary_probability, frozen, assessed, settings)
    is_envelope = verdict == "envelope"
    numbers = {
        "secondary_probability": secondary_probability,
        "secondary_probability_radiative": draws.share(radiative),
        "hydrogen_kept": np.where(is_envelope, draws.share(with_hydrogen), np.nan),
        "air_probability": np.where(
            is_envelope,
            chance_of_either(envelope_probability, secondary_probability),
            draws.share(kept | with_hydrogen),
        ),
    }
    columns: dict[str, Array] = {name: np.where(assessed, values, np.nan) for name, values in numbers.items()}
    columns |= {
        "verdict": verdict,
        "verdict_reason": reasons(batch, verdict, ~kept, frozen),
        "quick_rule_verdict": quick_rule(batch, settings),
        "shoreline_dex": np.where(assessed, draws.median(shoreline_draws(batch)), np.nan),
        **decisive(batch, is_envelope, kept),
        "flag.near_threshold": near_threshold(envelope_probability, secondary_probability, verdict, frozen, settings),
        "flag.silicate_line_extrapolated": beyond_rock_line(batch),
    }
    return batch.adding(columns, {"secondary_kept": kept})


def chance_of_either(envelope: Array, secondary: Array) -> Array:
    """Chance of air on an envelope: of hydrogen, steam or water, or else of secondary air.

    1 − (1 − P_envelope)(1 − P_secondary) for envelopes; else the share of draws with the secondary air kept, or with an
    envelope whose hydrogen is kept

    Notes
    -----
    So a hot rock with a loose mass is not ranked as if its error bar were air.
    """
    chance: Array = 1 - (1 - envelope) * (1 - secondary)
    return chance


def kept_draws(batch: Batch, name: str) -> Array:
    """Draws in which less than one inventory of the secondary background is gone.

    Λ = ∫ dt/τ < 1, from t₀ to the age of the system

    Notes
    -----
    The chance that thermal loss alone removed less than one inventory, not a posterior given that air is seen. The
    trapezoid rule in ln t over `epochs` epochs.
    """
    lost = np.broadcast_to(pick(batch, name, batch.columns["secondary_background"]), batch.draws["gravity"].shape)
    kept: Array = lost < 1
    return kept


def verdicts(envelope: Array, secondary: Array, frozen: Array, assessed: Array, settings: Settings) -> Array:
    """Envelope by density first, then the secondary air's probability against the thresholds.

    envelope: P_envelope ≥ 0.9; else secondary: P ≥ 0.8, bare: P ≤ 0.2 or frozen out, undecided between

    Notes
    -----
    The thresholds are settings. A row without radius and mass, flux or stellar mass is unassessed, which beats all.
    """
    limits = settings.verdict
    verdict = np.full(len(envelope), "undecided", dtype=object)
    verdict[secondary >= limits.keep] = "secondary"
    verdict[(secondary <= limits.lose) | frozen] = "bare"
    verdict[envelope >= limits.envelope] = "envelope"
    verdict[~assessed] = "unassessed"
    return verdict


def reasons(batch: Batch, verdict: Array, gone: Array, frozen: Array) -> Array:
    """What each verdict rests on.

    lost_by_outflow: in more than half of the draws that lost it, more than half of Λ fell in outflow

    Notes
    -----
    envelope: density; radius_only without a measured mass; mass_only with a filled radius. bare: frozen first.
    """
    secondary = batch.columns["secondary_background"]
    shape = batch.draws["gravity"].shape
    lost = np.broadcast_to(pick(batch, "lost", secondary), shape)
    flowing = np.broadcast_to(pick(batch, "lost_flowing", secondary), shape)
    by_outflow = draws.share(gone & (flowing > 0.5 * lost)) > 0.5 * draws.share(gone)
    filled_radius = batch.columns["planet_radius_rearth_source"] == "relation"
    evidence = np.where(filled_radius, "mass_only", np.where(batch.columns["is.weighed"], "density", "radius_only"))
    bare = np.where(frozen, "frozen", np.where(by_outflow, "lost_by_outflow", "lost_by_evaporation"))
    fixed = {"secondary": "kept", "undecided": "uncertain", "unassessed": "missing_input"}
    reason = np.array([fixed.get(word, "") for word in verdict], dtype=object)
    reason[verdict == "envelope"] = evidence[verdict == "envelope"]
    reason[verdict == "bare"] = bare[verdict == "bare"]
    return reason


def quick_rule(batch: Batch, settings: Settings) -> Array:
    """The rule of the trade: kept above a ratio of escape to rms speed."""
    ratio = np.full(len(batch), np.nan)
    for key, background in settings.backgrounds.items():
        column = batch.columns.get(f"speed_ratio.{key}.{background.main_gas}")
        if column is not None:
            ratio = np.where(batch.columns["secondary_background"] == key, column, ratio)
    verdict = np.where(ratio > settings.verdict.quick_rule, "secondary", "bare").astype(object)
    verdict[~batch.columns["is.assessed"]] = ""
    return verdict


def shoreline_draws(batch: Batch) -> Array:
    """Distance from the cosmic shoreline; missing where the star's light is not known."""
    speed = bulk.escape_speed(batch.draws["input.planet_mass_mearth"], batch.draws["input.planet_radius_rearth"])
    return np.asarray(shoreline.shoreline_offset(speed, batch.draws["luminosity"], batch.draws["flux"]))


def near_threshold(envelope: Array, secondary: Array, verdict: Array, frozen: Array, settings: Settings) -> Array:
    """Rows whose verdict a small step of probability could turn."""
    limits = settings.verdict
    near_envelope = np.abs(envelope - limits.envelope) <= limits.near
    near_secondary = np.minimum(np.abs(secondary - limits.keep), np.abs(secondary - limits.lose)) <= limits.near
    near: Array = (near_envelope | (near_secondary & (verdict != "envelope") & ~frozen)) & (verdict != "unassessed")
    return near


def beyond_rock_line(batch: Batch) -> Array:
    """Rows whose envelope evidence uses the rock line outside the masses it was made for."""
    mass = draws.median(batch.draws["input.planet_mass_mearth"])
    used = batch.columns["is.weighed"] | (batch.columns["planet_radius_rearth_source"] == "relation")
    beyond: Array = used & batch.columns["is.assessed"] & ((mass < ROCK_LINE_MASSES[0]) | (mass > ROCK_LINE_MASSES[1]))
    return beyond
