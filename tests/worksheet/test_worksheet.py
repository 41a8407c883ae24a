"""The worked sheet says what the table says, and where each number came from."""

import json

import numpy as np
import pytest

import keptair
from keptair.errors import NotThereError
from keptair.worksheet import rendering, trace, worked_sheet

SURVEY = "sample_data/survey.csv"


@pytest.fixture(scope="module")
def run(tmp_path_factory, request):
    survey = request.config.rootpath / SURVEY
    return keptair.run(survey, tmp_path_factory.mktemp("runs"), settings=None).path


@pytest.fixture(scope="module")
def planets(run):
    return keptair.load(run).set_index("planet_id")


def chosen(planets):
    """A planet of every verdict and reason."""
    return planets.groupby(["verdict", "verdict_reason"]).head(1).index


def test_every_number_of_the_sheet_is_the_published_one_to_rounding(run, planets):
    compared = 0
    for planet in chosen(planets):
        sheet = worked_sheet(planet, run)
        assert sheet.remarks == ()
        for step in (step for section in sheet.sections for step in section.steps if step.column):
            published = planets.loc[planet, step.column]
            as_catalogued = planets.loc[planet].get(f"{step.column}_source") in ("measured", "measured_no_error")
            ours = step.percentiles[1] if step.percentiles and not as_catalogued else step.value
            if isinstance(published, str):
                assert ours == published, (planet, step.column)
            elif ours is None or ours == "None":
                assert np.isnan(published), (planet, step.column)
            else:
                assert ours == pytest.approx(published, rel=2e-7, abs=1e-37), (planet, step.column)
            compared += 1
    assert compared > 200


def test_the_traces_of_the_sheet_are_those_of_the_table_of_gases(run, planets):
    planet = planets.index[planets["verdict"] == "secondary"][0]
    gases = keptair.load(run, "gases")
    background = planets.loc[planet, "background"]
    mine = gases[(gases["planet_id"] == planet) & (gases["background"] == background)].set_index("gas")
    section = next(
        one for one in worked_sheet(planet, run).sections if one.title.startswith(f"Traces under {background}")
    )
    for gas, *numbers, retention, limit in section.rows:
        names = ("jeans_parameter", "speed_ratio", "jeans_flux_m2_s", "supply_flux_m2_s", "loss_rate_kg_s")
        for name, ours in zip((*names, "escape_time_gyr"), numbers, strict=True):
            published = mine.loc[gas, name]
            assert (np.isnan(published) and ours is None) or ours == pytest.approx(published, rel=2e-7, abs=1e-37)
        assert retention == pytest.approx(mine.loc[gas, "retention"], rel=2e-7)
        assert limit == mine.loc[gas, "limited_by"]


def test_the_text_fits_eighty_columns_and_holds_every_section(run, planets):
    for planet in chosen(planets):
        text = trace(planet, run)
        too_wide = [line for line in text.splitlines() if len(line) > 80 and str(run) not in line]
        assert too_wide == []
        assert "Verdict" in text


def test_json_and_markdown_tell_the_same(run, planets):
    planet = planets.index[0]
    sheet = worked_sheet(planet, run)
    told = json.loads(rendering.as_json(sheet))
    assert told["planet"] == planet
    assert [section["title"] for section in told["sections"]] == [section.title for section in sheet.sections]
    markdown = rendering.as_markdown(sheet)
    assert all(f"## {section.title}" in markdown for section in sheet.sections)


def test_a_planet_that_is_not_there_is_said_with_its_neighbours(run, planets):
    name = planets.index[0]
    with pytest.raises(NotThereError, match="did you mean") as caught:
        worked_sheet(name.upper(), run)
    assert name in str(caught.value)
    assert caught.value.exit_code == 2
