"""Shaping keeps geometry true: what is moved, turned or mirrored carries its field."""

from __future__ import annotations

import numpy as np
import pytest
from msgspec.structs import replace

from engine.circuits import BalancedCurrent, Circuit, LoadCase
from engine.conductors import conductors
from engine.copies import copies, with_joints
from engine.currents import case_phasors, conductor_currents
from engine.edits import added, replaced
from engine.errors import UserError
from engine.field import flux_density
from engine.layout import Layout
from engine.motions import Motion, mirror_in, shift_by, turn_about
from engine.new_places import (
    new_room,
    outline,
    rectangle,
    with_room_above,
    with_room_below,
    zone_filling,
)
from engine.new_sources import new_circuit, riser_to, run_height, with_new_run
from engine.places import Storey, Zone
from engine.runs import (
    Bar,
    CircuitShare,
    Flat,
    FreeSection,
    Joint,
    Multicore,
    ParallelSets,
    Quad,
    Run,
    Sandwich,
    Slot,
    SlotEnd,
    SlotLoad,
    StackedBars,
    Trefoil,
    Vertical,
)
from engine.shaping import (
    aligned,
    deleted,
    duplicated,
    mirrored,
    moved,
    placed,
    repeated,
    rotated,
    split_run,
)
from engine.starters import transformer_link_board
from engine.vertices import (
    nearest_leg,
    with_inserted,
    with_vertex,
    without_vertex,
)

CARRIED = (CircuitShare(circuit="F1"),)
CIRCUIT = Circuit(id="F1", demand=BalancedCurrent(rms=500.0))

SECTIONS = {
    "flat on edge": Flat(circuits=CARRIED),
    "flat, turned bars": Flat(
        circuits=CARRIED, shape=Bar(width=0.05, thickness=0.01, turn=30)
    ),
    "flat, two of L1": Flat(circuits=CARRIED, order=("L1", "L2", "L3", "N", "L1")),
    "vertical": Vertical(circuits=CARRIED),
    "trefoil": Trefoil(circuits=CARRIED),
    "trefoil with N": Trefoil(circuits=CARRIED, order=("L1", "L2", "L3", "N")),
    "quad": Quad(circuits=CARRIED),
    "parallel trefoils": ParallelSets(
        circuits=CARRIED,
        orders=(("L1", "L2", "L3"), ("L2", "L1", "L3")),
        formation="trefoil",
    ),
    "parallel quads downwards": ParallelSets(
        circuits=CARRIED,
        orders=(("L1", "L2", "L3", "N"), ("L2", "L1", "N", "L3")),
        formation="quad",
        direction="down",
    ),
    "stacked": StackedBars(circuits=CARRIED, bars_per_pole=2),
    "sandwich": Sandwich(circuits=CARRIED),
    "multicore": FreeSection(
        slots=(
            Slot(
                name="cable",
                u=0.1,
                v=0.03,
                shape=Multicore(
                    outside_diameter=0.05,
                    core_diameter=0.015,
                    core_circle_diameter=0.02,
                    turn=20,
                ),
                loads=tuple(
                    SlotLoad(circuit="F1", label=label)
                    for label in ("L1", "L2", "L3", "N")
                ),
            ),
        )
    ),
}

ROUTES = {
    "level first": ((0.0, 0.0, 2.0), (3.0, 0.0, 2.0), (3.0, 2.0, 2.0), (3.0, 2.0, 4.0)),
    "riser first": ((0.0, 0.0, 0.0), (0.0, 0.0, 2.0), (2.0, 1.0, 2.0)),
    "faller first": ((0.0, 0.0, 3.0), (0.0, 0.0, 1.0), (-1.0, 2.0, 1.0)),
}

MOTIONS = {
    "shift": shift_by(1.25, -0.4, 0.7),
    "turn by 90": turn_about((1.0, 2.0), 90.0),
    "turn by 33": turn_about((1.0, 2.0), 33.0),
    "mirror across x": mirror_in((0.5, 0.0), 90.0),
    "mirror across y": mirror_in((0.5, 1.0), 0.0),
    "mirror aslant": mirror_in((0.5, 1.0), 25.0),
}


