"""The sections of a worked sheet, in the order of the stages."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from keptair import draws
from keptair.batch import Array, Batch
from keptair.physics import (
    activity,
    bulk,
    diffusion,
    exobase,
    irradiation,
    kinetics,
    orbit,
    outflow,
    shoreline,
    spectroscopy,
    time,
)
from keptair.physics.constants import EARTH_XUV_FLUX, SOLAR_CONSTANT
from keptair.settings import Settings
from keptair.stages.escape import THROTTLES, Follower
from keptair.stages.fill import DRAWN, UNITS
from keptair.stages.upper_air import upper_air
from keptair.tables import schema
from keptair.tables.formulas import of_function
from keptair.worksheet.sheet import Section, Step, number, plain, word


def sections(batch: Batch, settings: Settings) -> list[Section]:
    """The chain in order; a planet that could not be assessed has only its inputs and what is missing."""
    columns = batch.columns
    if not columns["is.assessed"][0]:
        return [inputs(batch), verdict(batch)]
    backgrounds = dict.fromkeys((columns["background"][0], columns["secondary_background"][0]))
    parts = [inputs(batch), light(batch, settings), bulk_section(batch)]
    for key in backgrounds:
        follower = Follower(batch, key, settings.backgrounds[key], settings)
        parts += [air(batch, follower), loss(batch, follower), gases(batch, follower)]
    return [*parts, verdict(batch), observation(batch)]


def inputs(batch: Batch) -> Section:
    """Every canonical number: what the catalogue says, and what became of it."""
    steps = []
    for column in schema.inputs():
        if column.type != "number":
            continue
        name = column.name
        source = batch.columns[f"{name}_source"][0]
        origin = f"{source or 'not known'}; catalogue: {catalogued(batch, name)}"
        if name in DRAWN and source != "" and source != "computed":
            values = batch.draws[used_draws(name)]
            steps.append(number("", name, values, column.unit, scale=UNITS[name], origin=origin, column=name))
        else:
            value = plain(batch.columns[name][0])
            steps.append(Step("", name, value, column.unit, origin=origin, column=name))
    return Section("Inputs as used", tuple(steps))


def used_draws(name: str) -> str:
    """Which draws hold an input as used: four are settled where the flux is worked out."""
    later = {
        "stellar_luminosity_lsun": "luminosity",
        "stellar_mass_msun": "star_mass",
        "semi_major_axis_au": "axis",
        "insolation_earth": "flux",
    }
    return later.get(name, f"input.{name}")


def catalogued(batch: Batch, name: str) -> str:
    """A catalogue cell in words."""
    value = batch.columns[f"catalogue.{name}"][0]
    if np.isnan(value):
        return "nothing usable"
    bound = {"upper": "< ", "lower": "> "}.get(batch.columns[f"{name}_bound"][0], "")
    plus, minus = batch.columns[f"{name}_err_plus"][0], batch.columns[f"{name}_err_minus"][0]
    error = "" if np.isnan(plus) else f" +{plus:.6g}"
    error += "" if np.isnan(minus) else f" -{minus:.6g}"
    kind = batch.columns.get(name.rsplit("_", 1)[0] + "_kind", [""])[0]
    return f"{bound}{value:.8g}{error or ' without error'}" + (f" ({kind})" if kind not in ("", "measured") else "")


def light(batch: Batch, settings: Settings) -> Section:
    """Star, orbit, flux, temperature and high-energy light."""
    made = batch.draws
    share = made["xuv_now"] / made["mean_flux"] * (EARTH_XUV_FLUX / SOLAR_CONSTANT)
    settled = (
        ("L*", "luminosity of the star", "stellar_luminosity_lsun", irradiation.luminosity),
        ("M*", "mass of the star", "stellar_mass_msun", irradiation.mass_from_luminosity),
        ("a", "semi-major axis", "semi_major_axis_au", orbit.semi_major_axis),
        ("S", "flux at a, in solar constants", "insolation_earth", irradiation.insolation),
    )
    steps = []
    for symbol, title, name, function in settled:
        source = batch.columns[f"{name}_source"][0]
        used = function if source in ("computed", "relation") else None
        unit = schema.catalogue()[name].unit
        steps.append(
            number(symbol, title, made[used_draws(name)], unit, used, UNITS[name], source or "not known", name)
        )
    steps += [
        number("⟨S⟩", "flux averaged over the orbit", made["mean_flux"], "", orbit.orbit_mean_flux),
        number(
            "T_eq",
            "equilibrium temperature",
            made["equilibrium"],
            "K",
            irradiation.equilibrium_temperature,
            column="equilibrium_temperature_k",
        ),
        number("T_b", "skin temperature", made["base"], "K", irradiation.skin_temperature),
        number("t_sat", "end of saturation", made["saturation_age"], "Gyr", activity.saturation_age),
        number("", "high-energy share of the light now", share, "", activity_law(batch, settings)),
        number(
            "F_XUV",
            "high-energy flux now, Earth = 1",
            made["xuv_now"],
            "",
            activity.xuv_flux,
            column="xuv_flux_earth",
        ),
    ]
    return Section("Light", tuple(steps))


def activity_law(batch: Batch, settings: Settings) -> Callable[..., Any]:
    """The formula behind the star's high-energy light: from its X-rays where they were measured."""
    if not np.isnan(batch.draws["xuv_measured"][0, 0]):
        return activity.traced_back_luminosity
    laws: dict[str, Callable[..., Any]] = {
        "saturated-power-law": activity.power_law_xuv_share,
        "ribas-2005": activity.ribas_xuv_share,
        "sanz-forcada-2011": activity.xray_luminosity,
    }
    return laws[settings.xuv.law]


