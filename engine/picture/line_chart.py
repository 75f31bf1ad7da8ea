"""Curves against distance on paper: axes, curves told apart by dashes, a key."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.iso_lines import round_values
from engine.picture.marks import BLACK, GREY, PALE, Picture, Points, Stroke, Words
from engine.printed_text import fitted, one_line

Floats = NDArray[np.float64]

LEFT, BOTTOM, TOP = 16.0, 10.0, 3.0
SIZE, STEP = 2.2, 3.4

#: Curves in one chart; more are left to the attached numbers.
MOST_CURVES = 8

#: Patterns that tell curves apart without colour.
DASHES: tuple[tuple[float, float] | None, ...] = (
    None, (2.0, 0.8), (0.7, 0.7), (4.0, 1.0), (1.2, 1.6), (3.0, 3.0), (0.4, 1.4),
    (6.0, 1.5),
)  # fmt: skip


@dataclass(frozen=True, eq=False)
class ChartCurve:
    """Values (n,) along a chart, nan where there are none, and what they are."""

    values: Floats
    name: str


@dataclass(frozen=True, eq=False)
class Chart:
    """What a chart shows.

    `along` is (n,) distances in `length_unit`, values are in `unit`; `levels` are
    lines of one value with their names.
    """

    along: Floats
    curves: tuple[ChartCurve, ...]
    unit: str
    length_unit: str
    is_logarithmic: bool = True
    levels: tuple[tuple[float, str], ...] = ()


def line_chart(chart: Chart, *, width: float, height: float) -> Picture:
    """The chart with its key below. [mm]

    Raises
    ------
    ValueError
        When no curve has a value.
    """
    shown = chart.curves[:MOST_CURVES]
    entries = len(shown) + len(chart.levels)
    below = BOTTOM + STEP * entries + 2.0
    frame = _Frame(chart, (LEFT, below, width - 4.0, height - TOP))
    picture = Picture(width, height)
    _draw_axes(picture, frame)
    for value, _ in chart.levels:
        y = frame.y(value)
        if frame.bottom <= y <= frame.top:
            picture.add(Stroke(((frame.left, y), (frame.right, y)), 0.45, BLACK))
    for k, curve in enumerate(shown):
        for piece in _pieces(frame, curve.values):
            picture.add(Stroke(piece, 0.3, BLACK, DASHES[k]))
    y = below - BOTTOM - 1.0
    for k, curve in enumerate(shown):
        picture.add(Stroke(((LEFT, y), (LEFT + 14.0, y)), 0.3, BLACK, DASHES[k]))
        text = fitted(one_line(curve.name), SIZE, width - LEFT - 20.0)
        picture.add(Words((LEFT + 16.0, y), text, SIZE))
        y -= STEP
    for _, name in chart.levels:
        picture.add(Stroke(((LEFT, y), (LEFT + 14.0, y)), 0.45, BLACK))
        text = fitted(one_line(name), SIZE, width - LEFT - 20.0)
        picture.add(Words((LEFT + 16.0, y), text, SIZE))
        y -= STEP
    return picture


class _Frame:
    """Where distances and values lie on paper."""

    def __init__(self, chart: Chart, area: tuple[float, float, float, float]) -> None:
        self.chart = chart
        self.left, self.bottom, self.right, self.top = area
        every = np.concatenate([curve.values for curve in chart.curves])
        every = every[np.isfinite(every) & (every > 0)]
        if not every.size:
            raise ValueError("no curve has a value")
        largest = max([float(every.max()), *(v for v, _ in chart.levels)])
        if chart.is_logarithmic:
            lowest = max(float(every.min()), largest * 1e-5)
            self.low = 10.0 ** math.floor(math.log10(lowest))
            self.high = 10.0 ** math.ceil(math.log10(largest) + 1e-9)
        else:
            self.low, self.high = 0.0, 1.05 * largest

    def x(self, along: float) -> float:
        end = float(self.chart.along[-1]) or 1.0
        return self.left + (self.right - self.left) * along / end

    def y(self, value: float) -> float:
        if self.chart.is_logarithmic:
            share = math.log10(max(value, 1e-300) / self.low)
            share /= math.log10(self.high / self.low)
        else:
            share = (value - self.low) / (self.high - self.low)
        return self.bottom + (self.top - self.bottom) * share


def _pieces(frame: _Frame, values: Floats) -> list[Points]:
    """The parts of a curve that have values, cut at the lower edge."""
    found: list[Points] = []
    piece: list[tuple[float, float]] = []
    for along, value in zip(frame.chart.along, values, strict=True):
        if math.isfinite(value) and value >= frame.low and value > 0:
            piece.append((frame.x(float(along)), frame.y(float(value))))
        else:
            found.append(tuple(piece))
            piece = []
    found.append(tuple(piece))
    return [part for part in found if len(part) > 1]


def _draw_axes(picture: Picture, frame: _Frame) -> None:
    chart = frame.chart
    left, right, bottom, top = frame.left, frame.right, frame.bottom, frame.top
    for value in _value_ticks(frame):
        y = frame.y(value)
        picture.add(Stroke(((left, y), (right, y)), 0.1, PALE))
        text = f"{value:.6g}".replace("-", "−")
        picture.add(Words((left - 1.5, y), text, SIZE, anchor="right"))
    end = float(chart.along[-1])
    step = round_values(end / 12.0, end)[0] if end > 0 else 1.0
    for k in range(int(end / step + 1e-9) + 1):
        x = frame.x(k * step)
        picture.add(Stroke(((x, bottom), (x, bottom - 1.0)), 0.2))
        text = f"{k * step:.6g}"
        picture.add(Words((x, bottom - 2.8), text, SIZE, anchor="middle"))
    ring = ((left, bottom), (right, bottom), (right, top), (left, top), (left, bottom))
    picture.add(Stroke(ring, 0.25, GREY))
    middle = 0.5 * (left + right)
    text = f"distance along the line [{chart.length_unit}]"
    picture.add(Words((middle, bottom - 6.0), text, SIZE, anchor="middle"))
    upright = (2.0, 0.5 * (bottom + top))
    picture.add(Words(upright, f"B [{chart.unit}]", SIZE, anchor="middle", turn=90.0))


def _value_ticks(frame: _Frame) -> list[float]:
    if frame.chart.is_logarithmic:
        first, last = math.log10(frame.low), math.log10(frame.high)
        decades = range(round(first), round(last) + 1)
        ticks = [10.0**k for k in decades]
        if len(ticks) > 3:
            return ticks
        return sorted(
            value
            for tick in ticks
            for value in (tick, 2 * tick, 5 * tick)
            if frame.low <= value <= frame.high * 1.0001
        )
    step = round_values(frame.high / 8.0, frame.high)[0]
    return [k * step for k in range(int(frame.high / step + 1e-9) + 1)]
