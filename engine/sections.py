"""Sections: what stands where across a route, as slots with shapes and loads.

u is to the right and v is up, looking along the route; a turn goes from u towards v.
A formation's circuits are shared equally over the conductors of one label, which is
an assumption.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Sequence
from math import cos, pi, radians, sin, sqrt

from engine.errors import UserError
from engine.runs import (
    Bar,
    Carried,
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

Place = tuple[float, float]

#: Shares smaller than this are rounding, not current.
NO_SHARE = 1e-12


def slots(section: Section) -> tuple[Slot, ...]:
    """Slots of a section, in its own order.

    A slot is named by its label, or by label, point and number from 1 where several
    slots have the label. A formation's slot carries, of each circuit, the circuit's
    share divided by the number of slots of its label.

    Raises
    ------
    UserError
        When two slots have one name, or a set has too many or too few conductors for
        its formation.
    """
    match section:
        case FreeSection():
            made = section.slots
        case Flat():
            places = _row(len(section.order), section.pitch, "right")
            made = _named(section.order, places, section.shape, section.circuits)
        case Vertical():
            places = _row(len(section.order), section.pitch, "down")
            made = _named(section.order, places, section.shape, section.circuits)
        case Trefoil():
            places = _trefoil(section.pitch, section.neutral_pitch, section.apex)
            made = _named(section.order, places, section.shape, section.circuits)
        case Quad():
            made = _named(
                section.order, _quad(section.pitch), section.shape, section.circuits
            )
        case ParallelSets():
            made = _parallel_sets(section)
        case StackedBars():
            made = _stacked_bars(section)
        case Sandwich():
            pitch = section.thickness + section.insulation
            places = _row(len(section.order), pitch, section.direction)
            turn = 90.0 if section.direction == "right" else 0.0
            bar = Bar(width=section.width, thickness=section.thickness, turn=turn)
            made = _named(section.order, places, bar, section.circuits)
    _refuse_equal_names(made)
    return made


def single_conductors(section: Section) -> tuple[Slot, ...]:
    """Slots with the straight cores of multicore cables as slots of their own.

    A core's slot is called "slot/core". A cable taken as its net current only is one
    round conductor of its outside diameter with all its loads.

    Raises
    ------
    UserError
        As `slots`, and when a multicore slot carries a label that it has no core for.
    """
    found: list[Slot] = []
    for slot in slots(section):
        if isinstance(slot.shape, Multicore):
            found.extend(_cores(slot, slot.shape))
        else:
            found.append(slot)
    return tuple(found)


def numbered(labels: Sequence[str]) -> tuple[str, ...]:
    """The labels, with point and number from 1 behind those that are there twice.

    >>> numbered(("L1", "N", "L1"))
    ('L1.1', 'N', 'L1.2')
    """
    counts = Counter(labels)
    seen: Counter[str] = Counter()
    names = []
    for label in labels:
        seen[label] += 1
        names.append(label if counts[label] == 1 else f"{label}.{seen[label]}")
    return tuple(names)


def carried_loads(circuits: Carried, label: str, n_alike: int) -> tuple[SlotLoad, ...]:
    """What one of `n_alike` conductors of a label carries of the circuits."""
    return tuple(
        SlotLoad(circuit=c.circuit, label=label, share=c.share / n_alike)
        for c in circuits
    )


def total(loads: Iterable[SlotLoad]) -> tuple[SlotLoad, ...]:
    """Loads added up per circuit and label, without those that vanish."""
    shares: dict[tuple[str, str], float] = {}
    for load in loads:
        key = (load.circuit, load.label)
        shares[key] = shares.get(key, 0.0) + load.share
    return tuple(
        SlotLoad(circuit=circuit, label=label, share=share)
        for (circuit, label), share in shares.items()
        if abs(share) > NO_SHARE
    )


def negative(loads: Iterable[SlotLoad]) -> tuple[SlotLoad, ...]:
    """The same loads flowing the other way."""
    return tuple(
        SlotLoad(circuit=load.circuit, label=load.label, share=-load.share)
        for load in loads
    )


def _row(n: int, pitch: float, direction: str) -> list[Place]:
    """Places on a line to the right or downwards, centred on the route."""
    along = [(i - (n - 1) / 2) * pitch for i in range(n)]
    return [(a, 0.0) if direction == "right" else (0.0, -a) for a in along]


def _trefoil(pitch: float, neutral_pitch: float, apex: str) -> list[Place]:
    """Apex, then clockwise; the fourth place is beside the right conductor."""
    tip, base = pitch / sqrt(3), pitch / (2 * sqrt(3))
    if apex == "up":
        triangle = [(0.0, tip), (pitch / 2, -base), (-pitch / 2, -base)]
        right = triangle[1]
    else:
        triangle = [(0.0, -tip), (-pitch / 2, base), (pitch / 2, base)]
        right = triangle[2]
    return [*triangle, (right[0] + neutral_pitch, right[1])]


def _quad(pitch: float) -> list[Place]:
    half = pitch / 2
    return [(-half, half), (half, half), (half, -half), (-half, -half)]


def _named(
    labels: Sequence[str], places: Sequence[Place], shape: Shape, circuits: Carried
) -> tuple[Slot, ...]:
    """Slots of one shape; places behind the last label stay empty."""
    loads = {
        label: carried_loads(circuits, label, count)
        for label, count in Counter(labels).items()
    }
    return tuple(
        Slot(name=name, u=u, v=v, shape=shape, loads=loads[label])
        for name, label, (u, v) in zip(numbered(labels), labels, places, strict=False)
    )


def _parallel_sets(section: ParallelSets) -> tuple[Slot, ...]:
    centres = _row(len(section.orders), section.set_pitch, section.direction)
    labels: list[str] = []
    places: list[Place] = []
    wanted = {"trefoil": (3, 4), "quad": (4,)}.get(section.formation)
    for i, (order, (u, v)) in enumerate(zip(section.orders, centres, strict=True)):
        if wanted is not None and len(order) not in wanted:
            raise UserError(
                f"Set {i + 1} of the parallel sets has {len(order)} conductors; a "
                f"{section.formation} takes {' or '.join(map(str, wanted))}."
            )
        if section.formation == "trefoil":
            within = _trefoil(section.pitch, section.pitch, "up")
        elif section.formation == "quad":
            within = _quad(section.pitch)
        else:
            direction = "right" if section.formation == "flat" else "down"
            within = _row(len(order), section.pitch, direction)
        labels.extend(order)
        places.extend((u + a, v + b) for a, b in within[: len(order)])
    return _named(labels, places, section.shape, section.circuits)


def _stacked_bars(section: StackedBars) -> tuple[Slot, ...]:
    on_edge = section.stand == "on edge"
    bar = Bar(
        width=section.width,
        thickness=section.thickness,
        turn=90.0 if on_edge else 0.0,
    )
    poles = _row(len(section.order), section.pitch, section.direction)
    stack = _row(
        section.bars_per_pole,
        section.thickness + section.gap,
        "right" if on_edge else "down",
    )
    labels = [label for label in section.order for _ in stack]
    places = [(u + a, v + b) for u, v in poles for a, b in stack]
    return _named(labels, places, bar, section.circuits)


def _cores(slot: Slot, cable: Multicore) -> tuple[Slot, ...]:
    if cable.model == "net current only":
        whole = Round(diameter=cable.outside_diameter)
        return (
            Slot(name=slot.name, u=slot.u, v=slot.v, shape=whole, loads=slot.loads),
        )
    for load in slot.loads:
        if load.label not in cable.cores:
            raise UserError(
                f"Slot {slot.name} carries {load.label} of circuit {load.circuit}, "
                f"but its cable has the cores {', '.join(cable.cores)}: add a core "
                "of that label, or remove the load."
            )
    radius = cable.core_circle_diameter / 2
    core = Round(diameter=cable.core_diameter)
    counts = Counter(cable.cores)
    made = []
    for i, (label, name) in enumerate(
        zip(cable.cores, numbered(cable.cores), strict=True)
    ):
        angle = radians(90 + cable.turn) - 2 * pi * i / len(cable.cores)
        loads = tuple(
            SlotLoad(
                circuit=load.circuit, label=label, share=load.share / counts[label]
            )
            for load in slot.loads
            if load.label == label
        )
        made.append(
            Slot(
                name=f"{slot.name}/{name}",
                u=slot.u + radius * cos(angle),
                v=slot.v + radius * sin(angle),
                shape=core,
                loads=loads,
            )
        )
    return tuple(made)


def _refuse_equal_names(made: Sequence[Slot]) -> None:
    if len({slot.name for slot in made}) == len(made):
        return
    counts = Counter(slot.name for slot in made)
    name = next(name for name, count in counts.items() if count > 1)
    raise UserError(
        f"{counts[name]} slots of the section are called “{name}”: give each slot a "
        "name of its own."
    )
