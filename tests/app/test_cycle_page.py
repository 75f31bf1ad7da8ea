"""The cycle page: what the engine says of a place, in step with document and view."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtGui import QImage
from pytestqt.qtbot import QtBot

from app.cycle_values import (
    CyclePlace,
    CycleRequest,
    cycle_at,
    ellipse_curve,
    ellipse_text,
    place_text,
    plane_axes,
    summary_text,
    waves_csv,
)
from app.document import Document
from app.messages import Messages
from app.readout_values import ReadoutRequest, readout
from app.view_state import Look, ViewState
from app.views.cycle_page import CyclePage
from engine.edits import replaced
from engine.errors import UserError
from engine.layout import Layout
from engine.layout_file import read
from engine.shaping import moved

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLE)


@pytest.fixture
def document(layout: Layout) -> Document:
    return Document(layout)


@pytest.fixture
def page(qtbot: QtBot, document: Document) -> Iterator[CyclePage]:
    made = CyclePage(document, ViewState(), Messages())
    qtbot.addWidget(made)
    made.resize(1000, 700)
    made.show()
    yield made
    made.close_worker()


def _wait(qtbot: QtBot, page: CyclePage, at: tuple[float, float, float]) -> None:
    qtbot.waitUntil(
        lambda: page.is_idle and page.view is not None and page.view.at == at,
        timeout=30_000,
    )


def _receptor(layout: Layout) -> CyclePlace:
    found = layout.receptors[0]
    return CyclePlace(found.at, found.id)


def test_rms_of_a_receptor_is_that_of_the_pointer_there(layout: Layout) -> None:
    place = _receptor(layout)
    view = cycle_at(CycleRequest(layout, "", place))
    found = readout(ReadoutRequest(layout, Look(), *place.at))
    assert view.rms == pytest.approx(found.resultant, rel=1e-9)
    assert summary_text(layout, view).startswith(f"RMS {view.rms / 1e-6:.1f} µT")


def test_unknown_angles_of_a_harmonic_make_a_named_bound(layout: Layout) -> None:
    circuits = [
        replace(c, spectrum=tuple(replace(x, offset=None) for x in c.spectrum))
        for c in layout.circuits
    ]
    unknown = replaced(layout, *circuits)
    place = _receptor(layout)
    known = cycle_at(CycleRequest(layout, "", place))
    view = cycle_at(CycleRequest(unknown, "", place))
    assert known.is_waveform
    assert not view.is_waveform
    assert view.peak > known.peak
    text = summary_text(unknown, view)
    assert "peak at most" in text
    assert "a bound, because " in text


def test_every_vector_of_one_frequency_lies_on_its_ellipse(layout: Layout) -> None:
    view = cycle_at(CycleRequest(layout, "", _receptor(layout)))
    ellipse = view.ellipses[0]
    angles = np.linspace(0, 2 * np.pi, 50)[:, None]
    vectors = math.sqrt(2) * (np.exp(1j * angles) * ellipse.phasor).real
    along, across = (vectors @ plane_axes(ellipse).T).T
    equation = (along / ellipse.semi_major) ** 2 + (across / ellipse.semi_minor) ** 2
    assert equation == pytest.approx(2.0)
    curve = ellipse_curve(ellipse)
    assert np.abs(curve).max(axis=0) == pytest.approx(
        [math.sqrt(2) * ellipse.semi_major, math.sqrt(2) * ellipse.semi_minor]
    )


def test_page_tells_the_instant_that_is_scrubbed_to(
    qtbot: QtBot, page: CyclePage, layout: Layout
) -> None:
    place = _receptor(layout)
    page.show_place(place)
    _wait(qtbot, page, place.at)
    wave = page.board.wave
    assert wave is not None
    page.slider.setValue(int(np.argmax(wave.magnitudes)))
    assert f"|B| {wave.peak / 1e-6:.1f} µT" in page.now.text()
    assert f"of {1e3 * wave.period:.2f} ms" in page.now.text()


def test_playing_goes_on_by_itself_and_stops_when_hidden(
    qtbot: QtBot, page: CyclePage, layout: Layout
) -> None:
    place = _receptor(layout)
    page.show_place(place)
    _wait(qtbot, page, place.at)
    page.setFocus()
    qtbot.keyClick(page, Qt.Key.Key_Space)
    assert page.is_playing
    qtbot.waitUntil(lambda: page.slider.value() > 0)
    page.hide()
    assert not page.is_playing


def test_page_follows_its_receptor_when_that_moves(
    qtbot: QtBot, page: CyclePage, document: Document
) -> None:
    place = _receptor(document.layout)
    page.show_place(place)
    _wait(qtbot, page, place.at)
    document.edit("Move", moved(document.committed, [place.receptor], 0.5, 0.0))
    _wait(qtbot, page, document.layout.receptors[0].at)
    assert page.places.currentText() == place_text(
        document.layout, CyclePlace(document.layout.receptors[0].at, place.receptor)
    )


def test_a_place_inside_a_conductor_has_a_sentence_and_no_plots(
    qtbot: QtBot, page: CyclePage, layout: Layout
) -> None:
    from engine.conductors import conductors

    part = next(c for c in conductors(layout) if c.role == "run")
    middle = 0.5 * (part.path[0] + part.path[1])
    at = (float(middle[0]), float(middle[1]), float(middle[2]))
    with pytest.raises(UserError, match="inside a conductor"):
        cycle_at(CycleRequest(layout, "", CyclePlace(at)))
    page.show_place(CyclePlace(at))
    qtbot.waitUntil(lambda: "inside a conductor" in page.reason.text(), timeout=30_000)
    assert not page.board.isVisible()


def test_table_holds_the_wave_in_the_unit_that_it_names(layout: Layout) -> None:
    view = cycle_at(CycleRequest(layout, "", _receptor(layout)))
    rows = list(csv.reader(io.StringIO(waves_csv(layout, view, "A caption"))))
    assert rows[0] == ["A caption"]
    assert rows[2][2:] == ["Bx [µT]", "By [µT]", "Bz [µT]", "|B| [µT]"]
    values = np.array([[float(v) for v in row[1:]] for row in rows[3:]])
    wave = view.waves[0]
    assert len(values) == len(wave.times)
    assert 1e-6 * values[:, 4] == pytest.approx(wave.magnitudes, rel=1e-5)
    mean_square = np.mean(values[:, 1:4] ** 2, axis=0).sum()
    assert 1e-6 * math.sqrt(mean_square) == pytest.approx(view.rms, rel=1e-5)


def test_page_is_exported_as_picture_vectors_and_numbers(
    qtbot: QtBot, page: CyclePage, layout: Layout, tmp_path: Path
) -> None:
    place = _receptor(layout)
    page.show_place(place)
    _wait(qtbot, page, place.at)
    for ending in ("png", "svg", "csv"):
        page.write(tmp_path / f"period.{ending}")
    image = QImage(str(tmp_path / "period.png"))
    assert image.width() == page.board.width()
    assert image.height() > page.board.height()
    vectors = (tmp_path / "period.svg").read_text("utf-8")
    assert "Flux density over one period" in vectors
    assert "semi-major" in vectors
    assert place_text(layout, place) in (tmp_path / "period.csv").read_text("utf-8")


def test_shape_of_the_ellipse_is_told_with_both_semi_axes(layout: Layout) -> None:
    view = cycle_at(CycleRequest(layout, "", _receptor(layout)))
    ellipse = view.ellipses[0]
    text = ellipse_text(layout, ellipse)
    assert f"semi-major {ellipse.semi_major / 1e-6:.1f} µT" in text
    ratio = ellipse.semi_minor / ellipse.semi_major
    assert f"axes {ratio:.2g} : 1" in text
