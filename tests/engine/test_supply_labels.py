"""Labels of sections follow a circuit's supply where there is one way to read them."""

from __future__ import annotations

import pytest
from msgspec.structs import replace

from engine.circuits import Circuit
from engine.edits import replaced
from engine.faults import faults
from engine.formations import labels_of
from engine.layout import Layout
from engine.runs import (
    CircuitShare,
    Flat,
    FreeSection,
    Joint,
    ParallelSets,
    Run,
    Section,
    Slot,
    SlotEnd,
    SlotLoad,
)
from engine.starters import transformer_link_board
from engine.supply_labels import relabelled

THIS = (CircuitShare(circuit="C"),)


def layout_of(section: Section, supply: str) -> Layout:
    run = Run(id="R", route=((0.0, 0.0, 0.0), (5.0, 0.0, 0.0)), section=section)
    circuit = Circuit(
        id="C", supply=supply, base_frequency=0.0 if supply == "dc" else 50.0
    )
    return Layout(circuits=(circuit,), runs=(run,))


@pytest.mark.parametrize(
    ("supply", "before", "after"),
    [
        ("dc", ("L1", "L2", "L3", "N"), ("L+", "L-", "L3", "N")),
        ("dc", ("L3", "L2", "L1"), ("L3", "L-", "L+")),
        ("dc", ("L1", "N", "PE"), ("L+", "L-", "PE")),
        ("single-phase", ("L+", "L-"), ("L1", "N")),
        ("single-phase", ("L1", "L2", "L3"), ("L1", "N", "L3")),
    ],
)
def test_conductors_take_the_labels_of_the_supply(supply, before, after) -> None:
    made = relabelled(layout_of(Flat(circuits=THIS, order=before), supply), "C")
    assert labels_of(made.layout.runs[0].section) == after
    assert made.runs == ("R",)
    # What fits is left alone.
    assert relabelled(made.layout, "C").runs == ()


@pytest.mark.parametrize(
    ("supply", "labels"),
    [
        ("three-phase four-wire", ("L+", "L-")),
        ("three-phase three-wire", ("L1", "N")),
        ("single-phase", ("L1", "L2", "L3", "N")),
        ("dc", ("L1", "PE")),
        ("free", ("L1", "L2", "L3")),
    ],
)
def test_nothing_is_guessed(supply, labels) -> None:
    before = layout_of(Flat(circuits=THIS, order=labels), supply)
    made = relabelled(before, "C")
    assert made.runs == ()
    assert made.layout is before


def test_every_set_is_relabelled() -> None:
    sets = ParallelSets(circuits=THIS, orders=(("L1", "L2"), ("L2", "L1")))
    made = relabelled(layout_of(sets, "dc"), "C").layout.runs[0].section
    assert labels_of(made) == ("L+", "L-", "L-", "L+")


def test_free_conductors_keep_places_and_joints_follow_their_names() -> None:
    def slot(name: str, label: str, u: float) -> Slot:
        return Slot(name=name, u=u, v=0.0, loads=(SlotLoad(circuit="C", label=label),))

    section = FreeSection(slots=(slot("L1", "L1", 0.0), slot("return", "L2", 0.1)))
    layout = layout_of(section, "dc")
    ends = tuple(SlotEnd(item="R", slot=n, end="end") for n in ("L1", "return"))
    layout = replace(layout, joints=(Joint(id="J", ends=ends),))
    made = relabelled(layout, "C").layout
    new = made.runs[0].section.slots
    assert [(s.name, s.loads[0].label, s.u) for s in new] == [
        ("L+", "L+", 0.0), ("return", "L-", 0.1),
    ]  # fmt: skip
    assert [end.slot for end in made.joints[0].ends] == ["L+", "return"]


def test_conductors_shared_with_another_circuit_are_left_alone() -> None:
    both = (*THIS, CircuitShare(circuit="D"))
    layout = layout_of(Flat(circuits=both, order=("L1", "L2")), "dc")
    other = Circuit(id="D", supply="three-phase three-wire")
    layout = replace(layout, circuits=(*layout.circuits, other))
    assert relabelled(layout, "C").runs == ()


def with_direct(layout: Layout) -> Layout:
    (circuit,) = layout.circuits
    direct = replace(circuit, supply="dc", base_frequency=0.0)
    return replace(layout, circuits=(direct,))


def test_terminals_and_bars_follow_the_runs_that_lead_to_them() -> None:
    layout = with_direct(transformer_link_board())
    made = relabelled(layout, layout.circuits[0].id)
    assert made.runs == (layout.runs[0].id,)
    transformer, board = made.layout.equipment
    assert [t.label for t in transformer.terminals] == ["L+", "L-", "L3", "N"]
    assert [p.label for p in board.poles] == ["L+", "L-", "L3", "N"]
    case = layout.cases[0]
    assert faults(made.layout, case) == faults(layout, case) == ()


def test_a_run_keeps_the_labels_of_equipment_that_others_need() -> None:
    layout = with_direct(transformer_link_board())
    transformer, board = layout.equipment
    way = replace(board.ways[0], circuits=(CircuitShare(circuit="another"),))
    shared = replace(layout, equipment=(transformer, replace(board, ways=(way,))))
    assert relabelled(shared, layout.circuits[0].id).layout is shared


def test_what_one_run_needs_binds_the_others_at_its_equipment() -> None:
    layout = with_direct(transformer_link_board())
    _, board = layout.equipment
    way = replace(board.ways[0], circuits=(CircuitShare(circuit="another"),))
    shared = replaced(layout, replace(board, ways=(way,)))
    # A second run leads to the transformer only, which must stay for the first.
    (run,) = shared.runs
    shared = replace(shared, runs=(run, replace(run, id="second", end=None)))
    assert relabelled(shared, layout.circuits[0].id).layout is shared
