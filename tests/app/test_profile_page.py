"""The profile page: the engine's curves, crossings and words, in step with all."""

from __future__ import annotations

import csv
import dataclasses
import io
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtGui import QImage
from pytestqt.qtbot import QtBot

from app.document import Document
from app.messages import Messages
from app.pages.level_names import free_place
from app.pages.profile_page import NONE_DRAWN, ProfilePage
from app.profile_values import Profiled, ProfileRequest, profiled, value_at
from app.profile_words import (
    crossing_texts,
    level_line_text,
    level_line_texts,
    marked_text,
    profile_csv,
)
from app.readout_values import ReadoutRequest, readout
from app.view_state import Look, ViewState
from engine.criteria import LevelRange, LevelRanges
from engine.edits import removed, replaced
from engine.errors import UserError
from engine.layout import Layout
from engine.layout_file import read
from engine.shaping import moved

SAMPLES = Path(__file__).parents[2] / "sample_layouts"


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLES / "imaging-corridor.json")


@pytest.fixture(scope="module")
def done(layout: Layout) -> Profiled:
    cases = tuple(case.id for case in layout.cases)
    return profiled(ProfileRequest(layout, layout.profiles[0].id, cases, (0.5, 1.0)))


@pytest.fixture
def page(qtbot: QtBot, layout: Layout) -> Iterator[ProfilePage]:
    made = ProfilePage(Document(layout), ViewState(), Messages())
    qtbot.addWidget(made)
    made.resize(1000, 420)
    made.show()
    _wait(qtbot, made)
    yield made
    made.close_worker()


def _wait(qtbot: QtBot, page: ProfilePage) -> None:
    document = page._document
    qtbot.waitUntil(
        lambda: (
            page.is_idle
            and page.done is not None
            and page.done.request == page._answers.asked
            and page.done.request.layout is document.layout
        ),
        timeout=30_000,
    )


def test_values_along_the_line_are_those_of_the_pointer_there(
    layout: Layout, done: Profiled
) -> None:
    curve = done.found.curves[1]
    assert (curve.case, curve.height) == (layout.cases[0].id, 1.0)
    for s in (0.3, 1.1, 2.0):
        x, y, _ = layout.profiles[0].path[0]
        found = readout(ReadoutRequest(layout, Look(), x, y + s, 1.0))
        assert found.resultant is not None
        assert value_at(done, curve, "AC", s) == pytest.approx(
            found.resultant, rel=6e-3
        )


def test_drawn_level_meets_the_first_curve_where_it_is_crossed(done: Profiled) -> None:
    first = done.found.curves[0]
    crossings = [
        c for c in done.found.crossings
        if (c.case, c.height) == (first.case, first.height)
    ]  # fmt: skip
    assert crossings
    for crossing in crossings:
        line = next(v for v in done.levels if v.level == crossing.level)
        level = float(np.interp(crossing.along, line.along, line.values))
        assert value_at(done, first, "AC", crossing.along) == pytest.approx(
            level, rel=2e-3
        )


def test_curves_of_different_mix_have_lines_of_their_own(layout: Layout) -> None:
    # A level that falls with frequency, and harmonics in one of two cases only.
    ranges = LevelRanges(
        ranges=(
            LevelRange(f_from=1, f_to=100, coefficient=1e-4),
            LevelRange(f_from=100, f_to=1e4, coefficient=2e-5),
        )
    )
    level = replace(layout.levels[0], values=ranges)
    layout = replaced(layout, level)
    cases = tuple(case.id for case in layout.cases)
    done = profiled(ProfileRequest(layout, layout.profiles[0].id, cases))
    assert {len(c.by_frequency) for c in done.found.curves} != {1}
    lines = [line for line in done.levels if line.level == level.id]
    assert len(lines) > 1
    assert sorted(k for line in lines for k in line.curves) == [0, 1]
    met = [c for c in done.found.crossings if c.level == level.id]
    assert met
    for crossing in met:
        k, curve = next(
            (k, c) for k, c in enumerate(done.found.curves) if c.case == crossing.case
        )
        line = next(line for line in lines if k in line.curves)
        at = float(np.interp(crossing.along, line.along, line.values))
        assert value_at(done, curve, "AC", crossing.along) == pytest.approx(
            at, rel=5e-3
        )
        name = done.names[curve.case]
        assert level_line_text(done, line).endswith(f", mix of {name}")


