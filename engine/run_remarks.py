"""Remarks on runs and equipment: sharing, ratings, open ends, steel, what is left out.

Equal sharing of parallel conductors is an assumption, and so is the link across a free
end; both print themselves here.
"""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Iterator, Sequence

import numpy as np

from engine.circuits import (
    LINES,
    RETURNS,
    Circuit,
    DirectCurrents,
    LineLoads,
    MeasuredCurrents,
)
from engine.conductors import Conductor, Node
from engine.currents import CasePhasors, load_current
from engine.equipment import Board, ConductorLoop, Transformer
from engine.errors import UserError
from engine.faults import Remark
from engine.items import Point3
from engine.layout import Layout
from engine.runs import Multicore, Run, Slot, SlotLoad
from engine.sections import single_conductors, slots
from engine.sharing_remarks import (
    equal_sharing,
    equally_sharing_items,
    listed,
    middle,
)
from engine.units import LENGTH_UNITS, significant

#: Ends further apart than both deserve more than an assumed link. [m], [pitches]
SPREAD, SPREAD_PITCHES = 0.1, 2.0

_ROUNDING = 1 + 1e-9

#: Labels of lines, and of a direct current's return. A neutral may lie there unused.
_OF_SUPPLIES = {label for lines in LINES.values() for label in lines} | {RETURNS["dc"]}


def run_remarks(layout: Layout) -> Iterator[Remark]:
    """What is to say on runs in any load case."""
    circuits = {circuit.id: circuit for circuit in layout.circuits}
    for run in layout.runs:
        try:
            made = slots(run.section)
        except UserError:
            continue  # told as a fault
        yield from equal_sharing(run, made, circuits)
        yield from _labels(run, made, circuits)
        yield from _steel(run, made, circuits)
        yield from _net_current_only(run, made)
    yield from equally_sharing_items(layout)


def equipment_remarks(layout: Layout) -> Iterator[Remark]:
    """W25 and W27: coils, and transformers whose stray field is not modelled."""
    for equipment in layout.equipment:
        if isinstance(equipment, ConductorLoop) and equipment.kind == "coil":
            yield Remark(
                code="W25",
                severity="warning",
                sentence=f"Coil “{equipment.title}”: its keep-out distance and the "
                "heating of closed metal loops near it are outside this calculation.",
                items=(equipment.id,),
                place=equipment.path[0],
            )
        if isinstance(equipment, Transformer) and not _note_confirmed(equipment):
            yield Remark(
                code="W27",
                severity="note",
                sentence=f"The stray field of core and windings of transformer "
                f"“{equipment.title}” is not modelled; its low-voltage conductors are.",
                items=(equipment.id,),
                place=equipment.star,
            )


def free_end_remarks(
    layout: Layout, nodes: Sequence[Node], conductors: Sequence[Conductor]
) -> Iterator[Remark]:
    """W02: assumed closing links at ends that lead nowhere.

    Parameters
    ----------
    layout : Layout
        Whose runs.
    nodes, conductors : sequences
        Of the layout.
    """
    by_id, unit = layout.by_id(), layout.settings.length_unit
    ends = defaultdict(list)
    for conductor in conductors:
        if conductor.role == "closing link":
            ends[conductor.item].append(conductor)
    for node in nodes:
        if not node.links:
            continue
        item = node.items[0]
        outer = _outer_ends(ends[item], node.place)
        spread, pitch = _spread(outer)
        wide = spread > SPREAD or (
            pitch > 0 and spread > SPREAD_PITCHES * pitch * _ROUNDING
        )
        apart = f"{significant(spread / LENGTH_UNITS[unit])} {unit} apart"
        advice = (
            "; that changes the field nearby: say where they are joined."
            if wide
            else "."
        )
        yield Remark(
            code="W02",
            severity="warning" if wide else "note",
            sentence=f"{_end_named(by_id.get(item), item, node.place)}: conductors end "
            f"unjoined; a closing link across ends {apart} is assumed{advice}",
            items=(item,),
            place=node.place,
        )


