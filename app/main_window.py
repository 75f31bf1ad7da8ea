"""The window: builds and arranges the parts, and holds no state of its own."""

from __future__ import annotations

from functools import cached_property
from typing import TYPE_CHECKING, TypeVar

from PySide6.QtCore import QEvent, QObject, QSize, Qt, QTimer
from PySide6.QtGui import (
    QCloseEvent,
    QDragEnterEvent,
    QDropEvent,
    QKeyEvent,
    QResizeEvent,
)
from PySide6.QtWidgets import (
    QApplication,
    QHBoxLayout,
    QLabel,
    QMainWindow,
    QSizePolicy,
    QSplitter,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from app import preferences, window_geometry
from app.arrange import Arrange
from app.ask_bar import AskBar
from app.backing_reading import BackingReading
from app.caption_bar import OF_DRAWING, CaptionBar, caption
from app.document import Document
from app.drawings import Drawings
from app.entry_strip import EntryStrip
from app.exports import Exports
from app.files import Files
from app.found_place import FoundPlace
from app.guide import AboutPage, CautionsPage, GuidePage
from app.hint_line import HintLine
from app.jobs import Jobs
from app.label_offer import LabelOffer
from app.message_bar import JobBar, MessageBar
from app.messages import Messages
from app.new_layout import NewLayoutPage
from app.page import Page
from app.panels.item import ItemPanel
from app.panels.margins import MarginsPanel
from app.panels.readout import ReadoutLine
from app.panels.remarks import RemarksPanel
from app.panels.section import SectionPanel
from app.recompute import Recompute
from app.recovery import Autosave
from app.side_panels import WIDTH, SidePanels
from app.theme import BODY, DARK, LIGHT, STEP, Theme, apply
from app.tool_row import ToolRow
from app.toolbox import Toolbox
from app.variant_band import VariantBand
from app.view_pages import ViewPages
from app.view_state import ViewState
from app.views.height_rail import NARROW, HeightRail
from app.views.height_rail import WIDTH as RAIL_WIDTH
from app.window_hints import hint_of
from app.window_links import WindowLinks
from app.window_menus import WindowMenus

if TYPE_CHECKING:
    from app.panels.circuits import CircuitsPanel
    from app.panels.levels import LevelsPanel
    from app.panels.load_cases import LoadCasesPanel

APage = TypeVar("APage", bound=Page)

#: The drawing is never narrower; beside large texts the panel needs more. [px]
DRAWING = 570 if BODY <= 16 else 480

#: Under this height the foot panels open in the drawing's place. [logical pixels]
LOW = 800

#: Under this height lines that tooltips hold too give way. [logical pixels]
VERY_LOW = 22 * BODY + 314


class MainWindow(QMainWindow):
    """Everything a user sees.

    Parameters
    ----------
    document : Document
    messages : Messages
    theme : Theme
        To start with; `set_theme` changes it.
    """

    def __init__(
        self, document: Document, messages: Messages, theme: Theme = LIGHT
    ) -> None:
        super().__init__()
        self.document, self.messages = document, messages
        self.view_state = ViewState()
        self.jobs = Jobs(self)
        self.files = Files(document, messages, self)
        self.exports = Exports(document, self.view_state, self.jobs, messages, self)
        self.toolbox = Toolbox(document, self.view_state, messages)
        self.recompute = Recompute(document, self.view_state)
        self.autosave = Autosave(document)
        self.theme = theme
        self._build()
        self.found_place, self.label_offer = FoundPlace(self), LabelOffer(self)
        self.view_pages = ViewPages(self)
        self.menus = WindowMenus(self)
        self.links = WindowLinks(self)
        self._own_parts()
        self.set_theme(theme)
        self.setAcceptDrops(True)
        self.setMinimumSize(980, 560)
        room = self.screen().availableGeometry().size() - QSize(40, 60)
        self.resize(QSize(1360, 860).boundedTo(room))

    # -- building ---------------------------------------------------------------

    def _own_parts(self) -> None:
        """Let what has no place in the window go with it all the same.

        Their signals hold what they are connected to, and with it the whole window.
        """
        for part in (self.view_state, self.toolbox, self.recompute, self.autosave):
            part.setParent(self)
        # Built to count, and a child of the panels only when first shown.
        self.destroyed.connect(self.remarks.deleteLater)

    def _build(self) -> None:
        document, state = self.document, self.view_state
        self.tool_row = ToolRow(self.toolbox, self.theme)
        self.addToolBar(Qt.ToolBarArea.TopToolBarArea, self.tool_row)
        self.message_bar, self.ask_bar = MessageBar(self.messages), AskBar()
        self.arrange = Arrange(document, self.ask_bar)
        self.backing = BackingReading(document, self.jobs, self.ask_bar, self.calibrate)
        self.caption, self.strip = CaptionBar(document, state), EntryStrip()
        self.band = VariantBand(document, self.messages)
        self.drawings = Drawings(document, state, self.theme)
        self.rail = HeightRail(document, state)
        self.margins = MarginsPanel(document)
        self._build_pages()
        self._build_panels()
        self.column = column = QWidget()
        column.installEventFilter(self)
        box = QVBoxLayout(column)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(0)
        bars = (self.caption, self.band, self.strip, self.ask_bar, self.message_bar)
        for widget in bars:
            box.addWidget(widget)
        drawing = QHBoxLayout()
        drawing.setSpacing(0)
        drawing.addWidget(self.rail)
        drawing.addWidget(self.pages, 1)
        box.addLayout(drawing, 1)
        # The drawing beside its rail; a narrow window takes from the panel first.
        column.setMinimumWidth(NARROW + DRAWING)
        self.splitter = QSplitter(Qt.Orientation.Horizontal)
        self.splitter.setChildrenCollapsible(False)
        self.splitter.addWidget(column)
        self.splitter.addWidget(self.panels)
        self.splitter.setStretchFactor(0, 1)
        self.splitter.setSizes([1000, WIDTH])
        whole = QWidget()
        outer = QVBoxLayout(whole)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.setSpacing(0)
        outer.addWidget(self.splitter, 1)
        outer.addWidget(self.margins)
        self.setCentralWidget(whole)
        self._build_status()

    def _build_pages(self) -> None:
        """What may stand in the drawing's place."""
        self.section = SectionPanel(self.document, self.view_state)
        self.pages = QStackedWidget()
        for page in (self.drawings, self.section):
            self.pages.addWidget(page)
        self.pages.setSizePolicy(
            QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding
        )

    def _build_panels(self) -> None:
        self.item = ItemPanel(self.document, self.jobs)
        # Counts the remarks on its tab, shown or not.
        self.remarks = RemarksPanel(self.document)
        self.panels = SidePanels()
        for name, build, tip in (
            ("Item", lambda: self.item, "The values of what is selected"),
            ("Circuits", lambda: self.circuits, "Currents, neutrals, harmonics"),
            (
                "Cases",
                lambda: self.load_cases,
                "Load cases: which currents flow together",
            ),
            ("Ref. levels", lambda: self.levels, "What the field is compared with"),
            (
                "Remarks",
                lambda: self.remarks,
                "What to bear in mind, and what is assumed",
            ),
        ):
            self.panels.add(name, build, tip)

    def _build_status(self) -> None:
        self.hint, self.working = HintLine(), QLabel()
        self.readout = ReadoutLine(self.document, self.view_state)
        # What is read at the pointer is not cut; the hint gives way.
        self.readout.setSizePolicy(
            QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Fixed
        )
        self.readout.setMinimumWidth(1)
        bar = self.statusBar()
        bar.setSizeGripEnabled(False)
        bar.setContentsMargins(2 * STEP, 0, 2 * STEP, 0)
        bar.addWidget(self.hint, 1)
        bar.addPermanentWidget(self.working)
        bar.addPermanentWidget(JobBar(self.jobs))
        bar.addPermanentWidget(self.readout)

    # -- built when first shown -------------------------------------------------
    # The imports within: plots alone take a third of a second to load.

    @cached_property
    def circuits(self) -> CircuitsPanel:
        from app.panels.circuits import CircuitsPanel

        return CircuitsPanel(self.document, self.view_state)

    @cached_property
    def load_cases(self) -> LoadCasesPanel:
        from app.panels.load_cases import LoadCasesPanel

        return LoadCasesPanel(self.document, self.view_state)

    @cached_property
    def levels(self) -> LevelsPanel:
        from app.panels.levels import LevelsPanel

        return LevelsPanel(self.document, self.messages)

    @cached_property
    def new_page(self) -> NewLayoutPage:
        page = NewLayoutPage()
        page.chosen.connect(self.files.new)
        return self.with_page(page)

    @cached_property
    def guide(self) -> GuidePage:
        return self.with_page(GuidePage())

    @cached_property
    def cautions(self) -> CautionsPage:
        return self.with_page(CautionsPage(self.document))

    @cached_property
    def about(self) -> AboutPage:
        return self.with_page(AboutPage())

    def with_page(self, page: APage) -> APage:
        """Take a page that may stand in the drawing's place, and hand it back."""
        self.pages.addWidget(page)
        page.closed.connect(self.show_drawing)
        return page

    # -- pages ------------------------------------------------------------------

    def show_page(self, page: QWidget) -> None:
        """Show a page in the drawing's place; Esc returns."""
        self.pages.setCurrentWidget(page)
        self.rail.setVisible(page is self.drawings)
        self.strip.setVisible(page is self.drawings)
        self.caption.follow(getattr(page, "followed", OF_DRAWING))
        self.tell_hint()
        # The page itself shows no mark of the keyboard: what it hands on to does.
        (page.focusProxy() or page).setFocus(Qt.FocusReason.TabFocusReason)

    def tell_hint(self, *_: object) -> None:
        """Say at the foot what can be done in the drawing's place now."""
        self.hint.say(hint_of(self))

    def show_drawing(self) -> None:
        """Show the drawing again."""
        self.show_page(self.drawings)
        self.drawings.take_keyboard()

    def open_section(self, run: str) -> None:
        """Show a run cut across."""
        self.section.show_run(run)
        self.show_page(self.section)

    def calibrate(self, drawing: str) -> None:
        """Give a backing drawing its scale and place."""
        self.show_drawing()
        self.toolbox.activate(self.toolbox.calibrate)
        self.toolbox.calibrate.begin(drawing)

    def caption_text(self) -> str:
        """The caption of the drawing in one line, as exports print it."""
        return caption(self.document, self.view_state)

    def make_room(self, opened: bool) -> None:
        """Foot panels take at most 40 % of the height, or the drawing's place."""
        low = self.height() < LOW
        self.splitter.setVisible(not (opened and low))
        self.margins.set_low(self.height() < VERY_LOW)
        limit = 16777215 if low and opened else int(0.4 * self.height())
        self.margins.setMaximumHeight(limit)
        self.tell_hint()

    def show_first_strip(self, strip: QWidget) -> None:
        """Put the strip of the first start above everything."""
        whole = self.centralWidget()
        assert whole is not None
        box = whole.layout()
        assert isinstance(box, QVBoxLayout)
        box.insertWidget(0, strip)

    # -- look -------------------------------------------------------------------

    def set_theme(self, theme: Theme) -> None:
        """Show everything in another theme."""
        self.theme = theme
        apply(theme)
        self.drawings.set_theme(theme)
        self.tool_row.set_theme(theme)
        self.panels.set_theme(theme)

    def follow_preferences(self) -> None:
        """Take theme and text size from the preferences."""
        choices = preferences.load()
        scheme = QApplication.styleHints().colorScheme()
        dark = choices.theme == "dark" or (
            choices.theme == "system" and scheme == Qt.ColorScheme.Dark
        )
        self.set_theme(DARK if dark else LIGHT)

    # -- window -----------------------------------------------------------------

    def resizeEvent(self, event: QResizeEvent) -> None:
        self.tool_row.set_wide(self.width() >= 1500)
        self.drawings.set_wide(self.width() >= 1900)
        self.make_room(self.margins.is_open)
        super().resizeEvent(event)

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if watched is self.column and event.type() == QEvent.Type.Resize:
            self.rail.set_narrow(self.column.width() < RAIL_WIDTH + DRAWING)
        return super().eventFilter(watched, event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() != Qt.Key.Key_Escape:
            super().keyPressEvent(event)
        elif self.pages.currentWidget() is not self.drawings:
            self.show_drawing()
        elif not (self.found_place.let_go() or self.margins.close_opened()):
            self.toolbox.back()

    def changeEvent(self, event: QEvent) -> None:
        if event.type() == QEvent.Type.ActivationChange and self.isActiveWindow():
            QTimer.singleShot(0, self.menus.refresh)
        super().changeEvent(event)

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        if event.mimeData().hasUrls():
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        paths = [url.toLocalFile() for url in event.mimeData().urls()]
        self.menus.acts.open_dropped([path for path in paths if path])

    def closeEvent(self, event: QCloseEvent) -> None:
        if not self.files.may_leave():
            event.ignore()
            return
        self.jobs.wait()
        self.recompute.close()
        self.drawings.close_worker()
        self.readout.close_worker()
        self.view_pages.close()
        self.remarks.close_search()
        self.autosave.forget()
        window_geometry.remember(self)
        self.panels.close_windows()
        event.accept()
