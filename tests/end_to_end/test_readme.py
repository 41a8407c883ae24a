"""The README says what the tool says."""

from __future__ import annotations

import re
import subprocess
import sys

import pytest


@pytest.fixture(scope="module")
def readme(request):
    return (request.config.rootpath / "README.md").read_text(encoding="utf-8")


@pytest.fixture(scope="module")
def tour(request, tmp_path_factory):
    """The commands of the tour, run in an empty folder beside the sample; what each printed on both streams."""
    place = tmp_path_factory.mktemp("tour")
    (place / "sample_data").symlink_to(request.config.rootpath / "sample_data")

    def keptair(*arguments):
        command = [sys.executable, "-m", "keptair", *arguments]
        done = subprocess.run(command, cwd=place, capture_output=True, text=True, check=True)
        return done.stdout + done.stderr

    return {
        "run": keptair("run", "sample_data/survey.csv", "--out", "runs"),
        "targets": keptair("targets", "runs", "--verdict", "secondary", "undecided", "--top", "4"),
        "trace": keptair("trace", "Dreveriel e", "runs"),
        "dirty": keptair("run", "sample_data/survey_dirty.csv", "--out", "runs_dirty"),
    }


@pytest.mark.parametrize("name", ["run", "targets"])
def test_the_tour_prints_what_the_readme_shows(tour, readme, name):
    changing = re.compile(r"\d{8}T\d{6}Z-[0-9a-f]{8}|^\d+\.\d s$", re.MULTILINE)  # run names and seconds
    shown = changing.sub("…", readme)
    assert changing.sub("…", tour[name]).strip() in shown


def test_the_worked_sheet_and_the_dirty_survey_are_as_shown(tour, readme):
    sheet = re.search(r"^T_eq.*\n.*\n.*$", tour["trace"], re.MULTILINE)
    assert sheet is not None
    assert sheet[0] in readme
    assert tour["dirty"].splitlines()[1] in readme


def test_the_first_paragraph_states_the_job_and_the_limits_are_said(readme):
    first = readme.split("\n\n")[1]
    for word in ("catalogue", "atmosphere", "thermal", "escape", "Parquet", "report"):
        assert word in first
    for left_out in ("ion pickup", "sputtering", "stellar wind", "upper bound", "does not replace"):
        assert left_out in readme
