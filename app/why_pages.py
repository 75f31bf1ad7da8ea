"""Where values come from and how far they reach: pages and marks, in the window."""

from __future__ import annotations

from functools import cached_property
from math import dist
from pathlib import Path
from typing import TYPE_CHECKING, TypeVar

from PySide6.QtCore import QEvent, QObject, QPointF, Qt
from PySide6.QtGui import QMouseEvent
from PySide6.QtWidgets import QVBoxLayout, QWidget

from app.chosen_file import ask_where_to_write
from app.figures import FIGURE_KINDS
from app.level_distance import PlaceFactor, Reached
from app.level_marks import overlay_of, stale_overlay
from app.map_request import case_of, heights_of
from app.margin_values import MarginRow, Margins, concern
from app.menus import Command
from app.page import Page
from app.pages.foot import Foot
from app.pages.level_bar import LevelBar
from app.panels.margin_words import measured_text
from app.readout_values import Readout
from app.tools.profile import ProfileTool
from app.tools.select import SelectTool
from app.tools.tool import Overlay
from app.views.projection import Sight, to_view
from app.why_values import WhyPlace
from engine.errors import UserError
from engine.exchange.map_export import offsets_csv
from engine.items import Point3
from engine.results import Assessment
from engine.written_file import write_file

if TYPE_CHECKING:
    from app.main_window import MainWindow
    from app.pages.profile_page import ProfilePage
    from app.pages.why_page import WhyPage

APage = TypeVar("APage", bound=Page)

#: A click that moves less is no drag. [px]
_STILL = 4.0