def test_lines_that_nearly_meet_have_one_name(done: Profiled) -> None:
    kind = [x for x in done.levels if x.level == "example-a"]
    assert len(kind) == 2
    texts = level_line_texts(done, kind)
    assert texts == ["Example A (invented), at each mix", ""]
    apart = dataclasses.replace(kind[1], values=2 * kind[1].values)
    assert all("mix of" in text for text in level_line_texts(done, [kind[0], apart]))


def test_a_line_without_length_is_told_not_plotted(layout: Layout) -> None:
    item = layout.profiles[0]
    place = item.path[0]
    layout = replaced(layout, replace(item, path=(place, place)))
    with pytest.raises(UserError, match=rf"“{item.title}” is not plotted\. The line "):
        profiled(ProfileRequest(layout, item.id, (layout.cases[0].id,)))


def test_names_of_levels_stand_clear_of_curves_and_names() -> None:
    xs = np.linspace(0.0, 10.0, 101)
    curve = (xs, 3.0 - 0.2 * xs)
    places = np.linspace(0.0, 7.0, 8)
    # The curve passes the row from 2 to 2.5 between x 2.5 and 5.
    assert free_place(places, 1.2, np.full(8, 2.0), 0.5, [curve]) == 0.0
    assert free_place(places[2:], 1.2, np.full(6, 2.0), 0.5, [curve]) == 5.0
    other = (np.linspace(5.0, 6.2, 9), np.full(9, 2.2))
    assert free_place(places[2:], 1.2, np.full(6, 2.0), 0.5, [curve, other]) == 7.0
    assert free_place(places[2:5], 1.2, np.full(3, 2.0), 0.5, [curve]) is None


def test_crossings_are_told_with_distance_and_direction(done: Profiled) -> None:
    texts = crossing_texts(done, "AC")
    for crossing in done.found.crossings:
        way = "rising" if crossing.rising else "falling"
        assert any(f"{crossing.along:.3f} m, {way}" in text for text in texts)


def test_table_holds_every_sample_of_every_curve(done: Profiled) -> None:
    rows = list(csv.reader(io.StringIO(profile_csv(done, "A caption"))))
    assert rows[0] == ["A caption"]
    column = next(k for k, h in enumerate(rows[1]) if h.startswith("B AC, As logged"))
    assert rows[1][column].endswith("[mG]")
    values = np.array([float(row[column]) for row in rows[2:]])
    assert values * 1e-7 == pytest.approx(done.found.curves[0].ac, rel=1e-6)


def test_a_line_gone_has_a_sentence(layout: Layout) -> None:
    with pytest.raises(UserError, match="not there any more"):
        profiled(ProfileRequest(layout, "gone", (layout.cases[0].id,)))


def test_page_shows_the_first_profile_in_the_case_of_the_map(
    page: ProfilePage, layout: Layout
) -> None:
    assert page.done is not None
    assert page.done.request.profile == layout.profiles[0].id
    assert page.done.request.cases == (layout.cases[0].id,)
    assert "is crossed at" in page.findings.text()
    assert page.table.contents.rowCount() == len(page.done.found.along)


def test_page_follows_load_case_and_layout(qtbot: QtBot, page: ProfilePage) -> None:
    other = page._document.layout.cases[1].id
    page._view_state.set(case=other)
    _wait(qtbot, page)
    assert page.done is not None
    assert page.done.request.cases == (other,)
    before = page.done.found.crossings[0].along
    document = page._document
    line = document.layout.profiles[0].id
    document.edit("Move", moved(document.committed, [line], 0.0, 0.1))
    _wait(qtbot, page)
    assert page.done.found.crossings[0].along == pytest.approx(before - 0.1, abs=0.002)


