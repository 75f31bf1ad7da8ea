"""`validate`: the outside checks of the program, run now, as text and as JSON."""

from __future__ import annotations

from collections.abc import Sequence
from textwrap import fill

from engine.errors import Progress
from engine.validation import (
    NEAR_FIELD,
    Outcome,
    checks,
    in_columns,
    near_field_rows,
    outcome,
    table,
)


def run(*, progress: Progress | None = None) -> tuple[Outcome, ...]:
    """Every check with the value that this program computes now."""
    every = checks()
    found = []
    for k, check in enumerate(every):
        if progress is not None:
            progress(k / len(every), "Running the outside checks")
        found.append(outcome(check))
    return tuple(found)


def as_text(found: Sequence[Outcome]) -> str:
    """The table of the checks, how many agree, and the error near conductors."""
    agree = sum(result.agrees for result in found)
    counted = f"{agree} of {len(found)} values agree within their tolerance."
    near = in_columns(near_field_rows())
    return f"{table(found)}\n\n{counted}\n\n{fill(NEAR_FIELD, 88)}\n\n{near}\n"


def as_json(found: Sequence[Outcome]) -> dict[str, object]:
    """The same as values; deviations in the unit of each check."""
    heads, *rows = near_field_rows()
    return {
        "agree": all(result.agrees for result in found),
        "checks": [_check(result) for result in found],
        "near_field": {
            "about": NEAR_FIELD,
            "rows": [dict(zip(heads, row, strict=True)) for row in rows],
        },
    }


def _check(result: Outcome) -> dict[str, object]:
    check = result.check
    return {
        "id": check.id,
        "case": check.case,
        "source": check.source,
        "from_memory": check.from_memory,
        "unit": check.unit,
        "published": check.published,
        "computed": result.value,
        "deviation": result.deviation,
        "relative_deviation": result.relative_deviation,
        "tolerance": check.tolerance,
        "reason": check.reason,
        "agrees": result.agrees,
    }
