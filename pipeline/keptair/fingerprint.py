"""A planet's fingerprint: equal only if its numbers would come out equal."""

from __future__ import annotations

import hashlib
import json
import platform
from collections.abc import Iterator, Mapping
from functools import cache
from importlib import import_module, resources
from importlib.resources.abc import Traversable
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from keptair.tables import schema

if TYPE_CHECKING:
    from keptair.settings import Settings

CODE = ("draws.py", "physics", "reference", "stages")  # what can change a number
LENGTH = 16  # hexadecimal digits


def context(settings: Settings) -> str:
    """SHA-256 of everything but the row: settings, code, reference values, bounds, libraries, processor."""
    said = json.dumps(settings.numbers(), sort_keys=True, ensure_ascii=True)
    return hashlib.sha256(f"{said}\n{_machinery()}".encode()).hexdigest()


def of_rows(columns: Mapping[str, NDArray[Any]], context: str) -> NDArray[np.object_]:
    """16 hexadecimal digits for each screened row.

    The canonical row in schema order, as little-endian float64 and length-prefixed UTF-8; `row`, `updated` and carried
    columns are not in it.
    """
    names = [column.name for column in schema.inputs() if column.name != "updated"]
    start = hashlib.sha256("\n".join([context, *names]).encode())
    numbers = _number_bytes(columns)
    texts = [columns[name] for name in _text_columns()]
    result = np.empty(len(numbers), dtype=object)
    for place, row in enumerate(numbers):
        digest = start.copy()
        digest.update(row.tobytes())
        digest.update(b"".join(_prefixed(values[place]) for values in texts))
        result[place] = digest.hexdigest()[:LENGTH]
    return result


def _number_bytes(columns: Mapping[str, NDArray[Any]]) -> NDArray[Any]:
    """Values, errors and marks of every row, side by side; every NaN has the same bits, and -0 is 0."""
    nothing = np.zeros(len(columns["planet_id"]), dtype=bool)
    parts = []
    for name in schema.measured_inputs():
        parts += [columns[f"catalogue.{name}"], columns[f"{name}_err_plus"], columns[f"{name}_err_minus"]]
        parts.append(columns.get(f"given.{name}", nothing))
    parts.append(columns.get("flag.cell_emptied", nothing))  # a published flag, so a part of the result
    matrix = np.column_stack(parts).astype("<f8") + 0.0
    matrix[np.isnan(matrix)] = np.nan
    return np.ascontiguousarray(matrix)


def _text_columns() -> list[str]:
    own = [column.name for column in schema.inputs() if column.type == "string" and column.name != "updated"]
    texts = ["catalogue.background" if name == "background" else name for name in own]
    return texts + [f"{name}_bound" for name in schema.measured_inputs()]


def _prefixed(text: str) -> bytes:
    coded = text.encode("utf-8", errors="surrogatepass")
    return len(coded).to_bytes(4, "little") + coded


@cache
def _machinery() -> str:
    import scipy

    digest = hashlib.sha256()
    package = resources.files("keptair")
    for name in CODE:
        for path, content in _files(package / name, name):
            digest.update(f"{path} {len(content)}\n".encode())
            digest.update(content)
    limits = [(column.name, column.minimum, column.maximum, column.exclusive_minimum) for column in schema.inputs()]
    digest.update(json.dumps([limits, np.__version__, scipy.__version__, _processor()]).encode())
    return digest.hexdigest()


def _files(place: Traversable, path: str) -> Iterator[tuple[str, bytes]]:
    """Every file below a place, in the order of their names; compiled ones are left out."""
    if place.is_file():
        yield path, place.read_bytes()
    elif place.is_dir():
        for child in sorted(place.iterdir(), key=lambda child: child.name):
            if child.name != "__pycache__":
                yield from _files(child, f"{path}/{child.name}")


def _processor() -> list[str]:
    """What numpy chooses its kernels by."""
    try:
        features: Mapping[str, bool] = import_module("numpy._core._multiarray_umath").__cpu_features__
    except (ImportError, AttributeError):  # it is numpy's own business where they are kept
        return [platform.machine()]
    return sorted(name for name, there in features.items() if there)
