"""Two rows have the same fingerprint only if their numbers would come out the same."""

from __future__ import annotations

import math
import sys
import zipfile
from pathlib import Path
from subprocess import run
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import keptair
from keptair import fingerprint
from keptair.settings import Settings
from keptair.tables import schema

CONTEXT = "0" * 64


def row(**changes: Any) -> dict[str, Any]:
    """One screened row, everything missing unless told."""
    columns: dict[str, Any] = {}
    for column in schema.inputs():
        if column.type == "string":
            columns["catalogue.background" if column.name == "background" else column.name] = ""
        else:
            columns |= {f"catalogue.{column.name}": math.nan, f"{column.name}_bound": ""}
            columns |= {f"{column.name}_err_plus": math.nan, f"{column.name}_err_minus": math.nan}
    columns |= changes
    return {
        name: np.array([value], dtype=object if isinstance(value, str) else None) for name, value in columns.items()
    }


def of(context: str = CONTEXT, **changes: Any) -> str:
    [digest] = fingerprint.of_rows(row(**changes), context)
    return str(digest)


def test_it_is_sixteen_hexadecimal_digits_and_the_same_every_time() -> None:
    assert of() == of()
    assert len(of()) == 16
    assert set(of()) <= set("0123456789abcdef")


@pytest.mark.parametrize("name", [name for name in row() if name not in ("updated",)])
def test_every_canonical_column_changes_it(name: str) -> None:
    changed = "x" if isinstance(row()[name][0], str) else 1.0
    assert of(**{name: changed}) != of()


def test_what_no_number_depends_on_does_not() -> None:
    assert of(updated="2024-01-01", row=7, input_note="x", fingerprint="y") == of()


def test_marks_and_context_change_it() -> None:
    assert of(**{"given.bond_albedo": True}) != of()
    assert of(**{"flag.cell_emptied": True}) != of()
    assert of(context="1" * 64) != of()


def test_texts_cannot_run_into_each_other() -> None:
    assert of(planet_id="ab", host_id="c") != of(planet_id="a", host_id="bc")


def test_zero_and_missing_have_one_form_each() -> None:
    assert of(**{"catalogue.dec_deg": -0.0}) == of(**{"catalogue.dec_deg": 0.0})
    other_nan = np.array([0x7FF8000000000001], dtype=np.uint64).view(np.float64)[0]
    assert of(**{"catalogue.dec_deg": other_nan}) == of()


@given(st.floats(allow_nan=False), st.floats(allow_nan=False))
def test_the_last_bit_of_a_number_counts(one: float, other: float) -> None:
    same = of(**{"catalogue.k_mag": one}) == of(**{"catalogue.k_mag": other})
    assert same == (one == other)


@given(st.lists(st.tuples(st.text(max_size=4), st.floats()), min_size=1, max_size=8))
def test_it_does_not_depend_on_the_neighbours(rows: list[tuple[str, float]]) -> None:
    alone = [of(planet_id=name, **{"catalogue.k_mag": value}) for name, value in rows]
    columns = {name: np.concatenate([values] * len(rows)) for name, values in row().items()}
    columns["planet_id"] = np.array([name for name, _ in rows], dtype=object)
    columns["catalogue.k_mag"] = np.array([value for _, value in rows])
    assert fingerprint.of_rows(columns, CONTEXT).tolist() == alone


def test_settings_that_change_a_number_change_the_context_and_others_do_not() -> None:
    assert fingerprint.context(Settings()) == fingerprint.context(Settings(batch_planets=7))
    assert fingerprint.context(Settings()) != fingerprint.context(Settings(seed=2))


def test_the_code_and_reference_values_are_in_the_context(monkeypatch: pytest.MonkeyPatch) -> None:
    before = fingerprint.context(Settings())
    monkeypatch.setattr(fingerprint, "CODE", ("physics", "reference", "stages"))
    fingerprint._machinery.cache_clear()
    assert fingerprint.context(Settings()) != before
    fingerprint._machinery.cache_clear()


def test_a_zipped_package_has_the_context_of_the_same_files_on_disk(tmp_path: Path) -> None:
    package = Path(keptair.__file__).parent
    archive = tmp_path / "keptair.zip"
    with zipfile.ZipFile(archive, "w") as zipped:
        for file in package.rglob("*"):
            if file.is_file() and "__pycache__" not in file.parts:
                zipped.write(file, Path("keptair") / file.relative_to(package))
        for file in (package.parents[1] / "schemas").glob("*.toml"):
            zipped.write(file, Path("keptair/schemas") / file.name)
    program = "import keptair.fingerprint as f; from keptair.settings import Settings; print(f.context(Settings()))"
    done = run(
        [sys.executable, "-c", f"import sys; sys.path.insert(0, {str(archive)!r}); {program}"],
        capture_output=True,
        text=True,
        check=True,
        cwd=tmp_path,
    )
    assert done.stdout.strip() == fingerprint.context(Settings())
