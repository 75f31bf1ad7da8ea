"""Comparison of the field engine with numbers from outside the project.

The checks are data, so that a test asserts them and the validation annex of a report
prints them. Those that need an independent numerical reference stand with the tests.
"""

from __future__ import annotations

from collections.abc import Sequence

from engine.units import significant
from engine.validation.bars import bar_checks
from engine.validation.check import Check, Outcome, outcome
from engine.validation.lines import line_checks
from engine.validation.near_field import (
    NEAR_FIELD,
    near_field_checks,
    near_field_rows,
)
from engine.validation.textbooks import textbook_checks

__all__ = [
    "NEAR_FIELD", "Check", "Outcome", "checks", "in_columns", "near_field_rows",
    "outcome", "outcomes", "table",
]  # fmt: skip


def checks() -> tuple[Check, ...]:
    """Every check, in the order of its id's letter."""
    return (*textbook_checks(), *line_checks(), *bar_checks(), *near_field_checks())


def outcomes() -> tuple[Outcome, ...]:
    """Every check with the value that this engine computes now."""
    return tuple(outcome(check) for check in checks())


def table(found: Sequence[Outcome] | None = None) -> str:
    """Outcomes as lines of text: id, published, computed, deviation, source.

    Parameters
    ----------
    found : sequence of Outcome, optional
        All, computed now, where left out.
    """
    rows = [("check", "published", "computed", "deviation", "agrees", "case", "source")]
    for result in outcomes() if found is None else found:
        check = result.check
        relative = result.relative_deviation
        deviation = (
            _text(result.deviation, check.unit)
            if relative is None
            else f"{relative:+.2%}"
        )
        rows.append(
            (
                check.id,
                _text(check.published, check.unit),
                _text(result.value, check.unit),
                deviation,
                "yes" if result.agrees else "NO",
                check.case,
                check.source + (" (from memory)" if check.from_memory else ""),
            )
        )
    return in_columns(rows)


def in_columns(rows: Sequence[Sequence[str]]) -> str:
    """Rows of cells as lines of text with aligned columns."""
    widths = [max(len(row[i]) for row in rows) for i in range(len(rows[0]))]
    return "\n".join(
        "  ".join(cell.ljust(w) for cell, w in zip(row, widths, strict=True)).rstrip()
        for row in rows
    )


def _text(value: float, unit: str) -> str:
    """Five figures and the unit; no unit for a ratio."""
    text = significant(value, 5)
    if abs(value) < 1e-3 and value != 0:
        text = f"{value:.4e}"
    return text if unit == "1" else f"{text} {unit}"
