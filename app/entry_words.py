"""Typed places and sizes as words: `to 3.2 -0.35 z 2.6`, `go 2.4 toward 90`.

Lengths are those of `engine.typed_lengths`; here blanks separate, so units are glued
to their number (`320mm`, `10ft6in`), and a comma is a decimal sign only where the
locale has it: elsewhere it could as well part two numbers. 0° is +x, angles run
counter-clockwise.
"""

from __future__ import annotations

import re
from math import cos, radians, sin

from app.tools.tool import Entry
from engine.errors import UserError
from engine.typed_lengths import typed_length
from engine.typed_numbers import typed_number

_AXES = {"x": 0, "y": 1, "z": 2, "dx": 0, "dy": 1, "dz": 2}
_HELP = "Begin with to, by, go or size, as in “to 3.2 -0.35 z 2.6”."


def entry(text: str, *, unit: str = "m", decimal: str = ".") -> Entry:
    """The entry that a line of words means.

    Parameters
    ----------
    text : str
        `to x y [z]`, `by dx dy [dz]`, `go length toward degrees [up height]` or
        `size along-x along-y`.
    unit : str
        Of numbers without one: "m", "mm", "ft" or "in".
    decimal : str
        The locale's decimal sign, besides the point.

    Raises
    ------
    UserError
        When the words cannot be understood; says which, and what would be.

    Examples
    --------
    >>> entry("by 1.2 -0.4").x, entry("size 10ft6in 6").size
    (1.2, (3.2004, 6.0))
    """
    words = text.split()
    if not words:
        raise UserError(f"Nothing is entered. {_HELP}")
    first, rest = words[0].casefold(), words[1:]
    match first:
        case "to" | "by":
            return _place(first, rest, unit, decimal)
        case "go":
            return _walk(rest, unit, decimal)
        case "size":
            return _size(rest, unit, decimal)
    raise UserError(f"“{words[0]}” is not understood here. {_HELP}")


def angle(text: str, *, decimal: str = ".") -> float:
    """A direction as typed, in degrees counter-clockwise from +x.

    Raises
    ------
    UserError
        When it is no number.
    """
    body = re.sub(r"\s*(°|deg)$", "", text.strip())
    try:
        return typed_number(body, decimal)
    except UserError:
        raise UserError(
            f"“{text}” is no direction: write degrees counter-clockwise from +x, as in "
            "90 or 22.5."
        ) from None


def walked(distance: float, toward: float, up: float | None = None) -> Entry:
    """The way of a length in a direction, and up. [m, degrees]"""
    quarter = round(toward / 90.0)
    if toward == 90.0 * quarter:
        c, s = ((1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0))[quarter % 4]
    else:
        c, s = cos(radians(toward)), sin(radians(toward))
    x, y = (round(distance * part, 10) + 0.0 for part in (c, s))
    return Entry("point", x, y, up, is_relative=True)


def sized(along_x: float, along_y: float) -> Entry:
    """A size; the opposite corner may lie to the left or below. [m]

    Raises
    ------
    UserError
        When a side has no length.
    """
    if along_x == 0 or along_y == 0:
        raise UserError("Both sides of a size must be other than 0.")
    return Entry("size", size=(along_x, along_y))


def _place(word: str, words: list[str], unit: str, decimal: str) -> Entry:
    found: list[float | None] = [None, None, None]
    place = 0
    labelled = False
    for item in words:
        axis = _AXES.get(item.casefold())
        if axis is not None:
            if labelled:
                raise UserError(f"“{item}” needs a number after the letter before it.")
            place, labelled = axis, True
            continue
        if place > 2:
            raise UserError(f"“{item}” is one number too many: there are x, y and z.")
        if found[place] is not None:
            raise UserError(f"{'xyz'[place]} is entered twice: leave one of them out.")
        found[place] = _length(item, unit, decimal)
        place, labelled = place + 1, False
    if labelled:
        raise UserError(f"A number is missing after “{words[-1]}”.")
    if found == [None, None, None]:
        example = "to 3.2 -0.35 z 2.6" if word == "to" else "by 1.2 -0.4"
        raise UserError(f"Numbers are missing after “{word}”, as in “{example}”.")
    x, y, z = found
    return Entry("point", x, y, z, is_relative=word == "by")


def _walk(words: list[str], unit: str, decimal: str) -> Entry:
    lower = [word.casefold() for word in words]
    if len(words) not in (3, 5) or lower[1] != "toward":
        raise UserError(
            "“go” takes a length and a direction, as in “go 2.4 toward 90”, and up "
            "or down where wanted: “go 2.4 toward 90 up 0.3”."
        )
    up = None
    if len(words) == 5:
        if lower[3] not in ("up", "down"):
            raise UserError(f"“{words[3]}” is not understood here: write up or down.")
        up = _length(words[4], unit, decimal)
        up = -up if lower[3] == "down" else up
    _refuse_comma(words[2], decimal)
    return walked(
        _length(words[0], unit, decimal),
        angle(words[2], decimal=decimal),
        up,
    )


def _size(words: list[str], unit: str, decimal: str) -> Entry:
    if len(words) != 2:
        raise UserError(
            "“size” takes two lengths, along x and along y, as in “size 10 6”."
        )
    x, y = (_length(word, unit, decimal) for word in words)
    return sized(x, y)


def _length(word: str, unit: str, decimal: str) -> float:
    _refuse_comma(word, decimal)
    return typed_length(word, unit, decimal)


def _refuse_comma(word: str, decimal: str) -> None:
    if "," in word and decimal != ",":
        raise UserError(
            f"“{word}” has a comma: the decimal sign here is the point, and blanks "
            "separate numbers."
        )
