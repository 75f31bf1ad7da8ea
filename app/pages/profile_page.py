"""The profile page: the field along a drawn line, plotted, told and listed."""

from __future__ import annotations

from pathlib import Path

import numpy as np
from PySide6.QtCore import QEvent, Qt, Signal
from PySide6.QtGui import QHideEvent, QShowEvent
from PySide6.QtWidgets import (
    QSplitter,
    QTabWidget,
    QWidget,
)

from app.asking_page import AskingPage, on_paper
from app.document import Document
from app.figures import write_figure
from app.messages import Messages
from app.pages.plain_table import PlainTable
from app.pages.profile_controls import ProfileControls
from app.pages.profile_plot import ProfilePlot
from app.panels.panel import Words, column, scrolled
from app.profile_values import (
    Profiled,
    ProfileRequest,
    profile_of,
    with_held,
)
from app.profile_words import (
    caption_text,
    crossing_texts,
    extremum_texts,
    fall_off_text,
    hand_near,
    hand_text,
    held_text,
    level_texts,
    marked_text,
    profile_csv,
    table_texts,
)
from app.theme import LIGHT, STEP, theme_for
from app.variant_acts import with_shown
from app.view_state import ViewState
from engine.layout import Layout
from engine.levels import Kind
from engine.profile_sampling import Line

NONE_DRAWN = (
    "No profile is drawn yet: take the Profile tool (8) and click where the line "
    "begins and ends."
)


