"""One receptor: its field in every load case, and its comparisons."""

from __future__ import annotations

from collections.abc import Collection

import numpy as np
from numpy.typing import NDArray

from engine.case_fields import CaseCurrents
from engine.circuits import LoadCase
from engine.comparisons import KINDS, comparisons, quantities
from engine.evaluations import Evaluation, Quantity
from engine.field import ellipse
from engine.levels import Kind, is_kind
from engine.loaded_layout import LoadedLayout
from engine.place_details import at_frequencies
from engine.places import MeasuredValue, Receptor
from engine.results import PlaceDetails, ReceptorField, ReceptorResult
from engine.zone_search import Found, found_at


def receptor_result(loaded: LoadedLayout, receptor: Receptor) -> ReceptorResult:
    """The field at a receptor and its comparisons, in every load case.

    A receptor keeps no clearance; inside a conductor or a closed enclosure it has no
    value.
    """
    found: dict[Quantity, tuple[Found, PlaceDetails]] = {}
    problems: dict[str, str] = {}
    fields = []
    wanted = quantities(loaded, receptor)
    for result in loaded.cases:
        index = loaded.index.get(result.case.id)
        if index is None:
            fields.append(_no_field(result.case, result.reason))
            continue
        case = loaded.fields.cases[index]
        problem = _masked_reason(loaded, case, receptor)
        if problem:
            problems[result.case.id] = problem
            fields.append(_no_field(result.case, problem))
            continue
        points = np.array([receptor.at], np.float64)
        b = loaded.fields.flux_density_at(case, points)
        evaluation = Evaluation(case, b, np.zeros(1, bool), 1)
        fields.append(_field(loaded, receptor, case, b[:, 0], evaluation))
        for quantity in wanted:
            if quantity.case == index and quantity.level is not None:
                largest = found_at(evaluation, quantity, points[0])
                details = loaded.surroundings.details_of_point(quantity, largest)
                found[quantity] = (largest, details)
    compared = comparisons(loaded, receptor, found, problems, {})
    return ReceptorResult(receptor, tuple(fields), compared)


def _masked_reason(loaded: LoadedLayout, case: CaseCurrents, receptor: Receptor) -> str:
    """Why there is no value at a receptor; empty where there is one."""
    points = np.array([receptor.at], np.float64)
    for keepout in case.closed:
        if keepout.masks(points)[0]:
            return f"It lies in {keepout.words}."
    if loaded.fields.masked_at(case, points, 0.0)[0]:
        return "It lies inside a conductor, where no value can be given."
    return ""


def _field(
    loaded: LoadedLayout,
    receptor: Receptor,
    case: CaseCurrents,
    b: NDArray[np.complex128],
    evaluation: Evaluation,
) -> ReceptorField:
    """The field at a receptor, from the (c, 3) phasors there."""
    totals = {kind: evaluation.total(kind) for kind in KINDS}
    flowing = {k for k in KINDS if any(is_kind(f, k) for f in case.frequencies)}
    ac = float(totals["AC"][0][0]) if "AC" in flowing else None
    dc = float(totals["DC"][0][0]) if "DC" in flowing else None
    by_frequency = {f: float(v[0]) for f, v in evaluation.by_frequency(None)[0].items()}
    axes = ellipse(b)
    measured = receptor.measured
    beside = None if measured is None else measured_kind(measured, flowing)
    calculated = {"AC": ac, "DC": dc}.get(beside or "")
    ratio = None
    if measured is not None and calculated:
        ratio = measured.flux_density / calculated
    kind: Kind = "AC" if ac is not None else "DC"
    return ReceptorField(
        case=case.case.id,
        counted=case.case.counted,
        reason="",
        ac=ac,
        dc=dc,
        frequencies=np.array([c.frequency for c in case.components]),
        components=b,
        semi_axes=np.column_stack([axes.semi_major, axes.semi_minor]),
        by_frequency=at_frequencies(by_frequency, None),
        is_bound=totals[kind][1],
        bound_reason=totals[kind][2],
        near_field=loaded.fields.at(receptor.at).near,
        measured_ratio=ratio,
        measured_kind=None if ratio is None else beside,
        contributions=loaded.surroundings.contributions(case, receptor.at, kind),
        net_current=loaded.surroundings.net_current(receptor.at),
    )


def measured_kind(measured: MeasuredValue, flowing: Collection[Kind]) -> Kind | None:
    """The kind of field that a measured value stands beside; None where none flows.

    Examples
    --------
    >>> value = MeasuredValue(flux_density=1e-6)
    >>> measured_kind(value, ("AC", "DC")), measured_kind(value, ("DC",))
    ('AC', 'DC')
    """
    stated: tuple[Kind, ...] = ("AC", "DC")
    if measured.kind:
        stated = (measured.kind,)
    return next((kind for kind in stated if kind in flowing), None)


def _no_field(case: LoadCase, reason: str) -> ReceptorField:
    """A receptor without a value."""
    return ReceptorField(
        case=case.id,
        counted=case.counted,
        reason=reason,
        ac=None,
        dc=None,
        frequencies=np.zeros(0),
        components=np.zeros((0, 3), np.complex128),
        semi_axes=np.zeros((0, 2)),
        by_frequency=(),
        is_bound=False,
        bound_reason="",
        near_field=False,
        measured_ratio=None,
        contributions=(),
        net_current=None,
    )
