"""Layouts to conductors: links, equipment, and Kirchhoff wherever conductors meet.

`charge` adds up the current that reaches each point of space at the ends of the
conductors themselves, so it checks nodes, links and equipment together.
"""

from __future__ import annotations

from collections import defaultdict

import numpy as np
import pytest
from msgspec.structs import replace

from engine.conductor import bundles_of
from engine.conductors import conductors, loose_ends, nodes, run_problem
from engine.edits import replaced
from engine.equipment import (
    Board,
    ConductorLoop,
    Dropper,
    Pole,
    Terminal,
    Transformer,
    Way,
)
from engine.errors import UserError
from engine.layout import Layout
from engine.runs import (
    Bar,
    CircuitShare,
    Connection,
    Flat,
    FreeSection,
    Joint,
    Multicore,
    Round,
    Run,
    Sandwich,
    Slot,
    SlotEnd,
    SlotLoad,
    StackedBars,
)

LABELS = ("L1", "L2", "L3", "N")
FEEDERS = ("F1", "F2", "F3", "F4", "F5")
F1 = (CircuitShare(circuit="F1"),)
ALL = tuple(CircuitShare(circuit=name) for name in FEEDERS)
THREE = ("L1", "L2", "L3")


def phasors(stray_of=""):
    """Phasors per circuit and label, of which each circuit's sum is zero."""
    rng = np.random.default_rng(7)
    values = {}
    for circuit in FEEDERS:
        labels = (*LABELS, "stray") if circuit == stray_of else LABELS
        currents = rng.normal(size=len(labels)) + 1j * rng.normal(size=len(labels))
        currents[-1] -= currents.sum()
        values.update({(circuit, x): i for x, i in zip(labels, currents, strict=True)})
    return values


def current(loads, values):
    return sum(load.share * values[load.circuit, load.label] for load in loads)


def charge(layout, values=None):
    """Current that reaches each end point, where it is not zero."""
    values = values or phasors()
    sums = defaultdict(complex)
    for conductor in conductors(layout):
        along = current(conductor.loads, values)
        sums[tuple(np.round(conductor.path[0], 7) + 0.0)] -= along
        sums[tuple(np.round(conductor.path[-1], 7) + 0.0)] += along
    return {point: total for point, total in sums.items() if abs(total) > 1e-9}


def by_key(layout):
    found = {c.key: c for c in conductors(layout)}
    assert len(found) == len(conductors(layout))
    return found


def flat_run(**changes):
    run = Run(
        id="W1", route=((0, 0, 0), (4, 0, 0)), section=Flat(circuits=F1, pitch=0.2)
    )
    return replace(run, **changes)


# Room A of the worked examples


