"""`compare`: the base and its variants as a printed table and as plain values."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from engine import __version__, units
from engine.commands.assessed import CAUTION
from engine.faults import Remark
from engine.variant_comparison import Cell, Row, VariantComparison


def as_text(table: VariantComparison, remarks: Sequence[Remark], unit: str) -> str:
    """The comparison as printed: by place, one line for each column."""
    names = _names(table)
    layout = table.columns[0].assessment.layout
    heading = layout.title.project or layout.title.name or "Layout"
    columns = ", ".join(column.title for column in table.columns)
    lines = [
        heading,
        f"Compared: {columns}. Values of the worst counted load case, in {unit}.",
    ]
    width = max(len(column.title) for column in table.columns)
    for row in table.rows:
        lines += ["", _heading(row, names)]
        for column, cell in zip(table.columns, row.cells, strict=True):
            lines.append(f"  {column.title:<{width}}  {_cell_text(cell, names, unit)}")
    lines += ["", *_raised_text(table, names), *_case_text(table, names)]
    lines += [f"{r.code} {r.severity}: {r.sentence}" for r in remarks]
    return "\n".join([*lines, "", CAUTION]) + "\n"


def _names(table: VariantComparison) -> dict[str, str]:
    names: dict[str, str] = {}
    for column in reversed(table.columns):
        layout = column.assessment.layout
        names.update((item.id, item.title) for item in layout.items())
        names.update((case.id, case.title) for case in layout.cases)
    names.update((c.variant, c.title) for c in table.columns if c.variant is not None)
    return names


def _heading(row: Row, names: dict[str, str]) -> str:
    place = f"{'Zone' if row.is_zone else 'Receptor'} {row.title}"
    if row.level:
        return f"{place}, {names.get(row.level, row.level)}"
    return f"{place}, {row.kind} without a level"


def _cell_text(cell: Cell, names: dict[str, str], unit: str) -> str:
    if cell.value is None:
        return cell.reason or "no value"
    kind = "" if cell.kind is None else f" ({cell.kind})"
    text = f"{units.significant(units.in_unit(cell.value, unit))}{kind}"
    if cell.change is not None:
        text += f"  {cell.change}"
        if cell.relative is not None and cell.change != "same within 1 %":
            text += f" {100 * cell.relative:+.0f} %"
    if cell.ratio is not None:
        text += f"; ratio {units.text_beside(cell.ratio, 1.0)}: {cell.state}"
        if cell.ratio_change not in (None, cell.change):
            text += f" (ratio {cell.ratio_change})"
    elif cell.state is not None:
        text += f"; not evaluable: {cell.reason}"
    if cell.case:
        text += f"; {names.get(cell.case, cell.case)}"
    if cell.is_bound:
        text += "; upper bound"
    if cell.place_differs:
        text += "; another place than in the base"
    return text


def _raised_text(table: VariantComparison, names: dict[str, str]) -> list[str]:
    raised = table.raised()
    if not raised:
        return ["No variant raises any place by more than 1 %."]
    lines = []
    for variant in dict.fromkeys(variant for variant, _ in raised):
        listed = ", ".join(names.get(p, p) for v, p in raised if v == variant)
        lines.append(f"{names[variant]} raises: {listed}.")
    return lines


def _case_text(table: VariantComparison, names: dict[str, str]) -> list[str]:
    return [
        f"{column.title} has other load cases: "
        + ", ".join(names.get(case, case) for case in column.differing_cases)
        + "."
        for column in table.columns
        if column.differing_cases
    ]


def as_json(table: VariantComparison, remarks: Sequence[Remark]) -> dict[str, Any]:
    """The comparison as plain values; flux densities in tesla."""
    return {
        "program": f"lodestead {__version__}",
        "columns": [
            {
                "variant": column.variant,
                "name": column.title,
                "differing_cases": list(column.differing_cases),
            }
            for column in table.columns
        ],
        "rows": [
            {
                "place": row.place,
                "name": row.title,
                "is_zone": row.is_zone,
                "level": row.level or None,
                "kind": row.kind,
                "cells": [_cell_json(cell) for cell in row.cells],
            }
            for row in table.rows
        ],
        "raised": [{"variant": v, "place": p} for v, p in table.raised()],
        "remarks": [
            {"code": r.code, "sentence": r.sentence, "items": list(r.items)}
            for r in remarks
        ],
        "caution": " ".join(CAUTION.split()),
    }


def _cell_json(cell: Cell) -> dict[str, Any]:
    return {
        "value_T": cell.value,
        "kind": cell.kind,
        "case": cell.case or None,
        "ratio": cell.ratio,
        "state": cell.state,
        "reason": cell.reason,
        "is_bound": cell.is_bound,
        "change": cell.change,
        "relative_change": cell.relative,
        "ratio_change": cell.ratio_change,
        "place_differs": cell.place_differs,
    }
