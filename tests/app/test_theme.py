"""Colours can be read: contrast by WCAG 2.1 in both themes."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtWidgets import QLineEdit, QStyleFactory, QVBoxLayout, QWidget

from app.panels.panel import Words
from app.theme import DARK, LIGHT, Theme, apply, contrast, theme_for
from engine.colour_ramp import OPACITY, rgb_ramp

BACKGROUNDS = ("paper", "window", "panel")
TEXTS = ("text", "muted", "accent", "warning", "below", "above", "not_evaluable")


def test_contrast_of_black_and_white_is_the_largest():
    # WCAG 2.1: 21:1 is the largest contrast ratio.
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0)


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
@pytest.mark.parametrize("background", BACKGROUNDS)
@pytest.mark.parametrize("text", TEXTS)
def test_text_stands_out(theme: Theme, background: str, text: str):
    assert contrast(getattr(theme, text), getattr(theme, background)) >= 4.5


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
@pytest.mark.parametrize("background", BACKGROUNDS)
def test_lines_that_carry_meaning_stand_out(theme: Theme, background: str):
    assert contrast(theme.line, getattr(theme, background)) >= 3.0


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
def test_text_on_the_accent_can_be_read(theme: Theme):
    assert contrast(theme.on_accent, theme.accent) >= 4.5


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
def test_the_outline_of_a_field_stands_out(qtbot, theme: Theme):
    apply(theme)
    field = QLineEdit()
    qtbot.addWidget(field)
    field.setStyle(QStyleFactory.create("Fusion"))
    field.resize(80, 24)
    image = field.grab().toImage()
    edge = image.pixelColor(40, 0).name()
    assert contrast(edge, theme.window) >= 3.0


def test_words_follow_a_change_of_theme(qtbot):
    apply(LIGHT)
    top = QWidget()
    qtbot.addWidget(top)
    column = QVBoxLayout(top)
    texts = {style: Words("Words", style) for style in ("plain", "muted", "warning")}
    for words in texts.values():
        column.addWidget(words)
    top.show()
    for theme in (DARK, LIGHT):
        apply(theme)
        # The style hands a palette on with the next turn of the event loop.
        qtbot.waitUntil(lambda: theme_for(top.palette()) is theme)  # noqa: B023
        for style, words in texts.items():
            shown = words.palette().color(words.foregroundRole()).name()
            assert shown == getattr(theme, "text" if style == "plain" else style)


def lab_of(colour: np.ndarray) -> np.ndarray:
    """CIELAB (D65) of sRGB bytes, IEC 61966-2-1."""
    c = colour / 255.0
    linear = np.where(c <= 0.04045, c / 12.92, ((c + 0.055) / 1.055) ** 2.4)
    # From XYZ to linear sRGB, and the white of D65: the standard's.
    to_rgb = np.array(
        [
            [3.2404542, -1.5371385, -0.4985314],
            [-0.9692660, 1.8760108, 0.0415560],
            [0.0556434, -0.2040259, 1.0572252],
        ]
    )
    xyz = np.linalg.solve(to_rgb, linear) / [0.95047, 1.0, 1.08883]
    x, y, z = np.where(xyz > (6 / 29) ** 3, np.cbrt(xyz), xyz * 841 / 108 + 4 / 29)
    return np.array([116 * y - 16, 500 * (x - y), 200 * (y - z)])


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=["light", "dark"])
@pytest.mark.parametrize("end", [0, -1], ids=["lowest", "highest"])
def test_no_end_of_the_map_looks_like_the_paper(theme, end):
    paper = np.array([int(theme.paper[i : i + 2], 16) for i in (1, 3, 5)], float)
    shown = np.round(OPACITY * rgb_ramp()[end] + (1 - OPACITY) * paper)
    # 2.3 is what can just be told beside each other: several times as much.
    assert np.linalg.norm(lab_of(shown) - lab_of(paper)) > 15
    text = "#" + "".join(f"{int(c):02x}" for c in shown)
    assert contrast(text, theme.paper) > 1.19
