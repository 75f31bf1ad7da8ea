"""The summary: the largest ratio, how many comparisons stand in each state."""

from __future__ import annotations

from reportlab.platypus import Flowable

from engine.decisions import counts, worst_comparisons
from engine.report.names import Wording
from engine.report.text import STRONG, bullets, paragraph, table
from engine.report.wording import CAUTIONS, NO_LEVELS, STATE_RULES, STATE_SENTENCES
from engine.results import STATES, Assessment, Comparison
from engine.units import flux_density_text, text_beside


def summary(assessment: Assessment, words: Wording, width: float) -> list[Flowable]:
    """The worst comparison, how many stand in each state, and what blocks."""
    worst = worst_comparisons(assessment)
    story: list[Flowable] = []
    if not assessment.layout.levels:
        story.append(paragraph(NO_LEVELS, STRONG))
    elif not worst:
        text = "No zone or receptor names a reference level, so nothing is compared."
        story.append(paragraph(text, STRONG))
    compared = [c for c in worst if c.ratio is not None]
    if compared:
        top = max(compared, key=lambda c: c.ratio or 0.0)
        story.append(paragraph(_sentence(top, words), STRONG))
    if worst:
        rule = assessment.layout.settings.decision_rule
        found = counts(worst, rule)
        rows = [
            (state, STATE_SENTENCES[state], str(found.by_state[state]))
            for state in STATES
        ]
        heads = ("State", "In words", "Comparisons")
        story.append(table(heads, rows, (22, 60, 18), width))
        story.append(
            paragraph(_rule_sentence(found.below, found.not_below, assessment))
        )
    largest = [m for zone in assessment.zones for m in zone.maxima]
    if largest and not compared:
        story += bullets(_maxima_sentences(assessment, words))
    story.append(paragraph(f"{CAUTIONS[0]} {CAUTIONS[1]}"))
    return story


def _sentence(comparison: Comparison, words: Wording) -> str:
    value = words.beside(comparison.value, comparison.level_value)
    ratio = text_beside(comparison.ratio or 0.0, 1.0)
    limit = (
        f" of {words.value(comparison.level_value)} {words.unit}"
        if comparison.level_value is not None
        else ""
    )
    return (
        f"Largest ratio to a reference level: {words.name(comparison.place)}, "
        f"{value} {words.unit} in the load case “{words.name(comparison.case)}”, "
        f"{ratio} times “{words.name(comparison.level)}”{limit}; "
        f"{STATE_SENTENCES[comparison.state]} ({comparison.state})."
    )


def _rule_sentence(
    below: int | None, not_below: int | None, assessment: Assessment
) -> str:
    rule = assessment.layout.settings.decision_rule
    if below is None:
        return (
            "No decision rule was chosen: the states stand side by side. Local rules "
            "and licensed practice decide."
        )
    return (
        f"By the rule “{rule.kind}”, chosen by {rule.chosen_by or 'nobody named'}: "
        f"{below} below, {not_below} not below; not evaluable ones count as neither. "
        "Local rules and licensed practice decide."
    )


def _maxima_sentences(assessment: Assessment, words: Wording) -> list[str]:
    return [
        f"{zone.zone.title}: largest {m.kind} value "
        f"{flux_density_text(m.value, words.unit)} in “{words.name(m.case)}”."
        for zone in assessment.zones
        for m in zone.maxima
    ]


def state_table(width: float) -> Flowable:
    """The five states and their rules."""
    return table(("State", "Holds when"), STATE_RULES, (30, 70), width)
