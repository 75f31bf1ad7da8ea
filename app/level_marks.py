"""How far a reference level reaches, as marks on the drawings and in words."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from app.level_distance import PlaceFactor, Reached
from app.map_request import comparable_levels, height_figures
from app.tools.tool import Dimension, Overlay, Point
from engine.distance_to_level import LevelDistance
from engine.picture import OffsetLines
from engine.sight import LOOKING_Y, PLAN, Sight
from engine.typed_lengths import length_text

Floats = npt.NDArray[np.float64]


def overlay_of(
    answer: Reached, sight: Sight, load: PlaceFactor | None = None
) -> Overlay | None:
    """The lines and the dimension as a view shows them; None for other views.

    `load` is written at its place on plan.
    """
    unit = answer.request.layout.settings.length_unit
    title = answer.level.title
    if sight is PLAN:
        lines = _seen(answer.plan.lines, (0.0, 0.0))
        request = answer.request
        text = f"{title} · {request.heights_name}"
        source = answer.measured_from
        found = Overlay(
            lines=lines,
            labels=() if _is_on_map(answer) else _names(lines, text),
            dashed=(source,) if source else (),
        )
        if load is not None and load.at is not None:
            labels = (*found.labels, (load.at[:2], load.text))
            found = replace(found, labels=labels, points=(load.at[:2],))
        distance = answer.distance
        if distance is None:
            return found
        told = distance_text(distance, unit)
        return replace(
            found,
            points=(*found.points, distance.start, distance.end),
            dimensions=(Dimension(distance.start, distance.end, told),),
        )
    for own, level_lines in answer.elevations:
        if own is sight:
            origin = np.array(level_lines.plane.origin)
            x, z = sight.seen(origin).tolist()
            lines = _seen(level_lines.lines, (x, z))
            k, axis = (1, "y") if sight is LOOKING_Y else (0, "x")
            at = f"{axis} {height_figures(answer.through[k], unit)} {unit}"
            return Overlay(lines=lines, labels=_names(lines, f"{title} · at {at}"))
    return None


def stale_overlay(answer: Reached, sight: Sight) -> Overlay | None:
    """Lines that no longer belong to the layout: dashed, and saying so."""
    found = overlay_of(answer, sight)
    if found is None:
        return None
    text = f"{answer.level.title} · out of date"
    return Overlay(dashed=found.lines, labels=_names(found.lines, text))


def offset_lines(answer: Reached) -> OffsetLines:
    """The lines and the dimension on plan, as maps in files show them."""
    unit = answer.request.layout.settings.length_unit
    distance = answer.distance
    dimension = None
    if distance is not None:
        dimension = (
            distance.start, distance.end, distance_text(distance, unit),
        )  # fmt: skip
    return OffsetLines(
        name=f"{answer.level.title}, every frequency counted",
        sentence=f"{told(answer)}.",
        lines=answer.plan.lines,
        measured_from=np.array(answer.measured_from, np.float64).reshape(-1, 2),
        dimension=dimension,
    )


def _is_on_map(answer: Reached) -> bool:
    """Whether the map has a named line of the level already."""
    request = answer.request
    shown = comparable_levels(request.layout, request.heights)
    return any(level.id == request.level for level in shown)


def _seen(lines: Sequence[Floats], origin: Point) -> tuple[tuple[Point, ...], ...]:
    return tuple(
        tuple((float(u) + origin[0], float(v) + origin[1]) for u, v in line)
        for line in lines
    )


def _names(
    lines: tuple[tuple[Point, ...], ...], text: str
) -> tuple[tuple[Point, str], ...]:
    """The name at the top of the longest line."""
    if not lines:
        return ()
    longest = max(lines, key=len)
    return ((max(longest, key=lambda p: p[1]), text),)


def distance_text(distance: LevelDistance, unit: str) -> str:
    """The distance and what it is measured from, in the display unit."""
    most = "at least " if distance.is_cut else ""
    rounded = round(distance.distance, 3)
    return f"{most}{length_text(rounded, unit)} from {distance.measured_from}"


def told(answer: Reached) -> str:
    """The result in one or two sentences."""
    title, where = answer.level.title, answer.request.heights_name
    unit = answer.request.layout.settings.length_unit
    if answer.plan.everywhere:
        side = answer.plan.everywhere
        return f"All of the area looked at is {side} {title} ({where}): no line."
    if not answer.plan.lines:
        return f"No place equals {title} ({where})."
    parts = []
    if answer.request.target is None:
        parts.append(f"{title} is met along the lines drawn ({where})")
    if answer.distance is not None:
        largest = distance_text(answer.distance, unit)
        if answer.before is not None:
            rounded = round(answer.before.distance, 3)
            most = "at least " if answer.before.is_cut else ""
            largest += f", was {most}{length_text(rounded, unit)}"
        parts.append(f"{title} reaches {largest} ({where})")
    elif answer.request.target is not None:
        parts.append(f"{title} does not reach beyond {answer.request.target.title}")
    if answer.plan.is_cut:
        parts.append("a line runs out of the area looked at")
    if answer.plan.is_bound:
        parts.append(f"upper bound, because {answer.plan.bound_reason}")
    step = length_text(round(answer.plan.step, 3), unit)
    parts.append(f"closed lines smaller than {step} may be missed")
    return " · ".join(parts)
