"""The form of one backing drawing: how it shows, which page, another file, removal.

While the opacity is dragged the drawing only previews; letting go is one undo step.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from msgspec.structs import replace
from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QCheckBox,
    QGridLayout,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QSlider,
    QSpinBox,
    QWidget,
)

from app import backing
from app.document import Document
from app.jobs import Jobs
from app.panels.field import Choice, Quantity, ValueField
from app.panels.panel import Words, column
from app.theme import STEP
from engine.calibration import is_calibrated, metres_per_pixel, turned
from engine.edits import checked, removed, replaced
from engine.embedded_picture import picture_size
from engine.errors import Cancelled, Progress, UserError
from engine.exchange.backing import ReadPicture, read_picture
from engine.exchange.linked_drawings import link_fault
from engine.layout import Layout
from engine.places import BackingDrawing
from engine.typed_lengths import length_text

_TURN = Quantity("The turn", "°", low=-360.0, high=360.0)

_VIEWS = (
    ("plan", "the plan"),
    ("looking +x", "the elevation looking +x"),
    ("looking +y", "the elevation looking +y"),
)


_KEPT = (("embedded", "Embedded copy"), ("linked", "Linked file"))


class BackingForm(QWidget):
    """Edits one backing drawing.

    Signals
    -------
    calibrate_requested(id)
        The drawing is to be given its scale and place.
    """

    calibrate_requested = Signal(str)

    def __init__(
        self,
        document: Document,
        item_id: str,
        parent: QWidget | None = None,
        *,
        jobs: Jobs | None = None,
    ) -> None:
        """Parameters
        ----------
        jobs : Jobs or None
            Reads files in the background; None: at once.
        """
        super().__init__(parent)
        self._document, self._jobs = document, jobs
        self._id = item_id
        self._pages: tuple[tuple[str, object], int | None] | None = None
        self.setAccessibleName("Backing drawing")
        self.about = Words()
        self.fault = Words(style="warning")
        self.calibrate = _button(
            "Calibrate", "Scale by two points and a distance, then place one point"
        )
        self.calibrate.clicked.connect(lambda: self.calibrate_requested.emit(self._id))
        self.opacity, self.opacity_shown = QSlider(Qt.Orientation.Horizontal), QLabel()
        self.turn = ValueField.of(
            _TURN,
            self._on_turn,
            name="Turn",
            tip="Counter-clockwise about the point that is placed, in degrees",
        )
        self.view = Choice(
            _VIEWS, self._on_view, name="Lies under", tip="The view that it lies under"
        )
        self.kept = Choice(
            _KEPT,
            self._on_kept,
            name="Kept as",
            tip="A copy in the layout's file, or only the path of the drawing's file",
        )
        self.page = QSpinBox()
        self.locked = QCheckBox("Lock")
        self.replace_file = _button(
            "Replace file",
            "Show another file, such as a newer revision; a sheet of the same "
            "proportions keeps its calibration",
        )
        self.replace_file.clicked.connect(self._on_replace)
        self.remove = _button("Remove", "Take the backing drawing out of the layout")
        self.remove.clicked.connect(self._on_remove)
        self._prepare()
        self._arrange()
        document.changed.connect(self._on_changed)
        self._fill()

    @property
    def item_id(self) -> str:
        """Id of the drawing."""
        return self._id

    def _prepare(self) -> None:
        self.opacity.setRange(0, 100)
        self.opacity.setSingleStep(5)
        self.opacity.setPageStep(10)
        self.opacity.setAccessibleName("Opacity")
        self.opacity.setToolTip("How strongly it shows under the drawing, in per cent")
        self.opacity.valueChanged.connect(self._on_opacity)
        self.opacity.sliderReleased.connect(
            lambda: self._set_opacity(self.opacity.value())
        )
        self.opacity_shown.setMinimumWidth(9 * STEP)
        self.opacity_shown.setAlignment(
            Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
        )
        self.page.setAccessibleName("Page")
        self.page.setKeyboardTracking(False)
        self.page.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.page.valueChanged.connect(self._on_page)
        self.locked.setToolTip(
            "A locked drawing cannot be moved, selected by a box, or calibrated"
        )
        self.locked.toggled.connect(self._on_locked)

    def _arrange(self) -> None:
        strength = QHBoxLayout()
        strength.setSpacing(2 * STEP)
        strength.addWidget(self.opacity, 1)
        strength.addWidget(self.opacity_shown)
        grid = QGridLayout()
        grid.setHorizontalSpacing(2 * STEP)
        grid.setVerticalSpacing(STEP)
        grid.setColumnStretch(1, 1)
        rows: tuple[tuple[str, QWidget], ...] = (
            ("Opacity", self.opacity), ("Turn", self.turn),
            ("Lies under", self.view), ("Page", self.page), ("Kept as", self.kept),
        )  # fmt: skip
        for at, (text, editor) in enumerate(rows):
            label = QLabel(text)
            label.setBuddy(editor)
            label.setToolTip(editor.toolTip())
            grid.addWidget(label, at, 0)
            if editor is self.opacity:
                grid.addLayout(strength, at, 1)
            else:
                grid.addWidget(editor, at, 1)
        grid.addWidget(self.locked, len(rows), 1)
        buttons = QHBoxLayout()
        buttons.setSpacing(2 * STEP)
        for button in (self.calibrate, self.replace_file, self.remove):
            buttons.addWidget(button)
        buttons.addStretch(1)
        box = column(self)
        box.addWidget(self.about)
        box.addWidget(self.fault)
        box.addLayout(grid)
        box.addLayout(buttons)

    def _on_changed(self, layout: Layout, ids: frozenset[str]) -> None:
        if self._id in ids or "*" in ids:
            self._fill()

    @property
    def _committed(self) -> BackingDrawing | None:
        return self._drawing(self._document.committed)

    def _drawing(self, layout: Layout) -> BackingDrawing | None:
        for drawing in layout.backing_drawings:
            if drawing.id == self._id:
                return drawing
        return None

    def _fill(self) -> None:
        drawing = self._drawing(self._document.layout)
        self.setEnabled(drawing is not None)
        if drawing is None:
            return
        widgets = (self.opacity, self.page, self.locked)
        for widget in widgets:
            widget.blockSignals(True)
        if not self.opacity.isSliderDown():
            self.opacity.setValue(round(100 * drawing.opacity))
        self.opacity_shown.setText(f"{round(100 * drawing.opacity)} %")
        self.turn.set_value(drawing.turn)
        self.view.set_value(drawing.view)
        self.locked.setChecked(drawing.locked)
        self.kept.set_value("linked" if drawing.linked_file else "embedded")
        self._fill_page(drawing)
        for widget in widgets:
            widget.blockSignals(False)
        self.calibrate.setEnabled(not drawing.locked)
        self.about.setText(self._about(drawing))
        self._tell_fault(self._damage(drawing))

    def _fill_page(self, drawing: BackingDrawing) -> None:
        # Counting pages reads the file: once for each file is enough.
        key = (drawing.sha256, self._document.path)
        if self._pages is None or self._pages[0] != key:
            self._pages = (key, backing.pages_of(self._document, drawing))
        pages = self._pages[1]
        self.page.setRange(1, max(pages or 1, drawing.page))
        self.page.setValue(drawing.page)
        self.page.setEnabled(pages is not None and pages > 1)
        self.page.setSuffix("" if pages is None else f" of {pages}")
        if pages is None:
            tip = "The file is not at hand: choose it again to show another page"
        else:
            tip = "Page of the file that is shown, from 1"
        self.page.setToolTip(tip)

    def _about(self, drawing: BackingDrawing) -> str:
        parts = [drawing.file_name or "Pasted picture"]
        size = picture_size(drawing)
        if size is not None:
            parts.append(f"{size[0]} × {size[1]} px")
            if is_calibrated(drawing):
                unit = self._document.layout.settings.length_unit
                scale = metres_per_pixel(drawing)
                across, down = (
                    length_text(round(scale * side, 2), unit) for side in size
                )
                parts.append(f"{across} × {down}")
        if not is_calibrated(drawing):
            parts.append("not calibrated")
        if drawing.linked_file:
            parts.append(f"linked to {drawing.linked_file}")
        return " · ".join(parts)

    def _damage(self, drawing: BackingDrawing) -> str:
        """What is wrong with the picture, as a sentence; empty for nothing."""
        if drawing.linked_file:
            return link_fault(drawing, backing.folder_of(self._document))
        if picture_size(drawing) is not None:
            return ""
        fault = "is damaged" if drawing.picture else "is missing"
        return f"The picture {fault}: choose its file again."

    def _tell_fault(self, sentence: str) -> None:
        self.fault.setText(sentence)
        self.fault.setVisible(bool(sentence))

    def _edit(self, text: str, after: BackingDrawing) -> None:
        self._document.edit(text, replaced(self._document.committed, checked(after)))

    def _on_opacity(self, percent: int) -> None:
        if not self.opacity.isSliderDown():
            self._set_opacity(percent)
            return
        drawing = self._committed
        if drawing is not None:
            shown = replace(drawing, opacity=percent / 100)
            self._document.preview(replaced(self._document.committed, shown))

    def _set_opacity(self, percent: int) -> None:
        drawing = self._committed
        if drawing is not None:
            text = f"Set the opacity of {drawing.title} to {percent} %"
            self._edit(text, replace(drawing, opacity=percent / 100))

    def _on_turn(self, degrees: float) -> None:
        drawing = self._committed
        if drawing is not None:
            after = turned(drawing, degrees)
            self._edit(f"Turn {drawing.title} to {_TURN.write(after.turn)}", after)

    def _on_view(self, view: str) -> None:
        drawing = self._committed
        if drawing is not None:
            text = f"Put {drawing.title} under {dict(_VIEWS)[view]}"
            self._edit(text, replace(drawing, view=view))

    def _on_kept(self, kind: str) -> None:
        document, item_id, drawing = self._document, self._id, self._committed
        if drawing is None:
            return
        path = backing.known_file(document, drawing)
        if kind == "embedded":
            try:
                backing.embed(document, item_id)
            except UserError as error:
                self._fill()
                self._tell_fault(str(error))
        elif not drawing.linked_file and path is None:
            self._fill()
            self._tell_fault(
                "The file that it came from is not at hand: choose it again, then "
                "link it."
            )
        elif path is not None:
            self._read(
                path, drawing.page,
                lambda found: backing.link(document, item_id, found, path),
            )  # fmt: skip

    def _on_locked(self, is_locked: bool) -> None:
        drawing = self._committed
        if drawing is not None:
            text = f"{'Lock' if is_locked else 'Unlock'} {drawing.title}"
            self._edit(text, replace(drawing, locked=is_locked))

    def _on_page(self, page: int) -> None:
        drawing = self._committed
        if drawing is None:
            return
        path = backing.known_file(self._document, drawing)
        if path is None:
            self._fill()
            self._tell_fault("The file is gone: choose it again to show another page.")
            return
        self._take(str(path), page)

    def _on_replace(self) -> None:
        name = backing.chosen_file(self, "Replace the file of a backing drawing")
        if name:
            self._take(name, 1)

    def _take(self, name: str, page: int) -> None:
        # The form may be gone by then: what is done needs none.
        document, item_id, path = self._document, self._id, Path(name)
        self._read(
            path, page,
            lambda found: backing.take_read_picture(document, item_id, found, path),
        )  # fmt: skip

    def _read(self, path: Path, page: int, done: Callable[[ReadPicture], None]) -> None:
        """Read a page of a file, in the background where there are jobs."""
        if self._jobs is None:
            try:
                done(read_picture(path, page))
            except UserError as error:
                self._fill()
                self._tell_fault(str(error))
            return

        def work(cancelled: Cancelled, progress: Progress) -> ReadPicture:
            return read_picture(path, page, cancelled=cancelled, progress=progress)

        self._jobs.start(f"Drawing page {page} of {path.name}", work, done)
        # Until it is read, what shows is as before.
        self._fill()

    def _on_remove(self) -> None:
        drawing = self._committed
        if drawing is not None:
            after = removed(self._document.committed, drawing.id)
            self._document.edit(f"Remove {drawing.title}", after)


def _button(text: str, tip: str) -> QPushButton:
    made = QPushButton(text)
    made.setToolTip(tip)
    made.setAutoDefault(False)
    return made
