"""Labels of sources on a drawing: close by where there is room, else with a leader.

A label is kept off other labels, and off the lines of the drawing as far as it can be.
All lengths on paper are in millimetres.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import numpy.typing as npt
import shapely

from engine.drawing import Line, Plan, Point, RunShape
from engine.picture.marks import BLACK, WHITE, Picture, Stroke, Words
from engine.picture.sheet import Sheet
from engine.printed_text import fitted
from engine.units import LENGTH_UNITS

LABEL_SIZE = 2.2

#: Room between a label's edge and what it is of; from `_LED` on a leader shows it.
_DISTANCES = (0.9, 2.5, 4.5, 7.0, 10.0, 14.0, 19.0, 26.0, 34.0)
_LED = 3.0

#: Directions in which a label may stand: above and below first, then to the sides.
_TURNS = np.radians(
    [90, 270, 0, 180, 60, 120, 240, 300, 30, 150, 210, 330, 75, 105, 255, 285]
)

#: What a millimetre of line under a label, and under its leader, weighs against one
#: of distance.
_COVERED, _CROSSED = 0.6, 1.2

#: What it weighs that another label's own point is hidden.
_HIDDEN = 12.0

#: Length of lines that a label within what it names may cover. [mm]
_FEW = 4.0

#: Legs of a run beside which its label may stand, and its shortest one. [mm]
_MOST_LEGS, _LEAST_LEG = 6, 4.0

#: Places that are looked at first.
_MOST_PLACES = 120

Floats = npt.NDArray[np.float64]


def letter_sources(
    picture: Picture, sheet: Sheet, plan: Plan, length_unit: str = "m"
) -> None:
    """Name runs with their heights, enclosures and equipment."""
    wanted: list[_Wanted] = []
    for place in (*plan.enclosures, *plan.equipment):
        middle = sheet.paper(*place.label_place)
        outline = [sheet.paper(x, y) for x, y in place.area.outline]
        wanted.append(_Wanted(place.title, [middle], shapely.Polygon(outline)))
    for run in plan.runs:
        span = _span(run.levels, length_unit)
        title = fitted(run.title, LABEL_SIZE, 45.0)
        text = f"{title}, z {span} {length_unit}"
        wanted.append(_Wanted(text, _along(sheet, run)))
    points = np.array([each.anchors[0] for each in wanted])
    for k, each in enumerate(wanted):
        _letter(picture, sheet, each, points[k + 1 :])


@dataclass(frozen=True)
class _Wanted:
    """A label: its text, the points where it may belong, what it may stand within."""

    text: str
    anchors: list[Point]
    outline: shapely.Polygon | None = None


def _span(levels: tuple[float, float], unit: str) -> str:
    """Two levels in a unit of length, or one where they are the same."""
    digits = {"m": 2, "mm": 0, "ft": 2, "in": 1}[unit]
    low, high = (
        f"{level / LENGTH_UNITS[unit] + 0.0:.{digits}f}".replace("-", "−")
        for level in levels
    )
    return low if levels[1] - levels[0] < 0.005 else f"{low}–{high}"


def _along(sheet: Sheet, run: RunShape) -> list[Point]:
    """Where a run's label may belong: its own place, and the middles of long legs."""
    route: Line = tuple(sheet.paper(x, y) for x, y in run.route)
    legs = sorted(pairwise(route), key=lambda leg: -_length(*leg))
    middles = [
        (0.5 * (a[0] + b[0]), 0.5 * (a[1] + b[1]))
        for a, b in legs[:_MOST_LEGS]
        if _length(a, b) >= _LEAST_LEG
    ]
    return [sheet.paper(*run.label_place), *middles]


def _length(a: Point, b: Point) -> float:
    return float(np.hypot(b[0] - a[0], b[1] - a[1]))


