"""Formations: every dimension, order and share, by hand."""

from __future__ import annotations

from itertools import combinations
from math import dist, sqrt

import pytest

from engine.errors import UserError
from engine.runs import (
    Bar,
    CircuitShare,
    Flat,
    FreeSection,
    Multicore,
    ParallelSets,
    Quad,
    Round,
    Sandwich,
    Slot,
    SlotLoad,
    StackedBars,
    Trefoil,
    Vertical,
)
from engine.sections import single_conductors, slots, total

F1 = (CircuitShare(circuit="F1"),)


def places(section):
    return {s.name: (s.u, s.v) for s in slots(section)}


def near(wanted):
    return {name: pytest.approx(place) for name, place in wanted.items()}


def test_flat_goes_from_left_to_right_about_the_route():
    assert places(Flat(circuits=F1, pitch=0.1)) == near(
        {"L1": (-0.15, 0), "L2": (-0.05, 0), "L3": (0.05, 0), "N": (0.15, 0)}
    )


def test_vertical_goes_from_top_to_bottom():
    found = places(Vertical(circuits=F1, order=("L1", "L2", "N"), pitch=0.2))
    assert found == near({"L1": (0, 0.2), "L2": (0, 0), "N": (0, -0.2)})


@pytest.mark.parametrize("apex", ["up", "down"])
def test_trefoil_touches_and_is_centred_on_the_route(apex):
    section = Trefoil(circuits=F1, pitch=0.03, shape=Round(diameter=0.03), apex=apex)
    found = places(section)
    for a, b in combinations(found.values(), 2):
        assert dist(a, b) == pytest.approx(0.03, rel=1e-12)
    assert sum(u for u, _ in found.values()) == pytest.approx(0, abs=1e-15)
    assert sum(v for _, v in found.values()) == pytest.approx(0, abs=1e-15)


def test_trefoil_is_clockwise_from_its_apex_with_the_neutral_to_the_right():
    section = Trefoil(
        circuits=F1, order=("L1", "L2", "L3", "N"), pitch=0.06, neutral_pitch=0.1
    )
    found = places(section)
    assert found["L1"] == pytest.approx((0, 0.06 / sqrt(3)))
    assert found["L2"] == pytest.approx((0.03, -0.03 / sqrt(3)))
    assert found["L3"] == pytest.approx((-0.03, -0.03 / sqrt(3)))
    assert found["N"] == pytest.approx((0.13, -0.03 / sqrt(3)))


def test_trefoil_with_its_apex_down_is_clockwise_too():
    section = Trefoil(
        circuits=F1,
        order=("L1", "L2", "L3", "N"),
        pitch=0.06,
        neutral_pitch=0.1,
        apex="down",
    )
    found = places(section)
    assert found["L1"] == pytest.approx((0, -0.06 / sqrt(3)))
    assert found["L2"] == pytest.approx((-0.03, 0.03 / sqrt(3)))
    assert found["L3"] == pytest.approx((0.03, 0.03 / sqrt(3)))
    assert found["N"] == pytest.approx((0.13, 0.03 / sqrt(3)))


def test_quad_starts_top_left_and_goes_clockwise():
    assert places(Quad(circuits=F1, pitch=0.04)) == near(
        {
            "L1": (-0.02, 0.02),
            "L2": (0.02, 0.02),
            "L3": (0.02, -0.02),
            "N": (-0.02, -0.02),
        }
    )


def test_parallel_sets_keep_their_own_orders():
    section = ParallelSets(
        circuits=F1,
        orders=(("L1", "L2", "L3", "N"), ("N", "L3", "L2", "L1")),
        pitch=0.03,
        set_pitch=0.12,
    )
    found = slots(section)
    assert [s.name for s in found] == [
        "L1.1", "L2.1", "L3.1", "N.1", "N.2", "L3.2", "L2.2", "L1.2",
    ]  # fmt: skip
    assert [s.u for s in found] == pytest.approx(
        [-0.105, -0.075, -0.045, -0.015, 0.015, 0.045, 0.075, 0.105]
    )
    assert {s.loads for s in found if s.name.startswith("L1")} == {
        (SlotLoad(circuit="F1", label="L1", share=0.5),)
    }


def test_parallel_trefoils_stand_one_below_the_other():
    section = ParallelSets(
        circuits=F1,
        orders=(("L1", "L2", "L3"), ("L1", "L3", "L2")),
        formation="trefoil",
        pitch=0.03,
        set_pitch=0.2,
        direction="down",
    )
    found = places(section)
    assert found["L1.1"] == pytest.approx((0, 0.1 + 0.03 / sqrt(3)))
    assert found["L1.2"] == pytest.approx((0, -0.1 + 0.03 / sqrt(3)))
    assert found["L2.2"] == pytest.approx((-0.015, -0.1 - 0.015 / sqrt(3)))


