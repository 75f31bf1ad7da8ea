"""A margin's place, pointed out on the drawings: where, how much, at what height.

It stays until the next click on a drawing or Esc, and no longer than it is true.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QObject, Qt
from PySide6.QtGui import QKeyEvent, QMouseEvent

from app.map_request import height_figures
from app.margin_values import MarginRow
from app.panels.margin_words import value_text
from app.tools.tool import Overlay
from app.view_state import Look
from app.views.projection import Sight, to_view
from engine.layout import Layout
from engine.places import Zone

if TYPE_CHECKING:
    from app.main_window import MainWindow

#: Among the marks of the drawings.
MARK = "place of a margin"


class FoundPlace(QObject):
    """Leads to the place of a margin and marks it."""

    def __init__(self, window: MainWindow) -> None:
        super().__init__(window)
        self._window = window
        self._case = ""
        self._watched: list[QObject] = []
        window.document.changed.connect(self._on_changed)
        window.view_state.changed.connect(self._on_look)

    def show_row(self, row: MarginRow) -> None:
        """Show the place of a row: the drawing there, the map in its height and case.

        The values of a row without a place stay in the table.
        """
        w = self._window
        if row.at is None:
            return
        self.let_go()
        w.show_drawing()
        w.view_state.set(height=row.height, case=row.case or w.view_state.look.case)
        w.drawings.look_at(row.at)
        at, self._case = row.at, w.view_state.look.case
        text = mark_text(row, w.document.layout)

        def mark(sight: Sight) -> Overlay:
            seen = to_view(sight, at)
            return Overlay(points=(seen,), labels=((seen, text),))

        w.drawings.set_marks(MARK, mark)
        for view in w.drawings.views.values():
            self._watched += [view, view.viewport()]
        for each in self._watched:
            each.installEventFilter(self)

    def let_go(self) -> bool:
        """Take the mark away; False where none shows."""
        if not self._watched:
            return False
        for each in self._watched:
            each.removeEventFilter(self)
        self._watched = []
        self._window.drawings.set_marks(MARK, lambda _sight: None)
        return True

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if isinstance(event, QMouseEvent):
            is_press = event.type() == QEvent.Type.MouseButtonPress
            if is_press and event.button() == Qt.MouseButton.LeftButton:
                self.let_go()
        elif isinstance(event, QKeyEvent) and event.type() == QEvent.Type.KeyPress:
            # The first Esc takes no more than the mark.
            return event.key() == Qt.Key.Key_Escape and self.let_go()
        return super().eventFilter(watched, event)

    def _on_changed(self, _layout: object, _ids: object) -> None:
        self.let_go()

    def _on_look(self, look: Look) -> None:
        if look.case != self._case:
            self.let_go()


def mark_text(row: MarginRow, layout: Layout) -> str:
    """ "Largest in Office · 61.2 µT · z 5.10 m": what stands at the place."""
    place = layout.by_id().get(row.place)
    name = row.place_title
    if isinstance(place, Zone):
        means = {
            "area mean": f"Mean over {name}, largest here",
            "three-height mean": f"Largest mean over three heights in {name}",
        }
        name = means.get(place.rule, f"Largest in {name}")
    unit = layout.settings.length_unit
    z = height_figures(row.at[2], unit) if row.at else "–"
    # A few points while something is dragged: "≈".
    value = value_text(row, layout, not row.state)
    return f"{name} · {value} · z {z} {unit}"
