"""Text on paper: the fonts that ship with the program, and what they can print."""

from __future__ import annotations

import unicodedata
from functools import cache
from importlib.resources import files
from pathlib import Path

from PIL import ImageFont

#: DejaVu Sans, free licence beside the files; covers Latin, Greek, Cyrillic, symbols.
FONTS = Path(str(files("engine"))) / "report" / "fonts"
REGULAR = FONTS / "DejaVuSans.ttf"
BOLD = FONTS / "DejaVuSans-Bold.ttf"

#: Stands for a character that has no picture.
_REPLACED = "\N{REPLACEMENT CHARACTER}"

_MEASURED_AT = 100


def printable(text: str) -> str:
    """User text with every character that cannot be printed made visible.

    Control and direction characters and lone surrogates become U+FFFD; line breaks
    stay, tabs become blanks.

    Examples
    --------
    >>> printable("a\\x07b\\tc")
    'a�b c'
    """
    unified = text.replace("\r\n", "\n").replace("\r", "\n").replace("\t", " ")
    return "".join(
        _REPLACED
        if character != "\n" and unicodedata.category(character) in ("Cc", "Cf", "Cs")
        else character
        for character in unified
    )


def one_line(text: str) -> str:
    """Printable text without line breaks."""
    return " ".join(printable(text).split())


@cache
def _font(bold: bool) -> ImageFont.FreeTypeFont:
    return ImageFont.truetype(
        str(BOLD if bold else REGULAR),
        _MEASURED_AT,
        layout_engine=ImageFont.Layout.BASIC,
    )


def text_width(text: str, size: float, *, bold: bool = False) -> float:
    """Width of one line of text, in the unit of its size."""
    return float(_font(bold).getlength(text)) * size / _MEASURED_AT


def fitted(text: str, size: float, width: float, *, bold: bool = False) -> str:
    """One line of text, cut with an ellipsis where it is wider than `width`."""
    line = one_line(text)
    if text_width(line[:2000], size, bold=bold) <= width and len(line) <= 2000:
        return line
    low, high = 0, min(len(line), 2000)
    while low < high:
        middle = (low + high + 1) // 2
        if text_width(line[:middle] + "…", size, bold=bold) <= width:
            low = middle
        else:
            high = middle - 1
    return line[:low].rstrip() + "…"


def wrapped(
    text: str, size: float, width: float, *, bold: bool = False
) -> tuple[str, ...]:
    """Text broken into lines no wider than `width`; long words are broken too."""
    lines: list[str] = []
    for paragraph in printable(text).split("\n"):
        line = ""
        for word in paragraph.split():
            trial = f"{line} {word}" if line else word
            if text_width(trial, size, bold=bold) <= width:
                line = trial
                continue
            if line:
                lines.append(line)
            line = word
            while text_width(line, size, bold=bold) > width and len(line) > 1:
                keep = _characters_that_fit(line, size, width, bold)
                lines.append(line[:keep])
                line = line[keep:]
        lines.append(line)
    return tuple(lines)


def _characters_that_fit(word: str, size: float, width: float, bold: bool) -> int:
    low, high = 1, len(word)
    while low < high:
        middle = (low + high + 1) // 2
        if text_width(word[:middle], size, bold=bold) <= width:
            low = middle
        else:
            high = middle - 1
    return low
