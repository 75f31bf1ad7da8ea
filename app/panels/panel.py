"""What all side panels share: they follow the document while they are seen."""

from __future__ import annotations

from collections.abc import Callable
from html import escape

from PySide6.QtCore import QLocale, QSize
from PySide6.QtGui import (
    QGuiApplication,
    QPainter,
    QPaintEvent,
    QPalette,
    QShowEvent,
    Qt,
)
from PySide6.QtWidgets import (
    QFrame,
    QLabel,
    QPushButton,
    QScrollArea,
    QSizePolicy,
    QVBoxLayout,
    QWidget,
)

from app.document import Document
from app.theme import SMALL, STEP, TITLE
from engine.layout import Layout


def decimal_sign() -> str:
    """The decimal sign of the place: a point or a comma."""
    return "," if QLocale().decimalPoint() == "," else "."


def plain_tip(text: str) -> str:
    """A tooltip that shows what users typed as it is, never as markup."""
    if not any(sign in text for sign in "<&"):
        return text
    return f"<qt>{escape(text)}</qt>".replace("\n", "<br>")


class Panel(QWidget):
    """A panel that shows some collections of the layout.

    A subclass names the fields of `Layout` it shows in `shows` and fills itself in
    `refresh`. It is told of changes to those fields only; while hidden it waits.
    """

    shows: tuple[str, ...] = ()

    def __init__(self, document: Document, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._document = document
        self._seen: Layout | None = None
        document.changed.connect(self._on_changed)
        document.selection_changed.connect(self._on_selection_changed)

    def refresh(self) -> None:
        """Fill the panel from the document."""
        raise NotImplementedError

    def follow_selection(self, ids: frozenset[str]) -> None:
        """Take note of another selection; nothing by default."""

    def _on_changed(self, layout: Layout, _ids: object) -> None:
        if self.isVisible() and self._is_stale(layout):
            self._fill()

    def _on_selection_changed(self, ids: frozenset[str]) -> None:
        if self.isVisible():
            self.follow_selection(ids)

    def _is_stale(self, layout: Layout) -> bool:
        seen = self._seen
        return seen is None or any(
            getattr(layout, name) is not getattr(seen, name) for name in self.shows
        )

    def _fill(self) -> None:
        self._seen = self._document.layout
        self.refresh()

    def showEvent(self, event: QShowEvent) -> None:
        if self._is_stale(self._document.layout):
            self._fill()
        self.follow_selection(self._document.selection)
        super().showEvent(event)


class Words(QLabel):
    """A wrapped text in plain words: muted, small, a title, or a warning."""

    def __init__(self, text: str = "", style: str = "muted") -> None:
        super().__init__(text)
        self._style = style
        self.setWordWrap(True)
        # What users typed is shown as it is and never as markup.
        self.setTextFormat(Qt.TextFormat.PlainText)
        self.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self._dress()

    def set_style(self, style: str) -> None:
        """One of "plain", "muted", "title" and "warning"."""
        if style != self._style:
            self._style = style
            self._dress()

    def _dress(self) -> None:
        # No style sheet: a styled widget would keep the colours of its first theme.
        self.setForegroundRole(_ROLES.get(self._style, QPalette.ColorRole.WindowText))
        font = QGuiApplication.font()
        if self._style in _SIZES:
            font.setPixelSize(_SIZES[self._style])
        self.setFont(font)


class ElidedLine(Words):
    """Words in one line, shortened in their middle where there is no room."""

    def __init__(self, text: str = "", style: str = "muted") -> None:
        super().__init__(text, style)
        self.setWordWrap(False)

    def setText(self, text: str) -> None:
        super().setText(text)
        self.setToolTip(plain_tip(text))

    def minimumSizeHint(self) -> QSize:
        return QSize(min(self.sizeHint().width(), 8 * TITLE), self.sizeHint().height())

    def paintEvent(self, event: QPaintEvent) -> None:
        metrics = self.fontMetrics()
        if metrics.horizontalAdvance(self.text()) <= self.width():
            super().paintEvent(event)
            return
        mode = Qt.TextElideMode.ElideMiddle
        painter = QPainter(self)
        painter.drawText(
            self.rect(),
            Qt.AlignmentFlag.AlignVCenter,
            metrics.elidedText(self.text(), mode, self.width()),
        )
        painter.end()


#: Colours and sizes of texts by their style; of others the window's.
_ROLES = {
    "muted": QPalette.ColorRole.PlaceholderText,
    "warning": QPalette.ColorRole.BrightText,
}
_SIZES = {"title": TITLE, "muted": SMALL, "warning": SMALL}


def button(title: str, tip: str, press: Callable[[], None]) -> QPushButton:
    """A button no wider than its words need, so that a row of them fits a panel."""
    made = QPushButton(title)
    made.setToolTip(tip)
    made.setMinimumWidth(made.fontMetrics().horizontalAdvance(title) + 5 * STEP)
    made.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Fixed)
    made.clicked.connect(lambda _checked=False: press())
    return made


def scrolled(content: QWidget, name: str = "") -> QScrollArea:
    """A frameless scroll area around `content` that follows its width.

    Without a name the keyboard goes by it, to the fields within; a text alone needs
    one, to be scrolled by keys.
    """
    area = QScrollArea()
    area.setFocusPolicy(Qt.FocusPolicy.StrongFocus if name else Qt.FocusPolicy.NoFocus)
    area.setAccessibleName(name)
    area.setAccessibleDescription("Up and Down scroll the text." if name else "")
    area.setWidgetResizable(True)
    area.setFrameShape(QFrame.Shape.NoFrame)
    area.setWidget(content)
    return area


def column(widget: QWidget | None = None, margin: int = 0) -> QVBoxLayout:
    """A column of widgets with the spacing of all panels."""
    box = QVBoxLayout() if widget is None else QVBoxLayout(widget)
    box.setContentsMargins(margin, margin, margin, margin)
    box.setSpacing(2 * STEP)
    return box
