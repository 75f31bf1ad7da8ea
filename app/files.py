"""The layout's file: open, save, recent, asking before work is lost.

A file that another program changed is noticed and left to the user to decide.
"""

from __future__ import annotations

import os
from pathlib import Path

import msgspec
from PySide6.QtCore import QFileSystemWatcher, QObject, Signal
from PySide6.QtWidgets import QFileDialog, QMessageBox, QWidget

from app import preferences
from app.chosen_file import ask_where_to_write
from app.document import Document
from app.messages import Messages
from engine import layout_file
from engine.exchange.linked_drawings import with_links_moved
from engine.exchange.schedule import read_schedule
from engine.layout import Layout, Settings
from engine.places import Storey

SAMPLES = Path(__file__).parents[1] / "sample_layouts"
KINDS = "Layouts (*.json);;Conductor schedules (*.csv)"


def empty_layout(choices: preferences.Preferences) -> Layout:
    """A new layout by the user's choices: one storey at the datum."""
    settings = Settings(
        frequency=float(choices.frequency),
        flux_density_unit=choices.flux_density_unit,
        length_unit=choices.length_unit,
        paper=choices.paper,
        grid_step=choices.grid_step,
    )
    ground = Storey(id="ground", name="Ground floor", floor_level=0.0)
    return Layout(settings=settings, storeys=(ground,))


class Files(QObject):
    """Reads and writes the document's file.

    Signals
    -------
    recent_changed()
    changed_outside(path)
        Another program wrote the file that is open.
    """

    recent_changed = Signal()
    changed_outside = Signal(object)

    def __init__(self, document: Document, messages: Messages, window: QWidget) -> None:
        super().__init__(window)
        self._document = document
        self._messages = messages
        self._window = window
        self._state: tuple[int, int] | None = None
        self._watcher = QFileSystemWatcher(self)
        self._watcher.fileChanged.connect(self._on_file_changed)

    def new(self, layout: Layout) -> bool:
        """Start over with `layout` as unsaved work; False when the user goes back."""
        if not self.may_leave():
            return False
        self._document.open(layout, None)
        self._watch(None)
        return True

    def choose(self) -> bool:
        """Ask which file to open, and open it."""
        start = str(self._document.path.parent) if self._document.path else ""
        name, _ = QFileDialog.getOpenFileName(
            self._window, "Open layout", start, f"{KINDS};;All files (*)"
        )
        return bool(name) and self.open(Path(name))

    def open(self, path: Path) -> bool:
        """Open a layout or a schedule; the open one stays when that fails."""
        if not self.may_leave():
            return False
        with self._messages.shown():
            if path.suffix.lower() == ".csv":
                self._document.open(read_schedule(path), None)
                self._watch(None)
                return True
            layout = layout_file.read(path)
            self._document.open(layout, path)
            self._watch(path)
            self._remember(path)
            return True
        return False

    def open_sample(self, path: Path) -> bool:
        """Show a sample as work of one's own: saving asks where, and keeps it whole."""
        if not self.may_leave():
            return False
        with self._messages.shown():
            layout = layout_file.read(path)
            # The copy has no folder of its own that links could count from.
            self._document.open(with_links_moved(layout, path.parent, None), None)
            self._watch(None)
            return True
        return False

    def open_rescued(self, copy: Path, path: Path | None) -> bool:
        """Open rescued work as unsaved changes of the file it belongs to."""
        with self._messages.shown():
            layout = layout_file.read(copy)
            before = Layout()
            if path is not None and path.exists():
                before = layout_file.read(path)
            self._document.open(before, path)
            self._watch(path)
            self._document.edit("Bring back unsaved work", layout)
            return True
        return False

    def save(self) -> bool:
        """Save to the layout's file, asking where when it has none."""
        if self._document.path is None:
            return self.save_as()
        return self._write(self._document.path)

    def save_as(self) -> bool:
        """Ask where to save, and save there."""
        start = str(self._document.path or "room.json")
        path = ask_where_to_write(
            self._window, "Save layout as", start, "Layouts (*.json)"
        )
        return path is not None and self._write(path)

    def may_leave(self) -> bool:
        """Whether the present work is saved or may be dropped, asking the user."""
        if not self._document.is_modified:
            return True
        name = self._document.path.name if self._document.path else "This layout"
        box = QMessageBox(self._window)
        box.setWindowTitle("Unsaved work")
        box.setText(f"{name} has changes that are not saved.")
        box.setInformativeText("What should become of them?")
        save = box.addButton("Save them", QMessageBox.ButtonRole.AcceptRole)
        drop = box.addButton("Drop them", QMessageBox.ButtonRole.DestructiveRole)
        back = box.addButton("Go back", QMessageBox.ButtonRole.RejectRole)
        box.setDefaultButton(save)
        box.setEscapeButton(back)
        box.exec()
        if box.clickedButton() is save:
            return self.save()
        return box.clickedButton() is drop

    def _write(self, path: Path) -> bool:
        with self._messages.shown():
            self._watch(None)
            self._move_links(path.parent)
            layout_file.write(path, self._document.whole)
            self._document.set_path(path)
            self._document.undo_stack.setClean()
            self._watch(path)
            self._remember(path)
            self._messages.inform(f"{path.name} was saved.")
            return True
        self._watch(self._document.path)
        return False

    def _move_links(self, folder: Path) -> None:
        """Let links to files count from the folder that is saved in."""
        document = self._document
        before = None if document.path is None else document.path.parent
        moved = with_links_moved(document.committed, before, folder)
        if moved is not document.committed:
            document.edit(f"Link drawings from {folder.name}", moved)

    def _remember(self, path: Path) -> None:
        choices = preferences.load()
        preferences.save(choices.with_recent(path))
        self.recent_changed.emit()

    def forget(self, path: str) -> None:
        """Take a file that is gone out of the recent ones."""
        choices = preferences.load()
        rest = tuple(other for other in choices.recent if other != path)
        preferences.save(msgspec.structs.replace(choices, recent=rest))
        self.recent_changed.emit()

    def _watch(self, path: Path | None) -> None:
        watched = self._watcher.files()
        if watched:
            self._watcher.removePaths(watched)
        self._state = _state(path)
        if path is not None and path.exists():
            self._watcher.addPath(str(path))

    def _on_file_changed(self, name: str) -> None:
        path = Path(name)
        if path != self._document.path:
            return
        state = _state(path)
        if path.exists() and name not in self._watcher.files():
            # Replaced by another file: the watcher has lost it.
            self._watcher.addPath(name)
        if state != self._state:
            self._state = state
            self.changed_outside.emit(path)


def _state(path: Path | None) -> tuple[int, int] | None:
    """What tells two versions of a file apart: time and size."""
    if path is None:
        return None
    try:
        found = os.stat(path)
    except OSError:
        return None
    return found.st_mtime_ns, found.st_size
