"""What enclosures mask, closed and open for work, with areas counted by hand."""

from __future__ import annotations

import math

import numpy as np
import pytest
from msgspec.structs import replace

from engine.circuits import LoadCase
from engine.layout import Layout
from engine.masks import Keepout, keepouts
from engine.motions import Motion, carried, mirror_in
from engine.places import Enclosure

BOARD = Enclosure(
    id="board",
    name="Main board",
    footprint=((0.0, 0.0), (2.0, 0.0), (2.0, 0.5), (0.0, 0.5)),
    z_from=0.0,
    z_to=2.0,
    front_clearance=0.6,
)
WORK = LoadCase(id="work", open_enclosures=("board",))


def mask(board: Enclosure, case: LoadCase | None = WORK) -> Keepout | None:
    found = keepouts(Layout(enclosures=(board,)), case)
    return found[0] if found else None


def test_closed_just_the_footprint_is_masked():
    assert mask(BOARD, None).outline.area == pytest.approx(1.0)
    assert mask(BOARD, None).words == "the closed enclosure “Main board”"


def test_open_without_a_clearance_nothing_but_conductors_is_masked():
    assert mask(replace(BOARD, front_clearance=None)) is None


def test_open_the_clearance_holds_before_every_side():
    rim = 0.6 * 5.0 + math.pi * 0.6**2
    assert mask(BOARD).outline.area == pytest.approx(1.0 + rim, rel=2e-3)
    assert "open for work" in mask(BOARD).words


@pytest.mark.parametrize(
    ("front", "box"),
    [
        (0.0, (0.0, 0.0, 2.6, 0.5)),
        (90.0, (0.0, 0.0, 2.0, 1.1)),
        (190.0, (-0.6, 0.0, 2.0, 0.5)),
        (-90.0, (0.0, -0.6, 2.0, 0.5)),
        (45.0, (0.0, 0.0, 2.6, 1.1)),
    ],
)
@pytest.mark.parametrize("order", [1, -1])
def test_the_band_stands_straight_before_the_front(front, box, order):
    board = replace(BOARD, front=front, footprint=BOARD.footprint[::order])
    assert mask(board).outline.bounds == pytest.approx(box)
    beside = np.array([[-0.1, 0.25, 1.0], [2.1, -0.1, 1.0], [0.5, 0.25, 1.0]])
    if front == 90.0:
        assert mask(board).masks(beside).tolist() == [False, False, True]
        assert mask(board).masks(np.array([[1.0, 1.0, 1.0]]))[0]
        assert not mask(board).masks(np.array([[1.0, 1.0, 2.1]]))[0]


def test_the_front_turns_and_mirrors_with_its_enclosure():
    board = replace(BOARD, front=90.0)
    turned = carried(board, Motion(degrees=90.0), {})
    assert turned.front == 180.0
    assert mask(turned).outline.bounds == pytest.approx((-1.1, 0.0, 0.0, 2.0))
    mirrored = carried(board, mirror_in((0.0, 0.0), 0.0), {})
    assert mirrored.front == 270.0
    assert mask(mirrored).outline.bounds == pytest.approx((0.0, -1.1, 2.0, 0.0))
    assert carried(BOARD, Motion(degrees=90.0), {}).front is None
