"""The table of base and variants in words: cells, what is raised, cells as text."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator

from app.variant_values import TableAnswer
from engine.layout import Layout
from engine.levels import level_at
from engine.units import flux_density_text, in_unit, significant
from engine.variant_comparison import Cell, Row

#: A table that is held, by place, level, kind of field and variant.
Held = dict[tuple[str, str, str | None, str | None], Cell]


def against_text(row: Row, layout: Layout) -> str:
    """The level that a row is compared with, or the field that it states."""
    level = next((x for x in layout.levels if x.id == row.level), None)
    if level is None:
        direct = row.kind == "DC"
        return "field at 0 Hz" if direct else "RMS resultant, no reference level"
    unit = layout.settings.flux_density_unit
    value = level_at(level, layout.settings.frequency)
    if value is None:
        return level.title
    return f"{float(significant(in_unit(value, unit), 6)):g} {unit} · {level.title}"


def value_text(cell: Cell, layout: Layout) -> str:
    """ "1.60 mG", "at most 1.60 mG", or a dash."""
    if cell.value is None:
        return "–"
    text = flux_density_text(cell.value, layout.settings.flux_density_unit)
    if cell.kind == "DC":
        text = f"DC {text}"
    return f"at most {text}" if cell.is_bound else text


def change_text(cell: Cell) -> str:
    """ "higher, +14 %", "ratio higher"; empty in the base."""
    if cell.change is None:
        return ""
    if cell.change != "higher" and cell.ratio_change == "higher":
        return "ratio higher"
    if cell.change in ("higher", "lower") and cell.relative is not None:
        return f"{cell.change}, {percent(cell.relative)}"
    if cell.change == "not comparable" and cell.value is not None:
        return "not comparable with the base"
    return "" if cell.change == "not comparable" else cell.change


def percent(part: float) -> str:
    """A change as "+14 %" or "−2.5 %": two figures, and at least whole percents."""
    value = 100.0 * part
    figures = f"{abs(value):.0f}" if abs(value) >= 9.95 else significant(abs(value), 2)
    return f"{'−' if value < 0 else '+'}{figures} %"


def state_text(cell: Cell, layout: Layout, *, with_case: bool) -> str:
    """The state against the level, and the worst of several counted cases."""
    parts = [str(cell.state)] if cell.state else []
    if with_case and cell.case:
        parts.append(case_name(layout, cell.case))
    return " · ".join(parts)


def case_name(layout: Layout, case: str) -> str:
    """The name of a load case."""
    return next((c.title for c in layout.cases if c.id == case), case)


def has_cases(layout: Layout) -> bool:
    """Whether the worst of several load cases has to be named."""
    return sum(case.counted for case in layout.cases) > 1


def was_text(cell: Cell, held: Cell | None, layout: Layout) -> str:
    """ "was 61.2", in the unit of the value, where another one is held as before."""
    if held is None or held.value is None:
        return ""
    if value_text(held, layout) == value_text(cell, layout):
        return ""
    unit = layout.settings.flux_density_unit
    return f"was {significant(in_unit(held.value, unit))}"


def held_of(answer: TableAnswer | None) -> Held:
    """All cells of the table that is held, to stand beside those of now."""
    table = None if answer is None else answer.before
    if table is None:
        return {}
    return {
        (row.place, row.level, row.kind, column.variant): cell
        for row in table.rows
        for column, cell in zip(table.columns, row.cells, strict=True)
    }


def cell_sentence(answer: TableAnswer, row: Row, index: int) -> str:
    """A cell in whole words, for tooltips and screen readers."""
    column, cell = answer.table.columns[index], row.cells[index]
    layout = column.assessment.layout
    parts = [f"{row.title} in {column.title}: {value_text(cell, layout)}"]
    if cell.change is not None:
        part = "" if cell.relative is None else f", {percent(cell.relative)}"
        parts.append(f"{cell.change}{part} against the base")
    if cell.state is not None:
        parts.append(f"{cell.state} ({against_text(row, layout)})")
    if cell.case:
        parts.append(f"worst counted load case {case_name(layout, cell.case)}")
    if cell.ratio_change and cell.ratio_change != cell.change:
        parts.append(
            f"its ratio to the level is {cell.ratio_change}, as frequencies count "
            "differently there"
        )
    if cell.place_differs:
        parts.append("the place itself is another one than in the base")
    text = "; ".join(parts) + "."
    return f"{text} {cell.reason}".strip()


def raised_texts(answer: TableAnswer) -> Iterator[str]:
    """One sentence for each variant that raises a place over the base's value."""
    table = answer.table
    for k, column in enumerate(table.columns[1:], start=1):
        higher = [row for row in table.rows if is_raised(row.cells[k])]
        if not higher:
            continue
        lower = {r.place for r in table.rows if r.cells[k].change == "lower"}
        lower -= {row.place for row in higher}
        named = [_raised_name(row, row.cells[k]) for row in higher]
        listed = named[-1]
        if len(named) > 1:
            listed = f"{', '.join(named[:-1])} and {listed}"
        text = f"“{column.title}” raises {listed}"
        n = len(lower)
        if n:
            text += f"; it lowers {n} other place{'' if n == 1 else 's'}"
        yield f"{text}."


def is_raised(cell: Cell) -> bool:
    """Whether value or ratio is higher than in the base."""
    return "higher" in (cell.change, cell.ratio_change)


def _raised_name(row: Row, cell: Cell) -> str:
    kind = "zone" if row.is_zone else "receptor"
    if cell.change == "higher" and cell.relative is not None:
        return f"{row.title} ({kind}) by {percent(cell.relative).lstrip('+')}"
    return f"the ratio at {row.title} ({kind})"


def differing_texts(answer: TableAnswer) -> Iterator[str]:
    """What makes columns differ besides their geometry: other load cases."""
    for column in answer.table.columns:
        if column.differing_cases:
            layout = column.assessment.layout
            names = ", ".join(case_name(layout, c) for c in column.differing_cases)
            yield (
                f"“{column.title}” has other load cases than the base ({names}): "
                "values differ for that reason too."
            )


def table_csv(answer: TableAnswer) -> str:
    """The table as CSV."""
    file = io.StringIO()
    csv.writer(file, lineterminator="\n").writerows(table_cells(answer))
    return file.getvalue()


def table_tabs(answer: TableAnswer) -> str:
    """The table as cells for a spreadsheet."""
    return "\n".join("\t".join(row) for row in table_cells(answer)) + "\n"


def table_cells(answer: TableAnswer) -> list[list[str]]:
    """Heads and rows: five columns for the base and for each variant."""
    base = answer.table.columns[0].assessment.layout
    unit = base.settings.flux_density_unit
    heads = ["place", "kind", "against"]
    for column in answer.table.columns:
        heads += [
            f"{column.title} [{unit}]", f"{column.title}: change",
            f"{column.title}: change [%]", f"{column.title}: state",
            f"{column.title}: load case",
        ]  # fmt: skip
    found = [heads]
    for row in answer.table.rows:
        cells = [row.title, "zone" if row.is_zone else "receptor"]
        cells.append(against_text(row, base))
        for column, cell in zip(answer.table.columns, row.cells, strict=True):
            layout = column.assessment.layout
            value, relative = cell.value, cell.relative
            cells += [
                "" if value is None else f"{in_unit(value, unit):.6g}",
                cell.change or "",
                "" if relative is None else f"{100 * relative:.4g}",
                cell.state or "",
                case_name(layout, cell.case) if cell.case else "",
            ]
        found.append(cells)
    return found
