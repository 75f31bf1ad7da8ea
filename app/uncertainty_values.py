"""Budgets of uncertainty of a layout's places, made in the background, and in words."""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass

from engine.assessment import assess
from engine.budget import Budget, BudgetLine
from engine.conductors import conductors
from engine.errors import Cancelled, UserError
from engine.field import ResponseCache
from engine.items import Item
from engine.layout import Layout
from engine.place_budgets import place_budgets
from engine.places import Receptor, Uncertainty, Zone
from engine.typed_lengths import length_text
from engine.units import flux_density_text, in_unit, significant
from engine.varied_sharing import parallel_sets

#: Bars of their own; what is left is one bar.
MOST_LINES = 14

BASIS = "tolerances of the inputs"

_NAMES = {
    "current magnitude": "Current of {}",
    "current angle": "Angle of {}",
    "unbalance": "Unbalance of {}",
    "net current": "Net current of {}",
    "sharing": "Sharing in {}",
    "section pitch": "Spacings of {}",
    "position": "Position of {}",
    "place": "Place of {}",
    "model": "The calculation itself",
}

_ORIGINS = {
    "assumed": "assumed",
    "document": "from a document",
    "measured": "measured",
    "confirmed": "confirmed",
}


@dataclass(frozen=True)
class BudgetRequest:
    """What is asked: the budgets of all places of a layout."""

    layout: Layout


@dataclass(frozen=True, eq=False)
class Budgeted:
    """The budgets, by place in the order of the layout."""

    request: BudgetRequest
    budgets: tuple[Budget, ...]

    def of(self, place: str) -> tuple[Budget, ...]:
        """AC, DC or both."""
        return tuple(b for b in self.budgets if b.place == place)


class BudgetMaker:
    """Makes budgets in a thread; what did not move is computed once."""

    def __init__(self) -> None:
        self._cache = ResponseCache()

    def budgets(self, request: BudgetRequest, cancelled: Cancelled) -> Budgeted:
        """Assess the layout, then take every place's worst value apart.

        Raises
        ------
        UserError
            When there is no value to make a budget for.
        ComputationCancelled
            When `cancelled` says so.
        """
        assessment = assess(request.layout, cache=self._cache, cancelled=cancelled)
        found = place_budgets(assessment, cache=self._cache, cancelled=cancelled)
        if not found:
            raise UserError(
                "No place has a value to make a budget for: it takes a zone or a "
                "receptor, and a current."
            )
        return Budgeted(request, found)


def places_of(layout: Layout) -> list[Zone | Receptor]:
    """Zones, then receptors."""
    return [*layout.zones, *layout.receptors]


def place_name(place: Item) -> str:
    """ "Corridor (zone)"."""
    return f"{place.title} ({'zone' if isinstance(place, Zone) else 'receptor'})"


def line_name(line: BudgetLine, layout: Layout) -> str:
    """ "Position of R3"."""
    items = layout.by_id()
    title = items[line.item].title if line.item in items else line.item
    return _NAMES[line.input].format(title)


def tolerance_text(line: BudgetLine, layout: Layout) -> str:
    """ "along y ±35 mm, from a document", at k = 1."""
    if line.unit == "part":
        size = f"{100 * line.tolerance:.3g} %"
    elif line.unit == "m":
        unit = {"m": "mm", "ft": "in"}.get(
            layout.settings.length_unit, layout.settings.length_unit
        )
        size = length_text(line.tolerance, unit, ".")
    else:
        size = f"{line.tolerance:.3g}°"
    if line.input == "model":
        return f"±{size}"
    along = f"along {line.axis} " if line.axis else ""
    return f"{along}±{size}, {_ORIGINS[line.origin]}"


def value_text(tesla: float, layout: Layout) -> str:
    """A flux density in the layout's unit."""
    return flux_density_text(tesla, layout.settings.flux_density_unit)


def share_text(part: float) -> str:
    """A part of the variance in per cent: "41 %", "under 1 %"."""
    return "under 1 %" if part < 0.01 else f"{100 * part:.0f} %"


def head_text(budget: Budget, layout: Layout, held: Budget | None = None) -> str:
    """Value, U, what they were where they are held, and what the value is."""
    place = layout.by_id()[budget.place]
    k = layout.settings.uncertainty.coverage
    expanded = budget.expanded(k)
    text = f"{place_name(place)}: {value_text(budget.value, layout)}"
    text += f" ± {value_text(expanded, layout)} (U, k = {k:g}"
    if budget.value > 0:
        text += f"; {significant(100 * expanded / budget.value, 2)} %"
    if held is not None:
        before = value_text(held.value, layout)
        text += f"; was {before} ± {value_text(held.expanded(k), layout)}"
    case = next((c.title for c in layout.cases if c.id == budget.case), budget.case)
    level = next((x.title for x in layout.levels if x.id == budget.level), "")
    what = f"{budget.kind}, as compared with {level}" if level else budget.kind
    return f"{text}) · {what} · {case}"


