"""Formations of a section: what it is called, and the same conductors in another one.

Values in, values out. Spacings of a new formation begin at least as large as its
conductors need; a size that the new one has no word for begins with a usual one.
"""

from __future__ import annotations

from math import cos, radians, sin
from typing import Literal, get_args

from msgspec.structs import replace

from engine.errors import UserError
from engine.runs import (
    Bar,
    Carried,
    CircuitShare,
    Flat,
    FreeSection,
    Multicore,
    ParallelSets,
    Quad,
    Round,
    Sandwich,
    Section,
    Shape,
    Slot,
    SlotLoad,
    StackedBars,
    Trefoil,
    Vertical,
)
from engine.sections import slots, total

Formation = Literal[
    "flat", "vertical", "trefoil", "quad", "parallel sets", "stacked bars", "sandwich",
    "free",
]  # fmt: skip
FORMATIONS: tuple[Formation, ...] = get_args(Formation)

#: Most parallel sets, as `ParallelSets` allows.
MOST_SETS = 20

#: The first sizes of conductors whose own size says nothing: common practice.
FIRST_ROUND = Round(diameter=0.028)
FIRST_BAR = Bar(width=0.1, thickness=0.01)


def formation_of(section: Section) -> Formation:
    """The name of a section's formation."""
    tag = type(section).__struct_config__.tag
    assert tag in FORMATIONS
    return next(name for name in FORMATIONS if name == tag)


def circuits_of(section: Section) -> Carried:
    """The circuits that a section carries, in the order they are met.

    Of a free section, the share is the largest that one label carries in all.
    """
    if not isinstance(section, FreeSection):
        return section.circuits
    shares: dict[str, float] = {}
    for load in net_loads(section):
        shares[load.circuit] = max(shares.get(load.circuit, 0.0), abs(load.share))
    return tuple(CircuitShare(circuit=c, share=min(s, 1.0)) for c, s in shares.items())


def labels_of(section: Section) -> tuple[str, ...]:
    """Labels in the section's own order, sets and free slots one after another."""
    match section:
        case FreeSection():
            return tuple(label_of(slot) for slot in section.slots)
        case ParallelSets():
            return tuple(label for order in section.orders for label in order)
        case _:
            return section.order


def net_loads(section: Section) -> tuple[SlotLoad, ...]:
    """Everything the section carries, added up by circuit and label."""
    return total(load for slot in slots(section) for load in slot.loads)


def with_formation(section: Section, formation: Formation) -> Section:
    """The same conductors in another formation, keeping what it has a word for.

    Labels, circuits and, where the shape allows it, its size are kept; conductors of
    one pole come together. Spacings begin at least as large as the conductors need.

    Raises
    ------
    UserError
        When the formation cannot take that many conductors.
    """
    if formation == formation_of(section):
        return section
    if formation == "free":
        return as_free(section)
    circuits = circuits_of(section)
    order = _one_of_each(section)
    shape = _shape_of(section)
    solid = shape if isinstance(shape, Bar) else _round_of(shape)
    pitch = _pitch_of(section, solid)
    match formation:
        case "flat":
            stood = _turned(solid, 90.0)
            return Flat(circuits=circuits, order=order, pitch=pitch, shape=stood)
        case "vertical":
            lying = _turned(solid, 0.0)
            return Vertical(circuits=circuits, order=order, pitch=pitch, shape=lying)
        case "trefoil":
            refuse_count(order, formation, 3, 4)
            cable = _round_of(shape)
            touching = cable.diameter
            return Trefoil(
                circuits=circuits,
                order=order,
                pitch=touching,
                neutral_pitch=touching,
                shape=cable,
            )
        case "quad":
            refuse_count(order, formation, 4)
            cable = _round_of(shape)
            return Quad(
                circuits=circuits, order=order, pitch=cable.diameter, shape=cable
            )
        case "parallel sets":
            return _in_sets(section, 2)
        case "stacked bars":
            bar = _bar_of(shape)
            bars = _per_pole(section)
            return StackedBars(
                circuits=circuits,
                order=order,
                bars_per_pole=bars,
                width=bar.width,
                thickness=bar.thickness,
                gap=bar.thickness,
                pitch=max(pitch, 2 * bars * bar.thickness),
            )
        case "sandwich":
            bar = _bar_of(shape)
            return Sandwich(
                circuits=circuits,
                order=order,
                width=bar.width,
                thickness=bar.thickness,
            )


