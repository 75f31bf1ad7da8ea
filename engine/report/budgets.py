"""Budgets of uncertainty: what each place's value depends on most."""

from __future__ import annotations

from collections.abc import Sequence

from reportlab.platypus import Flowable

from engine.budget import Budget, BudgetLine
from engine.report.names import Wording
from engine.report.text import paragraph, subheading, table

#: Lines of a budget that are printed.
_MOST_LINES = 6

EXPLAINED = (
    "The standard uncertainty of each input, carried to the value in its worst "
    "counted load case, each input on its own; the squares add. The largest and "
    "their shares of the variance are shown. Beside it, the value with the currents "
    "drawn at random: 5, 50 and 95 % of the values lie below the three numbers."
)


def budget_section(
    budgets: Sequence[Budget], words: Wording, width: float
) -> list[Flowable]:
    """A row for each budget; empty without any."""
    if not budgets:
        return []
    rows = [_row(budget, words) for budget in budgets]
    heads = (
        "Place, level, load case", f"Value [{words.unit}]", f"u, k = 1 [{words.unit}]",
        "u / value", "Inputs that matter: share of the variance",
        f"Drawn currents [{words.unit}]",
    )  # fmt: skip
    made = table(heads, rows, (24, 9, 10, 9, 34, 14), width)
    return [*subheading("Budgets", "budgets"), paragraph(EXPLAINED), made]


def _row(budget: Budget, words: Wording) -> tuple[str, ...]:
    names = [words.name(budget.place)]
    if budget.level:
        names.append(words.name(budget.level))
    names.append(f"{words.name(budget.case)}, {budget.kind}")
    relative = budget.relative
    drawn = budget.sampled
    lines = [_line(line, words) for line in budget.lines[:_MOST_LINES] if line.share]
    return (
        "\n".join(names),
        words.value(budget.value),
        words.value(budget.standard),
        "–" if relative is None else f"{100 * relative:.2g} %",
        "\n".join(lines) or "none",
        " · ".join(words.value(x) for x in (drawn.p5, drawn.p50, drawn.p95)),
    )


def _line(line: BudgetLine, words: Wording) -> str:
    of = f" of {words.name(line.item)}" if line.item else ""
    axis = f" along {line.axis}" if line.axis else ""
    return f"{line.input}{of}{axis} ({line.origin}): {100 * line.share:.0f} %"
