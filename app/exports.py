"""Exporting the map that is shown, off the main thread."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import QObject
from PySide6.QtWidgets import QWidget

from app.chosen_file import ask_where_to_write
from app.document import Document
from app.elevation_plane import plane_text, upright_of
from app.jobs import Jobs, Work
from app.map_request import heights_of
from app.messages import Messages
from app.variant_acts import shown_text
from app.view_state import ViewState
from engine.circuits import LoadCase
from engine.elevation import Upright
from engine.errors import Cancelled, Progress
from engine.layout import Layout
from engine.picture import OffsetLines

MAP_KINDS = "Picture (*.png);;Vectors (*.svg);;Numbers (*.csv)"


class Exports(QObject):
    """Writes what is shown to files, with progress and cancel."""

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        jobs: Jobs,
        messages: Messages,
        window: QWidget,
    ) -> None:
        super().__init__(window)
        self._document = document
        self._view_state = view_state
        self._jobs = jobs
        self._messages = messages
        self._window = window
        #: Lines that the drawing shows over this layout's map at these heights.
        self.offsets: Callable[[Layout, tuple[float, ...]], OffsetLines | None] = (
            lambda _layout, _heights: None
        )

    def choose_map(self) -> None:
        """Ask where to, and write the map that is shown."""
        path = ask_where_to_write(
            self._window, "Export map", self._suggested(".png"), MAP_KINDS
        )
        if path is not None:
            self.map(path)

    def map(self, path: Path) -> None:
        """Write the map as the view shows it: its load case, its heights or plane."""
        layout, look = self._document.committed, self._view_state.look
        heights, _ = heights_of(layout, look)
        case = next((c for c in layout.cases if c.id == look.case), layout.cases[0])
        upright = upright_of(layout, look, look.view)
        if upright is not None:
            self._upright_map(layout, case, upright, path)
            return
        shown = shown_text(self._document)
        offsets = self.offsets(layout, heights)

        def work(cancelled: Cancelled, progress: Progress) -> None:
            # Here, as below: what draws on paper takes long to load.
            from engine.commands.horizontal_map import write_map

            write_map(
                layout, case, heights, path, shown=shown, offsets=offsets,
                cancelled=cancelled, progress=progress,
            )  # fmt: skip

        self._start("Exporting the map", work, f"{path} was written.")

    def _upright_map(
        self, layout: Layout, case: LoadCase, upright: Upright, path: Path
    ) -> None:
        """Write the map on the upright plane of the elevation in front."""
        look, shown = self._view_state.look, shown_text(self._document)
        name = plane_text(layout, look, look.view)

        def work(cancelled: Cancelled, progress: Progress) -> None:
            from engine.commands.upright_map import write_upright_map

            write_upright_map(
                layout, case, upright, name, path, shown=shown, cancelled=cancelled,
                progress=progress,
            )  # fmt: skip

        self._start("Exporting the map", work, f"{path} was written.")

    def _start(self, title: str, work: Work, told: str) -> None:
        self._jobs.start(title, work, lambda _: self._messages.inform(told))

    def _suggested(self, ending: str) -> str:
        path = self._document.path
        if path is not None:
            return str(path.with_suffix(ending))
        return _stem(self._document.layout) + ending


def _stem(layout: Layout) -> str:
    """A file name from the project's, without what file systems refuse."""
    name = "".join(
        c if c.isalnum() or c in " -_" else "-" for c in layout.title.project
    )
    return name.strip(" -") or "room"