def layout_with(section: object, route: object = ROUTES["level first"]) -> Layout:
    run = Run(id="bars", kind="busbar", route=route, section=section, turns=(10.0,) * 0)
    return Layout(circuits=(CIRCUIT,), runs=(run,))


def field_at(layout: Layout, points: np.ndarray) -> np.ndarray:
    made = conductors(layout)
    currents = conductor_currents(case_phasors(layout, LoadCase(id="case")), made)
    return flux_density(made, currents, points)[0]


def carried_points(points: np.ndarray, motion: Motion) -> np.ndarray:
    return np.array([motion.place((x, y, z)) for x, y, z in points.tolist()])


def resultant(b: np.ndarray) -> np.ndarray:
    return np.sqrt((np.abs(b) ** 2).sum(axis=1))


POINTS = np.array(
    [(1.0, 0.6, 1.5), (2.2, -0.5, 2.4), (-0.4, 0.5, 1.0), (3.3, 1.0, 3.0)]
)


@pytest.mark.parametrize("motion", MOTIONS.values(), ids=MOTIONS.keys())
@pytest.mark.parametrize("route", ROUTES.values(), ids=ROUTES.keys())
@pytest.mark.parametrize("section", SECTIONS.values(), ids=SECTIONS.keys())
def test_the_field_goes_along(section: object, route: object, motion: Motion) -> None:
    """Rotation, translation, mirror carry the resultant; the sum is good to 0.1 %."""
    before = layout_with(section, route)
    after = placed(before, ("bars",), motion)
    there = carried_points(POINTS, motion)
    np.testing.assert_allclose(
        resultant(field_at(after, there)),
        resultant(field_at(before, POINTS)),
        rtol=1e-3,
    )


def test_turned_legs_go_along_too() -> None:
    layout = layout_with(SECTIONS["sandwich"])
    run = replace(layout.runs[0], turns=(20.0, -35.0, 90.0))
    layout = replaced(layout, run)
    for motion in MOTIONS.values():
        after = placed(layout, ("bars",), motion)
        np.testing.assert_allclose(
            resultant(field_at(after, carried_points(POINTS, motion))),
            resultant(field_at(layout, POINTS)),
            rtol=1e-3,
        )


def test_a_formation_stays_a_formation_in_the_mirror() -> None:
    for name in ("flat on edge", "vertical", "trefoil", "quad", "stacked", "sandwich"):
        after = mirrored(layout_with(SECTIONS[name]), ("bars",), (0.0, 0.0), 90.0)
        assert type(after.runs[0].section) is type(SECTIONS[name]), name
    after = mirrored(layout_with(SECTIONS["flat on edge"]), ("bars",), (0.0, 0.0), 90.0)
    assert after.runs[0].section.order == ("N", "L3", "L2", "L1")


def test_mirrored_twice_is_as_before() -> None:
    layout = layout_with(SECTIONS["flat on edge"], ROUTES["riser first"])
    once = mirrored(layout, ("bars",), (0.7, 0.0), 90.0)
    assert once != layout
    assert mirrored(once, ("bars",), (0.7, 0.0), 90.0) == layout


def test_four_quarter_turns_are_none() -> None:
    layout = transformer_link_board()
    ids = [item.id for item in layout.items() if item.id not in ("title", "settings")]
    turned = layout
    for _ in range(4):
        turned = rotated(turned, ids, (1.3, 0.7), 90.0)
    assert turned == layout


def test_moved_by_a_tenth_stays_a_round_number() -> None:
    layout = layout_with(SECTIONS["quad"], ((0.1, 0.2, 2.0), (3.3, 0.2, 2.0)))
    after = moved(layout, ("bars",), 0.2, 0.1)
    assert after.runs[0].route == ((0.3, 0.3, 2.0), (3.5, 0.3, 2.0))


