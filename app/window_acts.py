"""The few commands of the menus that need the whole window."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import msgspec
from PySide6.QtWidgets import QApplication, QFileDialog

from app import commands, preferences
from app.backing import place_backing_picture
from app.copying import copy_picture
from app.elevation_plane import ALONG, PLAN_VIEW, drawn_lines
from app.tools.run import RunTool
from engine.edits import replaced
from engine.errors import UserError

if TYPE_CHECKING:
    from app.main_window import MainWindow

PICTURES = "Drawings and pictures (*.pdf *.png *.jpg *.jpeg)"

#: Endings of what can be dropped onto the window.
_LAYOUTS, _DRAWINGS = (".json", ".csv"), (".pdf", ".png", ".jpg", ".jpeg")


class WindowActs:
    """Acts on the window's parts; what cannot be done is a `UserError`."""

    def __init__(self, window: MainWindow) -> None:
        self._window = window

    def open_dropped(self, names: list[str]) -> None:
        """Open a dropped layout or schedule; place a dropped drawing."""
        with self._window.messages.shown():
            if len(names) > 1:
                raise UserError(
                    "Nothing was opened: several files were dropped. Drop one at a "
                    "time."
                )
            for path in map(Path, names):
                if path.suffix.lower() in _LAYOUTS:
                    self._window.files.open(path)
                elif path.suffix.lower() in _DRAWINGS:
                    self._place(path)
                else:
                    raise UserError(
                        f"{path.name} was not opened: it is neither a layout (.json), "
                        "nor a conductor schedule (.csv), nor a drawing or picture "
                        "(.pdf, .png, .jpg)."
                    )

    def open_recent(self, name: str) -> None:
        """Open a recent file, or forget it when it is gone."""
        if Path(name).exists():
            self._window.files.open(Path(name))
            return
        self._window.files.forget(name)
        self._window.messages.warn(
            f"{name} is not there any more and was taken out of the recent files."
        )

    def prefer(self, field: str, value: Any) -> None:
        """Keep a preference and show it."""
        preferences.save(msgspec.structs.replace(preferences.load(), **{field: value}))
        if field == "text_size":
            self._window.messages.inform(
                f"Texts are shown at {value} % from the next start on."
            )
        self._window.follow_preferences()

    def set_unit(self, unit: str) -> None:
        """Show flux densities in another unit; one undo step."""
        document = self._window.document
        settings = msgspec.structs.replace(
            document.committed.settings, flux_density_unit=unit
        )
        document.edit(f"Show {unit}", replaced(document.committed, settings))

    def put_picture(self) -> None:
        """Put the drawing as it shows on the clipboard."""
        w = self._window
        caption, beside = w.caption_text(), w.drawings.beside
        copy_picture(w.drawings, f"{caption} · beside: {beside}" if beside else caption)
        w.messages.inform("The picture is on the clipboard, with its caption.")

    def rise(self, *, down: bool) -> None:
        """Go to the next floor from the last vertex, or from the run's end."""
        tool = self._window.toolbox.active
        if not (isinstance(tool, RunTool) and tool.rise(down=down)):
            commands.raise_selected_run(self._window.document, down=down)

    def fit_range(self) -> None:
        """Let the map's range hold the values that it shows."""
        document = self._window.document
        picture = self._window.drawings.picture
        if picture is None or picture.extent is None:
            raise UserError("There is no settled map yet whose range could be fitted.")
        smallest, largest = picture.extent
        low = min(max(smallest, 1e-4 * largest), 0.5 * largest)
        settings = msgspec.structs.replace(
            document.committed.settings, map_low=low, map_high=largest
        )
        document.edit("Fit the map's range", replaced(document.committed, settings))

    def look_along(self) -> None:
        """Look along the selected profile, or the first."""
        w = self._window
        lines = drawn_lines(w.document.layout)
        if not lines:
            w.drawings.show_view(PLAN_VIEW)
            raise UserError(
                "There is no line to look along yet: draw one on the plan with the "
                "tool Profile, then choose “Along a line” again."
            )
        chosen = [line for line in lines if line.profile in w.document.selection]
        if chosen:
            w.drawings.look_along(chosen[0].profile, chosen[0].leg)
        else:
            w.drawings.show_view(ALONG)

    def select_all(self) -> None:
        """Select every item that is drawn."""
        document = self._window.document
        document.select(item.id for item in commands.drawn(document.layout))

    def open_section(self) -> None:
        """Show the selected run cut across."""
        document = self._window.document
        runs = [run.id for run in document.layout.runs if run.id in document.selection]
        if len(runs) != 1:
            raise UserError("Select one run to see its section.")
        self._window.open_section(runs[0])

    def place_file(self) -> None:
        """Choose a drawing or picture and place it."""
        name, _ = QFileDialog.getOpenFileName(
            self._window, "Place backing drawing", "", PICTURES
        )
        if name:
            self._place(Path(name))

    def _place(self, path: Path) -> None:
        """Under the view in front; to be calibrated at once."""
        w = self._window
        w.backing.place(path, w.drawings.plane)

    def calibrate(self) -> None:
        """Calibrate the selected backing drawing, or the last one."""
        document = self._window.document
        drawings = document.layout.backing_drawings
        chosen = [d for d in drawings if d.id in document.selection] or drawings[-1:]
        if not chosen:
            raise UserError("There is no backing drawing to calibrate: place one.")
        self._window.calibrate(chosen[0].id)

    def place_picture(self) -> None:
        """Place the clipboard's picture under the view in front."""
        image = QApplication.clipboard().image()
        if image.isNull():
            raise UserError("There is no picture on the clipboard: copy one first.")
        w = self._window
        w.calibrate(place_backing_picture(w.document, image, w.drawings.plane))