def bulk_section(batch: Batch) -> Section:
    """The planet's own pull, the star's tide, and what the radius asks for."""
    made = batch.draws
    mass, radius = made["input.planet_mass_mearth"], made["input.planet_radius_rearth"]
    return Section(
        "Bulk",
        (
            number("g", "gravity", made["gravity"], "m s-2", bulk.surface_gravity, column="surface_gravity_m_s2"),
            number(
                "ρ",
                "density",
                bulk.bulk_density(mass, radius),
                "g cm-3",
                bulk.bulk_density,
                1e3,
                column="bulk_density_g_cm3",
            ),
            number(
                "v_esc",
                "escape speed",
                bulk.escape_speed(mass, radius),
                "km s-1",
                bulk.escape_speed,
                1e3,
                column="escape_speed_km_s",
            ),
            number("ξ", "Roche-lobe radius over R", finite(made["roche_ratio"]), "", orbit.roche_ratio),
            number("R_sil", "radius of rock without iron", bulk.silicate_radius(mass), "km", bulk.silicate_radius, 1e3),
            word("share of draws lighter than rock", batch.columns["envelope_probability"][0], "envelope_probability"),
            number("f", "hydrogen share the radius asks for", made["hydrogen_share"], "", bulk.hydrogen_share),
        ),
    )


def air(batch: Batch, follower: Follower) -> Section:
    """The exobase under one background, now."""
    ground, background, settings = follower.ground, follower.background, follower.settings
    now = upper_air(ground, background, settings, batch.draws["xuv_now"])
    radius = np.where(now.bound, now.radius, np.nan)
    shown = follower.key == batch.columns["background"][0]
    mean_mass = exobase.particle_mass(background.upper_mass_u)
    pressure = exobase.exobase_pressure(batch.draws["gravity"], mean_mass, background.cross_section_m2)
    density = exobase.exobase_density(
        ground.planet_mass, radius, now.temperature, mean_mass, background.cross_section_m2
    )
    lower = exobase.lower_scale_heights(settings.reference_pressure_pa, settings.homopause_pressure_pa)
    return Section(
        f"Upper air under {follower.key} ({background.title})",
        (
            word(
                "anchor", f"{background.anchor.body}, {background.anchor.exobase_temperature_k:g} K", origin="assumed"
            ),
            number("s", "damping exponent", ground.damping, "", origin="drawn"),
            number("T_cond", "conductive temperature", now.conductive, "K", exobase.conductive_temperature),
            number(
                "T_exo",
                "exobase temperature",
                now.temperature,
                "K",
                exobase.exobase_temperature,
                column="exobase_temperature_k" if shown else "",
            ),
            number("p_exo", "exobase pressure", pressure, "Pa", exobase.exobase_pressure),
            Step("", "scale heights from R to the homopause", lower, "1"),
            number("", "scale heights from there to the exobase", ground.upper_heights, "1"),
            number(
                "z_exo",
                "exobase altitude",
                radius - ground.planet_radius,
                "km",
                exobase.inverse_exobase_radius,
                1e3,
                column="exobase_altitude_km" if shown else "",
            ),
            number("n_exo", "density there", density, "m-3", exobase.exobase_density),
            number(
                "v_esc",
                "escape speed there",
                bulk.escape_speed(ground.planet_mass, radius),
                "km s-1",
                bulk.escape_speed,
                1e3,
                column="exobase_escape_speed_km_s" if shown else "",
            ),
        ),
    )


