"""The margins at the foot: the worst comparison, the counts, the standing caution."""

from __future__ import annotations

from PySide6.QtCore import QEvent, QSize, Qt, Signal
from PySide6.QtGui import QColor, QKeyEvent, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import (
    QAbstractButton,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QSizePolicy,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from app.document import Document
from app.margin_values import MarginRow, Margins
from app.panels import margin_words as words
from app.panels.cautions import CautionsPanel
from app.panels.margin_marks import RatioBar, StateSign, state_colour
from app.panels.margin_table import MarginTable
from app.panels.panel import ElidedLine, Words
from app.theme import BODY, SMALL, STEP, theme_shown
from app.wrapping import WrappingRow
from engine.layout import Layout


class _Text(QLabel):
    """One line of plain text that gives way with an ellipsis."""

    def __init__(self, stretch: bool = True, least: int = 40) -> None:
        super().__init__()
        self._whole, self._least = "", least
        self._stretches = stretch
        self.setTextFormat(Qt.TextFormat.PlainText)
        self.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        policy = QSizePolicy.Policy.Preferred if stretch else QSizePolicy.Policy.Fixed
        self.setSizePolicy(policy, QSizePolicy.Policy.Fixed)

    def set_whole(self, text: str, colour: str = "") -> None:
        self._whole = text
        style = f"color: {colour};" if colour else ""
        if style != self.styleSheet():
            self.setStyleSheet(style)
        self.setVisible(bool(text))
        self.updateGeometry()
        self._elide()

    @property
    def whole(self) -> str:
        return self._whole

    def sizeHint(self) -> QSize:
        width = self.fontMetrics().horizontalAdvance(self._whole) + STEP
        return QSize(width, self.fontMetrics().height() + STEP)

    def minimumSizeHint(self) -> QSize:
        hint = self.sizeHint()
        return (
            QSize(min(hint.width(), self._least), hint.height())
            if self._stretches
            else hint
        )

    def resizeEvent(self, event: object) -> None:
        self._elide()

    def _elide(self) -> None:
        metrics = self.fontMetrics()
        mode = Qt.TextElideMode.ElideRight
        self.setText(metrics.elidedText(self._whole, mode, max(self.width(), 20)))


class MarginTile(QAbstractButton):
    """The worst comparison; a click shows its place."""

    def __init__(self) -> None:
        super().__init__()
        self.row: MarginRow | None = None
        self.setAccessibleName("The worst comparison")
        self.setToolTip("The worst comparison; none yet")
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.sign, self.bar = StateSign(), RatioBar()
        self.title, self.value = _Text(), _Text(stretch=False)
        # A state is read whole; only a long reason of none gives way.
        self.state, self.case = _Text(least=10 * BODY), _Text()
        for mark in (self.sign, self.bar):
            mark.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        self._box = box = QHBoxLayout(self)
        box.setContentsMargins(STEP, 0, STEP, 0)
        box.setSpacing(2 * STEP)
        for part in (self.title, self.bar, self.value, self.sign, self.state):
            box.addWidget(part, 1 if part is self.bar else 0)
        box.addWidget(self.case)
        box.addStretch(0)
        self.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Fixed)

    def sizeHint(self) -> QSize:
        return QSize(self._box.sizeHint().width(), 7 * STEP)

    def minimumSizeHint(self) -> QSize:
        return QSize(300, 7 * STEP)

    def show_row(
        self,
        row: MarginRow,
        shown: Layout,
        is_sampled: bool,
        held: Margins | None = None,
    ) -> None:
        self.row = row
        theme = theme_shown()
        muted = theme.muted if is_sampled else ""
        state = "" if is_sampled else row.state
        self.title.set_whole(f"{row.place_title} · {words.level_text(row, shown)}")
        self.bar.set_row(row, is_sampled)
        was = words.was_text(row, held)
        value = words.value_text(row, shown, is_sampled) + was
        if row.ratio is not None and row.level_value is None:
            value += f" · ratio {words.ratio_text(row, is_sampled)}"
        self.value.set_whole(value, muted)
        self.sign.set_state(state)
        text = "" if is_sampled else words.state_text(row)
        self.state.set_whole(text, state_colour(theme, state))
        self.case.set_whole(row.case_title, theme.muted)
        said = words.sentence(row, shown, is_sampled) + was
        self.setAccessibleName(said)
        self.set_more("")

    def set_more(self, text: str) -> None:
        """Say something more in the tooltip."""
        more = f"\n{text}" if text else ""
        self.setToolTip(f"{self.accessibleName()}.{more}\nClick to see the place.")

    def paintEvent(self, event: QPaintEvent) -> None:
        if not (self.underMouse() or self.hasFocus()):
            return
        painter = QPainter(self)
        theme = theme_shown()
        ink = QColor(theme.accent if self.hasFocus() else theme.hairline)
        painter.setPen(QPen(ink, 1.0))
        painter.drawRect(self.rect().adjusted(0, 0, -1, -1))
        painter.end()


