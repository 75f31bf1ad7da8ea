"""Files of backing drawings read in the background: a page is asked for, then drawn."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import QObject

from app.ask_bar import AskBar, Question
from app.backing import place_read_picture
from app.document import Document
from app.jobs import Jobs
from engine.errors import Cancelled, Progress, UserError
from engine.exchange.backing import ReadPicture, View, page_count, read_picture


class BackingReading(QObject):
    """Places files without making the window wait.

    Parameters
    ----------
    placed : callable
        Called with the id of each new drawing.
    """

    def __init__(
        self,
        document: Document,
        jobs: Jobs,
        ask_bar: AskBar,
        placed: Callable[[str], None],
    ) -> None:
        super().__init__(jobs)
        self._document, self._jobs, self._ask_bar = document, jobs, ask_bar
        self._placed = placed

    def place(self, path: Path, view: View) -> None:
        """Put a file under a view; of several pages, the one that the user says."""

        def work(cancelled: Cancelled, progress: Progress) -> int | ReadPicture:
            progress(0.0, f"Reading {path.name}")
            pages = page_count(path)
            if pages > 1:
                return pages
            return read_picture(path, cancelled=cancelled, progress=progress)

        def done(found: int | ReadPicture) -> None:
            if isinstance(found, ReadPicture):
                self._placed(place_read_picture(self._document, found, path, view))
            else:
                self._ask_page(path, found, view)

        self._jobs.start(f"Reading {path.name}", work, done)

    def _ask_page(self, path: Path, pages: int, view: View) -> None:
        question = Question(
            f"page, 1 to {pages}", "1",
            "Which page of the PDF is placed; its form shows another one later",
        )  # fmt: skip
        self._ask_bar.ask(
            f"{path.name} has {pages} pages", [question], "Place",
            lambda answers: self._place_page(path, _page(answers[0], pages), view),
        )  # fmt: skip

    def _place_page(self, path: Path, page: int, view: View) -> None:
        def work(cancelled: Cancelled, progress: Progress) -> ReadPicture:
            return read_picture(path, page, cancelled=cancelled, progress=progress)

        def done(found: ReadPicture) -> None:
            self._placed(place_read_picture(self._document, found, path, view))

        self._jobs.start(f"Drawing page {page} of {path.name}", work, done)


def _page(text: str, pages: int) -> int:
    plain = text.strip()
    if plain.isascii() and plain.isdigit() and 1 <= int(plain) <= pages:
        return int(plain)
    raise UserError(f"“{plain[:20]}” is not a page: enter a number from 1 to {pages}.")
