"""Which zones and receptors are compared with a reference level, as a check list."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QSize, Qt
from PySide6.QtWidgets import QListWidget, QListWidgetItem, QWidget

from app.panels.panel import Words, column, plain_tip
from app.theme import STEP
from engine.criteria import ReferenceLevel
from engine.layout import Layout
from engine.places import Receptor, Zone

#: Rows that show without scrolling.
_MOST = 8


class LevelUses(QWidget):
    """Assigns a level to zones and receptors."""

    def __init__(self, enter: Callable[[str, bool], None]) -> None:
        """`enter` is called with a place's id and whether it is to be compared."""
        super().__init__()
        self._enter = enter
        self.list = QListWidget()
        self.list.setAccessibleName("Compared places")
        self.list.setToolTip(
            "Checked: the zone or receptor is compared with this reference level"
        )
        # A scroll bar beneath would cover the last row.
        self.list.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.list.setTextElideMode(Qt.TextElideMode.ElideMiddle)
        self.list.itemChanged.connect(self._on_changed)
        self.none = Words("Draw a zone where people are, then assign it here.")
        box = column(self)
        box.addWidget(Words("Compared places", "plain"))
        box.addWidget(self.none)
        box.addWidget(self.list)

    def show_level(self, layout: Layout, level: ReferenceLevel) -> None:
        """Show which places name the level."""
        places: tuple[Zone | Receptor, ...] = (*layout.zones, *layout.receptors)
        self.list.ensurePolished()
        row = self.list.fontMetrics().height() + 2 * STEP
        self.list.blockSignals(True)
        self.list.clear()
        for place in places:
            text = place.title
            if not place.category:
                text += " (category not chosen)"
            elif level.category and place.category != level.category:
                text += f" ({place.category})"
            item = QListWidgetItem(text)
            item.setToolTip(plain_tip(text))
            item.setSizeHint(QSize(0, row))
            item.setData(Qt.ItemDataRole.UserRole, place.id)
            used = level.id in place.levels
            item.setCheckState(
                Qt.CheckState.Checked if used else Qt.CheckState.Unchecked
            )
            self.list.addItem(item)
        self.list.blockSignals(False)
        self.list.setVisible(bool(places))
        self.none.setVisible(not places)
        shown = min(max(len(places), 1), _MOST)
        self.list.setFixedHeight(shown * row + 2 * self.list.frameWidth())

    def _on_changed(self, item: QListWidgetItem) -> None:
        used = item.checkState() == Qt.CheckState.Checked
        self._enter(item.data(Qt.ItemDataRole.UserRole), used)