def _end_named(item: object, id: str, place: Point3) -> str:
    """The item by its title, of a run with the end that lies nearer to `place`."""
    if not isinstance(item, Run):
        return f"“{getattr(item, 'title', id)}”"
    first, last = (math.dist(item.route[i], place) for i in (0, -1))
    return f"The {'start' if first <= last else 'end'} of “{item.title}”"


def rating_remarks(layout: Layout, phasors: CasePhasors) -> Iterator[Remark]:
    """W16: currents above the rated current of a pole, in one load case."""
    for run in layout.runs:
        if run.rated_current is None:
            continue
        try:
            made = single_conductors(run.section)
        except UserError:
            continue
        poles: dict[str, list[SlotLoad]] = defaultdict(list)
        for slot in made:
            if slot.loads:
                poles[slot.loads[0].label].extend(slot.loads)
        yield from _overloads(
            run.title, run.id, run.rated_current, poles, phasors, middle(run)
        )
    for board in layout.equipment:
        if not isinstance(board, Board) or board.rated_current is None:
            continue
        bars = {
            pole.label: [
                SlotLoad(circuit=share.circuit, label=pole.label, share=share.share)
                for way in board.ways
                for share in way.circuits
            ]
            for pole in board.poles
        }
        place = (*board.origin, board.poles[0].z)
        yield from _overloads(
            board.title, board.id, board.rated_current, bars, phasors, place
        )


def _overloads(
    title: str,
    item: str,
    rated: float,
    poles: dict[str, list[SlotLoad]],
    phasors: CasePhasors,
    place: Point3,
) -> Iterator[Remark]:
    currents = {
        label: float(np.linalg.norm(load_current(phasors, loads)))
        for label, loads in poles.items()
    }
    over = {label: i for label, i in currents.items() if i > rated * (1 + 1e-9)}
    if not over:
        return
    label = max(over, key=lambda name: over[name])
    yield Remark(
        code="W16",
        severity="warning",
        sentence=f"“{title}”: {significant(over[label], 4)} A flow in {label} in load "
        f"case “{phasors.case.title}”, above its rated current of "
        f"{significant(rated, 4)} A: check the currents or the rating.",
        items=(item,),
        place=place,
        case=phasors.case.id,
    )


def _labels(
    run: Run, made: Sequence[Slot], circuits: dict[str, Circuit]
) -> Iterator[Remark]:
    """W15: a line that stands twice, carries too much, or is none of the supply."""
    counts: dict[str, dict[str, int]] = defaultdict(lambda: defaultdict(int))
    totals: dict[tuple[str, str], float] = defaultdict(float)
    for slot in made:
        for load in slot.loads:
            counts[load.circuit][load.label] += 1
            totals[load.circuit, load.label] += load.share
    for circuit_id, labels in counts.items():
        circuit = circuits.get(circuit_id)
        if circuit is None:
            continue
        lines = LINES[circuit.supply]
        own = [*lines, *filter(None, [RETURNS.get(circuit.supply)])]
        foreign = [label for label in labels if label in _OF_SUPPLIES - {*own}]
        if lines and foreign:
            supply = "DC" if circuit.supply == "dc" else circuit.supply
            flowing = [label for label in foreign if label in _stated(circuit)]
            flow = (
                f"yet currents are stated for {listed(flowing)} and flow there"
                if flowing
                else f"nothing of it flows in {listed(foreign)}"
            )
            yield _label_remark(
                run,
                circuit,
                f"it is {supply}, with {listed(own)}; {flow}: check its supply, its "
                "currents and the order of the conductors.",
            )
        missing = [line for line in lines if line not in labels]
        twice = [line for line in lines if labels.get(line, 0) > 1]
        present = [line for line in lines if line in labels]
        if missing and twice and len(present) > 1:
            yield _label_remark(
                run,
                circuit,
                f"{listed(twice)} stands more than once and {listed(missing)} is "
                "missing: check the order of the conductors.",
            )
        for label in labels:
            if totals[circuit_id, label] > 1 + 1e-6:
                yield _label_remark(
                    run,
                    circuit,
                    f"the conductors of {label} carry "
                    f"{significant(totals[circuit_id, label] * 100)} % of its current "
                    "together: check labels and shares.",
                )


