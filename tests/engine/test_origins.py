"""Assumed values: what has no origin, what an origin covers, how values are written."""

from __future__ import annotations

from engine.circuits import BalancedCurrent, Circuit, Power
from engine.items import ValueOrigin
from engine.layout import Layout, Settings
from engine.origins import (
    Assumption,
    assumptions,
    origin_of,
    restated,
    with_origin,
)
from engine.runs import CircuitShare, Flat, Run


def of(item: str, layout: Layout) -> dict[str, Assumption]:
    return {a.field: a for a in assumptions(layout) if a.item == item}


def run(*origins: ValueOrigin) -> Run:
    return Run(
        id="R",
        route=((0.0, 0.0, 0.0), (1.0, 0.0, 0.0)),
        section=Flat(circuits=(CircuitShare(circuit="C"),), pitch=0.12),
        origins=origins,
    )


def test_values_without_origin_are_assumed() -> None:
    found = of("R", Layout(runs=(run(),)))
    # Nothing is said of turns, rating and containment: no assumption of the user's.
    assert list(found) == ["route", "section"]


def test_origin_that_says_assumed_keeps_its_reason() -> None:
    origin = ValueOrigin(field="route", kind="assumed", note="Shortest way.")
    found = of("R", Layout(runs=(run(origin),)))
    assert found["route"].reason == "Shortest way."


def test_document_covers_a_field_and_its_parts() -> None:
    origins = (
        ValueOrigin(field="route", kind="document"),
        ValueOrigin(field="section", kind="measured"),
    )
    assert of("R", Layout(runs=(run(*origins),))) == {}


def test_part_said_to_be_assumed_stands_out_of_a_covered_field() -> None:
    origins = (
        ValueOrigin(field="route", kind="confirmed"),
        ValueOrigin(field="section", kind="document"),
        ValueOrigin(field="section.pitch", kind="assumed", note="Not on the drawing."),
    )
    found = of("R", Layout(runs=(run(*origins),)))
    assert list(found) == ["section.pitch"]
    assert found["section.pitch"].value == "0.12 m"


def test_covered_part_does_not_cover_its_field() -> None:
    origins = (
        ValueOrigin(field="route", kind="confirmed"),
        ValueOrigin(field="section.pitch", kind="document"),
    )
    found = of("R", Layout(runs=(run(*origins),)))
    assert list(found) == ["section"]
    assert "apart from pitch" in found["section"].value


def test_voltage_counts_only_where_a_power_needs_it() -> None:
    current = Circuit(id="C", voltage=400.0, demand=BalancedCurrent(rms=10.0))
    power = Circuit(id="C", voltage=400.0, demand=Power(apparent=10e3))
    assert "voltage" not in of("C", Layout(circuits=(current,)))
    assert of("C", Layout(circuits=(power,)))["voltage"].value == "400 V"


def test_nothing_entered_is_an_assumption_that_says_so() -> None:
    found = of("C", Layout(circuits=(Circuit(id="C"),)))
    assert found["spectrum"].value == "none entered"
    assert found["net_current"].value == "none entered"
    assert found["demand"].value == "no current entered"


def test_confirmed_uncertainty_leaves_a_fresh_layout_without_assumptions() -> None:
    origin = ValueOrigin(field="uncertainty", kind="confirmed", by="R. Thornquist")
    assert assumptions(Layout(settings=Settings(origins=(origin,)))) == ()


def test_a_changed_value_loses_its_origin_and_the_others_keep_theirs():
    document = ValueOrigin(field="demand", kind="document", document="d", page="3")
    part = ValueOrigin(field="demand.rms", kind="measured")
    other = ValueOrigin(field="voltage", kind="confirmed", by="A. Tester")
    circuit = Circuit(
        id="F1",
        voltage=400.0,
        demand=BalancedCurrent(rms=10.0),
        origins=(document, part, other),
    )
    changed = restated(circuit, demand=BalancedCurrent(rms=11.0), voltage=400.0)
    assert changed.origins == (other,)
    assert restated(circuit, voltage=400.0) is circuit


def test_an_origin_takes_the_place_of_the_one_before():
    circuit = Circuit(id="F1")
    first = ValueOrigin(field="demand", kind="measured", date="2024-02-05")
    second = ValueOrigin(field="demand", kind="confirmed", by="A. Tester")
    stated = with_origin(with_origin(circuit, first), second)
    assert stated.origins == (second,)
    assert origin_of(stated, "demand.rms") == second
    assert with_origin(stated, ValueOrigin(field="demand", kind="assumed")) == circuit
