"""What the menus of the window hold, and what in them follows the layout."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject
from PySide6.QtGui import QAction, QActionGroup, QKeySequence
from PySide6.QtWidgets import QMenu

from app import clipboard, commands, preferences
from app.copying import copy_sentence
from app.drawings import VIEWS
from app.elevation_plane import ALONG
from app.files import SAMPLES
from app.icons import icon
from app.menus import LINE, Command, add_menu
from app.window_acts import WindowActs
from engine.errors import UserError
from engine.units import FLUX_DENSITY_UNITS

if TYPE_CHECKING:
    from app.main_window import MainWindow

#: Sizes of text beside the system's. [%]
TEXT_SIZES = (90, 100, 110, 125, 150)
Standard = QKeySequence.StandardKey


class WindowMenus(QObject):
    """Builds the menus; keeps what in them changes up to date."""

    def __init__(self, window: MainWindow) -> None:
        # A child of the window: its connections end with the window's actions.
        super().__init__(window)
        self._window = window
        self.acts = WindowActs(window)
        self._file()
        self._edit()
        self._draw()
        self._view()
        self._field()
        self._report()
        self._help()
        window.files.recent_changed.connect(self._fill_recent)
        stack = window.document.undo_stack
        stack.undoTextChanged.connect(self._on_undo_text)
        stack.redoTextChanged.connect(self._on_redo_text)
        self._on_undo_text(stack.undoText())
        self._on_redo_text(stack.redoText())
        self.refresh()

    # -- building ---------------------------------------------------------------

    def _add(self, title: str, entries: list[Command]) -> dict[str, QAction]:
        menu, actions = add_menu(self._window, title, entries, self._window.messages)
        self._menu: QMenu = menu
        return actions

    def _file(self) -> None:
        w, files = self._window, self._window.files
        actions = self._add(
            "&File",
            [
                Command("New …", lambda: w.show_page(w.new_page), Standard.New,
                        "An empty layout, or one of three starters"),
                Command("Open …", files.choose, Standard.Open,
                        "A layout, or a conductor schedule as CSV"),
                LINE,
                Command("Save", files.save, Standard.Save, "Write the layout's file"),
                Command("Save as …", files.save_as, "Ctrl+Shift+S",
                        "Write the layout to another file"),
                LINE,
                Command("Close the window", w.close, Standard.Quit,
                        "Ask about unsaved work, then end"),
            ],
        )  # fmt: skip
        self._recent = QMenu("Recent", w)
        self._menu.insertMenu(actions["Save"], self._recent)
        self._fill_recent()
        samples = QMenu("Samples", w)
        samples.setToolTipsVisible(True)
        for path in sorted(SAMPLES.glob("*.json")):
            action = samples.addAction(path.stem.replace("-", " ").capitalize())
            action.setToolTip("Invented, to look at and to change; saving asks where")
            action.triggered.connect(lambda _on, p=path: w.files.open_sample(p))
        samples.setEnabled(not samples.isEmpty())
        self._menu.insertMenu(actions["Save"], samples)

    def _edit(self) -> None:
        w, document, arrange = self._window, self._window.document, self._window.arrange
        stack = document.undo_stack
        actions = self._add(
            "&Edit",
            [
                Command("Undo", stack.undo, Standard.Undo, "Take the last edit back"),
                Command("Redo", stack.redo, Standard.Redo, "Do it again"),
                LINE,
                Command("Copy", lambda: clipboard.copy(document), Standard.Copy,
                        "Items for this or another window"),
                Command("Paste", lambda: clipboard.paste(document), Standard.Paste,
                        "Items, or a picture as backing drawing"),
                Command("Delete", lambda: commands.delete_selection(document), "",
                        "Delete what is selected (Del on the drawing)"),
                Command("Select everything", self.acts.select_all, Standard.SelectAll,
                        "All items that are drawn"),
                Command("Select the next item", lambda: commands.select_next(document),
                        "F4", "One item after the other, without a pointer"),
                Command("Select the previous item",
                        lambda: commands.select_next(document, -1), "Shift+F4",
                        "One item before the other, without a pointer"),
                LINE,
                Command("Move by …", arrange.move, "", "By typed lengths"),
                Command("Turn by …", arrange.rotate, "", "About the middle"),
                Command("Mirror …", arrange.mirror, "", "In a line through the middle"),
                Command("Repeat …", arrange.repeat, "", "Copies at equal steps"),
                Command("Align …", arrange.align, "", "On one line or height"),
                Command("Split run at its middle",
                        lambda: commands.split_at_middle(document), "",
                        "Two runs of one, in the middle of its longest leg"),
            ],
        )  # fmt: skip
        self._undo, self._redo = actions["Undo"], actions["Redo"]
        for action, name in ((self._undo, "undo"), (self._redo, "redo")):
            action.setIcon(icon(name, w.theme.text, w.theme.muted))

    def _draw(self) -> None:
        w, document, arrange = self._window, self._window.document, self._window.arrange
        self._add(
            "&Draw",
            [
                Command("Riser to the next floor",
                        lambda: self.acts.rise(down=False), "",
                        "From the last vertex, or from the selected run's end"),
                Command("Riser to the floor below",
                        lambda: self.acts.rise(down=True), "",
                        "From the last vertex, or from the selected run's end"),
                LINE,
                Command("Fill room with a zone", lambda: commands.fill_room(document),
                        "", "The room's outline less 0.20 m, where people are"),
                Command("Add room above …", arrange.room_above, "",
                        "The same outline on the slab above"),
                Command("Add room below …", arrange.room_below, "",
                        "The same outline under the floor"),
                LINE,
                Command("Open the section", self.acts.open_section, "F6",
                        "The selected run cut across at true scale"),
                LINE,
                Command("Place backing drawing …", self.acts.place_file, "",
                        "A page of a PDF, a PNG or a JPEG under the drawing"),
                Command("Place picture from the clipboard", self.acts.place_picture, "",
                        "The copied picture under the drawing"),
                Command("Calibrate backing drawing", self.acts.calibrate, "",
                        "Two points and their distance; then where one point lies"),
            ],
        )  # fmt: skip
        # The row's own actions, so that the menu shows their keys.
        first = self._menu.actions()[0]
        self._menu.insertActions(first, w.tool_row.actions())
        self._menu.insertSeparator(first)

    def _view(self) -> None:
        w = self._window
        self._add(
            "&View",
            [
                *(
                    Command(name, partial(w.drawings.show_view, name), "",
                            "Seen from above" if name == "Plan"
                            else f"Elevation, {name.lower()}")
                    for name in VIEWS
                ),
                Command(ALONG, self.acts.look_along, "",
                        "Elevation along the selected profile, or the first"),
                Command("Space", w.view_pages.open_space, "F9",
                        "The layout in space, with its maps"),
                LINE,
                Command("Fit", w.drawings.fit, "", "Show everything (Home)"),
                LINE,
                *(
                    Command(name, partial(w.panels.show_panel, name),
                            f"Ctrl+{key}", f"Show the panel {name}")
                    for key, name in enumerate(w.panels.names, start=1)
                ),
                Command("Panel in its own window", w.panels.take_out, "",
                        "For a second screen; the same again brings it back"),
                LINE,
            ],
        )  # fmt: skip
        themes = self._menu.addMenu("Colours")
        self._choices(themes, ("system", "light", "dark"), "theme")
        sizes = self._menu.addMenu("Text size")
        self._choices(sizes, TEXT_SIZES, "text_size", " %")

    def _field(self) -> None:
        w = self._window
        actions = self._add(
            "F&ield",
            [
                Command("Largest over heights",
                        lambda: w.view_state.set(height=None), "",
                        "The largest value over the zone's heights"),
                Command("Fit range", self.acts.fit_range, "",
                        "Let the map's range hold the values that it shows"),
                *w.view_pages.why.commands(),
                Command("Field over one period", w.view_pages.open_cycle, "F8",
                        "At the selected receptor, or at the pointer"),
                *w.view_pages.commands(),
                LINE,
                Command("Hold as before", self._hold, "F7",
                        "Keep the present margins beside the coming ones"),
                Command("Copy as sentence",
                        lambda: copy_sentence(w.margins.sentence), "Ctrl+Shift+C",
                        "The worst comparison, or the one chosen in the table"),
                Command("Copy picture", self.acts.put_picture, "",
                        "The drawing as it shows, with its caption"),
                LINE,
            ],
        )  # fmt: skip
        self._held = actions["Hold as before"]
        self._held.setCheckable(True)
        units = self._menu.addMenu("Unit")
        group = QActionGroup(units)
        for unit in FLUX_DENSITY_UNITS:
            action = QAction(unit, units, checkable=True)
            action.triggered.connect(lambda _on, u=unit: self._show_unit(u))
            group.addAction(action)
            units.addAction(action)
        self._units = group

    def _report(self) -> None:
        w = self._window
        self._add(
            "&Report",
            [
                *w.view_pages.report.commands(),
                LINE,
                Command("Write report …", w.view_pages.report.choose_report,
                        Standard.Print,
                        "A PDF that a reviewer can retrace, as the page Report has it"),
                Command("Export map …", w.exports.choose_map, "",
                        "The map that is shown, as PNG, SVG or CSV"),
            ],
        )  # fmt: skip

    def _help(self) -> None:
        w = self._window
        self._add(
            "&Help",
            [
                Command("From an empty room to a report", lambda: w.show_page(w.guide),
                        Standard.HelpContents, "Step by step"),
                Command("Cautions", lambda: w.show_page(w.cautions), "",
                        "What the figures are, and what they are not"),
                Command("About Lodestead", lambda: w.show_page(w.about), "",
                        "Version, licence, cautions"),
            ],
        )  # fmt: skip

    def _choices(
        self, menu: QMenu, values: Sequence[object], field: str, unit: str = ""
    ) -> None:
        group = QActionGroup(menu)
        chosen = getattr(preferences.load(), field)
        for value in values:
            text = f"{value}{unit}"
            action = QAction(text, menu, checkable=True, checked=value == chosen)
            action.triggered.connect(lambda _on, v=value: self.acts.prefer(field, v))
            group.addAction(action)
            menu.addAction(action)

    # -- following --------------------------------------------------------------

    def refresh(self) -> None:
        """Mark the unit in use."""
        unit = self._window.document.layout.settings.flux_density_unit
        for action in self._units.actions():
            action.setChecked(action.text() == unit)

    def release_held(self) -> None:
        """Another layout is shown: nothing is as before."""
        self._held.setChecked(False)
        self._window.margins.hold(False)
        self._window.view_pages.hold(False)

    def _show_unit(self, unit: str) -> None:
        self.acts.set_unit(unit)
        self.refresh()

    def _on_undo_text(self, text: str) -> None:
        self._undo.setText(f"Undo: {text}" if text else "Undo")
        self._undo.setEnabled(bool(text))

    def _on_redo_text(self, text: str) -> None:
        self._redo.setText(f"Redo: {text}" if text else "Redo")
        self._redo.setEnabled(bool(text))

    def _fill_recent(self) -> None:
        self._recent.clear()
        for name in preferences.load().recent:
            action = self._recent.addAction(name)
            action.triggered.connect(lambda _on, n=name: self.acts.open_recent(n))
        self._recent.setEnabled(not self._recent.isEmpty())

    def _hold(self) -> None:
        if not self._window.margins.hold(self._held.isChecked()):
            self._held.setChecked(False)
            raise UserError(
                "There is no margin to hold yet: it takes a zone, a reference level "
                "and a current."
            )
        self._window.view_pages.hold(self._held.isChecked())
