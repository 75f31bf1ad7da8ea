"""Routes: the frame by hand, and spacings on every straight of random routes."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from engine.errors import UserError
from engine.routes import stations

OFFSETS = np.array([(0.0, 0.0), (0.05, 0.0), (-0.03, 0.04), (0.0, -0.06)])


def test_right_and_up_on_a_level_route():
    found = stations([(0, 0, 0), (2, 0, 0)])
    lines = found.polylines(np.array([(0.1, 0.0), (0.0, 0.2)]))
    assert lines[0] == pytest.approx(np.array([(0, -0.1, 0), (2, -0.1, 0)]))
    assert lines[1] == pytest.approx(np.array([(0, 0, 0.2), (2, 0, 0.2)]))


def test_a_rise_carries_the_upper_slot_round_the_inside():
    lines = stations([(0, 0, 0), (1, 0, 0), (1, 0, 3)]).polylines(
        np.array([(0.1, 0.0), (0.0, 0.2)])
    )
    assert lines[0] == pytest.approx(
        np.array([(0, -0.1, 0), (1, -0.1, 0), (1, -0.1, 3)])
    )
    assert lines[1] == pytest.approx(
        np.array([(0, 0, 0.2), (0.8, 0, 0.2), (0.8, 0, 3)])
    )


@pytest.mark.parametrize(("sense", "up"), [(1, -1), (-1, 1)])
def test_a_first_vertical_leg_has_right_along_x(sense, up):
    lines = stations([(0, 0, 0), (0, 0, sense)]).polylines(
        np.array([(0.1, 0.0), (0.0, 0.2)])
    )
    assert lines[0] == pytest.approx(np.array([(0.1, 0, 0), (0.1, 0, sense)]))
    assert lines[1] == pytest.approx(np.array([(0, up * 0.2, 0), (0, up * 0.2, sense)]))


def test_a_vertical_first_route_is_carried_to_the_level():
    # Up, then along +y: right stays +x, and up (-y before) becomes +z.
    lines = stations([(0, 0, 0), (0, 0, 2), (0, 3, 2)]).polylines(
        np.array([(0.1, 0.0), (0.0, 0.2)])
    )
    assert lines[0] == pytest.approx(np.array([(0.1, 0, 0), (0.1, 0, 2), (0.1, 3, 2)]))
    assert lines[1] == pytest.approx(
        np.array([(0, -0.2, 0), (0, -0.2, 2.2), (0, 3, 2.2)])
    )


def test_a_level_bend_is_mitred():
    lines = stations([(0, 0, 0), (2, 0, 0), (2, 2, 0)]).polylines(
        np.array([(0.1, 0.0), (-0.1, 0.0)])
    )
    # Bending to the left: the right-hand conductor has the longer way.
    assert lines[0] == pytest.approx(
        np.array([(0, -0.1, 0), (2.1, -0.1, 0), (2.1, 2, 0)])
    )
    assert lines[1] == pytest.approx(
        np.array([(0, 0.1, 0), (1.9, 0.1, 0), (1.9, 2, 0)])
    )


def test_a_turn_goes_from_right_to_up():
    lines = stations([(0, 0, 0), (2, 0, 0)], [90]).polylines(np.array([(0.1, 0.0)]))
    assert lines[0] == pytest.approx(np.array([(0, 0, 0.1), (2, 0, 0.1)]))


def test_a_turn_that_changes_turns_in_the_mitre_plane():
    found = stations([(0, 0, 0), (2, 0, 0), (2, 2, 0)], [0, 90])
    (line,) = found.polylines(np.array([(0.1, 0.0)]))
    assert line == pytest.approx(
        np.array([(0, -0.1, 0), (2.1, -0.1, 0), (2, 0, 0.1), (2, 2, 0.1)])
    )
    assert found.twists == (1,)


vertex = st.tuples(*[st.integers(-8, 8)] * 3)
routes = st.lists(vertex, min_size=2, max_size=7)
some_turns = st.lists(st.sampled_from([0, 0, 30, 90, -45, 180]), min_size=6, max_size=6)


@given(routes, some_turns, st.booleans())
def test_slots_keep_their_distances_on_every_straight(route, turns, is_turned):
    points = np.array(route, dtype=float)
    legs = np.diff(points, axis=0)
    assume((np.abs(legs).sum(axis=1) > 0).all())
    given_turns = turns[: len(legs)] if is_turned else ()
    try:
        found = stations(route, given_turns)
    except UserError:
        assume(False)
    lines = found.polylines(OFFSETS)
    ends = [k for k in range(lines.shape[1] - 1) if k not in found.twists]
    assert len(ends) == len(legs)
    wanted = np.linalg.norm(OFFSETS[:, None] - OFFSETS[None], axis=2)
    for leg, k in zip(legs, ends, strict=True):
        t = leg / np.linalg.norm(leg)
        for at in (k, k + 1):
            apart = lines[:, None, at] - lines[None, :, at]
            across = apart - (apart @ t)[..., None] * t
            assert np.linalg.norm(across, axis=2) == pytest.approx(wanted, abs=1e-12)
        along = lines[:, k + 1] - lines[:, k]
        sideways = along - (along @ t)[:, None] * t
        assert np.abs(sideways).max() < 1e-12 * 100
    for i in range(1, len(points) - 1):
        t1, t2 = legs[i - 1 : i + 1]
        n = t1 / np.linalg.norm(t1) + t2 / np.linalg.norm(t2)
        at = [
            k
            for k in range(len(found.centres))
            if (found.centres[k] == points[i]).all()
        ]
        assert at
        if (points == points[i]).all(axis=1).sum() == 1:
            assert np.abs((lines[:, at] - points[i]) @ n).max() < 1e-10


@given(routes)
def test_the_frame_stays_right_handed(route):
    legs = np.diff(np.array(route, dtype=float), axis=0)
    assume((np.abs(legs).sum(axis=1) > 0).all())
    try:
        found = stations(route)
    except UserError:
        assume(False)
    for i, t in enumerate(found.tangents):
        u, v = found.axes[i]
        across = np.cross(u - (u @ t) * t, v - (v @ t) * t)
        assert across == pytest.approx(-t, abs=1e-12)


def test_a_closed_route_has_a_mitre_where_it_closes():
    square = [(0, 0, 0), (2, 0, 0), (2, 2, 0), (0, 2, 0), (0, 0, 0)]
    lines = stations(square, closed=True).polylines(np.array([(0.1, 0.0), (0.0, 0.1)]))
    assert lines[0] == pytest.approx(
        np.array(
            [
                (-0.1, -0.1, 0),
                (2.1, -0.1, 0),
                (2.1, 2.1, 0),
                (-0.1, 2.1, 0),
                (-0.1, -0.1, 0),
            ]
        )
    )
    assert lines[1, 0] == pytest.approx(lines[1, -1])


def test_a_bend_of_135_degrees_is_the_sharpest():
    stations([(0, 0, 0), (1, 0, 0), (0, 1, 0)])
    with pytest.raises(UserError, match="bends by 153° at vertex 2"):
        stations([(0, 0, 0), (2, 0, 0), (0, 1, 0)])


def test_a_leg_without_length_is_named():
    with pytest.raises(UserError, match="leg 2 of the route has no length"):
        stations([(0, 0, 0), (1, 0, 0), (1, 0, 0), (2, 0, 0)])


def test_a_vertex_that_is_no_number_is_refused():
    with pytest.raises(UserError, match="not a number"):
        stations([(0, 0, 0), (float("nan"), 0, 0)])


@pytest.mark.parametrize("turns", [(0,), (0, 90, 0), (30,)])
def test_turns_are_as_many_as_legs(turns):
    with pytest.raises(UserError, match="turns for 2 legs"):
        stations([(0, 0, 0), (1, 0, 0), (2, 0, 0)], turns)


def test_straights_tell_what_the_bends_leave():
    found = stations([(0, 0, 0), (1, 0, 0), (1, 1, 0), (0, 1, 0)])
    body = np.array([[(0.05, 0.0), (0.0, 0.01)]])
    # Both bends go left: a body at u = -0.2 (left) loses 0.2 + 0.05 at each.
    left = found.straights(np.array([(-0.2, 0.0)]), body)
    assert left[0] == pytest.approx([0.75, 0.5, 0.75])