def test_several_cases_and_heights_stand_together(
    qtbot: QtBot, page: ProfilePage, layout: Layout
) -> None:
    page.controls.choose(tuple(c.id for c in layout.cases), (0.5, 1.5))
    _wait(qtbot, page)
    assert page.done is not None
    assert len(page.done.found.curves) == 4
    assert page.controls.typed.text() == "0.50 1.50"
    page.plot._point(1.0)
    assert page.now.text() == marked_text(page.done, "AC", 1.0)
    assert page.now.text().count("mG") == 4


def test_typed_heights_are_plotted_and_bad_ones_refused(
    qtbot: QtBot, page: ProfilePage
) -> None:
    page.controls.typed.setText("0.8 1200mm")
    page.controls.typed.editingFinished.emit()
    _wait(qtbot, page)
    assert page.done is not None
    assert page.done.request.heights == (0.8, 1.2)
    told: list[str] = []
    page.controls.refused.connect(told.append)
    page.controls.typed.setText("high")
    page.controls.typed.editingFinished.emit()
    assert "not a length" in told[0]
    assert page.controls.typed.text() == "0.80 1.20"


def test_keys_step_along_the_line_and_to_crossings(
    qtbot: QtBot, page: ProfilePage
) -> None:
    assert page.done is not None
    places: list[object] = []
    page.pointed.connect(places.append)
    page.plot.setFocus()
    qtbot.keyClick(page.plot, Qt.Key.Key_PageDown)
    crossing = page.done.found.crossings[0]
    assert page.plot.at == pytest.approx(crossing.along)
    assert places[-1] == pytest.approx(crossing.at, abs=1e-6)
    qtbot.keyClick(page.plot, Qt.Key.Key_Right)
    assert page.plot.at == pytest.approx(crossing.along + 0.022)
    qtbot.keyClick(page.plot, Qt.Key.Key_End)
    assert page.plot.at == pytest.approx(2.2)


def test_axis_is_logarithmic_or_linear(page: ProfilePage) -> None:
    assert page.done is not None
    value = float(page.done.found.curves[0].ac[0])
    assert page.plot._y(value) == pytest.approx(np.log10(value / 1e-7))
    page.controls.log.setChecked(False)
    assert page.plot._y(value) == pytest.approx(value / 1e-7)


def test_page_is_exported_as_picture_vectors_and_numbers(
    page: ProfilePage, tmp_path: Path
) -> None:
    for ending in ("png", "svg", "csv"):
        page.write(tmp_path / f"profile.{ending}")
    image = QImage(str(tmp_path / "profile.png"))
    assert image.width() == page.plot.width()
    assert image.height() > page.plot.height()
    text = (tmp_path / "profile.svg").read_text("utf-8")
    assert "From the shaft wall through the corridor" in text
    assert "is crossed at" in text
    assert "distance [m]" in (tmp_path / "profile.csv").read_text("utf-8")


def test_empty_page_says_how_to_draw_a_profile(qtbot: QtBot, page: ProfilePage) -> None:
    document = page._document
    line = document.layout.profiles[0].id
    document.edit("Delete", removed(document.committed, line))
    qtbot.waitUntil(lambda: page.reason.text() == NONE_DRAWN)
    assert not page.body.isVisible()


def test_names_with_markup_are_shown_as_they_are(
    qtbot: QtBot, page: ProfilePage
) -> None:
    document = page._document
    line = document.layout.profiles[0]
    renamed = replace(line, name="<b>Line</b> & more")
    document.edit("Name", replaced(document.committed, renamed))
    _wait(qtbot, page)
    assert page.controls.profiles.currentText() == "<b>Line</b> & more"
