"""Numbers as people type them: either decimal sign, with or without a unit.

A sign that could stand for thousands as well as for decimals is never guessed: it is
refused with a sentence. Import place: after `units`.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping

from engine.errors import UserError

#: A number without the sign in front of it.
NUMBER = r"(?:\d+(?:[.,]\d+)*|[.,]\d+)(?:[eE][+\-]?\d+)?"

#: Dashes that stand for a minus where text comes from a document.
_MINUS = str.maketrans({"−": "-", "–": "-", "\u00a0": " ", "\u202f": " "})

_SIGNED = re.compile(rf"^([+\-]?)\s*({NUMBER})\s*(.*)$", re.DOTALL)


def plain_text(text: str) -> str:
    """`text` with ordinary blanks and minus signs, trimmed."""
    return text.translate(_MINUS).strip()


def typed_number(text: str, decimal: str = ".") -> float:
    """The number in `text`, which holds nothing else.

    Parameters
    ----------
    text : str
        As typed; the decimal sign may be a point or a comma.
    decimal : str
        The decimal sign of the place, "." or ",". The other one is understood too,
        unless three digits follow it: then it could separate thousands.

    Raises
    ------
    UserError
        When it is no number, or could be two different ones.

    Examples
    --------
    >>> typed_number("1,6"), typed_number("-.5"), typed_number("1,625", ",")
    (1.6, -0.5, 1.625)
    """
    found = _SIGNED.match(plain_text(text))
    if found is None or found[3]:
        raise UserError(f"“{_short(text)}” is not a number; type one such as 2.5.")
    value = _value(found[2], decimal)
    return -value if found[1] == "-" else value


def typed_quantity(
    text: str, units: Mapping[str, float], unit: str, decimal: str = "."
) -> float:
    """The number in `text` times the factor of the unit behind it.

    Parameters
    ----------
    text : str
        A number, perhaps followed by one of `units`.
    units : mapping
        What one of each unit is in SI.
    unit : str
        The unit that a bare number is in.

    Raises
    ------
    UserError
        When it is no number, or its unit is none of `units`.

    Examples
    --------
    >>> typed_quantity("320mm", {"m": 1.0, "mm": 1e-3}, "m")
    0.32
    """
    found = _SIGNED.match(plain_text(text))
    if found is None:
        raise UserError(
            f"“{_short(text)}” is not a number; type one such as 2.5 {unit}".rstrip()
            + "."
        )
    value = _value(found[2], decimal)
    named = found[3].strip()
    factor = units.get(named) if named else units[unit]
    if factor is None:
        same = [x for x in units if x.lower() == named.lower()]
        if len(same) != 1:
            known = ", ".join(x for x in units if x)
            raise UserError(f"“{_short(named)}” is no unit here; use {known}.")
        factor = units[same[0]]
    exact = _quotient(value, factor)
    return -exact if found[1] == "-" else exact


def number_text(value: float, decimal: str = ".", digits: int = 10) -> str:
    """`value` as it would be typed, without trailing zeros.

    Examples
    --------
    >>> number_text(1600.0), number_text(0.92, ",")
    ('1600', '0,92')
    """
    text = f"{value:.{digits}g}"
    if "e" in text and 1e-6 <= abs(value) < 1e10:
        text = f"{value:.12f}".rstrip("0").rstrip(".")
    return text.replace(".", decimal)


def _quotient(value: float, factor: float) -> float:
    """value · factor, so that 320 · 0.001 is 0.32 and not a rounding beside it."""
    if factor < 1 and (whole := round(1 / factor)) * factor == 1:
        return value / whole
    return value * factor


def _value(digits: str, decimal: str) -> float:
    """The value of digits with at most one decimal sign."""
    mantissa = re.split("[eE]", digits)[0]
    signs = [character for character in mantissa if character in ".,"]
    other = "," if decimal == "." else "."
    fraction = re.split("[.,]", mantissa)[-1]
    whole = re.split("[.,]", mantissa)[0]
    could_be_thousands = signs == [other] and len(fraction) == 3 and whole.strip("0")
    if len(signs) > 1 or could_be_thousands:
        raise UserError(
            f"“{digits}” could be read in two ways; type it without a sign between "
            f"thousands and with “{decimal}” before decimals."
        )
    value = float(digits.replace(",", "."))
    if not math.isfinite(value):
        raise UserError(f"“{_short(digits)}” is too large a number.")
    return value


def _short(text: str) -> str:
    text = " ".join(text.split())
    return text if len(text) <= 40 else text[:39] + "…"
