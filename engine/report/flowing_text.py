"""Paragraphs as elements of the document, of either direction of writing."""

from __future__ import annotations

from reportlab.lib.styles import ParagraphStyle
from reportlab.platypus import Flowable, Paragraph

from engine.printed_text import printable, text_width, wrapped
from engine.report.directions import displayed, is_right_to_left, reads_from_right
from engine.report.page import BOLD_FONT
from engine.report.scripts import markup
from engine.report.structure import Element


def flowing_text(
    text: str, style: ParagraphStyle, kind: str, bullet: str = ""
) -> Flowable:
    """A paragraph that is an element of a kind; its text is printed as it stands."""
    element, text = Element(kind), printable(text)
    if is_right_to_left(text):
        element.actual = text
        from_right = reads_from_right(text)
        return _Ordered(text, style, element, from_right, bullet)
    shown = markup(text).replace("\n", "<br/>")
    made = _Text(shown, style, bulletText=bullet or None)
    made.element = element
    return made


class _Text(Paragraph):  # type: ignore[misc]
    """A paragraph that is one element, however many pages it runs over."""

    element: Element

    def split(self, width: float, height: float) -> list[Flowable]:
        parts: list[Flowable] = super().split(width, height)
        for part in parts:
            part.element = self.element
        return parts

    def draw(self) -> None:
        with self.canv.drawn_for(self.element):
            super().draw()


class _Ordered(Flowable):  # type: ignore[misc]
    """A paragraph with text from right to left, broken before it is put in order."""

    def __init__(
        self,
        text: str,
        style: ParagraphStyle,
        element: Element,
        from_right: bool,
        bullet: str = "",
    ) -> None:
        super().__init__()
        self._text, self.style, self._element = text, style, element
        self._from_right, self._bullet = from_right, bullet
        self._lines: tuple[str, ...] = ()

    def wrap(self, width: float, _height: float) -> tuple[float, float]:
        style = self.style
        room = width - style.leftIndent
        bold = style.fontName == BOLD_FONT
        self._lines = wrapped(self._text, style.fontSize, room, bold=bold)
        self.width, self.height = width, style.leading * len(self._lines)
        return self.width, self.height

    def split(self, _width: float, height: float) -> list[Flowable]:
        fit = int(height / self.style.leading)
        if fit < 1:
            return []
        bullets_of = (self._bullet, "")
        parts = (self._lines[:fit], self._lines[fit:])
        return [
            _Ordered("\n".join(p), self.style, self._element, self._from_right, bullet)
            for p, bullet in zip(parts, bullets_of, strict=True)
        ]

    def draw(self) -> None:
        style, canvas = self.style, self.canv
        bold = style.fontName == BOLD_FONT
        with canvas.drawn_for(self._element):
            canvas.setFillColor(style.textColor)
            canvas.setFont(style.fontName, style.fontSize)
            y = self.height - style.fontSize
            if self._bullet:
                canvas.drawString(style.bulletIndent, y, self._bullet)
            for line in self._lines:
                shown = displayed(line, self._from_right)
                x = style.leftIndent
                if self._from_right:
                    x = self.width - text_width(shown, style.fontSize, bold=bold)
                canvas.draw_ordered(x, y, shown)
                y -= style.leading
