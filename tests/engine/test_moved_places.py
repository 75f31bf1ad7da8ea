"""A route before and after an edit is told by what differs."""

from __future__ import annotations

import pytest
from msgspec.structs import replace

from engine.layout import Layout
from engine.moved_places import told_places
from engine.revisions import changes_since
from engine.runs import Flat, Run

ROUTE = ((5.2, 4.9, 0.5), (5.2, 5.3, 0.5), (5.2, 5.3, 3.2))


def shifted(x: float, y: float, z: float):
    return tuple((a + x, b + y, c + z) for a, b, c in ROUTE)


@pytest.mark.parametrize(
    ("after", "told"),
    [
        (
            shifted(0.3, -0.2, 0.0),
            (
                "the first vertex at 5.2, 4.9, 0.5 m",
                "each of 3 moved by 0.3, -0.2, 0 m",
            ),
        ),
        (
            (*ROUTE[:2], (5.2, 5.3, 3.6)),
            ("vertex 3 at 5.2, 5.3, 3.2 m", "vertex 3 at 5.2, 5.3, 3.6 m"),
        ),
        (ROUTE[:2], ("3 vertices", "2 vertices")),
    ],
)
def test_a_route_is_told_by_what_differs(after, told):
    assert told_places(ROUTE, after) == told


@pytest.mark.parametrize("value", [(), (1.0, 2.0), "route", (("L1", 2.0),)])
def test_what_is_no_list_of_places_is_not_told(value):
    assert told_places(value, value) is None


def test_changes_since_a_revision_say_how_far_a_run_moved():
    run = Run(id="riser", name="Riser", route=ROUTE, section=Flat(circuits=()))
    before = Layout(runs=(run,))
    after = replace(before, runs=(replace(run, route=shifted(0.3, 0.0, 0.0)),))
    (edit,) = changes_since(after, before).edits
    assert edit.after == "each of 3 moved by 0.3, 0, 0 m"
