"""Zones: comparisons, largest values without any level, circuits that matter."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from reportlab.platypus import Flowable

from engine.proof_words import proof_of_comparison, proof_of_maximum
from engine.report.names import Wording
from engine.report.summary import state_text
from engine.report.text import bullets, introduced, paragraph, table
from engine.report.words import frequency_text, length, place
from engine.results import (
    Assessment,
    AtFrequency,
    Comparison,
    Contribution,
    NetCurrentEffect,
    PlaceDetails,
    ReceptorResult,
    ZoneResult,
)
from engine.units import significant, text_beside

#: Circuits listed under one result: those that matter most.
MOST_CIRCUITS = 6


def zone_section(
    assessment: Assessment, words: Wording, width: float
) -> list[Flowable]:
    """Zones: comparisons, maxima without any level, circuits that matter."""
    if not assessment.zones:
        return [paragraph("No zone was entered.")]
    story: list[Flowable] = []
    rows = [row for z in assessment.zones for row in comparison_rows(z, words)]
    if rows:
        story.append(comparison_table("Zone", rows, words, width))
        compared = [c for z in assessment.zones for c in z.comparisons]
        story += frequency_tables("Zone", compared, words, width)
    else:
        story.append(paragraph("No zone names a reference level."))
    reasons = [f"{z.zone.title}: {z.reason}" for z in assessment.zones if z.reason]
    story += bullets(reasons)
    story += _maxima_table(assessment, words, width)
    return story


def contribution_tables(
    assessment: Assessment, words: Wording, width: float
) -> list[Flowable]:
    """Circuits that matter at the largest value of each zone."""
    details = [
        (z.zone.title, f"{words.name(m.case)}, {m.kind}", m.details)
        for z in assessment.zones
        for m in z.maxima
    ]
    return _contribution_table(details, words, width)


def comparison_table(
    what: str, rows: Sequence[Sequence[str]], words: Wording, width: float
) -> Flowable:
    """Comparisons, one a row."""
    heads = (
        f"{what}, reference level, load case", f"B [{words.unit}]", f"L [{words.unit}]",
        "B/L", f"U [{words.unit}]", "State", f"Place x, y, z [{words.length_unit}]",
        "Masked, near field, area with B/L above 1",
    )  # fmt: skip
    return table(heads, rows, (20, 9, 10, 7, 7, 16, 13, 18), width)


def comparison_rows(
    result: ZoneResult | ReceptorResult, words: Wording
) -> list[tuple[str, ...]]:
    """A row of the table for each comparison of a zone or receptor."""
    return [_comparison_row(c, words) for c in result.comparisons]


def _comparison_row(comparison: Comparison, words: Wording) -> tuple[str, ...]:
    limit = comparison.level_value
    case = words.name(comparison.case)
    if not comparison.counted:
        case += " (for information)"
    state = state_text(comparison)
    kind = f" ({comparison.kind})" if comparison.kind else ""
    ratio = "–" if comparison.ratio is None else text_beside(comparison.ratio, 1.0)
    several = "per frequency" if comparison.ratio is not None else ""
    return (
        f"{words.name(comparison.place)}\n{words.name(comparison.level)}\n{case}",
        words.beside(comparison.value, limit) + kind,
        words.limit(limit) if limit is not None else several,
        ratio,
        words.value(comparison.uncertainty),
        state,
        _place(comparison.details, words),
        _marks(comparison, words),
    )


def _place(details: PlaceDetails | None, words: Wording) -> str:
    if details is None:
        return "–"
    text = place(details.at, words.length_unit)
    if details.height is not None:
        text += f"\n{length(details.height, words.length_unit)} above the floor"
    return text


def _marks(comparison: Comparison, words: Wording) -> str:
    lines = []
    if comparison.area_above is not None:
        lines.append(_masked(comparison.masked_share))
        lines.append(f"above 1 on {significant(comparison.area_above)} m²")
    proof = proof_of_comparison(comparison, words.unit)
    if proof:
        lines.append(proof)
    details = comparison.details
    if details is not None and details.near_field:
        lines.append("near field, even current assumed")
    if details is not None and details.is_bound:
        lines.append(f"upper bound: {details.bound_reason}")
    if comparison.other_kind_ratio is not None:
        other = "DC" if comparison.kind == "AC" else "AC"
        lines.append(f"{other} ratio {significant(comparison.other_kind_ratio)}")
    if comparison.not_covered:
        listed = ", ".join(f"{f:g} Hz" for f in comparison.not_covered)
        lines.append(f"not dealt with by the level: {listed}")
    return "\n".join(lines)


def _masked(share: float) -> str:
    if 0 < share < 0.005:
        return "masked under 1 %"
    return f"masked {100 * share:.0f} %"


def frequency_tables(
    what: str, comparisons: Sequence[Comparison], words: Wording, width: float
) -> list[Flowable]:
    """Comparisons over several frequencies, taken apart; empty without any."""
    rows = [
        row
        for c in comparisons
        if c.details is not None and len(c.details.by_frequency) > 1
        for row in _frequency_rows(c, c.details.by_frequency, words)
    ]
    if not rows:
        return []
    heads = (
        f"{what}, reference level, load case", "Frequency", f"B [{words.unit}]",
        f"L [{words.unit}]", "B/L",
    )  # fmt: skip
    text = "By frequency, at the place of the comparison, in the level's own basis:"
    return introduced(text, table(heads, rows, (48, 13, 13, 13, 13), width))


def _frequency_rows(
    c: Comparison, parts: Sequence[AtFrequency], words: Wording
) -> Iterable[tuple[str, ...]]:
    """One row whose cells have a line for each frequency."""
    largest = max(part.value for part in parts)
    yield (
        f"{words.name(c.place)}\n{words.name(c.level)}\n{words.name(c.case)}",
        "\n".join(frequency_text(part.frequency) for part in parts),
        "\n".join(words.small(part.value, largest) for part in parts),
        "\n".join(
            "–" if part.level is None else words.derived(part.level) for part in parts
        ),
        "\n".join(
            "–" if part.ratio is None else significant(part.ratio) for part in parts
        ),
    )


def _maxima_table(
    assessment: Assessment, words: Wording, width: float
) -> list[Flowable]:
    rows = []
    for zone in assessment.zones:
        for m in zone.maxima:
            details = m.details
            heights = "\n".join(
                f"{length(h, words.length_unit)}: {words.value(b)}"
                for h, b in details.by_height
            )
            spectrum = "\n".join(
                f"{frequency_text(part.frequency)}: {words.small(part.value, m.value)}"
                for part in details.by_frequency
            )
            notes = [m.reason] if m.reason else []
            proof = proof_of_maximum(m, words.unit)
            notes += [proof] if proof else []
            notes.append(f"last step of the search {1000 * details.step:.3g} mm")
            if details.near_field:
                notes.append("near field, even current assumed")
            if details.is_bound:
                notes.append(f"upper bound: {details.bound_reason}")
            rows.append(
                (
                    zone.zone.title,
                    words.name(m.case),
                    f"{words.value(m.value)} ({m.kind})",
                    _place(details, words),
                    heights,
                    spectrum,
                    "\n".join(notes),
                )
            )
    if not rows:
        return []
    measure = words.length_unit
    heads = (
        "Zone", "Load case", f"Largest B [{words.unit}]", f"Place x, y, z [{measure}]",
        f"Over that point, height [{measure}]: B", f"By frequency [{words.unit}]",
        "Notes",
    )  # fmt: skip
    text = "Largest RMS resultant of each zone by its spatial rule, without any level:"
    made = table(heads, rows, (14, 14, 10, 15, 14, 13, 20), width)
    return introduced(text, made)


def _contribution_table(
    places: Iterable[tuple[str, str, PlaceDetails]], words: Wording, width: float
) -> list[Flowable]:
    rows = [
        _contribution_row(title, case, d.contributions, d.net_current, words)
        for title, case, d in places
        if d.contributions or d.net_current
    ]
    if not rows:
        return []
    text = (
        "Circuits that matter at the place of the largest value. A share is the "
        "circuit's part along the whole field; the shares add up to B, and a negative "
        "one weakens it. Beside it: what remains without the circuit."
    )
    heads = (
        "Place", "Load case", f"Circuit: share [{words.unit}] (without it)",
        f"1 A of net current alone would give [{words.unit}]",
    )  # fmt: skip
    return [paragraph(text), table(heads, rows, (20, 20, 34, 26), width)]


def _contribution_row(
    title: str,
    case: str,
    contributions: Sequence[Contribution],
    net: NetCurrentEffect | None,
    words: Wording,
) -> tuple[str, ...]:
    ordered = sorted(contributions, key=lambda c: -abs(c.share))
    lines = [
        f"{words.name(c.circuit)}: {_signed(c.share, words)} "
        f"({words.small(c.without, c.alone)})"
        for c in ordered[:MOST_CIRCUITS]
    ]
    if len(ordered) > MOST_CIRCUITS:
        lines.append(f"and {len(ordered) - MOST_CIRCUITS} more")
    effect = "–"
    if net is not None:
        effect = (
            f"{words.value(net.per_ampere)} in {words.name(net.circuit)}, along "
            f"{' '.join(net.labels)}"
        )
    return (title, case, "\n".join(lines) or "–", effect)


def _signed(tesla: float, words: Wording) -> str:
    return words.value(tesla).replace("-", "−")
