"""The built wheel, in a fresh environment without the tools of developers, does the main job."""

import json
import os
import subprocess
import sys
import venv
import zipfile

import pytest


def run(*command, **options):
    environment = {name: value for name, value in os.environ.items() if not name.startswith(("PYTHON", "VIRTUAL_ENV"))}
    return subprocess.run(command, capture_output=True, text=True, check=True, env=environment, **options).stdout


@pytest.fixture(scope="module")
def wheel(tmp_path_factory, request):
    out = tmp_path_factory.mktemp("dist")
    run(sys.executable, "-m", "build", "--outdir", str(out), str(request.config.rootpath))  # the wheel from the sdist
    return next(out.glob("*.whl"))


def test_the_wheel_holds_code_schemas_reference_data_and_the_report_template(wheel):
    names = zipfile.ZipFile(wheel).namelist()
    for part in (
        "keptair/cli.py",
        "keptair/py.typed",
        "keptair/schemas/planets.toml",
        "keptair/reference/gases.toml",
        "keptair/report/assets/report.html.j2",
    ):
        assert part in names
    assert not [name for name in names if "test" in name.lower()]


def test_the_wheel_runs_the_sample_without_extras(wheel, tmp_path, request):
    root = request.config.rootpath
    venv.create(tmp_path / "venv", with_pip=True)
    python = tmp_path / "venv" / "bin" / "python"
    pip = (python, "-m", "pip", "install", "--quiet", "--disable-pip-version-check")
    run(*pip, "--constraint", str(root / "constraints.txt"), str(wheel))
    installed = run(python, "-m", "pip", "list", "--format", "json", "--disable-pip-version-check")
    assert {"pytest", "mypy", "hypothesis"}.isdisjoint(entry["name"] for entry in json.loads(installed))
    command = tmp_path / "venv" / "bin" / "keptair"
    survey = root / "sample_data" / "survey.csv"
    folder = run(command, "run", str(survey), "--out", str(tmp_path / "out"), "--quiet", cwd=tmp_path).strip()
    rows = json.loads((tmp_path / "out" / "runs" / folder.rsplit("/", 1)[1] / "summary.json").read_text())["rows"]
    assert rows["read"] == rows["accepted"] == 400
    assert run(command, "verify", cwd=tmp_path)


def test_the_wheel_works_from_a_zip(wheel, tmp_path):
    code = (
        "from keptair.tables import schema; from keptair.settings import Settings; "
        "print(len(schema.table('planets').columns), Settings().draws)"
    )
    script = f"import sys; sys.path.insert(0, {str(wheel)!r}); {code}"
    columns, draws = run(sys.executable, "-c", script, cwd=tmp_path).split()
    assert int(columns) > 150
    assert draws == "512"
