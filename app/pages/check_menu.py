"""A button with a menu of things to be shown together."""

from __future__ import annotations

from collections.abc import Hashable, Sequence

from PySide6.QtCore import Signal
from PySide6.QtGui import QAction
from PySide6.QtWidgets import QMenu, QToolButton


class CheckMenu(QToolButton):
    """Entries that can be checked, at least `fewest` of them.

    Signals
    -------
    changed()
        Somebody checked or unchecked an entry.
    """

    changed = Signal()

    def __init__(self, title: str, tip: str, fewest: int = 1) -> None:
        super().__init__()
        self._title, self._fewest = title, fewest
        self.setText(f"{title} ▾")
        self.setToolTip(tip)
        self.setAccessibleName(title)
        self.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        self.setStyleSheet("QToolButton::menu-indicator { image: none; }")
        self._menu = QMenu(self)
        self.setMenu(self._menu)
        self._entries: list[tuple[Hashable, QAction]] = []

    @property
    def checked(self) -> tuple[Hashable, ...]:
        """Keys of what is checked, in the order of the menu."""
        return tuple(key for key, action in self._entries if action.isChecked())

    def set_entries(
        self, entries: Sequence[tuple[Hashable, str]], checked: Sequence[Hashable]
    ) -> None:
        """Offer other entries: key and text."""
        self._menu.clear()
        self._entries = []
        for key, text in entries:
            action = QAction(text.replace("&", "&&"), self._menu)
            action.setCheckable(True)
            action.setChecked(key in checked)
            action.triggered.connect(
                lambda _on=False, acted=action: self._on_triggered(acted)
            )
            self._menu.addAction(action)
            self._entries.append((key, action))
        self._tell()

    def _on_triggered(self, action: QAction) -> None:
        if len(self.checked) < self._fewest:
            action.setChecked(True)
            return
        self._tell()
        self.changed.emit()

    def _tell(self) -> None:
        count = len(self.checked)
        self.setText(f"{self._title} {count} ▾" if count > 1 else f"{self._title} ▾")
