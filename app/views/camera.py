"""From metres in a view's plane to pixels of the view, and what of it is visible."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import pairwise

from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QTransform

Point = tuple[float, float]
Leg = tuple[Point, Point]


@dataclass(frozen=True)
class Camera:
    """Where the view looks, and how near.

    Attributes
    ----------
    scale : float
        Logical pixels per metre.
    left, top : float
        Pixel place of the origin.
    width, height : float
        Of the view. [px]
    """

    scale: float
    left: float
    top: float
    width: float
    height: float

    def pixel(self, at: Sequence[float]) -> QPointF:
        """The pixel place of a place in metres."""
        return QPointF(self.left + self.scale * at[0], self.top - self.scale * at[1])

    def metres(self, at: QPointF) -> Point:
        """The place in metres under a pixel place."""
        return ((at.x() - self.left) / self.scale, (self.top - at.y()) / self.scale)

    def transform(self) -> QTransform:
        """The same as `pixel`, for paths."""
        return QTransform(self.scale, 0.0, 0.0, -self.scale, self.left, self.top)

    @property
    def frame(self) -> QRectF:
        """The view. [px]"""
        return QRectF(0.0, 0.0, self.width, self.height)

    @property
    def visible(self) -> QRectF:
        """What of the plane shows; y runs upwards in it. [m]"""
        x0, y1 = self.metres(QPointF(0.0, 0.0))
        return QRectF(
            x0,
            y1 - self.height / self.scale,
            self.width / self.scale,
            self.height / self.scale,
        )

    def visible_legs(self, line: Sequence[Point]) -> list[Leg]:
        """The parts of a line that show, in pixels, in its direction."""
        found = []
        for a, b in pairwise(line):
            leg = clipped(self._plain(a), self._plain(b), self.width, self.height)
            if leg is not None:
                found.append(leg)
        return found

    def _plain(self, at: Point) -> Point:
        return (self.left + self.scale * at[0], self.top - self.scale * at[1])


def clipped(a: Point, b: Point, width: float, height: float) -> Leg | None:
    """The part of a leg inside a frame from (0, 0), or None.

    Source: Liang and Barsky's parametric clipping.
    """
    if all(0 <= x <= width and 0 <= y <= height for x, y in (a, b)):
        return (a, b)
    dx, dy = b[0] - a[0], b[1] - a[1]
    first, last = 0.0, 1.0
    for step, room in (
        (-dx, a[0]),
        (dx, width - a[0]),
        (-dy, a[1]),
        (dy, height - a[1]),
    ):
        if step == 0.0:
            if room < 0.0:
                return None
        elif step < 0.0:
            first = max(first, room / step)
        else:
            last = min(last, room / step)
    if first > last:
        return None
    return (
        (a[0] + first * dx, a[1] + first * dy),
        (a[0] + last * dx, a[1] + last * dy),
    )


def longest(legs: Iterable[Leg]) -> Leg | None:
    """The longest of some legs."""
    return max(legs, key=lambda leg: math.dist(*leg), default=None)
