"""Maps of variants: one range, differences with their sign, nothing for nothing."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from msgspec import structs
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent

from app.document import Document
from app.messages import Messages
from app.pages.variants_page import VariantsPage
from app.variant_map_words import at_text, summary_text
from app.variant_maps import (
    DIFFERENCE,
    RATIO,
    SIDES,
    ChangeMaps,
    ChangeRequest,
    panes,
)
from app.view_state import ViewState
from engine import layout_file
from engine.colour_ramp import rgb_two_sided
from engine.variant import Variant

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "imaging-corridor.json"
LAYOUT = layout_file.read(SAMPLE)


def request(variant: str, against: str | None = None) -> ChangeRequest:
    return ChangeRequest(LAYOUT, variant, against, "as-logged", (0.8,), "z 0.80 m")


@pytest.fixture(scope="module")
def change():
    return ChangeMaps().change(request("bond-removed"), lambda: False)


def colour_at(shown, x: float, y: float) -> list[int]:
    x0, y0, x1, y1 = shown.area
    rows, columns = shown.rgba.shape[:2]
    row = int((y - y0) / (y1 - y0) * rows)
    column = int((x - x0) / (x1 - x0) * columns)
    return shown.rgba[row, column].tolist()


def test_the_bed_lies_in_orange_and_the_control_desk_in_blue(change):
    bed = next(r for r in LAYOUT.receptors if r.id == "stress-test-bed").at
    desk = next(r for r in LAYOUT.receptors if r.id == "control-desk").at
    for how in (DIFFERENCE, RATIO):
        (shown,) = panes(change, how)
        red, _, blue, _ = colour_at(shown, bed[0], bed[1])
        assert red > blue
        red, _, blue, _ = colour_at(shown, desk[0], desk[1])
        assert blue > red
    assert "of it" in at_text(change, bed[0], bed[1])
    assert at_text(change, bed[0], bed[1]).endswith("1.14 of it")


def test_two_maps_have_one_range_and_each_its_own_plan(change):
    before, after = panes(change, SIDES)
    assert before.ticks == after.ticks
    assert np.array_equal(before.bar, after.bar)
    assert before.title == "Base"
    assert after.title == "Second bond removed"
    assert not np.array_equal(before.rgba, after.rgba)


def test_against_another_variant_the_sign_is_that_of_the_pair():
    maps = ChangeMaps()
    there = maps.change(request("both", "bond-removed"), lambda: False).maps
    back = maps.change(request("bond-removed", "both"), lambda: False).maps
    assert there.difference == pytest.approx(-back.difference)


def test_an_empty_variant_changes_nothing_and_has_no_lines():
    whole = structs.replace(LAYOUT, variants=(Variant(id="same", name="Same"),))
    asked = _of(request("same"), whole)
    change = ChangeMaps().change(asked, lambda: False)
    (shown,) = panes(change, DIFFERENCE)
    assert shown.lines == ()
    free = ~change.maps.mask
    assert (shown.rgba[free] == [*rgb_two_sided()[127], 255]).all()
    assert (
        summary_text(change)
        == "“Same” has the field of the base everywhere on this map."
    )


def _of(asked: ChangeRequest, whole) -> ChangeRequest:
    return ChangeRequest(
        whole, asked.variant, None, asked.case, asked.heights, asked.heights_name
    )


def test_the_line_of_no_change_parts_rise_from_fall(change):
    (shown,) = panes(change, DIFFERENCE)
    bold = [line for line in shown.lines if line.bold]
    assert bold
    assert {line.text for line in bold} == {"no change"}
    assert any(line.text.startswith("+") for line in shown.lines)
    assert any(line.text.startswith("−") for line in shown.lines)


def test_the_page_shows_maps_follows_the_choice_and_writes_them(qtbot, tmp_path):
    document, state = Document(LAYOUT), ViewState()
    page = VariantsPage(document, state, Messages())
    qtbot.addWidget(page)
    page.resize(1000, 700)
    page.tabs.setCurrentWidget(page.maps)
    page.show()
    qtbot.waitUntil(
        lambda: page.is_idle and page.maps.change is not None, timeout=60000
    )
    document.choose("neutral-returned")
    qtbot.waitUntil(
        lambda: page.is_idle and page.maps.change.request.variant == "neutral-returned",
        timeout=60000,
    )
    assert page.maps.caption() == (
        "Two maps of RMS flux density · largest over heights, Corridor · case As "
        "logged · variant Neutral of R3 beside its lines against base"
    )
    for ending in (".png", ".svg", ".csv"):
        page.write(tmp_path / f"m{ending}")
    first = (tmp_path / "m.csv").read_text(encoding="utf-8").splitlines()[0]
    assert first == (
        "x [m],y [m],Base [mG],Neutral of R3 beside its lines [mG],"
        "difference [mG],ratio"
    )
    _zoom(page.maps.left)
    assert page.maps.left.sight == page.maps.right.sight
    qtbot.keyClick(page.maps.right, Qt.Key.Key_Home)
    assert page.maps.left._sight is None
    page.close_worker()


def _zoom(pane) -> None:
    at = QPointF(100.0, 100.0)
    pane.wheelEvent(
        QWheelEvent(
            at, pane.mapToGlobal(at), QPoint(), QPoint(0, 120),
            Qt.MouseButton.NoButton, Qt.KeyboardModifier.NoModifier,
            Qt.ScrollPhase.NoScrollPhase, False,
        )
    )  # fmt: skip