def room_a(**board_changes):
    ys = (1.50, 1.95, 2.40, 2.85)
    zs = (2.10, 2.00, 1.90, 1.60)
    xs = [6.00 - 0.15 * (k - 1) for k in range(4)]
    t1 = Transformer(
        id="T1",
        terminals=tuple(
            Terminal(label=label, at=(1.0, y, 1.9))
            for label, y in zip(LABELS, ys, strict=True)
        ),
        star=(1.0, 2.175, 1.5),
    )
    bar = Bar(width=0.12, thickness=0.01, turn=90)
    ways = [(5.2, False), (4.4, True), (3.6, True), (2.8, True), (6.8, True)]
    b1 = Board(
        id="B1",
        origin=(0.0, 4.60),
        poles=tuple(
            Pole(label=label, z=z, fed_at=x, shape=bar)
            for label, z, x in zip(LABELS, zs, xs, strict=True)
        ),
        ways=tuple(
            Way(
                name=name,
                position=position,
                circuits=(CircuitShare(circuit=name),),
                dropper=Dropper(
                    pitch=0.08,
                    setback=0.15,
                    foot_z=0.8,
                    shape=Bar(width=0.04, thickness=0.01),
                ),
                closed=closed,
            )
            for name, (position, closed) in zip(FEEDERS, ways, strict=True)
        ),
    )
    link = [
        Run(
            id=f"link {label}",
            kind="busbar",
            route=(
                (1.0, ys[k], 1.9),
                (1.0, ys[k], 3.0),
                (1.3, 1.95 + 0.15 * (k - 1), 3.0),
                (xs[k], 1.95 + 0.15 * (k - 1), 3.0),
                (xs[k], 4.45, 3.0),
                (xs[k], 4.45, zs[k]),
                (xs[k], 4.60, zs[k]),
            ),
            section=StackedBars(
                circuits=ALL,
                order=(label,),
                bars_per_pole=2 if k < 3 else 1,
                width=0.12,
                thickness=0.01,
                gap=0.01,
            ),
            start=Connection(equipment="T1"),
            end=Connection(equipment="B1"),
        )
        for k, label in enumerate(LABELS)
    ]
    riser = Run(
        id="riser",
        route=(
            (5.2, 4.9, 0.5),
            (5.2, 5.3, 0.5),
            (5.2, 5.3, 3.2),
            (5.2, 6.25, 3.2),
            (5.2, 6.25, 9.0),
        ),
        section=Flat(
            circuits=F1, order=LABELS * 2, pitch=0.06, shape=Round(diameter=0.028)
        ),
        start=Connection(equipment="B1", way="F1"),
    )
    load = SlotLoad(circuit="F1", label="stray")
    stray = Run(
        id="stray",
        kind="stray path",
        route=(
            (1.0, 2.175, 1.5),
            (1.0, 2.85, 1.9),
            (0.6, 2.85, 1.9),
            (0.6, 0.4, 3.75),
            (9.8, 0.4, 3.75),
            (9.8, 0.4, 9.0),
            (9.8, 6.25, 9.0),
            (5.2, 6.25, 9.0),
        ),
        section=FreeSection(slots=(Slot(name="stray", u=0, v=0, loads=(load,)),)),
        start=Connection(equipment="T1", terminal="star"),
    )
    ends = [
        SlotEnd(item="riser", slot=f"{label}.{n}", end="end")
        for label in LABELS
        for n in (1, 2)
    ]
    top = Joint(
        id="top",
        ends=(*ends, SlotEnd(item="stray", slot="stray", end="end")),
        at=(5.2, 6.25, 9.0),
    )
    return Layout(
        equipment=(t1, replace(b1, **board_changes)),
        runs=(*link, riser, stray),
        joints=(top,),
    )


def test_room_a_closes_at_every_point():
    assert charge(room_a(), phasors("F1")) == {}
    assert loose_ends(room_a()) == ()


def test_room_a_has_no_assumed_links():
    assert not [c.key for c in conductors(room_a()) if c.role == "closing link"]
    assert not [node for node in nodes(room_a()) if node.links]


def test_room_a_obeys_kirchhoff_at_every_node():
    found = nodes(room_a())
    kinds = [node.kind for node in found]
    assert kinds.count("star") == kinds.count("joint") == 1
    assert kinds.count("terminal") == 4
    # Four feet of F1, four closed ways; the bars' incoming ends.
    assert kinds.count("way") == 8
    assert kinds.count("board") == 4
    values = phasors("F1")
    for node in found:
        assert abs(current(node.inflow, values)) < 1e-9
    for node in found:
        if node.kind in ("terminal", "board"):
            assert node.inflow == ()
    (star,) = [node for node in found if node.kind == "star"]
    assert star.items == ("T1", "link L1", "link L2", "link L3", "link N", "stray")
    # The star sends out every line, the neutrals and the stray: -1 of each.
    assert {(x.circuit, x.label): x.share for x in star.inflow} == {
        key: -1.0 for key in values
    }


def test_room_a_bars_taper_from_where_they_are_fed():
    found = by_key(room_a())
    pieces = [found[f"B1/bar L1/{n}"] for n in (1, 2, 3, 4, 5)]
    assert [[load.circuit for load in p.loads] for p in pieces] == [
        ["F5"], ["F1", "F2", "F3", "F4"], ["F2", "F3", "F4"], ["F3", "F4"], ["F4"],
    ]  # fmt: skip
    assert [p.path[0, 0] for p in pieces] == pytest.approx([6.15, 6.15, 5.2, 4.4, 3.6])
    assert [p.path[1, 0] for p in pieces] == pytest.approx([6.8, 5.2, 4.4, 3.6, 2.8])
    for piece in pieces:
        assert piece.path[:, 1] == pytest.approx([4.6, 4.6])
        assert piece.path[:, 2] == pytest.approx([2.1, 2.1])
        # On edge: the width is upright.
        assert np.abs(piece.axes[:, 0]) == pytest.approx(np.array([[0, 0, 1]] * 2))


