"""Shaping: items of a layout moved, turned, mirrored, copied, aligned, split, deleted.

Values in, values out. A joint goes along when everything that it joins does; the end
of a run at equipment that moves goes along with it. Otherwise links stretch.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Collection
from math import dist
from typing import Literal

from msgspec.structs import replace

from engine.circuits import LoadCase
from engine.copies import copies, with_joints
from engine.edits import added, removed, replaced, unused_id
from engine.errors import UserError
from engine.items import Item, Point2, Point3
from engine.layout import Layout
from engine.motions import (
    Motion,
    carried,
    carried_section,
    mirror_in,
    neat,
    shift_by,
    turn_about,
)
from engine.places import Receptor, Room, Zone
from engine.routes import SHORTEST
from engine.run_conductors import run_geometry
from engine.runs import Connection, Joint, Run, SlotEnd
from engine.vertices import bounds, with_route

Alignment = Literal[
    "least x", "middle x", "greatest x",
    "least y", "middle y", "greatest y",
    "least z", "middle z", "greatest z",
]  # fmt: skip


def moved(
    layout: Layout, ids: Collection[str], dx: float, dy: float, dz: float = 0.0
) -> Layout:
    """The layout with items shifted. [m]"""
    return placed(layout, ids, shift_by(dx, dy, dz))


def rotated(layout: Layout, ids: Collection[str], at: Point2, degrees: float) -> Layout:
    """The layout with items turned about a point on plan, counter-clockwise."""
    return placed(layout, ids, turn_about(at, degrees))


def mirrored(layout: Layout, ids: Collection[str], at: Point2, angle: float) -> Layout:
    """The layout with items mirrored in a line on plan, `angle` degrees from +x.

    Sections are mirrored too: every conductor lies where the mirror shows it.

    Raises
    ------
    UserError
        When a backing drawing is among the items.
    """
    return placed(layout, ids, mirror_in(at, angle))


def placed(layout: Layout, ids: Collection[str], motion: Motion) -> Layout:
    """The layout with items where a motion takes them, and what goes along."""
    going = set(ids)
    floors = {storey.id: storey.floor_level for storey in layout.storeys}
    new: list[Item] = []
    names: dict[str, dict[str, str]] = {}
    for item in layout.items():
        if isinstance(item, Joint):
            continue
        if isinstance(item, Run) and item.id in going:
            run, names[item.id] = carried_section(item, motion)
            new.append(run)
        elif item.id in going:
            new.append(carried(item, motion, floors))
        elif isinstance(item, Run):
            run = _with_ends_along(item, going, motion)
            if run is not item:
                new.append(run)
    for joint in layout.joints:
        ends = {end.item for end in joint.ends}
        goes = joint.id in going or ends <= going
        if goes or any(names.get(end) for end in ends):
            new.append(_joint_along(joint, names, motion if goes else None))
    return replaced(layout, *new)


def _with_ends_along(run: Run, going: set[str], motion: Motion) -> Run:
    route = list(run.route)
    if run.start is not None and run.start.equipment in going:
        route[0] = motion.place(route[0])
    if run.end is not None and run.end.equipment in going:
        route[-1] = motion.place(route[-1])
    return run if tuple(route) == run.route else replace(run, route=tuple(route))


def _joint_along(
    joint: Joint, names: dict[str, dict[str, str]], motion: Motion | None
) -> Joint:
    ends = tuple(
        replace(end, slot=_new_slot(names.get(end.item, {}), end.slot))
        for end in joint.ends
    )
    at = joint.at
    if at is not None and motion is not None:
        at = motion.place(at)
    return replace(joint, ends=ends, at=at)


def _new_slot(names: dict[str, str], slot: str) -> str:
    """The slot's name after a mirror; a core keeps its own name in its slot."""
    if slot in names:
        return names[slot]
    cable, point, core = slot.rpartition("/")
    return f"{names[cable]}/{core}" if point and cable in names else slot


def duplicated(
    layout: Layout, ids: Collection[str], dx: float, dy: float, dz: float = 0.0
) -> tuple[Layout, tuple[str, ...]]:
    """The layout with a shifted copy of the items, and the new ids. [m]"""
    return repeated(layout, ids, 1, dx, dy, dz)


def repeated(
    layout: Layout,
    ids: Collection[str],
    count: int,
    dx: float,
    dy: float,
    dz: float = 0.0,
) -> tuple[Layout, tuple[str, ...]]:
    """The layout with `count` copies of the items, each a step further. [m]

    A joint is copied when everything that it joins is; an end at equipment that is not
    copied becomes free.

    Raises
    ------
    UserError
        When no copy is asked for, or one would lie on its original.
    """
    if count < 1:
        raise UserError("Enter how many copies to make: 1 or more.")
    if dist((dx, dy, dz), (0.0, 0.0, 0.0)) < SHORTEST:
        raise UserError(
            "The copies would lie on the original: enter a step other than 0."
        )
    originals = with_joints(layout, ids)
    new_ids: list[str] = []
    for step in range(1, count + 1):
        made = copies(originals, {item.id for item in layout.items()})
        names = [item.id for item in made]
        layout = placed(
            added(layout, *made), names, shift_by(step * dx, step * dy, step * dz)
        )
        new_ids.extend(names)
    return layout, tuple(new_ids)


