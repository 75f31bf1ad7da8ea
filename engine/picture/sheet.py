"""The frame of a map on paper, to scale, and what has been lettered in it."""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
import numpy.typing as npt
import shapely
from shapely.geometry import LineString, box
from shapely.geometry.base import BaseGeometry

from engine.picture.marks import Box, Points, Words

Shapes = npt.NDArray[np.object_]

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
        self._lines: list[BaseGeometry] = []
        self._tree: shapely.STRtree | None = None

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
        self._lines += [LineString(leg) for leg in pairwise(line)]
        self._tree = None

    def lines_under(self, areas: Shapes) -> npt.NDArray[np.intp]:
        """How many of the noted lines each of some areas on paper covers. [mm]"""
        if self._tree is None:
            self._tree = shapely.STRtree(self._lines)
        found = self._tree.query(areas, predicate="intersects")[0]
        return np.bincount(found, minlength=len(areas))

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
