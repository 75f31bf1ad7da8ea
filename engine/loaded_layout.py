"""A layout with the currents of its load cases: what every assessment needs."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

from engine.case_fields import CaseCurrents, CaseFields, case_currents
from engine.circuits import LoadCase
from engine.comparability import NO_CURRENT
from engine.conductors import Conductor, conductors
from engine.currents import case_phasors
from engine.errors import Cancelled, UserError, stop_if
from engine.faults import case_faults, layout_faults
from engine.field import ResponseCache
from engine.layout import Layout
from engine.masks import keepouts
from engine.place_details import Surroundings
from engine.results import CaseResult
from engine.uncertainty_budget import Budgets


@dataclass(frozen=True, eq=False)
class LoadedLayout:
    """What the assessment of every place needs.

    `index` is the place of a case in the fields, by id; a case without currents has
    none.
    """

    layout: Layout
    cases: tuple[CaseResult, ...]
    index: dict[str, int]
    surroundings: Surroundings

    @property
    def fields(self) -> CaseFields:
        return self.surroundings.fields

    @cached_property
    def budgets(self) -> Budgets:
        """Budgets of uncertainty of its values."""
        return Budgets(self.layout, self.fields)


def loaded_layout(
    layout: Layout,
    cases: Sequence[LoadCase],
    cache: ResponseCache | None,
    cancelled: Cancelled | None,
) -> LoadedLayout:
    """Conductors and currents of a layout, and what stands in the way of any."""
    blocking = layout_faults(layout)
    problem, parts = _conductors(layout)
    results: list[CaseResult] = []
    with_currents: list[CaseCurrents] = []
    index: dict[str, int] = {}
    for case in cases:
        stop_if(cancelled)
        faults = (*blocking, *case_faults(layout, case))
        try:
            phasors = case_phasors(layout, case)
        except UserError as error:
            results.append(CaseResult(case, (), (), faults, problem or str(error)))
            continue
        currents = case_currents(phasors, parts, keepouts(layout, case))
        reason = problem or ("" if currents.components else NO_CURRENT)
        results.append(
            CaseResult(case, currents.frequencies, phasors.notes, faults, reason)
        )
        if not reason:
            index[case.id] = len(with_currents)
            with_currents.append(currents)
    fields = CaseFields(parts, tuple(with_currents), cache, cancelled)
    surroundings = Surroundings(fields, layout.circuits)
    return LoadedLayout(layout, tuple(results), index, surroundings)


def _conductors(layout: Layout) -> tuple[str, tuple[Conductor, ...]]:
    """Why the conductors cannot be built, and what there is of them."""
    try:
        return "", conductors(layout)
    except UserError as error:
        return str(error), ()
