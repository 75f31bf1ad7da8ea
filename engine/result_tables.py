"""Results as tables of plain values, for spreadsheets and files beside the report."""

from __future__ import annotations

import cmath
import csv
import io
import math
from collections.abc import Sequence
from dataclasses import dataclass

from engine.comparability import PARTICULAR_RISK
from engine.currents import case_phasors
from engine.errors import UserError
from engine.faults import Remark
from engine.origins import assumptions
from engine.printed_text import printable
from engine.results import Assessment, Comparison, PlaceDetails
from engine.units import in_unit

Cell = str | float | int | None


@dataclass(frozen=True)
class ResultTable:
    """A table: a short name without blanks, what it holds, heads, rows."""

    name: str
    about: str
    heads: tuple[str, ...]
    rows: tuple[tuple[Cell, ...], ...]


def result_tables(
    assessment: Assessment, remarks: Sequence[Remark], unit: str
) -> tuple[ResultTable, ...]:
    """The tables of the report: numbers in full, flux densities in `unit`.

    Lengths are metres, currents amperes, angles degrees.
    """
    tables = _Tables(assessment, unit)
    return (
        tables.comparisons(),
        tables.largest(),
        tables.receptors(),
        tables.contributions(),
        tables.currents(),
        tables.assumed(),
        tables.remarks(remarks),
    )


def csv_text(table: ResultTable) -> str:
    """A table as CSV text, UTF-8, its first line the heads.

    Text that a spreadsheet could take for a formula gets an apostrophe before it.
    """
    file = io.StringIO()
    writer = csv.writer(file, lineterminator="\n")
    writer.writerow(table.heads)
    for row in table.rows:
        writer.writerow([_csv_cell(cell) for cell in row])
    return file.getvalue()


def _csv_cell(cell: Cell) -> str:
    if cell is None:
        return ""
    if isinstance(cell, str):
        text = printable(cell)
        return f"'{text}" if text[:1] in ("=", "+", "-", "@") else text
    return f"{cell:.12g}" if isinstance(cell, float) else str(cell)


