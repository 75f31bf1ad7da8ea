"""The side panel: one panel at a time, chosen by its tab, or in a window of its own."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import cached_property

from PySide6.QtCore import QByteArray, Qt, Signal
from PySide6.QtGui import QCloseEvent
from PySide6.QtWidgets import (
    QHBoxLayout,
    QProxyStyle,
    QPushButton,
    QStackedWidget,
    QStyle,
    QStyleOption,
    QTabBar,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app.icons import icon
from app.panels.panel import Words
from app.theme import BODY, STEP, Theme

#: Width at which the panel starts, and the least. [logical pixels]
WIDTH, LEAST = 198 + 14 * BODY, 300


class SidePanels(QWidget):
    """Panels behind tabs; each can leave for a second screen and come back.

    Signals
    -------
    shown(name)
        Another panel is shown.
    """

    shown = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self._tabs = QTabBar()
        close = _Close("Fusion")
        close.setParent(self)
        self._tabs.setStyle(close)
        self._tabs.setAccessibleName("Side panels")
        self._tabs.setExpanding(False)
        self._tabs.setDrawBase(False)
        self._tabs.setUsesScrollButtons(True)
        self._tabs.setElideMode(Qt.TextElideMode.ElideNone)
        self._leave = QToolButton()
        self._leave.setAutoRaise(True)
        self._leave.clicked.connect(self.take_out)
        self._stack = QStackedWidget()
        self._stands: list[_Stand] = []
        head = QHBoxLayout()
        head.setSpacing(0)
        head.addWidget(self._tabs, 1)
        head.addWidget(self._leave)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(0)
        box.addLayout(head)
        box.addWidget(self._stack, 1)
        self._tabs.currentChanged.connect(self._on_tab)
        self.setMinimumWidth(LEAST)

    # -- panels -------------------------------------------------------------------

    def add(self, name: str, build: Callable[[], QWidget], tip: str) -> None:
        """A further panel behind a tab of that name, built when it is first shown."""
        stand = _Stand(name, build)
        stand.called.connect(lambda: self.bring_back(name))
        self._stands.append(stand)
        self._stack.addWidget(stand)
        index = self._tabs.addTab(name)
        self._tabs.setTabToolTip(index, tip)

    def show_panel(self, name: str) -> None:
        """Bring a panel to the front, here or in its own window."""
        for index, stand in enumerate(self._stands):
            if stand.name == name and stand.outside is not None:
                stand.outside.raise_()
                stand.outside.activateWindow()
            elif stand.name == name:
                self._tabs.setCurrentIndex(index)
                self._tabs.setFocus(Qt.FocusReason.ShortcutFocusReason)

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the panels, in the order of their tabs."""
        return tuple(stand.name for stand in self._stands)

    def rename(self, name: str, text: str) -> None:
        """Show `text`, which starts with `name`, on its tab."""
        for index, stand in enumerate(self._stands):
            if stand.name == name:
                self._tabs.setTabText(index, text)
                stand.set_title(text)

    @property
    def current(self) -> str:
        """Text of the tab in front."""
        return self._tabs.tabText(self._tabs.currentIndex())

    def set_theme(self, theme: Theme) -> None:
        """Show the own icon in another theme."""
        self._leave.setIcon(icon("own_window", theme.text, theme.muted))

    # -- windows of their own -----------------------------------------------------

    def take_out(self) -> None:
        """Let the panel in front stand in a window of its own, or come back."""
        stand = self._stands[self._tabs.currentIndex()]
        if stand.outside is None:
            stand.leave()
        else:
            stand.come_back()
        self._tell_leave()

    def bring_back(self, name: str) -> None:
        """Let a panel that left stand here again."""
        for stand in self._stands:
            if stand.name == name:
                stand.come_back()
        self._tell_leave()

    def away(self) -> dict[str, str]:
        """Panels that left, with the places of their windows as text."""
        return {
            s.name: s.outside.place() for s in self._stands if s.outside is not None
        }

    def send_away(self, places: Mapping[str, str]) -> None:
        """Let panels leave for where they stood before."""
        for stand in self._stands:
            if stand.name in places:
                stand.leave(places[stand.name])
        self._tell_leave()

    def close_windows(self) -> None:
        """Hide the windows of panels that left, before the main window goes."""
        for stand in self._stands:
            if stand.outside is not None:
                stand.outside.hide()

    # -- following ----------------------------------------------------------------

    def _on_tab(self, index: int) -> None:
        self._stands[index].fill()
        self._stack.setCurrentIndex(index)
        self._tell_leave()
        self.shown.emit(self._tabs.tabText(index))

    def _tell_leave(self) -> None:
        stand = self._stands[self._tabs.currentIndex()]
        tip = f"Take “{stand.name}” out into a window of its own, for a second screen"
        if stand.outside is not None:
            tip = f"Bring “{stand.name}” back here"
        self._leave.setToolTip(tip)
        self._leave.setAccessibleName(tip)


