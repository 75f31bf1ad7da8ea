"""Edits of a section: phases swapped, mirrored, places, order, loads and shapes.

Values in, values out. A slot is named by its conductor, so that a conductor keeps its
name (and its joints) when it changes places. What a formation cannot say becomes a free
section with every conductor where it was.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any, Literal

from msgspec.structs import replace

from engine.edits import replaced
from engine.errors import UserError
from engine.formations import as_free, circuits_of, extent, labels_of, refuse_count
from engine.layout import Layout
from engine.mirrored_sections import mirrored_bar, mirrored_section
from engine.runs import (
    Bar,
    Carried,
    Flat,
    FreeSection,
    Multicore,
    ParallelSets,
    Quad,
    Round,
    Run,
    Sandwich,
    Section,
    Shape,
    Slot,
    SlotLoad,
    StackedBars,
    Trefoil,
    Vertical,
)
from engine.section_origins import section_origins
from engine.sections import slots

Axis = Literal["left-right", "top-bottom"]

#: Places that agree in this many decimals are the same place. [m]
_DECIMALS = 8


def with_slot_at(section: Section, name: str, u: float, v: float) -> FreeSection:
    """The section with one slot at another place, as a free section. [m]"""
    return _with_slot(section, name, u=u, v=v)


def with_loads(section: Section, name: str, loads: tuple[SlotLoad, ...]) -> FreeSection:
    """The section with other loads in one slot, as a free section."""
    return _with_slot(section, name, loads=loads)


def swapped(section: Section, first: str, second: str) -> Section:
    """The section with two conductors in each other's places.

    In a formation their labels change places in the order; bars of one pole move
    together. In a free section each takes the other's place, shape and turn.

    Raises
    ------
    UserError
        When no slot has one of the names.
    """
    held = slots(section)
    names = [slot.name for slot in held]
    one, other = (_index(names, name) for name in (first, second))
    match section:
        case FreeSection():
            a, b = held[one], held[other]
            exchanged = {
                first: replace(a, u=b.u, v=b.v, shape=b.shape),
                second: replace(b, u=a.u, v=a.v, shape=a.shape),
            }
            return FreeSection(slots=tuple(exchanged.get(s.name, s) for s in held))
        case ParallelSets():
            flat = _exchanged(labels_of(section), one, other)
            return replace(section, orders=_cut(flat, section.orders))
        case StackedBars():
            per_pole = section.bars_per_pole
            order = _exchanged(section.order, one // per_pole, other // per_pole)
            return replace(section, order=order)
        case _:
            return replace(section, order=_exchanged(section.order, one, other))


def mirrored(
    section: Section, axis: Axis = "left-right"
) -> tuple[Section, dict[str, str]]:
    """The section seen in a mirror, and the new name of each of its slots."""
    if axis == "left-right":
        return mirrored_section(section)
    image = tuple(_upside_down(slot) for slot in slots(section))
    made = _upside_down_in_words(section)
    if made is not None:
        names = _matched(image, slots(made))
        if names is not None:
            return made, names
    return FreeSection(slots=image), {slot.name: slot.name for slot in image}


def with_order(section: Section, order: tuple[str, ...], at_set: int = 0) -> Section:
    """The section with its conductors in another order; of one set in parallel sets.

    Raises
    ------
    UserError
        For a free section, whose conductors have places and no order.
    """
    match section:
        case FreeSection():
            raise UserError(
                "A free section has no order: swap two of its conductors instead."
            )
        case ParallelSets():
            orders = section.orders
            return replace(
                section, orders=(*orders[:at_set], order, *orders[at_set + 1 :])
            )
        case _:
            return replace(section, order=order)


def carrying(section: Section, circuits: Carried) -> Section:
    """The section with other circuits.

    Of a free section, the loads of its first circuit become those of the first new
    one, and so on; loads of circuits beyond the new ones go.
    """
    if not isinstance(section, FreeSection):
        return replace(section, circuits=circuits)
    before = [share.circuit for share in circuits_of(section)]
    new = dict(zip(before, (share.circuit for share in circuits), strict=False))
    return FreeSection(
        slots=tuple(
            replace(
                slot,
                loads=tuple(
                    replace(load, circuit=new[load.circuit])
                    for load in slot.loads
                    if load.circuit in new
                ),
            )
            for slot in section.slots
        )
    )


def with_shape(section: Section, shape: Shape, names: Iterable[str] = ()) -> Section:
    """The section with another shape: of all its conductors, or of some of them.

    A shape that the formation has no word for, and one of some conductors only, make
    it a free section.
    """
    chosen = set(names)
    if not chosen or chosen == {slot.name for slot in slots(section)}:
        match section:
            case Flat() | Vertical() | ParallelSets() if not isinstance(
                shape, Multicore
            ):
                return replace(section, shape=shape)
            case Trefoil() | Quad() if isinstance(shape, Round):
                return replace(section, shape=shape)
            case StackedBars() | Sandwich() if isinstance(shape, Bar):
                return replace(section, width=shape.width, thickness=shape.thickness)
        chosen = {slot.name for slot in slots(section)}
    return FreeSection(
        slots=tuple(
            replace(slot, shape=shape) if slot.name in chosen else slot
            for slot in slots(section)
        )
    )


def with_conductor(section: Section, label: str, circuit: str) -> Section:
    """The section with one more conductor at the end of its order, or to the right.

    Raises
    ------
    UserError
        When the formation is full, or stands in sets.
    """
    match section:
        case FreeSection():
            held = section.slots
            right = max(held, key=lambda slot: slot.u)
            taken = {slot.name for slot in held}
            name, number = label, 2
            while name in taken:
                name, number = f"{label}.{number}", number + 1
            slot = Slot(
                name=name,
                u=right.u + 1.5 * extent(right.shape)[0],
                v=right.v,
                shape=right.shape,
                loads=(SlotLoad(circuit=circuit, label=label),),
            )
            return FreeSection(slots=(*held, slot))
        case ParallelSets():
            return replace(
                section, orders=tuple((*order, label) for order in section.orders)
            )
        case Trefoil():
            refuse_count((*section.order, label), "trefoil", 3, 4)
        case Quad():
            refuse_count((*section.order, label), "quad", 4)
    return replace(section, order=(*section.order, label))


def without(section: Section, names: Iterable[str]) -> Section:
    """The section without some of its conductors.

    A row closes up around the others; other formations become a free section.

    Raises
    ------
    UserError
        When none would be left.
    """
    leaving = set(names)
    held = slots(section)
    staying = tuple(slot for slot in held if slot.name not in leaving)
    if not staying:
        raise UserError("The last conductor stays: a run needs at least one.")
    if isinstance(section, Flat | Vertical | Sandwich):
        order = tuple(
            label
            for label, slot in zip(section.order, held, strict=True)
            if slot.name not in leaving
        )
        # The places of a formation close up around what is left.
        return replace(section, order=order)
    return FreeSection(slots=staying)


def with_section(
    layout: Layout, run: Run, section: Section, names: Mapping[str, str] | None = None
) -> Layout:
    """The layout with another section in a run; joints follow the slots' new names.

    Values that did not change keep their origins.
    """
    origins = section_origins(run, section, names)
    new = replace(run, section=section, origins=origins)
    moved = {old: name for old, name in (names or {}).items() if old != name}
    if not moved:
        return replaced(layout, new)
    joints = []
    for joint in layout.joints:
        ends = tuple(
            replace(end, slot=moved.get(end.slot, end.slot))
            if end.item == run.id
            else end
            for end in joint.ends
        )
        if ends != joint.ends:
            joints.append(replace(joint, ends=ends))
    return replaced(layout, new, *joints)


def _with_slot(section: Section, name: str, **values: Any) -> FreeSection:
    held = as_free(section).slots
    at = _index([slot.name for slot in held], name)
    return FreeSection(slots=(*held[:at], replace(held[at], **values), *held[at + 1 :]))


def _index(names: Sequence[str], name: str) -> int:
    if name not in names:
        raise UserError(f"The section has no conductor {name}: {', '.join(names)}.")
    return names.index(name)


def _exchanged(labels: tuple[str, ...], one: int, other: int) -> tuple[str, ...]:
    new = list(labels)
    new[one], new[other] = labels[other], labels[one]
    return tuple(new)


def _cut(
    labels: tuple[str, ...], like: Iterable[tuple[str, ...]]
) -> tuple[tuple[str, ...], ...]:
    """The labels cut into orders as long as those of `like`."""
    left = iter(labels)
    return tuple(tuple(next(left) for _ in order) for order in like)


def _upside_down(slot: Slot) -> Slot:
    shape = slot.shape
    match shape:
        case Bar():
            shape = mirrored_bar(shape)
        case Multicore():
            first, *others = shape.cores
            shape = replace(
                shape, turn=180.0 - shape.turn, cores=(first, *reversed(others))
            )
    return replace(slot, v=0.0 - slot.v, shape=shape)


def _upside_down_in_words(section: Section) -> Section | None:
    """A formation that may be the image of `section` upside down."""
    match section:
        case Flat():
            return section
        case Vertical() | Quad():
            return replace(section, order=section.order[::-1])
        case Trefoil():
            apex, right, left, *fourth = section.order
            return replace(
                section,
                order=(apex, left, right, *fourth),
                apex="down" if section.apex == "up" else "up",
            )
        case ParallelSets():
            turned = section.formation in ("vertical", "quad")
            orders = tuple(o[::-1] if turned else o for o in section.orders)
            if section.direction == "down":
                orders = orders[::-1]
            return replace(section, orders=orders)
        case StackedBars() | Sandwich() if section.direction == "down":
            return replace(section, order=section.order[::-1])
        case StackedBars() | Sandwich():
            return section
    return None


def _matched(image: Sequence[Slot], made: Sequence[Slot]) -> dict[str, str] | None:
    """Names of the made slots by those of the image, if they are the same."""
    by_place = {_place(slot): slot for slot in made}
    names: dict[str, str] = {}
    for slot in image:
        found = by_place.get(_place(slot))
        if found is None or (found.loads, found.shape) != (slot.loads, slot.shape):
            return None
        names[slot.name] = found.name
    return names if len(names) == len(made) else None


def _place(slot: Slot) -> tuple[float, float]:
    return round(slot.u, _DECIMALS) + 0.0, round(slot.v, _DECIMALS) + 0.0