def test_a_set_of_wrong_size_is_refused_with_its_number():
    section = ParallelSets(
        circuits=F1,
        orders=(("L1", "L2", "L3", "N"), ("L1", "L2")),
        formation="quad",
    )
    with pytest.raises(UserError, match=r"Set 2 .* has 2 conductors; a quad takes 4"):
        slots(section)


def test_bars_on_edge_stand_face_to_face_about_their_pole():
    section = StackedBars(
        circuits=F1,
        order=("L1", "N"),
        bars_per_pole=2,
        width=0.12,
        thickness=0.01,
        gap=0.01,
        pitch=0.15,
    )
    found = slots(section)
    assert [s.name for s in found] == ["L1.1", "L1.2", "N.1", "N.2"]
    assert [s.u for s in found] == pytest.approx([-0.085, -0.065, 0.065, 0.085])
    assert found[0].shape == Bar(width=0.12, thickness=0.01, turn=90)
    assert found[0].loads[0].share == 0.5


def test_flat_bars_lie_one_on_the_other_and_poles_go_down():
    section = StackedBars(
        circuits=F1,
        order=("L1", "N"),
        bars_per_pole=3,
        stand="flat",
        direction="down",
        pitch=0.2,
        thickness=0.01,
        gap=0.005,
    )
    found = slots(section)
    assert [s.v for s in found] == pytest.approx(
        [0.115, 0.1, 0.085, -0.085, -0.1, -0.115]
    )
    assert {s.u for s in found} == {0}
    assert found[0].shape.turn == 0
    assert found[0].loads[0].share == pytest.approx(1 / 3)


def test_sandwich_is_thickness_and_insulation_apart():
    right = Sandwich(circuits=F1, thickness=0.006, insulation=0.007)
    assert [s.u for s in slots(right)] == pytest.approx(
        [-0.0195, -0.0065, 0.0065, 0.0195]
    )
    assert slots(right)[0].shape.turn == 90
    down = Sandwich(circuits=F1, order=("L1", "L2"), direction="down")
    assert [s.v for s in slots(down)] == pytest.approx([0.004, -0.004])
    assert slots(down)[0].shape.turn == 0


def test_a_slot_names_every_circuit_that_it_carries():
    circuits = (CircuitShare(circuit="F1"), CircuitShare(circuit="F2", share=0.4))
    section = Flat(circuits=circuits, order=("L1", "L1", "N"))
    assert slots(section)[0].loads == (
        SlotLoad(circuit="F1", label="L1", share=0.5),
        SlotLoad(circuit="F2", label="L1", share=0.2),
    )
    assert slots(section)[2].loads[1].share == 0.4


def multicore(**changes):
    cable = Multicore(
        outside_diameter=0.05,
        core_diameter=0.015,
        core_circle_diameter=0.02,
        **changes,
    )
    loads = tuple(SlotLoad(circuit="F1", label=x) for x in ("L1", "L2", "L3", "N"))
    slot = Slot(name="W1", u=1.0, v=2.0, shape=cable, loads=loads)
    return FreeSection(slots=(slot,))


def test_straight_cores_go_clockwise_from_the_top():
    cores = single_conductors(multicore())
    assert [s.name for s in cores] == ["W1/L1", "W1/L2", "W1/L3", "W1/N"]
    assert [(s.u, s.v) for s in cores] == [
        pytest.approx(place)
        for place in [(1.0, 2.01), (1.01, 2.0), (1.0, 1.99), (0.99, 2.0)]
    ]
    assert [[load.label for load in s.loads] for s in cores] == [
        ["L1"], ["L2"], ["L3"], ["N"],
    ]  # fmt: skip
    assert cores[0].shape == Round(diameter=0.015)


def test_a_turned_cable_turns_as_a_turned_bar_does():
    core = single_conductors(multicore(turn=90))[0]
    assert (core.u, core.v) == pytest.approx((0.99, 2.0))


def test_net_current_only_is_one_conductor_with_all_loads():
    (whole,) = single_conductors(multicore(model="net current only"))
    assert whole.name == "W1"
    assert len(whole.loads) == 4
    assert whole.shape == Round(diameter=0.05)


def test_a_load_without_a_core_is_refused():
    with pytest.raises(UserError, match=r"carries N of circuit F1.*cores L1, L2, L3"):
        single_conductors(multicore(cores=("L1", "L2", "L3")))


def test_two_slots_of_one_name_are_refused():
    twin = Slot(name="A", u=0, v=0)
    with pytest.raises(UserError, match="2 slots of the section are called “A”"):
        slots(FreeSection(slots=(twin, twin)))


def test_total_adds_per_circuit_and_label_and_drops_what_vanishes():
    def load(label, share):
        return SlotLoad(circuit="F1", label=label, share=share)

    thirds = [load("L1", 1 / 3)] * 3
    assert total([*thirds, load("N", 0.5), load("N", -0.5)]) == (load("L1", 1.0),)
