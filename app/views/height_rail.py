"""The height rail: all heights beside the plan, and the one whose map is shown.

A click on a tick, a drag of the marker, the arrow keys or a typed height choose it;
without a chosen height the map shows the largest over the zone's heights.
"""

from __future__ import annotations

from PySide6.QtCore import QLocale, Signal
from PySide6.QtWidgets import QCheckBox, QLineEdit, QVBoxLayout, QWidget

from app.document import Document
from app.height_curve import HeightCurve
from app.map_request import height_figures
from app.theme import SMALL, STEP, theme_for
from app.view_state import Look, ViewState
from app.views.rail_scale import RailScale
from engine.errors import UserError
from engine.typed_lengths import typed_length

#: As much as its words need, and as much as figures alone need. [px]
WIDTH, NARROW = round(15.6 * SMALL), round(7.6 * SMALL)


class HeightRail(QWidget):
    """The rail with its entry and the switch back to the largest over heights.

    Signals
    -------
    refused(str)
        Why a typed height was not taken.
    """

    refused = Signal(str)

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self._document, self._view_state = document, view_state
        self.setAccessibleName("Heights")
        self.scale = RailScale(document, view_state)
        self.entry = QLineEdit()
        self.entry.setPlaceholderText("height z")
        self.entry.setAccessibleName("Height of the map above the datum")
        self._tip = "Height of the map above the datum; Enter shows it"
        self.entry.editingFinished.connect(self._on_typed)
        self.largest = QCheckBox()
        self.largest.setAccessibleName("Largest over heights")
        self.largest.setToolTip(
            "The map shows the largest value over the heights of the zone"
        )
        self.largest.clicked.connect(self._on_largest)
        box = QVBoxLayout(self)
        box.setContentsMargins(STEP, STEP, 0, STEP)
        box.setSpacing(STEP)
        box.addWidget(self.entry)
        box.addWidget(self.scale, 1)
        box.addWidget(self.largest)
        self.set_narrow(False)
        document.changed.connect(self._on_changed)
        view_state.changed.connect(self._show)
        self._show(view_state.look)

    def set_narrow(self, narrow: bool) -> None:
        """Figures alone where the drawing needs the room; tooltips say the rest."""
        width = NARROW if narrow else WIDTH
        self.largest.setText("Largest" if narrow else "Largest over heights")
        self.scale.set_width(width - STEP, shows_figures=narrow)
        self.setFixedWidth(width)

    def set_curve(self, curve: HeightCurve | None) -> None:
        """Show another curve, or none."""
        self.scale.set_curve(curve)

    def _on_changed(self, _layout: object, _ids: object) -> None:
        self._show(self._view_state.look)

    @property
    def _unit(self) -> str:
        return self._document.layout.settings.length_unit

    def _show(self, look: Look) -> None:
        self.largest.setChecked(look.height is None)
        self.largest.setEnabled(look.height is not None)
        # Without a zone there is one height, and nothing is the largest over several.
        self.largest.setVisible(bool(self._document.layout.zones))
        self.entry.setToolTip(f"{self._tip} [{self._unit}]")
        self.entry.setStyleSheet("")
        if not (self.entry.hasFocus() and self.entry.isModified()):
            self.entry.setText(
                ""
                if look.height is None
                else f"{height_figures(look.height, self._unit)} {self._unit}"
            )

    def _on_typed(self) -> None:
        if not self.entry.isModified():
            return
        self.entry.setModified(False)
        text = self.entry.text().strip()
        if not text:
            self._view_state.set(height=None)
            return
        decimal = "," if QLocale().decimalPoint() == "," else "."
        try:
            z = typed_length(text.replace("−", "-"), self._unit, decimal)
            if not -1000.0 <= z <= 1000.0:
                raise UserError("A height lies between −1000 m and 1000 m.")
        except UserError as error:
            colour = theme_for(self.palette()).warning
            self.entry.setStyleSheet(f"border: 2px solid {colour};")
            self.entry.setToolTip(str(error))
            self.refused.emit(str(error))
            return
        self._view_state.set(height=z)
        self._show(self._view_state.look)

    def _on_largest(self, is_on: bool) -> None:
        if is_on:
            self._view_state.set(height=None)
