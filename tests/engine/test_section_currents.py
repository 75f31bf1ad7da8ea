"""The net current of a section, and a section in words."""

from __future__ import annotations

import cmath
import math

import pytest

from engine.circuits import (
    BalancedCurrent,
    Circuit,
    ConductorCurrent,
    DirectCurrents,
    EnteredNetCurrent,
)
from engine.currents import case_phasors
from engine.equipment import Board, Pole, Terminal, Transformer
from engine.formations import as_free
from engine.layout import Layout
from engine.runs import (
    CircuitShare,
    Connection,
    Flat,
    Joint,
    ParallelSets,
    Run,
    SlotEnd,
    Vertical,
)
from engine.section_currents import net_text, section_currents
from engine.section_edits import without
from engine.section_words import direction_text, order_text

CARRIED = (CircuitShare(circuit="F1"),)


def currents_of(circuit: Circuit, section):
    layout = Layout(circuits=(circuit,))
    return section_currents(case_phasors(layout, layout.cases[0]), section)


def test_a_balanced_circuit_leaves_nothing():
    circuit = Circuit(id="F1", demand=BalancedCurrent(rms=800.0))
    (found,) = currents_of(circuit, Flat(circuits=CARRIED))
    assert found.net == 0
    assert net_text([found]) == "Net current 0 A at 50 Hz"
    assert {label for _, label, _ in found.terms} == {"L1", "L2", "L3"}


def test_without_one_line_its_current_is_missing():
    circuit = Circuit(id="F1", demand=BalancedCurrent(rms=800.0, cos_phi=1.0))
    section = without(as_free(Flat(circuits=CARRIED)), ["L2"])
    (found,) = currents_of(circuit, section)
    # L1 + L3 = −L2, and L2 is at −120°.
    assert abs(found.net) == pytest.approx(800.0)
    assert math.degrees(cmath.phase(found.net)) == pytest.approx(60.0)
    assert net_text([found]) == "Net current 800 A∠60° at 50 Hz"


def test_parallel_sets_carry_the_current_once():
    circuit = Circuit(id="F1", demand=BalancedCurrent(rms=800.0))
    sets = ParallelSets(circuits=CARRIED, orders=(("L1", "L2", "L3"),) * 3)
    (found,) = currents_of(circuit, sets)
    assert [abs(value) for _, _, value in found.terms] == pytest.approx([800.0] * 3)


def test_net_current_that_leaves_the_cable_is_missing_in_the_section():
    circuit = Circuit(
        id="F1",
        demand=BalancedCurrent(rms=100.0),
        net_current=EnteredNetCurrent(rms=2.0, angle=0.0),
    )
    (found,) = currents_of(circuit, Flat(circuits=CARRIED))
    assert abs(found.net) == pytest.approx(2.0)


def test_direct_currents_have_a_sign_and_no_angle():
    circuit = Circuit(
        id="F1",
        supply="dc",
        base_frequency=0.0,
        demand=DirectCurrents(
            currents=(
                ConductorCurrent(label="L+", rms=100.0),
                ConductorCurrent(label="L-", rms=97.0, angle=180.0),
            )
        ),
        neutral="entered",
    )
    section = Flat(circuits=CARRIED, order=("L+", "L-"))
    assert net_text(currents_of(circuit, section)) == "Net current 3.00 A DC"


def test_no_current_is_said():
    assert net_text(currents_of(Circuit(id="F1"), Flat(circuits=CARRIED))) == (
        "No current flows here in this load case."
    )


def test_the_order_is_read_as_it_is_seen():
    assert order_text(Flat(circuits=CARRIED)) == "left to right: L1 L2 L3 N"
    assert order_text(Flat(circuits=CARRIED), from_end=True) == (
        "left to right: N L3 L2 L1"
    )
    assert order_text(Vertical(circuits=CARRIED), from_end=True) == (
        "top to bottom: L1 L2 L3 N"
    )


def test_the_direction_names_what_stands_at_the_ends():
    transformer = Transformer(
        id="T1", terminals=(Terminal(label="L1", at=(0, 0, 0)),), star=(0, 1, 0)
    )
    board = Board(
        id="b", name="board", origin=(5, 0), poles=(Pole(label="L1", z=2, fed_at=0),)
    )
    run = Run(
        id="r",
        route=((0, 0, 0), (5, 0, 0)),
        section=Flat(circuits=CARRIED),
        start=Connection(equipment="T1"),
        end=Connection(equipment="b", way="incoming"),
    )
    layout = Layout(equipment=(transformer, board), runs=(run,))
    assert direction_text(layout, run) == "looking from T1 to board"
    assert direction_text(layout, run, from_end=True) == "looking from board to T1"


def test_ends_without_equipment_are_named_too():
    run = Run(id="r", route=((0, 0, 0), (5, 0, 0)), section=Flat(circuits=CARRIED))
    ends = tuple(SlotEnd(item="r", slot=s, end="end") for s in ("L1", "N"))
    layout = Layout(runs=(run,), joints=(Joint(id="j", name="far joint", ends=ends),))
    assert direction_text(layout, run) == "looking from the start to far joint"
