"""Judge: how probabilities become a verdict, what it rests on, and what is said of rows that cannot be judged."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from handmade import make_batch
from keptair import stages
from keptair.batch import Batch
from keptair.settings import Settings
from keptair.stages import judge
from keptair.tables import schema

EARTH = {"planet_mass_mearth": 1.0, "planet_radius_rearth": 1.0, "bond_albedo": 0.3, "eccentricity": 0.0,
         "semi_major_axis_au": 1.0, "stellar_luminosity_lsun": 1.0, "stellar_mass_msun": 1.0,
         "stellar_age_gyr": 4.57}  # fmt: skip
MARGINAL = EARTH | {"planet_mass_mearth": 0.35, "planet_radius_rearth": 0.75, "semi_major_axis_au": 0.8}
PUFFY = EARTH | {"planet_mass_mearth": 12.0, "planet_radius_rearth": 4.0}
LOOSE = EARTH | {"planet_mass_mearth": 4.0, "planet_radius_rearth": 1.5, "planet_radius_rearth_err": 0.15,
                 "semi_major_axis_au": 0.08}  # fmt: skip


def settings_of(**changed: Any) -> Settings:
    return Settings.read(None, {"draws": 256, "epochs": 8} | changed)


def judged(*rows: dict[str, Any], **changed: Any) -> Batch:
    return stages.through(make_batch(rows), settings_of(**changed))


def column(batch: Batch, name: str) -> list[Any]:
    return batch.columns[name].tolist()


@pytest.mark.parametrize(
    ("envelope", "secondary", "frozen", "assessed", "verdict"),
    [
        (0.9, 0.0, False, True, "envelope"),
        (0.9, 1.0, True, True, "envelope"),
        (0.899, 1.0, False, True, "secondary"),
        (0.0, 0.8, False, True, "secondary"),
        (0.0, 0.799, False, True, "undecided"),
        (0.0, 0.201, False, True, "undecided"),
        (0.0, 0.2, False, True, "bare"),
        (0.0, 0.0, True, True, "bare"),
        (0.5, 0.5, True, True, "bare"),
        (1.0, 1.0, False, False, "unassessed"),
        (0.0, 0.0, True, False, "unassessed"),
    ],
)
def test_the_verdict_is_where_the_probabilities_stand(
    envelope: float, secondary: float, frozen: bool, assessed: bool, verdict: str
) -> None:
    numbers = (np.array([value]) for value in (envelope, secondary, frozen, assessed))
    assert judge.verdicts(*numbers, Settings()).tolist() == [verdict]


def test_thresholds_are_settings() -> None:
    numbers = [np.array([0.6, 0.0, 0.0]), np.array([0.0, 0.6, 0.4]), np.zeros(3, bool), np.ones(3, bool)]
    changed = Settings.read(None, {"verdict.keep": 0.6, "verdict.lose": 0.4, "verdict.envelope": 0.6})
    assert judge.verdicts(*numbers, changed).tolist() == ["envelope", "secondary", "bare"]
    assert judge.verdicts(*numbers, Settings()).tolist() == ["bare", "undecided", "undecided"]


def test_each_verdict_says_what_it_rests_on() -> None:
    batch = judged(
        PUFFY,
        PUFFY | {"planet_mass_kind": "relation"},
        PUFFY | {"planet_radius_kind": "relation"},
        PUFFY | {"planet_mass_mearth_bound": "upper"},
        EARTH,
        MARGINAL,
        EARTH | {"semi_major_axis_au": 60.0},
        EARTH | {"planet_mass_mearth": 0.005, "planet_radius_rearth": 0.2, "semi_major_axis_au": 0.2},
        {"planet_mass_mearth": 1.0},
    )
    assert column(batch, "verdict") == ["envelope"] * 4 + ["secondary", "undecided", "bare", "bare", "unassessed"]
    assert column(batch, "verdict_reason") == [
        "density",
        "radius_only",
        "mass_only",
        "radius_only",
        "kept",
        "uncertain",
        "frozen",
        "lost_by_outflow",
        "missing_input",
    ]


@pytest.mark.parametrize(
    ("lost", "flowing", "reason"),
    [
        ([2.0, 2.0, 2.0, 0.1], [1.1, 1.1, 0.0, 0.1], "lost_by_outflow"),
        ([2.0, 2.0, 2.0, 0.1], [1.1, 0.9, 0.9, 0.1], "lost_by_evaporation"),
        ([2.0, 2.0, 0.1, 0.1], [1.1, 0.9, 0.1, 0.1], "lost_by_evaporation"),
        ([2.0, 2.0, 2.0, 2.0], [2.0, 2.0, 2.0, 0.0], "lost_by_outflow"),
        ([2.0, 2.0, 2.0, 2.0], [0.0, 0.0, 0.0, 0.0], "lost_by_evaporation"),
    ],
)
def test_air_is_lost_by_outflow_if_most_of_most_losses_was(
    lost: list[float], flowing: list[float], reason: str
) -> None:
    """In more than half of the draws that lost it, more than half of what was lost flowed out."""
    made = {name: np.array([[9.0, *values]]) for name, values in (("lost.co2", lost), ("lost_flowing.co2", flowing))}
    columns = {
        "secondary_background": np.array(["co2"], dtype=object),
        "planet_radius_rearth_source": np.array(["measured"], dtype=object),
        "is.weighed": np.array([True]),
    }
    batch = Batch(columns, made | {"gravity": np.ones((1, 5))})
    found = judge.reasons(batch, np.array(["bare"], dtype=object), made["lost.co2"] >= 1, np.array([False]))
    assert found.tolist() == [reason]


def test_probability_of_air_of_an_envelope_is_of_either_kind() -> None:
    batch = judged(PUFFY | {"planet_radius_rearth_err": 1.2, "semi_major_axis_au": 0.05, "planet_mass_mearth_err": 3.0})
    envelope, secondary = batch.columns["envelope_probability"][0], batch.columns["secondary_probability"][0]
    assert 0.9 <= envelope < 1
    assert batch.columns["air_probability"][0] == pytest.approx(1 - (1 - envelope) * (1 - secondary), rel=1e-12)
    hydrogen = batch.draws["is_envelope"][0, 1:] & (batch.draws["lost.h2"][0, 1:] < 1)
    assert batch.columns["hydrogen_kept"][0] == np.mean(hydrogen)


def test_probability_of_air_of_any_other_planet_is_of_draws_that_keep_either() -> None:
    batch = judged(LOOSE, LOOSE | {"planet_mass_kind": "relation"}, MARGINAL)
    rock = 1.07 * np.cbrt(4.0 ** (3 / 3.7))
    radius = batch.draws["input.planet_radius_rearth"][:, 1:] / 6.3781e6
    light = np.stack([radius[0] > rock, radius[1] > 1.8, np.zeros(256, dtype=bool)])
    kept = batch.draws["lost.co2"][:, 1:] < 1
    hydrogen = light & (batch.draws["lost.h2"][:, 1:] < 1)
    np.testing.assert_array_equal(batch.columns["air_probability"], np.mean(kept | hydrogen, axis=1))
    np.testing.assert_array_equal(batch.columns["secondary_probability"], np.mean(kept, axis=1))
    assert np.isnan(batch.columns["hydrogen_kept"]).all()
    # so a rock with a loose radius is not ranked as if its error bar were air
    assert batch.columns["air_probability"][0] < batch.columns["envelope_probability"][0]


def test_a_frozen_background_is_not_air_whatever_its_escape_says() -> None:
    batch = judged(EARTH | {"semi_major_axis_au": 60.0}, EARTH | {"semi_major_axis_au": 9.5, "background": "co2"})
    for key, planet in (("n2_icy", 0), ("co2", 1)):
        assert (batch.draws[f"lost.{key}"][planet] < 1).all()
    assert column(batch, "secondary_probability") == [0.0, 0.0]
    assert column(batch, "secondary_probability_radiative") == [0.0, 0.0]
    assert column(batch, "air_probability") == [0.0, 0.0]
    assert column(batch, "verdict") == ["bare", "bare"]


def test_probability_follows_the_secondary_background_and_plain_columns_the_published_one() -> None:
    batch = judged(PUFFY, MARGINAL | {"background": "h2"}, MARGINAL)
    for planet in range(3):
        assert batch.columns["secondary_probability"][planet] == batch.columns["retention.co2.co2"][planet]
    assert batch.columns["retention_h2"][1] == batch.columns["retention.h2.h2"][1]
    assert batch.columns["secondary_probability"][1] == pytest.approx(
        batch.columns["secondary_probability"][2], abs=0.05
    )
    assert batch.columns["verdict"][1] == "undecided"


def test_both_answers_to_excess_heat_are_given_whichever_is_set() -> None:
    hot = EARTH | {"planet_mass_mearth": 6.0, "planet_radius_rearth": 1.6, "semi_major_axis_au": 0.04}
    flowing, shining = judged(hot), judged(hot, excess_heat="radiate")
    radiative = flowing.columns["secondary_probability_radiative"][0]
    assert radiative > flowing.columns["secondary_probability"][0]
    assert shining.columns["secondary_probability"][0] == radiative
    assert shining.columns["secondary_probability_radiative"][0] == radiative


def near(batch: Batch) -> list[bool]:
    return column(batch, "flag.near_threshold")


@pytest.mark.parametrize(
    ("envelope", "secondary", "verdict", "frozen", "flagged"),
    [
        (0.0, 0.81, "secondary", False, True),
        (0.0, 0.785, "undecided", False, True),
        (0.0, 0.83, "secondary", False, False),
        (0.0, 0.19, "bare", False, True),
        (0.0, 0.19, "bare", True, False),
        (0.89, 0.5, "undecided", False, True),
        (0.91, 0.5, "envelope", False, True),
        (0.95, 0.8, "envelope", False, False),
        (0.0, 0.5, "undecided", False, False),
        (0.9, 0.8, "unassessed", False, False),
    ],
)
def test_a_verdict_is_flagged_within_two_hundredths_of_a_threshold_that_could_turn_it(
    envelope: float, secondary: float, verdict: str, frozen: bool, flagged: bool
) -> None:
    numbers = [np.array([value]) for value in (envelope, secondary)]
    found = judge.near_threshold(*numbers, np.array([verdict], dtype=object), np.array([frozen]), Settings())
    assert found.tolist() == [flagged]


def test_the_quick_rule_of_the_trade_looks_at_the_main_gas_of_secondary_air() -> None:
    batch = judged(EARTH, MARGINAL, EARTH | {"planet_mass_mearth": 0.005, "planet_radius_rearth": 0.2}, PUFFY, {})
    ratios = batch.columns["speed_ratio.co2.co2"]
    assert ratios[0] > 6
    assert np.isnan(ratios[2])
    expected = ["secondary" if ratio > 6 else "bare" for ratio in ratios[:4]]
    assert column(batch, "quick_rule_verdict") == [*expected, ""]
    assert column(batch, "quick_rule_verdict")[2] == "bare"
    stricter = judged(EARTH, **{"verdict.quick_rule": 1000.0})
    assert column(stricter, "quick_rule_verdict") == ["bare"]


def test_the_shoreline_uses_the_flux_without_the_eccentricity_factor_and_needs_the_stars_light() -> None:
    dark = {name: value for name, value in EARTH.items() if name != "stellar_luminosity_lsun"} | {
        "insolation_earth": 1.0
    }
    batch = judged(EARTH, EARTH | {"eccentricity": 0.8}, dark)
    offsets = batch.columns["shoreline_dex"]
    # Zahnle & Catling 2017 through Mars: log10(1 / (0.431 (11.18/5.027)⁴))
    assert offsets[0] == pytest.approx(-1.023, abs=0.002)
    assert offsets[1] == offsets[0]
    assert np.isnan(offsets[2])
    assert batch.columns["verdict"][2] == "secondary"


def test_the_rock_line_outside_the_masses_it_was_made_for_is_flagged_where_it_is_used() -> None:
    batch = judged(
        EARTH | {"planet_mass_mearth": 0.9},
        EARTH | {"planet_mass_mearth": 7.9},
        EARTH | {"planet_mass_mearth": 8.1},
        EARTH | {"planet_mass_mearth": 20.0, "planet_radius_kind": "relation"},
        {name: value for name, value in EARTH.items() if name != "planet_mass_mearth"},
    )
    assert column(batch, "flag.silicate_line_extrapolated") == [True, False, True, True, False]


def test_of_an_unassessed_row_nothing_is_published_but_its_inputs_and_why() -> None:
    settings = settings_of()
    rows = [EARTH, {"planet_mass_mearth": 1.0, "planet_radius_rearth": 2.5}, {**EARTH, "planet_mass_kind": "relation",
            "planet_radius_kind": "relation"}, {"stellar_mass_msun": 1.0, "background": "n2"}]  # fmt: skip
    found = stages.assess(make_batch(rows), settings)
    planets = found.planets
    assert planets["verdict"].tolist() == ["secondary"] + ["unassessed"] * 3
    assert planets["verdict_reason"].tolist() == ["kept"] + ["missing_input"] * 3
    assert set(found.gases["planet_id"]) == {"planet 1"}
    for entry in schema.table("planets"):
        if entry.type == "number" and entry.stage in ("exobase", "retain", "judge", "observe"):
            assert np.isnan(planets[entry.name][1:]).all(), entry.name
    for name in ("background", "secondary_background", "background_source", "regime", "quick_rule_verdict"):
        assert planets[name][1:].tolist() == [""] * 3, name
    wanted = ("insolation_earth", "planet_mass_mearth", "planet_radius_rearth")
    for missing, names in zip(wanted, planets["missing_inputs"][1:], strict=True):
        assert missing in names.split()
    raised = {name for names in planets["flag_names"][1:] for name in names.split()}
    assert not raised & {"near_threshold", "unbound", "inside_roche", "frozen_out", "beyond_conduction", "no_orbit"}
