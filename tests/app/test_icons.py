"""Icons: every drawing renders, in the colour asked for."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from PySide6.QtGui import QColor

import app
from app.icons import icon

DRAWINGS = sorted((Path(app.__file__).parent / "resources" / "icons").glob("*.svg"))


@pytest.mark.parametrize("path", DRAWINGS, ids=lambda path: path.stem)
def test_a_drawing_shows_in_the_colour_asked_for(qapp, path):
    image = icon(path.stem, "#ff0000", "#777777").pixmap(24, 24).toImage()
    colours = {
        QColor(image.pixelColor(x, y)).name()
        for x in range(image.width())
        for y in range(image.height())
        if image.pixelColor(x, y).alpha() > 250
    }
    assert "#ff0000" in colours
    assert "#000000" not in colours


@pytest.mark.parametrize("path", DRAWINGS, ids=lambda path: path.stem)
def test_drawings_are_of_one_family(path):
    drawing = path.read_text("utf-8")
    assert 'viewBox="0 0 24 24"' in drawing
    assert set(re.findall(r'stroke-width="([^"]+)"', drawing)) == {"1.5"}
    assert set(re.findall(r'stroke="([^"]+)"', drawing)) == {"#000000"}
    assert set(re.findall(r'fill="([^"]+)"', drawing)) <= {"none", "#000000"}
