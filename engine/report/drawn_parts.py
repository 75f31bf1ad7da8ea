"""Parts of a plan: what lies between two levels."""

from __future__ import annotations

from dataclasses import replace
from typing import TypeVar

from engine.drawing import Place, Plan, RunShape, Strand

_Levelled = TypeVar("_Levelled", Place, Strand, RunShape)


def between(plan: Plan, low: float, high: float) -> Plan:
    """What of a plan lies or reaches between two levels above the datum. [m]

    A place without levels is kept.
    """

    def kept(parts: tuple[_Levelled, ...]) -> tuple[_Levelled, ...]:
        return tuple(part for part in parts if _reaches(part, low, high))

    strands = kept(plan.equipment_strands)
    owners = {strand.item for strand in strands}
    known = {strand.item for strand in plan.equipment_strands}
    return replace(
        plan,
        rooms=kept(plan.rooms),
        enclosures=kept(plan.enclosures),
        equipment=tuple(
            place
            for place in kept(plan.equipment)
            if place.item in owners or place.item not in known
        ),
        equipment_strands=strands,
        runs=kept(plan.runs),
        links=kept(plan.links),
        zones=kept(plan.zones),
        receptors=tuple(mark for mark in plan.receptors if low <= mark.at[2] <= high),
    )


def _reaches(part: Place | Strand | RunShape, low: float, high: float) -> bool:
    return part.levels is None or (part.levels[0] <= high and part.levels[1] >= low)
