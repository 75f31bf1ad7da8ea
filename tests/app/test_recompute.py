"""The background computation: coarse at once, fine after, nothing twice."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import msgspec
import numpy as np
import pytest

from app.document import Document
from app.map_picture import MapPicture
from app.margin_values import Margins
from app.recompute import Recompute
from app.view_state import ViewState
from engine.assessment import assess
from engine.decisions import worst_comparisons
from engine.edits import replaced
from engine.layout import Layout
from engine.layout_file import read

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "small-switch-room.json"
RECT = (-2.0, -2.0, 10.0, 8.0)


class Heard:
    """What a recompute sent, in order."""

    def __init__(self, recompute: Recompute) -> None:
        self.maps: list[MapPicture] = []
        self.margins: list[Margins] = []
        self.curves: list[object] = []
        self.stale: list[bool] = []
        self.problems: list[str] = []
        recompute.map_ready.connect(self.maps.append)
        recompute.margins_ready.connect(self.margins.append)
        recompute.curve_ready.connect(self.curves.append)
        recompute.stale.connect(self.stale.append)
        recompute.problem.connect(self.problems.append)

    def forget(self) -> None:
        for kept in (self.maps, self.margins, self.curves, self.stale, self.problems):
            kept.clear()


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLE)


@pytest.fixture
def document(qapp: object, layout: Layout) -> Document:
    return Document(layout)


@pytest.fixture
def view_state(qapp: object) -> ViewState:
    return ViewState()


@pytest.fixture
def recompute(document: Document, view_state: ViewState) -> Iterator[Recompute]:
    # No machine is slow enough for this; staleness has its own test.
    made = Recompute(document, view_state, stale_after=60_000)
    yield made
    made.close()


def shifted(layout: Layout, by: float) -> Layout:
    run = layout.runs[0]
    route = tuple((x, y + by, z) for x, y, z in run.route)
    return replaced(layout, msgspec.structs.replace(run, route=route))


def test_settled_layout_gets_a_coarse_then_a_fine_map(recompute: Recompute) -> None:
    heard = Heard(recompute)
    recompute.set_view(RECT, (600, 500))
    assert recompute.wait_until_idle()
    assert [m.is_coarse for m in heard.maps] == [True, False]
    assert all(m.rect == RECT for m in heard.maps)
    assert len(heard.curves) == 1
    assert not heard.stale


def test_margins_are_those_of_the_engine(recompute: Recompute, layout: Layout) -> None:
    heard = Heard(recompute)
    recompute.ask()
    assert recompute.wait_until_idle()
    [margins] = heard.margins
    assert not margins.is_sampled
    expected = worst_comparisons(assess(layout, cases=[layout.cases[0]]))
    assert [(r.place, r.level, r.state, r.value) for r in margins.rows] == [
        (c.place, c.level, c.state, c.value) for c in expected
    ]


def test_equal_request_is_no_work(recompute: Recompute) -> None:
    heard = Heard(recompute)
    recompute.set_view(RECT, (600, 500))
    assert recompute.wait_until_idle()
    heard.forget()
    recompute.set_view(RECT, (600, 500))
    recompute.ask()
    assert recompute.is_idle
    assert recompute.wait_until_idle()
    assert not heard.maps
    assert not heard.margins


def test_panning_leaves_margins_and_curve_alone(recompute: Recompute) -> None:
    heard = Heard(recompute)
    recompute.set_view(RECT, (600, 500))
    assert recompute.wait_until_idle()
    heard.forget()
    recompute.set_view((-1.0, -2.0, 11.0, 8.0), (600, 500))
    assert recompute.wait_until_idle()
    assert [m.is_coarse for m in heard.maps] == [True, False]
    assert not heard.margins
    assert not heard.curves


def test_a_drag_shows_coarse_maps_and_sampled_margins(
    recompute: Recompute, document: Document, layout: Layout
) -> None:
    recompute.set_view(RECT, (600, 500))
    assert recompute.wait_until_idle()
    heard = Heard(recompute)
    for k in range(1, 4):
        document.preview(shifted(layout, 0.05 * k))
        assert recompute.wait_until_idle()
    assert [m.is_coarse for m in heard.maps] == [True] * 3
    assert [m.is_sampled for m in heard.margins] == [True] * 3
    assert not any(row.state for m in heard.margins for row in m.rows)


def test_release_brings_the_fine_map_and_exact_margins(
    recompute: Recompute, document: Document, layout: Layout
) -> None:
    recompute.set_view(RECT, (600, 500))
    assert recompute.wait_until_idle()
    moved = shifted(layout, 0.2)
    document.preview(moved)
    assert recompute.wait_until_idle()
    heard = Heard(recompute)
    document.edit("Move the run", moved)
    assert recompute.wait_until_idle()
    assert [m.is_coarse for m in heard.maps] == [False]
    assert [m.is_sampled for m in heard.margins] == [False]


def test_undo_shows_the_margins_that_were(
    recompute: Recompute, document: Document, layout: Layout
) -> None:
    heard = Heard(recompute)
    recompute.ask()
    assert recompute.wait_until_idle()
    document.edit("Move the run", shifted(layout, 0.2))
    assert recompute.wait_until_idle()
    document.undo_stack.undo()
    assert recompute.wait_until_idle()
    assert heard.margins[-1] is heard.margins[0]
    assert heard.margins[1].rows != heard.margins[0].rows


def test_a_burst_of_previews_ends_with_the_last(
    recompute: Recompute, document: Document, layout: Layout
) -> None:
    recompute.set_view(RECT, (600, 500))
    assert recompute.wait_until_idle()
    heard = Heard(recompute)
    for k in range(1, 30):
        document.preview(shifted(layout, 0.01 * k))
    document.edit("Move the run", shifted(layout, 0.3))
    assert recompute.wait_until_idle()
    assert not heard.maps[-1].is_coarse
    assert heard.margins[-1].layout is document.layout
    assert len(heard.maps) < 29


def test_newer_request_stops_the_older(
    recompute: Recompute, document: Document, layout: Layout
) -> None:
    heard = Heard(recompute)
    recompute.set_view(RECT, (600, 500))
    last = shifted(layout, 0.4)
    for k in range(1, 5):
        document.edit(f"Move the run {k}", shifted(layout, 0.1 * k))
    assert recompute.wait_until_idle()
    assert document.layout == last
    assert len(heard.margins) <= 2
    assert heard.margins[-1].layout is document.layout


def test_what_takes_long_is_called_out_of_date(
    document: Document, view_state: ViewState, layout: Layout
) -> None:
    recompute = Recompute(document, view_state, stale_after=0)
    heard = Heard(recompute)
    try:
        recompute.set_view(RECT, (600, 500))
        assert recompute.wait_until_idle()
        heard.forget()
        document.edit("Move the run", shifted(layout, 0.2))
        assert recompute.wait_until_idle()
    finally:
        recompute.close()
    assert heard.stale == [True, False]
    assert heard.maps[0].is_stale
    assert not heard.maps[-1].is_stale


def test_height_of_the_look_changes_the_map(
    recompute: Recompute, view_state: ViewState
) -> None:
    heard = Heard(recompute)
    recompute.set_view(RECT, (600, 500))
    assert recompute.wait_until_idle()
    before = heard.maps[-1]
    heard.forget()
    view_state.set(height=0.3)
    assert recompute.wait_until_idle()
    assert not heard.margins
    assert "z 0.30" in heard.maps[-1].caption
    assert heard.maps[-1].image != before.image


def test_geometry_that_cannot_be_is_a_problem_and_the_map_is_stale(
    recompute: Recompute, document: Document, layout: Layout
) -> None:
    recompute.set_view(RECT, (600, 500))
    assert recompute.wait_until_idle()
    heard = Heard(recompute)
    run = layout.runs[0]
    first, second = np.array(run.route[0]), np.array(run.route[1])
    back = tuple(float(c) for c in first + 0.5 * (second - first))
    broken = msgspec.structs.replace(run, route=(*run.route[:2], back))
    document.edit("Bend the run back on itself", replaced(layout, broken))
    assert recompute.wait_until_idle()
    assert any(sentence.endswith(".") for sentence in heard.problems)
    assert heard.maps[-1].is_stale
    document.undo_stack.undo()
    assert recompute.wait_until_idle()
    assert heard.problems[-1] == ""
    assert not heard.maps[-1].is_stale


def test_layout_without_anything_gives_an_empty_map(
    recompute: Recompute, document: Document
) -> None:
    heard = Heard(recompute)
    recompute.set_view(RECT, (600, 500))
    document.open(Layout(), None)
    assert recompute.wait_until_idle()
    assert heard.margins[-1].rows == ()
    assert not heard.maps[-1].iso_lines
    assert heard.maps[-1].image.pixelColor(5, 5).alpha() == 0
