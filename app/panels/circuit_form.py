"""The values of one circuit as a form, each with where it comes from."""

from __future__ import annotations

from collections.abc import Callable

from msgspec.structs import replace
from PySide6.QtWidgets import QFormLayout, QHBoxLayout, QLabel, QWidget

from app.document import Document
from app.panels import circuit_cells as cells
from app.panels.field import Choice, ValueField
from app.panels.origin import OriginMark, assumed_fields
from app.panels.panel import Words, decimal_sign
from app.theme import STEP
from engine.circuits import BalancedCurrent, Circuit, Power, Unbalance
from engine.edits import checked
from engine.errors import UserError
from engine.origins import restated
from engine.shown_currents import current_text, net_current_text, power_factor_text
from engine.typed_numbers import number_text, typed_number

CURRENT_TIP = (
    "Current [A RMS] or power: 800 A 0.9 lag, 1.6 kA, 575@18 (° of lag), "
    "250 kVA 400 V, 246 / 238 / 251 A 0.9, L1 100∠0 / N 12∠-30"
)
NET_TIP = "Leaves the cable and returns by a declared path: 2 A, 2 A ∠ 30 or 5 % of N"
FREQUENCY_TIP = "Base frequency [Hz]; 0 Hz for DC"
VOLTAGE_TIP = (
    "Voltage [V]: between lines, line to neutral for one phase, between poles for DC"
)
NEUTRAL_TIP = (
    "computed: closes the sum of the lines; as entered: the demand's own N; none"
)
RELATION_TIP = (
    "Angle to the other circuits of the same base frequency; unknown: values are "
    "the worst over it"
)


class CircuitForm(QWidget):
    """Edits the circuit that it shows."""

    def __init__(
        self, document: Document, enter: Callable[[Circuit, str], None]
    ) -> None:
        """`enter` is called with the circuit as it would be, and what changed."""
        super().__init__()
        self._document, self._enter = document, enter
        self._circuit: Circuit | None = None
        self._marks: dict[str, OriginMark] = {}
        self._form = QFormLayout(self)
        self._form.setContentsMargins(0, 0, 0, 0)
        self._form.setSpacing(STEP)
        self._form.setFieldGrowthPolicy(
            QFormLayout.FieldGrowthPolicy.AllNonFixedFieldsGrow
        )
        self.name = self._field("Name", "name", cells.with_name, "Name of the circuit")
        self.current = self._field(
            "Current", "current", cells.with_current, CURRENT_TIP, "demand"
        )
        self.made = Words()
        self._form.addRow("", self.made)
        self.factor = self._field(
            "cos φ", "power factor", cells.with_power_factor,
            "Power factor, 0.9 lag or 0.95 lead, or @18 for degrees of lag",
        )  # fmt: skip
        self.negative = self._field(
            "Unbalance, neg.", "unbalance", _with_negative,
            "Negative-sequence current [% of the positive] and its angle: 5 ∠ 0",
        )  # fmt: skip
        self.zero = self._field(
            "Unbalance, zero", "unbalance", _with_zero,
            "Zero-sequence current [% of the positive] and its angle: 5 ∠ 0",
        )  # fmt: skip
        self.supply = self._choice(
            "Supply", "supply", cells.SUPPLIES, cells.with_supply,
            "Conductors that carry the load", "supply",
        )  # fmt: skip
        self.voltage = self._field(
            "Voltage", "voltage", cells.with_voltage, VOLTAGE_TIP, "voltage"
        )
        self.frequency = self._field(
            "Frequency", "frequency", cells.with_frequency, FREQUENCY_TIP,
            "base_frequency",
        )  # fmt: skip
        self.neutral = self._choice(
            "Neutral", "neutral", cells.NEUTRALS, cells.with_neutral, NEUTRAL_TIP,
            "neutral",
        )  # fmt: skip
        self.net = self._field(
            "Net current", "net current", cells.with_net_current, NET_TIP,
            "net_current",
        )  # fmt: skip
        for field in (self.net, self.voltage, self.current):
            field.line.setPlaceholderText("none entered")
        for field in (self.negative, self.zero):
            field.line.setPlaceholderText("none")
        self.relation = self._choice(
            "Phase relation", "phase relation", cells.RELATIONS, _with_relation,
            RELATION_TIP, "phase_relation",
        )  # fmt: skip

    def show_circuit(self, circuit: Circuit) -> None:
        """Show the values of a circuit."""
        another = self._circuit is None or self._circuit.id != circuit.id
        self._circuit = circuit
        sign = decimal_sign()
        volts, hertz = circuit.voltage, circuit.base_frequency
        demand = circuit.demand
        can_unbalance = isinstance(demand, BalancedCurrent | Power) and (
            circuit.supply.startswith("three")
        )
        unbalance = (
            demand.unbalance if isinstance(demand, BalancedCurrent | Power) else None
        ) or Unbalance()
        for field, text in (
            (self.name, circuit.name),
            (self.current, current_text(circuit, sign)),
            (self.factor, power_factor_text(circuit, sign)),
            (self.voltage, "" if volts is None else f"{number_text(volts, sign)} V"),
            (self.frequency, f"{number_text(hertz, sign)} Hz"),
            (self.net, net_current_text(circuit.net_current, sign)),
            (
                self.negative,
                _ratio_text(unbalance.negative_ratio, unbalance.negative_angle, sign),
            ),
            (self.zero, _ratio_text(unbalance.zero_ratio, unbalance.zero_angle, sign)),
        ):
            field.set_value(text, keep_typing=not another)
        self.supply.set_value(circuit.supply)
        self.neutral.set_value(circuit.neutral)
        self.relation.set_value(circuit.phase_relation)
        self._form.setRowVisible(self.negative, can_unbalance)
        self._form.setRowVisible(self.zero, can_unbalance)
        self._form.setRowVisible(self.factor, circuit.supply not in ("dc", "free"))
        self.made.setText(cells.made_text(circuit, sign))
        assumed = assumed_fields(circuit)
        for field_name, mark in self._marks.items():
            mark.show_value(circuit, field_name, field_name in assumed)

    def _field(
        self,
        title: str,
        what: str,
        change: Callable[[Circuit, str, str], Circuit],
        tip: str,
        origin: str = "",
    ) -> ValueField:
        def enter(text: str) -> None:
            assert self._circuit is not None
            self._enter(change(self._circuit, text, decimal_sign()), what)

        mark: QWidget | None = self._mark(origin)
        if mark is None:
            # As wide as a mark, so that all fields end in one line.
            mark = QWidget()
            mark.setFixedWidth(6 * STEP)
        made = ValueField(str.strip, str, enter, name=title, tip=tip, mark=mark)
        label = QLabel(title)
        label.setBuddy(made.line)
        self._form.addRow(label, made)
        return made

    def _choice(
        self,
        title: str,
        what: str,
        options: tuple[tuple[str, str], ...],
        change: Callable[[Circuit, str, str], Circuit],
        tip: str,
        origin: str,
    ) -> Choice:
        def enter(value: str) -> None:
            assert self._circuit is not None
            self._enter(change(self._circuit, value, decimal_sign()), what)

        made = Choice(options, enter, name=title, tip=tip)
        row = QHBoxLayout()
        row.setSpacing(STEP)
        row.addWidget(made, 1)
        mark = self._mark(origin)
        assert mark is not None
        row.addWidget(mark)
        label = QLabel(title)
        label.setBuddy(made)
        self._form.addRow(label, row)
        return made

    def _mark(self, field: str) -> OriginMark | None:
        if not field:
            return None
        self._marks[field] = OriginMark(self._document)
        return self._marks[field]


