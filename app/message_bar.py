"""The bar that shows what the user is told in passing, over the top of the drawing."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import Qt, QTimer
from PySide6.QtWidgets import (
    QApplication,
    QHBoxLayout,
    QLabel,
    QProgressBar,
    QPushButton,
    QSizePolicy,
    QToolButton,
    QWidget,
)

from app.jobs import Jobs
from app.messages import Messages
from app.slip import Slip
from app.theme import STEP, theme_for

#: How long an information stays; warnings and errors stay until closed. [ms]
PATIENCE = 6000
#: How long a refusal stays, unless the work goes on before. [ms]
PATIENCE_OF_REFUSALS = 20_000


class MessageBar(QWidget):
    """One sentence, and a way to put it aside.

    It takes no height: its slip lies over what is beneath, so that nothing moves.
    """

    def __init__(self, messages: Messages) -> None:
        super().__init__()
        self._text = QLabel()
        self._text.setWordWrap(True)
        # What users typed is shown as it is and never as markup.
        self._text.setTextFormat(Qt.TextFormat.PlainText)
        self._text.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self._copy = QPushButton("Copy details")
        self._copy.setToolTip("Copy what went wrong, for a report of it")
        self._copy.clicked.connect(self._copy_details)
        self._close = QToolButton()
        self._close.setText("Close")
        self._close.setToolTip("Put the message aside")
        self._close.setAutoRaise(True)
        self._close.clicked.connect(self.hide)
        self._details = ""
        self._is_refusal = False
        self._offer = QPushButton()
        self._offer.setAccessibleName("Do what is offered")
        self._offer.setToolTip("Does at once what the message offers")
        self._offer.clicked.connect(self._take_offer)
        self._offered: Callable[[], object] | None = None
        self.slip = Slip(self)
        row = QHBoxLayout(self.slip)
        row.setContentsMargins(3 * STEP, STEP, 2 * STEP, STEP)
        row.addWidget(self._text, 1)
        row.addWidget(self._offer)
        row.addWidget(self._copy)
        row.addWidget(self._close)
        self.setFixedHeight(0)
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.timeout.connect(self.hide)
        messages.told.connect(self.tell)
        messages.failed.connect(self._tell_failure)
        self.hide()

    @property
    def sentence(self) -> str:
        """What is shown."""
        return self._text.text()

    def tell(self, kind: str, sentence: str) -> None:
        """Show a sentence."""
        self._show(kind, sentence, "")

    def let_go(self) -> None:
        """The work goes on: what was refused before is of no interest any more."""
        if self._is_refusal:
            self.hide()

    def offer(self, sentence: str, button: str, act: Callable[[], object]) -> None:
        """Show a warning with something that can be done about it at once."""
        self._show("warning", sentence, "")
        self._offer.setText(button)
        self._offer.setAccessibleName(button)
        self._offer.show()
        self._offered = act
        self.slip.come()

    def _take_offer(self) -> None:
        self.hide()
        if self._offered is not None:
            self._offered()

    def _tell_failure(self, summary: str, details: str) -> None:
        sentence = (
            "Something went wrong that should not have; we are sorry. Your work is "
            f"still here: save it. ({summary})"
        )
        self._show("error", sentence, details)

    def _show(self, kind: str, sentence: str, details: str) -> None:
        theme = theme_for(self.palette())
        colour = theme.text if kind == "information" else theme.warning
        self._text.setStyleSheet(f"color: {colour};")
        self._text.setText(sentence)
        self._details = details
        self._copy.setVisible(bool(details))
        self._offer.hide()
        self._offered = None
        self._is_refusal = kind == "refusal"
        self._timer.stop()
        if kind == "information":
            self._timer.start(PATIENCE)
        elif self._is_refusal:
            self._timer.start(PATIENCE_OF_REFUSALS)
        self.show()
        self.slip.come()

    def _copy_details(self) -> None:
        QApplication.clipboard().setText(self._details)


class JobBar(QWidget):
    """Progress of the job that runs, with a way to cancel it."""

    def __init__(self, jobs: Jobs) -> None:
        super().__init__()
        self._title = ""
        self._text = QLabel()
        # A title may hold what users typed.
        self._text.setTextFormat(Qt.TextFormat.PlainText)
        self._bar = QProgressBar()
        self._bar.setRange(0, 1000)
        self._bar.setTextVisible(False)
        self._bar.setFixedWidth(160)
        cancel = QPushButton("Cancel")
        cancel.setToolTip("Stop it; nothing that it wrote stays")
        cancel.clicked.connect(jobs.cancel)
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.addWidget(self._text)
        row.addWidget(self._bar)
        row.addWidget(cancel)
        jobs.started.connect(self._on_started)
        jobs.progressed.connect(self._on_progressed)
        jobs.ended.connect(self.hide)
        self.hide()

    def _on_started(self, title: str) -> None:
        self._title = title
        self._text.setText(title)
        self._bar.setValue(0)
        self.show()

    def _on_progressed(self, share: float, doing: str) -> None:
        self._bar.setValue(round(1000 * share))
        is_said = not doing or doing == self._title
        self._text.setText(self._title if is_said else f"{self._title} · {doing}")