class _Close(QProxyStyle):
    """The style with tabs closer together, so that all of them show."""

    def pixelMetric(
        self,
        metric: QStyle.PixelMetric,
        option: QStyleOption | None = None,
        widget: QWidget | None = None,
    ) -> int:
        if metric == QStyle.PixelMetric.PM_TabBarTabHSpace:
            return 4 * STEP
        return super().pixelMetric(metric, option, widget)


class _Stand(QWidget):
    """Where one panel stands, or what stands there while it is away.

    Signals
    -------
    called()
        The panel is wanted back.
    """

    called = Signal()

    def __init__(self, name: str, build: Callable[[], QWidget]) -> None:
        super().__init__()
        self.name = name
        self.outside: _PanelWindow | None = None
        self._build, self._title = build, name
        self._box = QVBoxLayout(self)
        self._box.setContentsMargins(0, 0, 0, 0)

    @cached_property
    def panel(self) -> QWidget:
        """The panel itself, built when it is first asked for."""
        panel = self._build()
        panel.setAccessibleName(self.name)
        return panel

    @cached_property
    def _notice(self) -> QWidget:
        """What says where the panel is."""
        notice = QWidget()
        box = QVBoxLayout(notice)
        box.setContentsMargins(4 * STEP, 4 * STEP, 4 * STEP, 4 * STEP)
        box.addWidget(Words(f"“{self.name}” stands in a window of its own."))
        back = QPushButton("Bring it back")
        back.setToolTip("Let it stand here again (or close its window)")
        back.clicked.connect(self.called)
        box.addWidget(back, 0, Qt.AlignmentFlag.AlignLeft)
        box.addStretch(1)
        self._box.addWidget(notice)
        return notice

    def fill(self) -> None:
        """Have something to show."""
        if self.outside is None:
            self._box.addWidget(self.panel)

    def leave(self, place: str = "") -> None:
        """Let the panel stand in a window of its own."""
        if self.outside is not None:
            return
        self.outside = _PanelWindow(self, self._title, self.panel)
        self.outside.closed.connect(self.called)
        self._notice.show()
        self.outside.show_at(place)

    def come_back(self) -> None:
        """Let the panel stand here again."""
        if self.outside is None:
            return
        gone, self.outside = self.outside, None
        self._notice.hide()
        self.fill()
        self.panel.show()
        gone.hide()
        gone.deleteLater()

    def set_title(self, text: str) -> None:
        """Another title for the window."""
        self._title = text
        if self.outside is not None:
            self.outside.setWindowTitle(text)


class _PanelWindow(QWidget):
    """A panel alone; closing it sends the panel back.

    A tool window of the main one: its keys work here too, and it goes with it.

    Signals
    -------
    closed()
    """

    closed = Signal()

    def __init__(self, stand: QWidget, title: str, panel: QWidget) -> None:
        super().__init__(stand, Qt.WindowType.Tool)
        self.setWindowTitle(title)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.addWidget(panel)
        self.setMinimumSize(LEAST, LEAST)
        panel.show()

    def show_at(self, place: str) -> None:
        """Appear where it stood before; the first time, beside where it was."""
        if place:
            self.restoreGeometry(QByteArray.fromBase64(place.encode("ascii")))
        else:
            stand = self.parentWidget()
            assert stand is not None
            self.resize(max(stand.width(), WIDTH), max(stand.height(), LEAST))
            self.move(stand.mapToGlobal(stand.rect().topLeft()))
        self.show()

    def place(self) -> str:
        """Where it stands and how large it is."""
        return bytes(self.saveGeometry().toBase64().data()).decode("ascii")

    def closeEvent(self, event: QCloseEvent) -> None:
        event.ignore()
        self.closed.emit()
