"""Edits of sections: what stays where, and what goes along."""

from __future__ import annotations

import pytest
from msgspec.structs import replace

from engine.edits import checked
from engine.entered_values import value_at, with_value
from engine.errors import UserError
from engine.formations import (
    FORMATIONS,
    as_free,
    formation_of,
    net_loads,
    with_formation,
    with_sets,
    without_set,
)
from engine.items import ValueOrigin
from engine.layout import Layout
from engine.origins import is_assumed
from engine.runs import (
    Bar,
    CircuitShare,
    Flat,
    FreeSection,
    Joint,
    Multicore,
    ParallelSets,
    Quad,
    Round,
    Run,
    Sandwich,
    Section,
    SlotEnd,
    SlotLoad,
    StackedBars,
    Trefoil,
    Vertical,
)
from engine.section_edits import (
    carrying,
    mirrored,
    swapped,
    with_conductor,
    with_loads,
    with_order,
    with_section,
    with_shape,
    with_slot_at,
    without,
)
from engine.sections import slots

CARRIED = (CircuitShare(circuit="C1"),)
FLAT = Flat(circuits=CARRIED, order=("L1", "L2", "L3", "N"), pitch=0.1)
SETS = ParallelSets(
    circuits=CARRIED, orders=(("L1", "L2", "L3", "N"), ("N", "L3", "L2", "L1"))
)
SECTIONS: tuple[Section, ...] = (
    FLAT,
    Vertical(circuits=CARRIED),
    Trefoil(circuits=CARRIED, order=("L1", "L2", "L3", "N"), neutral_pitch=0.05),
    Trefoil(circuits=CARRIED, apex="down"),
    Quad(circuits=CARRIED),
    SETS,
    replace(SETS, formation="trefoil", direction="down"),
    replace(SETS, formation="quad"),
    replace(SETS, formation="vertical", direction="down"),
    StackedBars(circuits=CARRIED, bars_per_pole=3),
    StackedBars(circuits=CARRIED, bars_per_pole=2, stand="flat", direction="down"),
    Sandwich(circuits=CARRIED),
    as_free(FLAT),
)


def places(section: Section) -> dict[str, tuple[float, float]]:
    return {slot.name: (slot.u, slot.v) for slot in slots(section)}


def currents(section: Section) -> dict[tuple[str, str], float]:
    return {
        (load.circuit, load.label): round(load.share, 12) for load in net_loads(section)
    }


def run_of(section: Section) -> Run:
    return Run(id="run", route=((0, 0, 0), (1, 0, 0)), section=section)


@pytest.mark.parametrize("section", SECTIONS)
@pytest.mark.parametrize("formation", FORMATIONS)
def test_another_formation_carries_the_same_currents(section, formation):
    if formation == "quad" and {"N"}.isdisjoint(
        label for _, label in currents(section)
    ):
        with pytest.raises(UserError, match="4 conductors, not 3"):
            with_formation(section, formation)
        return
    made = with_formation(section, formation)
    assert formation_of(made) == formation
    assert currents(made) == currents(section)
    checked(run_of(made))


@pytest.mark.parametrize("section", SECTIONS)
def test_a_free_section_has_every_conductor_where_it_was(section):
    assert slots(as_free(section)) == slots(section)


@pytest.mark.parametrize("section", SECTIONS)
@pytest.mark.parametrize(
    ("axis", "su", "sv"), [("left-right", -1, 1), ("top-bottom", 1, -1)]
)
def test_a_mirror_moves_each_load_to_its_image(section, axis, su, sv):
    made, names = mirrored(section, axis)
    before = {slot.name: slot for slot in slots(section)}
    after = {slot.name: slot for slot in slots(made)}
    assert sorted(names) == sorted(before)
    assert sorted(names.values()) == sorted(after)
    for old, new in names.items():
        assert (after[new].u, after[new].v) == pytest.approx(
            (su * before[old].u, sv * before[old].v), abs=1e-9
        )
        assert after[new].loads == before[old].loads


def test_formations_stay_formations_upside_down():
    free = [
        s for s in SECTIONS if isinstance(mirrored(s, "top-bottom")[0], FreeSection)
    ]
    assert [formation_of(section) for section in free] == ["parallel sets", "free"]


@pytest.mark.parametrize("section", SECTIONS)
def test_swapping_twice_is_no_change(section):
    first, second = slots(section)[0].name, slots(section)[-1].name
    once = swapped(section, first, second)
    assert swapped(once, first, second) == section
    assert currents(once) == currents(section)


def test_swapped_phases_stand_in_each_others_places():
    made = swapped(FLAT, "L1", "L3")
    assert made.order == ("L3", "L2", "L1", "N")
    free = swapped(as_free(FLAT), "L1", "L3")
    assert places(free)["L1"] == places(FLAT)["L3"]
    assert places(free) == places(made)


def test_swapping_one_set_leaves_the_other():
    made = swapped(SETS, "L1.1", "L2.1")
    assert made.orders == (("L2", "L1", "L3", "N"), ("N", "L3", "L2", "L1"))


def test_bars_of_one_pole_swap_together():
    section = StackedBars(circuits=CARRIED, bars_per_pole=2)
    assert swapped(section, "L1.2", "N.1").order == ("N", "L2", "L3", "L1")


