"""Typed places and sizes as words: `to 3.2 -0.35 z 2.6`, `go 2.4 toward 90`.

Blanks separate, units are glued to their number (`320mm`, `10ft6in`). The decimal sign
of the locale and the point both work. 0° is +x, angles run counter-clockwise.
"""

from __future__ import annotations

import re
from itertools import pairwise
from math import cos, isfinite, radians, sin

from app.tools.tool import Entry
from engine.errors import UserError
from engine.units import LENGTH_UNITS

#: What a place may be away from the origin. [m]
FARTHEST = 1e5

_UNITS = {
    **LENGTH_UNITS,
    "cm": 1e-2,
    "'": 0.3048,
    '"': 0.0254,
    "′": 0.3048,
    "″": 0.0254,
}
_NUMBER = r"\d+(?:[.,]\d*)?|[.,]\d+"
_PART = re.compile(rf"({_NUMBER})(mm|cm|m|ft|in|['\"′″])?")
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


def length(text: str, *, unit: str = "m", decimal: str = ".") -> float:
    """A length or coordinate as typed, in metres.

    Raises
    ------
    UserError
        When it is no number with a unit of length.

    Examples
    --------
    >>> length("320mm"), length("-10ft6in"), length("3,2", decimal=",")
    (0.32, -3.2004, 3.2)
    """
    plain = text.strip().replace("−", "-")
    sign = -1.0 if plain.startswith("-") else 1.0
    body = plain.lstrip("+-") if plain[:1] in "+-" else plain
    parts = _PART.findall(body)
    if not parts or "".join(number + mark for number, mark in parts) != body:
        raise UserError(
            f"“{text}” is no length: write a number, with its unit glued to it where "
            f"it is not in {unit}, as in 320mm or 10ft6in."
        )
    several = len(parts) > 1
    factors = [_UNITS[mark] if mark else LENGTH_UNITS[unit] for _, mark in parts]
    falling = all(a > b for a, b in pairwise(factors))
    if several and (not all(mark for _, mark in parts) or not falling):
        raise UserError(
            f"“{text}” mixes units unclearly: write the larger unit first and each "
            "number with its own, as in 10ft6in."
        )
    total = sum(
        _number(number, text, decimal) * factor
        for (number, _), factor in zip(parts, factors, strict=True)
    )
    value = round(sign * total, 10) + 0.0
    if not isfinite(value) or abs(value) > FARTHEST:
        raise UserError(f"“{text}” is more than 100 km: check its unit.")
    return value


def angle(text: str, *, decimal: str = ".") -> float:
    """A direction as typed, in degrees counter-clockwise from +x.

    Raises
    ------
    UserError
        When it is no number.
    """
    plain = text.strip().replace("−", "-")
    body = re.sub(r"(°|deg)$", "", plain)
    if not re.fullmatch(rf"[+-]?(?:{_NUMBER})", body):
        raise UserError(
            f"“{text}” is no direction: write degrees counter-clockwise from +x, as in "
            "90 or 22.5."
        )
    sign = -1.0 if body.startswith("-") else 1.0
    return sign * _number(body.lstrip("+-"), text, decimal)


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
        found[place] = length(item, unit=unit, decimal=decimal)
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
        up = length(words[4], unit=unit, decimal=decimal)
        up = -up if lower[3] == "down" else up
    return walked(
        length(words[0], unit=unit, decimal=decimal),
        angle(words[2], decimal=decimal),
        up,
    )


def _size(words: list[str], unit: str, decimal: str) -> Entry:
    if len(words) != 2:
        raise UserError(
            "“size” takes two lengths, along x and along y, as in “size 10 6”."
        )
    x, y = (length(word, unit=unit, decimal=decimal) for word in words)
    return sized(x, y)


def _number(digits: str, text: str, decimal: str) -> float:
    if "," in digits and decimal != ",":
        raise UserError(
            f"“{text}” has a comma: the decimal sign here is the point, and thousands "
            "are not separated."
        )
    return float(digits.replace(",", "."))
