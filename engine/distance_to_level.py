"""Distance to a level: where a value equals it, how far that is, at which load.

A line on plan holds for one height or the largest over several; on an upright plane
for that plane. Distances are in the plane's own axes.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry import LinearRing, LineString, Polygon
from shapely.geometry.base import BaseGeometry

from engine.case_fields import CaseCurrents, CaseFields
from engine.criteria import ReferenceLevel
from engine.errors import UserError
from engine.items import Outline, Point2
from engine.level_grid import Traced, Use, Used, on_level, traced
from engine.level_use import LevelUse, level_use
from engine.levels import Kind
from engine.runs import Run
from engine.sampling import Plane, horizontal
from engine.units import significant

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

#: x from, y from, x to, y to. [m]
Extent = tuple[float, float, float, float]

_VALUES_AT_ONCE = 2_000_000
#: Ends of a line this near to the edge of the area were cut off by it. [m]
_AT_EDGE = 1e-3
_ROUNDS = 8


@dataclass(frozen=True, eq=False)
class LevelLines:
    """Where a value equals a reference level on a plane.

    Attributes
    ----------
    case, level : str
        Ids.
    plane : Plane
        Of several heights, the lowest.
    heights : tuple of float
        Levels above the datum over which the value is the largest; empty for a plane
        that is not level. [m]
    lines : tuple of (n, 2) float
        In x and y for a level plane, otherwise along the plane's edges; closed where
        first and last agree. Vertices lie on the level to within 1 mm. [m]
    is_cut : bool
        Whether a line runs out of the area, so that it may go further than shown.
    step : float
        A closed line smaller than this may be missed. [m]
    unrefined : int
        Vertices that are only as exact as `step`.
    everywhere : str
        "above" or "below" where the whole area is so; empty otherwise.
    is_bound, bound_reason
        Whether values are upper bounds because angles are unknown, and why.
    """

    case: str
    level: str
    kind: Kind
    plane: Plane
    heights: tuple[float, ...]
    lines: tuple[Floats, ...]
    is_cut: bool
    step: float
    unrefined: int
    everywhere: str
    is_bound: bool
    bound_reason: str


@dataclass(frozen=True)
class LevelDistance:
    """The largest distance from something to the line of a level.

    `start` lies on what it is measured from, `end` on the line, in the axes of the
    plane; `is_cut` says that the line may go further than the area looked at. [m]
    """

    distance: float
    measured_from: str
    start: Point2
    end: Point2
    is_cut: bool

    @property
    def sentence(self) -> str:
        """In words, for a dimension on plan."""
        most = "at least " if self.is_cut else ""
        return f"{most}{self.distance:.3f} m from {self.measured_from}"


@dataclass(frozen=True)
class LoadFactor:
    """All currents of the load case times this make the value equal the level."""

    factor: float

    @property
    def sentence(self) -> str:
        """In words, saying what is scaled."""
        return (
            f"{significant(self.factor)} × this case, all its currents together, "
            "makes the calculated value equal the level."
        )


def load_factor(ratio: float) -> LoadFactor | None:
    """The factor on a load case from the ratio to the level; None without a field.

    Ratios are proportional to the currents when all of them are scaled together, at
    all frequencies: all sum rules are, and so are bounds over unknown angles.

    Examples
    --------
    >>> load_factor(0.73).sentence[:16]
    '1.37 × this case'
    """
    return LoadFactor(1.0 / ratio) if ratio > 0 else None


def lines_on_plan(
    fields: CaseFields,
    case: CaseCurrents,
    level: ReferenceLevel,
    heights: Sequence[float],
    area: Extent,
    *,
    kind: Kind = "AC",
) -> LevelLines:
    """Where the value, or the largest over the heights, equals a level on plan.

    Parameters
    ----------
    heights
        Levels above the datum, at least one. [m]
    area
        On plan. [m]

    Raises
    ------
    UserError
        When the case cannot be compared with the level.
    ValueError
        Without any height, or with an empty area.
    ComputationCancelled
        When the fields' `cancelled` says so.
    """
    if not heights:
        raise ValueError("lines on plan need at least one height")
    levels = tuple(sorted(set(heights)))
    planes = [horizontal((area[0], area[2]), (area[1], area[3]), z) for z in levels]
    search = LevelSearch(fields, case, level, kind, planes, levels)
    return search.lines()


def lines_on_plane(
    fields: CaseFields,
    case: CaseCurrents,
    level: ReferenceLevel,
    plane: Plane,
    *,
    kind: Kind = "AC",
) -> LevelLines:
    """Where the value equals a level on any plane; as `lines_on_plan`."""
    return LevelSearch(fields, case, level, kind, [plane], ()).lines()


def run_line(run: Run) -> LineString:
    """A run's route on plan. [m]"""
    return LineString([vertex[:2] for vertex in run.route])


