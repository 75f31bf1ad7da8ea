"""What a profile is plotted over: which line, load cases, heights, and how."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QCheckBox, QComboBox, QLineEdit, QPushButton, QWidget

from app.document import Document
from app.elided_choice import ElidedChoice
from app.map_request import case_of, height_figures
from app.pages.check_menu import CheckMenu
from app.panels.panel import decimal_sign
from app.profile_values import Profiled, level_heights, profile_of
from app.profile_words import first_measured_from
from app.theme import STEP, scaled
from app.view_state import ViewState
from app.wrapping import WrappingRow
from engine.errors import UserError
from engine.levels import Kind
from engine.typed_lengths import typed_length


class ProfileControls(QWidget):
    """The choices of the profile page.

    Signals
    -------
    wanted()
        Something else is to be computed.
    restyled()
        The same is to be shown otherwise.
    refused(sentence)
    """

    wanted = Signal()
    restyled = Signal()
    refused = Signal(str)

    def __init__(self, document: Document, view_state: ViewState) -> None:
        super().__init__()
        self._document, self._view_state = document, view_state
        self._cases: tuple[str, ...] | None = None
        self.heights_now: tuple[float, ...] = ()
        self._measured_from: str | None = None
        self.profiles = choice("Profile that is plotted", 60)
        self.profiles.activated.connect(
            lambda k: self._document.select([self.profiles.itemData(k)])
        )
        self.cases = CheckMenu("Load cases", "Load cases plotted together")
        self.cases.changed.connect(self._on_cases)
        self.heights = CheckMenu(
            "Heights",
            "Heights above the datum, plotted together; none: as the line is drawn",
            fewest=0,
        )
        self.heights.changed.connect(self._on_heights)
        self.typed = QLineEdit()
        self.typed.setPlaceholderText("as drawn")
        self.typed.setAccessibleName("Heights, typed")
        self.typed.setToolTip("Heights above the datum, blanks between")
        self.typed.setMaximumWidth(scaled(26 * STEP))
        self.typed.editingFinished.connect(self._on_typed)
        self.kinds = choice("AC: all frequencies above 0 Hz; DC: 0 Hz", 16)
        self.kinds.activated.connect(lambda _k: self.restyled.emit())
        self.log = QCheckBox("Logarithmic")
        self.log.setChecked(True)
        self.log.setToolTip("Logarithmic or linear axis of the field")
        self.log.toggled.connect(lambda _on: self.restyled.emit())
        self.measured_from = choice(
            "What the distance r of the fall-off counts from", 66
        )
        self.measured_from.activated.connect(self._on_measured_from)
        self.export = QPushButton("Export …")
        self.export.setToolTip("As PNG, SVG or CSV, with its caption")
        row = WrappingRow(self, 2 * STEP, 0)
        for widget in (
            self.profiles, self.cases, self.heights, self.typed, self.kinds, self.log,
            self.export,
        ):  # fmt: skip
            row.addWidget(widget)

    @property
    def cases_now(self) -> tuple[str, ...]:
        """Load cases to plot: those chosen, else the one that the map shows."""
        layout = self._document.layout
        known = [case.id for case in layout.cases]
        first = case_of(layout, self._view_state.look.case).id
        return tuple(c for c in self._cases or () if c in known) or (first,)

    @property
    def measured_from_now(self) -> str:
        """What r counts from, an id."""
        return str(self.measured_from.currentData())

    def kind(self, kinds: tuple[Kind, ...]) -> Kind:
        """The chosen one of these, else the first."""
        return next((k for k in kinds if k == self.kinds.currentText()), kinds[0])

    def forget_cases(self) -> None:
        """Follow the map's load case again."""
        self._cases = None

    def choose(self, cases: tuple[str, ...], heights: tuple[float, ...]) -> None:
        """Plot over these. [m above the datum]"""
        self._cases, self.heights_now = cases or None, tuple(sorted(set(heights)))
        self.wanted.emit()

    # -- offering -----------------------------------------------------------------

    def offer(self, profile: str) -> None:
        """Fill the choices from the document."""
        layout = self._document.layout
        self.profiles.clear()
        for item in layout.profiles:
            self.profiles.addItem(item.title, item.id)
        self.profiles.setCurrentIndex(self.profiles.findData(profile))
        entries = [(case.id, case.title) for case in layout.cases]
        self.cases.set_entries(entries, self.cases_now)
        self.cases.setVisible(len(entries) > 1)
        plotted = profile_of(layout, profile)
        heights = set(self.heights_now)
        if plotted is not None:
            heights |= set(level_heights(layout, plotted))
        unit = self._unit
        self.heights.set_entries(
            [(z, f"z {height_figures(z, unit)} {unit}") for z in sorted(heights)],
            self.heights_now,
        )
        self._tell_heights()

    def offer_kinds(self, kinds: tuple[Kind, ...]) -> None:
        """Offer AC and DC where both flow."""
        chosen = self.kind(kinds)
        self.kinds.clear()
        self.kinds.addItems(list(kinds))
        self.kinds.setCurrentText(chosen)
        self.kinds.setVisible(len(kinds) > 1)

    def offer_measured_from(self, done: Profiled, kind: Kind) -> None:
        """Offer what r may count from; unless chosen, the first with a fall-off."""
        chosen = self._measured_from
        if chosen is None or chosen not in done.fall_offs:
            chosen = first_measured_from(done, kind)
        self.measured_from.clear()
        for name in done.fall_offs:
            self.measured_from.addItem(f"r from {done.names.get(name, name)}", name)
        self.measured_from.setCurrentIndex(self.measured_from.findData(chosen))

    # -- choosing -----------------------------------------------------------------

    def _on_cases(self) -> None:
        self._cases = tuple(str(case) for case in self.cases.checked)
        self.wanted.emit()

    def _on_heights(self) -> None:
        chosen = [z for z in self.heights.checked if isinstance(z, float)]
        self.heights_now = tuple(chosen)
        self.wanted.emit()

    def _on_typed(self) -> None:
        unit, sign = self._unit, decimal_sign()
        try:
            found = {typed_length(t, unit, sign) for t in self.typed.text().split()}
        except UserError as error:
            self.refused.emit(str(error))
            self._tell_heights()
            return
        if tuple(sorted(found)) != self.heights_now:
            self.heights_now = tuple(sorted(found))
            self.wanted.emit()

    def _on_measured_from(self, index: int) -> None:
        self._measured_from = self.measured_from.itemData(index)
        self.restyled.emit()

    def _tell_heights(self) -> None:
        figures = (height_figures(z, self._unit) for z in self.heights_now)
        self.typed.setText(" ".join(figures).replace(".", decimal_sign()))
        self.typed.setToolTip(
            f"Heights above the datum [{self._unit}], blanks between; empty: as the "
            "line is drawn"
        )

    @property
    def _unit(self) -> str:
        return self._document.layout.settings.length_unit


def choice(tip: str, steps: int) -> QComboBox:
    """A choice no wider than so many steps; its list is as wide as its texts."""
    box = ElidedChoice()
    box.setToolTip(tip)
    box.setAccessibleName(tip)
    box.setMaximumWidth(scaled(steps * STEP))
    box.setMinimumContentsLength(6)
    box.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToContents)
    return box
