"""Heights as they are written beside things: "z 2.80", "z 0.30–6.20"."""

from __future__ import annotations

from engine.units import LENGTH_UNITS

_DECIMALS = {"m": 2, "mm": 0, "ft": 2, "in": 1}


def length_text(metres: float, unit: str) -> str:
    """A length in the display unit `unit`, without its name.

    Examples
    --------
    >>> length_text(2.8, "m"), length_text(-0.0001, "m"), length_text(2.8, "mm")
    ('2.80', '0.00', '2800')
    """
    text = f"{metres / LENGTH_UNITS[unit]:.{_DECIMALS[unit]}f}"
    if float(text) == 0.0:
        text = text.lstrip("-")
    return text.replace("-", "−")


def range_text(levels: tuple[float, float], unit: str, axis: str = "z") -> str:
    """One height, or the lowest and the highest.

    Examples
    --------
    >>> range_text((2.8, 2.8), "m"), range_text((0.3, 6.2), "m")
    ('z 2.80 m', 'z 0.30 to 6.20 m')
    """
    low, high = (length_text(level, unit) for level in levels)
    if low == high:
        return f"{axis} {low} {unit}"
    return f"{axis} {low} to {high} {unit}"
