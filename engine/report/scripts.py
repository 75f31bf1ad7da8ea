"""Characters that the program's fonts lack: another font for them, or a note.

The fonts that ship cover Latin, Greek, Cyrillic and more. For Chinese, Japanese and
Korean a font of the machine is used where one is found that can be embedded.
"""

from __future__ import annotations

import sys
from collections.abc import Iterator
from functools import cache
from itertools import groupby
from pathlib import Path
from typing import Any
from xml.sax.saxutils import escape

from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFError, TTFont
from reportlab.pdfgen.canvas import Canvas

from engine.printed_text import REGULAR
from engine.report.directions import displayed, is_right_to_left

FALLBACK = "Lodestead Other Scripts"

#: Names of fonts with outlines that can be embedded, of usual systems. Common practice.
_FILES = (
    "DroidSansFallbackFull.ttf", "DroidSansFallback.ttf", "wqy-microhei.ttc",
    "wqy-zenhei.ttc", "uming.ttc", "msyh.ttc", "simsun.ttc", "msgothic.ttc",
    "malgun.ttf", "arialuni.ttf", "Arial Unicode.ttf", "STHeiti Light.ttc",
)  # fmt: skip

_FOLDERS = {
    "win32": ("C:/Windows/Fonts",),
    "darwin": ("/System/Library/Fonts", "/Library/Fonts"),
}.get(sys.platform, ("/usr/share/fonts", "/usr/local/share/fonts"))


@cache
def _known() -> frozenset[int]:
    """Code points that the program's own font has."""
    face = TTFont("Lodestead coverage", str(REGULAR)).face
    return frozenset(face.charToGlyph)


@cache
def fallback() -> frozenset[int]:
    """Code points of the machine's font for other scripts; empty without one."""
    for folder in _FOLDERS:
        root = Path(folder)
        if not root.is_dir():
            continue
        found = {path.name.lower(): path for path in root.rglob("*.tt[cf]")}
        for name in _FILES:
            path = found.get(name.lower())
            if path is not None and (covered := registered(path)):
                return covered
    return frozenset()


def registered(path: Path) -> frozenset[int]:
    """Make a font known as that for other scripts; what it has, empty if unusable."""
    try:
        font = TTFont(FALLBACK, str(path))
    except (TTFError, OSError, ValueError):
        return frozenset()
    pdfmetrics.registerFont(font)
    return frozenset(font.face.charToGlyph)


def missing(text: str) -> frozenset[str]:
    """Characters that no font at hand has a picture for."""
    rare = {c for c in set(text) if c >= " " and ord(c) not in _known()}
    if not rare:
        return frozenset()
    covered = fallback()
    return frozenset(c for c in rare if ord(c) not in covered)


def runs(text: str) -> Iterator[tuple[bool, str]]:
    """Parts of a text, and whether the font for other scripts prints them."""
    if text.isascii() or all(ord(c) in _known() for c in text):
        yield False, text
        return
    known, covered = _known(), fallback()

    def other(character: str) -> bool:
        return ord(character) not in known and ord(character) in covered

    for is_other, part in groupby(text, other):
        yield is_other, "".join(part)


def markup(text: str) -> str:
    """A text escaped for paragraphs, other scripts in their font."""
    return "".join(
        f'<font name="{FALLBACK}">{escape(part)}</font>' if is_other else escape(part)
        for is_other, part in runs(text)
    )


def remarks_on(text: str) -> tuple[str, ...]:
    """What must be said of how a text is printed, as sentences."""
    said = []
    lacking = missing(text)
    if lacking:
        said.append(
            f"Characters without a picture in the fonts at hand: {len(lacking)}; they "
            "are printed as boxes. The attached layout file has them."
        )
    if is_right_to_left(text):
        said.append(
            "Text that is written from right to left stands here in its order on "
            "paper, Arabic letters joined; a program that takes text out of the PDF "
            "may turn it round. The attached layout file has it as entered."
        )
    return tuple(said)


class ScriptCanvas(Canvas):  # type: ignore[misc]
    """A canvas whose strings may hold characters of other scripts.

    Strings are given in the order in which they are read.
    """

    def drawString(  # noqa: N802
        self, x: float, y: float, text: str, *arguments: Any, **options: Any
    ) -> None:
        self.draw_ordered(x, y, displayed(text), *arguments, **options)

    def draw_ordered(
        self, x: float, y: float, text: str, *arguments: Any, **options: Any
    ) -> None:
        """Draw a string that is in its order on paper already."""
        parts = [*runs(text)]
        if not any(is_other for is_other, _ in parts):
            super().drawString(x, y, text, *arguments, **options)
            return
        name, size = self._fontname, self._fontsize
        for is_other, part in parts:
            font = FALLBACK if is_other else name
            self.setFont(font, size)
            super().drawString(x, y, part, *arguments, **options)
            x += pdfmetrics.stringWidth(part, font, size)
        self.setFont(name, size)
