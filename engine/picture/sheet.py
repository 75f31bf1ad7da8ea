"""The frame of a map on paper, to scale, and what has been lettered in it."""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
import shapely
from shapely.geometry import LineString, box
from shapely.geometry.base import BaseGeometry

from engine.picture.marks import Box, Points, Words

Shapes = npt.NDArray[np.object_]
Floats = npt.NDArray[np.float64]

#: Side of the cells in which lines are counted. [mm]
_CELL = 0.5

#: Places of a leader that are looked at.
_SAMPLES = 60

#: Scales that a drawing may have, 1 : n.
SCALES = tuple(
    round(step * 10**power)
    for power in range(0, 7)
    for step in (10, 12.5, 15, 20, 25, 30, 40, 50, 60, 75)
    if float(step * 10**power).is_integer()
)


class Sheet:
    """The map's frame on paper, and what has been lettered in it so far."""

    def __init__(self, world: Box, scale: float, corner: tuple[float, float]) -> None:
        self.world = world
        #: Millimetres on paper per metre.
        self.factor = 1000.0 / scale
        self.left, self.bottom = corner
        self.width = (world[2] - world[0]) * self.factor
        self.height = (world[3] - world[1]) * self.factor
        self.frame = box(
            self.left, self.bottom, self.left + self.width, self.bottom + self.height
        )
        self._lettered: list[BaseGeometry] = []
        self._lines: list[Floats] = []
        self._sums: Floats | None = None

    def paper(self, x: float, y: float) -> tuple[float, float]:
        """Where a point of the world lies on paper. [m to mm]"""
        return (
            self.left + (x - self.world[0]) * self.factor,
            self.bottom + (y - self.world[1]) * self.factor,
        )

    def clipped(self, line: Points) -> list[Points]:
        """The pieces of a line on paper that lie in the frame."""
        if len(line) < 2:
            return []
        cut = LineString(line).intersection(self.frame)
        return [
            tuple((float(x), float(y)) for x, y in part.coords)
            for part in getattr(cut, "geoms", (cut,))
            if isinstance(part, LineString) and len(part.coords) > 1
        ]

    def occupy(self, area: BaseGeometry) -> None:
        """Keep labels off an area on paper. [mm]"""
        self._lettered.append(area)

    def is_occupied(self, area: BaseGeometry) -> bool:
        """Whether a label in an area on paper would cover another one. [mm]"""
        return any(area.intersects(other) for other in self._lettered)

    def note_line(self, line: Points) -> None:
        """Keep labels off a line on paper where they can stand elsewhere. [mm]"""
        self._lines.append(np.asarray(line))
        self._sums = None

    def lines_under(self, areas: Shapes) -> Floats:
        """What length of the noted lines the bounds of each area cover. [mm]"""
        sums = self._line_sums()
        most = np.array(sums.shape) - 1
        low, high = (self._cells(shapely.bounds(areas)[:, k : k + 2]) for k in (0, 2))
        low, high = np.clip(low, 0, most), np.clip(high + 1, 0, most)
        found = sums[high[:, 0], high[:, 1]] - sums[low[:, 0], high[:, 1]]
        found += sums[low[:, 0], low[:, 1]] - sums[high[:, 0], low[:, 1]]
        return _CELL * found

    def lines_across(self, leaders: Shapes) -> Floats:
        """What length of the noted lines lies under straight leaders. [mm]"""
        sums = self._line_sums()
        ends = shapely.get_coordinates(leaders).reshape(-1, 1, 2, 2)
        along = np.linspace(0.0, 1.0, _SAMPLES)[:, None]
        places = ends[:, :, 0] * (1.0 - along) + ends[:, :, 1] * along
        x, y = np.moveaxis(
            np.clip(self._cells(places), 0, np.array(sums.shape) - 2), -1, 0
        )
        each = sums[x + 1, y + 1] - sums[x, y + 1] - sums[x + 1, y] + sums[x, y]
        share: Floats = np.minimum(each, 1.0).mean(axis=1)
        return np.asarray(shapely.length(leaders)) * share

    def _cells(self, places: Floats) -> npt.NDArray[np.intp]:
        """In which cells of the frame places on paper lie."""
        return np.floor((places - (self.left, self.bottom)) / _CELL).astype(np.intp)

    def _line_sums(self) -> Floats:
        """In how many cells, left of and below each corner, the noted lines lie."""
        if self._sums is None:
            shape = np.ceil((self.width / _CELL, self.height / _CELL)).astype(int) + 1
            counts = np.zeros(shape)
            for line in self._lines:
                length = np.hypot(*np.diff(line, axis=0).T)
                total = np.concatenate([[0.0], np.cumsum(length)])
                at = np.arange(0.0, total[-1], _CELL) + 0.5 * _CELL
                x, y = (np.interp(at, total, line[:, k]) for k in (0, 1))
                cells = self._cells(np.stack([x, y], axis=1))
                cells = np.clip(cells, 0, shape - 1)
                np.add.at(counts, (cells[:, 0], cells[:, 1]), 1.0)
            padded = np.pad(counts, ((1, 0), (1, 0)))
            self._sums = padded.cumsum(axis=0).cumsum(axis=1)
        return self._sums

    def covers_labels(self, areas: Shapes) -> npt.NDArray[np.bool_]:
        """Which of some areas on paper would cover a label. [mm]"""
        tree = shapely.STRtree(self._lettered)
        taken = np.zeros(len(areas), np.bool_)
        taken[tree.query(areas, predicate="intersects")[0]] = True
        return taken

    def has_room(self, words: Words) -> bool:
        """Whether a label lies in the frame and on no other; if so it is taken."""
        half = 0.5 * words.width + 0.6
        tall = 0.5 * words.size + 0.5
        turn = math.radians(words.turn)
        right = (math.cos(turn), math.sin(turn))
        corners = [
            (
                words.at[0] + a * half * right[0] - b * tall * right[1],
                words.at[1] + a * half * right[1] + b * tall * right[0],
            )
            for a, b in ((-1, -1), (1, -1), (1, 1), (-1, 1), (-1, -1))
        ]
        outline = LineString(corners).convex_hull
        if not self.frame.contains(outline):
            return False
        if self.is_occupied(outline):
            return False
        self._lettered.append(outline)
        return True


def drawing_scale(world: Box, width: float, height: float) -> int:
    """The largest scale 1 : n at which a world fits a space on paper. [m, mm]"""
    needed = 1000.0 * max((world[2] - world[0]) / width, (world[3] - world[1]) / height)
    return next((scale for scale in SCALES if scale >= needed), math.ceil(needed))
