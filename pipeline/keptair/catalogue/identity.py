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
        rows, hashes = np.concatenate(self._rows), np.concatenate(self._hashes)
        _, first = np.unique(hashes, return_index=True)  # each name once
        plain = np.concatenate(self._plain_hashes)[first]
        order = np.argsort(plain, kind="stable")
        alike = np.flatnonzero(np.diff(plain[order]) == 0)
        if not len(alike):
            return []
        pairs = [sorted((int(rows[first[order[place]]]), int(rows[first[order[place + 1]]]))) for place in alike]
        one, other = min(pairs)
        count = f"{len(pairs)} names differ" if len(pairs) > 1 else "1 name differs"
        return [f"{count} from another only in case, blanks or hyphens, first in rows {one} and {other}"]


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
