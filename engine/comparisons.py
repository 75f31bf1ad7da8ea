"""Comparisons of one place with its levels, in every load case."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
from msgspec import structs

from engine.comparability import blocking_sentences, obstacles
from engine.criteria import ReferenceLevel
from engine.decisions import state_of
from engine.evaluations import Quantity
from engine.levels import Kind, is_kind, level_at, ratios
from engine.loaded_layout import LoadedLayout
from engine.place_details import root_sum_of_squares
from engine.places import Receptor, Uncertainty, Zone
from engine.results import STATES, Comparison, PlaceDetails, State
from engine.uncertainty_budget import places_of
from engine.zone_search import Found

KINDS: tuple[Kind, ...] = ("AC", "DC")

#: The largest value of each quantity that was looked for, and its place.
Largest = Mapping[Quantity, tuple[Found, PlaceDetails]]


def _levels(loaded: LoadedLayout, place: Zone | Receptor) -> list[ReferenceLevel]:
    known = {level.id: level for level in loaded.layout.levels}
    return [known[id] for id in dict.fromkeys(place.levels) if id in known]


def quantities(loaded: LoadedLayout, place: Zone | Receptor) -> list[Quantity]:
    """What is to be looked for: resultants, and every comparison that can be made."""
    wanted = []
    for k, case in enumerate(loaded.fields.cases):
        frequencies = case.frequencies
        for kind in KINDS:
            if any(is_kind(f, kind) for f in frequencies):
                wanted.append(Quantity(k, kind))
        for level in _levels(loaded, place):
            if not obstacles(place, level, frequencies):
                compared = ratios(level, {f: np.zeros(1) for f in frequencies})
                if compared.ac is not None:
                    wanted.append(Quantity(k, "AC", level))
                if compared.dc is not None:
                    wanted.append(Quantity(k, "DC", level))
    return wanted


def comparisons(
    loaded: LoadedLayout,
    place: Zone | Receptor,
    found: Largest,
    problems: Mapping[str, str],
    shares: Mapping[str, float],
) -> tuple[Comparison, ...]:
    """Every level of a place in every case, in that order."""
    known = {level.id: level for level in loaded.layout.levels}
    made = []
    for level_id in dict.fromkeys(place.levels):
        for result in loaded.cases:
            case = result.case
            empty = Comparison(
                place.id, level_id, case.id, case.counted, "not evaluable",
                masked_share=shares.get(case.id, 0.0),
            )  # fmt: skip
            reasons = list(blocking_sentences(loaded.layout, place, result.faults))
            level = known.get(level_id)
            if level is not None:
                reasons += obstacles(place, level, result.frequencies)
            elif not reasons:
                reasons.append(f"The level “{level_id}” is not in the layout.")
            reasons += [t for t in (result.reason, problems.get(case.id, "")) if t]
            if reasons or level is None:
                reason = " ".join(dict.fromkeys(reasons))
                made.append(replace(empty, reason=reason))
                continue
            index = loaded.index[case.id]
            kinds = [Quantity(index, kind, level) for kind in KINDS]
            reached = {q: found[q] for q in kinds if q in found}
            assert reached, "a comparison that can be made was looked for"
            made.append(_compared(loaded, place, empty, level, reached))
    return tuple(made)


def _compared(
    loaded: LoadedLayout,
    place: Zone | Receptor,
    empty: Comparison,
    level: ReferenceLevel,
    reached: Largest,
) -> Comparison:
    """A comparison that can be made: AC or DC, whichever is of more concern."""
    rules = {q: _rules(loaded, place, q, *reached[q]) for q in reached}
    states = {
        q: _judged(rules[q][1], level, f, details.upper)
        for q, (f, details) in reached.items()
    }

    def concern(q: Quantity) -> tuple[int, float]:
        # U may reach the level from the smaller of the two ratios.
        return STATES.index(states[q]), reached[q][0].score

    quantity = max(reached, key=concern)
    largest, details = reached[quantity]
    others = [f.score for q, (f, _) in reached.items() if q is not quantity]
    value = _value(largest)
    rule, ratio_rule = rules[quantity]
    limits = [level_at(level, f) for f in largest.by_frequency]
    limit = limits[0] if len(limits) == 1 else None
    bound = details.upper
    frequencies = loaded.fields.cases[quantity.case].frequencies
    compared = ratios(level, {f: np.zeros(1) for f in frequencies})
    return replace(
        empty,
        state=states[quantity],
        kind=quantity.kind,
        value=value,
        level_value=limit,
        ratio=largest.score,
        uncertainty_ratio=_spread(ratio_rule, level, largest, largest.score),
        uncertainty=expanded(rule, value),
        upper_ratio=bound,
        upper=None if bound is None or limit is None else bound * limit,
        other_kind_ratio=others[0] if others else None,
        area_above=largest.area_above if isinstance(place, Zone) else None,
        not_covered=compared.not_covered,
        details=details,
    )


def _value(largest: Found) -> float:
    """What is compared, of several frequencies the root of the sum of squares. [T]"""
    return float(root_sum_of_squares(list(largest.by_frequency.values())))


def _rules(
    loaded: LoadedLayout,
    place: Zone | Receptor,
    quantity: Quantity,
    largest: Found,
    details: PlaceDetails,
) -> tuple[Uncertainty, Uncertainty]:
    """The uncertainty of the value and of its ratio: entered, or of its budget."""
    rule = place.uncertainty or loaded.layout.settings.uncertainty
    if rule.kind == "entered":
        return rule, rule
    value = _value(largest)
    points = places_of(place, details)
    budget = loaded.budgets.budget(place, quantity, points, value)
    assert budget.ratio_standard is not None, "a comparison has a level"
    return (
        budgeted(rule, budget.standard, value),
        budgeted(rule, budget.ratio_standard, largest.score),
    )


def budgeted(rule: Uncertainty, standard: float, value: float) -> Uncertainty:
    """The rule whose relative part is that of a standard uncertainty of a value.

    Without a value there is no relative part: the uncertainty then stands by itself.
    """
    expanded = rule.coverage * standard
    if value > 0:
        return structs.replace(rule, relative=expanded / value)
    return structs.replace(rule, relative=0.0, absolute=rule.absolute + expanded)


def _judged(
    rule: Uncertainty, level: ReferenceLevel, largest: Found, upper: float | None
) -> State:
    """The state of the value found, or of its proven bound while that is below.

    A bound above the level says no more than that the level may be reached.
    """
    found = state_of(largest.score, _spread(rule, level, largest, largest.score))
    if upper is None or largest.score > 1:
        return found
    bound = state_of(upper, _spread(rule, level, largest, upper))
    return "above, U reaches" if bound == "above" else bound


def _spread(
    rule: Uncertainty, level: ReferenceLevel, largest: Found, ratio: float
) -> float:
    """Expanded uncertainty of a ratio."""
    known = [x for f in largest.by_frequency if (x := level_at(level, f)) is not None]
    # The absolute part may lie at the frequency that counts most.
    return rule.relative * ratio + rule.absolute / min(known)


def expanded(rule: Uncertainty, value: float) -> float:
    """Expanded uncertainty U = relative · B + absolute. [T]"""
    return rule.relative * value + rule.absolute
