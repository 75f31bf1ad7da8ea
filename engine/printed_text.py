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


@cache
def _advance(character: str, bold: bool) -> float:
    """Width of one character at a size of 1; no pair is set closer."""
    own = float(_font(bold).getlength(character)) / _MEASURED_AT
    # Wide characters of other scripts come from another font, as wide as high.
    wide = unicodedata.east_asian_width(character) in ("W", "F")
    return max(own, 1.0) if wide else own


def text_width(text: str, size: float, *, bold: bool = False) -> float:
    """Width of one line of text, in the unit of its size."""
    return size * sum(_advance(character, bold) for character in text)


def fitted(text: str, size: float, width: float, *, bold: bool = False) -> str:
    """One line of text, cut with an ellipsis where it is wider than `width`."""
    line = one_line(text)
    if _count_that_fits(line, size, width, bold) == len(line):
        return line
    room = width - text_width("…", size, bold=bold)
    return line[: _count_that_fits(line, size, room, bold)].rstrip() + "…"


def wrapped(
    text: str, size: float, width: float, *, bold: bool = False
) -> tuple[str, ...]:
    """Text broken into lines no wider than `width`; long words are broken too."""
    lines: list[str] = []
    blank = text_width(" ", size, bold=bold)
    for paragraph in printable(text).split("\n"):
        line, used = "", 0.0
        for word in _with_units(paragraph.split()):
            long = text_width(word, size, bold=bold)
            if line and used + blank + long <= width:
                line, used = f"{line} {word}", used + blank + long
                continue
            if line:
                lines.append(line)
            if long > width:
                while len(word) > 1:
                    keep = max(1, _count_that_fits(word, size, width, bold))
                    if keep == len(word):
                        break
                    lines.append(word[:keep])
                    word = word[keep:]
                long = text_width(word, size, bold=bold)
            line, used = word, long
        lines.append(line)
    return tuple(lines)


#: What stays on the line of the number before it.
_UNITS = frozenset(
    ("%", "µT", "nT", "mT", "mG", "A/m", "T", "Hz", "kHz", "m", "m²", "mm", "ft", "A")
)


def _with_units(words: list[str]) -> list[str]:
    """Words, each unit together with its number.

    Examples
    --------
    >>> _with_units("share 15 % of 2.5 µT, at A".split())
    ['share', '15 %', 'of', '2.5 µT,', 'at', 'A']
    """
    found: list[str] = []
    for word in words:
        if found and word.rstrip(",;.)") in _UNITS and found[-1][-1:].isdigit():
            found[-1] = f"{found[-1]} {word}"
        else:
            found.append(word)
    return found


def _count_that_fits(text: str, size: float, width: float, bold: bool) -> int:
    """How many characters from the start fit in a width."""
    used = 0.0
    for count, character in enumerate(text):
        used += size * _advance(character, bold)
        if used > width:
            return count
    return len(text)
