"""Lengths as people type and read them: `320mm`, `10ft6in`, `2,4`.

A length without a unit is in the unit of its field. Import place: after
`typed_numbers`.
"""

from __future__ import annotations

import re

from engine.errors import UserError
from engine.typed_numbers import NUMBER, number_text, plain_text, typed_quantity
from engine.units import LENGTH_UNITS

_UNITS = {**LENGTH_UNITS, "cm": 1e-2}

#: Signs for foot and inch, as keyboards and word processors give them.
_SIGNS = {"'": "ft", "′": "ft", "’": "ft", '"': "in", "″": "in", "”": "in"}

#: What a place may be away from the datum, and so the longest length. [m]
FARTHEST = 1e5

#: Sums of feet and inches are what they are meant to be to this many decimals. [m]
_DECIMALS = 10

_PIECE = re.compile(rf"({NUMBER})\s*([A-Za-z]+|['′’\"″”])?\s*")

#: Decimal places of each unit: at least, and at most (a hundredth of a millimetre).
_PLACES = {"m": (2, 5), "mm": (0, 2), "ft": (2, 5), "in": (1, 4)}


def typed_length(text: str, unit: str = "m", decimal: str = ".") -> float:
    """A length in metres.

    Parameters
    ----------
    text : str
        As typed, with or without m, cm, mm, ft, in, ' or ". Feet may be followed by
        inches.
    unit : str
        Of a number without one; a key of `LENGTH_UNITS`.
    decimal : str
        Decimal sign of the place, as in `typed_number`.

    Raises
    ------
    UserError
        When it is no length, can be read in two ways, or is beyond any site.

    Examples
    --------
    >>> typed_length("320mm"), typed_length("2.4"), typed_length("-35 cm")
    (0.32, 2.4, -0.35)
    >>> typed_length("10ft6in"), typed_length("2,5", "mm", ",")
    (3.2004, 0.0025)
    """
    plain = plain_text(text)
    if not plain:
        raise UserError(f"Enter a length, such as {length_text(1.2, unit)}.")
    sign = -1.0 if plain.startswith("-") else 1.0
    pieces = _pieces(plain.lstrip("+-").strip())
    named = [kind for _, kind in pieces]
    if len(pieces) != 1 and named != ["ft", "in"]:
        raise UserError(
            f"“{plain[:40]}” is not a length: enter a number with m, cm, mm, ft or in, "
            "such as 320mm or 10ft6in."
        )
    parts = [
        typed_quantity(f"{figures} {kind}", _UNITS, unit, decimal)
        for figures, kind in pieces
    ]
    length = sign * (parts[0] if len(parts) == 1 else round(sum(parts), _DECIMALS))
    if abs(length) > FARTHEST:
        raise UserError(f"“{plain[:40]}” is more than 100 km: check its unit.")
    return length + 0.0


def length_text(metres: float, unit: str = "m", decimal: str = ".") -> str:
    """A length as shown in a field, with its unit.

    Examples
    --------
    >>> length_text(2.4), length_text(0.0285, "mm"), length_text(3.2004, "ft")
    ('2.40 m', '28.5 mm', '10.50 ft')
    """
    return f"{length_figures(metres, unit, decimal)} {unit}"


def length_figures(metres: float, unit: str = "m", decimal: str = ".") -> str:
    """The figures of a length, without its unit."""
    fewest, most = _PLACES[unit]
    whole, _, rest = f"{metres / LENGTH_UNITS[unit]:.{most}f}".partition(".")
    rest = rest.rstrip("0").ljust(fewest, "0")
    figures = f"{whole}{decimal}{rest}" if rest else whole
    is_zero = not figures.strip(f"-0{decimal}")
    if is_zero and metres != 0:
        return number_text(metres / LENGTH_UNITS[unit], decimal)
    return figures.removeprefix("-") if is_zero else figures


def _pieces(text: str) -> list[tuple[str, str]]:
    """Numbers with their units; none when the text is something else."""
    found: list[tuple[str, str]] = []
    at = 0
    while at < len(text):
        piece = _PIECE.match(text, at)
        if piece is None:
            return []
        kind = piece[2] or ""
        found.append((piece[1], _SIGNS.get(kind, kind)))
        at = piece.end()
    return found