def _letter(picture: Picture, sheet: Sheet, wanted: _Wanted, later: Floats) -> None:
    """Write a label where it disturbs least; none where there is no room at all.

    `later` are the points of the labels that are still to be written.
    """
    words = Words((0.0, 0.0), fitted(wanted.text, LABEL_SIZE, 70.0), LABEL_SIZE)
    half, tall = 0.5 * words.width + 0.5, 0.5 * LABEL_SIZE + 0.4
    outline = wanted.outline
    anchors = [at for at in wanted.anchors if sheet.frame.contains(shapely.Point(at))]
    if not anchors:
        return
    centres, of, distances = _places(anchors, half, tall, outline is not None)
    boxes = _boxes(centres, half, tall)
    free = _free(sheet, boxes)
    is_within = outline is not None and outline.buffer(-0.3).contains(boxes[0])
    if is_within and 0 in free and sheet.lines_under(boxes[:1])[0] <= _FEW:
        # It stands within what it names.
        chosen, distances[0] = 0, 0.0
    else:
        points = np.asarray(anchors)[of]
        chosen = -1
        for part in (free[:_MOST_PLACES], free[_MOST_PLACES:]):
            if chosen < 0 < len(part):
                least = _least(sheet, boxes[part], points[part], distances[part], later)
                chosen = int(part[least]) if least >= 0 else -1
        if chosen < 0:
            return
    at = (float(centres[chosen, 0]), float(centres[chosen, 1]))
    sheet.occupy(boxes[chosen])
    if distances[chosen] >= _LED:
        _lead(picture, sheet, anchors[int(of[chosen])], boxes[chosen])
    picture.add(Words(at, words.text, LABEL_SIZE, BLACK, anchor="middle", patch=True))


def _places(
    anchors: Sequence[Point], half: float, tall: float, within: bool
) -> tuple[Floats, npt.NDArray[np.intp], Floats]:
    """Middles of labels, of which anchor each is, and how far its edge stands off.

    The nearest come first; `within`: before them the first anchor itself.
    """
    centres: list[tuple[float, float]] = [anchors[0]] if within else []
    of, distances = [0] * len(centres), [4.0] * len(centres)
    for distance in _DISTANCES:
        for k, (x, y) in enumerate(anchors):
            for turn in _TURNS:
                across, up = float(np.cos(turn)), float(np.sin(turn))
                centres.append(
                    (x + (half + distance) * across, y + (tall + distance) * up)
                )
                of.append(k)
                distances.append(distance)
    return np.array(centres), np.array(of), np.array(distances)


def _boxes(centres: Floats, half: float, tall: float) -> npt.NDArray[np.object_]:
    x, y = centres[:, 0], centres[:, 1]
    found: npt.NDArray[np.object_] = shapely.box(x - half, y - tall, x + half, y + tall)
    return found


def _points_near(
    shapes: npt.NDArray[np.object_], points: Floats
) -> npt.NDArray[np.intp]:
    """How many of some points each shape hides or touches."""
    if not len(points):
        return np.zeros(len(shapes), np.intp)
    tree = shapely.STRtree(shapely.points(points))
    found = tree.query(shapes, predicate="dwithin", distance=0.6)[0]
    return np.bincount(found, minlength=len(shapes)).astype(np.intp)


def _free(sheet: Sheet, boxes: npt.NDArray[np.object_]) -> npt.NDArray[np.intp]:
    """Which labels lie in the frame and on no other."""
    taken = sheet.covers_labels(boxes)
    inside = np.asarray(shapely.contains(sheet.frame, boxes))
    return np.flatnonzero(inside & ~taken)


def _least(
    sheet: Sheet,
    boxes: npt.NDArray[np.object_],
    points: Floats,
    distances: Floats,
    later: Floats,
) -> int:
    """Which label disturbs least; −1: each would need a leader across another one.

    `later` are points that they should not hide.
    """
    leaders = shapely.shortest_line(shapely.points(points), boxes)
    led = distances >= _LED
    barred = led & sheet.covers_labels(leaders)
    cost = distances + _COVERED * sheet.lines_under(boxes)
    cost += _HIDDEN * _points_near(boxes, later)
    under = _CROSSED * sheet.lines_across(leaders)
    cost += np.where(led, under + _HIDDEN * _points_near(leaders, later), 0.0)
    cost[barred] = np.inf
    best = int(np.argmin(cost))
    return best if np.isfinite(cost[best]) else -1


def _lead(
    picture: Picture, sheet: Sheet, at: Point, label: shapely.geometry.base.BaseGeometry
) -> None:
    """A thin line with a dot, from what is named to its label."""
    line = shapely.shortest_line(shapely.Point(at), label)
    sheet.occupy(line)
    ends = tuple((float(x), float(y)) for x, y in line.coords)
    picture.add(Stroke(ends, 0.5, WHITE), Stroke(ends, 0.15, BLACK))
    for width, colour in ((1.2, WHITE), (0.8, BLACK)):
        # A short stroke as wide as long: a dot.
        reach = 0.5 * width
        dot = ((at[0] - reach, at[1]), (at[0] + reach, at[1]))
        picture.add(Stroke(dot, width, colour))
