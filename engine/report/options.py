"""Options considered: the base and its variants side by side, place by place."""

from __future__ import annotations

from reportlab.platypus import Flowable

from engine.report.matter import Matter
from engine.report.names import Wording
from engine.report.text import bullets, paragraph, table
from engine.units import text_beside
from engine.variant_comparison import Cell, VariantComparison

#: Columns of variants side by side.
_ACROSS = 4

EXPLAINED = (
    "Every option is assessed as the base is: same levels, same rule, same unit. "
    "Values are of the worst counted load case. Why an option was chosen or not is for "
    "the author to say."
)


def options(matter: Matter, words: Wording, width: float) -> list[Flowable]:
    """The table of base and variants, and which places a variant raises."""
    found = matter.comparison
    if found is None or len(found.columns) < 2:
        return []
    names = _names(found, words)
    made: list[Flowable] = [paragraph(EXPLAINED)]
    notes = {v.id: v.note for v in matter.source.variants}
    made += bullets(
        [
            f"{c.title}: {notes.get(c.variant) or 'nothing is said about it'}"
            for c in found.columns
            if c.variant is not None
        ]
    )
    for first in range(1, len(found.columns), _ACROSS):
        chosen = [0, *range(first, min(first + _ACROSS, len(found.columns)))]
        rows = [
            (
                f"{_place(row.title, is_zone=row.is_zone)}\n"
                + (names.get(row.level, row.level) or f"{row.kind}, no level"),
                *(_cell(row.cells[k], words) for k in chosen),
            )
            for row in found.rows
        ]
        heads = ("Place, level", *(found.columns[k].title for k in chosen))
        shares = (20, *([80 / len(chosen)] * len(chosen)))
        made.append(table(heads, rows, shares, width))
    zones = {row.place: row.is_zone for row in found.rows}
    raised = [
        f"{names.get(variant, variant)} raises "
        + _place(names.get(place, place), is_zone=zones.get(place, True))
        for variant, place in found.raised()
        if variant is not None
    ]
    made += bullets(raised or ["No option raises any place by more than 1 %."])
    return made


def _place(title: str, *, is_zone: bool) -> str:
    """A zone and a receptor may have one name."""
    return title if is_zone else f"{title} (receptor)"


def _names(found: VariantComparison, words: Wording) -> dict[str, str]:
    names = dict(words.names)
    for column in found.columns:
        layout = column.assessment.layout
        names.update((item.id, item.title) for item in layout.items())
        if column.variant is not None:
            names[column.variant] = column.title
    return names


def _cell(cell: Cell, words: Wording) -> str:
    if cell.value is None:
        return cell.reason or "no value"
    lines = [f"{words.value(cell.value)} {words.unit}" + _kind(cell)]
    if cell.change is not None:
        text: str = cell.change
        if cell.relative is not None and cell.change != "same within 1 %":
            text += f", {100 * cell.relative:+.0f} %".replace("-", "−")
        lines.append(text)
    if cell.ratio is not None:
        lines.append(f"B/L {text_beside(cell.ratio, 1.0)}: {cell.state}")
    elif cell.state is not None:
        lines.append(f"not evaluable: {cell.reason}")
    if cell.is_bound:
        lines.append("upper bound")
    if cell.place_differs:
        lines.append("another place than in the base")
    return "\n".join(lines)


def _kind(cell: Cell) -> str:
    return "" if cell.kind is None else f" ({cell.kind})"
