"""Conversion between SI inside the program and the units people read and type.

Everything inside is SI. This module is the border: it knows the display units of
flux density and length, and how many digits a printed value deserves.
"""

from __future__ import annotations

import math

#: Magnetic constant as used in every formula of the program. [H/m]
MU0 = 4e-7 * math.pi

#: Tesla per display unit of magnetic flux density; A/m through µ0 (air).
FLUX_DENSITY_UNITS: dict[str, float] = {
    "µT": 1e-6,
    "mT": 1e-3,
    "nT": 1e-9,
    "mG": 1e-7,
    "G": 1e-4,
    "A/m": MU0,
}

#: Names a keyboard can type for the units above.
TYPED_UNITS: dict[str, str] = {"uT": "µT", "μT": "µT"}

#: Metres per display unit of length.
LENGTH_UNITS: dict[str, float] = {"m": 1.0, "mm": 1e-3, "ft": 0.3048, "in": 0.0254}


def flux_density_unit(name: str) -> str:
    """The unit's name as printed, from a name as typed.

    Raises
    ------
    ValueError
        When no such unit is known.
    """
    printed = TYPED_UNITS.get(name, name)
    if printed not in FLUX_DENSITY_UNITS:
        known = ", ".join(FLUX_DENSITY_UNITS)
        raise ValueError(f"unknown unit of flux density {name!r}; known are {known}")
    return printed


def in_unit(tesla: float, unit: str) -> float:
    """A flux density in the display unit `unit`, from tesla."""
    return tesla / FLUX_DENSITY_UNITS[unit]


def to_tesla(value: float, unit: str) -> float:
    """A flux density in tesla, from the display unit `unit`."""
    return value * FLUX_DENSITY_UNITS[unit]


def significant(value: float, digits: int = 3) -> str:
    """`value` with `digits` significant figures and no exponent where readable.

    Examples
    --------
    >>> significant(0.0123456), significant(1234.5), significant(0.0)
    ('0.0123', '1230', '0')
    """
    if value == 0:
        return "0"
    if not math.isfinite(value):
        return str(value)
    magnitude = math.floor(math.log10(abs(value)))
    rounded = round(value, digits - 1 - magnitude)
    if rounded == 0:
        return "0"
    magnitude = math.floor(math.log10(abs(rounded)))
    if magnitude < -6 or magnitude > 8:
        return f"{rounded:.{digits - 1}e}"
    return f"{rounded:.{max(0, digits - 1 - magnitude)}f}"


def significant_above(value: float, digits: int = 3) -> str:
    """As `significant`, but never less than the value, as a bound is printed.

    Examples
    --------
    >>> significant_above(3.5901), significant_above(3.59), significant_above(99.96)
    ('3.60', '3.59', '100')
    """
    text = significant(value, digits)
    if float(text) >= value or not math.isfinite(value):
        return text
    step = 10.0 ** (math.floor(math.log10(abs(value))) - digits + 1)
    return significant(float(text) + step, digits)


def bound_beside(value: float, limit: float, digits: int = 3) -> str:
    """A bound, rounded up, with as many figures as it takes to stay below a limit.

    Examples
    --------
    >>> bound_beside(0.99951, 1.0), bound_beside(1.0012, 1.0)
    ('0.9996', '1.01')
    """
    for count in range(digits, 12):
        text = significant_above(value, count)
        if value >= limit or float(text) < limit:
            return text
    return repr(value)


def flux_density_text(tesla: float, unit: str, digits: int = 3) -> str:
    """A flux density as printed, with its unit.

    Examples
    --------
    >>> flux_density_text(7.912e-6, "µT"), flux_density_text(7.912e-6, "mG")
    ('7.91 µT', '79.1 mG')
    """
    return f"{significant(in_unit(tesla, unit), digits)} {unit}"


def text_beside(value: float, limit: float, digits: int = 3) -> str:
    """`value` with as many figures as it takes to show its side of `limit`.

    Examples
    --------
    >>> text_beside(7.4996, 7.5), text_beside(7.2, 7.5)
    ('7.4996', '7.20')
    """
    for count in range(digits, 12):
        text = significant(value, count)
        shown = float(text)
        if value == limit or (shown != limit and (shown < limit) == (value < limit)):
            return text
    return repr(value)
