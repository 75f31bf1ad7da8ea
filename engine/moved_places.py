"""What an edit did to a list of places, such as a route: told in few words."""

from __future__ import annotations

from collections.abc import Sequence

from engine.origins import value_text

#: As many single vertices are told.
_MOST = 3

#: Steps that differ by less are one and the same, beyond rounding. [m]
_SAME = 1e-9

_Places = Sequence[tuple[float, ...]]


def told_places(before: object, after: object) -> tuple[str, str] | None:
    """Two lists of places by what differs between them; None where they are no such.

    Examples
    --------
    >>> told_places(((0.0, 1.0), (2.0, 1.0)), ((0.5, 1.0), (2.5, 1.0)))
    ('the first vertex at 0, 1 m', 'each of 2 moved by 0.5, 0 m')
    >>> told_places(((0.0, 1.0), (2.0, 1.0)), ((0.0, 1.0), (2.0, 3.0)))
    ('vertex 2 at 2, 1 m', 'vertex 2 at 2, 3 m')
    """
    was, now = _places(before), _places(after)
    if was is None or now is None:
        return None
    if len(was) != len(now):
        return f"{len(was)} vertices", f"{len(now)} vertices"
    if any(len(a) != len(b) for a, b in zip(was, now, strict=True)):
        return None
    steps = [_step(a, b) for a, b in zip(was, now, strict=True)]
    if all(max(map(abs, _step(steps[0], step))) <= _SAME for step in steps):
        moved = f"each of {len(now)} moved by {_text(steps[0])}"
        return f"the first vertex at {_text(was[0])}", moved
    differ = [k for k, (a, b) in enumerate(zip(was, now, strict=True)) if a != b]
    return _told(was, differ), _told(now, differ)


def _told(places: _Places, wanted: Sequence[int]) -> str:
    told = [f"vertex {k + 1} at {_text(places[k])}" for k in wanted[:_MOST]]
    more = len(wanted) - _MOST
    return "; ".join(told) + (f"; and {more} more" if more > 0 else "")


def _text(place: tuple[float, ...]) -> str:
    return f"{value_text(tuple(round(x, 6) + 0.0 for x in place))} m"


def _step(a: tuple[float, ...], b: tuple[float, ...]) -> tuple[float, ...]:
    return tuple(y - x for x, y in zip(a, b, strict=True))


def _places(value: object) -> _Places | None:
    """The value where it is a list of points in the plane or in space."""
    if not isinstance(value, tuple) or not value:
        return None
    for point in value:
        if not isinstance(point, tuple) or len(point) not in (2, 3):
            return None
        if not all(isinstance(x, float | int) for x in point):
            return None
    return value
