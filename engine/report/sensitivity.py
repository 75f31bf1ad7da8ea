"""How far all loads may grow together before a value meets its level."""

from __future__ import annotations

from reportlab.platypus import Flowable

from engine.decisions import worst_comparisons
from engine.places import Receptor, Zone
from engine.report.names import Wording
from engine.report.text import paragraph, subheading, table
from engine.results import Assessment, Comparison
from engine.units import significant, text_beside

EXPLAINED = (
    "The field follows the currents: if every current grows by one factor, so do B and "
    "B/L. The table says by which factor all currents of the load case may be "
    "multiplied until B = L, and until B + U = L. Growth of single circuits, or other "
    "angles, need a load case of their own."
)


def load_growth(assessment: Assessment, words: Wording, width: float) -> list[Flowable]:
    """A row for each comparison that was made, in its worst counted load case."""
    made = [c for c in worst_comparisons(assessment) if c.ratio]
    if not made:
        return []
    relative = _relative_parts(assessment)
    rows = [_row(c, relative[c.place], words) for c in made]
    heads = (
        "Place, reference level", "Load case", "B/L now", "Factor until B = L",
        "Factor until B + U = L",
    )  # fmt: skip
    return [
        *subheading("If all loads grow together", "growth"),
        paragraph(EXPLAINED),
        table(heads, rows, (34, 24, 12, 14, 16), width),
    ]


def _relative_parts(assessment: Assessment) -> dict[str, float | None]:
    """By id of the place: the part of U that grows with the value; None: all of it."""
    layout = assessment.layout
    usual = layout.settings.uncertainty
    parts: dict[str, float | None] = {}
    places: tuple[Zone | Receptor, ...] = (*layout.zones, *layout.receptors)
    for place in places:
        rule = place.uncertainty or usual
        entered = rule.kind == "entered" and rule.absolute > 0
        parts[place.id] = rule.relative if entered else None
    return parts


def _row(c: Comparison, relative: float | None, words: Wording) -> tuple[str, ...]:
    assert c.ratio is not None
    return (
        f"{words.name(c.place)}\n{words.name(c.level)}",
        words.name(c.case),
        text_beside(c.ratio, 1.0),
        significant(1.0 / c.ratio),
        _with_uncertainty(c, relative),
    )


def _with_uncertainty(c: Comparison, relative: float | None) -> str:
    """Factor at which ratio and uncertainty together reach 1.

    Of the uncertainty's two parts only the relative one grows with the currents.
    """
    if c.uncertainty_ratio is None or c.ratio is None:
        return "–"
    if relative is None:
        relative = c.uncertainty_ratio / c.ratio
    fixed = c.uncertainty_ratio - relative * c.ratio
    if fixed >= 1.0:
        return "none: U alone reaches L"
    return significant((1.0 - fixed) / (c.ratio * (1.0 + relative)))
