"""The side panel: one panel at a time, chosen by its tab."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QStackedWidget, QTabBar, QVBoxLayout, QWidget

from app.theme import BODY

#: Width at which the panel starts, and the least. [logical pixels]
WIDTH, LEAST = 198 + 14 * BODY, 300


class SidePanels(QWidget):
    """Panels behind tabs.

    Signals
    -------
    shown(name)
        Another panel is shown.
    """

    shown = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self._tabs = QTabBar()
        self._tabs.setAccessibleName("Side panels")
        self._tabs.setExpanding(False)
        self._tabs.setDrawBase(False)
        self._tabs.setUsesScrollButtons(True)
        self._tabs.setElideMode(Qt.TextElideMode.ElideNone)
        self._stack = QStackedWidget()
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(0)
        box.addWidget(self._tabs)
        box.addWidget(self._stack, 1)
        self._tabs.currentChanged.connect(self._on_tab)
        self.setMinimumWidth(LEAST)

    def add(self, name: str, panel: QWidget, tip: str) -> None:
        """A further panel behind a tab of that name."""
        self._stack.addWidget(panel)
        index = self._tabs.addTab(name)
        self._tabs.setTabToolTip(index, tip)
        panel.setAccessibleName(name)

    def show_panel(self, name: str) -> None:
        """Bring a panel to the front."""
        for index in range(self._tabs.count()):
            if self._tabs.tabText(index).startswith(name):
                self._tabs.setCurrentIndex(index)
                self._tabs.setFocus(Qt.FocusReason.ShortcutFocusReason)

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the panels, in the order of their tabs."""
        return tuple(
            self._stack.widget(index).accessibleName()
            for index in range(self._stack.count())
        )

    def rename(self, name: str, text: str) -> None:
        """Show `text`, which starts with `name`, on its tab."""
        for index in range(self._tabs.count()):
            if self._tabs.tabText(index).startswith(name):
                self._tabs.setTabText(index, text)

    @property
    def current(self) -> str:
        """Text of the tab in front."""
        return self._tabs.tabText(self._tabs.currentIndex())

    def _on_tab(self, index: int) -> None:
        self._stack.setCurrentIndex(index)
        self.shown.emit(self._tabs.tabText(index))
