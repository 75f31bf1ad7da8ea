"""`assess`: an assessment as stable printed text and as plain values for JSON."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import msgspec

from engine import __version__, units
from engine.certificate import Certificate
from engine.decisions import counts, worst_comparisons
from engine.faults import Remark
from engine.proof_words import proof_of_comparison, proof_of_maximum
from engine.results import (
    STATES,
    Assessment,
    Comparison,
    Maximum,
    PlaceDetails,
    ReceptorField,
)

CAUTION = (
    "Calculated from entered data, not measured. Reference levels were entered by the "
    "user;\nlocal regulation and licensed, competent practice decide. Persons with "
    "implants or body-worn\ndevices and pregnant workers need an individual assessment."
)


def as_text(assessment: Assessment, remarks: Sequence[Remark], unit: str) -> str:
    """The assessment as printed."""
    lines = [_heading(assessment)]
    names = _names(assessment)
    for zone in assessment.zones:
        lines += ["", f"Zone {zone.zone.title} ({zone.zone.rule})"]
        if zone.reason:
            lines.append(f"  {zone.reason}")
        lines += [_maximum_text(m, names, unit) for m in zone.maxima]
        for comparison in zone.comparisons:
            lines += _comparison_text(comparison, names, unit)
    for receptor in assessment.receptors:
        place = ", ".join(f"{c:g}" for c in receptor.receptor.at)
        lines += ["", f"Receptor {receptor.receptor.title} at ({place}) m"]
        for field in receptor.fields:
            lines.append(f"  {names[field.case]}: {_field_text(field, unit)}")
            if field.measured_ratio is not None:
                lines.append(f"    measured / calculated = {field.measured_ratio:.2f}")
        for comparison in receptor.comparisons:
            lines += _comparison_text(comparison, names, unit)
    lines += ["", _summary(assessment), "", "Remarks"]
    lines += [f"  {_remark_text(r)}" for r in remarks] or ["  none"]
    return "\n".join([*lines, "", CAUTION]) + "\n"


def _heading(assessment: Assessment) -> str:
    title = assessment.layout.title
    words = [title.project or title.name or "Layout"]
    if title.revision:
        words.append(f"revision {title.revision}")
    return ", ".join(words)


def _names(assessment: Assessment) -> dict[str, str]:
    names = {item.id: item.title for item in assessment.layout.items()}
    names.update((c.case.id, c.case.title) for c in assessment.cases)
    return names


def _field_text(field: ReceptorField, unit: str) -> str:
    if field.reason:
        return field.reason
    parts = []
    if field.ac is not None:
        parts.append(f"{units.flux_density_text(field.ac, unit)} (AC, RMS)")
    if field.dc is not None:
        parts.append(f"{units.flux_density_text(field.dc, unit)} (0 Hz)")
    text = ", ".join(parts) or "no current"
    if field.near_field:
        text += "; near field, even current assumed"
    if field.is_bound:
        text += f"; upper bound: {field.bound_reason}"
    return text


def _maximum_text(maximum: Maximum, names: dict[str, str], unit: str) -> str:
    value = units.flux_density_text(maximum.value, unit)
    text = (
        f"  {names[maximum.case]}: largest {maximum.kind} value {value}"
        f" {_place_text(maximum.details)}"
    )
    proof = proof_of_maximum(maximum, unit)
    if proof:
        text += f"; {proof}"
    if maximum.reason:
        text += "; not that of a real room, see the blocking remarks"
    return text


def _place_text(details: PlaceDetails) -> str:
    x, y, z = details.at
    text = f"at ({x:.2f}, {y:.2f}, {z:.2f}) m"
    if details.height is not None:
        text += f", {details.height:.2f} m above the floor"
    if details.near_field:
        text += "; near field, even current assumed"
    if details.is_bound:
        text += f"; upper bound: {details.bound_reason}"
    return text


def _comparison_text(c: Comparison, names: dict[str, str], unit: str) -> list[str]:
    counted = "" if c.counted else ", for information"
    head = f"  {names.get(c.level, c.level)}, {names[c.case]}{counted}: "
    if c.state == "not evaluable":
        return [head + f"not evaluable: {c.reason}"]
    assert c.value is not None
    assert c.uncertainty is not None
    assert c.ratio is not None
    value = units.in_unit(c.value, unit)
    shown = units.significant(value)
    if c.level_value is not None:
        shown = units.text_beside(value, units.in_unit(c.level_value, unit))
    uncertainty = units.flux_density_text(c.uncertainty, unit)
    ratio = units.text_beside(c.ratio, 1.0)
    lines = [
        f"{head}{shown} {unit} ± {uncertainty} ({c.kind}), ratio {ratio}: {c.state}"
    ]
    proof = proof_of_comparison(c, unit)
    if proof:
        lines.append(f"    {proof}")
    if c.other_kind_ratio is not None:
        other = "DC" if c.kind == "AC" else "AC"
        ratio = units.text_beside(c.other_kind_ratio, 1.0)
        lines.append(f"    {other} on its own: ratio {ratio}")
    if c.not_covered:
        listed = ", ".join(f"{f:g} Hz" for f in c.not_covered)
        lines.append(f"    not dealt with by the level: {listed}")
    if c.area_above:
        lines.append(f"    area above the level {units.significant(c.area_above)} m²")
    if c.masked_share:
        share = units.significant(100 * c.masked_share, 2)
        lines.append(f"    {share} % of the zone is masked")
    if c.details is not None:
        lines += [f"    {_place_text(c.details)}", *_causes(c.details, names, unit)]
    return lines


def _causes(details: PlaceDetails, names: dict[str, str], unit: str) -> list[str]:
    lines = []
    shares = sorted(details.contributions, key=lambda c: -abs(c.share))
    if shares:
        text = ", ".join(
            f"{names.get(c.circuit, c.circuit)} "
            + units.significant(units.in_unit(c.share, unit))
            for c in shares[:4]
        )
        lines.append(f"    circuits that matter (share in {unit}): {text}")
    net = details.net_current
    if net is not None:
        value = units.flux_density_text(net.per_ampere, unit)
        lines.append(
            f"    1 A of net current in {names.get(net.circuit, net.circuit)} alone "
            f"would give {value}"
        )
    return lines


def _summary(assessment: Assessment) -> str:
    worst = worst_comparisons(assessment)
    if not worst:
        return "Summary: no comparison; enter a reference level and its source."
    count = counts(worst, assessment.layout.settings.decision_rule)
    states = " · ".join(f"{count.by_state[state]} {state}" for state in STATES)
    rule = assessment.layout.settings.decision_rule
    text = f"Summary, worst counted load case of each comparison: {states}."
    if count.below is not None:
        by = f", chosen by {rule.chosen_by}" if rule.chosen_by else ""
        text += (
            f"\nCounted by the rule '{rule.kind}'{by}: {count.below} below, "
            f"{count.not_below} not below, {count.not_evaluable} not evaluable."
        )
    else:
        text += "\nNo decision rule was chosen; only the states are given."
    return text


def _remark_text(remark: Remark) -> str:
    return f"{remark.code} {remark.severity}: {remark.sentence}"


def as_json(assessment: Assessment, remarks: Sequence[Remark]) -> dict[str, Any]:
    """The assessment as plain values; flux densities in tesla."""
    return {
        "program": f"lodestead {__version__}",
        "title": msgspec.to_builtins(assessment.layout.title),
        "cases": [
            {
                "id": case.case.id,
                "name": case.case.title,
                "counted": case.case.counted,
                "frequencies_Hz": list(case.frequencies),
                "reason": case.reason,
            }
            for case in assessment.cases
        ],
        "zones": [
            {
                "id": result.zone.id,
                "name": result.zone.title,
                "rule": result.zone.rule,
                "area_m2": result.area,
                "masked_share": dict(result.masked_shares),
                "searched": result.searched,
                "reason": result.reason,
                "maxima": [
                    {
                        "case": m.case,
                        "kind": m.kind,
                        "value_T": m.value,
                        "reason": m.reason,
                        **_details_json(m.details),
                    }
                    for m in result.maxima
                ],
                "comparisons": [_comparison_json(c) for c in result.comparisons],
            }
            for result in assessment.zones
        ],
        "receptors": [
            {
                "id": result.receptor.id,
                "name": result.receptor.title,
                "at_m": list(result.receptor.at),
                "fields": [
                    {
                        "case": field.case,
                        "reason": field.reason,
                        "ac_T": field.ac,
                        "dc_T": field.dc,
                        "measured_over_calculated": field.measured_ratio,
                        "near_field": field.near_field,
                        "upper_bound": field.bound_reason if field.is_bound else "",
                        "by_frequency": {
                            f"{part.frequency:.12g}": part.value
                            for part in field.by_frequency
                        },
                    }
                    for field in result.fields
                ],
                "comparisons": [_comparison_json(c) for c in result.comparisons],
            }
            for result in assessment.receptors
        ],
        "worst": [_comparison_json(c) for c in worst_comparisons(assessment)],
        "remarks": [
            {
                "code": r.code,
                "severity": r.severity,
                "sentence": r.sentence,
                "items": list(r.items),
                "place_m": None if r.place is None else list(r.place),
                "case": r.case,
            }
            for r in remarks
        ],
        "caution": " ".join(CAUTION.split()),
    }


def _comparison_json(c: Comparison) -> dict[str, Any]:
    return {
        "place": c.place,
        "level": c.level,
        "case": c.case,
        "counted": c.counted,
        "state": c.state,
        "reason": c.reason,
        "kind": c.kind,
        "value_T": c.value,
        "level_T": c.level_value,
        "ratio": c.ratio,
        "other_kind_ratio": c.other_kind_ratio,
        "not_covered_Hz": list(c.not_covered),
        "uncertainty_T": c.uncertainty,
        "uncertainty_ratio": c.uncertainty_ratio,
        "upper_T": c.upper,
        "upper_ratio": c.upper_ratio,
        "area_above_m2": c.area_above,
        "masked_share": c.masked_share,
        **({} if c.details is None else _details_json(c.details)),
    }


def _proof_json(proof: Certificate) -> dict[str, Any]:
    """What is proven; the bound of a comparison is a ratio, else in tesla."""
    return {
        "proof": {
            "upper": proof.upper,
            "found": proof.found,
            "tolerance": proof.tolerance,
            "reached": proof.reached,
            "boxes": proof.cells,
            "reason": proof.reason,
        }
    }


def _details_json(details: PlaceDetails) -> dict[str, Any]:
    net = details.net_current
    return {
        "at_m": list(details.at),
        "height_m": details.height,
        "near_field": details.near_field,
        "search_step_m": details.step,
        "upper_bound": details.bound_reason if details.is_bound else "",
        **({} if details.certificate is None else _proof_json(details.certificate)),
        "by_frequency": {f"{p.frequency:.12g}": p.value for p in details.by_frequency},
        "contributions": [
            {"circuit": c.circuit, "share_T": c.share, "without_T": c.without}
            for c in details.contributions
        ],
        "net_current": None
        if net is None
        else {
            "circuit": net.circuit,
            "labels": list(net.labels),
            "T_per_A": net.per_ampere,
        },
    }
