"""The summary: the worst place of each category, states in words, and what blocks."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from reportlab.platypus import Flowable

from engine.comparability import PARTICULAR_RISK
from engine.decisions import counts, worst_comparisons
from engine.places import Receptor, Zone
from engine.report.matter import Matter
from engine.report.names import Wording
from engine.report.story import Story
from engine.report.text import NOTE, STRONG, bullets, paragraph, table
from engine.report.wording import (
    CAUTIONS,
    INDIVIDUAL,
    NO_LEVELS,
    STATE_RULES,
    STATE_SENTENCES,
    STATE_VALUE,
)
from engine.report.words import place
from engine.results import STATES, Assessment, Comparison
from engine.units import flux_density_text, text_beside

#: Blocking remarks that the summary names one by one.
_MOST_BLOCKING = 4


def summary(
    matter: Matter, words: Wording, width: float, told: Story
) -> list[Flowable]:
    """The worst place of each category, how many stand in each state, what blocks."""
    assessment = matter.assessment
    made: list[Flowable] = [*_blocking(matter, told)]
    worst = [c for c in worst_comparisons(assessment) if not at_risk(c)]
    compared = [c for c in worst if c.ratio is not None]
    if not assessment.layout.levels:
        made.append(paragraph(NO_LEVELS, STRONG))
    elif not worst:
        text = "No zone or receptor names a reference level, so nothing is compared."
        made.append(paragraph(text, STRONG))
    if compared:
        top = max(compared, key=_concern)
        made.append(paragraph(_sentence(top, words), STRONG))
    rows = _category_rows(assessment, words, told)
    if rows:
        heads = (
            "For whom", "Worst place, load case", f"B [{words.unit}]",
            f"L [{words.unit}]", "B/L", f"U [{words.unit}]", "State in words",
        )  # fmt: skip
        made.append(table(heads, rows, (14, 27, 9, 9, 8, 8, 25), width))
    if worst:
        made.append(paragraph(_states(worst, assessment)))
    made.append(paragraph(f"{CAUTIONS[0]} {CAUTIONS[1]}"))
    refer = (
        f"All cautions: {told.page('cautions')}. Assumptions: "
        f"{told.page('assumptions')}. Remarks not cleared: {told.page('remarks')}."
    )
    return [*made, paragraph(refer)]


def at_risk(comparison: Comparison) -> bool:
    """Whether a comparison is of persons at particular risk: it has no state."""
    return PARTICULAR_RISK in comparison.reason


def state_text(comparison: Comparison) -> str:
    """A state in words; for persons at particular risk what stands in its place."""
    if at_risk(comparison):
        return INDIVIDUAL
    if comparison.state == "not evaluable":
        return f"not evaluable: {comparison.reason}"
    return f"{comparison.state}: {STATE_SENTENCES[comparison.state]}"


def _blocking(matter: Matter, told: Story) -> list[Flowable]:
    found = [r for r in matter.remarks if r.severity == "blocking"]
    if not found:
        return []
    text = (
        f"Not evaluable: {len(found)} remarks block the assessment or a part of it, so "
        f"that values there are not those of a real room ({told.page('remarks')})."
    )
    sentences = [remark.sentence[:400] for remark in found[:_MOST_BLOCKING]]
    return [paragraph(text, STRONG), *bullets(sentences)]


@dataclass(frozen=True)
class _Place:
    item: Zone | Receptor
    comparisons: tuple[Comparison, ...]
    largest: float | None
    case: str


def _places(assessment: Assessment) -> list[_Place]:
    counted = {case.id for case in assessment.layout.cases if case.counted}
    worst: dict[str, list[Comparison]] = {}
    for comparison in worst_comparisons(assessment):
        worst.setdefault(comparison.place, []).append(comparison)
    found = []
    for zone in assessment.zones:
        tops = [(m.value, m.case) for m in zone.maxima if m.case in counted]
        value, case = max(tops, default=(None, ""))
        own = tuple(worst.get(zone.zone.id, ()))
        found.append(_Place(zone.zone, own, value, case))
    for point in assessment.receptors:
        values = [
            (f.ac if f.ac is not None else f.dc, f.case)
            for f in point.fields
            if f.counted
        ]
        known = [(v, c) for v, c in values if v is not None]
        value, case = max(known, default=(None, ""))
        own = tuple(worst.get(point.receptor.id, ()))
        found.append(_Place(point.receptor, own, value, case))
    return found


def _category_rows(
    assessment: Assessment, words: Wording, told: Story
) -> list[tuple[str, ...]]:
    by_category: dict[str, list[_Place]] = {}
    for each in _places(assessment):
        by_category.setdefault(each.item.category, []).append(each)
    rows = []
    for category, places in by_category.items():
        compared = [c for each in places for c in each.comparisons]
        title = category or "category not chosen"
        if category == "persons at particular risk":
            rows.append(_without_state(title, places, words, INDIVIDUAL))
        elif compared:
            rows.append(_with_state(title, max(compared, key=_concern), words))
        else:
            reason = "no reference level is named, so there is no state"
            rows.append(_without_state(title, places, words, reason))
    return rows


def _without_state(
    title: str, places: Sequence[_Place], words: Wording, text: str
) -> tuple[str, ...]:
    top = max(places, key=lambda each: each.largest or 0.0)
    where = f"{top.item.title}\n{words.name(top.case)}" if top.case else top.item.title
    return (title, where, words.value(top.largest), "–", "–", "–", text)


def _with_state(title: str, top: Comparison, words: Wording) -> tuple[str, ...]:
    where = [words.name(top.place), words.name(top.case)]
    if top.details is not None:
        at = place(top.details.at, words.length_unit)
        where.append(f"at {at} {words.length_unit}")
    several = "per frequency" if top.ratio is not None else "–"
    return (
        title,
        "\n".join(where),
        words.beside(top.value, top.level_value),
        words.limit(top.level_value) if top.level_value is not None else several,
        "–" if top.ratio is None else text_beside(top.ratio, 1.0),
        words.value(top.uncertainty),
        state_text(top),
    )


def _concern(comparison: Comparison) -> tuple[int, float]:
    ratio = -1.0 if comparison.ratio is None else comparison.ratio
    return STATES.index(comparison.state), ratio


def _sentence(comparison: Comparison, words: Wording) -> str:
    value = words.beside(comparison.value, comparison.level_value)
    ratio = text_beside(comparison.ratio or 0.0, 1.0)
    limit = (
        f" of {words.limit(comparison.level_value)} {words.unit}"
        if comparison.level_value is not None
        else ""
    )
    return (
        f"Of most concern: {words.name(comparison.place)}, "
        f"{value} {words.unit} in the load case “{words.name(comparison.case)}”, "
        f"{ratio} times “{words.name(comparison.level)}”{limit}; "
        f"{STATE_SENTENCES[comparison.state]} ({comparison.state})."
    )


def _states(worst: Sequence[Comparison], assessment: Assessment) -> str:
    rule = assessment.layout.settings.decision_rule
    found = counts(worst, rule)
    listed = " · ".join(f"{found.by_state[s]} {s}" for s in STATES)
    text = f"Comparisons, each in its worst counted load case: {listed}. "
    if found.below is None:
        return text + (
            "No decision rule was chosen: the states stand side by side. Local rules "
            "and licensed practice decide."
        )
    return text + (
        f"By the rule “{rule.kind}”, chosen by {rule.chosen_by or 'nobody named'}: "
        f"{found.below} below, {found.not_below} not below; not evaluable ones count "
        "as neither. Local rules and licensed practice decide."
    )


def largest_sentences(assessment: Assessment, words: Wording) -> list[str]:
    """The largest value of each zone, without any level."""
    return [
        f"{zone.zone.title}: largest {m.kind} value "
        f"{flux_density_text(m.value, words.unit)} in “{words.name(m.case)}”."
        for zone in assessment.zones
        for m in zone.maxima
    ]


def state_table(width: float) -> list[Flowable]:
    """The five states, their rules, and to which value these are applied."""
    rows = [(s, rule, STATE_SENTENCES[s]) for s, rule in STATE_RULES]
    heads = ("State", "Holds when", "In words")
    return [table(heads, rows, (20, 35, 45), width), paragraph(STATE_VALUE, NOTE)]
