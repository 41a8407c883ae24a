"""What `import keptair` offers, and what it costs."""

import importlib
import subprocess
import sys

import pytest

import keptair

# contract: names notebooks and cron jobs rely on
PROMISED = {"run", "load", "Settings", "errors"}
HEAVY = ("numpy", "pandas", "matplotlib", "astropy", "pyarrow", "scipy", "pydantic", "rich")


def test_the_public_names_are_sorted_and_all_there():
    assert list(keptair.__all__) == sorted(keptair.__all__)
    assert set(keptair.__all__) >= PROMISED
    assert dir(keptair) == keptair.__all__
    for name in keptair.__all__:
        assert getattr(keptair, name) is not None


def test_the_public_names_are_those_of_their_homes():
    assert keptair.Settings is importlib.import_module("keptair.settings").Settings
    assert keptair.run is importlib.import_module("keptair.runs.running").run
    assert keptair.load is importlib.import_module("keptair.runs.loading").load
    assert keptair.errors is importlib.import_module("keptair.errors")


def test_any_other_name_is_no_attribute():
    with pytest.raises(AttributeError, match="module 'keptair' has no attribute 'Setings'"):
        _ = keptair.Setings


@pytest.mark.parametrize("module", ["keptair", "keptair.cli", "keptair.errors"])
def test_importing_it_loads_nothing_heavy(module):
    code = f"import sys, {module}; print([name for name in {HEAVY} if name in sys.modules])"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
