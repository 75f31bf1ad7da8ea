"""States of comparisons, and how a summary counts them by the user's rule."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from engine.places import DecisionRule
from engine.results import STATES, Assessment, Comparison, State


def state_of(ratio: float, uncertainty_ratio: float) -> State:
    """Where B stands to L and what U reaches, both divided by L.

    `below` B+U ≤ L; `below, U reaches` B ≤ L < B+U; `above, U reaches` B−U ≤ L < B;
    `above` L < B−U.

    Examples
    --------
    >>> state_of(0.8, 0.2)
    'below'
    >>> state_of(1.0, 0.25)
    'below, U reaches'
    """
    if not (ratio >= 0 and uncertainty_ratio >= 0):
        raise ValueError(f"ratio {ratio} with uncertainty {uncertainty_ratio}")
    if ratio <= 1:
        return "below" if ratio + uncertainty_ratio <= 1 else "below, U reaches"
    return "above, U reaches" if ratio - uncertainty_ratio <= 1 else "above"


@dataclass(frozen=True)
class Counts:
    """How many comparisons stand in each state, and how the rule counts them.

    `below` and `not_below` are None where no rule was chosen: then only the states
    are printed.
    """

    by_state: dict[State, int]
    below: int | None
    not_below: int | None
    not_evaluable: int


def counts(comparisons: Iterable[Comparison], rule: DecisionRule) -> Counts:
    """Count comparisons by the user's rule.

    "additive": only `below` counts as below, the uncertainty is added to the value.
    "value only": B ≤ L counts as below. What is not evaluable is neither.
    """
    by_state = {state: 0 for state in STATES}
    for comparison in comparisons:
        by_state[comparison.state] += 1
    not_evaluable = by_state["not evaluable"]
    if rule.kind == "none chosen":
        return Counts(by_state, None, None, not_evaluable)
    below = by_state["below"]
    if rule.kind == "value only":
        below += by_state["below, U reaches"]
    total = sum(by_state.values())
    return Counts(by_state, below, total - below - not_evaluable, not_evaluable)


def worst_comparisons(assessment: Assessment) -> tuple[Comparison, ...]:
    """Per place and level the worst of the counted cases, in the order of the layout.

    A comparison that is not evaluable stands before those that are below, but not
    before one that is above.
    """
    worst: dict[tuple[str, str], Comparison] = {}
    for comparison in assessment.comparisons:
        if not comparison.counted:
            continue
        key = (comparison.place, comparison.level)
        if key not in worst or _concern(comparison) > _concern(worst[key]):
            worst[key] = comparison
    return tuple(worst.values())


def _concern(comparison: Comparison) -> tuple[int, float]:
    ratio = -1.0 if comparison.ratio is None else comparison.ratio
    return (STATES.index(comparison.state), ratio)


def exit_code(assessment: Assessment) -> int:
    """0: every comparison of the counted cases is below. 1: one is above. 3: neither.

    Nothing compared is 3 too.
    """
    states = {c.state for c in assessment.comparisons if c.counted}
    if states == {"below"}:
        return 0
    return 1 if states & {"above", "above, U reaches"} else 3