def test_a_move_leaves_everything_else_the_same_object() -> None:
    layout = transformer_link_board()
    after = moved(layout, ("office",), 0.5, 0.0)
    assert after.runs[0] is layout.runs[0]
    assert after.circuits is layout.circuits


def test_a_run_end_goes_along_with_its_board() -> None:
    layout = transformer_link_board()
    after = moved(layout, ("board-1",), 0.0, 0.25)
    assert after.runs[0].route[-1][1] == pytest.approx(3.25)
    assert after.runs[0].route[:-1] == layout.runs[0].route[:-1]


def test_a_joint_goes_along_only_with_all_that_it_joins() -> None:
    one = layout_with(SECTIONS["quad"]).runs[0]
    joint = Joint(
        id="head",
        ends=tuple(
            SlotEnd(item=run, slot="L1", end="start") for run in ("bars", "other")
        ),
        at=(0.0, 0.0, 2.0),
    )
    layout = Layout(
        circuits=(CIRCUIT,), runs=(one, replace(one, id="other")), joints=(joint,)
    )
    assert moved(layout, ("bars",), 1.0, 0.0).joints == layout.joints
    both = moved(layout, ("bars", "other"), 1.0, 0.0)
    assert both.joints[0].at == (1.0, 0.0, 2.0)


def test_a_joint_names_the_slots_of_the_mirror_image() -> None:
    """The outer L1 on the left is `L1.1`; in the mirror it is the one on the right."""
    layout = layout_with(SECTIONS["flat, two of L1"])
    joint = Joint(
        id="head",
        ends=(
            SlotEnd(item="bars", slot="L1.1", end="start"),
            SlotEnd(item="bars", slot="L2", end="start"),
        ),
    )
    after = mirrored(added(layout, joint), ("bars",), (0.0, 0.0), 90.0)
    assert [end.slot for end in after.joints[0].ends] == ["L1.2", "L2"]


def test_a_zone_that_is_lifted_leaves_the_floor_of_its_storey() -> None:
    zone = Zone(id="zone", outline=rectangle((0.0, 0.0), (1.0, 1.0)), storey="up")
    layout = Layout(storeys=(Storey(id="up", floor_level=3.5),), zones=(zone,))
    assert moved(layout, ("zone",), 0.0, 0.0, 0.2).zones[0].floor_level == 3.7
    assert moved(layout, ("zone",), 1.0, 0.0).zones[0].floor_level is None


def test_copies_are_a_step_apart_and_name_each_other() -> None:
    layout = transformer_link_board()
    link = layout.runs[0].id
    ids = ("transformer-1", "board-1", link)
    after, made = repeated(layout, ids, 2, 0.0, 8.0)
    assert len(made) == 6
    assert len({item.id for item in after.items()}) == len(list(after.items()))
    second = after.runs[2]
    assert second.start.equipment == after.equipment[4].id
    assert second.route[0] == (1.5, 19.0, 2.0)


def test_a_lone_copy_of_a_connected_run_is_free() -> None:
    layout = transformer_link_board()
    after, _ = duplicated(layout, (layout.runs[0].id,), 1.0, 0.0)
    assert (after.runs[1].start, after.runs[1].end) == (None, None)
    assert after.runs[0].start is not None


def test_joints_are_copied_with_all_their_ends() -> None:
    split = split_run(layout_with(SECTIONS["quad"]), "bars", 0, (1.0, 0.0, 2.0))
    found = with_joints(split, ("bars", "bars-2"))
    made = copies(found, {item.id for item in split.items()})
    assert len(made) == 2 + 4
    runs = {item.id for item in made if isinstance(item, Run)}
    for item in made:
        if isinstance(item, Joint):
            assert {end.item for end in item.ends} == runs
    assert with_joints(split, ("bars",)) == (split.runs[0],)


def test_copies_on_the_original_are_refused() -> None:
    with pytest.raises(UserError, match="lie on the original"):
        repeated(layout_with(SECTIONS["quad"]), ("bars",), 2, 0.0, 0.0)


