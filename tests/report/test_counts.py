"""What the report counts, on tables small enough to count by hand."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pyarrow as pa
import pyarrow.parquet as parquet
import pytest

from keptair.report import counts
from keptair.settings import Settings, Verdict

Maker = Callable[..., Path]
Planet = Callable[..., dict[str, Any]]


@pytest.fixture
def planets(run_folder: Maker) -> Callable[..., pa.Table]:
    return lambda *rows: parquet.read_table(run_folder(rows) / "planets.parquet")


def test_every_verdict_is_counted_even_if_nobody_has_it(planets: Callable[..., pa.Table], a_planet: Planet) -> None:
    table = planets(
        a_planet("a", "bare"), a_planet("b", "bare", verdict_reason="frozen"), a_planet("c", "bare"), a_planet("d")
    )
    found = {count.verdict: (count.planets, count.reasons) for count in counts.verdicts(table)}
    assert found == {
        "envelope": (0, ()),
        "secondary": (1, (("kept", 1),)),
        "undecided": (0, ()),
        "bare": (3, (("lost_by_evaporation", 2), ("frozen", 1))),
        "unassessed": (0, ()),
    }


def test_sources_are_counted_for_each_input_from_firm_to_unknown(
    planets: Callable[..., pa.Table], a_planet: Planet
) -> None:
    kinds = ("", "relation", "measured", "relation")
    table = planets(*(a_planet(str(place), planet_mass_mearth_source=kind) for place, kind in enumerate(kinds)))
    (mass,) = counts.sources(table, ["planet_mass_mearth"])
    assert mass.sources == (("measured", 1), ("relation", 2), ("", 1))


@pytest.mark.parametrize(
    ("chance", "verdict"), [(0.0, "bare"), (0.2, "bare"), (0.21, "undecided"), (0.8, "secondary"), (1.0, "secondary")]
)
def test_the_thresholds_themselves_belong_to_the_firm_verdicts(chance: float, verdict: str) -> None:
    assert counts.judged_by(chance, Verdict()) == verdict


def test_verdicts_that_would_differ_are_counted_without_envelopes_and_unassessed(
    planets: Callable[..., pa.Table], a_planet: Planet
) -> None:
    table = planets(
        a_planet("moved", "bare", secondary_probability_radiative=0.9),
        a_planet("moved too", "bare", secondary_probability_radiative=0.9),
        a_planet("half", "bare", secondary_probability_radiative=0.5),
        a_planet("same", "secondary", secondary_probability_radiative=0.9),
        a_planet("thick", "envelope", secondary_probability_radiative=0.1),
        a_planet("unknown", "unassessed"),
    )
    heat = counts.excess_heat(table, Verdict())
    assert heat.moves == (("bare", "secondary", 2), ("bare", "undecided", 1))
    assert (heat.differ, heat.judged) == (3, 4)


def test_a_verdict_parts_from_a_rough_rule_only_where_both_are_plain(
    planets: Callable[..., pa.Table], a_planet: Planet
) -> None:
    table = planets(
        a_planet("agrees", "secondary", quick_rule_verdict="secondary", shoreline_dex=-0.5),
        a_planet("parts from both", "secondary", quick_rule_verdict="bare", shoreline_dex=0.5),
        a_planet("parts from one", "bare", quick_rule_verdict="secondary", shoreline_dex=0.5),
        a_planet("on the line", "bare", quick_rule_verdict="bare", shoreline_dex=0.0),
        a_planet("no line", "bare", quick_rule_verdict="bare", shoreline_dex=None),
        a_planet("between", "undecided", quick_rule_verdict="bare", shoreline_dex=-0.5),
    )
    found = counts.opinions(table)
    assert sum(opinion.parted_from_quick_rule for opinion in found) == 2
    assert sum(opinion.parted_from_shoreline for opinion in found) == 1
    bare = next(opinion for opinion in found if opinion.verdict == "bare")
    assert (bare.planets, bare.shoreline_air, bare.shoreline_bare) == (3, 0, 2)


def test_flags_are_counted_by_their_bits(planets: Callable[..., pa.Table], a_planet: Planet) -> None:
    found = {
        count.flag.bit: count.planets
        for count in counts.flags(planets(a_planet("a", flags=0b1001), a_planet("b", flags=0b1000), a_planet("c")))
    }
    assert {bit: number for bit, number in found.items() if number} == {0: 1, 3: 2}


def test_backgrounds_say_how_many_rows_brought_their_own(planets: Callable[..., pa.Table], a_planet: Planet) -> None:
    table = planets(
        a_planet("a"),
        a_planet("b", "bare", background_source="given"),
        a_planet("c", "envelope"),
        a_planet("d", "unassessed"),
    )
    found = counts.backgrounds(table, Settings())
    assert [(each.key, each.planets, each.given) for each in found] == [("co2", 2, 1), ("h2", 1, 0)]
    assert found[0].verdicts == (("secondary", 1), ("bare", 1))


def test_exobases_at_the_limit_or_without_a_height_are_counted(
    planets: Callable[..., pa.Table], a_planet: Planet
) -> None:
    table = planets(
        a_planet("limit", "envelope", exobase_temperature_k=9999.9, exobase_altitude_km=5.0),
        a_planet("cool", "envelope", exobase_temperature_k=900.0),
        a_planet("rock", "bare", exobase_temperature_k=9999.9, exobase_altitude_km=5.0),
        a_planet("unknown", "unassessed"),
    )
    found = counts.exobases(table, Settings(conduction_limit_k=9999.9))
    assert (found.envelopes, found.envelopes_at_limit, found.without_altitude) == (2, 1, 1)


def test_settings_are_compared_down_to_the_last_leaf(tmp_path: Path) -> None:
    file = tmp_path / "settings.toml"
    file.write_text(
        "batch_planets = 7\n[verdict]\nkeep = 0.9\n[gases.o2]\ntitle = 'Ozone’s parent'\n", encoding="utf-8"
    )
    found = {change.name: change for change in counts.changed_settings(Settings.read(file, {"draws": 256}))}
    assert set(found) == {"verdict.keep", "gases.o2.title", "draws"}  # the size of a batch changes no number
    assert (found["verdict.keep"].value, found["verdict.keep"].default) == (0.9, 0.8)
    assert found["draws"].origin == "command line"


def test_a_setting_made_in_python_says_so() -> None:
    (change,) = counts.changed_settings(Settings(seed=2))
    assert (change.name, change.origin) == ("seed", "given in Python")
