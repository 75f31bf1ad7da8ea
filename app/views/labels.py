"""Labels of the drawing: which are shown, and where, so that all of them can be read.

Labels are placed in the order of their importance, each at the first of its places
that is free and in sight; those without a free place are left out.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from enum import IntEnum

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter

from app.views.inks import Inks

#: Paper around the text. [px]
_PAD_X, _PAD_Y = 4.0, 1.0

_LONGEST = 44

#: More labels than this are not read but in the way.
_MOST = 150

#: [px]
_CELL = 3.0


class Importance(IntEnum):
    """What gives way to what."""

    SELECTED = 100
    REFERENCE_LEVEL = 80
    RUN = 70
    EQUIPMENT = 60
    RECEPTOR = 55
    ZONE = 50
    ROOM = 45
    ISO_LINE = 40
    HEIGHT = 35
    LETTER = 20


@dataclass(frozen=True)
class Label:
    """A text and the places of its middle, best first. [px]

    Attributes
    ----------
    item : str
        Id of the item it belongs to; a click on the label means that item.
    colour : str
        #rrggbb; empty for the theme's text.
    """

    text: str
    places: tuple[tuple[float, float], ...]
    importance: Importance
    item: str = ""
    bold: bool = False
    colour: str = ""


@dataclass(frozen=True)
class PlacedLabel:
    """A label and the box it fills. [px]"""

    label: Label
    box: QRectF


def placed(
    labels: Iterable[Label], inks: Inks, frame: QRectF, taken: Sequence[QRectF] = ()
) -> list[PlacedLabel]:
    """The labels that can be read, none over another or over what is `taken`.

    Parameters
    ----------
    labels : iterable of Label
    inks : Inks
        Their fonts.
    frame : QRectF
        Where labels may be. [px]
    taken : sequence of QRectF
        Boxes to keep free. [px]
    """
    ground = _Ground(frame)
    for box in taken:
        ground.take(*_sides(box))
    found: list[PlacedLabel] = []
    for label in sorted(labels, key=lambda each: -each.importance):
        if len(found) >= _MOST:
            break
        metrics = inks.bold_metrics if label.bold else inks.small_metrics
        half_width = 0.5 * inks.width(label.text, bold=label.bold) + _PAD_X
        half_height = 0.5 * metrics.height() + _PAD_Y
        for x, y in label.places:
            sides = (
                x - half_width, y - half_height, x + half_width, y + half_height,
            )  # fmt: skip
            if ground.is_free(*sides):
                ground.take(*sides)
                box = QRectF(sides[0], sides[1], 2 * half_width, 2 * half_height)
                found.append(PlacedLabel(label, box))
                break
    return found


class _Ground:
    """Where something stands already, in cells of a few pixels."""

    def __init__(self, frame: QRectF) -> None:
        self._left, self._top, self._right, self._bottom = _sides(frame)
        columns = max(1, math.ceil(frame.width() / _CELL) + 1)
        rows = max(1, math.ceil(frame.height() / _CELL) + 1)
        self._cells = np.zeros((rows, columns), dtype=bool)

    def is_free(self, x0: float, y0: float, x1: float, y1: float) -> bool:
        """Whether a box lies in the frame and on nothing. [px]"""
        if x0 < self._left or x1 > self._right or y0 < self._top or y1 > self._bottom:
            return False
        return not self._cells[self._part(x0, y0, x1, y1)].any()

    def take(self, x0: float, y0: float, x1: float, y1: float) -> None:
        """Let a box stand here. [px]"""
        self._cells[self._part(x0, y0, x1, y1)] = True

    def _part(self, x0: float, y0: float, x1: float, y1: float) -> tuple[slice, slice]:
        rows = slice(_cell(y0 - self._top), _cell(y1 - self._top) + 1)
        return rows, slice(_cell(x0 - self._left), _cell(x1 - self._left) + 1)


def _cell(pixels: float) -> int:
    return max(0, int(pixels / _CELL))


def draw_labels(painter: QPainter, labels: Iterable[PlacedLabel], inks: Inks) -> None:
    """Draw labels in pixels, each on a patch of paper."""
    for each in labels:
        draw_text(
            painter, each.box, each.label.text, inks,
            bold=each.label.bold, colour=each.label.colour,
        )  # fmt: skip


def draw_text(
    painter: QPainter,
    box: QRectF,
    text: str,
    inks: Inks,
    *,
    bold: bool = False,
    colour: str = "",
) -> None:
    """One line of text in a box, on paper."""
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(inks.patch)
    painter.drawRoundedRect(box, 3.0, 3.0)
    painter.setFont(inks.bold if bold else inks.small)
    painter.setPen(QColor(colour or inks.theme.text))
    painter.drawText(box, Qt.AlignmentFlag.AlignCenter, text)


def text_box(text: str, inks: Inks, middle: QPointF, *, bold: bool = False) -> QRectF:
    """The box that a text fills around its middle. [px]"""
    metrics = inks.bold_metrics if bold else inks.small_metrics
    width = metrics.horizontalAdvance(text) + 2 * _PAD_X
    height = metrics.height() + 2 * _PAD_Y
    return QRectF(middle.x() - width / 2, middle.y() - height / 2, width, height)


def shortened(title: str) -> str:
    """A title that fits into a label."""
    return title if len(title) <= _LONGEST else title[: _LONGEST - 1].rstrip() + "…"


def around(
    x: float, y: float, half_width: float, gap: float
) -> tuple[tuple[float, float], ...]:
    """Places for a label right, left, above and below a mark. [px]"""
    across, down = gap + half_width, gap + 8.0
    return (
        (x + across, y),
        (x - across, y),
        (x, y - down),
        (x, y + down),
        (x + across, y - down),
        (x + across, y + down),
        (x - across, y - down),
        (x - across, y + down),
    )


def _sides(box: QRectF) -> tuple[float, float, float, float]:
    return (box.left(), box.top(), box.right(), box.bottom())