class MarginsPanel(QWidget):
    """Margins of the whole layout.

    Signals
    -------
    go_to(MarginRow)
        Show the place of this row, in its height and load case.
    why(MarginRow)
        Say where the value of this row comes from.
    opened(bool)
        The full table or the cautions need more room, or no longer.
    """

    go_to = Signal(object)
    opened = Signal(bool)
    why = Signal(object)

    def __init__(self, document: Document, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._document = document
        self._margins: Margins | None = None
        self._kept: tuple[str, str] | None = None
        self._held: Margins | None = None
        self._is_low = False
        self.setAccessibleName("Margins")
        self.tile = MarginTile()
        self.tile.clicked.connect(self._go_to_worst)
        self.empty = Words("", "muted")
        self.table, self.cautions = MarginTable(), CautionsPanel()
        self.counts = _link("Open the table of all zones and reference levels")
        self.counts.setAccessibleName("Counts of comparisons")
        self.counts.clicked.connect(lambda: self._open(self.table))
        self.ask_why = _link("Where this value comes from: the shares of the circuits")
        self.ask_why.setText("Why ▸")
        self.ask_why.clicked.connect(self._on_why)
        self.net_current = ElidedLine()
        self.open_board = Words(words.OPEN_BOARD, "warning")
        self.caution = _link("Open the full text of the cautions")
        self.caution.setText(f"{words.CAUTION_LINE} · Cautions ▸")
        self.caution.clicked.connect(lambda: self._open(self.cautions))
        self.table.chosen.connect(self._go_to_row)
        self.cautions.closed.connect(self.close_opened)
        self.below = QStackedWidget()
        self.below.addWidget(self.table)
        self.below.addWidget(self.cautions)
        self.below.hide()
        self._arrange()
        document.changed.connect(self._on_changed)
        self._show_empty()

    def _arrange(self) -> None:
        row = QHBoxLayout()
        row.setSpacing(2 * STEP)
        name = Words("Margins", "plain")
        name.setWordWrap(False)
        row.addWidget(name)
        row.addWidget(self.tile, 1)
        row.addWidget(self.empty, 1)
        row.addWidget(self.ask_why)
        row.addWidget(self.counts)
        box = QVBoxLayout(self)
        box.setContentsMargins(2 * STEP, STEP, 2 * STEP, STEP)
        box.setSpacing(STEP // 2)
        box.addLayout(row)
        box.addWidget(self.open_board)
        box.addWidget(self.below, 1)
        foot = QWidget()
        line = WrappingRow(foot, gap=6 * STEP, margin=0)
        line.addWidget(self.net_current)
        line.addWidget(self.caution)
        box.addWidget(foot)

    @property
    def is_open(self) -> bool:
        """Whether the table or the cautions show."""
        return self.below.isVisibleTo(self)

    def set_margins(self, margins: Margins) -> None:
        """Show other margins, sampled or exact."""
        self._margins = margins
        self.table.set_margins(margins, self._held)
        row = self._worst(margins)
        if row is None:
            self._show_empty()
            return
        is_sampled = margins.is_sampled
        self._kept = (row.place, row.level)
        self.empty.hide()
        self.tile.show()
        self.tile.show_row(row, margins.layout, is_sampled, self._held)
        self.counts.show()
        self.ask_why.show()
        counted = "" if is_sampled else words.counts_text(margins.rows)
        self.counts.setText(f"{counted or 'counts once settled'} ▸")
        self.counts.setAccessibleName(counted or "Counts once settled")
        text = "" if is_sampled else words.net_current_text(row, margins.layout)
        # The line keeps its place while dragging, so that nothing jumps.
        if text or not is_sampled:
            self.net_current.setText(text)
            self._show_net_current()
        self.net_current.setEnabled(not is_sampled)
        self.open_board.setVisible(words.is_at_open_board(margins.layout))

    def set_low(self, low: bool) -> None:
        """Leave the line of the net current to the tooltip where height is scarce."""
        self._is_low = low
        self._show_net_current()

    def _show_net_current(self) -> None:
        text = self.net_current.text() if self.tile.isVisibleTo(self) else ""
        is_room = not self._is_low or self.is_open
        self.net_current.setVisible(bool(text) and is_room)
        self.tile.set_more(text)

    @property
    def sentence(self) -> str:
        """The chosen comparison of the table, or the worst, in words; may be empty."""
        margins = self._margins
        row = self.table.current if self.is_open else None
        row = row or (self.tile.row if self.tile.isVisibleTo(self) else None)
        if margins is None or row is None:
            return ""
        was = words.was_text(row, self._held)
        return f"{words.sentence(row, margins.layout, margins.is_sampled)}{was}."

    def hold(self, on: bool) -> bool:
        """Keep the present values beside the coming ones; False without any."""
        if on and (self._margins is None or self._margins.worst is None):
            return False
        self._held = self._margins if on else None
        if self._margins is not None:
            self.set_margins(self._margins)
        return True

    def close_opened(self) -> bool:
        """Close table or cautions; False when neither was open."""
        if not self.is_open:
            return False
        self.below.hide()
        self._show_net_current()
        self.opened.emit(False)
        return True

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape and self.close_opened():
            return
        super().keyPressEvent(event)

    def changeEvent(self, event: QEvent) -> None:
        if event.type() == QEvent.Type.PaletteChange and self._margins is not None:
            self.set_margins(self._margins)
        super().changeEvent(event)

    def _worst(self, margins: Margins) -> MarginRow | None:
        """The worst; while sampled the one that was shown, so that it keeps still."""
        if margins.is_sampled:
            for row in margins.rows:
                if (row.place, row.level) == self._kept and row.ratio is not None:
                    return row
        return margins.worst

    def _show_empty(self) -> None:
        self.tile.hide()
        self.counts.hide()
        self.ask_why.hide()
        self.net_current.hide()
        self.open_board.setVisible(words.is_at_open_board(self._document.layout))
        self.empty.setText(words.empty_text(self._document.layout, self._margins))
        self.empty.show()

    def _on_changed(self, layout: Layout, _ids: object) -> None:
        if words.empty_text(layout, self._margins):
            self._show_empty()

    def _open(self, what: QWidget) -> None:
        if self.is_open and self.below.currentWidget() is what:
            self.close_opened()
            return
        self.below.setCurrentWidget(what)
        self.below.show()
        self._show_net_current()
        what.setFocus()
        self.opened.emit(True)

    def _go_to_worst(self) -> None:
        if self.tile.row is not None:
            self._go_to_row(self.tile.row)

    def _on_why(self) -> None:
        """Of the row chosen in the table, else of the worst."""
        row = self.table.current if self.is_open else None
        row = row or self.tile.row
        if row is not None and row.at is not None:
            self.why.emit(row)

    def _go_to_row(self, row: MarginRow) -> None:
        if row.at is not None:
            self.go_to.emit(row)


def _link(tip: str) -> QPushButton:
    """A flat button that reads like a line of text."""
    made = QPushButton()
    made.setFlat(True)
    made.setToolTip(tip)
    made.setCursor(Qt.CursorShape.PointingHandCursor)
    made.setStyleSheet(
        f"QPushButton {{ text-align: left; font-size: {SMALL}px; border: none;"
        " padding: 2px 0; }"
        "QPushButton:focus { text-decoration: underline; }"
        "QPushButton:hover { text-decoration: underline; }"
    )
    return made
