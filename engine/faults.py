"""What blocks an assessment: layouts whose field would not be that of a real room.

The codes: F01 a reference that leads nowhere, F02 two items of one id, F03 geometry
that cannot be, F04 currents that cannot be determined, W01 net current that ends in the
open, W03 currents that do not close where they meet.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from engine.circuit_currents import CaseTerms
from engine.circuits import LoadCase
from engine.conductors import Node, conductors, loose_ends, nodes, run_problem
from engine.currents import (
    CasePhasors,
    Component,
    case_phasors,
    node_currents,
)
from engine.ends import equipment_parts
from engine.equipment import Board, ConductorLoop, Equipment
from engine.errors import UserError
from engine.items import Item, Point3
from engine.layout import Layout
from engine.places import Receptor, Room, Zone
from engine.runs import FreeSection, Run
from engine.units import significant

Severity = Literal["blocking", "warning", "note"]

#: Currents that may remain where they meet: this many amperes, or this part of the sum
#: of their magnitudes, whichever is more.
MAY_REMAIN = 0.5
MAY_REMAIN_RELATIVE = 1e-3


@dataclass(frozen=True)
class Remark:
    """Something worth saying about a layout.

    Attributes
    ----------
    code
        Which remark it is, for confirming it.
    severity
        A blocking one leaves nothing to assess.
    sentence
        What, where, and what to do.
    items
        Ids of the items concerned.
    place
        Where to look. [m]
    case
        Id of the load case; empty when it holds for every one.
    """

    code: str
    severity: Severity
    sentence: str
    items: tuple[str, ...] = ()
    place: Point3 | None = None
    case: str = ""


def faults(layout: Layout, case: LoadCase) -> tuple[Remark, ...]:
    """What blocks the assessment of a load case, and net current let stand."""
    return (*layout_faults(layout), *case_faults(layout, case))


def layout_faults(layout: Layout) -> tuple[Remark, ...]:
    """What blocks an assessment whatever the load case."""
    found = [*_equal_ids(layout), *_dangling(layout), *_geometry(layout)]
    if not _has(found, "F02", "F03"):
        found.extend(
            Remark("F01", "blocking", loose.sentence, loose.items)
            for loose in loose_ends(layout)
        )
    return tuple(dict.fromkeys(found))


def case_faults(layout: Layout, case: LoadCase) -> tuple[Remark, ...]:
    """What blocks the assessment of this load case, besides `layout_faults`.

    Currents are summed only where the geometry can be built and every circuit has
    currents.
    """
    found = [*_dangling_in_case(layout, case)]
    if _has([*_equal_ids(layout)], "F02"):
        return tuple(found)
    try:
        phasors = case_phasors(layout, case)
    except UserError as error:
        return (*found, *_undetermined(layout, case, error))
    if not [*_geometry(layout)]:
        found.extend(open_nodes(layout, phasors, nodes(layout)))
    return tuple(dict.fromkeys(found))


def open_nodes(
    layout: Layout, phasors: CasePhasors, places: tuple[Node, ...]
) -> Iterator[Remark]:
    """Remarks on the nodes where currents remain (Kirchhoff's current law).

    Every component must close by itself: |Σ I| ≤ max(0.5 A, 0.1 % of Σ |I|).

    Parameters
    ----------
    layout : Layout
        Names the items and says which remarks were confirmed.
    phasors : CasePhasors
        The currents.
    places : n nodes
        Where currents meet.
    """
    titles = {item.id: item.title for item in layout.items()}
    for node, remaining in _remaining(phasors, places):
        where = _place_text(node.place)
        if node.kind != "free end":
            yield Remark(
                "W03",
                "blocking",
                f"Currents do not close at {_node_text(node, titles)} {where}: "
                f"{remaining} remain. Join every conductor of the circuits that meet "
                "there, or correct their shares and currents.",
                node.items,
                node.place,
                phasors.case.id,
            )
            continue
        sentence = (
            f"Net current ends in the open at {_node_text(node, titles)} {where}: "
            f"{remaining}. Its field would fall off slowly and not be physical: join "
            "the end, draw the return path, or confirm it."
        )
        confirmed = _confirmation(layout, "W01", node.items)
        yield Remark(
            "W01",
            "blocking" if confirmed is None else "warning",
            sentence + (confirmed or ""),
            node.items,
            node.place,
            phasors.case.id,
        )


def _remaining(
    phasors: CasePhasors, places: Sequence[Node]
) -> Iterator[tuple[Node, str]]:
    """The nodes that do not close, and the currents that remain there, as text."""
    sums = np.abs(node_currents(phasors, [node.inflow for node in places])).T
    for k in np.flatnonzero((sums > MAY_REMAIN).any(axis=1)).tolist():
        node, remaining = places[k], sums[k]
        total = np.zeros(len(remaining))
        for load in node.inflow:
            total += abs(load.share) * np.abs(phasors.of(load.circuit, load.label))
        too_much = remaining > np.maximum(MAY_REMAIN, MAY_REMAIN_RELATIVE * total)
        text = ", ".join(
            f"{significant(float(amperes))} A {_component_text(component)}"
            for component, amperes, is_open in zip(
                phasors.components, remaining, too_much, strict=True
            )
            if is_open
        )
        if text:
            yield node, text


def _component_text(component: Component) -> str:
    text = "DC" if component.frequency == 0 else f"at {component.frequency:g} Hz"
    return f"{text} ({component.circuit})" if component.circuit else text


def _place_text(place: Point3) -> str:
    return "({:.2f}, {:.2f}, {:.2f}) m".format(*place)


def _node_text(node: Node, titles: dict[str, str]) -> str:
    name = titles.get(node.items[0], node.items[0]) if node.items else "?"
    kinds = {
        "joint": "joint",
        "free end": "the free end of",
        "terminal": "a terminal of",
        "star": "the star point of",
        "way": "a way of",
        "board": "the incoming side of",
    }
    return f"{kinds[node.kind]} “{name}”"


def _confirmation(layout: Layout, code: str, items: tuple[str, ...]) -> str | None:
    """The words that name who let a remark on these items stand."""
    for confirmed in layout.confirmed_remarks:
        if confirmed.code == code and items and set(items) <= set(confirmed.items):
            return f" Confirmed by {confirmed.by}." if confirmed.by else " Confirmed."
    return None


def _has(remarks: list[Remark], *codes: str) -> bool:
    return any(remark.code in codes for remark in remarks)


def _equal_ids(layout: Layout) -> Iterator[Remark]:
    seen: dict[str, Item] = {}
    for item in layout.items():
        first = seen.get(item.id)
        if first is None:
            seen[item.id] = item
            continue
        yield Remark(
            "F02",
            "blocking",
            f"Two items have the id “{item.id}”: {_kind(first)} “{first.title}” and "
            f"{_kind(item)} “{item.title}”. Give one of them another id.",
            (item.id,),
        )


def _kind(item: Item) -> str:
    """The item's type in words: "ReferenceLevel" is a "reference level"."""
    letters = type(item).__name__
    return "".join(f" {x.lower()}" if x.isupper() else x for x in letters).strip()


def _missing(item: Item, what: str, id: str, place: Point3 | None = None) -> Remark:
    return Remark(
        "F01",
        "blocking",
        f"{_kind(item).capitalize()} “{item.title}” names the {what} “{id}”, which is "
        "not in the layout: add it, or remove it there.",
        (item.id,),
        place,
    )


def _dangling(layout: Layout) -> Iterator[Remark]:
    """Ids that name nothing, besides the ends of runs and joints (`loose_ends`)."""
    circuits = {circuit.id for circuit in layout.circuits}
    storeys = {storey.id for storey in layout.storeys}
    levels = {level.id for level in layout.levels}
    for run in layout.runs:
        for circuit in _carried(run):
            if circuit not in circuits:
                yield _missing(run, "circuit", circuit, run.route[0])
    for equipment in layout.equipment:
        for circuit in _fed(equipment):
            if circuit not in circuits:
                yield _missing(equipment, "circuit", circuit)
    placed: list[Room | Zone] = [*layout.rooms, *layout.zones]
    for item in placed:
        if item.storey is not None and item.storey not in storeys:
            yield _missing(item, "storey", item.storey)
    assessed: list[Zone | Receptor] = [*layout.zones, *layout.receptors]
    for where in assessed:
        for level in where.levels:
            if level not in levels:
                place = where.at if isinstance(where, Receptor) else None
                yield _missing(where, "reference level", level, place)


def _dangling_in_case(layout: Layout, case: LoadCase) -> Iterator[Remark]:
    circuits = {circuit.id for circuit in layout.circuits}
    enclosures = {enclosure.id for enclosure in layout.enclosures}
    named = [
        *(("circuit", factor.circuit, circuits) for factor in case.factors),
        *(("circuit", own.circuit, circuits) for own in case.own),
        *(("enclosure", id, enclosures) for id in case.open_enclosures),
    ]
    for what, id, known in named:
        if id not in known:
            missing = _missing(case, what, id)
            yield Remark("F01", "blocking", missing.sentence, (case.id,), case=case.id)


def _carried(run: Run) -> list[str]:
    """Ids of the circuits in a run's section."""
    section = run.section
    if isinstance(section, FreeSection):
        named = [load.circuit for slot in section.slots for load in slot.loads]
    else:
        named = [carried.circuit for carried in section.circuits]
    return list(dict.fromkeys(named))


def _fed(equipment: Equipment) -> list[str]:
    """Ids of the circuits that an equipment carries by itself."""
    if isinstance(equipment, ConductorLoop):
        return [equipment.circuit]
    if isinstance(equipment, Board):
        named = [c.circuit for way in equipment.ways for c in way.circuits]
        return list(dict.fromkeys(named))
    return []


def _geometry(layout: Layout) -> Iterator[Remark]:
    """What cannot be built: each run and equipment by itself, then all together."""
    alone = True
    for run in layout.runs:
        problem = run_problem(layout, run)
        if problem is not None:
            alone = False
            yield Remark("F03", "blocking", problem, (run.id,), run.route[0])
    for equipment in layout.equipment:
        try:
            equipment_parts(equipment)
        except UserError as error:
            alone = False
            yield Remark("F03", "blocking", str(error), (equipment.id,))
    if alone:
        try:
            conductors(layout)
        except UserError as error:
            yield Remark("F03", "blocking", str(error))


def _undetermined(layout: Layout, case: LoadCase, error: UserError) -> Iterator[Remark]:
    """One remark for each circuit without currents, or else what `error` says."""
    told = False
    try:
        terms = CaseTerms(case)
    except UserError:
        yield Remark("F04", "blocking", str(error), (case.id,), case=case.id)
        return
    for circuit in layout.circuits:
        try:
            terms.currents(circuit)
        except UserError as own:
            told = True
            yield Remark("F04", "blocking", str(own), (circuit.id,), case=case.id)
    if not told:
        yield Remark("F04", "blocking", str(error), (case.id,), case=case.id)
