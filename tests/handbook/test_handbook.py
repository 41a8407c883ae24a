"""keptair against the handbook: every check of every subject."""

from __future__ import annotations

import pytest

from handbook import __main__ as table
from handbook.check import Check
from handbook.subjects import SUBJECTS

EVERY = [check for checks in SUBJECTS.values() for check in checks]


@pytest.mark.parametrize(
    "check",
    [pytest.param(check, id=check.name, marks=pytest.mark.handbook(source=check.source)) for check in EVERY],
)
def test_keptair_agrees_with_the_handbook(check: Check) -> None:
    wanted, obtained = check.wanted(), check.obtained()
    assert check.holds(wanted, obtained), (
        f"{check.name}: {check.written(obtained)} instead of {check.written(wanted)} "
        f"(tolerance {check.tolerance()}); {check.source}"
    )


def test_the_handbook_says_what_it_must() -> None:
    names = [check.name for check in EVERY]
    assert len(EVERY) >= 70
    assert len(set(names)) == len(names)
    assert all(len(check.source) > 4 for check in EVERY)


def test_a_check_has_one_tolerance_at_most() -> None:
    for check in EVERY:
        given = (check.relative != 0, check.absolute != 0, check.factor != 1)
        assert sum(given) <= 1, check.name


@pytest.mark.parametrize(
    ("wrong", "check"),
    [
        (0.94, Check("", "", 1.0, float, relative=0.05)),
        (1.06, Check("", "", 1.0, float, absolute=0.05)),
        (2.1, Check("", "", 1.0, float, factor=2.0)),
        (3.1, Check("", "", (1.0, 3.0), float)),
        (float("nan"), Check("", "", 1.0, float, factor=1e9)),
        ("bare", Check("", "", frozenset({"secondary", "undecided"}), float)),
    ],
)
def test_a_check_that_does_not_hold_says_so(wrong: float | str, check: Check) -> None:
    assert not check.holds(check.wanted(), wrong)


def test_the_table_has_every_check_and_fits_a_page(capsys: pytest.CaptureFixture[str]) -> None:
    assert table.main() == 0
    printed = capsys.readouterr().out
    assert printed.rstrip().endswith(f"{len(EVERY)} checks, 0 fail")
    assert max(len(line) for line in printed.splitlines()) <= table.WIDTH