def _stated(circuit: Circuit) -> set[str]:
    """Labels that the circuit's demand states a current of their own for."""
    match circuit.demand:
        case DirectCurrents(currents=stated):
            return {each.label for each in stated if each.rms}
        case LineLoads(loads=loads):
            return {each.label for each in loads if each.rms}
        case MeasuredCurrents(lines=lines):
            return {each.label for each in lines if each.rms}
        case _:
            return set()


def _label_remark(run: Run, circuit: Circuit, what: str) -> Remark:
    return Remark(
        code="W15",
        severity="warning",
        sentence=f"“{run.title}”, circuit “{circuit.title}”: {what}",
        items=(run.id, circuit.id),
        place=middle(run),
    )


def _steel(
    run: Run, made: Sequence[Slot], circuits: dict[str, Circuit]
) -> Iterator[Remark]:
    """W12: some single-core conductors of an AC circuit alone in steel."""
    if run.containment != "steel":
        return
    carried: dict[str, set[str]] = defaultdict(set)
    for slot in made:
        for load in slot.loads:
            carried[load.circuit].add(load.label)
    for circuit_id, labels in carried.items():
        circuit = circuits.get(circuit_id)
        if circuit is None or circuit.base_frequency == 0:
            continue
        needed = list(LINES[circuit.supply])
        back = RETURNS.get(circuit.supply)
        if back is not None and circuit.neutral != "none":
            needed.append(back)
        missing = [label for label in needed if label not in labels]
        if missing and labels & set(needed):
            yield Remark(
                code="W12",
                severity="warning",
                sentence=f"“{run.title}” is in steel without {listed(missing)} of "
                f"circuit “{circuit.title}”: wiring practice keeps all conductors of "
                "an AC circuit in one steel enclosure; the steel heats and changes the "
                "field, which is not modelled.",
                items=(run.id, circuit.id),
                place=middle(run),
            )


def _net_current_only(run: Run, made: Sequence[Slot]) -> Iterator[Remark]:
    """W29: a cable that counts as its net current only."""
    named = [
        slot.name
        for slot in made
        if isinstance(slot.shape, Multicore) and slot.shape.model == "net current only"
    ]
    if named:
        yield Remark(
            code="W29",
            severity="note",
            sentence=f"“{run.title}”: {listed(named)} counts as its net current only; "
            "the field of its balanced current is taken as zero.",
            items=(run.id,),
            place=middle(run),
        )


def _note_confirmed(transformer: Transformer) -> bool:
    """Whether an origin of its note confirms what is not modelled."""
    return any(o.field == "note" and o.kind == "confirmed" for o in transformer.origins)


def _outer_ends(links: Sequence[Conductor], place: Point3) -> list[tuple[float, ...]]:
    """Where links that meet at a place come from; of all links where none meet."""
    found = []
    for link in links:
        for near, far in ((link.path[0], link.path[-1]), (link.path[-1], link.path[0])):
            if math.dist(near, place) < 1e-6:
                found.append(tuple(far.tolist()))
    return found


def _spread(ends: Sequence[tuple[float, ...]]) -> tuple[float, float]:
    """Largest distance between ends, and the largest to a nearest neighbour. [m]"""
    if len(ends) < 2:
        return 0.0, 0.0
    distances = np.linalg.norm(
        np.array(ends)[:, np.newaxis] - np.array(ends)[np.newaxis], axis=2
    )
    spread = float(distances.max())
    np.fill_diagonal(distances, np.inf)
    return spread, float(distances.min(axis=1).max())
