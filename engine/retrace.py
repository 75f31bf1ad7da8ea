"""Retrace a value: every conductor's current, distance and share, summing to it."""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine import field
from engine.case_fields import CaseCurrents, CaseFields
from engine.items import Point3
from engine.levels import Kind, is_kind
from engine.printed_text import one_line
from engine.section_currents import phasor_text
from engine.units import FLUX_DENSITY_UNITS, LENGTH_UNITS, significant

Complexes = NDArray[np.complex128]

#: The shares sum to the value but for rounding.
_ROUNDING = 1e-9


@dataclass(frozen=True)
class RetraceRow:
    """One conductor at one frequency.

    Attributes
    ----------
    conductor, item, role : str
        Its key, the item that made it, and what it stands for ("closing link": it is
        assumed).
    frequency : float
        [Hz]
    adds_with : str
        Id of the circuit whose angle to the others is unknown; empty otherwise.
    current : complex
        RMS phasor along its path. [A]
    distance : float
        From the place to its surface. [m]
    field : three complex
        RMS phasors of x, y and z; their sums over the rows of a component are the
        field's. [T]
    shares : three float
        Of x, y and z: Re(b · conj(B)) / |B|; over all rows and axes they sum to |B|.
        [T]
    """

    conductor: str
    item: str
    role: str
    frequency: float
    adds_with: str
    current: complex
    distance: float
    field: tuple[complex, complex, complex]
    shares: tuple[float, float, float]

    @property
    def share(self) -> float:
        """Over the axes; negative where it cancels. [T]"""
        return sum(self.shares)


@dataclass(frozen=True)
class Retrace:
    """A value taken apart.

    Attributes
    ----------
    total : float
        RMS resultant of the phasors as they stand, the sum of all shares. [T]
    shown : float
        The value shown: larger where angles are unknown, as `bound_reason` says. [T]
    rows : tuple of RetraceRow
        By frequency, largest share first; conductors without current are left out.
    """

    at: Point3
    case: str
    kind: Kind
    total: float
    shown: float
    is_bound: bool
    bound_reason: str
    near_field: bool
    rows: tuple[RetraceRow, ...]


def retrace(
    fields: CaseFields, case: CaseCurrents, at: Point3, kind: Kind = "AC"
) -> Retrace:
    """Take the value at a place apart into its conductors.

    Parameters
    ----------
    fields, case
        Of the layout.
    at
        Not inside a conductor. [m]
    kind
        AC: all frequencies above 0 Hz; DC: 0 Hz only.
    """
    rows = [k for k, c in enumerate(case.components) if is_kind(c.frequency, kind)]
    components = [case.components[k] for k in rows]
    currents = case.currents[rows]
    seen = fields.at(at)
    # (c, m, 3)
    parts = currents[:, :, None] * seen.responses
    whole = currents @ seen.responses
    total = float(np.linalg.norm(whole))
    shares = np.real(parts * whole.conj()[:, None, :])
    if total > 0:
        shares = shares / total
    made: list[RetraceRow] = []
    flowing = np.flatnonzero(np.any(currents != 0, axis=0))
    place = np.array([at], np.float64)
    apart = {
        int(k): float(field.surface_distance([fields.conductors[k]], place)[0])
        for k in flowing
    }
    for j, component in enumerate(components):
        own = [int(k) for k in flowing if currents[j, k] != 0]
        for k in sorted(own, key=lambda k: -abs(float(shares[j, k].sum()))):
            conductor = fields.conductors[k]
            x, y, z = (complex(v) for v in parts[j, k])
            sx, sy, sz = (float(v) for v in shares[j, k])
            made.append(
                RetraceRow(conductor.key, conductor.item, conductor.role,
                           component.frequency, component.circuit,
                           complex(currents[j, k]), apart[k], (x, y, z), (sx, sy, sz))
            )  # fmt: skip
    # Terms that cancel are each rounded on their own scale.
    scale = sum(abs(row.share) for row in made)
    remains = abs(sum(row.share for row in made) - total)
    assert remains <= _ROUNDING * max(total, scale), "shares must sum to the value"
    value = field.combined(whole[:, None, :], components)
    shown = value.total_ac if kind == "AC" else value.dc
    return Retrace(
        at=at,
        case=case.case.id,
        kind=kind,
        total=total,
        shown=0.0 if shown is None else float(shown[0]),
        is_bound=value.is_bound,
        bound_reason=value.reason,
        near_field=seen.near,
        rows=tuple(made),
    )


_CSV_HEADS = (
    "conductor",
    "role",
    "frequency [Hz]",
    "angle known to others",
    "current [A]",
    "angle [°]",
)


def csv_text(found: Retrace, *, unit: str = "µT", length_unit: str = "m") -> str:
    """The rows as CSV with units in the heads; the last row is the sum."""
    tesla, metres = FLUX_DENSITY_UNITS[unit], LENGTH_UNITS[length_unit]
    file = io.StringIO()
    writer = csv.writer(file, lineterminator="\n")
    shares = [f"share {axis} [{unit}]" for axis in "xyz"]
    writer.writerow([*_CSV_HEADS, f"distance [{length_unit}]", *shares,
                     f"share [{unit}]"])  # fmt: skip
    for row in found.rows:
        writer.writerow(
            [
                one_line(row.conductor),
                row.role,
                f"{row.frequency:.12g}",
                "no" if row.adds_with else "yes",
                f"{abs(row.current):.9g}",
                "" if row.frequency == 0 else f"{_degrees(row.current):.6g}",
                f"{row.distance / metres:.9g}",
                *(f"{share / tesla + 0.0:.9g}" for share in row.shares),
                f"{row.share / tesla + 0.0:.9g}",
            ]
        )
    sums = [f"{sum(row.shares[k] for row in found.rows) / tesla:.9g}" for k in range(3)]
    writer.writerow(
        ["sum", "", "", "", "", "", "", *sums, f"{found.total / tesla:.9g}"]
    )
    return file.getvalue()


def _degrees(value: complex) -> float:
    return float(np.degrees(np.angle(value)))


def text_table(found: Retrace, *, unit: str = "µT", length_unit: str = "m") -> str:
    """The rows as a table of plain text to copy; the last lines say the sum."""
    tesla, metres = FLUX_DENSITY_UNITS[unit], LENGTH_UNITS[length_unit]
    heads = ("conductor", "Hz", "current", length_unit, "x", "y", "z", f"share {unit}")
    table: list[tuple[str, ...]] = [heads]
    for row in found.rows:
        current = phasor_text(row.current)
        if row.frequency == 0:
            current = f"{significant(row.current.real)} A"
        table.append(
            (
                one_line(row.conductor),
                f"{row.frequency:.6g}",
                current,
                significant(row.distance / metres),
                *(_signed(share / tesla) for share in row.shares),
                _signed(row.share / tesla),
            )
        )
    sums = (sum(row.shares[k] for row in found.rows) / tesla for k in range(3))
    table.append(("sum", "", "", "", *map(_signed, sums), _signed(found.total / tesla)))
    widths = [max(len(line[k]) for line in table) for k in range(len(heads))]
    lines = [
        "  ".join(
            cell.ljust(width) if k == 0 else cell.rjust(width)
            for k, (cell, width) in enumerate(zip(line, widths, strict=True))
        ).rstrip()
        for line in table
    ]
    if found.is_bound:
        shown = significant(found.shown / tesla)
        lines.append(
            f"The value shown is {shown} {unit}: {found.bound_reason}. "
            "The shares are those of the angles as entered."
        )
    return "\n".join(lines) + "\n"


def _signed(value: float) -> str:
    return significant(value, 4).replace("-", "−")