def _with_relation(circuit: Circuit, text: str, _decimal: str) -> Circuit:
    relation = cells.value_of(cells.RELATIONS, text, "phase relation")
    return checked(restated(circuit, phase_relation=relation))


def _with_negative(circuit: Circuit, text: str, decimal: str) -> Circuit:
    return _with_unbalance(circuit, "negative", text, decimal)


def _with_zero(circuit: Circuit, text: str, decimal: str) -> Circuit:
    return _with_unbalance(circuit, "zero", text, decimal)


def _with_unbalance(circuit: Circuit, kind: str, text: str, decimal: str) -> Circuit:
    demand = circuit.demand
    if not isinstance(demand, BalancedCurrent | Power):
        raise UserError("Type a current first; an unbalance is relative to it.")
    size, _, angle = text.replace("%", "").replace("<", "∠").partition("∠")
    size = "" if size.strip() == "none" else size
    ratio = typed_number(size, decimal) / 100 if size.strip() else 0.0
    if not 0 <= ratio <= 1:
        raise UserError(f"The {kind} sequence lies between 0 and 100 %.")
    degrees = typed_number(angle.replace("°", ""), decimal) if angle.strip() else 0.0
    changed = replace(
        demand.unbalance or Unbalance(),
        **{f"{kind}_ratio": ratio, f"{kind}_angle": degrees},
    )
    return checked(
        restated(
            circuit,
            demand=replace(
                demand, unbalance=None if changed == Unbalance() else changed
            ),
        )
    )


def _ratio_text(ratio: float, angle: float, decimal: str) -> str:
    if ratio == 0 and angle == 0:
        return ""
    turned = f" ∠ {number_text(angle, decimal)}°" if angle else ""
    return f"{number_text(100 * ratio, decimal)} %{turned}"
