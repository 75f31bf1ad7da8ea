"""The Section view: one run cut across, large, in the drawing's place.

Looking from the other end turns the view and changes no data. Beneath stands what is
left when the currents are added, in the load case shown.
"""

from __future__ import annotations

from PySide6.QtCore import QSignalBlocker, Qt, Signal
from PySide6.QtGui import QKeyEvent, QKeySequence, QResizeEvent, QShortcut
from PySide6.QtWidgets import (
    QCheckBox,
    QPushButton,
    QSplitter,
    QWidget,
)

from app.document import Document
from app.panels.form import Form
from app.panels.kinds import section_unit
from app.panels.net_current import NetCurrent
from app.panels.panel import ElidedLine, Panel, Words, column, scrolled
from app.panels.section_acts import Change, SectionActs
from app.panels.section_canvas import SectionCanvas, neat
from app.panels.section_forms import section_groups
from app.panels.slot_forms import with_new_section
from app.theme import BODY, STEP
from app.view_state import ViewState
from app.wrapping import WrappingRow, group_in_row
from engine.errors import UserError
from engine.layout import Layout
from engine.runs import Run, Section
from engine.section_edits import (
    with_slot_at,
)
from engine.section_words import direction_text, order_text
from engine.sections import slots

_EMPTY = "Select one run: it is cut across here at true scale."


