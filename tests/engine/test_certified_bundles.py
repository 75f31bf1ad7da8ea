"""Bounds of bundles: never violated, and small where the currents cancel."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.certified.boxes import Boxes
from engine.certified.expansions import Source
from engine.conductor import Conductor
from engine.runs import Round

TURN = np.exp(2j * np.pi / 3)


def cable(key, path, group):
    """Axes along x and y: the section need not stand across for these tests."""
    axes = np.tile(np.eye(3)[:2], (len(path), 1, 1))
    shape = Round(diameter=1e-4)
    path = np.array(path, float)
    return Conductor(key, group, key, "run", path, axes, shape, (), group)


def box_at(centre, halves):
    return Boxes(
        np.array([centre], float), np.eye(3)[None], np.array([halves], float),
        np.zeros(1, np.int64),
    )  # fmt: skip


def source_of(paths, currents, *, bundled):
    """One conductor a path; each in a group of its own unless bundled."""
    made = [
        cable(f"{k}", path, "all" if bundled else f"{k}")
        for k, path in enumerate(paths)
    ]
    return Source(made, np.array([currents], complex), np.full(len(made), 1e-9))


places = st.tuples(*[st.floats(-1, 1)] * 3)
near = st.tuples(*[st.floats(-0.05, 0.05)] * 6)


@settings(max_examples=150, deadline=None)
@given(
    places,
    places,
    st.lists(near, min_size=2, max_size=4),
    places,
    places,
    st.booleans(),
    st.floats(0.01, 0.2),
)
def test_no_third_derivative_of_a_bundle_exceeds_its_bound(
    p, q, displaced, x, way, is_balanced, reach
):
    """Differences of curvatures between two places, over their distance."""
    p, q, x, way = (np.array(a) for a in (p, q, x, way))
    size = np.linalg.norm(way)
    if np.linalg.norm(q - p) < 0.2 or size < 1e-3:
        return
    paths = [(p + np.array(d[:3]), q + np.array(d[3:])) for d in displaced]
    currents = TURN ** np.arange(len(paths))
    if is_balanced:
        currents[-1] = -currents[:-1].sum()
    source = source_of(paths, currents, bundled=True)
    whole = source.expansion(box_at(x, (reach, 0.0, 0.0)))
    if not np.isfinite(whole.third[0, 0]):
        return
    here, there = (
        source.expansion(box_at(at, (0.0, 0.0, 0.0))).rows[0, 0]
        for at in (x, x + way / size * reach)
    )
    for rows, bound in (((4, 5, 6), whole.third), ((1, 2, 3), whole.second)):
        for k in rows:
            # Of phasors each of the two parts is a field; they add at right angles.
            change = np.linalg.norm(there[k] - here[k])
            slack = 1e-9 * np.abs(here[k]).max() + 1e-12
            assert change <= bound[0, 0] * reach * (1 + 1e-9) + slack


LINE = np.array([(-5.0, 0.0, 0.0), (5.0, 0.0, 0.0)])
FLAT = [LINE + np.array([0.0, 0.1 * k, 0.0]) for k in (-1, 0, 1)]


def bounds(currents, centre, *, bundled):
    e = source_of(FLAT, currents, bundled=bundled).expansion(
        box_at(centre, (0.05, 0.05, 0.0))
    )
    return e.third[0, 0], e.second[0, 0]


@pytest.mark.parametrize("which", [0, 1], ids=["third", "second"])
def test_balanced_currents_cancel_in_the_bound(which):
    """At 5 m three cables 0.1 m apart are a twentieth of three single ones."""
    currents = TURN ** np.arange(3)
    together = bounds(currents, (0, 0, 5), bundled=True)[which]
    alone = bounds(currents, (0, 0, 5), bundled=False)[which]
    assert 0.02 * alone < together < 0.1 * alone


def test_currents_that_do_not_cancel_are_bounded_leg_by_leg():
    for centre in ((0, 0, 5), (0, 0, 0.2)):
        together = bounds((1, 1, 1), centre, bundled=True)
        assert together == bounds((1, 1, 1), centre, bundled=False)


def test_beside_a_bundle_its_legs_count_alone():
    currents = TURN ** np.arange(3)
    together = bounds(currents, (0, 0, 0.2), bundled=True)
    assert together == bounds(currents, (0, 0, 0.2), bundled=False)


def test_the_bound_of_two_opposed_wires_is_near_what_is_there():
    """B = µ₀ I / 2π · (1/(y−a) − 1/(y+a)) in their plane: Ampère's law."""
    a, y = 0.01, 2.0
    wires = [np.array([(-900.0, s * a, 0.0), (900.0, s * a, 0.0)]) for s in (1, -1)]
    source = source_of(wires, (1, -1), bundled=True)
    e = source.expansion(box_at((0, y, 0), (1e-6, 1e-6, 0.0)))
    third = 2e-7 * 6 * ((y - a) ** -4 - (y + a) ** -4)
    second = 2e-7 * 2 * ((y - a) ** -3 - (y + a) ** -3)
    assert third <= e.third[0, 0] <= 3.5 * third
    assert second <= e.second[0, 0] <= 5 * second
