"""Side panel Item: the form of what is selected, or of the layout as a whole."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QPushButton

from app.document import Document
from app.jobs import Jobs
from app.panels.backing import BackingForm
from app.panels.form import Form
from app.panels.item_forms import editable, groups, heading
from app.panels.panel import Panel, Words, column, scrolled
from app.theme import STEP
from engine.items import Item
from engine.places import BackingDrawing
from engine.runs import Run


class ItemPanel(Panel):
    """The values of the selected items.

    Signals
    -------
    section_requested(id)
        The section of that run is to be opened.
    calibrate_requested(id)
        That backing drawing is to be given its scale and place.
    """

    shows = (
        "title", "settings", "storeys", "rooms", "enclosures", "circuits", "equipment",
        "runs", "joints", "zones", "receptors", "levels", "profiles",
        "backing_drawings",
    )  # fmt: skip

    section_requested = Signal(str)
    calibrate_requested = Signal(str)

    def __init__(self, document: Document, jobs: Jobs | None = None) -> None:
        """Parameters
        ----------
        jobs : Jobs or None
            Reads files of backing drawings in the background; None: at once.
        """
        super().__init__(document)
        self._jobs = jobs
        self.setAccessibleName("Item")
        self._items: tuple[Item, ...] = ()
        self._title = Words(style="title")
        self._hint = Words()
        self._section = QPushButton("Open the section")
        self._section.setToolTip(
            "Shows the run cut across at true scale: formation, phases, sets, sizes"
        )
        self._section.clicked.connect(self._on_section)
        self.form = Form(document)
        self.form.setContentsMargins(0, 0, STEP, 0)
        box = column(self, 3 * STEP)
        for widget in (self._title, self._hint, self._section):
            box.addWidget(widget)
        self._picture: BackingForm | None = None
        self._picture_place = column()
        box.addLayout(self._picture_place)
        box.addWidget(scrolled(self.form), 1)

    @property
    def title(self) -> str:
        """What stands above the form."""
        return self._title.text()

    def refresh(self) -> None:
        layout = self._document.layout
        self._items = editable(layout, self._document.selection)
        self._title.setText(heading(self._items))
        self._hint.setVisible(not self._items)
        self._hint.setText("Nothing is selected: this is what holds for all of it.")
        runs = [item for item in self._items if isinstance(item, Run)]
        self._section.setVisible(len(runs) == 1 == len(self._items))
        self._show_picture()
        self.form.show_groups(groups(layout, self._items))

    def follow_selection(self, ids: frozenset[str]) -> None:
        if {item.id for item in self._items} != ids or not self._items:
            self._fill()

    def _show_picture(self) -> None:
        """The form of the one backing drawing that is selected, above its values."""
        pictures = [item.id for item in self._items if isinstance(item, BackingDrawing)]
        wanted = pictures[0] if len(pictures) == 1 == len(self._items) else ""
        shown = self._picture
        if (shown.item_id if shown is not None else "") == wanted:
            return
        if shown is not None:
            shown.hide()
            shown.deleteLater()
            self._picture = None
        if wanted:
            self._picture = BackingForm(self._document, wanted, jobs=self._jobs)
            self._picture.calibrate_requested.connect(self.calibrate_requested)
            self._picture_place.addWidget(self._picture)

    def _on_section(self) -> None:
        if len(self._items) == 1:
            self.section_requested.emit(self._items[0].id)
