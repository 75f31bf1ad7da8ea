"""Columns of the tables of load cases: what their cells show and take."""

from __future__ import annotations

from collections.abc import Callable

from msgspec.structs import replace

from app.panels import case_rows as rows_of
from app.panels import circuit_cells as cells
from app.panels.case_rows import CaseRow
from app.panels.panel import decimal_sign
from app.panels.table import Column
from engine.circuits import LoadCase


def _with_case_name(case: LoadCase, text: str, _decimal: str) -> LoadCase:
    return replace(case, name=text.strip())


def _with_basis(case: LoadCase, text: str, _decimal: str) -> LoadCase:
    return replace(case, basis=text.strip())


def _with_counting(case: LoadCase, text: str, _decimal: str) -> LoadCase:
    choice = cells.value_of(
        (("counted", "counted"), ("information", "for information")), text, "counting"
    )
    return replace(case, counted=choice == "counted")


def case_columns() -> tuple[Column, ...]:
    """Columns of the list of load cases."""
    return (
        Column(
            "Name", lambda c: c.name or c.id, _with_case_name,
            tip="Name of the load case", width=36,
        ),
        Column(
            "Counts", lambda c: "counted" if c.counted else "for information",
            _with_counting, ("counted", "for information"),
            tip="Counted in the margins, or for information", width=27,
        ),
        Column(
            "Basis", lambda c: c.basis, _with_basis,
            tip="What the case stands for", width=24,
        ),
    )  # fmt: skip


def row_columns(live: Callable[[CaseRow], cells.Live]) -> tuple[Column, ...]:
    """Columns of the circuits in a load case; `live` gives what each carries."""

    def made(row: CaseRow) -> str:
        return cells.made_text(row.stated, decimal_sign())

    return (
        Column("Circuit", lambda r: r.circuit.title, tip="Circuit", width=22),
        Column(
            "Factor", lambda r: rows_of.factor_text(r, decimal_sign()),
            rows_of.with_factor,
            tip="Factor of all its currents: 0.8 or 80 %; 0 is off", width=14,
        ),
        Column(
            "Own current", lambda r: rows_of.own_current_text(r, decimal_sign()),
            rows_of.with_own_current,
            tip="Current [A] or power in this case; empty: as the circuit says",
            made=made, width=24,
        ),
        Column(
            "N", lambda r: cells.amperes_text(live(r).neutral, decimal_sign()),
            tip="Neutral as it comes out [A RMS, all frequencies]",
            made=lambda r: live(r).fault, width=14,
        ),
        Column(
            "Net", lambda r: cells.amperes_text(live(r).net, decimal_sign()),
            tip="Net current as it comes out [A RMS]",
            made=lambda r: live(r).fault, width=14,
        ),
        Column(
            "Own net", lambda r: rows_of.own_net_text(r, decimal_sign()),
            rows_of.with_own_net,
            tip="Net current in this case: 2 A, or 5 % of N; empty: as the circuit",
            width=20,
        ),
    )  # fmt: skip
