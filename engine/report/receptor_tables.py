"""Receptors: why they are there, the field by axis and frequency, comparisons."""

from __future__ import annotations

import numpy as np
from reportlab.platypus import Flowable

from engine.report.names import Wording
from engine.report.text import paragraph, table
from engine.report.zone_tables import comparison_rows, comparison_table
from engine.results import Assessment, ReceptorField, ReceptorResult
from engine.units import flux_density_text, significant


def receptor_section(
    assessment: Assessment, words: Wording, width: float
) -> list[Flowable]:
    """The field at receptors by axis and frequency, and their comparisons."""
    if not assessment.receptors:
        return [paragraph("Omitted: no receptor was entered.")]
    fields = [_field_row(r, f, words) for r in assessment.receptors for f in r.fields]
    unit = words.unit
    field_heads = (
        "Receptor", "Load case", "Frequency", f"Bx By Bz, RMS [{unit}]",
        f"Resultant [{unit}]", f"Semi-axes, RMS [{unit}]", "Notes",
    )  # fmt: skip
    shares = (15, 16, 11, 19, 11, 15, 13)
    story: list[Flowable] = [table(field_heads, fields, shares, width)]
    rows = [row for r in assessment.receptors for row in comparison_rows(r, words)]
    if rows:
        story.append(comparison_table("Receptor", rows, words, width))
    return story


def measured_section(
    assessment: Assessment, words: Wording, width: float
) -> list[Flowable]:
    """Measured values beside the calculated ones; empty without any."""
    rows = []
    for result in assessment.receptors:
        measured = result.receptor.measured
        if measured is None:
            continue
        for found in result.fields:
            ratio = found.measured_ratio
            rows.append(
                (
                    result.receptor.title,
                    _measured(result, words),
                    words.name(found.case),
                    found.reason or words.value(found.ac),
                    "–" if ratio is None else significant(ratio),
                )
            )
    if not rows:
        return []
    heads = (
        "Receptor", "Measured, RMS resultant", "Load case",
        f"Calculated [{words.unit}]", "Measured / calculated",
    )  # fmt: skip
    text = (
        "Measured values are as entered and were not scaled to another load. Only a "
        "load case with the currents of the measurement can be held against them."
    )
    return [paragraph(text), table(heads, rows, (20, 32, 22, 14, 12), width)]


def _measured(result: ReceptorResult, words: Wording) -> str:
    measured = result.receptor.measured
    if measured is None:
        return "none"
    lines = [flux_density_text(measured.flux_density, words.unit)]
    lines += [t for t in (measured.date, measured.instrument, measured.load_note) if t]
    if measured.load is not None:
        lines.append(f"at {measured.load:g} A")
    return "\n".join(lines)


def _field_row(
    result: ReceptorResult, found: ReceptorField, words: Wording
) -> tuple[str, ...]:
    """One load case: a line for each frequency, and one for the AC total."""
    title, case = result.receptor.title, words.name(found.case)
    if found.reason:
        return (title, case, "–", "–", "–", "–", found.reason)
    parts = [np.abs(b) for b in found.components]
    at = ["DC" if f == 0 else f"{f:g} Hz" for f in found.frequencies]
    axes = [", ".join(words.value(float(b)) for b in part) for part in parts]
    whole = [words.value(float(np.linalg.norm(part))) for part in parts]
    ellipses = [
        " × ".join(words.value(float(b)) for b in pair) for pair in found.semi_axes
    ]
    if found.ac is not None:
        at.append("AC total")
        whole.append(words.value(found.ac))
    notes = ["near field, even current assumed"] if found.near_field else []
    if found.is_bound:
        notes.append(f"upper bound: {found.bound_reason}")
    if found.measured_ratio is not None:
        notes.append(f"measured / calculated {significant(found.measured_ratio)}")
    columns = (at, axes, whole, ellipses, notes)
    return (title, case, *("\n".join(lines) for lines in columns))
