"""The plan shows things where they are and as wide as they are."""

from __future__ import annotations

import numpy as np
import pytest
from shapely.geometry import Polygon

from engine.conductor import Conductor
from engine.drawing import plan
from engine.layout import Layout
from engine.places import Enclosure, Receptor, Room, Storey, Zone
from engine.runs import Bar, CircuitShare, Flat, Round, Run, SlotLoad

SQUARE = ((0.0, 0.0), (4.0, 0.0), (4.0, 3.0), (0.0, 3.0))


def straight(key, *, y, shape, start=0.0, end=5.0, item="bars", label="L1", role="run"):
    path = np.array([[start, y, 2.5], [end, y, 2.5]])
    axes = np.broadcast_to([[0.0, -1.0, 0.0], [0.0, 0.0, 1.0]], (2, 2, 3))
    return Conductor(
        key=key, item=item, slot=label, role=role, path=path, axes=axes, shape=shape,
        loads=(SlotLoad(circuit="c", label=label),), group=item,
    )  # fmt: skip


def run(route, item="bars"):
    section = Flat(circuits=(CircuitShare(circuit="c"),))
    return Run(id=item, name="Main bars", kind="busbar", route=route, section=section)


def area(shapes):
    return sum(Polygon(s.outline, s.holes).area for s in shapes)


def test_a_bar_is_as_wide_as_its_section():
    bar = straight("bars/L1", y=1.0, shape=Bar(width=0.1, thickness=0.01))
    layout = Layout(runs=(run(((0, 1, 2.5), (5, 1, 2.5))),))
    (strand,) = plan(layout, (bar,)).runs[0].strands
    assert area(strand.areas) == pytest.approx(5.0 * 0.1)
    assert strand.letters == "L1"


def test_a_run_reaches_from_its_first_to_its_last_conductor():
    shape = Bar(width=0.1, thickness=0.01)
    bars = (
        straight("bars/L1", y=1.0, shape=shape),
        straight("bars/L2", y=1.3, shape=shape, label="L2"),
    )
    layout = Layout(runs=(run(((0, 1.15, 2.5), (5, 1.15, 2.5))),))
    (shown,) = plan(layout, bars).runs
    assert area(shown.areas) == pytest.approx(5.0 * 0.4)
    ys = [y for part in shown.areas for _, y in part.outline]
    assert (min(ys), max(ys)) == pytest.approx((0.95, 1.35))
    assert shown.label_place == pytest.approx((2.5, 1.15))


def test_a_riser_shows_its_round_section_and_both_heights():
    path = np.array([[2.0, 1.0, 0.5], [2.0, 1.0, 3.0]])
    axes = np.broadcast_to([[1.0, 0.0, 0.0], [0.0, 1.0, 0.0]], (2, 2, 3))
    cable = Conductor(
        key="riser/L1", item="riser", slot="L1", role="run", path=path, axes=axes,
        shape=Round(diameter=0.04), loads=(), group="riser",
    )  # fmt: skip
    layout = Layout(runs=(run(((2, 1, 0.5), (2, 1, 3.0)), "riser"),))
    (shown,) = plan(layout, (cable,)).runs
    # A 16-gon in the circle: π/4 less 2.6 %.
    assert area(shown.areas) == pytest.approx(np.pi * 0.02**2, rel=0.03)
    (rise,) = shown.rises
    assert (rise.at, rise.z_from, rise.z_to, rise.goes_up) == ((2, 1), 0.5, 3.0, True)
    assert shown.strands[0].letters == ""


def test_places_keep_their_outlines_and_levels():
    layout = Layout(
        storeys=(Storey(id="first", floor_level=4.0),),
        rooms=(
            Room(
                id="room",
                name="Switch room",
                outline=SQUARE,
                floor_level=0,
                ceiling_level=3,
            ),
        ),
        enclosures=(Enclosure(id="cubicle", footprint=SQUARE, z_from=0, z_to=2),),
        zones=(Zone(id="office", outline=SQUARE, storey="first"),),
        receptors=(Receptor(id="desk", at=(1, 2, 5.0)),),
    )
    shown = plan(layout, ())
    assert shown.rooms[0].title == "Switch room"
    assert shown.rooms[0].area.outline == SQUARE
    assert shown.enclosures[0].closed
    assert shown.zones[0].levels == (4.5, 5.5)
    assert shown.receptors[0].at == (1, 2, 5.0)
    assert shown.bounds() == (0, 0, 4, 3)
    x, y = shown.rooms[0].label_place
    assert 0 < x < 4
    assert 0 < y < 3


def test_links_stand_apart_from_runs():
    link = straight(
        "bars/closing start/L1", y=1.0, shape=Round(), end=0.2, role="closing link"
    )
    layout = Layout(runs=(run(((0, 1, 2.5), (5, 1, 2.5))),))
    shown = plan(layout, (link,))
    assert [strand.key for strand in shown.links] == ["bars/closing start/L1"]
    assert shown.runs[0].strands == ()


def test_an_empty_layout_has_no_bounds():
    assert plan(Layout(), ()).bounds() is None
