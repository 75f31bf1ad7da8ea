"""The flowables in their order: numbered sections, turned pages, page references."""

from __future__ import annotations

from collections.abc import Sequence

from reportlab.lib.units import mm
from reportlab.platypus import (
    CondPageBreak,
    Flowable,
    NextPageTemplate,
    PageBreak,
    Table,
)

from engine.picture import Picture
from engine.report.choices import Orientation, Paper
from engine.report.figures import Figure, FigureRow
from engine.report.page import Pages
from engine.report.text import (
    SUBHEADING,
    Heading,
    gap,
    heading,
    least_height,
    paragraph,
    subheading,
)


def needed(parts: Sequence[Sequence[Flowable]]) -> float:
    """What must be free below a heading for what follows to begin there. [mm]"""
    first = next((part for group in parts for part in group), None)
    if isinstance(first, CondPageBreak):
        return float(first.height / mm)
    if isinstance(first, Table):
        return least_height(first)
    if isinstance(first, Figure | FigureRow):
        return float(first.height / mm)
    return 18.0


class Story:
    """Flowables in order; headings are numbered and known by keys.

    Attributes
    ----------
    flowables : list of Flowable
    titles : list of key and title
        Of the sections so far, with their numbers.
    """

    def __init__(self, sheet: Paper, pages: Pages) -> None:
        self.flowables: list[Flowable] = []
        self.titles: list[tuple[str, str]] = []
        self.sheet, self.pages = sheet, pages
        self._lying: Orientation = sheet.orientation
        self._number = 0

    def add(self, parts: Sequence[Flowable]) -> None:
        """Add what is read on text pages."""
        if not parts:
            return
        self._turn(self.sheet.orientation)
        self.flowables += parts

    def section(
        self,
        key: str,
        title: str,
        *parts: Sequence[Flowable],
        number: str = "",
        room: float = 0.0,
    ) -> None:
        """Add a numbered section; `number` instead of the next one.

        `room` is what must be free below; 0: what its first part needs. [mm]
        """
        if not number:
            self._number += 1
            number = str(self._number)
        self._turn(self.sheet.orientation)
        text = f"{number}  {title}"
        self.titles.append((key, text))
        least = min(room or needed(parts), self.sheet.text_height - 20.0)
        self.flowables += heading(text, key, room=least + 13.0)
        for part in parts:
            self.add(part)

    def subsection(self, title: str, *parts: Sequence[Flowable], key: str = "") -> None:
        """Add a heading within a section, and what stands under it."""
        self._turn(self.sheet.orientation)
        least = min(needed(parts), self.sheet.text_height - 20.0)
        self.flowables += subheading(title, key, room=least + 13.0)
        for part in parts:
            self.add(part)

    def figure(
        self,
        title: str,
        key: str,
        picture: Picture,
        lying: Orientation,
        alternative: str,
    ) -> None:
        """Add a picture under a heading, on a page that lies as told.

        `alternative` says what it shows, for those who cannot see it.
        """
        if lying != self._lying:
            self._turn(lying)
        else:
            room = picture.height + 10.5
            self.flowables.append(CondPageBreak(room * mm))
        self.flowables.append(Heading(title, SUBHEADING, 1, key))
        self.flowables += [Figure(picture, alternative), gap(3.0)]

    def page(self, key: str) -> str:
        """ "page 7", where `key` begins."""
        number = self.pages.get(key)
        return f"page {number}" if number else "page –"

    def omitted(self, key: str, title: str, reason: str) -> None:
        """A section of which there is nothing to print, with the reason."""
        self.section(key, title, [paragraph(f"Omitted: {reason}")])

    def break_page(self) -> None:
        """Begin a new page."""
        self.flowables.append(PageBreak())

    def _turn(self, lying: Orientation) -> None:
        if lying != self._lying:
            self.flowables += [NextPageTemplate(lying), PageBreak()]
            self._lying = lying
