"""Conductors inside equipment, and the sockets where runs and joints meet it.

A board's currents follow from its ways, a loop's from itself. What a transformer's
terminals carry follows from what is attached, and is made by `conductors`.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from math import cos, radians, sin

import numpy as np

from engine.conductor import Conductor
from engine.equipment import Board, ConductorLoop, Pole, Transformer, Way
from engine.errors import UserError
from engine.polylines import along_route, straight
from engine.routes import SHORTEST, Array, stations
from engine.runs import Bar, Round, Slot, SlotLoad
from engine.sections import carried_loads, negative, numbered, total

Point = tuple[float, float, float]

#: Name of a transformer's star among its ends.
STAR = "star"


@dataclass(frozen=True, eq=False)
class Socket:
    """An end of an equipment.

    Attributes
    ----------
    name : str
        "L1", "star", "incoming/L1", "F1/L1".
    at : (3,) float
        Where it is. [m]
    shape : Round or Bar
        Of the conductor behind it.
    axes : (2, 3) float
        That conductor's width and thickness there.
    supplies : tuple of SlotLoad or None
        Current that comes out of the equipment; None where it is what is attached.
    """

    name: str
    at: Point
    shape: Round | Bar
    axes: Array
    supplies: tuple[SlotLoad, ...] | None


@dataclass(frozen=True, eq=False)
class WayEnd:
    """The sockets of a way, and where it is closed when its currents go no further."""

    name: str
    sockets: tuple[str, ...]
    #: None: the way goes on.
    closed_at: Point | None


@dataclass(frozen=True, eq=False)
class Parts:
    """What an equipment is made of."""

    conductors: tuple[Conductor, ...]
    sockets: dict[str, Socket]
    ways: tuple[WayEnd, ...] = ()


def transformer_parts(transformer: Transformer) -> Parts:
    """Sockets of a transformer: its terminals, and its star."""
    names = numbered([terminal.label for terminal in transformer.terminals])
    axes = np.array([(1.0, 0.0, 0.0), (0.0, 1.0, 0.0)])
    places = [terminal.at for terminal in transformer.terminals]
    return Parts(
        conductors=(),
        sockets={
            name: Socket(name, at, Round(), axes, None)
            for name, at in zip(
                (*names, STAR), (*places, transformer.star), strict=True
            )
        },
    )


def loop_parts(loop: ConductorLoop) -> Parts:
    """The closed conductor of a loop; all its turns lie on its path.

    Raises
    ------
    UserError
        When a leg has no length or a bend is too sharp.
    """
    path = loop.path[:-1] if loop.path[0] == loop.path[-1] else loop.path
    load = SlotLoad(
        circuit=loop.circuit, label=loop.label, share=loop.share * loop.turns
    )
    slot = Slot(name=loop.label, u=0.0, v=0.0, shape=loop.shape, loads=(load,))
    try:
        found = stations((*path, path[0]), closed=True)
    except UserError as error:
        raise UserError(f"Loop {loop.title}: {error}") from None
    return Parts(along_route((slot,), found, loop.id, loop.id, "equipment"), {})


def board_parts(board: Board) -> Parts:
    """Bars and droppers of a board, and its sockets.

    Each piece of a bar carries the loads of the ways beyond it, seen from where the
    bar is fed. Bars of one label share its current equally, which is an assumption.

    Raises
    ------
    UserError
        When two ways have one name.
    """
    names = [way.name for way in board.ways]
    if len(set(names)) < len(names):
        twice = next(name for name, n in Counter(names).items() if n > 1)
        raise UserError(
            f"Board {board.title}: two ways are called “{twice}”: give each way a name "
            "of its own."
        )
    frame = _Frame(board)
    poles = numbered([pole.label for pole in board.poles])
    n_alike = Counter(pole.label for pole in board.poles)
    conductors: list[Conductor] = []
    sockets: dict[str, Socket] = {}
    ends = [_way_end(frame, way, poles) for way in board.ways]
    for k, (pole, name) in enumerate(zip(board.poles, poles, strict=True)):
        loads = [
            total(
                load
                for carried in way.circuits
                for load in carried_loads((carried,), pole.label, n_alike[pole.label])
            )
            for way in board.ways
        ]
        conductors.extend(_bar(frame, pole, name, loads))
        incoming = f"incoming/{name}"
        sockets[incoming] = Socket(
            incoming,
            frame.on_bar(pole, pole.fed_at),
            pole.shape,
            frame.axes(pole.shape),
            negative(total(load for way_loads in loads for load in way_loads)),
        )
        for way, way_loads in zip(board.ways, loads, strict=True):
            dropper, socket = _way_conductor(frame, way, k, name, way_loads)
            conductors.extend(dropper)
            sockets[socket.name] = socket
    return Parts(tuple(conductors), sockets, tuple(ends))


class _Frame:
    """Positions along a board, across it (to the left) and up, as points."""

    def __init__(self, board: Board) -> None:
        self.board = board
        angle = radians(board.direction)
        self.along = np.array([cos(angle), sin(angle), 0.0])
        self.left = np.array([-sin(angle), cos(angle), 0.0])

    def point(self, position: float, across: float, z: float) -> Point:
        x, y = self.board.origin
        place = position * self.along + across * self.left
        return (x + float(place[0]), y + float(place[1]), z)

    def on_bar(self, pole: Pole, position: float) -> Point:
        return self.point(position, pole.across, pole.z)

    def axes(self, shape: Round | Bar) -> Array:
        turn = radians(shape.turn) if isinstance(shape, Bar) else 0.0
        right, up = -self.left, np.array([0.0, 0.0, 1.0])
        return np.stack(
            [
                cos(turn) * right + sin(turn) * up,
                cos(turn) * up - sin(turn) * right,
            ]
        )


def _bar(
    frame: _Frame, pole: Pole, name: str, loads: list[tuple[SlotLoad, ...]]
) -> list[Conductor]:
    """Pieces of one bar, from where it is fed outwards."""
    board = frame.board
    pieces: list[Conductor] = []
    for sense in (1, -1):
        beyond = sorted(
            (
                (sense * (way.position - pole.fed_at), way.position, way_loads)
                for way, way_loads in zip(board.ways, loads, strict=True)
                if way_loads and sense * (way.position - pole.fed_at) >= SHORTEST
            ),
            key=lambda entry: entry[0],
        )
        at = pole.fed_at
        for i, (_, position, _) in enumerate(beyond):
            pieces.extend(
                straight(
                    f"{board.id}/bar {name}/{len(pieces) + 1}",
                    frame.on_bar(pole, at),
                    frame.on_bar(pole, position),
                    total(load for entry in beyond[i:] for load in entry[2]),
                    item=board.id,
                    slot=name,
                    shape=pole.shape,
                    reference=frame.axes(pole.shape),
                )
            )
            at = position
    return pieces


def _way_conductor(
    frame: _Frame, way: Way, k: int, pole_name: str, loads: tuple[SlotLoad, ...]
) -> tuple[tuple[Conductor, ...], Socket]:
    """The dropper of one pole of a way, and the socket at its foot or on the bar."""
    board = frame.board
    pole = board.poles[k]
    name = f"{way.name}/{pole_name}"
    tap = frame.on_bar(pole, way.position)
    dropper = way.dropper
    if dropper is None:
        axes = frame.axes(pole.shape)
        return (), Socket(name, tap, pole.shape, axes, loads)
    position = way.position + dropper.pitch * (k - (len(board.poles) - 1) / 2)
    foot = frame.point(position, dropper.setback, dropper.foot_z)
    route = [tap]
    for vertex in (frame.point(position, dropper.setback, pole.z), foot):
        if np.linalg.norm(np.subtract(vertex, route[-1])) >= SHORTEST:
            route.append(vertex)
    if len(route) == 1:
        axes = frame.axes(dropper.shape)
        return (), Socket(name, tap, dropper.shape, axes, loads)
    slot = Slot(name=name, u=0.0, v=0.0, shape=dropper.shape, loads=loads)
    made = along_route((slot,), stations(route), board.id, board.id, "equipment")
    socket = Socket(name, foot, dropper.shape, made[0].axes[-1], loads)
    return (made if loads else ()), socket


def _way_end(frame: _Frame, way: Way, poles: tuple[str, ...]) -> WayEnd:
    closed_at: Point | None = None
    if way.closed and way.dropper is not None:
        dropper = way.dropper
        closed_at = frame.point(way.position, dropper.setback, dropper.foot_z)
    elif way.closed:
        taps = [frame.on_bar(pole, way.position) for pole in frame.board.poles]
        x, y, z = np.mean(taps, axis=0).tolist()
        closed_at = (x, y, z)
    return WayEnd(way.name, tuple(f"{way.name}/{pole}" for pole in poles), closed_at)
