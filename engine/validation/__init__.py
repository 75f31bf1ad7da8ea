"""Comparison of the field engine with numbers from outside the project.

The checks are data, so that a test asserts them and the validation annex of a report
prints them. Those that need an independent numerical reference stand with the tests.
"""

from __future__ import annotations

from engine.units import significant
from engine.validation.bars import bar_checks
from engine.validation.check import Check, Outcome, outcome
from engine.validation.lines import line_checks
from engine.validation.textbooks import textbook_checks

__all__ = ["Check", "Outcome", "checks", "outcome", "outcomes", "table"]


def checks() -> tuple[Check, ...]:
    """Every check, in the order of its id's letter."""
    return (*textbook_checks(), *line_checks(), *bar_checks())


def outcomes() -> tuple[Outcome, ...]:
    """Every check with the value that this engine computes now."""
    return tuple(outcome(check) for check in checks())


def table() -> str:
    """All outcomes as lines of text: id, published, computed, deviation, source."""
    rows = [("check", "published", "computed", "deviation", "agrees", "case", "source")]
    for result in outcomes():
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
