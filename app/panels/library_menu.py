"""The button that opens a user's own library of reference levels."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from PySide6.QtWidgets import QFileDialog, QMenu, QPushButton

from app.chosen_file import ask_where_to_write
from app.library import Content, Library, read, write
from app.messages import Messages
from engine.criteria import ReferenceLevel

_FILTER = "Library (*.json)"


class LevelLibraryButton(QPushButton):
    """Keeps levels for the next project, takes them out, and exchanges files."""

    def __init__(
        self,
        library: Library,
        messages: Messages,
        take: Callable[[ReferenceLevel], None],
    ) -> None:
        """`take` is called with a level of the library that is to be added."""
        super().__init__()
        self._library, self._messages, self._take = library, messages, take
        self._level: ReferenceLevel | None = None
        self.setText("Library")
        self.setToolTip("Your own reference levels, kept for the next project")
        self.library_menu = QMenu(self)
        self.library_menu.aboutToShow.connect(self.fill)
        self.setMenu(self.library_menu)

    def show_level(self, level: ReferenceLevel) -> None:
        """The level that `Keep` means."""
        self._level = level

    def fill(self) -> None:
        """Fill the menu from the library as it is on disk."""
        menu = self.library_menu
        menu.clear()
        content = Content()
        with self._messages.shown():
            content = self._library.content()
        level = self._level
        keep = menu.addAction("Keep this level" if level is None else _keep(level))
        keep.setEnabled(level is not None)
        keep.triggered.connect(self.keep)
        menu.addSeparator()
        for held in content.levels:
            action = menu.addAction(f"Add {_plain(held.title)}")
            action.triggered.connect(lambda _on=False, one=held: self._take(one))
        if content.levels:
            forget = menu.addMenu("Take out of the library")
            for held in content.levels:
                action = forget.addAction(_plain(held.title))
                action.triggered.connect(
                    lambda _on=False, name=held.title: self.forget(name)
                )
        else:
            menu.addAction("The library holds no level yet").setEnabled(False)
        menu.addSeparator()
        menu.addAction("Import a library file…").triggered.connect(self._on_import)
        menu.addAction("Export the library…").triggered.connect(self._on_export)

    def keep(self) -> None:
        """Keep a copy of the shown level."""
        level = self._level
        if level is None:
            return
        with self._messages.shown():
            content = self._library.content().with_level(level)
            self._library.keep(content)
            copy = next(held for held in content.levels if held.title == level.title)
            said = f"“{level.title}” is kept in your library."
            if level.source and not copy.source:
                said += " It is invented, so its source was left out."
            self._messages.inform(said)

    def forget(self, name: str) -> None:
        """Take a level out of the library."""
        with self._messages.shown():
            self._library.keep(self._library.content().without(level=name))
            self._messages.inform(f"“{name}” is no longer in your library.")

    def import_file(self, path: Path) -> None:
        """Take everything in a library file into the library."""
        with self._messages.shown():
            other = read(path)
            self._library.keep(self._library.content().merged(other))
            self._messages.inform(
                f"{path.name}: {len(other.levels)} levels and {len(other.formations)} "
                "formations were taken into your library."
            )

    def export_file(self, path: Path) -> None:
        """Write the library to a file for somebody else."""
        with self._messages.shown():
            write(path, self._library.content())
            self._messages.inform(f"The library was written to {path.name}.")

    def _on_import(self) -> None:
        name, _ = QFileDialog.getOpenFileName(self, "Import a library", "", _FILTER)
        if name:
            self.import_file(Path(name))

    def _on_export(self) -> None:
        path = ask_where_to_write(self, "Export the library", "library.json", _FILTER)
        if path is not None:
            self.export_file(path)


def _keep(level: ReferenceLevel) -> str:
    return f"Keep {_plain(level.title)}"


def _plain(text: str) -> str:
    """Text of a menu: an ampersand would be taken for a key."""
    return text.replace("&", "&&")