def test_room_a_droppers_stand_where_described():
    found = by_key(room_a())
    for k, (label, z) in enumerate(zip(LABELS, (2.1, 2.0, 1.9, 1.6), strict=True)):
        x = 4.4 + 0.08 * (k - 1.5)
        assert found[f"B1/F2/{label}"].path == pytest.approx(
            np.array([(4.4, 4.6, z), (x, 4.75, z), (x, 4.75, 0.8)])
        )
        closing = found[f"B1/closing F2/F2/{label}"]
        assert closing.path == pytest.approx(
            np.array([(x, 4.75, 0.8), (4.4, 4.75, 0.8)])
        )
        assert closing.role == "equipment"


def test_room_a_riser_fans_out_to_the_dropper_of_its_pole():
    found = by_key(room_a())
    link = found["riser/start to B1/N.2"]
    assert link.role == "joint link"
    assert link.path == pytest.approx(
        np.array([(5.2 + 0.08 * 1.5, 4.75, 0.8), (5.2 + 0.06 * 3.5, 4.9, 0.5)])
    )
    assert link.loads == (SlotLoad(circuit="F1", label="N", share=0.5),)
    top = found["riser/end to top/L1.1"]
    assert top.path == pytest.approx(np.array([(4.99, 6.25, 9.0), (5.2, 6.25, 9.0)]))


def test_room_a_link_splits_between_two_bars_ten_millimetres_apart():
    found = by_key(room_a())
    a, b = found["link L2/L2.1"], found["link L2/L2.2"]
    assert np.linalg.norm(a.path[0] - b.path[0]) == pytest.approx(0.02)
    assert {load.share for load in a.loads} == {0.5}
    assert found["T1/L2"].path == pytest.approx(
        np.array([(1.0, 2.175, 1.5), (1.0, 1.95, 1.9)])
    )
    assert {(x.circuit, x.share) for x in found["T1/L2"].loads} == {
        (name, 1.0) for name in FEEDERS
    }


def test_poles_drawn_as_runs_switch_together():
    groups = {c.item: c.group for c in conductors(room_a())}
    assert {groups[f"link {label}"] for label in LABELS} == {"T1"}
    assert groups["riser"] == "riser"
    assert groups["stray"] == "stray"
    assert groups["B1"] == "B1"


def test_a_board_along_another_direction_closes_too():
    turned = room_a(direction=37.0)
    # The links still reach their sockets, wherever these are.
    assert charge(turned, phasors("F1")) == {}


def test_a_pole_that_no_way_uses_carries_nothing():
    pe = Pole(label="PE", z=0.3, fed_at=6.0)
    board = room_a().equipment[1]
    spare = Way(name="spare", position=5.0)
    layout = room_a(poles=(*board.poles, pe), ways=(*board.ways, spare))
    named = [c for c in conductors(layout) if c.key.startswith("B1/spare")]
    assert not named
    assert all(c.loads for c in conductors(layout) if c.item == "B1")


# Free ends


def test_a_free_end_is_closed_across_its_section():
    layout = Layout(runs=(flat_run(),))
    found = by_key(layout)
    assert found["W1/closing start/L1"].path == pytest.approx(
        np.array([(0, 0, 0), (0, 0.3, 0)])
    )
    assert found["W1/closing end/L1"].path == pytest.approx(
        np.array([(4, 0.3, 0), (4, 0, 0)])
    )
    assert charge(layout) == {}
    for node in nodes(layout):
        assert (node.kind, node.links, node.items) == ("free end", True, ("W1",))


def test_net_current_stays_at_a_free_end():
    layout = Layout(runs=(flat_run(section=Flat(circuits=F1, order=THREE)),))
    start, end = nodes(layout)
    assert {x.label: x.share for x in start.inflow} == dict.fromkeys(THREE, -1.0)
    assert {x.label: x.share for x in end.inflow} == dict.fromkeys(THREE, 1.0)
    assert end.place == pytest.approx((4, 0, 0))


