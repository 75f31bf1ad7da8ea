"""Upright planes of maps, and sights along drawn lines: places by hand."""

from __future__ import annotations

import math

import numpy as np
import pytest
import shapely

from engine.drawing import plan
from engine.elevation import (
    Upright,
    elevation,
    extent_from_side,
    lines_along,
    plane_at,
)
from engine.layout import Layout
from engine.places import Profile, Receptor, Room
from engine.runs import CircuitShare, Flat, Run
from engine.sight import LOOKING_X, LOOKING_Y, PLAN, along

SQUARE = ((0.0, 0.0), (4.0, 0.0), (4.0, 3.0), (0.0, 3.0))


def run(route):
    section = Flat(circuits=(CircuitShare(circuit="c"),))
    return Run(id="bars", route=route, section=section)


@pytest.mark.parametrize(
    "sight", [PLAN, LOOKING_X, LOOKING_Y, along((1, 2, 9), (4, 6, 0))]
)
def test_a_place_is_where_it_is_seen_at_its_depth(sight):
    at = (1.25, -2.5, 3.75)
    back = sight.places(sight.seen(at), float(sight.depth(at)))
    assert back == pytest.approx(at, abs=1e-12)


def test_a_line_runs_to_the_right_from_its_start_and_heights_stay():
    sight = along((1.0, 2.0, 9.0), (4.0, 6.0, 0.0))  # 3-4-5
    assert sight.seen((4.0, 6.0, 1.5)) == pytest.approx((5.0, 1.5))
    assert sight.seen((1.0, 2.0, 0.0)) == pytest.approx((0.0, 0.0))
    # To the left of the line, as one walks along it, is behind it.
    assert sight.depth((1.0 - 4.0, 2.0 + 3.0, 7.0)) == pytest.approx(5.0)


def test_a_line_along_x_shows_what_looking_y_shows_but_for_the_start():
    sight = along((1.0, 2.0, 0.0), (5.0, 2.0, 0.0))
    at = np.array([(0.3, 1.1, 2.2), (7.0, -3.0, 0.1)])
    assert sight.seen(at) == pytest.approx(LOOKING_Y.seen(at) - (1.0, 0.0))
    assert sight.depth(at) == pytest.approx(LOOKING_Y.depth(at) - 2.0)


def test_a_line_without_length_on_plan_is_none():
    with pytest.raises(ValueError, match="no length on plan"):
        along((1.0, 2.0, 0.0), (1.0, 2.0, 5.0))


def test_the_plane_through_a_place_has_its_coordinate_as_depth():
    assert plane_at(LOOKING_Y, (1.0, 3.2, 0.5)).depth == 3.2
    assert plane_at(LOOKING_X, (1.0, 3.2, 0.5)).depth == 1.0


def test_the_rectangle_of_looking_x_runs_towards_smaller_y():
    plane = Upright(LOOKING_X, 7.0).rectangle((-3.0, 0.5, -1.0, 2.5))
    assert plane.origin == pytest.approx((7.0, 3.0, 0.5))
    assert plane.first == pytest.approx((0.0, -2.0, 0.0))
    assert plane.second == pytest.approx((0.0, 0.0, 2.0))


def test_a_plane_cuts_an_outline_from_where_to_where():
    outline = shapely.Polygon(SQUARE)
    view = (-10.0, 0.0, 10.0, 3.0)
    assert Upright(LOOKING_Y, 1.0).cut(outline, view) == [(0.0, 4.0)]
    assert Upright(LOOKING_X, 1.0).cut(outline, view) == [(-3.0, 0.0)]
    assert Upright(LOOKING_Y, 3.5).cut(outline, view) == []
    assert Upright(LOOKING_Y, 1.0).cut(outline, (1.0, 0.0, 2.0, 3.0)) == [(1.0, 2.0)]
    diagonal = Upright(along((0.0, 0.0, 0.0), (3.0, 3.0, 0.0)), 0.0)
    ((left, right),) = diagonal.cut(outline, view)
    assert (left, right) == pytest.approx((0.0, 3.0 * math.sqrt(2.0)))


def test_a_profile_has_a_sight_for_each_straight_part():
    path = ((0.0, 0.0, 1.0), (2.0, 0.0, 1.0), (4.0, 0.0, 3.0), (4.0, 0.0, 5.0),
            (4.0, 1.0, 5.0))  # fmt: skip
    first, second = lines_along(Profile(id="p", path=path))
    assert first.right == (1.0, 0.0, 0.0)
    assert second.origin == (4.0, 0.0, 0.0)
    assert second.right == (0.0, 1.0, 0.0)
    assert first.is_along_line
    assert not LOOKING_Y.is_along_line


def test_a_profile_that_turns_back_has_two_sights():
    path = ((0.0, 0.0, 1.0), (2.0, 0.0, 1.0), (1.0, 0.0, 1.0))
    assert [s.right[0] for s in lines_along(Profile(id="p", path=path))] == [1.0, -1.0]


def test_an_upright_profile_has_no_line_to_look_along():
    upright = Profile(id="p", path=((1.0, 1.0, 0.0), (1.0, 1.0, 3.0)))
    assert lines_along(upright) == ()


def test_along_a_line_a_run_across_it_comes_nearer_or_goes_away():
    sight = along((0.0, 0.0, 0.0), (-1.0, 0.0, 0.0))  # behind it is −y
    layout = Layout(runs=(run(((-2.0, 4.0, 2.0), (-2.0, 0.0, 2.0))),))
    (rise,) = elevation(layout, (), sight).runs[0].rises
    assert (rise.at, rise.axis) == ((2.0, 2.0), "depth")
    assert (rise.z_from, rise.z_to) == (-4.0, 0.0)
    assert not rise.comes_nearer


def test_sights_along_many_lines_leave_the_plan_its_shapes():
    layout = Layout(runs=(run(((0.0, 1.0, 2.0), (5.0, 1.0, 2.0))),))
    before = plan(layout, ()).runs[0]
    for k in range(50):
        elevation(layout, (), along((0.0, 0.0, 0.0), (1.0, 0.01 * k, 0.0)))
    assert plan(layout, ()).runs[0] is before


def test_the_extent_from_a_side_holds_rooms_and_receptors():
    room = Room(id="r", outline=SQUARE, floor_level=0.0, ceiling_level=3.0)
    layout = Layout(rooms=(room,), receptors=(Receptor(id="q", at=(6.0, 1.0, 4.0)),))
    assert extent_from_side(layout, LOOKING_Y) == (-1.0, -1.0, 7.0, 5.0)
    assert extent_from_side(layout, LOOKING_X) == (-4.0, -1.0, 1.0, 5.0)
