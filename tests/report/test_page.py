"""The page: whole, safe, the same every time, and saying all it must."""

from __future__ import annotations

import re
from collections.abc import Callable
from html.parser import HTMLParser
from itertools import combinations
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import keptair.report
from keptair.settings import Settings
from keptair.tables import schema

Maker = Callable[..., Path]
Planet = Callable[..., dict[str, Any]]
VOID = {"meta", "br", "use", "path", "circle", "line", "rect"}  # those of the page that need no end
HOSTILE = (
    "<script>alert(1)</script>",
    '"><img src=x onerror=alert(1)>',
    "</title></style></svg><b>",
    "{{ 7 * 7 }}{% raw %}",
    "javascript:alert(1)//' onload='x",
    "\u202egnp.\x00\x1b]0;x\x07",
    "&lt;b&gt;&amp;",
)


class Page(HTMLParser):
    """Tags, attributes and text of a page; complains about ends that do not fit."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.open: list[str] = []
        self.tags: list[str] = []
        self.attributes: list[tuple[str, str]] = []
        self.text: list[str] = []
        self.feed(text)
        self.close()
        assert self.open == []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.attributes += [(name, value or "") for name, value in attrs]
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.attributes += [(name, value or "") for name, value in attrs]

    def handle_endtag(self, tag: str) -> None:
        if tag not in VOID:
            assert self.open.pop() == tag
        if tag in ("td", "th", "dt", "dd"):
            self.text.append(" ")

    def handle_data(self, data: str) -> None:
        if "style" not in self.open:
            self.text.append(data)

    @property
    def words(self) -> str:
        return re.sub(r"\s+", " ", "".join(self.text))


def written(folder: Path, settings: Settings | None = None) -> str:
    keptair.report.write(folder, settings or Settings())
    return (folder / "report.html").read_text(encoding="utf-8")


def read(folder: Path, settings: Settings | None = None) -> str:
    return Page(written(folder, settings)).words


@pytest.fixture
def survey(run_folder: Maker, a_planet: Planet) -> Path:
    """Four verdicts, a duplicate, two emptied cells."""
    planets = [
        a_planet("Thick b", "envelope", priority=3.0, tsm=270.0, air_probability=1.0, exobase_temperature_k=1e4),
        a_planet(
            "Kept b",
            "secondary",
            priority=0.9,
            tsm=10.0,
            decisive_input="stellar_age_gyr",
            decisive_share=0.36,
            secondary_probability_radiative=0.9,
        ),
        a_planet("Gone b", "bare", secondary_probability_radiative=0.9, planet_mass_mearth_source="relation"),
        a_planet("Riddle b", "unassessed", flags=1, flag_names="cell_emptied"),
    ]
    duplicate = {
        "row": 5,
        "planet_id": "Kept b",
        "column": "planet_id",
        "value": "Kept b",
        "rule": "duplicate",
        "reason": "row 2 is newer",
    }
    return run_folder(planets, [duplicate], emptied={"eccentricity": {"maximum": 2}})


def test_the_headline_says_what_was_read_and_what_became_of_it(survey: Path) -> None:
    words = read(survey)
    assert "begun 2026-12-01 03:15 UTC" in words
    assert "Which planets of survey.csv keep their air" in words
    assert "Of 4 planets, 1 has an envelope, 1 keeps air of its own, 1 is bare and 1 could not be assessed." in words
    assert "rows read 5" in words
    assert "set aside 1" in words
    assert "planets accepted 4" in words
    assert "2 cells broke a rule and were emptied" in words


def test_targets_say_what_their_probability_rests_on(survey: Path) -> None:
    words = read(survey)
    assert "bulk density mass, radius measured; age, albedo by prior" in words
    assert "300 280–320" in words  # kelvin, median and 16-84 %
    assert "age (0.4)" in words  # a share moves with the seed: one digit
    assert words.index("Thick b") < words.index("The first of those without an envelope") < words.index("a Kept b")


def test_a_planet_without_priority_is_no_target(run_folder: Maker, a_planet: Planet) -> None:
    words = read(run_folder([a_planet("Shy b")]))
    assert "No planet has a priority" in words


def test_rows_set_aside_are_shown_by_rule_with_the_first_few(run_folder: Maker) -> None:
    lines = [
        {"row": row, "planet_id": f"Twin {row}", "column": "planet_id", "rule": "duplicate", "reason": "row 1 is newer"}
        for row in range(2, 10)
    ]
    words = read(run_folder(rejects=lines))
    assert "8 · another row of the same planet is newer or fuller" in words
    assert "Twin 6" in words
    assert "Twin 7" not in words
    assert "and 3 more" in words


def test_the_page_counts_verdicts_that_hang_on_excess_heat(survey: Path) -> None:
    assert "1 of 2 verdicts (50 %) would differ" in read(survey).replace("\u202f", " ")


def test_where_the_heat_is_radiated_the_page_does_not_count_what_it_cannot_know(survey: Path) -> None:
    words = read(survey, Settings(excess_heat="radiate"))
    assert "In this run heat that conduction cannot carry is radiated away" in words
    assert "would differ" not in words


def test_changes_are_told_where_there_was_a_run_before(run_folder: Maker, a_planet: Planet) -> None:
    change = {
        "planet_id": "Kept b",
        "change": "verdict",
        "old_verdict": "bare",
        "new_verdict": "secondary",
        "old_air_probability": 0.1,
        "new_air_probability": 0.9,
        "because": "planet_mass_mearth settings.seed",
    }
    words = read(run_folder([a_planet("Kept b")], changes=[change], previous="20261130T031500Z-1a2b3c4d"))
    assert "Against 20261130T031500Z-1a2b3c4d, 1 planet differs: 1 another verdict." in words
    assert "bare → secondary 0.10 → 0.90 planet_mass_mearth settings.seed" in words
    assert "Since the run before" not in read(run_folder([a_planet("Kept b")]))


def test_settings_that_are_not_the_default_are_listed_with_both_values(survey: Path) -> None:
    words = read(survey, Settings.read(None, {"bond_albedo": [0.1, 0.3], "draws": 256}))
    assert "draws 256 512 command line" in words
    assert "bond_albedo [0.1, 0.3] [0.0, 0.5] command line" in words
    assert "All settings that can change a number are the defaults." in read(survey)


@pytest.mark.parametrize(
    "said",
    [
        "do not replace follow-up observation",
        "Thermal escape only",
        "Charge exchange",
        "pick-up of ions",
        "sputtering",
        "impacts",
        "stellar wind",
        "Volcanoes and comets",
        "secondary is an upper bound",
        "what becomes of excess heat",
        "before they reach the main sequence",
        "stellar_xray_luminosity_w",
        "exactly at its limit for most envelopes",
        "null where the air is not bound",
        "damping exponent up to 1.2",
        "Mars hangs on the start, Titan and Io on the inventory, the Galilean moons on the cap",
    ],
)
def test_what_the_answer_leaves_out_is_said(survey: Path, said: str) -> None:
    assert said in read(survey)


def test_known_worlds_go_through_the_settings_of_the_run(survey: Path) -> None:
    assert "15 of 15 come out as expected" in read(survey)
    broken = read(survey, Settings.read(None, {"xuv.saturation_log10": -2.2}))
    assert "not as expected" in broken
    assert "15 of 15" not in broken


def test_every_derived_column_has_its_formula_on_the_page(survey: Path) -> None:
    page = read(survey)
    derived = {column.name for column in schema.table("planets") if column.derived_by and not column.subject}
    assert all(f"planets.{name}" in page for name in derived)
    assert "q = v_esc / v_rms = √(λ / 1.5)" in page


def test_the_guide_explains_every_verdict_reason_and_flag(survey: Path) -> None:
    words = read(survey)
    for flag in schema.flags():
        assert flag.name in words
        assert flag.description in words
    planets = schema.table("planets")
    for word in (*planets["verdict"].enum, *planets["verdict_reason"].enum):
        assert word in words


def test_a_page_of_no_planets_is_whole(run_folder: Maker) -> None:
    words = read(run_folder())
    assert "No planet was accepted" in words
    assert "nothing to draw" in words
    assert "No row was set aside" in words


def test_a_page_where_nobody_could_be_assessed_is_whole(run_folder: Maker, a_planet: Planet) -> None:
    words = read(run_folder([a_planet(f"Riddle {place}", "unassessed") for place in range(3)]))
    assert "Of 3 planets, 3 could not be assessed." in words
    assert "nothing to draw" in words
    assert "the question does not arise" in words


@pytest.mark.parametrize("name", HOSTILE)
def test_no_name_becomes_markup(run_folder: Maker, a_planet: Planet, name: str) -> None:
    def pages(text: str) -> Page:
        line = {"row": 9, "planet_id": text, "value": text, "rule": "cells", "reason": text, "column": text}
        change = {"planet_id": text, "change": "new", "new_verdict": "bare", "because": text}
        planet = a_planet(text, priority=1.0, tsm=10.0)
        catalogue = {"path": f"/data/{text.replace('/', '')}", "bytes": 1, "sha256": "ab" * 32}
        return Page(written(run_folder([planet], [line], [change], catalogue=catalogue, previous=text)))

    hostile, harmless = pages(name), pages("Vega c")
    assert hostile.tags == harmless.tags
    assert [attribute for attribute, _ in hostile.attributes] == [attribute for attribute, _ in harmless.attributes]
    assert not set("\x00\x07\x1b\u202e") & set(hostile.words)


def test_the_page_runs_no_script_and_asks_nobody_for_anything(survey: Path) -> None:
    text = written(survey)
    page = Page(text)
    assert not {"script", "link", "iframe", "img", "object", "embed", "base", "form"} & set(page.tags)
    assert not [name for name, _ in page.attributes if name.startswith("on")]
    places = [value for name, value in page.attributes if name in ("href", "src", "action", "xlink:href")]
    assert all(value.startswith("#") for value in places)
    assert "http" not in text
    assert "@import" not in text
    assert "url(" not in text


def test_every_place_the_page_points_to_is_there_once(survey: Path) -> None:
    page = Page(written(survey))
    places = [value for name, value in page.attributes if name == "id"]
    assert len(places) == len(set(places))
    assert {value.removeprefix("#") for name, value in page.attributes if name == "href"} <= set(places)


def test_the_same_tables_give_the_same_bytes(run_folder: Maker, a_planet: Planet) -> None:
    planets = [a_planet(f"p{place}", verdict) for place, verdict in enumerate(["bare", "secondary", "envelope"] * 5)]
    first, second = run_folder(planets), run_folder(planets, seconds={"fill": 99.0})
    assert written(first) == written(second)


def test_ten_thousand_planets_make_a_page_below_two_megabytes(run_folder: Maker, a_planet: Planet) -> None:
    draw = np.random.default_rng(5)
    spread = zip((10 ** draw.uniform(0, 2.5, 10_000)).tolist(), draw.uniform(-4, 4, 10_000).tolist(), strict=True)
    verdicts = ("envelope", "secondary", "undecided", "bare")
    planets = [
        a_planet(f"Planet {place}", verdicts[place % 4], escape_speed_km_s=speed, shoreline_dex=offset)
        for place, (speed, offset) in enumerate(spread)
    ]
    text = written(run_folder(planets))
    assert len(text.encode()) < 2_000_000
    assert Page(text).tags.count("figure") == 1


THEMES = ("light", "dark")


def colours(theme: str) -> dict[str, str]:
    css = (Path(keptair.report.__file__).parent / "assets" / "report.css").read_text(encoding="utf-8")
    blocks = re.findall(r":root \{(.*?)\}", css, re.DOTALL)
    return dict(re.findall(r"--(\w+): (#[0-9a-f]{6});", blocks[THEMES.index(theme)]))


def linear(colour: str) -> np.ndarray[Any, Any]:
    values = np.array([int(colour[start : start + 2], 16) for start in (1, 3, 5)]) / 255
    return np.where(values <= 0.04045, values / 12.92, ((values + 0.055) / 1.055) ** 2.4)


def contrast(one: str, other: str) -> float:
    """Ratio of relative luminances, as WCAG 2.2 defines it."""
    dark, light = sorted(float(linear(colour) @ [0.2126, 0.7152, 0.0722]) for colour in (one, other))
    return (light + 0.05) / (dark + 0.05)


@pytest.mark.parametrize("theme", THEMES)
def test_words_and_marks_stand_out_from_the_page(theme: str) -> None:
    named = colours(theme)
    for words in ("ink", "muted"):
        assert contrast(named[words], named["paper"]) >= 4.5  # WCAG 2.2, criterion 1.4.3
    for mark in ("envelope", "secondary", "undecided", "bare", "unassessed"):
        assert contrast(named[mark], named["paper"]) >= 3  # WCAG 2.2, criterion 1.4.11


# Machado, Oliveira & Fernandes 2009, doi:10.1109/TVCG.2009.113, severity 1.0
VISION = {
    "full": np.eye(3),
    "no red": np.array(
        [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]]
    ),
    "no green": np.array(
        [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.01182, 0.04294, 0.968881]]
    ),
    "no blue": np.array(
        [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.3039]]
    ),
}


def lab(light: np.ndarray[Any, Any]) -> np.ndarray[Any, Any]:
    """CIELAB of linear sRGB under D65."""
    matrix = np.array([[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]])
    ratios = matrix @ np.clip(light, 0, 1) / [0.9505, 1, 1.089]
    x, y, z = np.where(ratios > 216 / 24389, np.cbrt(ratios), (24389 / 27 * ratios + 16) / 116)
    return np.array([116 * y - 16, 500 * (x - y), 200 * (y - z)])


@pytest.mark.parametrize("theme", THEMES)
@pytest.mark.parametrize("vision", VISION)
def test_the_verdicts_stay_apart_for_colour_blind_readers(theme: str, vision: str) -> None:
    named = colours(theme)
    seen = {name: lab(VISION[vision] @ linear(named[name])) for name in ("envelope", "secondary", "undecided", "bare")}
    for one, other in combinations(seen, 2):
        assert np.linalg.norm(seen[one] - seen[other]) >= 20, (one, other)