def test_a_single_free_conductor_gets_no_link_but_a_node():
    layout = Layout(runs=(flat_run(section=Flat(circuits=F1, order=("L1",))),))
    assert len(conductors(layout)) == 1
    assert [(n.kind, n.links) for n in nodes(layout)] == [("free end", False)] * 2


def test_only_the_free_slots_of_an_end_are_closed():
    joint = Joint(
        id="J",
        ends=(
            SlotEnd(item="W1", slot="N", end="end"),
            SlotEnd(item="W2", slot="N", end="start"),
        ),
    )
    layout = Layout(
        runs=(flat_run(), flat_run(id="W2", route=((5, 0, 0), (9, 0, 0)))),
        joints=(joint,),
    )
    found = by_key(layout)
    assert "W1/closing end/N" not in found
    # The middle of L1, L2, L3 is L2's place: it needs no link.
    assert "W1/closing end/L2" not in found
    assert found["W1/closing end/L1"].path[-1] == pytest.approx((4, 0.1, 0))
    assert found["W1/end to J/N"].path == pytest.approx(
        np.array([(4, -0.3, 0), (4.5, -0.3, 0)])
    )


# Joints


def test_a_tap_divides_the_current():
    """A main run of two circuits meets one run of each."""
    both = (CircuitShare(circuit="F1"), CircuitShare(circuit="F2"))
    runs = (
        flat_run(id="main", section=Flat(circuits=both)),
        flat_run(id="on", route=((4, 0, 0), (8, 0, 0))),
        flat_run(
            id="tap",
            route=((4, 0, 0), (4, 0, -2)),
            section=Flat(circuits=(CircuitShare(circuit="F2"),), pitch=0.05),
        ),
    )
    joints = tuple(
        Joint(
            id=f"J {label}",
            ends=(
                SlotEnd(item="main", slot=label, end="end"),
                SlotEnd(item="on", slot=label, end="start"),
                SlotEnd(item="tap", slot=label, end="start"),
            ),
        )
        for label in LABELS
    )
    layout = Layout(runs=runs, joints=joints)
    assert charge(layout) == {}
    taps = [node for node in nodes(layout) if node.kind == "joint"]
    assert [node.inflow for node in taps] == [()] * 4
    without = Layout(runs=runs[:2], joints=joints)
    assert len(loose_ends(without)) == 4
    (node, *_) = [node for node in nodes(without) if node.kind == "joint"]
    assert node.inflow == (SlotLoad(circuit="F2", label="L1", share=1.0),)


def test_a_star_closure_of_one_slot_runs():
    runs = tuple(
        flat_run(
            id=label,
            route=((0, y, 0), (3, y, 0)),
            section=Flat(circuits=F1, order=(label,)),
        )
        for y, label in enumerate(LABELS)
    )
    joints = tuple(
        Joint(
            id=end,
            ends=tuple(SlotEnd(item=x, slot=x, end=end) for x in LABELS),
            at=at,
        )
        for end, at in (("start", None), ("end", (5, 1, 1)))
    )
    layout = Layout(runs=runs, joints=joints)
    assert charge(layout) == {}
    found = by_key(layout)
    assert found["L1/start to start/L1"].path[0] == pytest.approx((0, 1.5, 0))
    assert found["L1/end to end/L1"].path[-1] == pytest.approx((5, 1, 1))
    # Poles of their own switch together.
    assert {c.group for c in found.values()} == {"start"}


def test_a_joint_end_named_twice_counts_once():
    end = SlotEnd(item="W1", slot="L1", end="end")
    joints = (Joint(id="J1", ends=(end, end)), Joint(id="J2", ends=(end, end)))
    layout = Layout(runs=(flat_run(),), joints=joints)
    assert len(loose_ends(layout)) == 3
    assert [x.sentence for x in loose_ends(layout)][2].startswith(
        "The end of slot L1 of run W1 is named twice, by joint J1 and by joint J2"
    )
    (node,) = [node for node in nodes(layout) if node.kind == "joint"]
    assert node.inflow == (SlotLoad(circuit="F1", label="L1", share=1.0),)