def test_aligned_at_the_least_x_moves_only_along_x() -> None:
    layout = transformer_link_board()
    after = aligned(layout, ("switch-room", "office", "cubicle"), "least x")
    assert after.rooms == layout.rooms
    assert min(x for x, _ in after.enclosures[0].footprint) == 0.0
    ys = [y for _, y in layout.enclosures[0].footprint]
    assert [y for _, y in after.enclosures[0].footprint] == ys
    with pytest.raises(UserError, match="two or more"):
        aligned(layout, ("office",), "least x")


@pytest.mark.parametrize("route", ROUTES.values(), ids=ROUTES.keys())
def test_a_split_run_has_the_same_field(route: tuple) -> None:
    layout = layout_with(SECTIONS["stacked"], route)
    for leg in range(len(route) - 1):
        middle = tuple(np.mean(route[leg : leg + 2], axis=0).tolist())
        after = split_run(layout, "bars", leg, middle)
        assert len(after.runs) == 2
        np.testing.assert_allclose(
            field_at(after, POINTS), field_at(layout, POINTS), rtol=1e-3, atol=1e-11
        )


def test_a_split_hands_the_end_to_the_second_run() -> None:
    layout = transformer_link_board()
    after = split_run(layout, layout.runs[0].id, 1, (3.0, 3.0, 2.7))
    first, second = after.runs
    assert (first.end, second.start) == (None, None)
    assert first.start == layout.runs[0].start
    assert second.end == layout.runs[0].end
    assert first.route[-1] == second.route[0] == (3.0, 3.0, 2.7)


def test_a_run_cannot_be_split_at_its_end() -> None:
    layout = layout_with(SECTIONS["quad"])
    with pytest.raises(UserError, match="cannot be split at its end"):
        split_run(layout, "bars", 0, (0.0, 0.0, 2.0))


def test_an_inserted_vertex_changes_no_field() -> None:
    layout = layout_with(SECTIONS["sandwich"], ROUTES["riser first"])
    run = replace(layout.runs[0], turns=(15.0, 40.0))
    layout = replaced(layout, run)
    after = replaced(layout, with_inserted(run, 0, (0.0, 0.0, 1.0)))
    assert after.runs[0].turns == (15.0, 15.0, 40.0)
    np.testing.assert_allclose(
        field_at(after, POINTS), field_at(layout, POINTS), rtol=1e-3, atol=1e-11
    )
    assert without_vertex(after.runs[0], 1) == run


def test_without_its_first_vertex_the_rest_stays_as_it_lay() -> None:
    run = layout_with(SECTIONS["sandwich"], ROUTES["riser first"]).runs[0]
    longer = replace(run, route=((0.5, 0.0, 0.0), *run.route))
    before = conductors(Layout(circuits=(CIRCUIT,), runs=(longer,)))
    after = conductors(Layout(circuits=(CIRCUIT,), runs=(without_vertex(longer, 0),)))
    ends = {c.key: c.path[-1] for c in before if c.role == "run"}
    for conductor in after:
        if conductor.role == "run":
            np.testing.assert_allclose(conductor.path[-1], ends[conductor.key])


def test_the_last_vertices_cannot_be_deleted() -> None:
    zone = Zone(id="zone", outline=((0.0, 0.0), (1.0, 0.0), (0.0, 1.0)))
    with pytest.raises(UserError, match="only 3 vertices"):
        without_vertex(zone, 0)
    moved_corner = with_vertex(zone, 1, (2.0, 0.5, 9.0))
    assert moved_corner.outline[1] == (2.0, 0.5)


def test_the_nearest_leg_of_an_outline_may_be_the_closing_one() -> None:
    corners = rectangle((0.0, 0.0), (2.0, 2.0))
    assert nearest_leg(corners, True, (-0.1, 0.8)) == (3, (0.0, 0.8))


