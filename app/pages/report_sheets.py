"""The pages of a report one under the other, in the width or whole, with numbers."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QRectF, QSize, Qt, Signal
from PySide6.QtGui import (
    QColor,
    QKeyEvent,
    QPainter,
    QPaintEvent,
    QResizeEvent,
    QWheelEvent,
)
from PySide6.QtWidgets import QAbstractScrollArea, QFrame

from app.page_pictures import Key, PagePictures
from app.theme import SMALL, STEP, theme_for
from engine.exchange.pdf_pages import PdfPages, Section

#: Room around a page, and under it for its number. [logical pixels]
_GAP = 3 * STEP
_FOOT = 6 * STEP

_EMPTY = "The pages of the report will show here"

#: Zoom by name, or as a share of the paper's size.
WIDTH, WHOLE = "Whole width", "Whole page"
Zoom = str | float

#: Smallest and largest zoom. [share of the paper's size]
_SMALLEST, _LARGEST = 0.25, 4.0

#: Logical pixels of a point at 100 %.
_PER_POINT = 96.0 / 72.0


@dataclass(frozen=True)
class _Place:
    """Where a page lies in the column of pages. [logical pixels]"""

    left: float
    top: float
    width: float
    height: float


class ReportSheets(QAbstractScrollArea):
    """Shows pages; the keyboard walks through them.

    Signals
    -------
    page_changed(page)
        Another page is at the top, from 0.
    zoomed(share)
        Somebody zoomed by wheel or key.
    """

    page_changed = Signal(int)
    zoomed = Signal(float)

    def __init__(self, pictures: PagePictures) -> None:
        super().__init__()
        self._pictures = pictures
        self._pages = PdfPages((), ())
        self._places: list[_Place] = []
        self._zoom: Zoom = WIDTH
        self._page = 0
        self._note = ""
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName("Pages of the report")
        self.setToolTip(
            "Page Down and Page Up go from page to page, + and − zoom, 0 shows the "
            "whole width; Ctrl and the wheel zoom"
        )
        self.setMinimumSize(60 * STEP, 50 * STEP)
        pictures.ready.connect(lambda _page: self.viewport().update())
        self.verticalScrollBar().valueChanged.connect(self._on_scrolled)

    @property
    def page(self) -> int:
        """The page that is read: the topmost one of which half a page shows."""
        return self._page

    @property
    def count(self) -> int:
        return len(self._pages.sizes)

    @property
    def zoom(self) -> Zoom:
        return self._zoom

    def show_pages(self, pages: PdfPages) -> None:
        """Show other pages; what was read stays in view."""
        within = self._within()
        self._pages = pages
        self._lay_out()
        if self._places:
            page = min(within[0], self.count - 1)
            self._scroll_to(page, within[1] if page == within[0] else 0.0)
        self._on_scrolled()
        self.viewport().update()

    def set_note(self, note: str) -> None:
        """Grey the pages and say why across them; empty: they are as they should be."""
        self._note = note
        self.setAccessibleDescription(note)
        self.viewport().update()

    def set_zoom(self, zoom: Zoom) -> None:
        """Show pages larger or smaller; what is read stays in view."""
        page, share = self._within()
        self._zoom = zoom
        self._lay_out()
        self._scroll_to(page, share)
        self.viewport().update()

    def go_to(self, page: int, down: float = 0.0) -> None:
        """Bring a page to the top, or a place `down` it, as a share of its height."""
        if self._places:
            self._scroll_to(min(max(page, 0), self.count - 1), down)

    def go_to_section(self, section: Section) -> None:
        """Bring the beginning of a section to the top."""
        self.go_to(section.page, section.down)

    def section_shown(self) -> int:
        """Which section of the outline is read; -1 before the first."""
        page, share = self._within()
        middle = (page, share + 0.05)
        begun = [
            k for k, s in enumerate(self._pages.sections) if (s.page, s.down) <= middle
        ]
        return begun[-1] if begun else -1

    # -- arranging ----------------------------------------------------------------

    def _scale(self, size: tuple[float, float]) -> float:
        """Logical pixels of a point."""
        wide = max(1.0, self.viewport().width() - 2.0 * _GAP)
        high = max(1.0, self.viewport().height() - _GAP - _FOOT)
        if self._zoom == WIDTH:
            return wide / size[0]
        if self._zoom == WHOLE:
            return min(wide / size[0], high / size[1])
        return float(self._zoom) * _PER_POINT

    def _lay_out(self) -> None:
        self._places = []
        top, widest = float(_GAP), 0.0
        room = self.viewport().width()
        for size in self._pages.sizes:
            scale = self._scale(size)
            width, height = size[0] * scale, size[1] * scale
            left = max(float(_GAP), (room - width) / 2)
            self._places.append(_Place(left, top, width, height))
            top += height + _FOOT
            widest = max(widest, width)
        across, down = self.horizontalScrollBar(), self.verticalScrollBar()
        view = self.viewport().size()
        # A line of the page, and a view less what is read on: as in any text.
        down.setSingleStep(10 * STEP)
        down.setPageStep(view.height())
        down.setRange(0, max(0, round(top - view.height())))
        across.setSingleStep(10 * STEP)
        across.setPageStep(view.width())
        across.setRange(0, max(0, round(widest + 2 * _GAP - view.width())))

    def _within(self) -> tuple[int, float]:
        """The page at the top of the view, and how far down it that is."""
        at = self.verticalScrollBar().value()
        for k, place in enumerate(self._places):
            if place.top + place.height + _FOOT / 2 > at:
                return k, max(0.0, (at - place.top) / place.height)
        return 0, 0.0

    def _scroll_to(self, page: int, share: float) -> None:
        if not self._places:
            return
        place = self._places[min(page, len(self._places) - 1)]
        above = STEP if share == 0.0 else 0
        self.verticalScrollBar().setValue(
            round(place.top + share * place.height - above)
        )

    def _on_scrolled(self, *_: object) -> None:
        middle = self.verticalScrollBar().value() + self.viewport().height() / 2
        page = 0
        for k, place in enumerate(self._places):
            if place.top <= middle:
                page = k
        if page != self._page:
            self._page = page
        self.page_changed.emit(page)

    # -- painting -------------------------------------------------------------------

    def paintEvent(self, _event: QPaintEvent) -> None:
        painter = QPainter(self.viewport())
        theme = theme_for(self.palette())
        painter.fillRect(self.viewport().rect(), QColor(theme.window))
        painter.setRenderHint(QPainter.RenderHint.SmoothPixmapTransform)
        font = self.font()
        font.setPixelSize(SMALL)
        painter.setFont(font)
        if not self._places:
            painter.setPen(QColor(theme.muted))
            centre = Qt.AlignmentFlag.AlignCenter
            painter.drawText(self.viewport().rect(), centre, _EMPTY)
        ratio = self.devicePixelRatioF()
        across, down = (
            self.horizontalScrollBar().value(),
            self.verticalScrollBar().value(),
        )
        wanted: list[Key] = []
        for k, place in enumerate(self._places):
            rect = QRectF(
                round(place.left - across),
                round(place.top - down),
                round(place.width),
                round(place.height),
            )
            if rect.bottom() + _FOOT < 0 or rect.top() > self.viewport().height():
                continue
            key = (k, round(rect.width() * ratio))
            wanted.append(key)
            self._paint_page(painter, rect, key)
            painter.setPen(QColor(theme.muted))
            foot = QRectF(rect.left(), rect.bottom(), rect.width(), _FOOT)
            text = f"{k + 1} of {self.count}"
            if self._note:
                text += f" · {self._note}"
            painter.drawText(foot, Qt.AlignmentFlag.AlignCenter, text)
        painter.end()
        if wanted:
            # The neighbours too: turning pages should not show blanks.
            last, width = wanted[-1]
            if last + 1 < self.count:
                wanted.append((last + 1, width))
            self._pictures.want(wanted)

    def _paint_page(self, painter: QPainter, rect: QRectF, key: Key) -> None:
        theme = theme_for(self.palette())
        painter.fillRect(rect, QColor("white"))
        picture = self._pictures.picture(*key)
        if picture is not None:
            painter.drawImage(rect, picture)
        if self._note:
            veil = QColor(theme.window)
            veil.setAlphaF(0.6)
            painter.fillRect(rect, veil)
        painter.setPen(QColor(theme.line))
        painter.drawRect(rect)

    # -- hands ----------------------------------------------------------------------

    def keyPressEvent(self, event: QKeyEvent) -> None:
        bar = self.verticalScrollBar()
        match event.key():
            case Qt.Key.Key_PageDown | Qt.Key.Key_Space:
                self.go_to(self._page + 1)
            case Qt.Key.Key_PageUp | Qt.Key.Key_Backspace:
                self.go_to(self._page - 1)
            case Qt.Key.Key_Home:
                bar.setValue(0)
            case Qt.Key.Key_End:
                bar.setValue(bar.maximum())
            case Qt.Key.Key_Plus | Qt.Key.Key_Equal:
                self._zoom_by(1.25)
            case Qt.Key.Key_Minus:
                self._zoom_by(0.8)
            case Qt.Key.Key_0:
                self.set_zoom(WIDTH)
                self.zoomed.emit(0.0)
            case Qt.Key.Key_Escape:
                event.ignore()
            case _:
                super().keyPressEvent(event)

    def wheelEvent(self, event: QWheelEvent) -> None:
        if event.modifiers() & Qt.KeyboardModifier.ControlModifier:
            self._zoom_by(1.0015 ** event.angleDelta().y())
            event.accept()
        else:
            super().wheelEvent(event)

    def _zoom_by(self, factor: float) -> None:
        if not self._pages.sizes:
            return
        now = self._scale(self._pages.sizes[self._page]) / _PER_POINT
        share = min(max(now * factor, _SMALLEST), _LARGEST)
        self.set_zoom(share)
        self.zoomed.emit(share)

    def resizeEvent(self, event: QResizeEvent) -> None:
        page, share = self._within()
        super().resizeEvent(event)
        if self._pages.sizes:
            self._lay_out()
            self._scroll_to(page, share)
            self._on_scrolled()

    def scrollContentsBy(self, _dx: int, _dy: int) -> None:
        self.viewport().update()

    def sizeHint(self) -> QSize:
        return QSize(150 * STEP, 150 * STEP)