def sampled_text(budget: Budget, layout: Layout) -> str:
    """What currents drawn at random gave, beside the propagation."""
    drawn = budget.sampled
    p5, p50, p95 = (value_text(v, layout) for v in (drawn.p5, drawn.p50, drawn.p95))
    return (
        f"Currents drawn at random {drawn.n} times: 5 % of the values under {p5} (P5), "
        f"half under {p50} (P50), 5 % over {p95} (P95); their spread "
        f"{value_text(drawn.standard, layout)} beside "
        f"{value_text(budget.currents_standard, layout)} by propagation of the "
        "currents alone (k = 1)."
    )


def left_out_text(layout: Layout) -> str:
    """That parallel conductors are taken to share as entered; empty without any."""
    if layout.settings.tolerances.sharing:
        return ""
    try:
        shared = parallel_sets(conductors(layout))
    except UserError:
        return ""
    items = layout.by_id()
    titles = list(dict.fromkeys(items[one.item].title for one in shared))
    if not titles:
        return ""
    more = f" and {len(titles) - 2} more runs" if len(titles) > 2 else ""
    return (
        f"Not counted: that parallel conductors in {' and '.join(titles[:2])}{more} "
        "may share unequally. Enter a tolerance of sharing."
    )


def matters_text(budget: Budget, layout: Layout) -> str:
    """What matters most, in words."""
    first = budget.lines[0]
    return (
        f"What matters most: {line_name(first, layout)} "
        f"({tolerance_text(first, layout)}), {share_text(first.share)} of the variance."
    )


def used_text(layout: Layout, place: Item) -> str:
    """Which U stands in the comparisons of the place now."""
    own = getattr(place, "uncertainty", None)
    used: Uncertainty = own or layout.settings.uncertainty
    whose = "an uncertainty of its own" if own else "the layout's uncertainty"
    if used.kind == "from the budget":
        return f"Comparisons here use this budget (by {whose})."
    unit = layout.settings.flux_density_unit
    text = f"{100 * used.relative:g} %"
    if used.absolute:
        text += f" + {flux_density_text(used.absolute, unit)}"
    return f"Comparisons here use {whose}: {text}, {used.basis}; not this budget."


@dataclass(frozen=True)
class BudgetBar:
    """One bar of the chart; the last may stand for several lines."""

    name: str
    told: str
    standard: float
    share: float
    item: str


def bars(budget: Budget, layout: Layout) -> tuple[BudgetBar, ...]:
    """The largest lines, each by itself, and the rest as one. [T]"""
    shown = [line for line in budget.lines if line.standard > 0]
    rest = shown[MOST_LINES:]
    found = [
        BudgetBar(
            line_name(line, layout), tolerance_text(line, layout), line.standard,
            line.share, line.item,
        )
        for line in shown[:MOST_LINES]
    ]  # fmt: skip
    if rest:
        together = sum(line.standard**2 for line in rest) ** 0.5
        share = sum(line.share for line in rest)
        found.append(BudgetBar(f"{len(rest)} others together", "", together, share, ""))
    return tuple(found)


def budget_csv(budget: Budget, layout: Layout) -> str:
    """Every line of a budget, then the sums and the values drawn at random."""
    unit = layout.settings.flux_density_unit
    file = io.StringIO()
    writer = csv.writer(file, lineterminator="\n")
    writer.writerow(
        [
            "input", "axis", "tolerance (k = 1)", "unit", "origin",
            f"standard [{unit}]", f"effect of one tolerance more [{unit}]",
            "share of variance",
        ]
    )  # fmt: skip
    for line in budget.lines:
        standard, effect = (
            f"{in_unit(v, unit):.6g}" for v in (line.standard, line.effect)
        )
        writer.writerow(
            [
                line_name(line, layout), line.axis, f"{line.tolerance:g}", line.unit,
                line.origin,
                standard, effect, f"{line.share:.4g}",
            ]
        )  # fmt: skip
    k = layout.settings.uncertainty.coverage
    drawn = budget.sampled
    for name, value in (
        ("value", budget.value),
        ("combined standard uncertainty", budget.standard),
        (f"U (k = {k:g})", budget.expanded(k)),
        ("P5", drawn.p5), ("P50", drawn.p50), ("P95", drawn.p95),
    ):  # fmt: skip
        writer.writerow([name, "", "", "", "", f"{in_unit(value, unit):.6g}", "", ""])
    return file.getvalue()
