"""Profile, contributions and distance to a level in the window, as a user has them."""

from __future__ import annotations

import csv
from pathlib import Path

import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot
from shapely.geometry import LineString, Point

from app import preferences, recovery
from app.cycle_values import CyclePlace
from app.document import Document
from app.level_distance import DistanceRequest, factors, reached, targets
from app.level_marks import distance_text, overlay_of
from app.main_window import MainWindow
from app.map_request import heights_of
from app.margin_values import concern
from app.messages import Messages
from app.pages.profile_page import ProfilePage
from app.profile_words import marked_text, whole_table
from app.readout_values import ReadoutRequest, readout
from app.tools.profile import ProfileTool
from app.view_state import Look
from app.why_pages import WhyPages
from app.why_values import WhyPlace, WhyRequest, value_text, why_at
from engine.edits import added, replaced
from engine.errors import UserError
from engine.layout import Layout
from engine.layout_file import read
from engine.places import MeasuredValue, Profile
from engine.shaping import moved
from engine.sight import LOOKING_X, LOOKING_Y, PLAN

SAMPLES = Path(__file__).parents[2] / "sample_layouts"


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLES / "small-switch-room.json")


@pytest.fixture
def window(
    qtbot: QtBot, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, layout: Layout
) -> MainWindow:
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path / "settings")
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")
    made = MainWindow(Document(layout), Messages())
    qtbot.addWidget(made, before_close_func=lambda w: w.document.undo_stack.setClean())
    made.resize(1400, 1000)
    made.show()
    return made


def _pages(window: MainWindow) -> WhyPages:
    return window.view_pages.why


def _exact(window: MainWindow) -> bool:
    margins = window.margins._margins
    return margins is not None and margins.assessment is not None


def _request(layout: Layout, title: str) -> DistanceRequest:
    target = next(t for t in targets(layout) if t.title == title)
    heights, name = heights_of(layout, Look())
    level = layout.levels[0].id
    return DistanceRequest(layout, layout.cases[0].id, level, target, heights, name)


# -- distance to a level --------------------------------------------------------------


