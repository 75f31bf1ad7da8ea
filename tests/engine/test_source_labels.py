"""Labels of sources stand off each other; a leader leads to what is not close by."""

from __future__ import annotations

import math
from itertools import combinations

import pytest

from engine.drawing import Area, Mark, Place, Plan
from engine.picture import Picture, Stroke, Words
from engine.picture.lettering import keep_clear, letter_places
from engine.picture.plan_marks import draw_plan
from engine.picture.sheet import Sheet
from engine.picture.source_labels import letter_sources


def box(item, x0, y0, x1, y1):
    outline = ((x0, y0), (x1, y0), (x1, y1), (x0, y1))
    return Place(item, f"Apparatus {item}", "equipment", Area(outline, ()))


def lettered(*equipment, receptors=()):
    """A drawing at 1 : 100 of a place 10 m × 6 m."""
    shown = Plan((), (), equipment, (), (), (), (), receptors)
    sheet, picture = Sheet((0.0, 0.0, 10.0, 6.0), 100, (0.0, 0.0)), Picture(100, 60)
    draw_plan(picture, sheet, shown)
    keep_clear(sheet, shown)
    letter_places(picture, sheet, shown)
    letter_sources(picture, sheet, shown)
    return picture


def labels(picture):
    return {part.text: part for part in picture.parts if isinstance(part, Words)}


def leaders(picture):
    return [p for p in picture.parts if isinstance(p, Stroke) and p.width == 0.15]


def distance(words, point):
    """From a label's edge to a point on paper. [mm]"""
    dx = max(0.0, abs(point[0] - words.at[0]) - 0.5 * words.width)
    dy = max(0.0, abs(point[1] - words.at[1]) - 0.5 * words.size)
    return math.hypot(dx, dy)


def test_a_label_stands_within_what_has_room_for_it():
    picture = lettered(box("a", 2.0, 2.0, 7.0, 4.0))
    assert labels(picture)["Apparatus a"].at == pytest.approx((45.0, 30.0))
    assert not leaders(picture)


def test_crowded_labels_stand_apart_and_each_is_led_to_its_own():
    boxes = [box(f"n{k}", 3.0 + 0.5 * k, 3.0, 3.3 + 0.5 * k, 3.4) for k in range(6)]
    picture = lettered(*boxes)
    written = labels(picture)
    assert len(written) == 6
    for one, other in combinations(written.values(), 2):
        across = abs(one.at[0] - other.at[0]) >= 0.5 * (one.width + other.width)
        up = abs(one.at[1] - other.at[1]) >= 0.5 * (one.size + other.size)
        assert across or up
    ends = [line.points for line in leaders(picture)]
    for k in range(6):
        middle, words = (31.5 + 5.0 * k, 32.0), written[f"Apparatus n{k}"]
        if distance(words, middle) > 3.5:
            (line,) = (p for p in ends if p[0] == pytest.approx(middle))
            assert distance(words, line[1]) < 1.0


def test_a_receptor_outside_of_the_frame_has_no_label_in_it():
    marks = [
        Mark("r", name, (x, 3.0, 1.0), (x, 3.0))
        for name, x in (("in", 5.0), ("out", 10.2))
    ]
    written = labels(lettered(receptors=tuple(marks)))
    assert "in" in written
    assert "out" not in written