class ProfilePage(AskingPage):
    """Follows document, selection and load case while it shows.

    Signals
    -------
    pointed(Point3 or None)
        The place of the layout that is marked on the plot. [m]
    """

    pointed = Signal(object)

    def __init__(
        self, document: Document, view_state: ViewState, messages: Messages
    ) -> None:
        super().__init__(
            "Profile", document, messages,
            computed="profile", work=with_held, file_name="profile.png",
        )  # fmt: skip
        self._view_state = view_state
        self.profile = ""
        self.done: Profiled | None = None
        self._held: Layout | None = None
        self._build()
        self._follow(document.changed)
        self._follow(document.selection_changed, self._on_selection)
        self._follow(view_state.changed, self._on_look)
        self.setFocusProxy(self.plot)

    # -- what is asked ------------------------------------------------------------

    def show_profile(self, id: str) -> None:
        """Show another profile."""
        if id != self.profile:
            self.profile = id
            self.plot.at = None
        self._soon.start()

    def hold(self, on: bool) -> None:
        """Let the curves of the layout as it is stand beside the coming ones."""
        self._held = self._document.committed if on else None
        self._on_changed()

    @property
    def shown(self) -> Profiled | None:
        return self.done

    # -- building -----------------------------------------------------------------

    def _build(self) -> None:
        self.controls = ProfileControls(self._document, self._view_state)
        self.controls.wanted.connect(lambda: self._soon.start())
        self.controls.restyled.connect(self._fill)
        self.controls.refused.connect(self._messages.warn)
        self.controls.export.clicked.connect(lambda _on=False: self.export())
        self.put_beside_title(self.controls, self.state)
        self.column.addWidget(self.reason)
        self.plot = ProfilePlot()
        self.plot.marked.connect(self._on_marked)
        self.plot.left.connect(lambda: self.pointed.emit(None))
        self.findings, self.table = Words("", "plain"), PlainTable("Profile, values")
        told = QWidget()
        box = column(told, STEP)
        box.addWidget(self.findings)
        box.addWidget(self.controls.measured_from)
        box.addStretch(1)
        self.tabs = QTabWidget()
        self.tabs.setAccessibleName("The profile in words and figures")
        self.tabs.setDocumentMode(True)
        self.tabs.addTab(scrolled(told, "Findings"), "Findings")
        self.tabs.addTab(self.table, "Table")
        self.tabs.setTabToolTip(0, "What the profile shows, in words")
        self.tabs.setTabToolTip(1, "The values along the line")
        self.body = QSplitter(Qt.Orientation.Horizontal)
        self.body.setChildrenCollapsible(False)
        self.body.addWidget(self.plot)
        self.body.addWidget(self.tabs)
        self.body.setSizes([640, 360])
        self.body.setStretchFactor(0, 2)
        self.body.setStretchFactor(1, 1)
        self.column.addWidget(self.body, 1)
        self.now = Words("")
        self.column.addWidget(self.now)
        self._parts = (self.body, self.now)

    # -- events -------------------------------------------------------------------

    def showEvent(self, event: QShowEvent) -> None:
        self._on_selection(self._document.selection)
        super().showEvent(event)

    def hideEvent(self, event: QHideEvent) -> None:
        self.pointed.emit(None)
        super().hideEvent(event)

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "now"):
            self._fill()

    def _on_look(self, *_: object) -> None:
        self.controls.forget_cases()
        self._on_changed()

    def _on_selection(self, ids: frozenset[str]) -> None:
        found = [p.id for p in self._document.layout.profiles if p.id in ids]
        if len(found) == 1 and self.isVisible():
            self.show_profile(found[0])

    # -- computing ----------------------------------------------------------------

    def _ask(self) -> None:
        layout = self._document.layout
        if profile_of(layout, self.profile) is None:
            self.profile = layout.profiles[0].id if layout.profiles else ""
        self.controls.offer(self.profile)
        item = profile_of(layout, self.profile)
        if item is None:
            self._answers.forget()
            self.done = None
            self._tell(NONE_DRAWN)
            return
        request = ProfileRequest(
            layout, self.profile, self.controls.cases_now,
            self.controls.heights_now, self._held,
        )  # fmt: skip
        self._put(request, "The field along the line is being computed …")

    def _show(self, request: object, answer: object) -> None:
        if request != self._answers.asked and self._document.is_previewing is False:
            return
        if not isinstance(answer, Profiled):
            self.done = None
            self._tell(str(answer))
            return
        self.done = answer
        self.state.setText("")
        self._tell("")
        self.controls.offer_kinds(answer.kinds)
        self._fill()

    # -- showing ------------------------------------------------------------------

    @property
    def kind(self) -> Kind:
        """AC or DC, as chosen where both flow."""
        return self.controls.kind(self.done.kinds if self.done else ("AC",))

    def _tell(self, sentence: str) -> None:
        super()._tell(sentence)
        if sentence:
            self.pointed.emit(None)

    def _fill(self) -> None:
        done = self.done
        if done is None:
            return
        kind = self.kind
        self.plot.log = self.controls.log.isChecked()
        self.plot.show_profile(done, kind, theme_for(self.palette()))
        self.controls.offer_measured_from(done, kind)
        self.findings.setText(self._findings(done, kind))
        self.table.show_rows(*table_texts(done))
        self._tell_marked()

    def _findings(self, done: Profiled, kind: Kind) -> str:
        levels = (*crossing_texts(done, kind), *level_texts(done, kind))
        parts = [
            *extremum_texts(done, kind),
            "\n".join(levels) or "No reference level counts along this line.",
            held_text(done, kind),
            fall_off_text(done, self.controls.measured_from_now, kind),
            self._hand(done, kind),
            *(f"No curve for {reason}" for reason in done.reasons),
        ]
        bounds = {c.bound_reason for c in done.found.curves if c.is_bound}
        parts += [f"Upper bounds, because {reason}." for reason in sorted(bounds)]
        return "\n\n".join(part for part in parts if part)

    def _hand(self, done: Profiled, kind: Kind) -> str:
        """The hand formula at the marked place, else where one holds best."""
        if kind != done.kinds[0]:
            return ""
        held = [place for place in done.hands if place.best is not None]
        if self.plot.at is not None:
            place = hand_near(done, self.plot.at)
        else:
            place = held[len(held) // 2] if held else None
        if place is not None:
            return f"Hand formula. {hand_text(done, place)}"
        if held or not done.hands:
            return ""
        return (
            "No hand formula holds along this line; point at the plot to see why there."
        )

    def _on_marked(self, at: float) -> None:
        if self.done is None:
            return
        self.pointed.emit(self._place(self.done, at))
        self._tell_marked()
        self.findings.setText(self._findings(self.done, self.kind))

    def _tell_marked(self) -> None:
        at = self.plot.at
        if self.done is None or at is None:
            self.now.setText(
                "Point at the plot to read values; the place shows on the plan."
            )
            return
        self.now.setText(marked_text(self.done, self.kind, at))

    def _place(self, done: Profiled, at: float) -> tuple[float, float, float]:
        flat = done.found.path.copy()
        height = done.found.curves[0].height
        if height is not None:
            flat[:, 2] = 0.0
        x, y, z = (float(v) for v in Line(flat).points(np.array([at]))[0])
        return (x, y, z if height is None else height)

    # -- exporting ----------------------------------------------------------------

    def write(self, path: Path) -> None:
        """Write the plot as PNG or SVG, light as on paper, or its table as CSV.

        Raises
        ------
        UserError
            When the file cannot be written.
        """
        done, kind = self.done, self.kind
        if done is None:
            raise ValueError("nothing is shown")
        caption = with_shown(self._document, caption_text(done, kind))
        at, self.plot.at = self.plot.at, None
        self.plot.show_profile(done, kind, LIGHT)
        try:
            told = self._findings(done, kind).replace("\n\n", "\n")
            with on_paper(self.plot):
                write_figure(
                    path, self.plot, f"{caption}\n{told}", profile_csv(done, caption)
                )
        finally:
            self.plot.at = at
            self._fill()
