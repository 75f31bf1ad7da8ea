"""The budgets of uncertainty of an assessment: one for each zone and receptor."""

from __future__ import annotations

from collections.abc import Collection, Iterator

import numpy as np
from numpy.typing import NDArray

from engine.budget import Budget
from engine.decisions import worst_comparisons
from engine.errors import Cancelled, Progress, stop_if
from engine.evaluations import Quantity
from engine.field import ResponseCache
from engine.levels import Kind
from engine.loaded_layout import LoadedLayout, loaded_layout
from engine.places import Receptor, Zone
from engine.results import Assessment, Comparison, PlaceDetails
from engine.uncertainty_budget import N_SAMPLES, SEED, places_of

Floats = NDArray[np.float64]

#: What a budget is made for: a place, its quantity, where, and the value there.
_Wanted = tuple[Zone | Receptor, Quantity, Floats, float]


def place_budgets(
    assessment: Assessment,
    *,
    places: Collection[str] | None = None,
    n_samples: int = N_SAMPLES,
    seed: int = SEED,
    cache: ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> tuple[Budget, ...]:
    """The budget of every place where it matters most.

    That is its worst comparison in a counted load case; without one, the largest RMS
    resultant in a counted case, AC and DC each. A place without a value has no budget.

    Parameters
    ----------
    places
        Ids; None: all.
    n_samples, seed
        Of the currents drawn at random.

    Raises
    ------
    ComputationCancelled
        When `cancelled` says so.
    """
    layout = assessment.layout
    cases = [result.case for result in assessment.cases]
    loaded = loaded_layout(layout, cases, cache, cancelled)
    if not loaded.fields.cases:
        return ()
    wanted = [
        one
        for one in _wanted(assessment, loaded)
        if places is None or one[0].id in places
    ]
    if wanted:
        points = np.concatenate([points for _, _, points, _ in wanted])
        loaded.fields.look_at(points)
        loaded.budgets.look_at(points)
    budgets = []
    for k, (place, quantity, points, value) in enumerate(wanted):
        stop_if(cancelled)
        if progress is not None:
            progress(k / len(wanted), f"Budget of “{place.title}”")
        budgets.append(
            loaded.budgets.budget(
                place, quantity, points, value, n_samples=n_samples, seed=seed
            )
        )
    if progress is not None:
        progress(1.0, "Budgets computed")
    return tuple(budgets)


def _wanted(assessment: Assessment, loaded: LoadedLayout) -> Iterator[_Wanted]:
    """Worst comparisons, else largest resultants, in the order of the layout."""
    worst: dict[str, Comparison] = {}
    for comparison in worst_comparisons(assessment):
        if comparison.ratio is not None:
            kept = worst.get(comparison.place)
            if kept is None or comparison.ratio > (kept.ratio or 0.0):
                worst[comparison.place] = comparison
    layout = assessment.layout
    places: list[Zone | Receptor] = [*layout.zones, *layout.receptors]
    for place in places:
        compared = worst.get(place.id)
        if compared is not None:
            yield _of_comparison(assessment, loaded, place, compared)
        elif isinstance(place, Zone):
            yield from _of_zone(assessment, loaded, place)
        else:
            yield from _of_receptor(assessment, loaded, place)


def _of_comparison(
    assessment: Assessment,
    loaded: LoadedLayout,
    place: Zone | Receptor,
    compared: Comparison,
) -> _Wanted:
    assert compared.details is not None
    assert compared.kind is not None
    assert compared.value is not None
    level = assessment.level(compared)
    quantity = Quantity(loaded.index[compared.case], compared.kind, level)
    return place, quantity, places_of(place, compared.details), compared.value


def _of_zone(
    assessment: Assessment, loaded: LoadedLayout, zone: Zone
) -> Iterator[_Wanted]:
    result = next(r for r in assessment.zones if r.zone is zone)
    counted = _counted(assessment)
    largest: dict[Kind, tuple[float, str, PlaceDetails]] = {}
    for m in result.maxima:
        if m.case in counted and m.value > largest.get(m.kind, (0.0,))[0]:
            largest[m.kind] = (m.value, m.case, m.details)
    for kind, (value, case, details) in largest.items():
        quantity = Quantity(loaded.index[case], kind)
        yield zone, quantity, places_of(zone, details), value


def _of_receptor(
    assessment: Assessment, loaded: LoadedLayout, receptor: Receptor
) -> Iterator[_Wanted]:
    result = next(r for r in assessment.receptors if r.receptor is receptor)
    largest: dict[Kind, tuple[float, str]] = {}
    for field in result.fields:
        values: tuple[tuple[Kind, float | None], ...] = (
            ("AC", field.ac),
            ("DC", field.dc),
        )
        for kind, value in values:
            if field.counted and value and value > largest.get(kind, (0.0,))[0]:
                largest[kind] = (value, field.case)
    for kind, (value, case) in largest.items():
        quantity = Quantity(loaded.index[case], kind)
        yield receptor, quantity, np.array([receptor.at], np.float64), value


def _counted(assessment: Assessment) -> set[str]:
    return {result.case.id for result in assessment.cases if result.case.counted}
