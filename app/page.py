"""A page in the drawing's place: a title, what it holds, and a way back."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import (
    QFont,
    QKeyEvent,
    QResizeEvent,
    QTextBlockFormat,
    QTextCharFormat,
    QTextCursor,
    QTextFormat,
    QTextOption,
)
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QPushButton,
    QSizePolicy,
    QTextBrowser,
    QVBoxLayout,
    QWidget,
)

from app.panels.panel import Words
from app.theme import BODY, STEP, TITLE, scaled

#: Widest line that is still read easily. [logical pixels]
READABLE = 720

#: From this width on controls stand beside the title. [logical pixels]
_SIDE_BY_SIDE = scaled(600)

#: Height of a line of text. [%]
_LINE = 125.0


class Page(QWidget):
    """A page that Escape or its button closes.

    Signals
    -------
    closed()
    """

    closed = Signal()
    #: What it follows of the caption above the drawing, see `app.caption_bar`.
    followed: frozenset[str] = frozenset()

    def __init__(self, title: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName(title)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.back = QPushButton("Back to the drawing")
        self.back.setToolTip("Back to the drawing (Esc)")
        self.back.setAutoDefault(False)
        self.back.clicked.connect(self.closed)
        self._title = Words(title, "title")
        self._beside_title: QWidget | None = None
        self._head = head = QHBoxLayout()
        head.addWidget(self._title, 1)
        head.addWidget(self.back)
        self.column = QVBoxLayout(self)
        self.column.setContentsMargins(6 * STEP, 4 * STEP, 6 * STEP, 4 * STEP)
        self.column.setSpacing(3 * STEP)
        self.column.addLayout(head)

    def put_beside_title(self, controls: QWidget, state: QWidget) -> None:
        """Let controls stand in the line of the title, what they show getting all."""
        self._title.setWordWrap(False)
        self._title.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        self._head.setSpacing(3 * STEP)
        self._beside_title = controls
        self._head.insertWidget(1, controls, 1)
        self._head.insertWidget(2, state)
        top = Qt.AlignmentFlag.AlignTop
        for widget in (self._title, state, self.back):
            self._head.setAlignment(widget, top)
        self.column.setContentsMargins(3 * STEP, 2 * STEP, 3 * STEP, STEP)
        self.column.setSpacing(STEP)

    def resizeEvent(self, event: QResizeEvent) -> None:
        controls = self._beside_title
        if controls is not None:
            is_below = self.column.indexOf(controls) >= 0
            if (self.width() < _SIDE_BY_SIDE) != is_below:
                self._move(controls, below=not is_below)
        super().resizeEvent(event)

    def _move(self, controls: QWidget, *, below: bool) -> None:
        """On a narrow page the controls have a line of their own."""
        if below:
            self._head.removeWidget(controls)
            self._head.insertStretch(1, 1)
            self.column.insertWidget(1, controls)
        else:
            self.column.removeWidget(controls)
            self._head.takeAt(1)
            self._head.insertWidget(1, controls, 1)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.closed.emit()
        else:
            super().keyPressEvent(event)


class TextPage(Page):
    """A page of text, written as Markdown, in lines that are easily read."""

    def __init__(self, title: str, parent: QWidget | None = None) -> None:
        super().__init__(title, parent)
        self.text = _Reading()
        self.text.setAccessibleName(title)
        self.text.setFrameShape(QFrame.Shape.NoFrame)
        self.text.setOpenExternalLinks(False)
        self.text.setOpenLinks(False)
        self.column.addWidget(self.text, 1)
        self.setFocusProxy(self.text)

    def show_text(self, markdown: str) -> None:
        """Show another text; where it was read stays in view."""
        self.text.show_text(markdown)


class _Reading(QTextBrowser):
    """Shows Markdown in the theme's colours."""

    def __init__(self) -> None:
        super().__init__()
        self.setWordWrapMode(QTextOption.WrapMode.WordWrap)
        self.document().setDocumentMargin(0)
        # It stands on the page, without a sheet of its own.
        self.viewport().setAutoFillBackground(False)

    def show_text(self, markdown: str) -> None:
        place = self.verticalScrollBar().value()
        self.setMarkdown(markdown)
        self._space()
        self.verticalScrollBar().setValue(place)

    def _space(self) -> None:
        """Give headings their size, and paragraphs air."""
        block = self.document().begin()
        while block.isValid():
            cursor = QTextCursor(block)
            shape = block.blockFormat()
            level = shape.headingLevel()
            is_first = block.blockNumber() == 0
            if level:
                cursor.select(QTextCursor.SelectionType.BlockUnderCursor)
                look = QTextCharFormat()
                look.setProperty(QTextFormat.Property.FontSizeAdjustment, 0)
                look.setProperty(
                    QTextFormat.Property.FontPixelSize, TITLE if level == 1 else BODY
                )
                look.setFontWeight(QFont.Weight.DemiBold)
                cursor.mergeCharFormat(look)
            shape.setTopMargin(0 if is_first or not level else 4 * STEP)
            shape.setBottomMargin(STEP if level or block.textList() else 2 * STEP)
            shape.setLineHeight(
                _LINE, QTextBlockFormat.LineHeightTypes.ProportionalHeight.value
            )
            QTextCursor(block).setBlockFormat(shape)
            block = block.next()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            event.ignore()
        else:
            super().keyPressEvent(event)

    def resizeEvent(self, event: QResizeEvent) -> None:
        # Beyond a readable width the rest is margin at the right.
        spare = max(0, self.width() - READABLE)
        self.setViewportMargins(0, 0, spare, 0)
        super().resizeEvent(event)
