"""Pages of Help: the guide from an empty room to a report, cautions, about."""

from __future__ import annotations

import re
from importlib.resources import files

from PySide6.QtGui import QShowEvent

import engine
from app.document import Document
from app.page import TextPage
from engine.layout import Layout
from engine.open_boards import open_board_sentences
from engine.report.wording import CAUTIONS, NOT_MODELLED

_STARS = re.compile(r"([\\`*_{}\[\]()#+\-.!<>|~&])")


def plain(text: str) -> str:
    """Text of a user or of the report so that Markdown shows it as it is.

    Examples
    --------
    >>> plain("Desk *3* <b>")
    'Desk \\\\*3\\\\* \\\\<b\\\\>'
    """
    return _STARS.sub(r"\\\1", " ".join(text.split()))


class GuidePage(TextPage):
    """The way from an empty room to a report."""

    def __init__(self) -> None:
        text = (files("app") / "resources" / "guide.md").read_text("utf-8")
        title, _, rest = text.partition("\n")
        super().__init__(title.lstrip("# "))
        self.show_text(rest)


class CautionsPage(TextPage):
    """What the results are not, in full, and what the layout adds to that."""

    def __init__(self, document: Document) -> None:
        super().__init__("Cautions")
        self._document = document
        document.changed.connect(self._on_changed)
        self._fill()

    def showEvent(self, event: QShowEvent) -> None:
        self._fill()
        super().showEvent(event)

    def _on_changed(self, _layout: Layout, _ids: object) -> None:
        if self.isVisible():
            self._fill()

    def _fill(self) -> None:
        self.show_text(cautions_text(self._document.layout))


class AboutPage(TextPage):
    """What the program is, its version and licence, and the cautions again."""

    def __init__(self) -> None:
        super().__init__("About Lodestead")
        self.show_text(about_text())


def cautions_text(layout: Layout) -> str:
    """The cautions as Markdown; first those that this layout gives cause to."""
    parts = [plain(sentence) for sentence in open_board_sentences(layout)]
    parts = [f"**{part}**" for part in parts]
    parts += [plain(sentence) for sentence in CAUTIONS]
    parts += ["## Not in the model", _list(NOT_MODELLED)]
    return "\n\n".join(parts)


def about_text() -> str:
    """Version, licence and cautions as Markdown."""
    return "\n\n".join(
        [
            f"Lodestead {plain(engine.__version__)}",
            "Power-frequency magnetic fields of electrical rooms, drawn, calculated, "
            "compared and reported.",
            "MIT License. Copyright (c) 2026 The Lodestead authors. The program is "
            "provided as it is, without warranty of any kind. It uses Qt for Python "
            "under the LGPL, and other libraries under the licences that come with "
            "them.",
            "## Cautions",
            *(plain(sentence) for sentence in CAUTIONS),
        ]
    )


def _list(sentences: tuple[str, ...]) -> str:
    return "\n".join(f"- {plain(sentence)}" for sentence in sentences)
