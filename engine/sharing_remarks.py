"""Remarks on equal sharing: parallel conductors whose currents were not solved.

Equal sharing is an assumption and not a careful one: real sharing follows the
impedances, and the field can be several times larger or smaller.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator, Sequence

from engine.circuits import Circuit
from engine.equipment import ConductorLoop
from engine.errors import UserError
from engine.faults import Remark
from engine.items import Point3
from engine.layout import Layout
from engine.runs import Multicore, Run, Slot, SlotLoad
from engine.sections import slots

#: Shares that differ by less are equal.
SAME_SHARE = 1e-9


def equal_sharing(
    run: Run, made: Sequence[Slot], circuits: dict[str, Circuit]
) -> Iterator[Remark]:
    """W08: several conductors of one pole, each with the same share."""
    shares: dict[tuple[str, str], list[float]] = defaultdict(list)
    for slot in made:
        if not isinstance(slot.shape, Multicore):
            for load in slot.loads:
                shares[load.circuit, load.label].append(load.share)
    alike = {
        key: len(values)
        for key, values in shares.items()
        if len(values) > 1
        and max(values) - min(values) < SAME_SHARE
        and max(values) > 0
    }
    for count in sorted(set(alike.values())):
        keys = [key for key, n in alike.items() if n == count]
        labels = list(dict.fromkeys(label for _, label in keys))
        owners = list(dict.fromkeys(circuit for circuit, _ in keys))
        titles = [quoted(circuits, c) for c in owners]
        of = "circuit" if len(titles) == 1 else "circuits"
        conductors = (
            f"{count} conductors of {labels[0]}"
            if len(labels) == 1
            else f"{count} conductors each of {listed(labels)}"
        )
        yield Remark(
            code="W08",
            severity="note",
            sentence=f"“{run.title}”: {conductors} of {of} {listed(titles)} share "
            "equally: assumed. Real sharing follows their impedances and can raise "
            "the field.",
            items=(run.id,),
            place=middle(run),
        )


def equally_sharing_items(layout: Layout) -> Iterator[Remark]:
    """W08: runs or loops that carry equal parts of one conductor's current."""
    circuits = {circuit.id: circuit for circuit in layout.circuits}
    parts: dict[tuple[str, str], dict[str, float]] = defaultdict(dict)
    for item, load in _carried(layout):
        owned = parts[load.circuit, load.label]
        owned[item] = owned.get(item, 0.0) + load.share
    titles = {item.id: item.title for item in layout.items()}
    told: set[tuple[str, ...]] = set()
    for (circuit, label), owned in parts.items():
        items = _alike(owned)
        if not items or items in told:
            continue
        told.add(items)
        names = listed([f"“{titles[item]}”" for item in items])
        yield Remark(
            code="W08",
            severity="note",
            sentence=f"{names} share {label} of circuit {quoted(circuits, circuit)} "
            "equally: assumed. Real sharing follows their impedances.",
            items=items,
        )


def _alike(owned: dict[str, float]) -> tuple[str, ...]:
    """Items whose equal parts make up the whole current; empty where none do."""
    for share in owned.values():
        items = tuple(i for i, s in owned.items() if abs(s - share) < SAME_SHARE)
        if len(items) > 1 and abs(len(items) * share - 1) < SAME_SHARE:
            return items
    return ()


def _carried(layout: Layout) -> Iterator[tuple[str, SlotLoad]]:
    """Loads of runs and loops, with the id of what carries them."""
    for run in layout.runs:
        try:
            made = slots(run.section)
        except UserError:
            continue  # told as a fault
        for slot in made:
            for load in slot.loads:
                yield run.id, load
    for loop in layout.equipment:
        if isinstance(loop, ConductorLoop):
            yield (
                loop.id,
                SlotLoad(circuit=loop.circuit, label=loop.label, share=loop.share),
            )


def quoted(circuits: dict[str, Circuit], circuit: str) -> str:
    return f"“{circuits[circuit].title if circuit in circuits else circuit}”"


def middle(run: Run) -> Point3:
    """A point of the route halfway along its vertices."""
    return run.route[len(run.route) // 2]


def listed(words: Sequence[str]) -> str:
    """Words as a list in a sentence.

    >>> listed(["L1", "L2", "N"])
    'L1, L2 and N'
    """
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} and {words[-1]}"
