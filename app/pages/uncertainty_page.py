"""The page of uncertainty: the budget of a place, and the tolerances behind it."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from PySide6.QtCore import Qt
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QSplitter, QVBoxLayout, QWidget

from app.asking_page import AskingPage, on_paper
from app.document import EVERYTHING, Document
from app.figures import write_figure
from app.messages import Messages
from app.pages.budget_chart import BudgetChart
from app.pages.profile_controls import choice
from app.pages.tolerance_form import tolerance_groups
from app.panels.form import Form
from app.panels.panel import Words, button, scrolled
from app.theme import STEP, scaled
from app.uncertainty_values import (
    Budgeted,
    BudgetMaker,
    BudgetRequest,
    budget_csv,
    head_text,
    left_out_text,
    matters_text,
    place_name,
    places_of,
    sampled_text,
    used_text,
)
from app.variant_acts import with_shown
from app.wrapping import WrappingRow
from engine.budget import Budget

#: Under this width the tolerances stand instead of the budget. [logical pixels]
NARROW = scaled(180 * STEP)

NO_PLACES = (
    "Draw a zone where people are, or place a receptor, to see what matters there"
)


class UncertaintyPage(AskingPage):
    """Follows document and selection while it shows; computes in a thread."""

    followed = frozenset({"variant"})

    def __init__(
        self, document: Document, _view_state: object, messages: Messages
    ) -> None:
        super().__init__(
            "Uncertainty", document, messages, computed="budgets",
            work=BudgetMaker().budgets, file_name="uncertainty.png",
        )  # fmt: skip
        self.answer: Budgeted | None = None
        self.place = ""
        self._held: Budgeted | None = None
        self._build()
        self._follow(document.changed, self._on_opened)
        self._follow(document.settled)
        self._follow(document.selection_changed, self._on_selection)
        self.setFocusProxy(self.places)

    @property
    def shown(self) -> Budget | None:
        return self.budget

    @property
    def budget(self) -> Budget | None:
        """The one that is shown."""
        if self.answer is None:
            return None
        found = self.answer.of(self.place)
        kind = self.kinds.currentText()
        return next((b for b in found if b.kind == kind), found[0] if found else None)

    def hold(self, on: bool) -> None:
        """Let the present budgets stand beside the coming ones."""
        self._held = self.answer if on else None
        self._paint()

    def show_place(self, place: str) -> None:
        """Show the budget of a zone or receptor by its id."""
        self.place = place
        self._fill_places()
        self._paint()

    # -- building -----------------------------------------------------------------

    def _build(self) -> None:
        controls = QWidget()
        row = WrappingRow(controls, 2 * STEP, 0)
        self.places = choice("Zone or receptor whose budget is shown", 60)
        self.places.activated.connect(
            lambda k: self.show_place(str(self.places.itemData(k)))
        )
        self.kinds = choice("AC: all frequencies above 0 Hz; DC: 0 Hz", 16)
        self.kinds.activated.connect(lambda _k: self._paint())
        self.kinds.hide()
        self.tolerances = button(
            "Tolerances", "Show or hide what the budgets are made of", self._arrange
        )
        self.tolerances.setCheckable(True)
        self.tolerances.setChecked(False)
        for widget in (
            self.places,
            self.kinds,
            self.tolerances,
            button("Copy as sentence", "Value, U and what matters most, in words",
                   self.copy_sentence),
            button("Export …", "As PNG, SVG or CSV, with its caption", self.export),
        ):  # fmt: skip
            row.addWidget(widget)
        self.put_beside_title(controls, self.state)
        self.head, self.matters = Words("", "plain"), Words("", "plain")
        self.sampled, self.used, self.left_out = Words(""), Words(""), Words("")
        self._told = (
            self.head, self.matters, self.sampled, self.used, self.left_out,
        )  # fmt: skip
        font = self.head.font()
        font.setBold(True)
        self.head.setFont(font)
        self.chart = BudgetChart()
        self.chart.chosen.connect(lambda item: self._document.select([item]))
        inner = QWidget()
        box = QVBoxLayout(inner)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(STEP)
        for part in self._told:
            box.addWidget(part)
        box.addWidget(self.chart)
        box.addStretch(1)
        # Together: in a low window no line of the words is squeezed.
        self._shown = scrolled(inner, "What the uncertainty is made of")
        self.form = Form(self._document)
        self.form.setContentsMargins(0, 0, STEP, 0)
        split = QSplitter(Qt.Orientation.Horizontal)
        split.setChildrenCollapsible(False)
        split.addWidget(self._shown)
        self._entered = scrolled(self.form)
        self._entered.setMinimumWidth(scaled(80 * STEP))
        split.addWidget(self._entered)
        split.setStretchFactor(0, 1)
        split.setSizes([160 * STEP, scaled(82 * STEP)])
        self.column.addWidget(split, 1)

    # -- events -------------------------------------------------------------------

    def resizeEvent(self, event: QResizeEvent) -> None:
        if (event.size().width() < NARROW) != (event.oldSize().width() < NARROW):
            self.tolerances.setChecked(event.size().width() >= NARROW)
        self._arrange()
        super().resizeEvent(event)

    def _arrange(self) -> None:
        """With little room, either the budget or the tolerances show."""
        on = self.tolerances.isChecked()
        self._entered.setVisible(on)
        self._shown.setVisible(not on or self.width() >= NARROW)

    def _on_opened(self, _layout: object, ids: object) -> None:
        if ids == EVERYTHING:
            self.answer, self._held, self.place = None, None, ""

    def _on_selection(self, ids: frozenset[str]) -> None:
        found = [p.id for p in places_of(self._document.layout) if p.id in ids]
        if len(found) == 1 and len(ids) == 1:
            self.place = found[0]
            if self.isVisible():
                self.show_place(found[0])

    # -- computing ----------------------------------------------------------------

    def _ask(self) -> None:
        layout = self._document.committed
        self.form.show_groups(tolerance_groups(layout))
        self._fill_places()
        if not places_of(layout):
            self._answers.forget()
            self.answer = None
            self._paint()
            self.head.setText(NO_PLACES)
            return
        if self._answers.ask(BudgetRequest(layout)):
            text = "out of date" if self.answer is not None else "being computed …"
            self.state.setText(text)

    def _fill_places(self) -> None:
        found = places_of(self._document.committed)
        if self.place not in [place.id for place in found]:
            self.place = found[0].id if found else ""
        self.places.clear()
        for place in found:
            self.places.addItem(place_name(place), place.id)
        self.places.setCurrentIndex(self.places.findData(self.place))

    def _show(self, request: Any, answer: object) -> None:
        if request.layout is not self._document.committed:
            return
        self.state.setText("")
        self.answer = answer if isinstance(answer, Budgeted) else None
        self._paint()
        if not isinstance(answer, Budgeted):
            self.head.setText(str(answer))

    def _was(self, budget: Budget) -> Budget | None:
        """The held budget of the same value."""
        held = () if self._held is None else self._held.of(budget.place)
        return next((b for b in held if b.kind == budget.kind), None)

    def _paint(self) -> None:
        budget = self.budget
        kinds = (
            [] if self.answer is None else [b.kind for b in self.answer.of(self.place)]
        )
        chosen = self.kinds.currentText()
        self.kinds.clear()
        self.kinds.addItems(kinds)
        if chosen in kinds:
            self.kinds.setCurrentText(chosen)
        self.kinds.setVisible(len(kinds) > 1)
        texts = [""] * len(self._told)
        layout = self._document.committed
        if self.answer is not None:
            layout = self.answer.request.layout
            place = layout.by_id().get(self.place)
            if budget is not None and place is not None:
                texts = [
                    head_text(budget, layout, self._was(budget)),
                    matters_text(budget, layout),
                    sampled_text(budget, layout), used_text(layout, place),
                    left_out_text(layout),
                ]  # fmt: skip
            elif place is not None:
                texts[0] = f"{place.title} has no value to make a budget for."
        for part, text in zip(self._told, texts, strict=True):
            part.setText(text)
            part.setVisible(bool(text))
        self.chart.show_budget(budget, layout)

    # -- handing on ---------------------------------------------------------------

    def sentence(self) -> str:
        """The budget in words; empty without one."""
        budget = self.budget
        if budget is None or self.answer is None:
            return ""
        layout = self.answer.request.layout
        head = with_shown(self._document, head_text(budget, layout))
        return f"{head}. {matters_text(budget, layout)} {sampled_text(budget, layout)}"

    def copy_sentence(self) -> None:
        """Put the budget on the clipboard, in words."""
        self._copy(self.sentence(), "sentence")

    def write(self, path: Path) -> None:
        """Write the chart: a picture, light as on paper, or all lines as numbers.

        Raises
        ------
        UserError
            When the file cannot be written.
        """
        budget = self.budget
        if budget is None or self.answer is None:
            raise ValueError("nothing is shown")
        table = budget_csv(budget, self.answer.request.layout)
        with on_paper(self.chart):
            write_figure(path, self.chart, self.sentence(), table)
