"""Uncertainty, the decision rule, and where a level lies within the uncertainty."""

from __future__ import annotations

from reportlab.platypus import Flowable

from engine.places import Receptor, Uncertainty, Zone
from engine.report.names import Wording
from engine.report.summary import at_risk, state_table
from engine.report.text import fact_table, paragraph, subheading, table
from engine.results import Assessment, Comparison
from engine.units import flux_density_text, text_beside

FORMULA = (
    "U = u_rel · B + u_abs is the expanded uncertainty at coverage factor k, as "
    "entered; “from the budget”: k times the standard uncertainty of the place's own "
    "budget stands for u_rel · B. B is compared with the reference level L by the "
    "states below; the rule and who chose it decide only how a summary counts them."
)

_RULES = {
    "none chosen": "no rule was chosen; the summary only counts states",
    "additive": "the uncertainty is added: only “below” counts as below",
    "value only": "the value alone: B ≤ L counts as below, whatever U",
}


def uncertainty(assessment: Assessment, words: Wording, width: float) -> list[Flowable]:
    """What was entered of uncertainty, the rule, and the comparisons it reaches."""
    layout = assessment.layout
    rule = layout.settings.decision_rule
    made: list[Flowable] = [paragraph(FORMULA)]
    places: list[Zone | Receptor] = [*layout.zones, *layout.receptors]
    owned = [(p.title, p.uncertainty) for p in places if p.uncertainty is not None]
    rows = [_row("every other place", layout.settings.uncertainty, words)]
    rows += [_row(title, own, words) for title, own in owned]
    heads = ("Place", "Relative", f"Absolute [{words.unit}]", "k", "Basis")
    made.append(table(heads, rows, (26, 12, 16, 8, 38), width))
    facts = [
        ("Decision rule", f"{rule.kind}: {_RULES[rule.kind]}"),
        ("Chosen by", rule.chosen_by or "nobody named"),
    ]
    made += [fact_table(facts, width), *state_table(width)]
    made += subheading("Levels that lie within the uncertainty")
    near = [c for c in assessment.comparisons if "U reaches" in c.state]
    near = [c for c in near if not at_risk(c)]
    if not near:
        return [*made, paragraph("In no comparison does U reach the level.")]
    near_rows = [_near_row(c, words) for c in near]
    near_heads = (
        "Place, level, load case", f"B [{words.unit}]", f"U [{words.unit}]", "B/L",
        "U/L", "State",
    )  # fmt: skip
    return [*made, table(near_heads, near_rows, (38, 12, 12, 10, 10, 18), width)]


def _row(title: str, entered: Uncertainty, words: Wording) -> tuple[str, ...]:
    absolute = flux_density_text(entered.absolute, words.unit).rpartition(" ")[0]
    return (
        title,
        "from the budget"
        if entered.kind == "from the budget"
        else f"{100 * entered.relative:g} %",
        absolute,
        f"{entered.coverage:g}",
        entered.basis or "not stated",
    )


def _near_row(c: Comparison, words: Wording) -> tuple[str, ...]:
    return (
        f"{words.name(c.place)}\n{words.name(c.level)}\n{words.name(c.case)}",
        words.beside(c.value, c.level_value),
        words.value(c.uncertainty),
        "–" if c.ratio is None else text_beside(c.ratio, 1.0),
        "–" if c.uncertainty_ratio is None else f"{c.uncertainty_ratio:.3g}",
        c.state,
    )