class WhyPages(QObject):
    """Builds the pages into the window, and opens them on what is meant."""

    def __init__(self, window: MainWindow) -> None:
        super().__init__(window)
        self._window = window
        self._parts = (window.document, window.view_state, window.messages)
        self.distance = LevelBar(window.document, window.view_state)
        self.foot = Foot(
            window, window.pages, window.drawings, window.show_page,
            window.show_drawing,
        )  # fmt: skip
        column = window.pages.parentWidget()
        assert column is not None
        box = column.layout()
        assert isinstance(box, QVBoxLayout)
        # The bar belongs to the drawing: pages in its place are without it.
        self._over_drawing = QWidget()
        holder = QVBoxLayout(self._over_drawing)
        holder.setContentsMargins(0, 0, 0, 0)
        holder.addWidget(self.distance)
        box.insertWidget(box.indexOf(window.ask_bar) + 1, self._over_drawing)
        window.pages.currentChanged.connect(self._on_page)
        box.addWidget(self.foot)
        self._pointed: Point3 | None = None
        self._pressed: QPointF | None = None
        self._assessment: Assessment | None = None
        self._margins: Margins | None = None
        self.distance.found.connect(self._mark_distance)
        self.distance.outdated.connect(self._mark_outdated)
        self.distance.closed.connect(window.drawings.take_keyboard)
        self.distance.export_wanted.connect(self.export_distance)
        window.exports.offsets = self.distance.offsets
        window.readout.shown.connect(self._on_read)
        window.margins.why.connect(self._on_why)
        window.margins.opened.connect(self._on_margins_opened)
        window.recompute.margins_ready.connect(self._on_margins)
        window.view_state.changed.connect(self._note_measured)
        window.document.selection_changed.connect(self._on_selection)
        window.drawings.plan.viewport().installEventFilter(self)

    def _on_page(self, _index: int) -> None:
        page = self._window.pages.currentWidget()
        self._over_drawing.setVisible(page is self._window.drawings)

    # -- built when first shown ---------------------------------------------------
    # The imports within: plots take long to load.

    @cached_property
    def profile(self) -> ProfilePage:
        from app.pages.profile_page import ProfilePage

        page = self._for_the_foot(ProfilePage(*self._parts))
        page.pointed.connect(self._mark_profile)
        return page

    @cached_property
    def why(self) -> WhyPage:
        from app.pages.why_page import WhyPage

        return self._for_the_foot(WhyPage(*self._parts))

    def _for_the_foot(self, page: APage) -> APage:
        page.setParent(self._window)
        page.hide()
        page.closed.connect(self.foot.leave)
        return page

    # -- commands -----------------------------------------------------------------

    def commands(self) -> tuple[Command, ...]:
        """Entries of the menu Field."""
        return (
            Command("Profile", self.open_profile, "F5",
                    "The field along a drawn line against distance"),
            Command("Why this value", self.open_why, "F3",
                    "Shares of circuits at the receptor or the pointer"),
            Command("Distance to a reference level", self.open_distance, "",
                    "Where a value equals it, and how far that is"),
        )  # fmt: skip

    def open_profile(self) -> None:
        """Plot the field along the selected profile, else the first."""
        layout = self._window.document.layout
        chosen = [p for p in layout.profiles if p.id in self._window.document.selection]
        if len(chosen) == 1:
            self.profile.show_profile(chosen[0].id)
        self._open(self.profile)

    def open_why(self) -> None:
        """Take a value apart: of the selected receptor or zone, else at the pointer."""
        layout = self._window.document.layout
        chosen = [
            r for r in layout.receptors if r.id in self._window.document.selection
        ]
        worst = self._worst_of_selection()
        if len(chosen) == 1:
            self.why.show_place(WhyPlace(chosen[0].at, chosen[0].id))
        elif worst is not None:
            self._on_why(worst)
            return
        elif self._pointed is not None:
            self.why.show_place(self._place_pointed(self._pointed))
        self._open(self.why)

    def _worst_of_selection(self) -> MarginRow | None:
        """The worst comparison of the zone that alone is selected."""
        ids = self._window.document.selection
        zones = {zone.id for zone in self._window.document.layout.zones}
        if len(ids) != 1 or not ids <= zones or self._margins is None:
            return None
        rows = [r for r in self._margins.rows if r.place in ids and r.at is not None]
        return max(rows, key=concern, default=None)

    def open_distance(self) -> None:
        """Ask how far a level reaches."""
        self._window.show_drawing()
        self.distance.open()

    def export_distance(self) -> None:
        """Ask where to, and write the map with the lines, or the lines."""
        window = self._window
        if self.distance.answer is None:
            window.messages.warn("There are no lines to export yet.")
            return
        path = ask_where_to_write(
            window, "Export the distance", "distance.png", FIGURE_KINDS
        )
        if path is not None:
            with window.messages.shown():
                self.write_distance(path)

    def write_distance(self, path: Path) -> None:
        """Write the map with lines and distance, or the lines as numbers.

        Raises
        ------
        UserError
            When the lines are out of date, or the file cannot be written.
        """
        window, layout = self._window, self._window.document.committed
        heights, _ = heights_of(layout, window.view_state.look)
        offsets = self.distance.offsets(layout, heights)
        if offsets is None:
            raise UserError("The lines are out of date: wait until they are computed.")
        if path.suffix.lower() != ".csv":
            window.exports.map(path if path.suffix else path.with_suffix(".png"))
            return
        unit = layout.settings.length_unit
        text = offsets_csv(offsets, window.caption_text(), unit)
        write_file(path, text.encode("utf-8"))
        window.messages.inform(f"{path} was written.")

    def hold(self, on: bool) -> None:
        """Let present values stand beside the coming ones."""
        self.distance.hold(on)
        for name in ("profile", "why"):
            # What is held is what a page would show now: it has to be there for that.
            if on or name in vars(self):
                getattr(self, name).hold(on)

    def close(self) -> None:
        """Stop the threads, before the window goes."""
        self._window.drawings.plan.viewport().removeEventFilter(self)
        self.distance.close_worker()
        for name in ("profile", "why"):
            if name in vars(self):
                getattr(self, name).close_worker()

    # -- following ----------------------------------------------------------------

    def _open(self, page: ProfilePage | WhyPage) -> None:
        self._window.margins.close_opened()
        self.foot.open(page)

    def _on_read(self, found: Readout | None) -> None:
        # The menu takes the pointer off the drawing: the last place is meant then.
        if found is not None:
            self._pointed = found.at

    def _on_why(self, row: MarginRow) -> None:
        if row.at is None:
            return
        if row.case:
            self._window.view_state.set(case=row.case)
        receptors = {r.id for r in self._window.document.layout.receptors}
        place = WhyPlace(row.at, "", f"{row.place_title}, largest value", (row.level,))
        if row.place in receptors:
            place = WhyPlace(row.at, row.place)
        self.why.show_place(place)
        self._open(self.why)

    def _on_margins_opened(self, opened: bool) -> None:
        if opened:
            self.foot.close_page()

    def _on_margins(self, margins: Margins) -> None:
        self.distance.set_margins(margins)
        self._margins = margins
        if margins.assessment is not None:
            self._assessment = margins.assessment
            self._note_measured()

    def _note_measured(self, *_: object) -> None:
        """Measured over calculated beside receptors, in the load case shown."""
        if self._assessment is None:
            return
        shown = self._window.view_state.look.case
        case = case_of(self._assessment.layout, shown).id
        notes = {
            result.receptor.id: measured_text(found.measured_ratio)
            for result in self._assessment.receptors
            for found in result.fields
            if found.case == case and found.measured_ratio is not None
        }
        self._window.drawings.set_notes(notes)

    def _on_selection(self, ids: frozenset[str]) -> None:
        """A profile that was just drawn is plotted."""
        if not isinstance(self._window.toolbox.active, ProfileTool) or len(ids) != 1:
            return
        found = [p.id for p in self._window.document.layout.profiles if p.id in ids]
        if found:
            self.profile.show_profile(found[0])
            self._open(self.profile)

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if (
            isinstance(event, QMouseEvent)
            and event.button() == Qt.MouseButton.LeftButton
        ):
            if event.type() == QEvent.Type.MouseButtonPress:
                self._pressed = event.position()
            elif event.type() == QEvent.Type.MouseButtonRelease:
                self._on_click(event)
        return super().eventFilter(watched, event)

    def _on_click(self, event: QMouseEvent) -> None:
        """A click on an empty place while the page shows means that place."""
        pressed, self._pressed = self._pressed, None
        if pressed is None or "why" not in vars(self) or not self.why.isVisible():
            return
        if (event.position() - pressed).manhattanLength() > _STILL:
            return
        pointer = self._window.drawings.plan.pointer_at(
            event.position(), event.modifiers()
        )
        is_select = isinstance(self._window.toolbox.active, SelectTool)
        if not is_select or pointer.pick is not None or event.modifiers().value:
            return
        x, y = pointer.at
        look = self._window.view_state.look
        heights, _ = heights_of(self._window.document.layout, look)
        at = (x, y, heights[len(heights) // 2])
        if self._pointed is not None and dist(self._pointed[:2], (x, y)) < 1e-6:
            at = self._pointed
        self.why.show_place(self._place_pointed(at))

    def _place_pointed(self, at: Point3) -> WhyPlace:
        levels = tuple(level.id for level in self._window.document.layout.levels)
        return WhyPlace(at, "", "Pointed at", levels)

    # -- marks --------------------------------------------------------------------

    def _mark_profile(self, at: Point3 | None) -> None:
        def mark(sight: Sight) -> Overlay | None:
            return None if at is None else Overlay(points=(to_view(sight, at),))

        self._window.drawings.set_marks("profile", mark)

    def _mark_distance(self, found: Reached | None, load: PlaceFactor | None) -> None:
        self._window.drawings.set_marks(
            "distance to a level",
            lambda sight: None if found is None else overlay_of(found, sight, load),
        )

    def _mark_outdated(self, found: Reached) -> None:
        self._window.drawings.set_marks(
            "distance to a level", lambda sight: stale_overlay(found, sight)
        )