@pytest.mark.parametrize(
    "end",
    [
        SlotEnd(item="gone", slot="L1", end="end"),
        SlotEnd(item="W1", slot="L9", end="end"),
        SlotEnd(item="W1", slot="L1", end="terminal"),
        SlotEnd(item="T1", slot="L9", end="terminal"),
    ],
)
def test_a_reference_that_leads_nowhere_is_told(end):
    t1 = room_a().equipment[0]
    joint = Joint(id="J", ends=(end, SlotEnd(item="W1", slot="L1", end="start")))
    layout = Layout(equipment=(t1,), runs=(flat_run(),), joints=(joint,))
    (loose,) = loose_ends(layout)
    assert loose.sentence.startswith("Joint J names")
    assert "J" in loose.items


def test_a_joint_on_terminals_closes_a_transformer():
    t1 = room_a().equipment[0]
    joints = tuple(
        Joint(
            id=f"J {label}",
            ends=(
                SlotEnd(item="T1", slot=label, end="terminal"),
                SlotEnd(item="W1", slot=label, end="start"),
            ),
            at=(0.5, 2.0, 1.0),
        )
        for label in LABELS
    )
    layout = Layout(equipment=(t1,), runs=(flat_run(),), joints=joints)
    assert charge(layout) == {}
    found = by_key(layout)
    # From the star to the terminal, on to the joint and into the run.
    assert found["T1/L1"].loads == (SlotLoad(circuit="F1", label="L1", share=1.0),)
    assert found["T1/J L1/L1"].path[-1] == pytest.approx((0.5, 2.0, 1.0))
    assert found["W1/start to J L1/L1"].path[0] == pytest.approx((0.5, 2.0, 1.0))


def test_a_run_that_ends_at_a_transformer_brings_its_current_there():
    t1 = room_a().equipment[0]
    layout = Layout(equipment=(t1,), runs=(flat_run(end=Connection(equipment="T1")),))
    assert by_key(layout)["T1/L3"].loads[0].share == -1.0
    (star,) = [node for node in nodes(layout) if node.kind == "star"]
    assert {x.share for x in star.inflow} == {1.0}


def test_two_terminals_in_one_joint_are_refused():
    t1 = room_a().equipment[0]
    ends = tuple(SlotEnd(item="T1", slot=x, end="terminal") for x in ("L1", "L2"))
    with pytest.raises(UserError, match="Joint J joins 2 transformer terminals"):
        conductors(Layout(equipment=(t1,), joints=(Joint(id="J", ends=ends),)))


# Boards


def small_board(**changes):
    board = Board(
        id="B",
        origin=(0.0, 0.0),
        poles=tuple(
            Pole(label=label, z=2.0 - 0.1 * k, fed_at=0.0)
            for k, label in enumerate(LABELS)
        ),
        ways=(Way(name="F1", position=1.0, circuits=F1),),
    )
    return replace(board, **changes)


def test_a_board_by_itself_is_closed_by_assumed_links():
    layout = Layout(equipment=(small_board(),))
    assert {n.kind: n.links for n in nodes(layout)} == {"board": True, "way": True}
    assert charge(layout) == {}
    assert len([c for c in conductors(layout) if c.role == "closing link"]) == 8


def test_a_way_without_dropper_ends_on_the_bar():
    run = flat_run(
        route=((1.0, 0.5, 1.5), (1.0, 4.0, 1.5)),
        start=Connection(equipment="B", way="F1"),
    )
    found = by_key(Layout(equipment=(small_board(),), runs=(run,)))
    assert found["W1/start to B/L2"].path[0] == pytest.approx((1.0, 0.0, 1.9))
    assert "B/closing F1/F1/L2" not in found


def test_a_run_with_another_circuit_than_its_way_does_not_close():
    section = Flat(circuits=(CircuitShare(circuit="F2"),))
    run = flat_run(section=section, start=Connection(equipment="B", way="F1"))
    layout = Layout(equipment=(small_board(),), runs=(run,))
    ways = [node for node in nodes(layout) if node.kind == "way"]
    assert {(x.circuit, x.share) for x in ways[0].inflow} == {("F1", 1), ("F2", -1)}


def test_a_joint_at_a_way_takes_what_the_way_supplies():
    run = flat_run(route=((1.0, 0.5, 1.5), (1.0, 4.0, 1.5)))
    joints = tuple(
        Joint(
            id=f"J {label}",
            ends=(
                SlotEnd(item="B", slot=f"F1/{label}", end="terminal"),
                SlotEnd(item="W1", slot=label, end="start"),
            ),
        )
        for label in LABELS
    )
    layout = Layout(equipment=(small_board(),), runs=(run,), joints=joints)
    assert [n.inflow for n in nodes(layout) if n.kind == "joint"] == [()] * 4
    assert charge(layout) == {}


