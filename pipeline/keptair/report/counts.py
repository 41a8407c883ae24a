"""What the report counts: verdicts, sources, second opinions, flags, each a plain record made from the tables."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from keptair.report import words
from keptair.settings import Settings, Verdict
from keptair.tables import schema

if TYPE_CHECKING:
    import pyarrow as pa

JUDGED = ("secondary", "undecided", "bare")  # verdicts that rest on the secondary background


@dataclass(frozen=True)
class VerdictCount:
    verdict: str
    planets: int
    reasons: tuple[tuple[str, int], ...]


def verdicts(planets: pa.Table) -> list[VerdictCount]:
    """Every verdict, also one nobody has, with its reasons, the commonest first."""
    found = tally(planets, "verdict", "verdict_reason")
    counted = []
    for verdict in words.VERDICTS:
        reasons = {reason: number for (name, reason), number in found.items() if name == verdict}
        counted.append(VerdictCount(verdict, sum(reasons.values()), _commonest_first(reasons)))
    return counted


@dataclass(frozen=True)
class SourceCount:
    """How the values of one input came about; `sources` in the order of the schema's enum."""

    name: str
    sources: tuple[tuple[str, int], ...]


def sources(planets: pa.Table, names: Iterable[str]) -> list[SourceCount]:
    counted = []
    for name in names:
        found = {key[0]: number for key, number in tally(planets, f"{name}_source").items()}
        counted.append(SourceCount(name, tuple((kind, found[kind]) for kind in words.SOURCES if kind in found)))
    return counted


@dataclass(frozen=True)
class ExcessHeat:
    """Verdicts as they are, and as they would be if excess heat were radiated."""

    judged: int
    moves: tuple[tuple[str, str, int], ...]  # published, radiated, planets

    @property
    def differ(self) -> int:
        return sum(number for *_, number in self.moves)


def excess_heat(planets: pa.Table, thresholds: Verdict) -> ExcessHeat:
    published = planets["verdict"].to_pylist()
    radiative = numbers(planets, "secondary_probability_radiative")
    moves = Counter(
        (verdict, judged_by(float(chance), thresholds))
        for verdict, chance in zip(published, radiative, strict=True)
        if verdict in JUDGED and np.isfinite(chance)
    )
    differing = {pair: number for pair, number in moves.items() if pair[0] != pair[1]}
    ordered = sorted(differing.items(), key=lambda item: (-item[1], item[0]))
    return ExcessHeat(sum(moves.values()), tuple((old, new, number) for (old, new), number in ordered))


def judged_by(chance: float, thresholds: Verdict) -> str:
    """The verdict a chance of keeping the secondary background stands for."""
    if chance <= thresholds.lose:
        return "bare"
    return "secondary" if chance >= thresholds.keep else "undecided"


@dataclass(frozen=True)
class Opinion:
    """How the two rough rules see the planets of one verdict."""

    verdict: str
    planets: int
    quick_kept: int
    quick_lost: int
    shoreline_air: int
    shoreline_bare: int

    @property
    def parted_from_quick_rule(self) -> int:
        return {"secondary": self.quick_lost, "bare": self.quick_kept}.get(self.verdict, 0)

    @property
    def parted_from_shoreline(self) -> int:
        return {"secondary": self.shoreline_bare, "bare": self.shoreline_air}.get(self.verdict, 0)


def opinions(planets: pa.Table) -> list[Opinion]:
    quick = tally(planets, "verdict", "quick_rule_verdict")
    offset = numbers(planets, "shoreline_dex")
    verdict = np.array(planets["verdict"].to_pylist(), dtype=object)
    return [
        Opinion(
            name,
            int((verdict == name).sum()),
            quick.get((name, "secondary"), 0),
            quick.get((name, "bare"), 0),
            int(((verdict == name) & (offset < 0)).sum()),
            int(((verdict == name) & (offset >= 0)).sum()),
        )
        for name in JUDGED
    ]


