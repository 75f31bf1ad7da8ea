"""On which planes the view in space shows maps: as on plan, or as typed and dragged."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from itertools import pairwise
from math import dist

from app.map_request import height_figures, heights_of
from app.space_maps import (
    SHORTEST,
    MapPlace,
    across,
    level_places,
    look_heights,
    upright_place,
)
from app.view_state import Look
from app.views.space_camera import Point3
from app.views.space_letters import SpaceHandle
from engine.errors import UserError
from engine.items import Point2
from engine.layout import Layout
from engine.maps import extent
from engine.motions import neat
from engine.places import Profile
from engine.typed_lengths import length_figures, typed_length

#: Upright maps by their words.
UPRIGHT = (
    "no upright map", "at one x", "at one y", "along a line", "along a profile",
)  # fmt: skip
LINE, PROFILE = UPRIGHT[3:]

#: Level maps at once, and how far a place may be from the datum. [m]
_MOST = 12
_FARTHEST = 1e4


@dataclass(frozen=True)
class SpacePlanes:
    """What is asked for.

    Attributes
    ----------
    heights : tuple of float or None
        Of level maps above the datum. None: as the plan shows. [m]
    upright : str
        One of `UPRIGHT`.
    at : float or None
        x or y of the upright map; None: in the middle. [m]
    line : pair of points or None
        On plan, of the upright map along a line; None: the diagonal. [m]
    profile : str
        Id of the profile that upright maps stand on; empty: the first.
    """

    heights: tuple[float, ...] | None = None
    upright: str = UPRIGHT[0]
    at: float | None = None
    line: tuple[Point2, Point2] | None = None
    profile: str = ""

    def level(self, layout: Layout, look: Look) -> tuple[float, ...]:
        """The heights of the level maps. [m]"""
        return look_heights(layout, look) if self.heights is None else self.heights

    def position(self, layout: Layout) -> float:
        """x or y of the upright map. [m]"""
        if self.at is not None:
            return self.at
        x0, y0, x1, y1 = extent(layout)
        middle = x0 + x1 if self.upright == "at one x" else y0 + y1
        return neat(round(0.5 * middle, 2))

    def drawn(self, layout: Layout) -> Profile:
        """The profile that upright maps stand on.

        Raises
        ------
        UserError
            When there is none.
        """
        if not layout.profiles:
            raise UserError(
                "There is no profile to stand a map on: draw one with the Profile "
                "tool (8), or choose another place for the upright map."
            )
        known = {profile.id: profile for profile in layout.profiles}
        return known.get(self.profile, layout.profiles[0])

    def lines(self, layout: Layout) -> tuple[tuple[Point2, Point2], ...]:
        """The lines on plan under the upright maps; of a profile, its legs. [m]

        Raises
        ------
        UserError
            When it is a profile, and there is none or it stands upright itself.
        """
        area = extent(layout)
        if self.upright == PROFILE:
            profile = self.drawn(layout)
            flat = [(x, y) for x, y, _ in profile.path]
            legs = tuple(leg for leg in pairwise(flat) if dist(*leg) >= SHORTEST)
            if not legs:
                raise UserError(
                    f"“{profile.title}” has no length on plan: an upright map cannot "
                    "stand on it. Choose another profile."
                )
            return legs
        if self.upright == LINE:
            x0, y0, x1, y1 = (neat(round(v, 2)) for v in area)
            return (self.line or ((x0, y0), (x1, y1)),)
        letter = self.upright[-1]
        return (across(letter, self.position(layout), area),)

    def places(
        self, layout: Layout, look: Look, levels: tuple[float, float]
    ) -> tuple[MapPlace, ...]:
        """All planes; upright ones between two levels. [m]

        Raises
        ------
        UserError
            When a plane cannot be.
        """
        if "map" in look.hidden:
            return ()
        found = level_places(layout, self.level(layout, look), look)
        if self.upright == UPRIGHT[0]:
            return found
        name = self.upright_text(layout)
        lines = self.lines(layout)
        return (*found, *(upright_place(name, *line, levels) for line in lines))

    def upright_text(self, layout: Layout) -> str:
        """Where the upright map is: "x 3.20 m"."""
        unit = layout.settings.length_unit
        if self.upright == PROFILE:
            return f"along {self.drawn(layout).title}"
        if self.upright == LINE:
            (((a, b), (c, d)),) = self.lines(layout)
            first, second, third, fourth = (
                height_figures(v, unit) for v in (a, b, c, d)
            )
            return f"from x {first} y {second} to x {third} y {fourth} {unit}"
        return (
            f"{self.upright[-1]} {height_figures(self.position(layout), unit)} {unit}"
        )

    def field_text(self, layout: Layout, decimal: str) -> str:
        """What stands in the field of the upright map's place."""
        unit = layout.settings.length_unit
        if self.upright == PROFILE:
            return self.drawn(layout).title if layout.profiles else ""
        if self.upright == LINE:
            (ends,) = self.lines(layout)
            first, second = (
                " ".join(length_figures(v, unit, decimal) for v in end) for end in ends
            )
            return f"{first} to {second}"
        return f"{length_figures(self.position(layout), unit, decimal)} {unit}"

    def handles(
        self, layout: Layout, look: Look, levels: tuple[float, float]
    ) -> tuple[SpaceHandle, ...]:
        """What of the planes can be dragged, each along its normal."""
        if "map" in look.hidden:
            return ()
        x0, y0, _, _ = extent(layout)
        found = [
            SpaceHandle(f"level {k}", (x0, y0, z), (0.0, 0.0, 1.0))
            for k, z in enumerate(self.level(layout, look))
        ]
        line = self._movable(layout)
        if line is not None:
            (a, b), (c, d) = line
            at = (0.5 * (a + c), 0.5 * (b + d), levels[1])
            found.append(SpaceHandle("upright", at, _across(line)))
        return tuple(found)

    def _movable(self, layout: Layout) -> tuple[Point2, Point2] | None:
        """The line of an upright map that can be shifted: a single one. [m]"""
        if self.upright == UPRIGHT[0]:
            return None
        try:
            lines = self.lines(layout)
        except UserError:
            return None
        return lines[0] if len(lines) == 1 and dist(*lines[0]) >= SHORTEST else None

    def dragged(self, name: str, to: float, layout: Layout, look: Look) -> SpacePlanes:
        """With a handle's plane elsewhere. [m]"""
        if name == "upright":
            if self.upright not in (LINE, PROFILE):
                return replace(self, at=neat(to))
            line = self._movable(layout)
            assert line is not None, "only a single line has a handle"
            x, y, _ = _across(line)
            by = to - 0.5 * sum(x * end[0] + y * end[1] for end in line)
            a, b = ((neat(end[0] + by * x), neat(end[1] + by * y)) for end in line)
            # Beside its profile, the map is one along a line.
            return replace(self, upright=LINE, line=(a, b))
        heights = list(self.level(layout, look))
        heights[int(name.split()[1])] = neat(to)
        return replace(self, heights=tuple(heights))


