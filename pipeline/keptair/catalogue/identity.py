"""Rows that share a planet_id: which one stays."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from keptair import fingerprint
from keptair.tables import rules, schema

Array = NDArray[Any]
Rank = tuple[float, int, str, int]


class Identifiers:
    """All identifiers of a catalogue in eight bytes each: enough to know which may stand there twice."""

    def __init__(self) -> None:
        self._hashes: list[NDArray[np.int64]] = []

    def add(self, identifiers: Array) -> None:
        named = [identifier for identifier in identifiers if identifier]
        self._hashes.append(np.fromiter(map(hash, named), dtype=np.int64, count=len(named)))

    def repeated(self) -> set[int]:
        """Hashes that occur more than once. Different names may share one; who reads on compares the names."""
        if not self._hashes:
            return set()
        values, counts = np.unique(np.concatenate(self._hashes), return_counts=True)
        return set(values[counts > 1].tolist())


class Duplicates:
    """The rows that go, and for each the row that stays: newest, then fullest, then smallest content hash."""

    def __init__(self, pieces: Iterable[Mapping[str, Array]], repeated: set[int]) -> None:
        best: dict[str, Rank] = {}
        seen: list[tuple[str, int]] = []
        for piece in pieces:
            candidates = _candidates(piece, repeated)
            if not len(candidates):
                continue
            chosen = {name: values[candidates] for name, values in piece.items()}
            for identifier, rank in zip(chosen["read.planet_id"], _ranks(chosen), strict=True):
                seen.append((identifier, -rank[3]))
                if identifier not in best or rank > best[identifier]:
                    best[identifier] = rank
        pairs = [(row, -best[identifier][3]) for identifier, row in seen if row != -best[identifier][3]]
        self._gone = np.array([row for row, _ in pairs], dtype=np.int64)
        self._stays = np.array([row for _, row in pairs], dtype=np.int64)

    def __len__(self) -> int:
        return len(self._gone)

    def of(self, rows: NDArray[np.int64]) -> NDArray[np.int64]:
        """For each row the one that stays in its stead, 0 where it stays itself."""
        if not len(self._gone):
            return np.zeros(len(rows), dtype=np.int64)
        places = np.minimum(np.searchsorted(self._gone, rows), len(self._gone) - 1)
        return np.where(self._gone[places] == rows, self._stays[places], 0)


def _candidates(piece: Mapping[str, Array], repeated: set[int]) -> NDArray[np.int64]:
    names, sound = piece["read.planet_id"], piece["wrong_cells"] == 0
    longest = schema.catalogue()["planet_id"].max_length
    hits = [
        place
        for place, name in enumerate(names)
        if name and sound[place] and len(name) <= longest and hash(name) in repeated
    ]
    return np.array(hits, dtype=np.int64)


def _ranks(read: Mapping[str, Array]) -> list[Rank]:
    """What decides, the greatest stays: time of update, inputs filled, content hash reversed, row reversed."""
    clean = rules.empty_broken_cells(read).columns
    updated = [rules.timestamp(text) if text else None for text in clean["updated"]]
    numbers = [~np.isnan(clean[f"catalogue.{name}"]) for name in schema.measured_inputs()]
    texts = [clean[name] != "" for name in ("host_id", "transits", "catalogue.background")]
    filled = np.sum([*numbers, *texts], axis=0)
    hashes = fingerprint.of_rows({**clean, **_given(read)}, "")
    return [
        (-np.inf if moment is None else moment, int(count), _reversed(digest), -int(row))
        for moment, count, digest, row in zip(updated, filled, hashes, read["row"], strict=True)
    ]


def _reversed(digest: str) -> str:
    """A text of hexadecimal digits that sorts the other way round."""
    return digest.translate(str.maketrans("0123456789abcdef", "fedcba9876543210"))


def _given(read: Mapping[str, Array]) -> dict[str, Array]:
    return {name: values for name, values in read.items() if name.startswith("given.")}
