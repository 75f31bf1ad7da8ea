"""Elevations show the same layout from a side, true to width and height."""

from __future__ import annotations

import numpy as np
import pytest
from shapely.geometry import Polygon

from engine.conductor import Conductor
from engine.drawing import plan
from engine.elevation import elevation
from engine.layout import Layout
from engine.places import Receptor, Room, Storey, Zone
from engine.runs import Bar, CircuitShare, Flat, Run
from engine.sight import LOOKING_X, LOOKING_Y

SQUARE = ((0.0, 0.0), (4.0, 0.0), (4.0, 3.0), (0.0, 3.0))


def run(route):
    section = Flat(circuits=(CircuitShare(circuit="c"),))
    return Run(id="bars", route=route, section=section)


def on_edge(start, end):
    """A bar 0.1 m high and 0.01 m thick along +x."""
    axes = np.broadcast_to([[0.0, 0.0, 1.0], [0.0, 1.0, 0.0]], (2, 2, 3))
    return Conductor(
        key="bars/L1", item="bars", slot="L1", role="run",
        path=np.array([start, end], dtype=float), axes=axes,
        shape=Bar(width=0.1, thickness=0.01), loads=(), group="bars",
    )  # fmt: skip


def area(shapes):
    return sum(Polygon(s.outline, s.holes).area for s in shapes)


def test_a_bar_on_edge_shows_its_height_from_the_side():
    layout = Layout(runs=(run(((0, 1, 2), (5, 1, 2))),))
    (bar,) = elevation(layout, (on_edge((0, 1, 2), (5, 1, 2)),), LOOKING_Y).runs
    assert area(bar.areas) == pytest.approx(5 * 0.1)
    assert bar.route == ((0, 2), (5, 2))


def test_looking_along_x_puts_the_smaller_y_to_the_right():
    layout = Layout(receptors=(Receptor(id="r", at=(1.0, 2.0, 3.0)),))
    (mark,) = elevation(layout, (), LOOKING_X).receptors
    assert mark.seen == (-2.0, 3.0)
    assert mark.at == (1.0, 2.0, 3.0)


def test_current_along_the_view_goes_away_and_against_it_comes_nearer():
    away = Layout(runs=(run(((1, 0, 2), (1, 4, 2))),))
    (rise,) = elevation(away, (), LOOKING_Y).runs[0].rises
    assert (rise.at, rise.z_from, rise.z_to, rise.axis) == ((1, 2), 0, 4, "y")
    assert not rise.comes_nearer
    back = Layout(runs=(run(((1, 4, 2), (1, 0, 2))),))
    assert elevation(back, (), LOOKING_Y).runs[0].rises[0].comes_nearer


def test_rooms_and_zones_stand_between_their_levels():
    layout = Layout(
        storeys=(Storey(id="first", floor_level=4.0),),
        rooms=(Room(id="room", outline=SQUARE, floor_level=0.0, ceiling_level=3.2),),
        zones=(
            Zone(id="zone", outline=SQUARE, storey="first"),
            Zone(id="nowhere", outline=SQUARE),
        ),
    )
    shown = elevation(layout, (), LOOKING_X)
    assert set(shown.rooms[0].area.outline) == {(-3, 0), (0, 0), (0, 3.2), (-3, 3.2)}
    (zone,) = shown.zones
    assert {z for _, z in zone.area.outline} == {4.5, 5.5}


def test_an_unchanged_run_keeps_its_shape():
    first, other = run(((0, 1, 2), (5, 1, 2))), run(((0, 2, 2), (5, 2, 2)))
    bar = on_edge((0, 1, 2), (5, 1, 2))
    before = plan(Layout(runs=(first, other)), (bar,)).runs[0]
    after = plan(Layout(runs=(first, run(((0, 9, 2), (5, 9, 2))))), (bar,)).runs[0]
    assert after is before


def test_looking_from_the_side_leaves_the_shapes_on_plan_as_they_are():
    layout, bar = (
        Layout(runs=(run(((0, 1, 2), (5, 1, 2))),)),
        on_edge((0, 1, 2), (5, 1, 2)),
    )
    before = plan(layout, (bar,)).runs[0]
    elevation(layout, (bar,), LOOKING_X)
    assert plan(layout, (bar,)).runs[0] is before
