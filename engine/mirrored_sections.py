"""Sections seen in a mirror: u becomes −u, and every slot keeps its load.

Where a formation can say the mirror image in its own words it stays a formation; else
the image is a free section. Bars and cores turn the other way.
"""

from __future__ import annotations

from collections.abc import Sequence

from msgspec.structs import replace

from engine.runs import (
    Bar,
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
    StackedBars,
    Trefoil,
    Vertical,
)
from engine.sections import slots

#: Places nearer than this are the same place. [m]
_SAME = 1e-9


def mirrored_section(section: Section) -> tuple[Section, dict[str, str]]:
    """The mirror image of a section, and the new name of each of its slots.

    Parameters
    ----------
    section : Section
        A formation or a free section.

    Returns
    -------
    Section
        With a slot at (−u, v) for each slot at (u, v).
    dict of str
        Name of the slot in the image by its name before.
    """
    image = tuple(_mirrored_slot(slot) for slot in slots(section))
    made = _in_own_words(section)
    if made is not None:
        names = _matched(image, slots(made))
        if names is not None:
            return made, names
    return FreeSection(slots=image), {slot.name: slot.name for slot in image}


def _mirrored_slot(slot: Slot) -> Slot:
    return replace(slot, u=0.0 - slot.u, shape=_mirrored_shape(slot.shape))


def _mirrored_shape(shape: Shape) -> Shape:
    match shape:
        case Round():
            return shape
        case Bar():
            return mirrored_bar(shape)
        case Multicore():
            first, *others = shape.cores
            return replace(
                shape, turn=0.0 - shape.turn, cores=(first, *reversed(others))
            )


def mirrored_bar(bar: Bar) -> Bar:
    """The bar turned the other way; on edge it looks the same."""
    return bar if bar.turn % 90 == 0 else replace(bar, turn=-bar.turn)


def _in_own_words(section: Section) -> Section | None:
    """A formation that may be the mirror image."""
    match section:
        case FreeSection():
            return None
        case Flat():
            return replace(
                section, order=section.order[::-1], shape=_solid(section.shape)
            )
        case Vertical():
            return replace(section, shape=_solid(section.shape))
        case Trefoil() | Quad():
            kind = "trefoil" if isinstance(section, Trefoil) else "quad"
            return replace(section, order=_set_order(section.order, kind))
        case ParallelSets():
            orders = tuple(_set_order(o, section.formation) for o in section.orders)
            if section.direction == "right":
                orders = orders[::-1]
            return replace(section, orders=orders, shape=_solid(section.shape))
        case StackedBars() | Sandwich():
            if section.direction == "right":
                return replace(section, order=section.order[::-1])
            return section


def _set_order(order: Sequence[str], formation: str) -> tuple[str, ...]:
    """The order of one set in the mirror."""
    if formation == "vertical":
        return tuple(order)
    if formation == "trefoil" and len(order) == 3:
        return (order[0], order[2], order[1])
    if formation == "quad" and len(order) == 4:
        return (order[1], order[0], order[3], order[2])
    return tuple(reversed(order))


def _solid(shape: Round | Bar) -> Round | Bar:
    return mirrored_bar(shape) if isinstance(shape, Bar) else shape


def _matched(image: Sequence[Slot], made: Sequence[Slot]) -> dict[str, str] | None:
    """Names of the made slots that are the same as those of the image, if all are."""
    names: dict[str, str] = {}
    left = list(made)
    for slot in image:
        for other in left:
            if (
                abs(slot.u - other.u) < _SAME
                and abs(slot.v - other.v) < _SAME
                and slot.loads == other.loads
                and _alike(slot.shape, other.shape)
            ):
                names[slot.name] = other.name
                left.remove(other)
                break
        else:
            return None
    return None if left else names


def _alike(one: Shape, other: Shape) -> bool:
    if isinstance(one, Bar) and isinstance(other, Bar):
        same_size = (one.width, one.thickness) == (other.width, other.thickness)
        return same_size and abs((one.turn - other.turn + 90) % 180 - 90) < 1e-9
    return one == other
