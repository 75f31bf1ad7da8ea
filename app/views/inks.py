"""Pens, brushes and fonts of the drawing in one theme; conductors by their letters."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QBrush, QColor, QFont, QFontMetricsF, QPen

from app.theme import SMALL, Theme

#: Colours of conductors on light and on dark paper. Source: IEC 60445, from memory:
#: L1 brown, L2 black, L3 grey, N blue, PE green-yellow, L+ red, L− white. Shades ours.
_LIGHT = {
    "L1": "#8a4a1f",
    "L2": "#16181a",
    "L3": "#7f868d",
    "N": "#1f6fc4",
    "PE": "#2f8f3a",
    "PEN": "#2f8f3a",
    "L+": "#b3372c",
    "L-": "#ffffff",
}
_DARK = {
    **_LIGHT,
    "L1": "#b5713c",
    "L2": "#000000",
    "L3": "#9aa1a8",
    "N": "#4f9be8",
    "PE": "#4db457",
    "PEN": "#4db457",
    "L+": "#d8594c",
}

#: The yellow of green-yellow.
YELLOW = "#f2d027"

#: Letters whose colour is green with yellow.
TWO_COLOURED = frozenset({"PE", "PEN"})


def conductor_colour(letters: str, theme: Theme) -> str:
    """The colour of a conductor, #rrggbb; neutral for letters without one."""
    table = _DARK if theme.is_dark else _LIGHT
    return table.get(letters.partition(" ")[0], theme.muted)


def pen(
    colour: str, width: float, dashes: tuple[float, ...] = (), alpha: float = 1.0
) -> QPen:
    """A pen of a constant width in pixels of the screen, whatever the zoom."""
    made = QPen(shade(colour, alpha), width)
    made.setCosmetic(True)
    made.setJoinStyle(Qt.PenJoinStyle.MiterJoin)
    made.setCapStyle(Qt.PenCapStyle.FlatCap)
    if dashes:
        made.setDashPattern(list(dashes))
    return made


def shade(colour: str, alpha: float = 1.0) -> QColor:
    """A colour with an opacity."""
    made = QColor(colour)
    made.setAlphaF(alpha)
    return made


def _mixed(colour: str, paper: str, part: float) -> QColor:
    """A colour laid over paper, opaque."""
    over, under = QColor(colour), QColor(paper)
    pairs = (
        (over.red(), under.red()),
        (over.green(), under.green()),
        (over.blue(), under.blue()),
    )
    return QColor(*(round(part * c + (1.0 - part) * p) for c, p in pairs))


class Inks:
    """Everything that the drawing is drawn with, in one theme.

    Attributes
    ----------
    theme : Theme
    text_factor : float
        All text of the drawing is larger by this.
    ratio : float
        Pixels of the screen to a logical one: pens of a constant width count those.
    over_map : bool
        A map shows: nothing may tint its colours.
    """

    def __init__(
        self, theme: Theme, text_factor: float = 1.0, ratio: float = 1.0
    ) -> None:
        self.theme = theme
        self.text_factor = text_factor
        self.ratio = ratio
        self.over_map = False
        self.room = self.pen(theme.text, 2.0)
        self.other_storey = self.pen(theme.line, 1.0)
        self.zone = self.pen(theme.text, 1.4, (6.0, 3.0, 1.0, 3.0))
        self.enclosure = self.pen(theme.line, 1.2)
        self.equipment = self.pen(theme.text, 1.2)
        self.route = self.pen(theme.text, 2.0)
        self.route_without_current = self.pen(theme.text, 2.0, (4.0, 3.0))
        self.band = self.pen(theme.text, 1.0)
        self.band_without_current = self.pen(theme.text, 1.2, (5.0, 4.0))
        self.strand = self.pen(theme.line if theme.is_dark else theme.muted, 0.8)
        self.link = self.pen(theme.line, 1.0)
        self.assumed_link = self.pen(theme.line, 1.0, (2.0, 3.0))
        self.selected = self.pen(theme.accent, 2.5)
        self.selected_halo = self.pen(theme.accent, 7.0, alpha=0.28)
        self.overlay = self.pen(theme.accent, 1.8)
        self.suggestion = self.pen(theme.accent, 1.2, (4.0, 4.0))
        self.catch_mark = self.pen(theme.above, 1.8)
        self.coarse_grid = _mixed(theme.hairline, theme.paper, 0.75)
        self.fine_grid = _mixed(theme.hairline, theme.paper, 0.35)
        self.band_fill = QBrush(shade(theme.text, 0.10))
        self.enclosure_fill = QBrush(shade(theme.line, 0.12))
        self.equipment_fill = QBrush(shade(theme.paper, 0.55))
        self.zone_fill = QBrush(shade(theme.accent, 0.05))
        self.patch = shade(theme.paper, 0.84)
        self.small = self._font(SMALL)
        self.bold = self._font(SMALL, bold=True)
        self.small_metrics = QFontMetricsF(self.small)
        self.bold_metrics = QFontMetricsF(self.bold)
        self._strands: dict[str, QBrush] = {}
        self._widths: dict[tuple[str, bool], float] = {}

    def pen(
        self,
        colour: str,
        width: float,
        dashes: tuple[float, ...] = (),
        alpha: float = 1.0,
    ) -> QPen:
        """A pen of a constant width in logical pixels, whatever the zoom."""
        return pen(colour, width * self.ratio, dashes, alpha)

    def strand_brush(self, letters: str) -> QBrush:
        """The fill of a conductor."""
        found = self._strands.get(letters)
        if found is None:
            found = QBrush(QColor(conductor_colour(letters, self.theme)))
            self._strands[letters] = found
        return found

    def width(self, text: str, *, bold: bool = False) -> float:
        """How wide a text is. [px]"""
        found = self._widths.get((text, bold))
        if found is None:
            metrics = self.bold_metrics if bold else self.small_metrics
            found = metrics.horizontalAdvance(text)
            if len(self._widths) > 5000:
                self._widths.clear()
            self._widths[text, bold] = found
        return found

    def _font(self, size: int, *, bold: bool = False) -> QFont:
        font = QFont()
        font.setPixelSize(round(size * self.text_factor))
        font.setBold(bold)
        return font
