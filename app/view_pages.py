"""Pages that show the layout otherwise than drawn: in space, and over one period."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject

from app.cycle_values import CyclePlace
from app.menus import Command
from app.pages.uncertainty_page import UncertaintyPage
from app.pages.variants_page import VariantsPage
from app.readout_values import Readout
from app.views.cycle_page import CyclePage
from app.views.space_view import SpaceView
from app.why_pages import WhyPages
from engine.errors import UserError

if TYPE_CHECKING:
    from app.main_window import MainWindow


class ViewPages(QObject):
    """Builds the pages into the window, and opens them on what is meant."""

    def __init__(self, window: MainWindow) -> None:
        super().__init__(window)
        self._window = window
        parts = (window.document, window.view_state, window.messages)
        self.cycle, self.space = CyclePage(*parts), SpaceView(*parts)
        for page in (self.cycle, self.space):
            window.pages.addWidget(page)
            page.closed.connect(window.show_drawing)
        self.variants, self.uncertainty = VariantsPage(*parts), UncertaintyPage(*parts)
        for result in (self.variants, self.uncertainty):
            window.pages.addWidget(result)
            result.closed.connect(window.show_drawing)
        window.band.opened.connect(self.open_variants)
        self.why = WhyPages(window)
        self._pointed: CyclePlace | None = None
        window.readout.shown.connect(self._on_read)

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
        for part in (self._window.readout, self.variants, self.uncertainty):
            part.hold(on)

    def close(self) -> None:
        """Stop the threads, before the window goes."""
        self.why.close()
        self.cycle.close_worker()
        self.variants.close_worker()
        self.uncertainty.close_worker()
        self.space.close_worker()

    def _on_read(self, found: Readout | None) -> None:
        # The menu takes the pointer off the drawing: the last place is meant then.
        if found is not None:
            self._pointed = CyclePlace(found.at)
