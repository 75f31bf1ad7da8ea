"""What a section is called and looks like in words: the direction and the order.

Looking along the route u is to the right; from the other end it is to the left.
"""

from __future__ import annotations

from engine.formations import label_of
from engine.layout import Layout
from engine.polylines import Side
from engine.runs import Run, Section, Slot
from engine.sections import slots

#: Conductors that are named one by one.
_MOST = 40

#: Nearer than this, two conductors are in one column or row. [m]
_SAME = 1e-6


def direction_text(layout: Layout, run: Run, *, from_end: bool = False) -> str:
    """Along which way a section is looked at: "looking from T1 to board"."""
    here, there = _end_title(layout, run, "start"), _end_title(layout, run, "end")
    if from_end:
        here, there = there, here
    return f"looking from {here} to {there}"


def order_text(section: Section, *, from_end: bool = False) -> str:
    """The conductors as they are seen, across the way they are spread most.

    Examples
    --------
    >>> from engine.runs import CircuitShare, Flat, Quad
    >>> carried = (CircuitShare(circuit="F1"),)
    >>> order_text(Flat(circuits=carried), from_end=True)
    'left to right: N L3 L2 L1'
    >>> order_text(Quad(circuits=carried))
    'left to right: L1 over N, L2 over L3'
    """
    sign = -1.0 if from_end else 1.0
    seen = [(sign * slot.u, -slot.v, label_of(slot)) for slot in slots(section)]
    wide = max(x for x, _, _ in seen) - min(x for x, _, _ in seen)
    high = max(y for _, y, _ in seen) - min(y for _, y, _ in seen)
    if wide >= high - _SAME:
        words, beside, places = "left to right", " over ", seen
    else:
        words, beside = "top to bottom", " beside "
        places = [(y, x, label) for x, y, label in seen]
    groups: list[list[str]] = []
    last = None
    for along, _, label in sorted(places, key=lambda p: (round(p[0], 6), p[1])):
        if last is None or along - last > _SAME:
            groups.append([])
            last = along
        groups[-1].append(label)
    named = [beside.join(group) for group in groups]
    between = " " if all(len(group) == 1 for group in groups) else ", "
    shown = between.join(named[:_MOST])
    return f"{words}: {shown}" + (" …" if len(named) > _MOST else "")


def slot_title(slot: Slot) -> str:
    """A slot by its name, with its label where the name does not say it."""
    label = label_of(slot)
    return slot.name if slot.name.startswith(label) else f"{slot.name} ({label})"


def _end_title(layout: Layout, run: Run, side: Side) -> str:
    """What stands at an end of a run: an equipment, a joint, or the end itself."""
    connection = run.start if side == "start" else run.end
    if connection is not None:
        unit = layout.by_id().get(connection.equipment)
        return unit.title if unit is not None else connection.equipment
    for joint in layout.joints:
        if any(end.item == run.id and end.end == side for end in joint.ends):
            return joint.title
    return f"the {side}"
