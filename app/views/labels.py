"""Labels of the drawing: which are shown, and where, so that all of them can be read.

Labels are placed in the order of their importance, each at the first of its places
that is free and in sight; those without a free place are left out.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from enum import IntEnum

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter

from app.views.inks import Inks

#: Paper around the text. [px]
_PAD_X, _PAD_Y = 4.0, 1.0

_LONGEST = 44


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
    boxes = [_sides(box) for box in taken]
    found = []
    left, top, right, bottom = _sides(frame)
    for label in sorted(labels, key=lambda each: -each.importance):
        metrics = inks.bold_metrics if label.bold else inks.small_metrics
        half_width = 0.5 * metrics.horizontalAdvance(label.text) + _PAD_X
        half_height = 0.5 * metrics.height() + _PAD_Y
        for x, y in label.places:
            x0, y0, x1, y1 = (
                x - half_width, y - half_height, x + half_width, y + half_height,
            )  # fmt: skip
            if x0 < left or x1 > right or y0 < top or y1 > bottom:
                continue
            if any(x0 < c and a < x1 and y0 < d and b < y1 for a, b, c, d in boxes):
                continue
            boxes.append((x0, y0, x1, y1))
            found.append(PlacedLabel(label, QRectF(x0, y0, x1 - x0, y1 - y0)))
            break
    return found


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


def text_box(text: str, inks: Inks, middle: QPointF) -> QRectF:
    """The box that a text fills around its middle. [px]"""
    width = inks.small_metrics.horizontalAdvance(text) + 2 * _PAD_X
    height = inks.small_metrics.height() + 2 * _PAD_Y
    return QRectF(middle.x() - width / 2, middle.y() - height / 2, width, height)


def shortened(title: str) -> str:
    """A title that fits into a label."""
    return title if len(title) <= _LONGEST else title[: _LONGEST - 1].rstrip() + "…"


def around(
    x: float, y: float, half_width: float, gap: float
) -> tuple[tuple[float, float], ...]:
    """Places for a label right, left, above and below a mark. [px]"""
    across = gap + half_width
    return ((x + across, y), (x - across, y), (x, y - gap - 8), (x, y + gap + 8))


def _sides(box: QRectF) -> tuple[float, float, float, float]:
    return (box.left(), box.top(), box.right(), box.bottom())
