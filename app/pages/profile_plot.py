"""The plot of a profile: field against distance, levels, crossings, a marked place."""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
import pyqtgraph as pg
from PySide6.QtCore import QPointF, Qt, Signal
from PySide6.QtGui import (
    QColor,
    QKeyEvent,
    QMouseEvent,
    QPen,
    QResizeEvent,
)

from app.pages.level_names import place_names
from app.pages.plot_look import (
    CURVES,
    as_before,
    curve_pen,
    dress_axis,
    log_ticks,
    plain_label,
    rings,
    text_item,
    value_range,
)
from app.profile_values import LevelLine, Profiled, value_at
from app.profile_words import (
    distance_text,
    is_of_all,
    level_line_texts,
    short_curve_text,
)
from app.theme import LIGHT, SMALL, Theme
from app.views.inks import shade
from engine.levels import Kind
from engine.profiles import FieldProfile, ProfileCurve
from engine.units import FLUX_DENSITY_UNITS, LENGTH_UNITS

Floats = npt.NDArray[np.float64]

#: A level this far above or below the curves is named in words only.
_OUT_OF_SIGHT = {True: 4.0, False: 1.5}

#: Decades under the largest value that a logarithmic axis shows at most.
_DECADES = 4.0


class ProfilePlot(pg.PlotWidget):
    """Draws a `Profiled`.

    Signals
    -------
    marked(distance)
        A place along the line was pointed at or stepped to. [m]
    left()
        The pointer went away.
    """

    marked = Signal(float)
    left = Signal()

    def __init__(self) -> None:
        super().__init__(background=None)
        self.setAccessibleName("Field along the profile")
        self.setToolTip(
            "RMS flux density against the distance along the line. The pointer marks "
            "the place on the plan; arrow keys step, Page Up and Page Down go from "
            "crossing to crossing. A level “at this mix” is where a curve's own mix of "
            "frequencies meets it"
        )
        self.setMouseEnabled(False, False)
        self.setMenuEnabled(False)
        self.hideButtons()
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setMinimumSize(260, 120)
        self.done: Profiled | None = None
        self.at: float | None = None
        self.log = True
        self._kind: Kind = "AC"
        self._theme = LIGHT
        self._mark: pg.InfiniteLine | None = None
        self._dots: pg.ScatterPlotItem | None = None
        self._named: list[tuple[pg.TextItem, Floats, Floats]] = []
        self._distances: list[tuple[float, float, bool]] = []

    # -- drawing ----------------------------------------------------------------

    def show_profile(self, done: Profiled, kind: Kind, theme: Theme) -> None:
        """Draw another profile, or the same in another theme or on another axis."""
        self.done, self._kind, self._theme = done, kind, theme
        self._named, self._distances = [], []
        self._dress()
        curves = [c for c in done.found.curves if c.values(kind) is not None]
        low, high = value_range(curves, kind, _DECADES if self.log else None)
        lines = self._in_sight(low, high)
        for line, text in zip(lines, level_line_texts(done, lines), strict=True):
            self._draw_level(line, text)
        if done.before is not None:
            for curve in done.before.found.curves:
                if curve.values(kind) is not None:
                    self._draw_curve(curve, done.before.found)
        for curve in curves:
            self._draw_curve(curve, done.found)
        self._draw_hands()
        self._draw_crossings(curves)
        self._draw_legend(curves)
        self._mark = pg.InfiniteLine(0.0, pen=pg.mkPen(theme.text, width=1))
        self._mark.setZValue(30)
        self._dots = pg.ScatterPlotItem(
            size=9, pen=pg.mkPen(theme.text, width=1.6), brush=QColor(theme.paper)
        )
        self._dots.setZValue(31)
        for item in (self._mark, self._dots):
            self.addItem(item, ignoreBounds=True)
        self._frame(low, high)
        self.mark(self.at)

    def mark(self, at: float | None) -> None:
        """Mark a distance along the line, or none. [m]"""
        self.at = at
        if self.done is None or self._mark is None or self._dots is None:
            return
        self._mark.setVisible(at is not None)
        self._dots.setVisible(at is not None)
        if at is None:
            return
        x = at / self._metres
        self._mark.setValue(x)
        values = [value_at(self.done, c, self._kind, at) for c in self._curves]
        ys = [self._y(v) for v in values if v is not None and v > 0]
        self._dots.setData([x] * len(ys), ys)

    @property
    def _curves(self) -> tuple[ProfileCurve, ...]:
        return () if self.done is None else self.done.found.curves

    @property
    def _unit(self) -> str:
        assert self.done is not None
        return self.done.request.layout.settings.flux_density_unit

    @property
    def _length_unit(self) -> str:
        assert self.done is not None
        return self.done.request.layout.settings.length_unit

    @property
    def _metres(self) -> float:
        return LENGTH_UNITS[self._length_unit]

    def _y(self, tesla: float) -> float:
        """Where a value stands on the axis."""
        value = tesla / FLUX_DENSITY_UNITS[self._unit]
        return math.log10(value) if self.log else value

    def _ys(self, tesla: Floats) -> Floats:
        """As `_y`; gaps where there is nothing to draw."""
        values = tesla / FLUX_DENSITY_UNITS[self._unit]
        if not self.log:
            return values
        shown: Floats = np.full(len(values), np.nan)
        np.log10(values, out=shown, where=values > 0)
        return shown

    def _dress(self) -> None:
        theme = self._theme
        self.clear()
        self.setBackground(theme.paper)
        dress_axis(
            self.getAxis("bottom"),
            f"distance along the line [{self._length_unit}]",
            theme,
        )
        dress_axis(self.getAxis("left"), f"B, {self._kind} RMS [{self._unit}]", theme)
        self.getAxis("left").setWidth(64)
        self.showGrid(x=True, y=True, alpha=0.14)

    def _in_sight(self, low: float, high: float) -> list[LevelLine]:
        """Levels that lie near any curve."""
        assert self.done is not None
        far = _OUT_OF_SIGHT[self.log]
        return [
            line
            for line in self.done.levels
            if line.kind == self._kind
            and line.values.min() < far * high
            and line.values.max() > low / far
        ]

    def _frame(self, low: float, high: float) -> None:
        assert self.done is not None
        lines = self._in_sight(low, high)
        top = max([high, *(float(line.values.max()) for line in lines)])
        if self.log:
            bottom = min([low, *(float(line.values.min()) for line in lines)])
            y = (self._y(bottom) - 0.08, self._y(top) + 0.16)
            if y[1] - y[0] < 0.7:
                middle = sum(y) / 2
                y = (middle - 0.35, middle + 0.35)
            self.getAxis("left").setTicks(log_ticks(*y))
        else:
            y = (0.0, 1.15 * self._y(top))
        self.setYRange(*y, padding=0.0)
        self._make_room()
        self._place_names()

    def _make_room(self) -> None:
        """Let the legend stand right of the curves."""
        assert self.done is not None
        end = float(self.done.found.along[-1]) / self._metres
        legend, width = self.getPlotItem().legend, self.getViewBox().width()
        beside = 0.0 if legend is None else (legend.boundingRect().width() + 12) / width
        self.setXRange(0.0, end / (1.0 - min(beside, 0.45)), padding=0.0)

    # -- parts --------------------------------------------------------------------

    def _pen(self, curve: ProfileCurve) -> QPen:
        assert self.done is not None
        cases = list(dict.fromkeys(c.case for c in (*self._curves, curve)))
        heights = list(dict.fromkeys(c.height for c in (*self._curves, curve)))
        return curve_pen(
            cases.index(curve.case), heights.index(curve.height), self._theme
        )

    def _draw_curve(self, curve: ProfileCurve, whole: FieldProfile) -> None:
        """A curve of the profile, or of the one that is held: thin."""
        assert self.done is not None
        found = curve.values(self._kind)
        assert found is not None, "curves without values are not drawn"
        values = np.where(curve.mask, np.nan, found)
        pen, z = self._pen(curve), CURVES
        if whole is not self.done.found:
            pen, z = as_before(pen), 7
        x = whole.along / self._metres
        item = self.plot(x, self._ys(values), pen=pen, connect="finite")
        item.setZValue(z)

    def _draw_level(self, line: LevelLine, text: str) -> None:
        assert self.done is not None
        colour = QColor(self._theme.text)
        if not is_of_all(self.done, line):
            # Of some curves only: in the colour of the first of them.
            colour = self._pen(self._curves[line.curves[0]]).color()
        dashed = pg.mkPen(colour, width=1.2, style=Qt.PenStyle.DashDotLine)
        ys = self._ys(line.values)
        self.plot(line.along / self._metres, ys, pen=dashed).setZValue(5)
        if text:
            item = self._words(text, (0.0, 1.0))
            self._named.append((item, line.along / self._metres, ys))

    def _draw_crossings(self, curves: list[ProfileCurve]) -> None:
        """A mark where each curve meets a level, its distance beside the first."""
        assert self.done is not None
        known = {(c.case, c.height): c for c in curves}
        xs, ys, texts = [], [], []
        for crossing in self.done.found.crossings:
            curve = known.get((crossing.case, crossing.height))
            if curve is None or crossing.kind != self._kind:
                continue
            value = value_at(self.done, curve, self._kind, crossing.along)
            if value is None or value <= 0:
                continue
            xs.append(crossing.along / self._metres)
            ys.append(self._y(value))
            if curve is curves[0]:
                texts.append((xs[-1], ys[-1], crossing.along))
        marks = pg.ScatterPlotItem(
            xs, ys, size=9, symbol="d", pen=pg.mkPen(self._theme.paper, width=1),
            brush=QColor(self._theme.text),
        )  # fmt: skip
        marks.setZValue(20)
        self.addItem(marks)
        end = float(self.done.found.along[-1]) / self._metres
        for x, y, along in texts:
            is_left = x > 0.75 * end
            self._distances.append((x, y, is_left))
            anchor = (1.1, 1.2) if is_left else (-0.1, 1.2)
            item = self._words(
                distance_text(along, self._length_unit), anchor, bold=True
            )
            item.setPos(x, y)

    def _draw_hands(self) -> None:
        """Rings where a hand formula holds."""
        assert self.done is not None
        if self._kind != self.done.kinds[0]:
            return
        held = [(p.along, f.value) for p in self.done.hands if (f := p.best)]
        xs = [s / self._metres for s, _ in held]
        ys = [self._y(value) for _, value in held]
        marks = rings(xs, ys, self._theme)
        marks.setZValue(9)
        self.addItem(marks)

    def _draw_legend(self, curves: list[ProfileCurve]) -> None:
        assert self.done is not None
        plot = self.getPlotItem()
        if plot.legend is not None:
            plot.legend.scene().removeItem(plot.legend)
            plot.legend = None
        held = any(p.best for p in self.done.hands) and self._kind == self.done.kinds[0]
        if len(curves) < 2 and not held and self.done.before is None:
            return
        box = self.addLegend(
            offset=(-8, 6), labelTextColor=self._theme.text,
            labelTextSize=f"{SMALL}px", brush=shade(self._theme.paper, 0.85),
            verSpacing=-4,
        )  # fmt: skip
        for curve in curves:
            sample = pg.PlotDataItem(pen=self._pen(curve))
            box.addItem(sample, plain_label(short_curve_text(self.done, curve)))
        if self.done.before is not None:
            sample = pg.PlotDataItem(pen=as_before(self._pen(curves[0])))
            box.addItem(sample, "as before")
        if held:
            box.addItem(rings([], [], self._theme), "hand formula")

    def _words(
        self, text: str, anchor: tuple[float, float], *, bold: bool = False
    ) -> pg.TextItem:
        item = text_item(text, self._theme, anchor, bold=bold)
        self.addItem(item, ignoreBounds=True)
        return item

    def _place_names(self) -> None:
        curves = [
            (c.xData, c.yData) for c in self.listDataItems() if c.zValue() == CURVES
        ]
        place_names(self.getViewBox(), self._named, curves, self._distances)

    # -- pointing -----------------------------------------------------------------

    def distance_at(self, pixel: QPointF) -> float | None:
        """The distance along the line at a place of the widget. [m]"""
        if self.done is None:
            return None
        view = self.getViewBox()
        if not view.sceneBoundingRect().contains(self.mapToScene(pixel.toPoint())):
            return None
        x = view.mapSceneToView(self.mapToScene(pixel.toPoint())).x() * self._metres
        return min(max(float(x), 0.0), float(self.done.found.along[-1]))

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        self._point(self.distance_at(event.position()))
        event.accept()

    def mousePressEvent(self, event: QMouseEvent) -> None:
        self.setFocus(Qt.FocusReason.MouseFocusReason)
        event.accept()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        event.accept()

    def leaveEvent(self, event: object) -> None:
        self.left.emit()

    def _point(self, at: float | None) -> None:
        if at is not None:
            self.mark(at)
            self.marked.emit(at)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if self.done is None:
            event.ignore()
            return
        end = float(self.done.found.along[-1])
        fine = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        step = end / (1000 if fine else 100)
        here = 0.0 if self.at is None else self.at
        stops = sorted(
            c.along for c in self.done.found.crossings if c.kind == self._kind
        )
        to = {
            Qt.Key.Key_Left: max(0.0, here - step),
            Qt.Key.Key_Right: min(end, here + step),
            Qt.Key.Key_Home: 0.0,
            Qt.Key.Key_End: end,
            Qt.Key.Key_PageDown: next((s for s in stops if s > here + 1e-9), None),
            Qt.Key.Key_PageUp: next((s for s in stops[::-1] if s < here - 1e-9), None),
        }
        if Qt.Key(event.key()) in to:
            self._point(to[Qt.Key(event.key())])
        else:
            event.ignore()

    def resizeEvent(self, event: QResizeEvent | None) -> None:
        super().resizeEvent(event)
        if getattr(self, "done", None) is not None:
            self._make_room()
            self._place_names()
