"""What in the window follows what: the parts' signals connected to one another."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject

from app.document import EVERYTHING
from app.map_picture import MapPicture
from app.margin_values import Margins

if TYPE_CHECKING:
    from app.main_window import MainWindow


class WindowLinks(QObject):
    """Connects the parts of a window that is built; holds no state."""

    def __init__(self, window: MainWindow) -> None:
        # A child of the window: its connections end with the window's parts.
        super().__init__(window)
        self._window = window
        self._connect_drawing()
        self._connect_results()
        self._connect_pages()
        self._connect_document()
        window.toolbox.activate(window.toolbox.tools[0])
        self._on_changed(window.document.layout, frozenset())
        self._show_title()

    # -- connecting ---------------------------------------------------------------

    def _connect_drawing(self) -> None:
        """Tools, entry strip, drawing and the readout at the pointer."""
        w = self._window
        toolbox, strip, drawings = w.toolbox, w.strip, w.drawings
        toolbox.activated.connect(drawings.set_tool)
        toolbox.activated.connect(strip.set_tool)
        toolbox.activated.connect(lambda _tool: w.show_drawing())
        toolbox.hint_changed.connect(w.tell_hint)
        strip.hold_toggled.connect(drawings.set_holds)
        strip.catch_toggled.connect(drawings.set_catches)
        strip.left.connect(drawings.take_keyboard)
        drawings.entry_wanted.connect(strip.take_focus)
        drawings.pointed.connect(w.readout.show_at)
        drawings.pointer_left.connect(w.readout.clear_place)
        w.section.turned.connect(drawings.set_cut)
        drawings.hint_changed.connect(w.tell_hint)
        drawings.linked_pictures.missed.connect(w.messages.warn)

    def _connect_results(self) -> None:
        """What is computed in the background, and where it shows."""
        w = self._window
        recompute = w.recompute
        w.drawings.area_changed.connect(recompute.set_view)
        recompute.map_ready.connect(w.drawings.set_map)
        w.drawings.map_told.connect(self._tell_map_state)
        recompute.margins_ready.connect(self._take_margins)
        recompute.curve_ready.connect(w.rail.set_curve)
        recompute.problem.connect(w.caption.tell)
        w.drawings.problem.connect(w.caption.tell)
        recompute.progress.connect(
            lambda share, text: w.working.setText(text if share < 1 else "")
        )
        w.rail.refused.connect(w.messages.refuse)
        w.jobs.refused.connect(w.messages.error)

    def _connect_pages(self) -> None:
        """Panels and pages that lead to one another."""
        w = self._window
        w.margins.go_to.connect(w.found_place.show_row)
        w.margins.opened.connect(w.make_room)
        w.item.section_requested.connect(w.open_section)
        w.item.calibrate_requested.connect(w.calibrate)
        w.remarks.go_to.connect(self._go_to_place)
        w.remarks.counted.connect(self._count_remarks)
        w.section.closed.connect(w.show_drawing)

    def _connect_document(self) -> None:
        w = self._window
        w.files.changed_outside.connect(self._on_changed_outside)
        w.document.path_changed.connect(self._show_title)
        w.document.undo_stack.cleanChanged.connect(self._show_title)
        w.document.changed.connect(self._on_changed)
        # Not what changes in passing: a refused move is taken back right after.
        w.document.undo_stack.indexChanged.connect(self._let_go)
        w.toolbox.activated.connect(self._let_go)

    # -- following ----------------------------------------------------------------

    def _go_to_place(self, at: object) -> None:
        if isinstance(at, tuple):
            self._window.show_drawing()
            self._window.drawings.look_at(at)

    def _let_go(self, *_: object) -> None:
        # No lambda: the document's signal would keep the window with it.
        self._window.message_bar.let_go()

    def _count_remarks(self, count: int) -> None:
        text = f"Remarks {count}" if count else "Remarks"
        self._window.panels.rename("Remarks", text)

    def _take_margins(self, margins: Margins) -> None:
        self._window.margins.set_margins(margins)
        self._window.drawings.planes.set_margins(margins)
        assessment = margins.assessment
        if assessment is not None:
            self._window.remarks.set_assessment(assessment)

    def _tell_map_state(self, picture: MapPicture) -> None:
        text = "out of date" if picture.is_stale else ""
        self._window.caption.tell("coarse" if picture.is_coarse and not text else text)

    def _on_changed(self, layout: object, ids: object) -> None:
        w = self._window
        w.strip.set_unit(w.document.layout.settings.length_unit)
        if ids == EVERYTHING:
            self._show_title()
            w.menus.release_held()
            # What was told of the layout before is not true of this one.
            w.message_bar.hide()
            w.show_drawing()

    def _on_changed_outside(self, path: Path) -> None:
        w = self._window
        w.message_bar.offer(
            f"{path} was changed by another program. Read it again to see the change, "
            "or save to replace it with what is shown here.",
            "Read it again",
            lambda: w.files.open(path),
        )

    def _show_title(self, *_: object) -> None:
        w = self._window
        path = w.document.path
        project = w.document.layout.title.project
        unsaved = f"{project} · not saved yet" if project else "not saved yet"
        name = path.name if path else unsaved
        w.setWindowTitle(f"{name}[*] — Lodestead")
        w.setWindowModified(w.document.is_modified)
