"""Which runs carry any current in a load case; the others are drawn dashed."""

from __future__ import annotations

from engine.circuits import LoadCase
from engine.conductors import Conductor
from engine.currents import case_phasors
from engine.errors import UserError
from engine.layout import Layout

Key = tuple[str, str]


def flowing(layout: Layout, case: LoadCase) -> frozenset[Key]:
    """Circuit and label of every circuit conductor with current; none on error.

    Currents that cannot be evaluated do not flow in any calculation either.
    """
    try:
        phasors = case_phasors(layout, case)
    except UserError:
        return frozenset()
    return frozenset(key for key, values in phasors.values.items() if values.any())


def carries(conductor: Conductor, keys: frozenset[Key]) -> bool:
    """Whether a conductor takes part in any current that flows."""
    return any(
        load.share != 0.0 and (load.circuit, load.label) in keys
        for load in conductor.loads
    )


def shown_case(layout: Layout, case_id: str) -> LoadCase:
    """The load case with that id; the first for an empty or an unknown one."""
    return next((c for c in layout.cases if c.id == case_id), layout.cases[0])