class SectionPanel(Panel):
    """The section of the one selected run.

    Signals
    -------
    closed()
        The drawing is to come back.
    turned(run, from_end)
        Which run is cut, and from which end one looks.
    """

    shows = ("settings", "circuits", "runs", "joints", "equipment", "load_cases")

    #: See `app.page.Page`.
    followed = frozenset({"case", "variant"})
    closed = Signal()
    turned = Signal(str, bool)

    def __init__(self, document: Document, view_state: ViewState) -> None:
        super().__init__(document)
        self.setAccessibleName("Section")
        self._view_state = view_state
        self._run_id = ""
        self._base: Layout | None = None
        self._title = ElidedLine(style="title")
        self._direction = Words(style="plain")
        self.reason = Words(style="warning")
        self.canvas = SectionCanvas()
        self.canvas.chosen.connect(lambda _names: self._on_chosen())
        self.canvas.dragged.connect(self._on_dragged)
        self.canvas.dropped.connect(self._on_dropped)
        self.canvas.cancelled.connect(self._on_cancelled)
        self.canvas.nudged.connect(self._on_nudged)
        self.form = Form(document)
        self.form.setContentsMargins(0, 0, STEP, 0)
        self.net_current = NetCurrent()
        self.acts = SectionActs()
        self.acts.asked.connect(self._edit)
        self._is_shared = False
        self._build()
        view_state.changed.connect(lambda _look: self._on_look())

    @property
    def run(self) -> Run | None:
        """The run that is cut."""
        found = self._document.layout.by_id().get(self._run_id)
        return found if isinstance(found, Run) else None

    @property
    def looks_from_end(self) -> bool:
        return self._other_end.isChecked()

    def show_run(self, run_id: str) -> None:
        """Cut another run."""
        if run_id != self._run_id:
            self._run_id = run_id
            self.canvas.choose(frozenset())
            with QSignalBlocker(self._other_end):
                self._other_end.setChecked(False)
        self.refresh()
        self.canvas.fit()
        self.turned.emit(self._run_id, self.looks_from_end)

    def refresh(self) -> None:
        run = self.run
        self._measure_in(self._document.layout.settings.length_unit)
        for widget in (self._work, self._other_end, self._direction):
            widget.setVisible(run is not None)
        self._title.setText(f"Section of {run.title}" if run else "Section")
        self._tell("" if run else _EMPTY)
        if run is None:
            self.canvas.show_slots((), from_end=False)
            return
        try:
            held = slots(run.section)
        except UserError as error:
            held = ()
            self._tell(str(error))
        from_end = self.looks_from_end
        layout = self._document.layout
        words = direction_text(layout, run, from_end=from_end)
        order = order_text(run.section, from_end=from_end) if held else ""
        self._direction.setText(f"{words}, {order}" if order else words)
        self.canvas.show_slots(held, from_end=from_end)
        if not self.canvas.is_dragging:
            self._show_form()
        self._show_currents()

    def _measure_in(self, length_unit: str) -> None:
        self.canvas.set_unit(section_unit(length_unit))
        step = self.canvas.grid_text
        self._catch.setText(f"Catch on {step}")
        self._catch.setToolTip(
            f"Dragged conductors are caught every {step}; Alt lets go"
        )

    def follow_selection(self, ids: frozenset[str]) -> None:
        layout = self._document.layout
        runs = [run.id for run in layout.runs if run.id in ids]
        if len(runs) == 1 and runs[0] != self._run_id:
            self.show_run(runs[0])

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.closed.emit()
            return
        super().keyPressEvent(event)

    def _build(self) -> None:
        self._other_end = QPushButton("Look from the other end")
        self._other_end.setCheckable(True)
        self._other_end.setToolTip("Turns the view about; the conductors stay")
        self._other_end.toggled.connect(self._on_turned)
        close = QPushButton("Back to the drawing")
        close.setToolTip("Closes the section (Esc)")
        close.clicked.connect(self.closed)
        catch = self._catch = QCheckBox()
        catch.setChecked(True)
        catch.toggled.connect(lambda on: setattr(self.canvas, "catches", on))
        head = QWidget()
        line = WrappingRow(head, gap=4 * STEP, margin=0)
        line.addWidget(self._title)
        group, controls = group_in_row()
        for widget in (catch, self._other_end, close):
            controls.addWidget(widget)
        line.addWidget(group)
        left = QWidget()
        picture = column(left)
        picture.addWidget(self.canvas, 1)
        picture.addWidget(self.net_current)
        right = QWidget()
        side = column(right)
        side.addWidget(self.acts)
        side.addWidget(scrolled(self.form), 1)
        self._work = QSplitter()
        self._work.addWidget(left)
        self._work.addWidget(right)
        self._work.setStretchFactor(0, 1)
        self._work.setChildrenCollapsible(False)
        self._work.splitterMoved.connect(self._on_shared)
        box = column(self, 3 * STEP)
        box.addWidget(head)
        box.addWidget(self._direction)
        box.addWidget(self.reason)
        box.addWidget(self._work, 1)
        QShortcut(
            QKeySequence(QKeySequence.StandardKey.Delete),
            self.canvas,
            self.acts.buttons["remove"].click,
            context=Qt.ShortcutContext.WidgetShortcut,
        )

    def resizeEvent(self, event: QResizeEvent) -> None:
        # Until someone shares the width out otherwise, the picture has most of it.
        if not self._is_shared:
            side = max(self.acts.minimumSizeHint().width(), round(0.38 * self.width()))
            side = min(side, 28 * BODY)
            self._work.setSizes([max(1, self.width() - side), side])
        super().resizeEvent(event)

    def _on_shared(self, _at: int, _index: int) -> None:
        self._is_shared = True

    def _show_form(self) -> None:
        run = self.run
        if run is None:
            return
        names = self.canvas.names
        circuits = tuple(c.id for c in self._document.layout.circuits)
        self.acts.show_section(run.section, names, circuits)
        try:
            self.form.show_groups(section_groups(run, names))
        except UserError as error:
            self._tell(str(error))

    def _show_currents(self) -> None:
        run = self.run
        if run is not None:
            layout = self._document.layout
            cases = {case.id: case for case in layout.cases}
            case = cases.get(self._view_state.look.case, layout.cases[0])
            self.net_current.show_section(layout, case, run.section)

    def _edit(self, words: str, change: Change) -> None:
        """One undo step, or a reason why not."""
        run = self.run
        if run is None:
            return
        try:
            made = change(run.section)
            section, names = made if isinstance(made, tuple) else (made, {})
            layout = with_new_section(self._document.committed, run, section, names)
        except UserError as error:
            self._tell(str(error))
            return
        is_same = section == run.section
        self._tell("Nothing changes: the section looks the same." if is_same else "")
        self._document.edit(f"{words} {run.title}", layout)

    def _on_chosen(self) -> None:
        if self.run is not None and not self.canvas.is_dragging:
            self._show_form()

    def _on_dragged(self, places: dict[str, tuple[float, float]]) -> None:
        if self._base is None:
            self._base = self._document.committed
        moved = self._moved(self._base, places)
        if moved is not None:
            self._document.preview(moved)

    def _on_dropped(self) -> None:
        shown, self._base = self._document.layout, None
        run = self.run
        names = ", ".join(sorted(self.canvas.names))
        if run is not None and self._document.is_previewing:
            self._document.edit(f"Move {names} in the section of {run.title}", shown)
        self.refresh()

    def _on_cancelled(self) -> None:
        self._base = None
        self._document.revert()
        self.refresh()

    def _on_nudged(self, du: float, dv: float) -> None:
        run = self.run
        if run is None:
            return
        places = {
            s.name: (neat(s.u + du), neat(s.v + dv))
            for s in slots(run.section)
            if s.name in self.canvas.names
        }
        moved = self._moved(self._document.committed, places)
        if moved is not None:
            names = ", ".join(sorted(places))
            self._document.edit(f"Move {names} in the section of {run.title}", moved)

    def _moved(
        self, base: Layout, places: dict[str, tuple[float, float]]
    ) -> Layout | None:
        run = base.by_id().get(self._run_id)
        if not isinstance(run, Run):
            return None
        section: Section = run.section
        for name, (u, v) in places.items():
            section = with_slot_at(section, name, u, v)
        try:
            return with_new_section(base, run, section)
        except UserError as error:
            self._tell(str(error))
            return None

    def _on_turned(self, _on: bool) -> None:
        self.refresh()
        self.turned.emit(self._run_id, self.looks_from_end)

    def _on_look(self) -> None:
        if self.isVisible() and self.run is not None:
            self._show_currents()

    def _tell(self, sentence: str) -> None:
        self.reason.setText(sentence)
        self.reason.setVisible(bool(sentence))
