"""Conductors in space: polylines that carry a cross-section, and straight links.

A link's path runs in the sense of the run it prolongs, so that its loads are the run's.
"""

from __future__ import annotations

from collections.abc import Sequence
from math import cos, radians, sin
from typing import Literal

import numpy as np

from engine.conductor import Conductor
from engine.routes import HALF_TWIST, SHORTEST, Array, Stations, cross
from engine.runs import Bar, Round, Slot, SlotLoad

Role = Literal["run", "joint link", "closing link", "equipment"]
Side = Literal["start", "end"]

SIDES: tuple[Side, Side] = ("start", "end")


def half_sides(shapes: Sequence[Round | Bar]) -> Array:
    """Half the sides of the shapes' outlines as vectors in (u, v), (m, 2, 2). [m]"""
    halves = []
    for shape in shapes:
        if isinstance(shape, Bar):
            turn = radians(shape.turn)
            c, s = cos(turn), sin(turn)
            a, b = shape.width / 2, shape.thickness / 2
            halves.append(((a * c, a * s), (-b * s, b * c)))
        else:
            radius = shape.diameter / 2
            halves.append(((radius, 0.0), (0.0, radius)))
    return np.array(halves)


def along_route(
    made: Sequence[Slot], stations: Stations, item: str, group: str, role: Role = "run"
) -> tuple[Conductor, ...]:
    """Conductors of slots with round or bar shapes along a route.

    Raises
    ------
    ValueError
        For a multicore slot: take its cores.
    """
    paths = stations.polylines(np.array([(slot.u, slot.v) for slot in made]))
    paths.setflags(write=False)
    bar_axes: dict[float, Array] = {}
    conductors = []
    for slot, path in zip(made, paths, strict=True):
        shape = slot.shape
        if isinstance(shape, Bar):
            if shape.turn not in bar_axes:
                bar_axes[shape.turn] = _turned(stations.axes, shape.turn)
            axes = bar_axes[shape.turn]
        elif isinstance(shape, Round):
            axes = stations.plain_axes
        else:
            raise ValueError(f"slot {slot.name} is no single conductor")
        if stations.twists:
            path, axes = _twisted(path, axes, shape, stations)
        conductors.append(
            Conductor(
                key=f"{item}/{slot.name}",
                item=item,
                slot=slot.name,
                role=role,
                path=path,
                axes=axes,
                shape=shape,
                loads=slot.loads,
                group=group,
            )
        )
    return tuple(conductors)


def links(
    conductors: Sequence[Conductor],
    side: Side,
    targets: Array,
    role: Role,
    name: str,
) -> tuple[Conductor, ...]:
    """Straight links between the conductors' ends and the targets (m, 3) or (3,).

    A link at a start runs from the target to the conductor, one at an end from the
    conductor to the target. A bar's link is a bar whose width is the bar's as far as
    the link's direction lets it. Where an end lies on its target there is no link.
    """
    which = 0 if side == "start" else -1
    ends = np.array([conductor.path[which] for conductor in conductors])
    reference = np.array([conductor.axes[which] for conductor in conductors])
    starts, stops = np.broadcast_to(targets, ends.shape), ends
    if side == "end":
        starts, stops = stops, starts
    spans = stops - starts
    lengths = np.sqrt((spans * spans).sum(axis=1))
    real = lengths >= SHORTEST
    if not real.any():
        return ()
    tangents = spans / np.where(real, lengths, 1.0)[:, None]
    axes = np.repeat(_across(tangents, reference)[:, None], 2, axis=1)
    paths = np.stack([starts, stops], axis=1)
    for array in (paths, axes):
        array.setflags(write=False)
    return tuple(
        Conductor(
            key=f"{conductor.item}/{name}/{conductor.slot}",
            item=conductor.item,
            slot=conductor.slot,
            role=role,
            path=path,
            axes=across,
            shape=conductor.shape,
            loads=conductor.loads,
            group=conductor.group,
        )
        for conductor, path, across, is_real in zip(
            conductors, paths, axes, real.tolist(), strict=True
        )
        if is_real
    )


def straight(
    key: str,
    start: Sequence[float],
    stop: Sequence[float],
    loads: tuple[SlotLoad, ...],
    *,
    item: str,
    slot: str,
    shape: Round | Bar,
    role: Role = "equipment",
    reference: Array | None = None,
) -> tuple[Conductor, ...]:
    """A straight conductor, or none where it would have no length or carry nothing.

    `reference` (2, 3) are the axes of width and thickness that it keeps to as far as
    its direction lets it; without them the width lies level.
    """
    path = np.array([start, stop], dtype=np.float64)
    span = path[1] - path[0]
    length = float(np.sqrt(span @ span))
    if length < SHORTEST or not loads:
        return ()
    tangent = span / length
    if reference is None:
        level = np.array([tangent[1], -tangent[0], 0.0])
        if level @ level < SHORTEST**2:
            level = np.array([1.0, 0.0, 0.0])
        reference = np.stack([level, np.cross(level, tangent)])
    axes = np.repeat(_across(tangent[None], reference[None]), 2, axis=0)
    for array in (path, axes):
        array.setflags(write=False)
    return (
        Conductor(
            key=key,
            item=item,
            slot=slot,
            role=role,
            path=path,
            axes=axes,
            shape=shape,
            loads=loads,
            group=item,
        ),
    )


def _turned(axes: Array, degrees: float) -> Array:
    c, s = cos(radians(degrees)), sin(radians(degrees))
    u, v = axes[:, 0], axes[:, 1]
    turned: Array = np.stack([c * u + s * v, c * v - s * u], axis=1)
    turned.setflags(write=False)
    return turned


def _across(tangents: Array, reference: Array) -> Array:
    """Unit axes across the tangents (m, 3), near the reference (m, 2, 3): (m, 2, 3).

    Of the two, the one that is more nearly across is kept and the other follows.
    """
    unit = reference / np.sqrt((reference * reference).sum(axis=2, keepdims=True))
    along = (unit * tangents[:, None]).sum(axis=2)
    width_kept = np.abs(along[:, 0]) <= np.abs(along[:, 1])
    kept = np.where(width_kept[:, None], unit[:, 0], unit[:, 1])
    kept = kept - (kept * tangents).sum(axis=1)[:, None] * tangents
    kept /= np.sqrt((kept * kept).sum(axis=1))[:, None]
    other = cross(tangents, kept)
    return np.stack(
        [
            np.where(width_kept[:, None], kept, -other),
            np.where(width_kept[:, None], other, kept),
        ],
        axis=1,
    )


def _twisted(
    path: Array, axes: Array, shape: Round | Bar, stations: Stations
) -> tuple[Array, Array]:
    """Keep vertices distinct where a slot on the route's line turns at a bend.

    A round one has one vertex there. A bar turns over a millimetre before and behind
    the bend, so that it keeps its size on both straights.
    """
    path, axes = path.copy(), axes.copy()
    kept = np.ones(len(path), dtype=bool)
    for i, twist in enumerate(stations.twists):
        step = path[twist + 1] - path[twist]
        if step @ step >= SHORTEST**2:
            continue
        if isinstance(shape, Bar):
            leg = twist - i
            before, after = stations.lengths[leg - 1 : leg + 1]
            path[twist] -= min(HALF_TWIST, before / 4) * stations.tangents[leg - 1]
            path[twist + 1] += min(HALF_TWIST, after / 4) * stations.tangents[leg]
        else:
            kept[twist + 1] = False
    path, axes = path[kept], axes[kept]
    path.setflags(write=False)
    axes.setflags(write=False)
    return path, axes
