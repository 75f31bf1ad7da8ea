"""A load case circuit by circuit: rows, and the case that rows make. No Qt."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from msgspec import structs

from engine.circuits import (
    Circuit,
    CircuitFactor,
    LoadCase,
    MeasuredCurrents,
    OwnCurrents,
)
from engine.edits import checked
from engine.errors import UserError
from engine.layout import Layout
from engine.origins import restated
from engine.shown_currents import current_text, net_current_text, typed_net_current
from engine.typed_currents import typed_current
from engine.typed_numbers import number_text, typed_quantity


@dataclass(frozen=True)
class CaseRow:
    """One circuit in a load case.

    Attributes
    ----------
    circuit : Circuit
        As it stands in the layout.
    factor : float or None
        None: not stated.
    own : OwnCurrents or None
        Its own currents in the case.
    others : str
        What the case says of circuits that it does not name.
    """

    circuit: Circuit
    factor: float | None
    own: OwnCurrents | None
    others: str

    @property
    def stated(self) -> Circuit:
        """The circuit with its own currents in place of what it says itself."""
        own = self.own
        if own is None:
            return self.circuit
        kept = {
            name: value
            for name in ("demand", "spectrum", "neutral", "net_current")
            if (value := getattr(own, name)) is not None
        }
        return structs.replace(self.circuit, **kept)


def case_rows(layout: Layout, case: LoadCase) -> tuple[CaseRow, ...]:
    """A row for each circuit of the layout."""
    factors = {entry.circuit: entry.factor for entry in case.factors}
    own = {entry.circuit: entry for entry in case.own}
    return tuple(
        CaseRow(c, factors.get(c.id), own.get(c.id), case.others)
        for c in layout.circuits
    )


def case_of(case: LoadCase, rows: Sequence[CaseRow]) -> LoadCase:
    """The load case that says what the rows say; circuits without a row are kept."""
    shown = {row.circuit.id for row in rows}
    factors = [f for f in case.factors if f.circuit not in shown]
    own = [o for o in case.own if o.circuit not in shown]
    for row in rows:
        if row.factor is not None:
            factors.append(CircuitFactor(circuit=row.circuit.id, factor=row.factor))
        if row.own is not None:
            own.append(row.own)
    return checked(restated(case, factors=tuple(factors), own=tuple(own)))


def factor_text(row: CaseRow, decimal: str = ".") -> str:
    """The factor as typed, or what holds without one."""
    if row.factor is not None:
        return number_text(row.factor, decimal)
    if row.own is not None or row.others == "as entered":
        return "(1)"
    return "(0)"


def with_factor(row: CaseRow, text: str, decimal: str) -> CaseRow:
    """The row with a factor: 0.8 or 80 %; empty: none stated.

    Raises
    ------
    UserError
        When it is no factor from 0 to 1000.
    """
    text = text.strip()
    if not text or text.startswith("("):
        return replace(row, factor=None)
    factor = typed_quantity(text, {"": 1.0, "%": 0.01}, "", decimal)
    if not 0 <= factor <= 1000:
        raise UserError("A factor lies between 0 and 1000; 0 switches the circuit off.")
    return replace(row, factor=factor)


def own_current_text(row: CaseRow, decimal: str = ".") -> str:
    """The circuit's own demand in the case; empty where the circuit's holds."""
    if row.own is None or row.own.demand is None:
        return ""
    return current_text(row.stated, decimal)


def with_own_current(row: CaseRow, text: str, decimal: str) -> CaseRow:
    """The row with a demand of its own; empty: what the circuit says.

    Raises
    ------
    UserError
        When nothing can be made of the text, or it states another voltage.
    """
    if not text.strip():
        return with_own(row, demand=None)
    typed = typed_current(text, row.stated, decimal)
    if typed.voltage is not None and typed.voltage != row.circuit.voltage:
        raise UserError(
            "The voltage belongs to the circuit and not to a load case; enter it in "
            "Circuits first."
        )
    return with_own(row, demand=typed.demand)


def own_net_text(row: CaseRow, decimal: str = ".") -> str:
    """The circuit's own net current in the case; empty where the circuit's holds."""
    return "" if row.own is None else net_current_text(row.own.net_current, decimal)


def with_own_net(row: CaseRow, text: str, decimal: str) -> CaseRow:
    """The row with a net current of its own.

    Raises
    ------
    UserError
        When it is no net current.
    """
    return with_own(row, net_current=typed_net_current(text, decimal))


def with_own(row: CaseRow, **values: object) -> CaseRow:
    """The row with other own currents; without any it has none.

    Raises
    ------
    UserError
        When a value is out of range.
    """
    before = row.own or OwnCurrents(circuit=row.circuit.id)
    after = structs.replace(before, **values)
    if after == OwnCurrents(circuit=row.circuit.id):
        return replace(row, own=None)
    checked(LoadCase(id="row", own=(after,)))
    return replace(row, own=after)


def measured(row: CaseRow) -> MeasuredCurrents:
    """The circuit's clamp survey in the case, or an empty one."""
    demand = row.own.demand if row.own is not None else None
    return (
        demand if isinstance(demand, MeasuredCurrents) else MeasuredCurrents(lines=())
    )