def test_bars_of_one_label_share_its_current():
    poles = small_board().poles
    doubled = (*poles, replace(poles[0], across=0.2))
    found = by_key(Layout(equipment=(small_board(poles=doubled),)))
    assert found["B/bar L1.1/1"].loads[0].share == 0.5
    assert found["B/bar L1.2/1"].loads[0].share == 0.5
    assert found["B/bar L2/1"].loads[0].share == 1.0
    # Across is to the left of the board's direction.
    assert found["B/bar L1.2/1"].path[:, 1] == pytest.approx([0.2, 0.2])


def test_two_ways_of_one_name_are_refused():
    way = small_board().ways[0]
    with pytest.raises(UserError, match="Board B: two ways are called “F1”"):
        conductors(Layout(equipment=(small_board(ways=(way, way)),)))


def test_a_connection_that_leads_nowhere_leaves_the_end_free():
    runs = (
        flat_run(start=Connection(equipment="gone")),
        flat_run(id="W2", start=Connection(equipment="B", way="F9")),
    )
    layout = Layout(equipment=(small_board(),), runs=runs)
    assert [x.items for x in loose_ends(layout)] == [("W1",)] + [("W2", "B")] * 4
    assert "way F9 of B, which has no end L1" in loose_ends(layout)[1].sentence
    assert "W1/closing start/L1" in by_key(layout)


# Loops, cables, shapes


def test_a_loop_carries_its_turns_and_closes():
    loop = ConductorLoop(
        id="coil",
        path=((0, 0, 0), (1, 0, 0), (1, 1, 0), (0, 1, 0)),
        circuit="F1",
        label="L1",
        share=0.5,
        turns=12,
    )
    (found,) = conductors(Layout(equipment=(loop,)))
    assert found.loads == (SlotLoad(circuit="F1", label="L1", share=6.0),)
    assert len(found.path) == 5
    assert found.path[0] == pytest.approx(found.path[-1])
    assert found.axes[0] == pytest.approx(found.axes[-1])
    assert nodes(Layout(equipment=(loop,))) == ()
    closed = replace(loop, path=(*loop.path, loop.path[0]))
    (again,) = conductors(Layout(equipment=(closed,)))
    assert again.path == pytest.approx(found.path)


def test_cores_of_a_cable_fan_out_to_their_own_terminals():
    cable = Multicore(
        outside_diameter=0.05, core_diameter=0.015, core_circle_diameter=0.02
    )
    loads = tuple(SlotLoad(circuit="F1", label=x) for x in LABELS)
    slot = Slot(name="cable", u=0, v=0, shape=cable, loads=loads)
    run = flat_run(section=FreeSection(slots=(slot,)), start=Connection(equipment="T1"))
    ends = (SlotEnd(item="W1", slot="cable", end="end"),)
    joint = Joint(id="J", ends=(*ends, *ends), at=(4.5, 0, 0))
    layout = Layout(equipment=room_a().equipment[:1], runs=(run,), joints=(joint,))
    found = by_key(layout)
    assert found["W1/start to T1/cable/L3"].path[0] == pytest.approx((1.0, 2.4, 1.9))
    assert charge(layout) == {}


def test_axes_of_a_bar_carry_its_filaments_through_a_bend():
    section = StackedBars(circuits=F1, order=("L1",), width=0.1, thickness=0.02)
    run = flat_run(route=((0, 0, 0), (2, 0, 0), (2, 2, 0)), section=section)
    (bar,) = conductors(Layout(runs=(run,)))
    assert np.abs(bar.axes[:, 0]) == pytest.approx(np.array([[0, 0, 1]] * 3))
    inner = bar.path + 0.01 * bar.axes[:, 1]
    assert np.abs(inner[:, :2] - bar.path[:, :2]) == pytest.approx(
        np.array([(0, 0.01), (0.01, 0.01), (0.01, 0)])
    )


