"""Receptors: why they are there, the field by axis and frequency, comparisons."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from reportlab.platypus import Flowable

from engine.report.names import Wording
from engine.report.text import paragraph, table
from engine.report.words import frequency_text
from engine.report.zone_tables import (
    comparison_rows,
    comparison_table,
    frequency_tables,
)
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
        "Receptor, load case", "Frequency", f"Bx [{unit}]", f"By [{unit}]",
        f"Bz [{unit}]", f"B [{unit}]", f"Major axis [{unit}]", f"Minor axis [{unit}]",
    )  # fmt: skip
    shares = (28, 11, 10, 10, 10, 10, 10.5, 10.5)
    text = (
        "RMS values of the three axes, their resultant B, and the semi-axes of the "
        "ellipse that the field runs through at each frequency."
    )
    made = table(field_heads, fields, shares, width)
    story: list[Flowable] = [paragraph(text), made]
    rows = [row for r in assessment.receptors for row in comparison_rows(r, words)]
    if rows:
        story.append(comparison_table("Receptor", rows, words, width))
        compared = [c for r in assessment.receptors for c in r.comparisons]
        story += frequency_tables("Receptor", compared, words, width)
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
                    found.reason or _beside_measured(found, words),
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


def _beside_measured(found: ReceptorField, words: Wording) -> str:
    """The calculated value of the kind of field that was measured."""
    if found.measured_kind == "DC":
        return f"{words.value(found.dc)} (DC)"
    return words.value(found.ac)


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
    notes = [result.receptor.title, words.name(found.case)]
    if found.reason:
        return ("\n".join([*notes, found.reason]), *["–"] * 7)
    if found.near_field:
        notes.append("near field, even current assumed")
    if found.is_bound:
        notes.append(f"upper bound: {found.bound_reason}")
    if found.measured_ratio is not None:
        notes.append(f"measured / calculated {significant(found.measured_ratio)}")
    parts = np.abs(found.components)
    whole = np.linalg.norm(parts, axis=1)
    largest = float(max(whole, default=0.0))
    at = [frequency_text(float(f)) for f in found.frequencies]
    lines = [_column(parts[:, k], largest, words) for k in range(3)]
    sizes = _column(whole, largest, words)
    axes = [_column(found.semi_axes[:, k], largest, words) for k in range(2)]
    if found.ac is not None:
        at.append("AC total")
        sizes.append(words.value(found.ac))
    columns = ("\n".join(column) for column in (at, *lines, sizes, *axes))
    return ("\n".join(notes), *columns)


def _column(values: NDArray[np.float64], whole: float, words: Wording) -> list[str]:
    return [words.small(float(value), whole) for value in values]
