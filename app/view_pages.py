"""Pages that show the layout otherwise than drawn: in space, and over one period."""

from __future__ import annotations

from functools import cached_property
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject

from app.cycle_values import CyclePlace
from app.menus import Command
from app.readout_values import Readout
from app.report_pages import ReportPages
from app.why_pages import WhyPages
from engine.errors import UserError

if TYPE_CHECKING:
    from app.main_window import MainWindow
    from app.pages.uncertainty_page import UncertaintyPage
    from app.pages.variants_page import VariantsPage
    from app.views.cycle_page import CyclePage
    from app.views.space_view import SpaceView


class ViewPages(QObject):
    """Builds the pages into the window, and opens them on what is meant."""

    def __init__(self, window: MainWindow) -> None:
        super().__init__(window)
        self._window = window
        self._parts = (window.document, window.view_state, window.messages)
        window.band.opened.connect(self.open_variants)
        self.why, self.report = WhyPages(window), ReportPages(window)
        self._pointed: CyclePlace | None = None
        window.readout.shown.connect(self._on_read)

    # -- built when first shown -------------------------------------------------
    # The imports within: what draws in space and plots takes long to load.

    @cached_property
    def cycle(self) -> CyclePage:
        from app.views.cycle_page import CyclePage

        return self._window.with_page(CyclePage(*self._parts))

    @cached_property
    def space(self) -> SpaceView:
        from app.views.space_view import SpaceView

        return self._window.with_page(SpaceView(*self._parts))

    @cached_property
    def variants(self) -> VariantsPage:
        from app.pages.variants_page import VariantsPage

        return self._window.with_page(VariantsPage(*self._parts))

    @cached_property
    def uncertainty(self) -> UncertaintyPage:
        from app.pages.uncertainty_page import UncertaintyPage

        return self._window.with_page(UncertaintyPage(*self._parts))

    # -- commands ---------------------------------------------------------------

    def open_space(self) -> None:
        """Show the layout in space."""
        self._window.show_page(self.space)

    def commands(self) -> tuple[Command, ...]:
        """Entries of the menu Field: what stands beside the value itself."""
        return (
            Command("Variants", self.open_variants, "Ctrl+Shift+V",
                    "List, table and maps of base and variants"),
            Command("Uncertainty", self.open_uncertainty, "Ctrl+Shift+U",
                    "What matters for the value of a place, and tolerances"),
        )  # fmt: skip

    def open_variants(self) -> None:
        """Show base and variants side by side."""
        self._window.show_page(self.variants)

    def open_uncertainty(self) -> None:
        """Show what the uncertainty of a place is made of."""
        self._window.show_page(self.uncertainty)

    def open_cycle(self) -> None:
        """Show the field over one period: at the selected receptor, or the pointer.

        Raises
        ------
        UserError
            When there is neither, nor any receptor.
        """
        layout = self._window.document.layout
        selected = [
            receptor
            for receptor in layout.receptors
            if receptor.id in self._window.document.selection
        ]
        if len(selected) != 1 and self._pointed is None:
            selected = list(layout.receptors)
        if selected:
            place = CyclePlace(selected[0].at, selected[0].id)
        elif self._pointed is not None:
            place = self._pointed
        else:
            raise UserError(
                "There is no place to show yet: point at one on the drawing and press "
                "F8, or select a receptor."
            )
        self.cycle.show_place(place)
        self._window.show_page(self.cycle)

    def hold(self, on: bool) -> None:
        """Let present values stand beside the coming ones, wherever values stand."""
        self._window.readout.hold(on)
        self.why.hold(on)
        for name in ("cycle", "variants", "uncertainty"):
            # What is held is what a page would show now: it has to be there for that.
            if on or name in vars(self):
                getattr(self, name).hold(on)

    def close(self) -> None:
        """Stop the threads, before the window goes."""
        self.why.close()
        self.report.close()
        for name in ("cycle", "variants", "uncertainty", "space"):
            if name in vars(self):
                getattr(self, name).close_worker()

    def _on_read(self, found: Readout | None) -> None:
        # The menu takes the pointer off the drawing: the last place is meant then.
        if found is not None:
            self._pointed = CyclePlace(found.at)
