"""Above an elevation: where its upright plane stands, to be read, typed and stepped."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Signal
from PySide6.QtWidgets import (
    QHBoxLayout,
    QLabel,
    QSizePolicy,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app.elevation_plane import ALONG, ELEVATIONS, DrawnLine
from app.panels.field import Choice, ValueField
from app.panels.panel import decimal_sign
from app.theme import STEP, scaled
from engine.errors import UserError
from engine.typed_lengths import length_text, typed_length

#: Farther away than layouts reach. [m]
_FARTHEST = 1e5


class ElevationStrip(QWidget):
    """The plane of one elevation, or the line that is looked along.

    Signals
    -------
    depth_typed(float)
        [m]
    stepped(int)
        −1 or 1: by one step of the grid.
    through_requested()
        The plane is to go through what is selected.
    line_chosen(profile, leg)
    """

    depth_typed = Signal(float)
    stepped = Signal(int)
    through_requested = Signal()
    line_chosen = Signal(str, int)

    def __init__(self, view: str) -> None:
        super().__init__()
        self._unit = "m"
        self._view = view
        self.setAccessibleName("Vertical plane of the map")
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
        box = QVBoxLayout(self)
        box.setContentsMargins(2 * STEP, STEP // 2, 2 * STEP, STEP // 2)
        box.setSpacing(STEP // 2)
        row = QHBoxLayout()
        row.setSpacing(STEP)
        box.addLayout(row)
        self.head = QLabel(f"{view} · vertical plane")
        row.addWidget(self.head)
        self.depth_field = ValueField(
            self._read,
            lambda metres: length_text(metres, self._unit, decimal_sign()),
            self.depth_typed.emit,
            name="Place of the vertical plane",
            tip="Where the map's vertical plane stands; or drag its line on the plan",
        )
        self.depth_field.line.setMaximumWidth(scaled(26 * STEP))
        # Why a text was refused needs the width of the strip, not of its field.
        box.addWidget(self.depth_field.reason)
        self.less = _step("−", "One step of the grid less")
        self.more = _step("+", "One step of the grid more")
        self.less.clicked.connect(lambda: self.stepped.emit(-1))
        self.more.clicked.connect(lambda: self.stepped.emit(1))
        self.through = QToolButton()
        self.through.setText("Through selection")
        self.through.setToolTip(
            "Put the plane through the selected receptor or the selected zone's "
            "largest value; the middle of what is drawn where neither is selected"
        )
        self.through.clicked.connect(self.through_requested)
        self.line = Choice(
            (),
            lambda chosen: self.line_chosen.emit(*chosen),
            name="Line that is looked along",
            tip="A straight part of a profile; draw one on the plan with the tool "
            "Profile",
        )
        self.line.setMinimumWidth(60 * STEP)
        is_line = view == ALONG
        if is_line:
            self.head.setText("Vertical plane along")
            row.addWidget(self.line)
        else:
            self.head.setText(f"Vertical plane {ELEVATIONS[view].axis}")
            row.addWidget(self.depth_field)
            for button in (self.less, self.more, self.through):
                row.addWidget(button)
        row.addStretch(1)

    def show_depth(self, metres: float, unit: str) -> None:
        """Show where the plane stands. [m]"""
        self._unit = unit
        self.depth_field.set_value(metres)

    def show_lines(self, lines: Sequence[DrawnLine], shown: DrawnLine | None) -> None:
        """Offer the drawn lines."""
        self.line.set_options([((x.profile, x.leg), x.title) for x in lines])
        if shown is not None:
            self.line.set_value((shown.profile, shown.leg))

    def _read(self, text: str) -> float:
        found = typed_length(text, self._unit, decimal_sign())
        if abs(found) > _FARTHEST:
            raise UserError(
                "The vertical plane must stand within 100 km of the origin: enter a "
                "smaller coordinate."
            )
        return found


def _step(text: str, tip: str) -> QToolButton:
    button = QToolButton()
    button.setText(text)
    button.setToolTip(tip)
    button.setAccessibleName(tip)
    button.setAutoRepeat(True)
    return button
