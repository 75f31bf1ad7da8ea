"""From places in the layout to places in a view and back: plan and elevations."""

from __future__ import annotations

from engine.items import Point3
from engine.sight import LOOKING_X, LOOKING_Y, PLAN, SIGHTS, Sight

__all__ = [
    "LOOKING_X",
    "LOOKING_Y",
    "PLAN",
    "SIGHTS",
    "Sight",
    "across_text",
    "to_layout",
    "to_view",
]

Point = tuple[float, float]


def to_view(sight: Sight, place: Point3) -> Point:
    """Where a place of the layout shows. [m]

    Examples
    --------
    >>> to_view(LOOKING_X, (1.0, 2.0, 3.0))
    (-2.0, 3.0)
    """
    x, y = sight.seen(place).tolist()
    return (x, y)


def to_layout(sight: Sight, seen: Point, kept: Point3) -> Point3:
    """The place of the layout that shows at `seen` and is as deep as `kept`. [m]

    Examples
    --------
    >>> to_layout(LOOKING_X, (-2.0, 3.0), (1.0, 9.0, 9.0))
    (1.0, 2.0, 3.0)
    """
    x, y, z = sight.places(seen, float(sight.depth(kept))).tolist()
    return (x, y, z)


def across_text(sight: Sight) -> tuple[str, str]:
    """Names of the axes that run to the right and upwards: ("−y", "z")."""
    if sight.is_along_line:
        return "along the line", "z"
    return _named(sight.right), _named(sight.up)


def _named(direction: Point3) -> str:
    index = max(range(3), key=lambda i: abs(direction[i]))
    return ("−" if direction[index] < 0 else "") + "xyz"[index]