def test_a_bar_on_the_route_keeps_its_width_where_it_turns():
    section = Flat(circuits=F1, order=("L1",), shape=Bar(width=0.1, thickness=0.01))
    run = flat_run(route=((0, 0, 0), (2, 0, 0), (4, 0, 0)), section=section)
    (bar,) = conductors(Layout(runs=(replace(run, turns=(0, 90)),)))
    assert len(bar.path) == 4
    assert bar.path[:, 0] == pytest.approx([0, 1.999, 2.001, 4])
    assert np.linalg.norm(bar.axes, axis=2) == pytest.approx(np.ones((4, 2)))
    assert np.abs(bar.axes[:2, 0]) == pytest.approx(np.array([[0, 1, 0]] * 2))
    assert np.abs(bar.axes[2:, 0]) == pytest.approx(np.array([[0, 0, 1]] * 2))
    cable = replace(run, section=Flat(circuits=F1, order=("L1",), shape=Round()))
    (cable,) = conductors(Layout(runs=(replace(cable, turns=(0, 90)),)))
    assert len(cable.path) == 3


def test_axes_of_every_conductor_span_its_section():
    for conductor in conductors(room_a()):
        assert conductor.axes.shape == (len(conductor.path), 2, 3)
        assert not conductor.path.flags.writeable
        assert not conductor.axes.flags.writeable
        steps = np.diff(conductor.path, axis=0)
        tangents = steps / np.linalg.norm(steps, axis=1)[:, None]
        for axes in (conductor.axes[:-1], conductor.axes[1:]):
            across = (
                axes - (axes * tangents[:, None]).sum(2)[..., None] * tangents[:, None]
            )
            assert np.linalg.norm(across, axis=2) == pytest.approx(1.0)
            assert (across[:, 0] * across[:, 1]).sum(1) == pytest.approx(0, abs=1e-12)


def test_a_leg_shorter_than_the_bends_is_refused_with_its_run():
    run = flat_run(
        name="Riser to roof", route=((0, 0, 0), (2, 0, 0), (2, 0.3, 0), (0, 0.3, 0))
    )
    sentence = run_problem(Layout(), run)
    assert sentence.startswith("Run Riser to roof (W1): leg 2 of the route is 0.300 m")
    with pytest.raises(UserError, match="leg 2 of the route"):
        conductors(Layout(runs=(run,)))
    assert run_problem(Layout(), flat_run()) is None


# Identity


def test_unchanged_runs_give_identical_conductors():
    layout = room_a()
    before = {id(c) for c in conductors(layout) if c.role == "run"}
    moved = replace(layout.runs[-1], note="moved")
    after = conductors(replace(layout, runs=(*layout.runs[:-1], moved)))
    changed = [c.item for c in after if c.role == "run" and id(c) not in before]
    assert changed == ["stray"]


def test_closing_links_are_identical_too():
    section = Sandwich(circuits=F1)
    first = flat_run(section=section)
    one = conductors(Layout(runs=(first,)))
    two = conductors(Layout(runs=(first, flat_run(id="W2"))))
    assert {id(c) for c in one} <= {id(c) for c in two}


def test_what_did_not_move_comes_as_the_identical_bundle_again():
    layout = room_a()
    run = layout.runs[0]
    route = tuple((x + 0.1, y, z) for x, y, z in run.route)
    moved = replaced(layout, replace(run, route=route))
    before, after = conductors(layout), conductors(moved)
    still = {id(bundle) for bundle in before.bundles}
    alone = [b for b in after.bundles if b[0].role == "run" and b[0].item != run.id]
    assert alone
    assert all(id(bundle) in still for bundle in alone)
    own = [b for b in after.bundles if b[0].role == "run" and b[0].item == run.id]
    assert own
    assert not any(id(bundle) in still for bundle in own)


def test_bundles_are_all_conductors_in_order_each_of_one_kind():
    found = conductors(room_a())
    assert [c for bundle in found.bundles for c in bundle] == list(found)
    for bundle in found.bundles:
        assert len({(c.group, c.item, c.role) for c in bundle}) == 1


def test_bundles_of_any_sequence_are_told_by_what_they_share():
    found = list(conductors(room_a()))
    assert [c for bundle in bundles_of(found) for c in bundle] == found
    assert bundles_of(found[:1]) == ((found[0],),)
    assert bundles_of(()) == ()