def test_swapping_what_is_not_there_says_so():
    with pytest.raises(UserError, match=r"no conductor L9.*L1, L2, L3, N"):
        swapped(FLAT, "L1", "L9")


def test_a_dragged_conductor_frees_the_section():
    made = with_slot_at(FLAT, "L2", 0.3, -0.02)
    assert isinstance(made, FreeSection)
    assert places(made) == {**places(FLAT), "L2": (0.3, -0.02)}


def test_more_sets_share_the_current():
    three = with_sets(SETS, 3)
    assert three.orders == (*SETS.orders, SETS.orders[1])
    assert {round(load.share, 9) for s in slots(three) for load in s.loads} == {
        round(1 / 3, 9)
    }
    assert without_set(three, 0).orders == (SETS.orders[1],) * 2
    with pytest.raises(UserError, match="last set"):
        without_set(with_sets(SETS, 1), 0)
    with pytest.raises(UserError, match="between 1 and 20"):
        with_sets(SETS, 21)


def test_sets_of_a_trefoil_do_not_overlap():
    made = with_sets(Trefoil(circuits=CARRIED), 2)
    assert made.formation == "trefoil"
    right_of_first = max(slot.u for slot in slots(made)[:3])
    left_of_second = min(slot.u for slot in slots(made)[3:])
    assert left_of_second - right_of_first > made.shape.diameter - 1e-9


def test_orders_of_sets_change_one_by_one():
    made = with_order(SETS, ("L3", "L2", "L1", "N"), at_set=1)
    assert made.orders == (SETS.orders[0], ("L3", "L2", "L1", "N"))
    with pytest.raises(UserError, match="no order"):
        with_order(as_free(FLAT), ("L1",))


def test_a_formation_takes_the_shapes_it_has_words_for():
    assert with_shape(FLAT, Round(diameter=0.03)).shape == Round(diameter=0.03)
    sandwich = with_shape(Sandwich(circuits=CARRIED), Bar(width=0.2, thickness=0.005))
    assert (sandwich.width, sandwich.thickness) == (0.2, 0.005)
    one = with_shape(FLAT, Round(diameter=0.03), ["N"])
    assert isinstance(one, FreeSection)
    assert [type(slot.shape) for slot in one.slots] == [Bar, Bar, Bar, Round]
    cable = Multicore(
        outside_diameter=0.05, core_diameter=0.015, core_circle_diameter=0.02
    )
    assert isinstance(with_shape(FLAT, cable), FreeSection)


def test_other_circuits_take_over_the_loads():
    other = (CircuitShare(circuit="C2"),)
    assert currents(carrying(FLAT, other)) == currents(carrying(as_free(FLAT), other))
    assert {circuit for circuit, _ in currents(carrying(FLAT, other))} == {"C2"}


def test_one_slot_takes_loads_of_its_own():
    loads = (SlotLoad(circuit="C2", label="PE", share=0.5),)
    made = with_loads(FLAT, "N", loads)
    assert made.slots[3].loads == loads
    assert made.slots[0] == slots(FLAT)[0]


def test_conductors_come_and_go():
    assert with_conductor(FLAT, "PE", "C1").order == ("L1", "L2", "L3", "N", "PE")
    free = with_conductor(as_free(FLAT), "N", "C1")
    assert [slot.name for slot in free.slots][-1] == "N.2"
    assert free.slots[-1].u > free.slots[-2].u
    assert without(FLAT, ["L2"]).order == ("L1", "L3", "N")
    assert isinstance(without(SETS, ["L1.2"]), FreeSection)
    with pytest.raises(UserError, match="at least one"):
        without(FLAT, ["L1", "L2", "L3", "N"])
    with pytest.raises(UserError, match="quad takes 4"):
        with_conductor(Quad(circuits=CARRIED), "PE", "C1")


def test_joints_follow_mirrored_conductors():
    run = run_of(SETS)
    ends = tuple(SlotEnd(item="run", slot=s, end="end") for s in ("L1.1", "L1.2"))
    layout = Layout(runs=(run,), joints=(Joint(id="joint", ends=ends),))
    image, names = mirrored(SETS)
    after = with_section(layout, run, image, names)
    assert [end.slot for end in after.joints[0].ends] == ["L1.2", "L1.1"]


def test_a_confirmed_value_that_changes_is_an_assumption_again():
    section = ValueOrigin(field="section", kind="confirmed", by="A. Planner")
    pitch = ValueOrigin(field="section.pitch", kind="measured")
    run = replace(run_of(FLAT), origins=(section, pitch))
    assert not is_assumed(run, "section.pitch")
    new = with_value(run, "section.pitch", 0.12)
    assert value_at(new, "section.pitch") == 0.12
    assert is_assumed(new, "section.pitch")
    assert not is_assumed(new, "section.shape.width")
    assert is_assumed(new, "route")
    assert not is_assumed(new, "containment")


def test_an_unchanged_value_keeps_its_origin():
    run = replace(
        run_of(FLAT), origins=(ValueOrigin(field="section", kind="confirmed"),)
    )
    assert with_value(run, "section.pitch", 0.1) is run
