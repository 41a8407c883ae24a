"""What `import keptair` offers, and what it costs."""

import ast
import importlib
import inspect
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


def test_type_checkers_see_every_public_name():
    tree = ast.parse(inspect.getsource(keptair))
    checked = next(node for node in tree.body if isinstance(node, ast.If))
    seen = {alias.name for node in checked.body if isinstance(node, ast.ImportFrom) for alias in node.names}
    assert ast.unparse(checked.test) == "TYPE_CHECKING"
    assert seen == set(keptair.__all__) - {"__version__"}


@pytest.mark.parametrize(
    ("name", "arguments"),
    [
        (
            "run",
            {"catalogue": ..., "out": ..., "settings": None, "column_map": None, "workers": None, "executor": None},
        ),
        ("load", {"where": ..., "table": "planets", "as_": "pandas"}),
    ],
)
def test_functions_take_what_is_promised(name, arguments):
    taken = inspect.signature(getattr(keptair, name)).parameters.values()
    found = {given.name: ... if given.default is given.empty else given.default for given in taken}
    assert arguments.items() <= found.items()


def test_any_other_name_is_no_attribute():
    with pytest.raises(AttributeError, match="module 'keptair' has no attribute 'Setings'"):
        _ = keptair.Setings


@pytest.mark.parametrize("module", ["keptair", "keptair.cli", "keptair.errors"])
def test_importing_it_loads_nothing_heavy(module):
    code = f"import sys, {module}; print([name for name in {HEAVY} if name in sys.modules])"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
