"""The frame of pages that ask for an answer in the background and show it.

A page follows the document while it shows, says when what it shows is out of date, and
hands its figure on to files.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from PySide6.QtCore import QTimer, SignalInstance
from PySide6.QtGui import QGuiApplication, QShowEvent
from PySide6.QtWidgets import QWidget

from app.answers import Answers, Work
from app.chosen_file import ask_where_to_write
from app.document import Document
from app.figures import FIGURE_KINDS
from app.messages import Messages
from app.page import Page
from app.panels.panel import Words
from app.theme import LIGHT, qt_palette


class AskingPage(Page):
    """A page with a question; see `_ask`, `_show`, `write` and `shown`.

    Parameters
    ----------
    title : str
    document : Document
    messages : Messages
    computed : str
        What is computed, for sentences.
    work : callable
        Answers a question in a thread of its own.
    file_name : str
        Suggested for exports.
    """

    followed = frozenset({"case", "variant"})

    def __init__(
        self,
        title: str,
        document: Document,
        messages: Messages,
        *,
        computed: str,
        work: Work,
        file_name: str,
    ) -> None:
        super().__init__(title)
        self._document, self._messages = document, messages
        self._file_name = file_name
        self.state, self.reason = Words("", "warning"), Words("", "plain")
        self.state.setWordWrap(False)
        #: What is hidden while there is only a sentence to show.
        self._parts: tuple[QWidget, ...] = ()
        self._followed: list[tuple[SignalInstance, object]] = []
        self._answers = Answers(computed, work, self)
        self._answers.ready.connect(self._show)
        self._soon = QTimer(self, singleShot=True, interval=0)
        self._soon.timeout.connect(self._ask)

    def _follow(self, signal: SignalInstance, slot: object = None) -> None:
        """Hear a signal until the page is closed; by itself it asks again."""
        slot = self._on_changed if slot is None else slot
        signal.connect(slot)
        self._followed.append((signal, slot))

    @property
    def is_idle(self) -> bool:
        """Nothing is being computed or waits to be asked."""
        return self._answers.is_idle and not self._soon.isActive()

    def close_worker(self) -> None:
        """Stop the thread, before the window goes."""
        for signal, slot in self._followed:
            signal.disconnect(slot)
        self._followed.clear()
        self._soon.stop()
        self._answers.close()

    def showEvent(self, event: QShowEvent) -> None:
        self._soon.start()
        super().showEvent(event)

    def _on_changed(self, *_: object) -> None:
        if self.isVisible():
            self._soon.start()

    # -- of the page itself -------------------------------------------------------

    @property
    def shown(self) -> object:
        """What is shown and can be handed on; None without anything."""
        raise NotImplementedError

    def _ask(self) -> None:
        """Ask for what the page should show now."""
        raise NotImplementedError

    def _show(self, request: object, answer: object) -> None:
        """Show an answer, or the sentence that stands for it."""
        raise NotImplementedError

    def write(self, path: Path) -> None:
        """Write what is shown, by the ending of the file's name.

        Raises
        ------
        UserError
            When the file cannot be written.
        """
        raise NotImplementedError

    # -- telling ------------------------------------------------------------------

    def _tell(self, sentence: str) -> None:
        """Say why there is nothing to see; empty: show what there is."""
        self.reason.setText(sentence)
        self.reason.setVisible(bool(sentence))
        for part in self._parts:
            part.setVisible(not sentence)
        if sentence:
            self.state.setText("")

    def _put(self, request: object, computing: str) -> None:
        """Ask; until the answer comes, say that it is computed or out of date."""
        if self._answers.ask(request):
            if self.shown is None:
                self._tell(computing)
            else:
                self.state.setText("out of date")

    # -- handing on ---------------------------------------------------------------

    def export(self) -> None:
        """Ask where to, and write what is shown."""
        if self.shown is None:
            self._messages.warn("There is nothing to export yet.")
            return
        path = ask_where_to_write(self, "Export", self._file_name, FIGURE_KINDS)
        if path is not None:
            with self._messages.shown():
                self.write(path)
                self._messages.inform(f"{path} was written.")

    def _copy(self, text: str, what: str) -> None:
        """Put a text on the clipboard, if there is any."""
        if not text:
            self._messages.warn(f"There is no {what} to copy yet.")
            return
        QGuiApplication.clipboard().setText(text)
        self._messages.inform(f"The {what} is on the clipboard.")


@contextmanager
def on_paper(widget: QWidget) -> Iterator[None]:
    """Let a widget be light, as on paper, for the time of printing it."""
    before = widget.palette()
    widget.setPalette(qt_palette(LIGHT))
    try:
        yield
    finally:
        widget.setPalette(before)
