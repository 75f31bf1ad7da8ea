"""The tolerances that budgets are made of, and whether comparisons use the budgets."""

from __future__ import annotations

from typing import Any

from msgspec import structs

from app.panels.kinds import DEGREES, PERCENT, Amount, Distance, YesNo
from app.panels.parts import Group, Part
from app.uncertainty_values import BASIS
from engine.edits import checked, replaced
from engine.items import Item
from engine.layout import Layout


def _percent(path: str, label: str, tip: str) -> Part:
    noun = f"tolerance of {label[:1].lower()}{label[1:]}"
    return Part(f"tolerances.{path}", label, Amount(PERCENT, "%"), tip, noun)


def _length(path: str, label: str, tip: str) -> Part:
    noun = f"tolerance of {label[:1].lower()}{label[1:]}"
    return Part(f"tolerances.{path}", label, Distance("mm"), tip, noun)


_TOLERANCES = (
    _percent("current", "Currents", "Of every circuit's current, k = 1, in per cent"),
    Part(
        "tolerances.angle", "Angles", Amount(DEGREES, "°"),
        "Of every circuit's angle against the others, k = 1, in degrees",
        "tolerance of angles",
    ),
    _percent(
        "unbalance", "Unbalance",
        "Of each line's current by itself, in step and across it, k = 1, in per cent",
    ),
    _percent(
        "net_current", "Net currents", "Of an entered net current, k = 1, in per cent"
    ),
    _percent(
        "sharing", "Sharing",
        "Of what each of several parallel conductors carries, k = 1, in per cent of "
        "its share; 0: not counted",
    ),
    _percent("pitch", "Spacings", "Of spacings in a section, k = 1, in per cent"),
    _length("position", "Positions", "Of runs and equipment along each axis, k = 1"),
    _length("place", "Places", "Of the zone or receptor along each axis, k = 1"),
    _percent(
        "model", "Calculation",
        "Steel and crowded current left out, k = 1, in per cent of the value",
    ),
    _percent(
        "measured_part", "What is measured",
        "Counts with this part of the tolerance, in per cent",
    ),
)  # fmt: skip


def tolerance_groups(layout: Layout) -> tuple[Group, ...]:
    """The form's groups for a layout."""
    settings = (layout.settings,)
    entered = f"{100 * layout.settings.uncertainty.relative:g} %"
    switch = Part(
        "uncertainty.kind",
        "U",
        YesNo("From the budgets"),
        f"Whether comparisons take U from the budget of each place, not {entered}",
        "use of the budgets",
        lambda shown, _item: shown.settings.uncertainty.kind == "from the budget",
        _switched,
    )
    coverage = Part(
        "uncertainty.coverage", "Coverage factor", Amount(),
        "k of the expanded uncertainty U = k u, without unit",
    )  # fmt: skip
    return (
        Group(
            "In comparisons",
            settings,
            (switch, coverage),
            f"U from the budget of each place instead of {entered} for all.",
        ),
        Group(
            "Standard tolerances",
            settings,
            _TOLERANCES,
            "At k = 1: about two thirds of the cases lie within.",
        ),
    )


def _switched(layout: Layout, _items: tuple[Item, ...], on: Any) -> Layout:
    before = layout.settings.uncertainty
    basis = BASIS if on else before.basis
    if not on and before.basis == BASIS:
        basis = "assumed"
    after = structs.replace(
        before, kind="from the budget" if on else "entered", basis=basis
    )
    settings = structs.replace(layout.settings, uncertainty=after)
    return replaced(layout, checked(settings))
