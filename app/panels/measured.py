"""Currents of a circuit as clamped in a load case: N of the lines beside N measured.

Nothing is made to agree. Every entry is one undo step.
"""

from __future__ import annotations

from collections.abc import Callable

from msgspec.structs import replace
from PySide6.QtWidgets import QFormLayout, QGridLayout, QLabel, QWidget

from app.panels import circuit_cells as cells
from app.panels.case_rows import CaseRow, measured, with_own
from app.panels.field import Quantity, ValueField
from app.panels.panel import Words, column, decimal_sign
from app.theme import STEP
from engine.circuits import LINES, RETURNS, LoadCase, MeasuredCurrents, MeasuredLine
from engine.currents import neutral_comparison
from engine.errors import UserError
from engine.shown_currents import power_factor_text
from engine.typed_currents import typed_power_factor

_NET_STANDS_BESIDE = (
    "The clamped net current does not flow in it either: what flows is the net current "
    "entered for the circuit."
)

_AMPERES = {"A": 1.0, "kA": 1e3, "mA": 1e-3}


def _clamped(name: str) -> Quantity:
    return Quantity(name, "A", _AMPERES, low=0, high=1e9, optional=True)


class MeasuredForm(QWidget):
    """Edits the clamp survey of one circuit in one load case."""

    def __init__(self, enter: Callable[[CaseRow, str], None]) -> None:
        """`enter` is called with the row as it would be, and what changed."""
        super().__init__()
        self._enter = enter
        self._row: CaseRow | None = None
        self.intro = Words()
        self._form = QFormLayout()
        self._form.setSpacing(STEP)
        self.lines: dict[str, ValueField] = {}
        for label in ("L1", "L2", "L3", "L+"):
            self.lines[label] = self._amperes(label, label)
        self.neutral = self._amperes("N", "neutral")
        self.net = self._amperes("Net current", "net")
        self.factor = ValueField(
            str.strip, str, self._on_factor, name="cos φ as measured",
            tip="Power factor of the lines if known, 0.9 lag; empty: not known",
            hint="not known",
        )  # fmt: skip
        self._form.addRow("cos φ", self.factor)
        self.date = ValueField.words(
            lambda text: self._set("date", text, "date of the measurement"),
            name="Date", tip="Date of the measurement", hint="not stated",
        )  # fmt: skip
        self._form.addRow("Date", self.date)
        self.instrument = ValueField.words(
            lambda text: self._set("instrument", text, "instrument"),
            name="Instrument", tip="Instrument and its serial number",
            hint="not stated",
        )  # fmt: skip
        self._form.addRow("Instrument", self.instrument)
        self._compared = QWidget()
        grid = QGridLayout(self._compared)
        grid.setContentsMargins(0, STEP, 0, 0)
        self.computed_value, self.measured_value = QLabel(), QLabel()
        self.net_value = QLabel()
        for place, (words, value) in enumerate(
            (
                ("N from the lines", self.computed_value),
                ("N measured", self.measured_value),
                ("Net clamped", self.net_value),
            )
        ):
            grid.addWidget(Words(words), 0, place)
            grid.addWidget(value, 1, place)
        self.note = Words()
        box = column(self)
        box.addWidget(self.intro)
        box.addLayout(self._form)
        box.addWidget(self._compared)
        box.addWidget(self.note)
        box.addStretch(1)

    def show_row(self, row: CaseRow, case: LoadCase) -> None:
        """Show the survey of a circuit in a case."""
        self._row = row
        survey = measured(row)
        circuit = row.circuit
        labels = LINES[circuit.supply]
        back = RETURNS.get(circuit.supply)
        self.intro.setText(
            f"Clamped in {circuit.title}: magnitudes only, so the sequence of the "
            "lines is assumed."
            if labels
            else f"{circuit.title} has free conductors; type their clamped currents as "
            "its own current: measured a 12 / b 3."
        )
        found = {line.label: line.rms for line in survey.lines}
        for label, field in self.lines.items():
            self._form.setRowVisible(field, label in labels)
            field.set_value(found.get(label))
        self._form.setRowVisible(
            self.neutral, back is not None or survey.neutral is not None
        )
        self.neutral.set_value(survey.neutral)
        self.net.set_value(survey.net)
        shown = replace(circuit, demand=survey)
        self.factor.set_value(power_factor_text(shown, decimal_sign()))
        self._form.setRowVisible(self.factor, circuit.supply not in ("dc", "free"))
        self.date.set_value(survey.date)
        self.instrument.set_value(survey.instrument)
        self._compare(row, case, survey)

    def _compare(self, row: CaseRow, case: LoadCase, survey: MeasuredCurrents) -> None:
        has = bool(survey.lines)
        self._compared.setVisible(has)
        self.note.setVisible(has)
        if not has:
            return
        sign = decimal_sign()
        try:
            found = neutral_comparison(row.circuit, case)
        except UserError as error:
            for label in (self.computed_value, self.measured_value, self.net_value):
                label.setText("–")
            self.note.setText(str(error))
            return
        self.computed_value.setText(cells.amperes_text(found.computed, sign))
        self.measured_value.setText(cells.amperes_text(found.measured, sign))
        self.net_value.setText(cells.amperes_text(found.net, sign))
        used = (
            "the measured N" if row.stated.neutral == "entered" else "N from the lines"
        )
        self.note.setText(
            f"Both stand as they are, and nothing is reconciled. The field is computed "
            f"with {used}, over all frequencies."
            + ("" if found.net is None else f" {_NET_STANDS_BESIDE}")
        )

    def _amperes(self, title: str, part: str) -> ValueField:
        what = f"measured {part}"

        def enter(value: float | None) -> None:
            if part in ("neutral", "net"):
                self._set(part, value, what)
                return
            assert self._row is not None
            survey = measured(self._row)
            found = {line.label: line.rms for line in survey.lines}
            if value is None:
                found.pop(part, None)
            else:
                found[part] = value
            order = LINES[self._row.circuit.supply]
            lines = sorted(
                found, key=lambda x: order.index(x) if x in order else len(order)
            )
            made = tuple(MeasuredLine(label=x, rms=found[x]) for x in lines)
            self._enter_survey(replace(survey, lines=made), what)

        field = ValueField.of(
            _clamped(f"The current of {title}"), enter,
            name=f"{title} as measured", tip=f"{title} as clamped [A RMS]",
            hint="not measured",
        )  # fmt: skip
        self._form.addRow(title, field)
        return field

    def _set(self, name: str, value: object, what: str) -> None:
        assert self._row is not None
        self._enter_survey(replace(measured(self._row), **{name: value}), what)

    def _on_factor(self, text: str) -> None:
        assert self._row is not None
        shown = replace(self._row.circuit, demand=measured(self._row))
        demand = typed_power_factor(text, shown, decimal_sign())
        assert isinstance(demand, MeasuredCurrents)
        self._enter_survey(demand, "measured power factor")

    def _enter_survey(self, survey: MeasuredCurrents, what: str) -> None:
        assert self._row is not None
        empty = survey == MeasuredCurrents(lines=())
        row = with_own(self._row, demand=None if empty else survey)
        self._enter(row, what)