def aligned(layout: Layout, ids: Collection[str], how: Alignment) -> Layout:
    """The layout with each item shifted so that all lie at one line or height.

    Raises
    ------
    UserError
        When fewer than two of the items have a place.
    """
    place, letter = how.split()
    axis = "xyz".index(letter)
    spans: dict[str, tuple[float, float]] = {}
    for item in layout.items():
        found = bounds((item,)) if item.id in set(ids) else None
        if found is not None:
            spans[item.id] = (found[0][axis], found[1][axis])
    if len(spans) < 2:
        raise UserError("Select two or more items to align.")
    lows, highs = zip(*spans.values(), strict=True)
    share = {"least": 0.0, "middle": 0.5, "greatest": 1.0}[place]
    target = min(lows) + share * (max(highs) - min(lows))
    for id, (low, high) in spans.items():
        shift = [0.0, 0.0, 0.0]
        shift[axis] = neat(target - (low + share * (high - low)))
        layout = moved(layout, (id,), *shift)
    return layout


def split_run(layout: Layout, run_id: str, leg: int, at: Point3) -> Layout:
    """The layout with a run made two at a point of one of its legs (from 0). [m]

    Every conductor is joined to its own continuation; the section lies as it did.
    What was joined or connected at the run's end is so at the second run's.

    Raises
    ------
    UserError
        When the point is one of the run's ends.
    ValueError
        When there is no such run.
    """
    run = next((run for run in layout.runs if run.id == run_id), None)
    if run is None:
        raise ValueError(f"no run {run_id}")
    at = (neat(at[0]), neat(at[1]), neat(at[2]))
    before, after = [*run.route[: leg + 1]], [*run.route[leg + 1 :]]
    if dist(at, before[-1]) < SHORTEST:
        at = before.pop()
    elif dist(at, after[0]) < SHORTEST:
        at = after.pop(0)
        leg += 1
    if not before or not after:
        raise UserError(
            f"Run “{run.title}” cannot be split at its end: choose a point between "
            "its ends."
        )
    first = replace(
        run,
        route=(*before, at),
        turns=run.turns[: len(before)],
        end=None,
    )
    second = replace(
        with_route(run, leg, (at, *after)),
        id=unused_id(layout, f"{run.id}-2"),
        name=f"{run.name}, 2" if run.name else "",
        start=None,
    )
    layout = replaced(
        layout,
        first,
        *(_ends_passed_on(joint, run_id, second.id) for joint in layout.joints),
    )
    layout = added(layout, second)
    for slot in run_geometry(run).made:
        ends = (
            SlotEnd(item=first.id, slot=slot.name, end="end"),
            SlotEnd(item=second.id, slot=slot.name, end="start"),
        )
        name = unused_id(layout, f"{first.id} to {second.id} {slot.name}")
        layout = added(layout, Joint(id=name, ends=ends))
    return layout


def _ends_passed_on(joint: Joint, old: str, new: str) -> Joint:
    return replace(
        joint,
        ends=tuple(
            replace(end, item=new) if end.item == old and end.end == "end" else end
            for end in joint.ends
        ),
    )


def deleted(layout: Layout, ids: Collection[str]) -> Layout:
    """The layout without the items, and without what only held on to them.

    Joints lose the ends that are gone, and go when fewer than two are left; runs'
    ends at equipment that is gone become free; storeys, reference levels, enclosures
    and circuits that are gone are no longer named. A section keeps naming a circuit
    that is gone: faults say so, since its current is missed.
    """
    singles = {layout.title.id, layout.settings.id}
    gone = {item.id for item in layout.items()} & set(ids) - singles
    if not gone:
        return layout
    for joint in layout.joints:
        left = [end for end in joint.ends if end.item not in gone]
        if len(left) < len(joint.ends) and len(left) < 2:
            gone.add(joint.id)
    staying = [item for item in layout.items() if item.id not in gone]
    layout = replaced(layout, *(_released(item, gone) for item in staying))
    return removed(layout, *gone)


def _released(item: Item, gone: Collection[str]) -> Item:
    """The item without what it names that is gone."""
    match item:
        case Joint():
            return replace(item, ends=tuple(e for e in item.ends if e.item not in gone))
        case Run():
            return replace(
                item, start=_kept(item.start, gone), end=_kept(item.end, gone)
            )
        case Room():
            return replace(item, storey=None if item.storey in gone else item.storey)
        case Zone():
            return replace(
                item,
                storey=None if item.storey in gone else item.storey,
                levels=tuple(level for level in item.levels if level not in gone),
            )
        case Receptor():
            return replace(
                item, levels=tuple(level for level in item.levels if level not in gone)
            )
        case LoadCase():
            return replace(
                item,
                factors=tuple(f for f in item.factors if f.circuit not in gone),
                own=tuple(o for o in item.own if o.circuit not in gone),
                open_enclosures=tuple(e for e in item.open_enclosures if e not in gone),
            )
    return item


def _kept(connection: Connection | None, gone: Collection[str]) -> Connection | None:
    return None if connection is None or connection.equipment in gone else connection


def counted(items: Collection[Item]) -> str:
    """What the items are, for a sentence: "busbar LV link", "Room 1" or "3 items".

    Examples
    --------
    >>> counted((Receptor(id="chair", name="Chair", at=(0.0, 0.0, 1.0)),))
    'receptor Chair'
    """
    kinds = Counter(kind_of(item) for item in items)
    if len(items) == 1:
        (item,) = items
        kind = kind_of(item)
        named = item.title.casefold().startswith(kind.casefold())
        return item.title if named else f"{kind} {item.title}"
    if len(kinds) == 1:
        (kind,) = kinds
        return f"{len(items)} {_plural(kind)}"
    return f"{len(items)} items"


def kind_of(item: Item) -> str:
    """What a person calls an item of this kind: "busbar", "reference level"."""
    if isinstance(item, Run):
        return item.kind
    letters = type(item).__name__
    return "".join(f" {x.lower()}" if x.isupper() else x for x in letters).strip()


def _plural(kind: str) -> str:
    if kind.endswith("y"):
        return kind[:-1] + "ies"
    return f"{kind}es" if kind.endswith("s") else f"{kind}s"