class _Tables:
    """The tables of one assessment."""

    def __init__(self, assessment: Assessment, unit: str) -> None:
        self._assessment, self._unit = assessment, unit
        layout = assessment.layout
        self._names = {item.id: item.title for item in layout.items()}
        self._names.update({case.id: case.title for case in layout.cases})

    def _name(self, id: str) -> str:
        return self._names.get(id, id)

    def _value(self, tesla: float | None) -> float | None:
        return None if tesla is None else in_unit(tesla, self._unit)

    def comparisons(self) -> ResultTable:
        heads = (
            "place", "reference level", "load case", "counted", "state", "reason",
            "kind", f"B [{self._unit}]", f"L [{self._unit}]", "B/L", "U/L",
            f"U [{self._unit}]", "B/L at most (proven)", "area above L [m2]",
            "masked share", "not covered [Hz]", "x [m]", "y [m]", "z [m]",
            "height above floor [m]", "near field", "upper bound because",
        )  # fmt: skip
        rows = [self._comparison(c) for c in self._assessment.comparisons]
        about = "Zones and receptors against reference levels"
        return ResultTable("comparisons", about, heads, tuple(rows))

    def _comparison(self, c: Comparison) -> tuple[Cell, ...]:
        at_risk = PARTICULAR_RISK in c.reason
        return (
            self._name(c.place),
            self._name(c.level),
            self._name(c.case),
            "yes" if c.counted else "for information",
            "individual assessment required" if at_risk else c.state,
            c.reason,
            c.kind,
            self._value(c.value),
            self._value(c.level_value),
            c.ratio,
            c.uncertainty_ratio,
            self._value(c.uncertainty),
            c.upper_ratio,
            c.area_above,
            c.masked_share,
            " ".join(f"{f:g}" for f in c.not_covered),
            *_place(c.details),
        )

    def largest(self) -> ResultTable:
        heads = (
            "zone", "load case", "kind", f"largest B [{self._unit}]", "reason",
            "x [m]", "y [m]", "z [m]", "height above floor [m]", "near field",
            "upper bound because", "last step of the search [m]",
            "by frequency [Hz: " + self._unit + "]", "searched",
        )  # fmt: skip
        rows = [
            (
                zone.zone.title,
                self._name(m.case),
                m.kind,
                self._value(m.value),
                m.reason,
                *_place(m.details),
                m.details.step,
                "; ".join(
                    f"{p.frequency:g}: {in_unit(p.value, self._unit):.6g}"
                    for p in m.details.by_frequency
                ),
                zone.searched,
            )
            for zone in self._assessment.zones
            for m in zone.maxima
        ]
        about = "Largest RMS resultant of each zone, without any level"
        return ResultTable("largest-values", about, heads, tuple(rows))

    def receptors(self) -> ResultTable:
        heads = (
            "receptor", "x [m]", "y [m]", "z [m]", "load case", "reason",
            f"AC resultant [{self._unit}]", f"DC [{self._unit}]",
            "measured / calculated", "near field", "upper bound because",
        )  # fmt: skip
        rows = [
            (
                point.receptor.title,
                *point.receptor.at,
                self._name(f.case),
                f.reason,
                self._value(f.ac),
                self._value(f.dc),
                f.measured_ratio,
                "yes" if f.near_field else "no",
                f.bound_reason if f.is_bound else "",
            )
            for point in self._assessment.receptors
            for f in point.fields
        ]
        about = "The field at receptors"
        return ResultTable("receptors", about, heads, tuple(rows))

    def contributions(self) -> ResultTable:
        heads = (
            "zone", "load case", "kind", "circuit", f"share [{self._unit}]",
            f"alone [{self._unit}]", f"without it [{self._unit}]",
        )  # fmt: skip
        rows = [
            (
                zone.zone.title,
                self._name(m.case),
                m.kind,
                self._name(c.circuit),
                self._value(c.share),
                self._value(c.alone),
                self._value(c.without),
            )
            for zone in self._assessment.zones
            for m in zone.maxima
            for c in m.details.contributions
        ]
        about = "Circuits at the largest value of each zone"
        return ResultTable("contributions", about, heads, tuple(rows))

    def currents(self) -> ResultTable:
        heads = (
            "load case", "circuit", "conductor", "frequency [Hz]", "RMS [A]",
            "angle [deg]", "adds with",
        )  # fmt: skip
        rows: list[tuple[Cell, ...]] = []
        for result in self._assessment.cases:
            try:
                phasors = case_phasors(self._assessment.layout, result.case)
            except UserError:
                continue  # told by the remarks
            for (circuit, label), values in phasors.values.items():
                for part, value in zip(phasors.components, values, strict=True):
                    if value == 0:
                        continue
                    size, angle = _polar(complex(value))
                    own = self._name(part.circuit) if part.group else "others"
                    title = result.case.title
                    name = self._name(circuit)
                    rows.append((title, name, label, part.frequency, size, angle, own))
        about = "Currents used in every load case, as phasors"
        return ResultTable("currents", about, heads, tuple(rows))

    def assumed(self) -> ResultTable:
        rows = [
            (f"A{k}", self._name(a.item), a.field, a.value, a.reason)
            for k, a in enumerate(assumptions(self._assessment.layout), start=1)
        ]
        heads = ("number", "item", "value of", "as assumed", "reason given")
        about = "Entered values without an origin"
        return ResultTable("assumptions", about, heads, tuple(rows))

    def remarks(self, remarks: Sequence[Remark]) -> ResultTable:
        rows = [
            (
                r.code,
                r.severity,
                r.sentence,
                "; ".join(self._name(item) for item in r.items),
                self._name(r.case) if r.case else "every one",
            )
            for r in remarks
        ]
        heads = ("code", "severity", "remark", "items", "load case")
        return ResultTable("remarks", "Remarks not cleared", heads, tuple(rows))


def _place(details: PlaceDetails | None) -> tuple[Cell, ...]:
    if details is None:
        return (None, None, None, None, "", "")
    near = "yes" if details.near_field else "no"
    bound = details.bound_reason if details.is_bound else ""
    return (*details.at, details.height, near, bound)


def _polar(value: complex) -> tuple[float, float]:
    return abs(value), round(math.degrees(cmath.phase(value)), 6) + 0.0
