"""Rows that share a planet_id: which one stays."""

from __future__ import annotations

import math
from array import array
from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from keptair import fingerprint
from keptair.tables import rules, schema

Array = NDArray[Any]
Rank = tuple[float, int, int, int]
BLANKS_AND_HYPHENS = dict.fromkeys(map(ord, " \t\u00a0_-\u2010\u2011\u2012\u2013\u2014\u2212"))


class Identifiers:
    """All identifiers of a catalogue in a few bytes each: enough to know which may stand there twice."""

    def __init__(self) -> None:
        nothing = np.zeros(0, dtype=np.int64)
        self._rows, self._hashes, self._plain_hashes = [nothing], [nothing], [nothing]

    def add(self, rows: NDArray[np.int64], identifiers: Array) -> None:
        named = identifiers != ""
        names = identifiers[named]
        self._rows.append(rows[named])
        self._hashes.append(np.fromiter(map(hash, names), dtype=np.int64, count=len(names)))
        plain = (hash(_plain(name)) for name in names)
        self._plain_hashes.append(np.fromiter(plain, dtype=np.int64, count=len(names)))

    def repeated(self) -> set[int]:
        """Hashes that occur more than once. Different names may share one; who reads on compares the names."""
        values, counts = np.unique(np.concatenate(self._hashes), return_counts=True)
        return set(values[counts > 1].tolist())

    def remarks(self) -> list[str]:
        """Different names that are the same but for case, blanks and hyphens: perhaps one planet, kept as two."""
        _, first = np.unique(np.concatenate(self._hashes), return_index=True)  # each name once
        rows, plain = np.concatenate(self._rows)[first], np.concatenate(self._plain_hashes)[first]
        order = np.lexsort((rows, plain))
        rows, plain = rows[order], plain[order]
        alike = np.flatnonzero(plain[1:] == plain[:-1])
        if not len(alike):
            return []
        one, other = min((int(rows[place]), int(rows[place + 1])) for place in alike)
        count = f"{len(alike)} names differ" if len(alike) > 1 else "1 name differs"
        return [f"{count} from another only in case, blanks or hyphens, first in rows {one} and {other}"]


class Duplicates:
    """The rows that go, and for each the row that stays: newest, then fullest, then smallest content hash."""

    def __init__(self, pieces: Iterable[Mapping[str, Array]], repeated: set[int]) -> None:
        groups: dict[str, int] = {}  # identifier → its place in best
        best: list[Rank] = []
        seen_rows, seen_groups = array("q"), array("q")
        for piece in pieces:
            candidates = _candidates(piece, repeated)
            if not len(candidates):
                continue
            chosen = {name: values[candidates] for name, values in piece.items()}
            for identifier, rank in zip(chosen["read.planet_id"], _ranks(chosen), strict=True):
                group = groups.setdefault(identifier, len(groups))
                if group == len(best):
                    best.append(rank)
                elif rank > best[group]:
                    best[group] = rank
                seen_rows.append(-rank[-1])
                seen_groups.append(group)
        rows, of_group = np.array(seen_rows, dtype=np.int64), np.array(seen_groups, dtype=np.int64)
        stays = np.array([-rank[-1] for rank in best], dtype=np.int64)[of_group]
        self._gone, self._stays = rows[rows != stays], stays[rows != stays]

    def __len__(self) -> int:
        return len(self._gone)

    def of(self, rows: NDArray[np.int64]) -> NDArray[np.int64]:
        """For each row the one that stays in its stead, 0 where it stays itself."""
        if not len(self._gone):
            return np.zeros(len(rows), dtype=np.int64)
        places = np.minimum(np.searchsorted(self._gone, rows), len(self._gone) - 1)
        return np.where(self._gone[places] == rows, self._stays[places], 0)


def _plain(name: str) -> str:
    return name.casefold().translate(BLANKS_AND_HYPHENS)


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
    """What decides, the greatest stays: time of update, inputs filled, content hash and row, smallest first."""
    clean = rules.empty_broken_cells(read).columns
    updated = [rules.timestamp(text) if text else None for text in clean["updated"]]
    numbers = [~np.isnan(clean[f"catalogue.{name}"]) for name in schema.measured_inputs()]
    texts = [clean[name] != "" for name in ("host_id", "transits", "catalogue.background")]
    filled = np.sum([*numbers, *texts], axis=0)
    hashes = fingerprint.of_rows({**clean, **_given(read)}, "")
    return [
        (-math.inf if moment is None else moment, int(count), -int(digest, 16), -int(row))
        for moment, count, digest, row in zip(updated, filled, hashes, read["row"], strict=True)
    ]


def _given(read: Mapping[str, Array]) -> dict[str, Array]:
    return {name: values for name, values in read.items() if name.startswith("given.")}
