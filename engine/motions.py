"""Motions of items on plan: shifted, turned about a point, or seen in a mirror.

A run keeps its true geometry: its section is turned or mirrored along with its route,
so that every conductor comes to lie where the motion takes it.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from math import cos, hypot, radians, sin
from typing import TypeVar

from msgspec.structs import replace

from engine.equipment import Board, ConductorLoop, Dropper, Pole, Transformer
from engine.errors import UserError
from engine.items import Item, Point2, Point3
from engine.mirrored_sections import mirrored_bar, mirrored_section
from engine.places import BackingDrawing, Enclosure, Profile, Receptor, Room, Zone
from engine.routes import UPRIGHT
from engine.runs import Bar, Joint, Round, Run
from engine.sight import SIGHTS

AnyItem = TypeVar("AnyItem", bound=Item)

#: Decimals of coordinates, a tenth of a nanometre, so that 0.1 + 0.2 is 0.3.
_DIGITS = 10


def neat(value: float) -> float:
    """A coordinate without the noise of its last binary digits. [m]"""
    return round(value, _DIGITS) + 0.0


@dataclass(frozen=True)
class Motion:
    """p → M·p + shift on plan, and z → z + lift; M turns, or mirrors and turns.

    Attributes
    ----------
    degrees : float
        By how much M turns (counter-clockwise); of a mirror, twice the angle of its
        line to +x.
    mirrors : bool
        Whether M is a mirror.
    shift : (2,) float
        [m]
    lift : float
        [m]
    """

    degrees: float = 0.0
    mirrors: bool = False
    shift: tuple[float, float] = (0.0, 0.0)
    lift: float = 0.0

    def point(self, at: Point2) -> Point2:
        """Where a point on plan comes to lie. [m]"""
        x, y = self._linear(at)
        return (neat(x + self.shift[0]), neat(y + self.shift[1]))

    def place(self, at: Point3) -> Point3:
        """Where a point in space comes to lie. [m]"""
        return (*self.point(at[:2]), neat(at[2] + self.lift))

    def _linear(self, at: Point2) -> Point2:
        c, s = cos_sin(self.degrees)
        x, y = at
        if self.mirrors:
            return (c * x + s * y, s * x - c * y)
        return (c * x - s * y, s * x + c * y)


def shift_by(dx: float, dy: float, dz: float = 0.0) -> Motion:
    """The motion along a straight line. [m]"""
    return Motion(shift=(dx, dy), lift=dz)


def turn_about(at: Point2, degrees: float) -> Motion:
    """The turn about a point on plan, counter-clockwise."""
    return _fixing(Motion(degrees=degrees), at)


def mirror_in(at: Point2, angle: float) -> Motion:
    """The mirror whose line on plan goes through `at`, `angle` degrees from +x."""
    return _fixing(Motion(degrees=2 * angle, mirrors=True), at)


def _fixing(motion: Motion, at: Point2) -> Motion:
    x, y = motion._linear(at)
    return Motion(motion.degrees, motion.mirrors, (at[0] - x, at[1] - y), motion.lift)


def carried(item: AnyItem, motion: Motion, floors: dict[str, float]) -> AnyItem:
    """The item where the motion takes it; one without a place as it is.

    Parameters
    ----------
    item : Item
        Any item of a layout.
    motion : Motion
        Where to.
    floors : dict of float
        Floor levels by the id of the storey, for zones that take theirs. [m]

    Raises
    ------
    UserError
        When a backing drawing should be mirrored.
    """
    moved = _carried(item, motion, floors)
    assert isinstance(moved, type(item))
    return moved


def _carried(item: Item, motion: Motion, floors: dict[str, float]) -> Item:
    match item:
        case Run():
            return _run(item, motion)
        case Joint():
            return item if item.at is None else replace(item, at=motion.place(item.at))
        case Board():
            return _board(item, motion)
        case Transformer():
            return _transformer(item, motion)
        case ConductorLoop() | Profile():
            return replace(item, path=tuple(motion.place(p) for p in item.path))
        case Receptor():
            return replace(item, at=motion.place(item.at))
        case Room() | Enclosure() | Zone():
            return _area(item, motion, floors)
        case BackingDrawing():
            return _backing_drawing(item, motion)
    return item


def carried_section(run: Run, motion: Motion) -> tuple[Run, dict[str, str]]:
    """A run after a motion, and the new names of its slots by the old ones."""
    names: dict[str, str] = {}
    section = run.section
    if motion.mirrors:
        section, names = mirrored_section(section)
    return (
        replace(
            run,
            route=tuple(motion.place(vertex) for vertex in run.route),
            section=section,
            turns=_turns(run, motion),
        ),
        names,
    )


def _run(run: Run, motion: Motion) -> Run:
    return carried_section(run, motion)[0]


def _turns(run: Run, motion: Motion) -> tuple[float, ...]:
    """Turns of the legs that lay the section where the motion takes it.

    On a vertical first leg u is +x whatever the motion, so that the motion's own turn
    is made up for by a turn of every leg.
    """
    (x0, y0, z0), (x1, y1, z1) = run.route[:2]
    upright = hypot(x1 - x0, y1 - y0) < UPRIGHT * abs(z1 - z0)
    extra = 0.0
    if upright:
        wanted = 180 - motion.degrees if motion.mirrors else -motion.degrees
        extra = wanted if z1 > z0 else -wanted
    old = run.turns or (0.0,) * (len(run.route) - 1)
    sign = -1 if motion.mirrors else 1
    return tidy_turns(sign * turn + extra for turn in old)


def tidy_turns(turns: Iterable[float]) -> tuple[float, ...]:
    """Turns between −180° and 180°; none where all are zero."""
    folded = tuple(180.0 - (180.0 - neat(turn)) % 360.0 for turn in turns)
    return folded if any(abs(turn) > 1e-9 for turn in folded) else ()


def _shape(shape: Round | Bar, motion: Motion) -> Round | Bar:
    return mirrored_bar(shape) if motion.mirrors and isinstance(shape, Bar) else shape


def _board(board: Board, motion: Motion) -> Board:
    side = -1.0 if motion.mirrors else 1.0

    def pole(one: Pole) -> Pole:
        return replace(
            one,
            across=side * one.across + 0.0,
            z=neat(one.z + motion.lift),
            shape=_shape(one.shape, motion),
        )

    def dropper(one: Dropper | None) -> Dropper | None:
        if one is None:
            return None
        return replace(
            one,
            setback=side * one.setback + 0.0,
            foot_z=neat(one.foot_z + motion.lift),
            shape=_shape(one.shape, motion),
        )

    return replace(
        board,
        origin=motion.point(board.origin),
        direction=_turned(board.direction, motion),
        poles=tuple(pole(one) for one in board.poles),
        ways=tuple(replace(way, dropper=dropper(way.dropper)) for way in board.ways),
        footprint=tuple(motion.point(corner) for corner in board.footprint),
    )


def _turned(direction: float, motion: Motion) -> float:
    """A direction on plan as the motion takes it. [degrees]"""
    side = -1.0 if motion.mirrors else 1.0
    return neat((motion.degrees + side * direction) % 360.0)


def _transformer(unit: Transformer, motion: Motion) -> Transformer:
    return replace(
        unit,
        terminals=tuple(replace(t, at=motion.place(t.at)) for t in unit.terminals),
        star=motion.place(unit.star),
        footprint=tuple(motion.point(corner) for corner in unit.footprint),
    )


def _area(
    item: Room | Enclosure | Zone, motion: Motion, floors: dict[str, float]
) -> Item:
    def lifted(level: float | None) -> float | None:
        return None if level is None else neat(level + motion.lift)

    match item:
        case Enclosure():
            return replace(
                item,
                footprint=tuple(motion.point(corner) for corner in item.footprint),
                z_from=lifted(item.z_from),
                z_to=lifted(item.z_to),
                front=None if item.front is None else _turned(item.front, motion),
            )
        case Room():
            return replace(
                item,
                outline=tuple(motion.point(corner) for corner in item.outline),
                floor_level=lifted(item.floor_level),
                ceiling_level=lifted(item.ceiling_level),
                soffit_level=lifted(item.soffit_level),
            )
    floor = item.floor_level
    if motion.lift and floor is None:
        floor = floors.get(item.storey or "", 0.0)
    return replace(
        item,
        outline=tuple(motion.point(corner) for corner in item.outline),
        floor_level=lifted(floor),
    )


def _backing_drawing(item: BackingDrawing, motion: Motion) -> BackingDrawing:
    if motion.mirrors:
        raise UserError(
            f"The backing drawing “{item.title}” cannot be mirrored: leave it out of "
            "the selection."
        )
    if item.view != "plan":
        if motion.degrees % 360.0:
            # It hangs in a view of its own, which a turn on plan leaves as it is.
            return item
        right = SIGHTS[item.view].right
        across = right[0] * motion.shift[0] + right[1] * motion.shift[1]
        x, z = item.origin
        return replace(item, origin=(neat(x + across), neat(z + motion.lift)))
    return replace(
        item,
        origin=motion.point(item.origin),
        turn=neat((item.turn + motion.degrees) % 360.0),
    )


def cos_sin(degrees: float) -> tuple[float, float]:
    """Exact at right angles, so that a quarter turn keeps coordinates as they are."""
    quarters = degrees / 90.0
    if quarters == round(quarters):
        return ((1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0))[round(quarters) % 4]
    return cos(radians(degrees)), sin(radians(degrees))