def test_deleting_lets_go_of_what_is_gone() -> None:
    layout = transformer_link_board()
    after = deleted(layout, ("board-1",))
    assert after.runs[0].end is None
    assert after.runs[0].start == layout.runs[0].start
    split = split_run(layout, layout.runs[0].id, 1, (3.0, 3.0, 2.7))
    assert deleted(split, (split.runs[1].id,)).joints == ()
    assert deleted(layout, ("title", "settings")) == layout


def test_a_room_is_filled_less_its_walls() -> None:
    corners = ((0.0, 0.0), (4.0, 0.0), (4.0, 2.0), (2.0, 2.0), (2.0, 4.0), (0.0, 4.0))
    layout = Layout(storeys=(Storey(id="up", floor_level=3.2),))
    room = new_room(layout, corners, "up")
    zone = zone_filling(layout, room)
    assert set(zone.outline) == {
        (0.2, 0.2), (3.8, 0.2), (3.8, 1.8), (1.8, 1.8), (1.8, 3.8), (0.2, 3.8),
    }  # fmt: skip
    assert (zone.floor_level, zone.heights, zone.category) == (3.2, (0.5, 1.0, 1.5), "")
    with pytest.raises(UserError, match="narrower"):
        zone_filling(layout, replace(room, outline=rectangle((0, 0), (0.3, 5))))


def test_outlines_are_counter_clockwise_and_simple() -> None:
    assert outline([(0, 0), (0, 1), (1, 1), (0, 0)]) == ((0, 0), (1, 1), (0, 1))
    with pytest.raises(UserError, match="crosses itself"):
        outline([(0, 0), (3, 3), (3, 0), (0, 1)])
    with pytest.raises(UserError, match="encloses no area"):
        outline([(0, 0), (1, 0), (2, 0)])


def test_rooms_above_and_below_stand_on_their_slabs() -> None:
    layout = Layout(storeys=(Storey(id="ground", floor_level=0.0),))
    layout = added(layout, new_room(layout, rectangle((0, 0), (4, 3)), "ground"))
    layout, above = with_room_above(layout, "room-1", 0.25)
    layout, below = with_room_below(layout, "room-1", 0.3)
    by_id = layout.by_id()
    assert by_id[above].floor_level == 3.25
    assert by_id["room-1"].slab_above == 0.25
    assert (by_id[below].floor_level, by_id[below].ceiling_level) == (-3.3, -0.3)
    assert by_id[below].slab_above == 0.3
    assert [s.floor_level for s in layout.storeys] == [0.0, 3.25, -3.3]
    with pytest.raises(UserError, match="thickness"):
        with_room_above(layout, "room-1", 0.0)


def test_a_run_is_drawn_under_the_ceiling_and_rises_to_the_next_floor() -> None:
    layout = Layout(storeys=(Storey(id="ground", floor_level=0.0),))
    assert run_height(layout, (1.0, 1.0), "") == 2.5
    assert riser_to(layout, 2.5) == 6.0
    room = replace(new_room(layout, rectangle((0, 0), (4, 3)), ""), ceiling_level=3.6)
    layout = added(layout, room)
    assert run_height(layout, (1.0, 1.0), "ground") == 3.1
    layout, _ = with_room_above(layout, "room-1", 0.2)
    assert riser_to(layout, 3.1) == 3.8
    assert riser_to(layout, 3.1, down=True) == 0.0


def test_the_first_run_makes_its_circuit_and_the_next_carries_it_too() -> None:
    layout, first = with_new_run(
        Layout(), ((0.0, 0.0, 2.5), (2.0, 0.0, 2.5)), "cable tray"
    )
    assert layout.circuits == (new_circuit(Layout()),)
    assert layout.circuits[0].demand is None
    run = layout.by_id()[first]
    wide = replace(run, section=replace(run.section, pitch=0.2))
    layout = replaced(layout, wide)
    layout, second = with_new_run(
        layout, ((0.0, 1.0, 2.5), (2.0, 1.0, 2.5)), "cable tray"
    )
    assert len(layout.circuits) == 1
    assert layout.by_id()[second].section == wide.section
