"""Remarks on results: near fields, values that U reaches, figures that hide a state.

They say what to bear in mind beside a number; the number and its state stand in the
assessment.
"""

from __future__ import annotations

from collections.abc import Iterator

from engine.faults import Remark
from engine.results import Assessment, Comparison
from engine.units import flux_density_text, significant, text_beside

#: Figures that a value is printed with.
_FIGURES = 3

_NEAR = (
    "nearer than two bar widths or cable diameters to a conductor: near field, even "
    "current assumed; it is kept in the result."
)


def result_remarks(assessment: Assessment, unit: str) -> Iterator[Remark]:
    """What is to say on the results of a layout, flux densities in the unit."""
    yield from _near_fields(assessment)
    for comparison in assessment.comparisons:
        yield from _reached_by_uncertainty(assessment, comparison, unit)
        yield from _rounding(assessment, comparison)


def _near_fields(assessment: Assessment) -> Iterator[Remark]:
    """W04: a maximum or a receptor close to a conductor."""
    for zone in assessment.zones:
        near = {
            maximum.details.at: maximum.case
            for maximum in zone.maxima
            if maximum.details.near_field
        }
        for comparison in zone.comparisons:
            details = comparison.details
            if details is not None and details.near_field:
                near.setdefault(details.at, comparison.case)
        for place, case in near.items():
            yield Remark(
                "W04",
                "warning",
                f"Zone “{zone.zone.title}”, load case {_case_title(assessment, case)}: "
                f"its largest value lies {_NEAR}",
                (zone.zone.id,),
                place,
                case,
            )
    for result in assessment.receptors:
        if any(field.near_field for field in result.fields):
            yield Remark(
                "W04",
                "warning",
                f"Receptor “{result.receptor.title}” is {_NEAR}",
                (result.receptor.id,),
                result.receptor.at,
            )


def _reached_by_uncertainty(
    assessment: Assessment, comparison: Comparison, unit: str
) -> Iterator[Remark]:
    """W20: the declared uncertainty reaches over the level."""
    if comparison.state not in ("below, U reaches", "above, U reaches"):
        return
    place, level = _titles(assessment, comparison)
    side = "below" if comparison.state.startswith("below") else "above"
    amount = ""
    if comparison.uncertainty is not None:
        amount = f" of {flux_density_text(comparison.uncertainty, unit)}"
    yield Remark(
        "W20",
        "warning" if comparison.counted else "note",
        f"{place} against {level}, load case "
        f"{_case_title(assessment, comparison.case)}: {side}, and the expanded "
        f"uncertainty U{amount} reaches across the level; the decision rule says how a "
        "summary counts that.",
        (comparison.place, comparison.level),
        comparison.details.at if comparison.details else None,
        comparison.case,
    )


def _rounding(assessment: Assessment, comparison: Comparison) -> Iterator[Remark]:
    """W30: three figures would print the value as the level."""
    ratio = comparison.ratio
    if ratio is None or ratio == 0:
        return
    shown = text_beside(ratio, 1.0, _FIGURES)
    if shown == significant(ratio, _FIGURES):
        return
    place, level = _titles(assessment, comparison)
    yield Remark(
        "W30",
        "note",
        f"{place} against {level}, load case "
        f"{_case_title(assessment, comparison.case)}: with three figures the ratio to "
        f"the level would read {significant(ratio, _FIGURES)}; it is {shown}.",
        (comparison.place, comparison.level),
        comparison.details.at if comparison.details else None,
        comparison.case,
    )


def _titles(assessment: Assessment, comparison: Comparison) -> tuple[str, str]:
    items = assessment.layout.by_id()
    place, level = items.get(comparison.place), items.get(comparison.level)
    return (
        f"“{place.title if place else comparison.place}”",
        f"“{level.title if level else comparison.level}”",
    )


def _case_title(assessment: Assessment, case: str) -> str:
    titles = (c.case.title for c in assessment.cases if c.case.id == case)
    return f"“{next(titles, case)}”"