def test_every_vertex_of_the_lines_lies_on_the_level(layout: Layout) -> None:
    found = reached(_request(layout, layout.runs[0].title))
    for line in found.plan.lines:
        for x, y in line[:: max(1, len(line) // 8)]:
            ratios = [
                readout(ReadoutRequest(layout, Look(), float(x), float(y), z)).ratio
                for z in found.plan.heights
            ]
            assert max(r for r in ratios if r is not None) == pytest.approx(
                1.0, abs=0.01
            )


def test_dimension_leads_from_the_run_to_the_line(layout: Layout) -> None:
    run = layout.runs[0]
    found = reached(_request(layout, run.title))
    distance = found.distance
    assert distance is not None
    route = LineString([v[:2] for v in run.route])
    assert route.distance(Point(distance.start)) < 1e-6
    assert Point(distance.end).distance(route) == pytest.approx(distance.distance)
    overlay = overlay_of(found, PLAN)
    assert overlay is not None
    assert overlay.dimensions[0].end == distance.end
    assert overlay.dimensions[0].text.endswith(f"m from {run.title}")


def test_a_wall_is_measured_from_outwards_only(layout: Layout) -> None:
    room = layout.rooms[0]
    for title in (f"{way} wall of {room.title}" for way in ("+x", "+y")):
        distance = reached(_request(layout, title)).distance
        if distance is None:
            continue
        axis, sign = title[1], 1.0 if title[0] == "+" else -1.0
        k = "xy".index(axis)
        wall = max(sign * corner[k] for corner in room.outline)
        assert sign * distance.end[k] >= wall - 1e-6


def test_elevations_show_the_line_where_the_distance_ends(layout: Layout) -> None:
    found = reached(_request(layout, layout.runs[0].title))
    assert found.distance is not None
    for sight, k in ((LOOKING_Y, 0), (LOOKING_X, 1)):
        overlay = overlay_of(found, sight)
        assert overlay is not None
        sign = 1.0 if k == 0 else -1.0
        end = sign * found.distance.end[k]
        heights = found.plan.heights
        nearest = min(
            Point(end, z).distance(LineString(line))
            for line in overlay.lines
            for z in heights
        )
        assert nearest < 0.01


def test_a_level_without_a_source_is_refused(layout: Layout) -> None:
    level = replace(layout.levels[0], source="")
    request = _request(layout, layout.runs[0].title)
    with pytest.raises(UserError, match="source"):
        reached(replace_layout(request, replaced(layout, level)))


def replace_layout(request: DistanceRequest, layout: Layout) -> DistanceRequest:
    return DistanceRequest(
        layout, request.case, request.level, request.target, request.heights
    )


def test_bar_tells_distance_and_factor_and_draws_them(
    qtbot: QtBot, window: MainWindow, layout: Layout
) -> None:
    bar = _pages(window).distance
    qtbot.waitUntil(lambda: _exact(window), timeout=60_000)
    window.document.select([layout.runs[0].id])
    _pages(window).open_distance()
    qtbot.waitUntil(lambda: bar.is_idle and bar.answer is not None, timeout=60_000)
    assert f"m from {layout.runs[0].title}" in bar.words.text()
    margins = window.margins._margins
    assert margins is not None
    assert margins.assessment is not None
    least = factors(margins.assessment, layout.cases[0].id, layout.levels[0].id)[0]
    assert f"{least.times} × this case ({least.title})" in bar.words.text()
    worst = max(r.ratio for r in margins.rows if r.ratio is not None)
    assert least.factor == pytest.approx(1 / worst)
    mark = window.drawings.plan.marks["distance to a level"]
    assert mark.dimensions
    assert any("× this case" in text for _, text in mark.labels)
    _moves(window, layout.runs[0].id)
    bar._ask()
    mark = window.drawings.plan.marks["distance to a level"]
    assert not mark.dimensions
    assert mark.labels[0][1].endswith("out of date")
    qtbot.keyClick(bar, Qt.Key.Key_Escape)
    assert bar.isHidden()
    assert not window.drawings.plan.marks


def _moves(window: MainWindow, item: str) -> None:
    document = window.document
    document.edit("Move", moved(document.committed, [item], 0.5, 0.0))


def test_exported_maps_show_the_lines_and_the_distance(
    qtbot: QtBot, window: MainWindow, layout: Layout, tmp_path: Path
) -> None:
    pages, bar = _pages(window), _pages(window).distance
    window.document.select([layout.runs[0].id])
    pages.open_distance()
    qtbot.waitUntil(lambda: bar.is_idle and bar.answer is not None, timeout=60_000)
    assert bar.answer is not None
    assert bar.answer.distance is not None
    picture, table = tmp_path / "far.svg", tmp_path / "far.csv"
    pages.write_distance(picture)
    qtbot.waitUntil(picture.exists, timeout=60_000)
    drawn = picture.read_text(encoding="utf-8")
    assert f">{distance_text(bar.answer.distance, 'm')}</text>" in drawn
    assert "reference level met" in drawn
    pages.write_distance(table)
    rows = list(csv.reader(table.read_text(encoding="utf-8").splitlines()))
    assert rows[2] == ["line", "x [m]", "y [m]"]
    assert len(rows) == 3 + sum(len(line) for line in bar.answer.plan.lines)
    # Without the bar the map has no such lines.
    bar.leave()
    plain = tmp_path / "plain.svg"
    qtbot.waitUntil(lambda: not window.jobs.is_running, timeout=60_000)
    window.exports.map(plain)
    qtbot.waitUntil(plain.exists, timeout=60_000)
    assert "reference level met" not in plain.read_text(encoding="utf-8")


def test_held_values_stand_wherever_a_value_stands(
    qtbot: QtBot, window: MainWindow, layout: Layout
) -> None:
    qtbot.waitUntil(lambda: _exact(window), timeout=60_000)
    pages, views = _pages(window), window.view_pages
    x, y = layout.zones[0].outline[0]
    at = (x, y, 1.0)
    line = Profile(id="line", path=(at, (x + 3.0, y + 1.0, 1.0)))
    window.document.edit("Draw", added(window.document.committed, line))
    pages.why.show_place(WhyPlace(at))
    views.cycle.show_place(CyclePlace(at))
    window.document.select([layout.runs[0].id])
    pages.open_distance()
    qtbot.waitUntil(lambda: _exact(window), timeout=60_000)
    window.menus._held.trigger()
    assert pages.why.place is not None
    before = why_at(WhyRequest(window.document.committed, "", WhyPlace(at)))
    was = f"was {value_text(before)}"
    _moves(window, layout.runs[0].id)
    qtbot.waitUntil(lambda: ", was " in pages.distance.words.text(), timeout=60_000)
    pages.open_profile()
    qtbot.waitUntil(lambda: "Was:" in pages.profile.findings.text(), timeout=60_000)
    done = pages.profile.done
    assert done is not None
    assert was in marked_text(done, "AC", 0.0)
    assert whole_table(done).heads[-1].endswith("as before [µT]")
    pages.open_why()
    qtbot.waitUntil(lambda: was in pages.why.told.text(), timeout=60_000)
    assert not pages.why.tree.isColumnHidden(7)
    window.show_page(views.cycle)
    qtbot.waitUntil(lambda: was in views.cycle.summary.text(), timeout=60_000)
    # Released, nothing is said to have been otherwise.
    window.menus._held.trigger()
    qtbot.waitUntil(lambda: "was" not in views.cycle.summary.text(), timeout=60_000)
    qtbot.waitUntil(lambda: "was" not in pages.distance.words.text(), timeout=60_000)


# -- pages ----------------------------------------------------------------------------


def test_a_drawn_profile_is_plotted_at_the_foot(
    qtbot: QtBot, window: MainWindow
) -> None:
    pages = _pages(window)
    tool = next(t for t in window.toolbox.tools if isinstance(t, ProfileTool))
    window.toolbox.activate(tool)
    window.drawings.fit()
    view = window.drawings.plan
    for place in ((1.0, 1.0), (3.0, 3.0)):
        at = view.camera().pixel(place).toPoint()
        QTest.mouseMove(view.viewport(), at)
        QTest.mouseClick(view.viewport(), Qt.MouseButton.LeftButton, pos=at)
    qtbot.keyClick(view, Qt.Key.Key_Return)
    page = pages.profile
    qtbot.waitUntil(lambda: page.is_idle and page.done is not None, timeout=60_000)
    assert page.isVisible()
    assert pages.foot.page is page
    assert window.drawings.isVisible()
    assert pages.foot.height() <= 0.4 * window.height()
    assert window.document.layout.profiles[0].id in view.drawing.items_by_id
    page.plot._point(0.5)
    assert view.marks["profile"].points[0] == pytest.approx(
        page._place(page.done, 0.5)[:2]
    )
    page.back.click()
    assert not pages.foot.isVisible()
    assert "profile" not in view.marks


def test_in_a_low_window_the_page_stands_in_the_place_of_the_drawing(
    qtbot: QtBot, window: MainWindow
) -> None:
    window.resize(1100, 700)
    _pages(window).open_profile()
    assert window.pages.currentWidget() is _pages(window).profile
    assert isinstance(window.pages.currentWidget(), ProfilePage)
    qtbot.keyClick(_pages(window).profile, Qt.Key.Key_Escape)
    assert window.pages.currentWidget() is window.drawings


def test_why_in_the_margins_takes_the_worst_value_apart(
    qtbot: QtBot, window: MainWindow
) -> None:
    qtbot.waitUntil(lambda: _exact(window), timeout=60_000)
    window.margins.ask_why.click()
    page = _pages(window).why
    qtbot.waitUntil(lambda: page.is_idle and page.why is not None, timeout=60_000)
    row = window.margins.tile.row
    assert row is not None
    assert page.why is not None
    assert page.why.shares.shown == pytest.approx(row.value, rel=1e-6)
    assert page.why.request.place.at == row.at


def test_why_of_a_selected_zone_is_its_worst_value(
    qtbot: QtBot, window: MainWindow, layout: Layout
) -> None:
    qtbot.waitUntil(lambda: _exact(window), timeout=60_000)
    zone = layout.zones[0]
    window.document.select([zone.id])
    pages = _pages(window)
    pages.open_why()
    margins = window.margins._margins
    assert margins is not None
    worst = max((r for r in margins.rows if r.place == zone.id), key=concern)
    place = pages.why.place
    assert place is not None
    assert place.at == worst.at
    assert place.title == f"{zone.title}, largest value"


def test_a_click_on_an_empty_place_is_taken_apart(
    qtbot: QtBot, window: MainWindow
) -> None:
    pages = _pages(window)
    pages.open_why()
    qtbot.waitUntil(lambda: pages.why.is_idle and pages.why.why is not None)
    window.drawings.fit()
    view = window.drawings.plan
    at = view.camera().pixel((2.05, 1.45)).toPoint()
    QTest.mouseMove(view.viewport(), at)
    QTest.mouseClick(view.viewport(), Qt.MouseButton.LeftButton, pos=at)
    qtbot.waitUntil(lambda: pages.why.is_idle, timeout=60_000)
    place = pages.why.place
    assert place is not None
    assert place.title == "Pointed at"
    assert place.at[:2] == pytest.approx((2.05, 1.45), abs=0.05)


def test_measured_values_stand_on_the_plan_and_in_the_margins(
    qtbot: QtBot, window: MainWindow, layout: Layout
) -> None:
    receptor = layout.receptors[0]
    at = receptor.at
    found = readout(ReadoutRequest(layout, Look(), *at))
    assert found.resultant is not None
    measured = MeasuredValue(flux_density=1.3 * found.resultant)
    changed = replace(
        receptor, measured=measured, levels=(layout.levels[0].id,),
        category=layout.levels[0].category,
    )  # fmt: skip
    window.document.edit("Measure", replaced(window.document.committed, changed))

    def told() -> bool:
        rows = window.margins.table.rows
        return any(r.measured_ratio == pytest.approx(1.3, rel=1e-6) for r in rows)

    qtbot.waitUntil(told, timeout=60_000)
    item = window.drawings.plan.drawing.items_by_id[receptor.id]
    camera = window.drawings.plan.camera()
    label = item.labels(camera, "m", is_crowded=False)[0]
    assert label.text.endswith("measured / calculated = 1.3")
    assert not window.margins.table.isColumnHidden(8)
