"""The curve of the height rail is broken where masks take the largest place away."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from app.document import Document
from app.height_curve import HeightCurve, curve_heights, height_curve
from app.view_state import ViewState
from app.views.height_rail import HeightRail
from engine.layout import Layout
from engine.layout_file import read

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLE)


@pytest.fixture(scope="module")
def curve(layout: Layout) -> HeightCurve:
    zone = layout.zones[0].id
    return height_curve(layout, "", zone, curve_heights(layout))


def test_the_curve_is_broken_at_the_run_in_the_zone_only(curve: HeightCurve) -> None:
    broken = curve.heights[:-1][~curve.joined]
    # The run from the transformer lies at 2.5 m to 3 m under the office.
    assert np.any((broken > 2.0) & (broken < 3.3))
    # Between the floor and the heights of people above it nothing is masked.
    whole = (curve.heights[:-1] > 4.0) & (curve.heights[:-1] < 6.0)
    assert np.all(curve.joined[whole])


def test_a_break_says_why(qtbot, layout: Layout, curve: HeightCurve) -> None:
    k = int(np.flatnonzero(~curve.joined & (curve.heights[:-1] > 2.0))[0])
    between = float(curve.heights[k : k + 2].mean())
    assert "curve broken: here conductors" in curve.gap_text(between)
    assert curve.gap_text(5.1) == ""
    assert curve.gap_text(1e3) == curve.gap_text(-1e3) == ""
    rail = HeightRail(Document(layout), ViewState())
    qtbot.addWidget(rail)
    rail.resize(180, 600)
    rail.set_curve(curve)
    assert not rail.grab().isNull()
    pixel = rail.scale.pixel_of(between)
    assert "curve broken" in rail.scale.text_at(pixel)


def test_a_wholly_masked_height_has_no_curve() -> None:
    values = np.array([1e-6, np.nan, 1e-6])
    made = HeightCurve("z", "c", np.arange(3.0), values, np.array([False, False]))
    assert made.gap_text(0.5) == "no curve: all of the zone is masked here"
