"""Where the pixels of a backing drawing lie, and how two points give it a scale.

Picture points are in pixels, x to the right and y down from the upper left corner.
Places are in metres in the plane of the drawing's view, y upwards. The point `first`
lies at `origin`; the line to `second` keeps the direction that it has in the picture,
turned by `turn` degrees counter-clockwise. Places and distances are kept to 0.1 mm.
Import place: after `motions`.
"""

from __future__ import annotations

from math import dist, isfinite

from msgspec.structs import replace

from engine.edits import checked
from engine.errors import UserError
from engine.items import Point2
from engine.motions import cos_sin, neat
from engine.places import BackingDrawing

#: Picture points nearer than this give no scale. [px]
_NEAREST = 2.0

#: Decimals of what is kept: 0.1 mm, and what stays of a point reckoned in pixels.
_OF_METRES, _OF_PIXELS = 4, 4

_FRESH = BackingDrawing(id="fresh")


def is_calibrated(drawing: BackingDrawing) -> bool:
    """Whether two points and their distance were given."""
    return any(
        getattr(drawing, name) != getattr(_FRESH, name)
        for name in ("first", "second", "distance")
    )


def metres_per_pixel(drawing: BackingDrawing) -> float:
    """Scale of the picture. [m/px]

    Raises
    ------
    UserError
        When the two calibration points are the same.
    """
    apart = dist(drawing.first, drawing.second)
    if apart <= 0:
        raise UserError(
            f"Backing drawing “{drawing.title}” has no scale: its two calibration "
            "points are the same. Calibrate it again."
        )
    return drawing.distance / apart


def place_of(drawing: BackingDrawing, pixel: Point2) -> Point2:
    """Where a picture point lies in the view's plane. [m]"""
    return _shifted(drawing.origin, _way(drawing, drawing.first, pixel))


def pixel_at(drawing: BackingDrawing, place: Point2) -> Point2:
    """The picture point that lies at a place of the view's plane. [px]"""
    scale = metres_per_pixel(drawing)
    c, s = cos_sin(drawing.turn)
    dx, dy = place[0] - drawing.origin[0], place[1] - drawing.origin[1]
    return (
        drawing.first[0] + (c * dx + s * dy) / scale,
        drawing.first[1] - (c * dy - s * dx) / scale,
    )


def calibrated(
    drawing: BackingDrawing, first: Point2, second: Point2, distance: float
) -> BackingDrawing:
    """The drawing scaled so that two of its points lie a distance apart.

    Its turn stays. What was at its origin stays there; when it had no scale yet,
    nothing was rightly placed, and the first of the two points stays where it is.

    Parameters
    ----------
    drawing : BackingDrawing
    first, second : (2,) float
        Picture points. [px]
    distance : float
        Between them. [m]

    Raises
    ------
    UserError
        When the points are too near to each other or the distance is none.
    """
    if dist(first, second) < _NEAREST:
        raise UserError(
            "The two calibration points are the same: choose points that are far "
            "apart, since an error of a pixel counts less over a long distance."
        )
    if not (isfinite(distance) and distance > 0):
        raise UserError("The distance between two points must be greater than 0.")
    before = replace(
        drawing,
        first=first,
        second=second,
        distance=max(round(distance, _OF_METRES), 10.0**-_OF_METRES),
    )
    if is_calibrated(drawing):
        # The old anchor stays, so the new first point lies where the new scale says.
        way = _way(before, drawing.first, first)
        origin = _shifted(drawing.origin, way)
    else:
        origin = place_of(drawing, first)
    return checked(replace(before, origin=_neat(origin)))


def located(drawing: BackingDrawing, pixel: Point2, place: Point2) -> BackingDrawing:
    """The drawing shifted so that a picture point lies at a place.

    The point becomes the one that stays when a calibrated drawing is scaled anew.

    Parameters
    ----------
    drawing : BackingDrawing
    pixel : (2,) float
        [px]
    place : (2,) float
        [m]

    Raises
    ------
    UserError
        When the place is farther away than a layout may reach.
    """
    if not is_calibrated(drawing):
        way = _way(drawing, pixel, drawing.first)
        return checked(replace(drawing, origin=_neat(_shifted(place, way))))
    along = (
        drawing.second[0] - drawing.first[0],
        drawing.second[1] - drawing.first[1],
    )
    second = on_picture(_shifted(pixel, along))
    return checked(replace(drawing, first=pixel, second=second, origin=_neat(place)))


def turned(drawing: BackingDrawing, turn: float) -> BackingDrawing:
    """The drawing turned to an angle about its origin. [degrees]"""
    return checked(replace(drawing, turn=neat(turn % 360.0)))


def _way(drawing: BackingDrawing, start: Point2, end: Point2) -> Point2:
    """From one picture point to another, in metres in the view's plane."""
    scale = metres_per_pixel(drawing)
    c, s = cos_sin(drawing.turn)
    right, up = scale * (end[0] - start[0]), -scale * (end[1] - start[1])
    return (c * right - s * up, s * right + c * up)


def _shifted(place: Point2, way: Point2) -> Point2:
    return (place[0] + way[0], place[1] + way[1])


def _neat(place: Point2) -> Point2:
    return (round(place[0], _OF_METRES) + 0.0, round(place[1], _OF_METRES) + 0.0)


def on_picture(pixel: Point2) -> Point2:
    """A picture point without the noise of its last binary digits. [px]"""
    return (round(pixel[0], _OF_PIXELS) + 0.0, round(pixel[1], _OF_PIXELS) + 0.0)
