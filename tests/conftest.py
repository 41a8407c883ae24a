"""Fixtures for every test: batches made by hand and the Solar System."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import pytest

import handmade
from keptair.batch import Batch


@pytest.fixture
def make_batch() -> Callable[[Sequence[Mapping[str, Any]]], Batch]:
    """Makes a screened batch of rows written as canonical names and values; see `handmade.make_batch`."""
    return handmade.make_batch


@pytest.fixture
def solar_system() -> Callable[..., list[dict[str, Any]]]:
    """Gives rows of bodies of the Solar System for `make_batch`; see `handmade.solar_system`."""
    return handmade.solar_system