def edge_of(outline: Outline) -> LinearRing:
    """The edge of a zone or a room on plan. [m]"""
    return LinearRing(outline)


def side_of(outline: Outline, side: int) -> LineString:
    """One wall of a room or the front of a board: from vertex `side` to the next."""
    return LineString([outline[side], outline[(side + 1) % len(outline)]])


class LevelSearch:
    """The search for the lines of one level on planes that lie over each other."""

    def __init__(
        self,
        fields: CaseFields,
        case: CaseCurrents,
        level: ReferenceLevel,
        kind: Kind,
        planes: Sequence[Plane],
        heights: tuple[float, ...],
    ) -> None:
        self.fields = CaseFields(
            fields.conductors, (case,), fields.cache, fields.cancelled
        )
        self.case, self.level, self.kind = case, level, kind
        self.planes, self.heights = planes, heights
        plane = planes[0]
        self.size = (
            float(np.linalg.norm(plane.first)),
            float(np.linalg.norm(plane.second)),
        )
        first = np.array(plane.first) / self.size[0]
        second = np.array(plane.second) / self.size[1]
        self.basis = np.array([first, second])
        self.origin = np.array(plane.origin[:2]) if heights else np.zeros(2)
        self.told: LevelUse | None = None

    def use(self, places: Floats) -> Used:
        """Ratio at (n, 2) places of the rectangle, the largest over the planes."""
        parts = max(1, len(self.case.components))
        block = max(1000, _VALUES_AT_ONCE // parts)
        found = [self._use(places[k : k + block]) for k in range(0, len(places), block)]
        if not found:
            return Used(np.zeros(0), np.zeros(0, bool), np.zeros(0))
        return Used(
            np.concatenate([part.ratios for part in found]),
            np.concatenate([part.masked for part in found]),
            np.concatenate([part.distances for part in found]),
        )

    def _use(self, places: Floats) -> Used:
        ratios, masks, distances = [], [], []
        for plane in self.planes:
            points = np.array(plane.origin) + places @ self.basis
            b = self.fields.flux_densities(points)[0]
            used = level_use(b, self.case.components, self.level, self.kind)
            if used.ratios is None:
                raise UserError(used.reason)
            self.told = used
            mask = self.fields.masked(points, 0.0)[0]
            ratios.append(np.where(mask, 0.0, used.ratios))
            masks.append(mask)
            distances.append(self.fields.distances(points))
        return Used(
            np.max(ratios, axis=0), np.all(masks, axis=0), np.min(distances, axis=0)
        )

    def lines(self) -> LevelLines:
        """The lines on the whole rectangle."""
        found: Traced = traced(*self.size, self.use)
        told = self.told or LevelUse(None, "")
        everywhere = ""
        if not found.lines and found.any_above != found.any_below:
            everywhere = "above" if found.any_above else "below"
        return LevelLines(
            case=self.case.case.id,
            level=self.level.id,
            kind=self.kind,
            plane=self.planes[0],
            heights=self.heights,
            lines=tuple(line + self.origin for line in found.lines),
            is_cut=any(self._is_cut(line, found.step) for line in found.lines),
            step=found.step,
            unrefined=found.unrefined,
            everywhere=everywhere,
            is_bound=told.is_bound,
            bound_reason=told.bound_reason,
        )

    def _is_cut(self, line: Floats, step: float) -> bool:
        if np.all(line[0] == line[-1]):
            return False
        ends = line[[0, -1]]
        # A moved end leaves the edge by its way along the normal at most.
        slack = 2 * step + _AT_EDGE
        at_edge = (ends < slack) | (ends > np.array(self.size) - slack)
        return bool(np.any(at_edge))

    def at_use(self) -> Use:
        """As `use`, of places in the axes of the lines."""
        return lambda places: self.use(places - self.origin)


def largest_distance(
    fields: CaseFields,
    case: CaseCurrents,
    level: ReferenceLevel,
    found: LevelLines,
    target: BaseGeometry,
    measured_from: str,
    *,
    beyond: Polygon | None = None,
) -> LevelDistance | None:
    """The place of a level's lines that is farthest from something on the plane.

    Parameters
    ----------
    fields, case, level, found
        The lines, and what they were found with.
    target
        A run's line, an edge or a side, in the axes of the lines. [m]
    measured_from
        What that is, in words.
    beyond
        Only places outside this area count: the room whose wall it is.

    Returns
    -------
    LevelDistance or None
        To a millimetre; None where no line counts.
    """
    planes = [found.plane]
    if found.heights:
        x, y, _ = found.plane.origin
        planes = [
            Plane((x, y, z), found.plane.first, found.plane.second)
            for z in found.heights
        ]
    use = LevelSearch(
        fields, case, level, found.kind, planes, found.heights
    ).at_use()  # fmt: skip
    best: tuple[float, Floats] | None = None
    for line in found.lines:
        for _ in range(_ROUNDS):
            apart = _apart(line, target, beyond)
            k = int(np.argmax(apart))
            line = _denser(line, k, found.step, use)
        apart = _apart(line, target, beyond)
        k = int(np.argmax(apart))
        if apart[k] >= 0 and (best is None or apart[k] > best[0]):
            best = (float(apart[k]), line[k])
    if best is None:
        return None
    link = shapely.shortest_line(target, shapely.Point(best[1]))
    start = shapely.get_coordinates(link)[0]
    return LevelDistance(
        distance=best[0],
        measured_from=measured_from,
        start=(float(start[0]), float(start[1])),
        end=(float(best[1][0]), float(best[1][1])),
        is_cut=found.is_cut,
    )


def _apart(line: Floats, target: BaseGeometry, beyond: Polygon | None) -> Floats:
    """(n,) distances of the vertices; −1 where they do not count. [m]"""
    apart: Floats = shapely.distance(target, shapely.points(line))
    if beyond is not None:
        inside = shapely.intersects_xy(beyond, line[:, 0], line[:, 1])
        apart = np.where(inside, -1.0, apart)
    return apart


def _denser(line: Floats, k: int, step: float, use: Use) -> Floats:
    """With a vertex on the level in the middle of both pieces that meet at one."""
    pieces = [j for j in (k - 1, k) if 0 <= j < len(line) - 1]
    if k in (0, len(line) - 1) and np.all(line[0] == line[-1]):
        pieces = [0, len(line) - 2]
    along = np.array([line[j + 1] - line[j] for j in pieces])
    lengths = np.linalg.norm(along, axis=1)
    if not np.all(lengths > 2 * _AT_EDGE):
        return line
    normals = np.column_stack([-along[:, 1], along[:, 0]]) / lengths[:, None]
    middles = np.array([(line[j] + line[j + 1]) / 2 for j in pieces])
    moved, left = on_level(middles, normals, step, use)
    at = [j + 1 for j, stays in zip(pieces, left, strict=True) if not stays]
    made: Floats = np.insert(line, at, moved[~left], axis=0)
    return made
