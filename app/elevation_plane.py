"""Which upright plane a look means, how to call it, and where it stands at first."""

from __future__ import annotations

from dataclasses import dataclass

from app.map_request import height_figures
from app.view_state import Look
from engine.elevation import Upright, lines_along
from engine.items import Point3
from engine.layout import Layout
from engine.maps import extent
from engine.motions import neat
from engine.sight import LOOKING_X, LOOKING_Y, Sight

PLAN_VIEW = "Plan"
ALONG = "Along a line"

#: Views that look along an axis, by their names.
ELEVATIONS = {"Looking +y": LOOKING_Y, "Looking +x": LOOKING_X}


@dataclass(frozen=True)
class DrawnLine:
    """A straight part of a profile that can be looked along."""

    profile: str
    leg: int
    title: str
    sight: Sight


def drawn_lines(layout: Layout) -> tuple[DrawnLine, ...]:
    """The lines of a layout that can be looked along, in its order."""
    found = []
    for profile in layout.profiles:
        sights = lines_along(profile)
        for leg, sight in enumerate(sights):
            part = f", part {leg + 1}" if len(sights) > 1 else ""
            found.append(DrawnLine(profile.id, leg, f"{profile.title}{part}", sight))
    return tuple(found)


def line_of(layout: Layout, look: Look) -> DrawnLine | None:
    """The line that a look means, or the first; None where none is drawn."""
    lines = drawn_lines(layout)
    own = [line for line in lines if line.profile == look.line]
    exact = [line for line in own if line.leg == look.leg]
    return next(iter((*exact, *own, *lines)), None)


def upright_of(layout: Layout, look: Look, view: str) -> Upright | None:
    """The upright plane of a view; None on plan, and where no line is drawn."""
    if view == ALONG:
        line = line_of(layout, look)
        return None if line is None else Upright(line.sight, 0.0)
    if view not in ELEVATIONS:
        return None
    sight = ELEVATIONS[view]
    depth = look.plane_y if sight is LOOKING_Y else look.plane_x
    return Upright(sight, middle_depth(layout, sight) if depth is None else depth)


def plane_text(layout: Layout, look: Look, view: str) -> str:
    """The plane of a view in words: "vertical plane y 3.20 m"; empty on plan."""
    if view == ALONG:
        line = line_of(layout, look)
        return "" if line is None else f"vertical plane along {line.title}"
    upright = upright_of(layout, look, view)
    if upright is None:
        return ""
    unit = layout.settings.length_unit
    figures = height_figures(upright.depth, unit)
    return f"vertical plane {upright.sight.axis} {figures} {unit}"


def with_depth(sight: Sight, depth: float) -> dict[str, float]:
    """The field of a look that puts the plane of an elevation there. [m]"""
    return {"plane_y" if sight is LOOKING_Y else "plane_x": neat(depth)}


def middle_depth(layout: Layout, sight: Sight) -> float:
    """The depth of the middle of what is drawn. [m]"""
    x0, y0, x1, y1 = extent(layout)
    middle = (0.5 * (x0 + x1), 0.5 * (y0 + y1), 0.0)
    return neat(float(sight.depth(middle)))


def chosen_place(
    layout: Layout, selection: frozenset[str], worst: dict[str, Point3]
) -> Point3 | None:
    """Where a selected receptor is, or the worst place of a selected zone.

    Parameters
    ----------
    worst
        Places of the largest comparison, by the ids of zones. [m]
    """
    for receptor in layout.receptors:
        if receptor.id in selection:
            return receptor.at
    for zone in layout.zones:
        if zone.id in selection and zone.id in worst:
            return worst[zone.id]
    return None