@dataclass(frozen=True)
class FlagCount:
    flag: schema.Flag
    planets: int


def flags(planets: pa.Table) -> list[FlagCount]:
    """The whole legend, also flags nobody has."""
    mask = planets["flags"].to_numpy()
    return [FlagCount(flag, int((mask >> flag.bit & 1).sum())) for flag in schema.flags()]


@dataclass(frozen=True)
class BackgroundCount:
    key: str
    title: str
    planets: int
    given: int
    verdicts: tuple[tuple[str, int], ...]


def backgrounds(planets: pa.Table, settings: Settings) -> list[BackgroundCount]:
    """The gases behind the exobase columns, the commonest first."""
    found = tally(planets, "background", "background_source", "verdict")
    counted = []
    for key in {key for key, *_ in found if key}:
        rows = [(source, verdict, number) for (name, source, verdict), number in found.items() if name == key]
        by_verdict: Counter[str] = Counter()
        for _, verdict, number in rows:
            by_verdict[verdict] += number
        known = settings.backgrounds.get(key)
        given = sum(number for source, _, number in rows if source == "given")
        ordered = tuple((verdict, by_verdict[verdict]) for verdict in words.VERDICTS if verdict in by_verdict)
        counted.append(BackgroundCount(key, known.title if known else key, by_verdict.total(), given, ordered))
    return sorted(counted, key=lambda background: (-background.planets, background.key))


@dataclass(frozen=True)
class Exobases:
    """Rows whose exobase columns say less than they seem to."""

    envelopes: int
    envelopes_at_limit: int
    without_altitude: int


def exobases(planets: pa.Table, settings: Settings) -> Exobases:
    envelope = np.array([verdict == "envelope" for verdict in planets["verdict"].to_pylist()], dtype=bool)
    temperature = numbers(planets, "exobase_temperature_k")
    at_limit = temperature >= np.float32(settings.conduction_limit_k)  # as exact as the column is
    no_altitude = np.isfinite(temperature) & np.isnan(numbers(planets, "exobase_altitude_km"))
    return Exobases(int(envelope.sum()), int((envelope & at_limit).sum()), int(no_altitude.sum()))


@dataclass(frozen=True)
class Change:
    """A setting that is not the default."""

    name: str
    value: Any
    default: Any
    origin: str


def changed_settings(settings: Settings) -> list[Change]:
    """Those that can change a number; the others leave no trace in a run."""
    mine, built_in = _flat(settings.numbers()), _flat(Settings().numbers())
    names = [*mine, *(name for name in built_in if name not in mine)]
    return [
        Change(name, mine.get(name), built_in.get(name), _origin(settings, name))
        for name in names
        if name not in mine or name not in built_in or mine[name] != built_in[name]
    ]


def _origin(settings: Settings, name: str) -> str:
    origin = settings.origin(name)
    return "given in Python" if origin == "default" else origin


def tally(table: pa.Table, *names: str) -> dict[tuple[str, ...], int]:
    """How often each combination of these columns stands in the table, in a fixed order."""
    grouped = table.group_by(list(names)).aggregate([([], "count_all")]).to_pylist()
    return dict(sorted((tuple(row[name] for name in names), row["count_all"]) for row in grouped))


def numbers(table: pa.Table, name: str) -> np.ndarray[Any, np.dtype[np.float64]]:
    """A column with NaN where it is null."""
    return np.asarray(table[name].to_numpy(), dtype=np.float64)


def _commonest_first(found: dict[str, int]) -> tuple[tuple[str, int], ...]:
    return tuple(sorted(found.items(), key=lambda item: (-item[1], item[0])))


def _flat(values: dict[str, Any], prefix: str = "") -> dict[str, Any]:
    flat: dict[str, Any] = {}
    for name, value in values.items():
        flat |= _flat(value, f"{prefix}{name}.") if isinstance(value, dict) else {prefix + name: value}
    return flat