def with_sets(section: Section, n_sets: int) -> Section:
    """The section as `n_sets` parallel sets; further ones repeat the last order.

    Raises
    ------
    UserError
        When the formation cannot stand in parallel, or for too few or too many.
    """
    if not 1 <= n_sets <= MOST_SETS:
        raise UserError(f"Enter between 1 and {MOST_SETS} parallel sets, not {n_sets}.")
    if isinstance(section, ParallelSets):
        held = section.orders[:n_sets]
        more = (held[-1],) * (n_sets - len(held))
        return replace(section, orders=held + more)
    return _in_sets(section, n_sets)


def without_set(section: ParallelSets, at_set: int) -> ParallelSets:
    """Parallel sets without one of them.

    Raises
    ------
    UserError
        When it is the last.
    """
    if len(section.orders) == 1:
        raise UserError("The last set stays: choose another formation instead.")
    return replace(
        section, orders=section.orders[:at_set] + section.orders[at_set + 1 :]
    )


def as_free(section: Section) -> FreeSection:
    """The section with its slots placed one by one, where they are."""
    if isinstance(section, FreeSection):
        return section
    return FreeSection(slots=slots(section))


def extent(shape: Shape) -> tuple[float, float]:
    """Width and height of the rectangle about a shape, turned as it is. [m]"""
    if isinstance(shape, Round):
        return shape.diameter, shape.diameter
    if isinstance(shape, Multicore):
        return shape.outside_diameter, shape.outside_diameter
    c, s = abs(cos(radians(shape.turn))), abs(sin(radians(shape.turn)))
    return (
        shape.width * c + shape.thickness * s,
        shape.width * s + shape.thickness * c,
    )


def _in_sets(section: Section, n_sets: int) -> ParallelSets:
    """Sets of what the section is; of what cannot stand in sets, flat ones."""
    kind = formation_of(section)
    shape = _shape_of(section)
    order = _one_of_each(section)
    if kind not in ("flat", "vertical", "trefoil", "quad"):
        if n_sets > 1 and isinstance(section, FreeSection):
            n_sets = max(n_sets, _per_pole(section))
        kind = "flat"
    solid = _round_of(shape) if isinstance(shape, Multicore) else shape
    pitch = _pitch_of(section, solid)
    wide = {"flat": len(order), "vertical": 1, "trefoil": 2, "quad": 2}[kind]
    beside = int(kind == "trefoil" and len(order) == 4)
    return ParallelSets(
        circuits=circuits_of(section),
        orders=(order,) * n_sets,
        formation=kind,
        pitch=pitch,
        set_pitch=(wide + beside) * pitch + extent(solid)[0],
        shape=solid,
    )


def _one_of_each(section: Section) -> tuple[str, ...]:
    """The order of one set: each label once where the section has sets or places."""
    match section:
        case FreeSection():
            return tuple(dict.fromkeys(labels_of(section)))
        case ParallelSets():
            return section.orders[0]
        case _:
            return section.order


def _per_pole(section: Section) -> int:
    """How many conductors the section has of its most frequent label."""
    if isinstance(section, StackedBars):
        return section.bars_per_pole
    labels = labels_of(section)
    return max(labels.count(label) for label in labels)


def _shape_of(section: Section) -> Shape:
    match section:
        case FreeSection():
            return section.slots[0].shape
        case StackedBars() | Sandwich():
            return Bar(width=section.width, thickness=section.thickness)
        case _:
            return section.shape


def _round_of(shape: Shape) -> Round:
    match shape:
        case Round():
            return shape
        case Multicore():
            return Round(diameter=shape.outside_diameter)
        case Bar():
            return FIRST_ROUND


def _bar_of(shape: Shape) -> Bar:
    return shape if isinstance(shape, Bar) else FIRST_BAR


def _turned(shape: Round | Bar, turn: float) -> Round | Bar:
    return replace(shape, turn=turn) if isinstance(shape, Bar) else shape


def _pitch_of(section: Section, shape: Round | Bar) -> float:
    """The section's own spacing, at least what the shape needs. [m]"""
    match section:
        case FreeSection():
            own = 0.0
        case Sandwich():
            own = section.thickness + section.insulation
        case _:
            own = section.pitch
    if isinstance(shape, Round):
        return max(own, shape.diameter)
    return max(own, shape.thickness if own else shape.width)


def refuse_count(order: tuple[str, ...], formation: str, *wanted: int) -> None:
    """Say so when a formation does not take that many conductors."""
    if len(order) not in wanted:
        counts = " or ".join(map(str, wanted))
        raise UserError(
            f"A {formation} takes {counts} conductors, not {len(order)} "
            f"({' '.join(order)}): choose another formation, or change the order first."
        )


def label_of(slot: Slot) -> str:
    """The label of a slot's first load, else of its name."""
    return slot.loads[0].label if slot.loads else slot.name.partition(".")[0]
