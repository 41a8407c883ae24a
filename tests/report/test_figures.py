"""The picture: where planets, line and names stand."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.parquet as parquet
import pytest

from keptair.report import figures

Maker = Callable[..., Path]
Planet = Callable[..., dict[str, Any]]


@pytest.fixture
def planets(run_folder: Maker) -> Callable[..., pa.Table]:
    return lambda rows: parquet.read_table(run_folder(list(rows)) / "planets.parquet")


def number(percent: str) -> float:
    return float(percent.removesuffix("%"))


@pytest.mark.handbook(
    source="Zahnle & Catling 2017, doi:10.3847/1538-4357/aa7846: I goes as the fourth power of v; Mars at 0.431"
)
def test_the_line_goes_through_mars_and_rises_with_the_fourth_power() -> None:
    assert figures.line_at(5.027) == pytest.approx(0.431)
    assert figures.line_at(50.27) == pytest.approx(4310.0)


@pytest.mark.handbook(
    source="JPL Planetary Physical Parameters: escape speed 10.36, 11.19, 5.03 km/s; S 1.911, 1, 0.431"
)
def test_mars_lies_on_the_drawn_line_and_earth_and_venus_below_it(
    planets: Callable[..., pa.Table], a_planet: Planet
) -> None:
    speeds = {"Venus": (10.36, 1.911), "Earth": (11.19, 1.0), "Mars": (5.03, 0.431)}
    rows = [
        a_planet(name, escape_speed_km_s=speed, shoreline_dex=float(np.log10(light / (0.431 * (speed / 5.027) ** 4))))
        for name, (speed, light) in speeds.items()
    ]
    picture = figures.shoreline(planets(rows))
    assert picture is not None
    x1, y1, x2, y2 = map(number, picture.line)
    below = {}
    for mark in picture.panels[0].layers[0].marks:
        on_the_line = y1 + (number(mark.x) - x1) / (x2 - x1) * (y2 - y1)
        below[mark.name] = number(mark.y) - on_the_line  # percent from the top
    assert below["Mars"] == pytest.approx(0, abs=0.3)
    assert below["Earth"] > below["Venus"] > 10


def test_faster_is_to_the_right_and_brighter_is_higher(planets: Callable[..., pa.Table], a_planet: Planet) -> None:
    rows = [
        a_planet("slow and bright", escape_speed_km_s=3.0, shoreline_dex=3.0),
        a_planet("fast and dark", escape_speed_km_s=60.0, shoreline_dex=-6.0),
    ]
    picture = figures.shoreline(planets(rows))
    assert picture is not None
    slow, fast = picture.panels[0].layers[0].marks
    assert number(slow.x) < number(fast.x)
    assert number(slow.y) < number(fast.y)


def test_planets_that_cannot_be_placed_are_counted_and_none_at_all_is_no_picture(
    planets: Callable[..., pa.Table], a_planet: Planet
) -> None:
    nowhere = [a_planet("a", escape_speed_km_s=None), a_planet("b", shoreline_dex=None), a_planet("c", "unassessed")]
    assert figures.shoreline(planets(nowhere)) is None
    assert figures.shoreline(planets([])) is None
    picture = figures.shoreline(planets([*nowhere, a_planet("d")]))
    assert picture is not None
    assert (picture.drawn, picture.left_out) == (1, 3)


def test_the_rarest_verdict_is_drawn_last_and_on_top(planets: Callable[..., pa.Table], a_planet: Planet) -> None:
    rows = [a_planet("a", "secondary"), *(a_planet(f"b{place}", "bare") for place in range(3))]
    picture = figures.shoreline(planets(rows))
    assert picture is not None
    assert [layer.verdict for layer in picture.panels[0].layers] == ["bare", "secondary"]


def test_names_do_not_cover_each_other(planets: Callable[..., pa.Table], a_planet: Planet) -> None:
    rows = [a_planet(f"planet {place}") for place in range(6)]  # all at one point
    picture = figures.shoreline(planets(rows), {f"planet {place}": str(place) for place in range(6)})
    assert picture is not None
    assert [label.text for label in picture.names] == ["0", "1", "2", "3"]  # right, left, above, below
    assert len({(label.dx, label.dy) for label in picture.names}) == 4


def crowd(a_planet: Planet, size: int) -> list[dict[str, Any]]:
    draw = np.random.default_rng(3)
    speeds, offsets = 10 ** draw.normal(1.3, 0.3, size), draw.normal(0, 2, size)
    return [
        a_planet(f"p{place}", "bare" if place % 2 else "secondary", escape_speed_km_s=speed, shoreline_dex=offset)
        for place, (speed, offset) in enumerate(zip(speeds.tolist(), offsets.tolist(), strict=True))
    ]


def test_in_a_crowd_each_verdict_has_its_own_panel_and_no_planet_is_lost(
    planets: Callable[..., pa.Table], a_planet: Planet
) -> None:
    picture = figures.shoreline(planets(crowd(a_planet, 2000)))
    assert picture is not None
    assert [(panel.verdict, panel.planets) for panel in picture.panels] == [("secondary", 1000), ("bare", 1000)]
    assert picture.drawn == 2000
    assert 0 < picture.on_the_edge < 0.05 * 2000
    marks = [mark for panel in picture.panels for layer in panel.layers for mark in layer.marks]
    assert len(marks) <= 2000
    assert all(0 <= number(place) <= 100 for mark in marks for place in (mark.x, mark.y))
    assert re.fullmatch(r"(M\d+ \d+h0)+", picture.crowd)


def test_marks_of_many_planets_are_stronger(planets: Callable[..., pa.Table], a_planet: Planet) -> None:
    alike = [a_planet(f"same {place}", "undecided") for place in range(10)]
    picture = figures.shoreline(planets([*crowd(a_planet, 1600), *alike]))
    assert picture is not None
    (layer,) = next(panel for panel in picture.panels if panel.verdict == "undecided").layers
    assert (layer.strength, len(layer.marks)) == (3, 1)


@pytest.mark.parametrize(
    ("low", "high", "labels"),
    [
        (0.0, 1.0, ["1", "2", "5", "10"]),
        (-1.0, 3.0, ["0.1", "1", "10", "100", "1000"]),
        (-6.0, 5.0, ["10⁻⁶", "10⁻⁴", "0.01", "1", "100", "10⁴"]),
    ],
)
def test_ticks_are_round_numbers_and_few(low: float, high: float, labels: list[str]) -> None:
    axis = figures.Axis(low, high)
    assert [tick.label for tick in axis.ticks] == labels
    assert all(0 <= number(tick.at) <= 100 for tick in axis.ticks)
