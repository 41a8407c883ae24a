"""The picture of a run: where every planet lies about the cosmic shoreline, as positions in percent of a frame.

Positions in percent let the page draw the same picture at any width without shrinking its letters.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from keptair.physics.shoreline import MARS_ESCAPE_SPEED, MARS_INSOLATION
from keptair.report import counts, words

if TYPE_CHECKING:
    import pyarrow as pa

Floats = NDArray[np.float64]

MARS = (MARS_ESCAPE_SPEED / 1000, MARS_INSOLATION)  # km/s, Earth's insolation; the shoreline goes through it
EARTH = (11.186, 1.0)  # JPL Planetary Physical Parameters
STEEPNESS = 4  # of the shoreline: insolation goes as escape speed to this power

CROWD = 1500  # above so many planets each verdict has a panel of its own, and marks no names
EDGES = (0.01, 0.99)  # quantiles a crowd's frame reaches to; the few beyond stand on its edge
CELL = 0.5  # percent of the frame: in a crowd, planets within one cell share a mark
PAPER = (640.0, 420.0)  # size in pixels at which labels are kept apart
LETTER = (7.5, 15.0)


@dataclass(frozen=True)
class Tick:
    at: str
    label: str


@dataclass(frozen=True)
class Axis:
    """A logarithmic axis over [10^low, 10^high], running to the right or, `upward`, from the bottom."""

    low: float
    high: float
    upward: bool = False

    def place(self, values: Floats | float) -> Floats:
        share = (np.log10(values) - self.low) / (self.high - self.low)
        return np.asarray(100 * (1 - share if self.upward else share))

    @property
    def ticks(self) -> list[Tick]:
        """Powers of ten, no more than eight; between them 2 and 5 where there are few."""
        first, last = math.ceil(self.low - 1e-9), math.floor(self.high + 1e-9)
        step = max(1, math.ceil((last - first + 1) / 8))
        marked = [(power, 1) for power in range(first, last + 1) if power % step == 0]
        if self.high - self.low < 2.2:
            marked = [(power, digit) for power in range(first - 1, last + 1) for digit in (1, 2, 5)]
        logs = [(power + math.log10(digit), power, digit) for power, digit in marked]
        return [
            Tick(percent(float(self.place(10**log))), _tick_label(power, digit))
            for log, power, digit in logs
            if self.low <= log <= self.high
        ]


@dataclass(frozen=True)
class Mark:
    x: str
    y: str
    name: str  # "" in a crowd


@dataclass(frozen=True)
class Layer:
    """Marks of one verdict; `strength` 1 to 3 says how many planets one of them stands for."""

    verdict: str
    strength: int
    marks: tuple[Mark, ...]


@dataclass(frozen=True)
class Panel:
    verdict: str  # "" where all share one panel
    planets: int
    layers: tuple[Layer, ...]


@dataclass(frozen=True)
class Label:
    x: str
    y: str
    dx: int
    dy: int
    anchor: str
    text: str


@dataclass(frozen=True)
class Picture:
    x_axis: Axis
    y_axis: Axis
    line: list[str]  # x1, y1, x2, y2
    line_label: Label
    references: tuple[Label, ...]
    panels: tuple[Panel, ...]
    crowd: str  # path of all planets in a frame of 1000 by 1000, behind each panel; "" where there is only one
    names: tuple[Label, ...]
    drawn: int
    left_out: int
    on_the_edge: int
    mars: tuple[float, float] = MARS


def shoreline(planets: pa.Table, marked: Mapping[str, str] = MappingProxyType({})) -> Picture | None:
    """The picture; `marked` has the planets to be named and what to call them. None if there is nothing to draw.

    Insolation is taken back from `shoreline_dex`, so the distance to the line is the published one.
    """
    speed = counts.numbers(planets, "escape_speed_km_s")
    offset = counts.numbers(planets, "shoreline_dex")
    speed = np.where(speed > 0, speed, np.nan)
    light = line_at(speed) * 10**offset
    usable = np.isfinite(speed) & np.isfinite(light) & (light > 0)
    if not usable.any():
        return None
    name, verdict = (planets[column].to_numpy(zero_copy_only=False)[usable] for column in ("planet_id", "verdict"))
    speed, light = speed[usable], light[usable]
    crowded = len(speed) > CROWD
    x_axis, y_axis = _axis(speed, (MARS[0], EARTH[0]), crowded), _axis(light, (MARS[1], EARTH[1]), crowded, upward=True)
    x, y = x_axis.place(speed), y_axis.place(light)
    outside = (np.minimum(x, y) < 0) | (np.maximum(x, y) > 100)
    x, y = np.clip(x, 0, 100), np.clip(y, 0, 100)
    line = _line(x_axis, y_axis)
    places = {planet: (float(x[index]), float(y[index])) for index, planet in enumerate(name) if planet in marked}
    references = tuple(
        Label(percent(float(x_axis.place(at[0]))), percent(float(y_axis.place(at[1]))), dx, dy, anchor, text)
        for text, at, dx, dy, anchor in (("Earth", EARTH, 7, -5, "start"), ("Mars", MARS, -2, -9, "middle"))
    )
    return Picture(
        x_axis,
        y_axis,
        [percent(end) for end in line],
        _beside(line),
        references,
        _panels(x, y, name, verdict, crowded),
        _crowd_path(x, y) if crowded else "",
        () if crowded else _mark_labels(places, marked),
        len(x),
        len(usable) - len(x),
        int(outside.sum()),
    )


def line_at(speed: Floats | float) -> Any:
    """Insolation of the cosmic shoreline [Earth's] at an escape speed [km/s]."""
    return MARS[1] * (speed / MARS[0]) ** STEEPNESS


def percent(share: float) -> str:
    return f"{share:.2f}".rstrip("0").rstrip(".") + "%"


def _axis(values: Floats, always: tuple[float, float], crowded: bool, upward: bool = False) -> Axis:
    ends = np.quantile(values, EDGES) if crowded else values
    logs = np.log10(np.append(ends, always))
    low, high = float(logs.min()), float(logs.max())
    margin = 0.04 * (high - low)
    return Axis(low - margin, high + margin, upward)


def _tick_label(power: int, digit: int) -> str:
    if -3 <= power <= 3:
        return f"{digit * 10.0**power:.{max(-power, 0)}f}"
    return ("" if digit == 1 else f"{digit}×") + "10" + words.superscript(power)


def _line(x_axis: Axis, y_axis: Axis) -> tuple[float, float, float, float]:
    """The shoreline within the frame. It crosses it: both axes hold Mars, which lies on it."""
    low = max(10**x_axis.low, _speed_at(10**y_axis.low))
    high = min(10**x_axis.high, _speed_at(10**y_axis.high))
    ends = [
        float(axis.place(value)) for speed in (low, high) for axis, value in ((x_axis, speed), (y_axis, line_at(speed)))
    ]
    return ends[0], ends[1], ends[2], ends[3]


def _speed_at(light: float) -> float:
    return float(MARS[0] * (light / MARS[1]) ** (1 / STEEPNESS))


def _beside(line: tuple[float, float, float, float]) -> Label:
    """The line's name by its lower end, on the side where air is kept."""
    x1, y1, x2, y2 = line
    at = 0.12
    return Label(percent(x1 + at * (x2 - x1)), percent(y1 + at * (y2 - y1)), 10, 12, "start", "cosmic shoreline")


def _panels(x: Floats, y: Floats, name: NDArray[Any], verdict: NDArray[Any], crowded: bool) -> tuple[Panel, ...]:
    layers = {}
    sizes = {}
    for key in words.VERDICTS:
        mine = verdict == key
        if mine.any():
            sizes[key] = int(mine.sum())
            layers[key] = _shared(x[mine], y[mine], key) if crowded else (_named(x[mine], y[mine], name[mine], key),)
    if crowded:
        return tuple(Panel(key, sizes[key], layers[key]) for key in layers)
    rarest_last = sorted(layers, key=lambda key: -sizes[key])
    return (Panel("", len(x), tuple(layer for key in rarest_last for layer in layers[key])),)


def _named(x: Floats, y: Floats, name: NDArray[Any], verdict: str) -> Layer:
    return Layer(
        verdict,
        3,
        tuple(
            Mark(percent(left), percent(top), words.visible(text))
            for left, top, text in zip(x.tolist(), y.tolist(), name.tolist(), strict=True)
        ),
    )


def _shared(x: Floats, y: Floats, verdict: str) -> tuple[Layer, ...]:
    """One mark for each cell with planets in it, the fuller ones stronger and on top."""
    cells = np.stack([np.round(x / CELL), np.round(y / CELL)], axis=1)
    taken, number = np.unique(cells, axis=0, return_counts=True)
    strength = 1 + (number > 1).astype(int) + (number > 4).astype(int)
    return tuple(
        Layer(
            verdict,
            level,
            tuple(
                Mark(percent(left * CELL), percent(top * CELL), "") for left, top in taken[strength == level].tolist()
            ),
        )
        for level in (1, 2, 3)
        if (strength == level).any()
    )


def _crowd_path(x: Floats, y: Floats) -> str:
    """A dot for every cell any planet lies in, as strokes of no length."""
    cells = np.unique(np.stack([np.round(x / CELL), np.round(y / CELL)], axis=1), axis=0) * CELL * 10
    return "".join(f"M{left:.0f} {top:.0f}h0" for left, top in cells.tolist())


def _mark_labels(places: Mapping[str, tuple[float, float]], marked: Mapping[str, str]) -> tuple[Label, ...]:
    """Names beside their marks, on the first side that is free; one with no room is left out."""
    labels: list[Label] = []
    taken: list[tuple[float, float, float]] = []
    for planet, text in marked.items():
        if planet not in places:
            continue
        x, y = places[planet]
        breadth = LETTER[0] * len(text)
        for dx, dy, anchor in ((8, 5, "start"), (-8, 5, "end"), (0, -8, "middle"), (0, 19, "middle")):
            left = x / 100 * PAPER[0] + dx - {"start": 0.0, "end": breadth, "middle": breadth / 2}[anchor]
            base = y / 100 * PAPER[1] + dy
            if all(
                left + breadth < other_left or other_right < left or abs(base - other_base) > LETTER[1]
                for other_left, other_right, other_base in taken
            ):
                taken.append((left, left + breadth, base))
                labels.append(Label(percent(x), percent(y), dx, dy, anchor, text))
                break
    return tuple(labels)
