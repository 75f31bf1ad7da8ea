"""Sections relabelled for a circuit's other supply, where that can be read in one way.

L1 and L2 (or L1 and N) become the poles of direct current, and the poles line and
neutral; from fewer conductors than a supply needs nothing is guessed. Import place:
after `section_edits`.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from msgspec.structs import replace

from engine.circuits import LINES, RETURNS, Circuit
from engine.edits import replaced
from engine.equipment import Board, Equipment, Transformer
from engine.errors import UserError
from engine.layout import Layout
from engine.runs import FreeSection, Multicore, ParallelSets, Run, Section, Slot
from engine.section_edits import with_section
from engine.sections import slots

#: New label by old one, by supply; the first that applies is meant.
_RENAMED: dict[str, tuple[dict[str, str], ...]] = {
    "dc": ({"L1": "L+", "L2": "L-"}, {"L1": "L+", "N": "L-"}),
    "single-phase": ({"L+": "L1", "L-": "N"}, {"L2": "N"}),
}


@dataclass(frozen=True)
class Relabelled:
    """A layout with sections relabelled, and the ids of their runs."""

    layout: Layout
    runs: tuple[str, ...]


def relabelled(layout: Layout, circuit: str) -> Relabelled:
    """The layout with the labels of a circuit's supply wherever it runs.

    Terminals and bars that only such runs lead to follow. Left as they are: sections
    that fit or share their conductors with another circuit, multicore cables, and runs
    to equipment that others need as it is.
    """
    chosen = next((c for c in layout.circuits if c.id == circuit), None)
    if chosen is None:
        return Relabelled(layout, ())
    wanted = {run.id: names for run in layout.runs if (names := _names_of(run, chosen))}
    while bound := _bound(layout, wanted, circuit):
        wanted = {run: names for run, names in wanted.items() if run not in bound}
    made = layout
    for run in layout.runs:
        if run.id in wanted:
            made = _with_labels(made, run, wanted[run.id])
    for equipment in layout.equipment:
        led = [run for run in _runs_at(layout, equipment) if run.id in wanted]
        if led and _may_follow(layout, equipment, wanted, circuit):
            made = replaced(made, _equipped(equipment, wanted[led[0].id]))
    return Relabelled(made, tuple(wanted))


def _bound(
    layout: Layout, wanted: Mapping[str, Mapping[str, str]], circuit: str
) -> frozenset[str]:
    """Runs to be relabelled that lead to equipment which cannot follow."""
    return frozenset(
        run.id
        for equipment in layout.equipment
        if not _may_follow(layout, equipment, wanted, circuit)
        for run in _runs_at(layout, equipment)
        if run.id in wanted
        and any(
            end is not None and end.equipment == equipment.id and not end.terminal
            for end in (run.start, run.end)
        )
    )


def _names_of(run: Run, circuit: Circuit) -> Mapping[str, str]:
    """New labels of a run's conductors by old ones; empty where it is left alone."""
    try:
        names = _new_labels(slots(run.section), circuit)
    except UserError:
        return {}
    return names if names and _renamed(run.section, names) is not None else {}


def _with_labels(layout: Layout, run: Run, names: Mapping[str, str]) -> Layout:
    section = _renamed(run.section, names)
    assert section is not None, "asked before"
    pairs = zip(slots(run.section), slots(section), strict=True)
    return with_section(layout, run, section, {a.name: b.name for a, b in pairs})


def _runs_at(layout: Layout, equipment: Equipment) -> tuple[Run, ...]:
    """Runs that lead to an equipment."""
    return tuple(
        run
        for run in layout.runs
        if equipment.id in {e.equipment for e in (run.start, run.end) if e is not None}
    )


def _may_follow(
    layout: Layout,
    equipment: Equipment,
    wanted: Mapping[str, Mapping[str, str]],
    circuit: str,
) -> bool:
    """Whether all that an equipment's labels are needed for is relabelled alike."""
    runs = _runs_at(layout, equipment)
    joined = any(end.item == equipment.id for j in layout.joints for end in j.ends)
    named = any(
        end.terminal
        for run in runs
        for end in (run.start, run.end)
        if end is not None and end.equipment == equipment.id
    )
    alike = {tuple(wanted.get(run.id, {}).items()) for run in runs}
    if joined or named or len(alike) != 1 or not all(alike):
        return False
    if isinstance(equipment, Board):
        return all(c.circuit == circuit for w in equipment.ways for c in w.circuits)
    return isinstance(equipment, Transformer)


def _equipped(equipment: Equipment, names: Mapping[str, str]) -> Equipment:
    """A transformer or board with other labels."""
    if isinstance(equipment, Transformer):
        terminals = tuple(
            replace(t, label=names.get(t.label, t.label)) for t in equipment.terminals
        )
        return replace(equipment, terminals=terminals)
    assert isinstance(equipment, Board), "loops name no ends"
    poles = tuple(
        replace(p, label=names.get(p.label, p.label)) for p in equipment.poles
    )
    return replace(equipment, poles=poles)


def _new_labels(held: tuple[Slot, ...], circuit: Circuit) -> Mapping[str, str]:
    """New labels by old ones; empty where they fit, or it is not clear which."""
    loads = [load for slot in held for load in slot.loads]
    present = {load.label for load in loads if load.circuit == circuit.id}
    shared = any(load.circuit != circuit.id for load in loads)
    if not present or shared or any(isinstance(s.shape, Multicore) for s in held):
        return {}
    needed = {*LINES[circuit.supply], *filter(None, [RETURNS.get(circuit.supply)])}
    if needed <= present:
        return {}
    for names in _RENAMED.get(circuit.supply, ()):
        now = {names.get(label, label) for label in present}
        if present >= set(names) and needed <= now and len(now) == len(present):
            return names
    return {}


def _renamed(section: Section, names: Mapping[str, str]) -> Section | None:
    """The section with other labels; None where a conductor's name is taken."""

    def new(label: str) -> str:
        return names.get(label, label)

    match section:
        case FreeSection():
            made = tuple(_renamed_slot(slot, names) for slot in section.slots)
            if len({slot.name for slot in made}) < len(made):
                return None
            return FreeSection(slots=made)
        case ParallelSets():
            orders = tuple(tuple(map(new, order)) for order in section.orders)
            return replace(section, orders=orders)
        case _:
            return replace(section, order=tuple(map(new, section.order)))


def _renamed_slot(slot: Slot, names: Mapping[str, str]) -> Slot:
    """A slot with other labels, and a name of its own where it had the label's."""
    stem, point, number = slot.name.partition(".")
    loads = tuple(
        replace(load, label=names.get(load.label, load.label)) for load in slot.loads
    )
    return replace(slot, name=f"{names.get(stem, stem)}{point}{number}", loads=loads)