def _across(line: tuple[Point2, Point2]) -> Point3:
    """Unit vector on plan across a line; along +x or +y for one along an axis."""
    (a, b), (c, d) = line
    length = dist(*line)
    x, y = (b - d) / length, (c - a) / length
    if x < 0 or (x == 0 and y < 0):
        x, y = -x, -y
    return (x + 0.0, y + 0.0, 0.0)


def heights_text(planes: SpacePlanes, layout: Layout, look: Look, decimal: str) -> str:
    """What stands in the field of the heights."""
    unit = layout.settings.length_unit
    figures = (length_figures(z, unit, decimal) for z in planes.level(layout, look))
    return f"{' '.join(figures)} {unit}"


def typed_heights(text: str, unit: str, decimal: str) -> tuple[float, ...] | None:
    """Heights parted by blanks; None for an empty text: as the plan shows. [m]

    Raises
    ------
    UserError
        When one of them is no length, or there are too many.

    Examples
    --------
    >>> typed_heights("0.5 1 1.5 m", "m", "."), typed_heights(" ", "m", ".")
    ((0.5, 1.0, 1.5), None)
    >>> typed_heights("500 1000 mm", "m", ".")
    (0.5, 1.0)
    """
    words = _lengths(text.replace(";", " "))
    if len(words) > _MOST:
        raise UserError(f"The most level maps at once are {_MOST}.")
    found = tuple(sorted({_placed(typed_length(w, unit, decimal)) for w in words}))
    return found or None


def typed_line(text: str, unit: str, decimal: str) -> tuple[Point2, Point2]:
    """Two places on plan: "0 1.35 to 9 1.35". [m]

    Raises
    ------
    UserError
        When it is something else.
    """
    words = _lengths(re.sub(r"\b(from|to|x|y)\b", " ", text))
    if len(words) != 4:
        raise UserError(
            "A line is two places on plan: enter x y to x y, such as 0 1.35 to 9 1.35."
        )
    a, b, c, d = (_placed(typed_length(word, unit, decimal)) for word in words)
    return ((a, b), (c, d))


def profile_called(layout: Layout, text: str) -> str:
    """Id of the profile with a title.

    Raises
    ------
    UserError
        When there is none.
    """
    title = text.strip()
    for profile in layout.profiles:
        if profile.title == title:
            return profile.id
    known = ", ".join(f"“{profile.title}”" for profile in layout.profiles[:4])
    raise UserError(
        f"There is no profile “{title}”: "
        + (f"enter one of {known}." if known else "draw one with the Profile tool (8).")
    )


def typed_place(text: str, unit: str, decimal: str) -> float:
    """One coordinate. [m]

    Raises
    ------
    UserError
        When it is no length.
    """
    return _placed(typed_length(text.lstrip("xyXY= "), unit, decimal))


def zone_heights(layout: Layout, look: Look) -> tuple[float, ...]:
    """All heights that the plan's map is the largest of. [m]"""
    heights, _ = heights_of(layout, replace(look, height=None))
    return heights[:_MOST]


def _lengths(text: str) -> list[str]:
    """The lengths of a text, each with its unit; one at the end holds for all."""
    words = re.sub(r"(\d)\s+(mm|cm|m|ft|in)\b", r"\1\2", text).split()
    named = [match[0] for w in words if (match := re.search(r"[a-z]+$", w))]
    if len(named) == 1 and words[-1].endswith(named[0]):
        return [*(w + named[0] for w in words[:-1]), words[-1]]
    return words


def _placed(metres: float) -> float:
    if abs(metres) > _FARTHEST:
        raise UserError(f"A place of a map is at most {_FARTHEST:g} m from the datum.")
    return neat(metres)