def loss(batch: Batch, follower: Follower) -> Section:
    """How one background leaves, now and over the planet's life."""
    key, background, made = follower.key, follower.background, batch.draws
    now = follower.loss_at(made["xuv_now"])
    escaper = follower.settings.gases[background.key_escaper]
    shown = key == batch.columns["background"][0]
    escape_time = time.escape_time(made[f"held.{key}"], now.flux)
    lost = made[f"lost.{key}"]
    bound = ~np.isnan(made[f"exobase_radius.{key}"])
    key_jeans = np.where(bound, escaper.mass_u * now.unit_jeans, np.nan)
    key_flux = np.where(bound, now.key_flux, np.nan)
    regime = "outflow" if now.outflow[0, 0] else "evaporation"
    share = draws.share(now.outflow)[0]
    main = background.main_gas
    return Section(
        f"Loss of the {key} background",
        (
            number("B", "correction of the Jeans flux", follower.correction, "", origin="drawn"),
            number("ε", "heating efficiency", follower.efficiency, "", origin="drawn"),
            number("λ", f"Jeans parameter of {escaper.title}", key_jeans, "", kinetics.jeans_parameter),
            number("φ_J", f"Jeans flux of {escaper.title}", key_flux, "m-2 s-1", kinetics.jeans_flux),
            number("K", "tidal factor", follower.roche, "", orbit.roche_factor),
            number("φ_E", "energy limit", now.energy, "kg m-2 s-1", outflow.energy_limited_flux),
            Step(
                "",
                "regime now",
                regime,
                formula=of_function(outflow.flows_out).equation,
                source=of_function(outflow.flows_out).notes,
                origin=f"outflow in {share:.0%} of the draws",
            ),
            number("φ", "loss now", now.flux, "kg m-2 s-1"),
            number("", "column held at first", made[f"held.{key}"], "kg m-2", origin="drawn, or from the radius"),
            number(
                "τ",
                "escape time",
                escape_time,
                "Gyr",
                time.escape_time,
                column=f"escape_time_{main}_gyr" if shown else "",
            ),
            number("t₀", "start of the integral", follower.start, "Gyr", origin="drawn"),
            number("Λ", "inventories lost since then", lost, "", time.epoch_weight),
            word("retention", draws.share(lost < 1)[0], f"retention_{main}" if shown else ""),
        ),
    )


def gases(batch: Batch, follower: Follower) -> Section:
    """Every trace under one background: medians of the draws, as gases.parquet has them."""
    key, columns = follower.key, batch.columns
    rows = []
    for name in follower.gases:
        end = f"{key}.{name}"
        numbers = ("jeans_parameter", "speed_ratio", "jeans_flux", "supply_flux", "loss_rate", "escape_time_gyr")
        values = [plain(columns[f"{number}.{end}"][0]) for number in (*numbers, "retention")]
        rows.append((name, *values, THROTTLES[int(columns[f"limited_by.{end}"][0])]))
    steps = tuple(
        Step(symbol, title, None, formula=of_function(function).equation, source=of_function(function).notes)
        for symbol, title, function in (
            ("φ_J", "Jeans flux of a trace", kinetics.trace_jeans_flux),
            ("φ_D", "supply by diffusion", diffusion.supply_flux),
            ("φ", "both in series", diffusion.in_series),
            ("φ", "carried along in an outflow", diffusion.carried_flux),
        )
    )
    mixing = follower.settings.trace_mixing_ratio
    heads = ("gas", "λ", "q", "φ_J m-2 s-1", "φ_D m-2 s-1", "kg s-1", "τ Gyr", "P", "limit")
    title = f"Traces under {key} (medians; fluxes at a mixing ratio of {mixing:g})"
    legend = (
        "λ: Jeans parameter, q: speed ratio, φ_J: Jeans flux, φ_D: supply, kg s-1: loss, τ: escape time, P: retention"
    )
    return Section(title, (*steps, Step("", "", None, origin=legend)), heads, tuple(rows))


def verdict(batch: Batch) -> Section:
    """Probabilities, verdict, second opinions, and what decides."""
    names = (
        "missing_inputs",
        "envelope_probability",
        "secondary_background",
        "secondary_probability",
        "secondary_probability_radiative",
        "hydrogen_kept",
        "air_probability",
        "verdict",
        "verdict_reason",
        "quick_rule_verdict",
    )
    steps = [word(name.replace("_", " "), batch.columns[name][0], name) for name in names]
    told = of_function(shoreline.shoreline_offset)
    offset = plain(batch.columns["shoreline_dex"][0])
    steps.append(Step("", "shoreline", offset, "dex", formula=told.equation, source=told.notes, column="shoreline_dex"))
    steps += [
        word(n.replace("_", " "), batch.columns[n][0], n) for n in ("decisive_input", "decisive_share", "flag_names")
    ]
    return Section("Verdict", tuple(steps))


def observation(batch: Batch) -> Section:
    """Spectroscopy metrics of central values."""
    steps = []
    for name, title, function in (
        ("tsm", "transmission", spectroscopy.transmission_metric),
        ("esm", "emission", spectroscopy.emission_metric),
        ("priority", "air times transmission", spectroscopy.priority),
    ):
        told = of_function(function)
        value = plain(batch.columns[name][0])
        steps.append(Step("", f"{name} ({title})", value, "", None, told.equation, told.notes, column=name))
    return Section("Can it be seen", tuple(steps))


def finite(values: Array) -> Array:
    """Infinite stands for not known."""
    return np.where(np.isinf(values), np.nan, values)
