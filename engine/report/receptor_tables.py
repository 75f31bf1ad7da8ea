"""Receptors: why they are there, the field by axis and frequency, comparisons."""

from __future__ import annotations

import numpy as np
from reportlab.platypus import Flowable

from engine.report.names import Wording
from engine.report.text import paragraph, table
from engine.report.words import place
from engine.report.zone_tables import comparison_rows, comparison_table
from engine.results import Assessment, ReceptorField, ReceptorResult
from engine.units import flux_density_text, significant


def receptor_section(
    assessment: Assessment, words: Wording, width: float
) -> list[Flowable]:
    """Receptors: why they are there, the field by axis and frequency, comparisons."""
    if not assessment.receptors:
        return [paragraph("No receptor was entered.")]
    about = [
        (
            r.receptor.title,
            place(r.receptor.at, words.length_unit),
            r.receptor.category or "not chosen",
            r.receptor.reason,
            r.receptor.use,
            _measured(r, words),
        )
        for r in assessment.receptors
    ]
    heads = (
        "Receptor", f"x, y, z [{words.length_unit}]", "Category", "Reason", "Use",
        "Measured",
    )  # fmt: skip
    story: list[Flowable] = [table(heads, about, (18, 15, 15, 20, 14, 18), width)]
    fields = [
        row
        for r in assessment.receptors
        for f in r.fields
        for row in _field_rows(r, f, words)
    ]
    unit = words.unit
    field_heads = (
        "Receptor", "Load case", "Frequency", f"Bx By Bz, RMS [{unit}]",
        f"Resultant [{unit}]", f"Semi-axes, RMS [{unit}]", "Notes",
    )  # fmt: skip
    story.append(table(field_heads, fields, (16, 17, 10, 20, 11, 14, 12), width))
    rows = [row for r in assessment.receptors for row in comparison_rows(r, words)]
    if rows:
        story.append(comparison_table("Receptor", rows, words, width))
    return story


def _measured(result: ReceptorResult, words: Wording) -> str:
    measured = result.receptor.measured
    if measured is None:
        return "none"
    lines = [flux_density_text(measured.flux_density, words.unit)]
    lines += [t for t in (measured.date, measured.instrument, measured.load_note) if t]
    if measured.load is not None:
        lines.append(f"at {measured.load:g} A")
    return "\n".join(lines)


def _field_rows(
    result: ReceptorResult, found: ReceptorField, words: Wording
) -> list[tuple[str, ...]]:
    title, case = result.receptor.title, words.name(found.case)
    if found.reason:
        return [(title, case, "–", "–", "–", "–", found.reason)]
    rows: list[tuple[str, ...]] = []
    for k, frequency in enumerate(found.frequencies):
        axes = np.abs(found.components[k])
        rows.append(
            (
                title,
                case,
                "DC" if frequency == 0 else f"{frequency:g} Hz",
                "  ".join(words.value(float(b)) for b in axes),
                words.value(float(np.linalg.norm(axes))),
                " × ".join(words.value(float(b)) for b in found.semi_axes[k]),
                "",
            )
        )
    notes = ["near field, even current assumed"] if found.near_field else []
    if found.is_bound:
        notes.append(f"upper bound: {found.bound_reason}")
    if found.measured_ratio is not None:
        notes.append(f"measured / calculated {significant(found.measured_ratio)}")
    rows.append(
        (title, case, "AC total", "", words.value(found.ac), "", "\n".join(notes))
    )
    return rows
