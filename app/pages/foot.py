"""Where a page of results stands: at the foot of the drawing, or in its place."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QEvent, QObject, Qt
from PySide6.QtWidgets import QFrame, QStackedWidget, QVBoxLayout, QWidget

from app.page import Page

#: Under this height of the window, pages open in the drawing's place. [px]
LOW = 800
#: What the drawing keeps, and what a page at the foot needs at least. [px]
_DRAWING, _LEAST = 360, 210
#: Of the window's height, at most.
_PART = 0.4


class Foot(QFrame):
    """Holds one page under the drawing while the window is high enough.

    Parameters
    ----------
    window : QWidget
        Whose height counts.
    pages : QStackedWidget
        What stands in the drawing's place; another page there closes the foot's.
    drawing : QWidget
        The drawing itself.
    show_page, show_drawing : callable
        The window's own ways of changing what stands there.
    """

    def __init__(
        self,
        window: QWidget,
        pages: QStackedWidget,
        drawing: QWidget,
        show_page: Callable[[QWidget], None],
        show_drawing: Callable[[], None],
    ) -> None:
        super().__init__()
        self._window, self._pages, self._drawing = window, pages, drawing
        self._show_page, self._show_drawing = show_page, show_drawing
        self.page: Page | None = None
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.hide()
        window.installEventFilter(self)
        pages.currentChanged.connect(self._on_page)

    def open(self, page: Page) -> None:
        """Show a page, at the foot where there is room."""
        if self.page is not None and self.page is not page:
            self.close_page()
        height = self._height()
        if height is None:
            self._put_away()
            page.back.setText("Back to the drawing")
            self._pages.addWidget(page)
            self._show_page(page)
            return
        if self._pages.currentWidget() is page:
            self._pages.removeWidget(page)
            self._show_drawing()
        self.page = page
        page.back.setText("Close")
        box = self.layout()
        assert box is not None
        box.addWidget(page)
        self.setFixedHeight(height)
        self.show()
        page.show()
        (page.focusProxy() or page).setFocus(Qt.FocusReason.ShortcutFocusReason)

    def close_page(self) -> bool:
        """Take the page away from the foot; False where none is."""
        if self.page is None:
            return False
        self._put_away()
        return True

    def _on_page(self, _index: int) -> None:
        if self._pages.currentWidget() is not self._drawing:
            self.close_page()

    def leave(self) -> None:
        """The page wants to be closed, wherever it stands."""
        self.close_page()
        self._show_drawing()

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if event.type() == QEvent.Type.Resize and self.page is not None:
            height = self._height()
            if height is None:
                self.open(self.page)
            else:
                self.setFixedHeight(height)
        return super().eventFilter(watched, event)

    def _put_away(self) -> None:
        if self.page is not None:
            self.page.hide()
            self.page.setParent(self._window)
            self.page = None
        self.hide()

    def _height(self) -> int | None:
        """How high the foot may be; None where the drawing would get too small."""
        if self._window.height() < LOW:
            return None
        # What was just closed may not have made room yet.
        around = self._pages.parentWidget()
        if around is not None and (box := around.layout()) is not None:
            box.activate()
        room = self._pages.height() + (self.height() if self.isVisible() else 0)
        height = min(int(_PART * self._window.height()), room - _DRAWING)
        return height if height >= _LEAST else None
