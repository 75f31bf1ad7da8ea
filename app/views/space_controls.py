"""The rows above the view in space: directions of sight, moving, maps, export."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from PySide6.QtCore import QSignalBlocker, Signal
from PySide6.QtWidgets import (
    QComboBox,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QWidget,
)

from app.panels.panel import button
from app.theme import STEP, scaled
from app.views.space_camera import SIGHTS
from app.views.space_move import AXES
from app.views.space_planes import UPRIGHT
from app.wrapping import WrappingRow

_AXIS_TIPS = {
    "x": "Drag the selected items along x only (X); press again to let go",
    "y": "Drag the selected items along y only (Y); press again to let go",
    "vertical": "Drag the selected items up and down only (Z); press again to let go",
}


class SpaceControls(QWidget):
    """Buttons and fields; what they mean is the view's business.

    Signals
    -------
    sight_chosen(words), fit_asked(), export_asked(), all_heights_asked()
    axis_chosen(axis)
        A key of `AXES`, or empty.
    way_typed(text), heights_typed(text), place_typed(text), upright_chosen(words)
    """

    sight_chosen = Signal(str)
    fit_asked = Signal()
    export_asked = Signal()
    all_heights_asked = Signal()
    axis_chosen = Signal(str)
    way_typed = Signal(str)
    heights_typed = Signal(str)
    upright_chosen = Signal(str)
    place_typed = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self._row = WrappingRow(self, 2 * STEP, 0)
        for sight in SIGHTS:
            self._row.addWidget(
                button(sight, f"See the layout {sight[0].lower()}{sight[1:]}",
                       partial(self.sight_chosen.emit, sight))
            )  # fmt: skip
        self._row.addWidget(button("Fit", "Show everything (Home)",
                                   self.fit_asked.emit))  # fmt: skip
        self.axes: dict[str, QPushButton] = {}
        for axis in AXES:
            words = "Move vertically" if axis == "vertical" else f"Move along {axis}"
            made = button(words, _AXIS_TIPS[axis], partial(self._on_axis, axis))
            made.setCheckable(True)
            self.axes[axis] = made
            self._row.addWidget(made)
        self.way = self._field("by", "Length by which the selection is moved along "
                               "the axis, such as 0.35 m; Enter moves it",
                               20, self.way_typed.emit)  # fmt: skip
        self.heights = self._field(
            "Maps at z", "Heights of the maps above the datum, parted by blanks, "
            "such as 0.5 1 1.5 m; empty: as the plan shows",
            36, self.heights_typed.emit,
        )  # fmt: skip
        self._row.addWidget(button("Zone's heights", "A map at every height of the "
                                   "zone that the plan's map is of",
                                   self.all_heights_asked.emit))  # fmt: skip
        self.upright = QComboBox()
        self.upright.addItems(UPRIGHT)
        self.upright.setToolTip(
            "An upright map: at one x, at one y, along a line or along a profile that "
            "is drawn"
        )
        self.upright.setAccessibleName("Upright map")
        self.upright.activated.connect(
            lambda index: self.upright_chosen.emit(UPRIGHT[index])
        )
        self._row.addWidget(self.upright)
        self.place = self._field("", "Where the upright map is: x or y, such as "
                                 "3.2 m, a line as x y to x y, or the name "
                                 "of a profile",
                                 40, self.place_typed.emit)  # fmt: skip
        self._row.addWidget(button("Export picture …", "As PNG, with its caption",
                                   self.export_asked.emit))  # fmt: skip
        self.show_axis("")

    def show_axis(self, axis: str) -> None:
        """Show along which axis the selection moves; empty for none."""
        for name, made in self.axes.items():
            made.setChecked(name == axis)
        self._around(self.way).setVisible(bool(axis))
        self._row.invalidate()

    def show_planes(self, heights: str, upright: str, place: str) -> None:
        """Show where maps are, unless that is being typed."""
        for field, text in ((self.heights, heights), (self.place, place)):
            if not (field.hasFocus() and field.isModified()):
                field.setText(text)
                field.setModified(False)
                field.setCursorPosition(0)
        with QSignalBlocker(self.upright):
            self.upright.setCurrentIndex(UPRIGHT.index(upright))
        self._around(self.place).setVisible(upright != UPRIGHT[0])
        self._row.invalidate()

    @staticmethod
    def _around(field: QLineEdit) -> QWidget:
        """The field together with its label."""
        both = field.parentWidget()
        assert both is not None
        return both

    def _on_axis(self, axis: str) -> None:
        self.axis_chosen.emit(axis if self.axes[axis].isChecked() else "")

    def _field(
        self, label: str, tip: str, width: int, entered: Callable[[str], object]
    ) -> QLineEdit:
        """A field with its label, which stay together."""
        field = QLineEdit()
        field.setToolTip(tip)
        field.setAccessibleName(label or "Place of the upright map")
        field.setFixedWidth(scaled(width * STEP))

        def on_return() -> None:
            field.setModified(False)
            entered(field.text())

        field.returnPressed.connect(on_return)
        both = QWidget()
        box = QHBoxLayout(both)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(STEP)
        if label:
            words = QLabel(label)
            words.setBuddy(field)
            box.addWidget(words)
        box.addWidget(field)
        self._row.addWidget(both)
        return field
