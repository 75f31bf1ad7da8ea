"""Colours and sizes of the screen, light and dark, and the application's palette.

Contrast is a contract: text ≥ 4.5:1 and lines that carry meaning ≥ 3:1 on what they
stand on, checked by a test.
"""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtGui import QColor, QPalette
from PySide6.QtWidgets import QApplication

#: Font sizes and the step of all spacing. [logical pixels]
SMALL, BODY, TITLE = 11, 13, 16
STEP = 4
_BODY = BODY


def set_text_size(percent: int) -> None:
    """Show texts larger or smaller than the system does.

    To be called before the modules of the screen are loaded, which take the sizes.
    """
    global SMALL, BODY, TITLE
    SMALL, BODY, TITLE = (round(size * percent / 100) for size in (SMALL, BODY, TITLE))
    font = QApplication.font()
    if font.pointSizeF() > 0:
        font.setPointSizeF(font.pointSizeF() * percent / 100)
    else:
        font.setPixelSize(round(font.pixelSize() * percent / 100))
    QApplication.setFont(font)


def scaled(pixels: float) -> int:
    """A width that holds text, for texts of the size shown. [logical pixels]

    >>> scaled(100)
    100
    """
    return round(pixels * BODY / _BODY)


@dataclass(frozen=True)
class Theme:
    """One set of colours; strings as #rrggbb."""

    name: str
    paper: str
    window: str
    panel: str
    text: str
    muted: str
    hairline: str
    line: str
    accent: str
    on_accent: str
    warning: str
    below: str
    above: str
    not_evaluable: str

    @property
    def is_dark(self) -> bool:
        return self.name == "dark"


LIGHT = Theme(
    name="light",
    paper="#ffffff",
    window="#f3f4f5",
    panel="#fafbfb",
    text="#1a1e22",
    muted="#56606a",
    hairline="#cdd2d7",
    line="#5f6a74",
    accent="#0b6a6a",
    on_accent="#ffffff",
    warning="#9a4a00",
    below="#2a5d9c",
    above="#b05000",
    not_evaluable="#636b74",
)

DARK = Theme(
    name="dark",
    paper="#15181b",
    window="#1d2125",
    panel="#22272c",
    text="#e7eaed",
    muted="#a2acb5",
    hairline="#3b434b",
    line="#8d98a3",
    accent="#56b8b2",
    on_accent="#0f1416",
    warning="#f0a35e",
    below="#8ab8ee",
    above="#f2a35c",
    not_evaluable="#a3abb4",
)


def theme_for(palette: QPalette) -> Theme:
    """The theme that goes with the system's palette."""
    return DARK if palette.color(QPalette.ColorRole.Window).lightness() < 128 else LIGHT


def theme_shown() -> Theme:
    """The theme of the whole application.

    For what is coloured while the palette changes: a widget within another one has
    its new palette only after the outer one was told of it.
    """
    return theme_for(QApplication.palette())


def qt_palette(theme: Theme) -> QPalette:
    """The theme as a palette for all standard widgets."""
    palette = QPalette()
    roles = {
        QPalette.ColorRole.Window: theme.window,
        QPalette.ColorRole.Base: theme.panel,
        QPalette.ColorRole.AlternateBase: theme.window,
        QPalette.ColorRole.Button: theme.window,
        QPalette.ColorRole.WindowText: theme.text,
        QPalette.ColorRole.Text: theme.text,
        QPalette.ColorRole.ButtonText: theme.text,
        QPalette.ColorRole.ToolTipBase: theme.panel,
        QPalette.ColorRole.ToolTipText: theme.text,
        QPalette.ColorRole.PlaceholderText: theme.muted,
        QPalette.ColorRole.BrightText: theme.warning,
        QPalette.ColorRole.Highlight: theme.accent,
        QPalette.ColorRole.HighlightedText: theme.on_accent,
        QPalette.ColorRole.Link: theme.accent,
        QPalette.ColorRole.Mid: theme.hairline,
        QPalette.ColorRole.Midlight: theme.hairline,
        QPalette.ColorRole.Dark: theme.line,
        QPalette.ColorRole.Light: theme.panel,
        QPalette.ColorRole.Shadow: theme.line,
    }
    for role, colour in roles.items():
        palette.setColor(role, QColor(colour))
    for role in (
        QPalette.ColorRole.Text,
        QPalette.ColorRole.ButtonText,
        QPalette.ColorRole.WindowText,
    ):
        palette.setColor(QPalette.ColorGroup.Disabled, role, QColor(theme.muted))
    return palette


#: Controls whose outline has to be seen against window and panel.
_OUTLINED = (
    "QAbstractSpinBox", "QCheckBox", "QComboBox", "QGroupBox", "QLineEdit",
    "QPlainTextEdit", "QPushButton", "QRadioButton", "QSlider", "QTextEdit",
)  # fmt: skip


def apply(theme: Theme) -> None:
    """Show the application in a theme."""
    palette = qt_palette(theme)
    QApplication.setPalette(palette)
    # The style draws outlines as the window's colour darkened to 1/1.4, which cannot
    # be seen on dark windows: these controls are told of a window that suits.
    outlined = QPalette(palette)
    outlined.setColor(QPalette.ColorRole.Window, QColor(theme.line).lighter(140))
    for name in _OUTLINED:
        # Bytes, which the types ask for, are refused.
        QApplication.setPalette(outlined, name)  # type: ignore[arg-type]


def contrast(first: str, second: str) -> float:
    """Contrast ratio of two colours, 1 to 21.

    Source: WCAG 2.1, definitions of relative luminance and contrast ratio.
    """
    lighter, darker = sorted((_luminance(first), _luminance(second)), reverse=True)
    return (lighter + 0.05) / (darker + 0.05)


def _luminance(colour: str) -> float:
    channels = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    linear = [
        c / 12.92 if c <= 0.03928 else ((c + 0.055) / 1.055) ** 2.4 for c in channels
    ]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]
