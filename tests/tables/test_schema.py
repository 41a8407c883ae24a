"""The schemas and the code hold each other, in both directions."""

import inspect
import pkgutil
from importlib import import_module

import astropy.units as u
import numpy as np
import pytest

import keptair.physics
from handmade import make_batch, solar_system
from keptair import stages
from keptair.settings import Settings
from keptair.tables import dictionary, flags, schema
from keptair.tables.formulas import formula, of_function

FROM_PHYSICS = [
    column
    for name in ("planets", "gases")
    for column in schema.table(name)
    if column.derived_by.startswith("keptair.physics")
]
FORMULAS = [
    function
    for module in pkgutil.iter_modules(keptair.physics.__path__)
    for name, function in inspect.getmembers(import_module(f"keptair.physics.{module.name}"), inspect.isfunction)
    if function.__module__ == f"keptair.physics.{module.name}"
]
SPELLINGS = {"1": "", "bool": ""}


def test_the_schemas_have_no_problems():
    assert dictionary.problems() == []


def test_the_page_of_the_data_dictionary_is_current():
    page = (schema.schema_folder() / "README.md").read_text(encoding="utf-8")
    assert page == dictionary.page(), "run `make schemas`"


@pytest.fixture(scope="module")
def assessed():
    return stages.assess(make_batch(solar_system("earth", "titan", "jupiter")), Settings())


@pytest.mark.parametrize("name", ["planets", "gases"])
def test_every_column_of_the_schema_is_made_and_no_other(assessed, name):
    made = getattr(assessed, name)
    assert set(made) == set(schema.table(name).names)


def test_every_column_is_added_by_the_stage_its_schema_names(solar_system):
    batch = make_batch(solar_system("earth", "titan", "jupiter"))
    added_by = dict.fromkeys(batch.columns, "screen")
    for name, stage in stages.STAGES.items():
        after = stage(batch, Settings())
        added_by |= dict.fromkeys(after.columns.keys() - batch.columns.keys(), name)
        batch = after
    wrong = {
        column.name: (column.stage, added_by[column.name])
        for column in schema.table("planets")
        if added_by[column.name] != column.stage
    }
    assert wrong == {}


def test_no_stage_changes_what_an_earlier_one_said(solar_system):
    batch = make_batch(solar_system("mars"))
    for stage in stages.STAGES.values():
        after = stage(batch, Settings())
        assert all(after.columns[name] is values for name, values in batch.columns.items())
        assert all(after.draws[name] is values for name, values in batch.draws.items())
        batch = after


def test_every_flag_a_stage_raises_is_in_the_legend_and_every_flag_of_the_legend_is_raised_where_it_says(solar_system):
    batch = make_batch(solar_system("earth"))
    raised = {name: "screen" for name in batch.columns if name.startswith("flag.")}
    for name, stage in stages.STAGES.items():
        after = stage(batch, Settings())
        new = after.columns.keys() - batch.columns.keys()
        raised |= {column: name for column in new if column.startswith("flag.")}
        batch = after
    assert raised == {f"flag.{flag.name}": flag.stage for flag in schema.flags()}


@pytest.mark.parametrize("function", FORMULAS, ids=lambda function: f"{function.__module__[17:]}.{function.__name__}")
def test_every_formula_says_equation_units_source_and_example(function):
    told = of_function(function)
    assert told.summary.endswith(".")
    assert told.equation
    assert told.returns
    assert told.notes
    assert list(told.parameters) == list(inspect.signature(function).parameters)
    assert ">>>" in (function.__doc__ or "")


@pytest.mark.parametrize("column", FROM_PHYSICS, ids=lambda column: column.name)
def test_the_unit_of_a_column_is_that_of_its_formula(column):
    told = formula(column.derived_by).returns
    if column.derived_by.endswith("inverse_exobase_radius"):
        told = "m"  # published as a height
    assert u.Unit(column.unit).is_equivalent(u.Unit(SPELLINGS.get(told, told)))


def test_a_flag_mask_and_its_names_say_the_same():
    raised = {"cell_emptied": np.array([True, False]), "unbound": np.array([True, True])}
    mask, names = flags.pack(raised)
    bits = {flag.name: flag.bit for flag in schema.flags()}
    assert mask.tolist() == [2 ** bits["cell_emptied"] + 2 ** bits["unbound"], 2 ** bits["unbound"]]
    assert names.tolist() == ["cell_emptied unbound", "unbound"]


def test_importing_physics_imports_numpy_and_nothing_heavier():
    import subprocess
    import sys

    modules = ", ".join(sorted({function.__module__ for function in FORMULAS}))
    code = f"import sys; import {modules}; print(*sys.modules)"
    loaded = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout.split()
    heavy = {"pandas", "pyarrow", "astropy", "matplotlib", "pydantic", "keptair.settings", "keptair.batch"}
    assert heavy.isdisjoint(loaded)
