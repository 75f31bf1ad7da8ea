"""Sources as entered: circuits, load cases, currents, runs, equipment."""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterator, Sequence

from reportlab.platypus import Flowable

from engine.circuits import STRAY, Circuit, EnteredNetCurrent, LoadCase
from engine.currents import AngleNote, CasePhasors, case_phasors
from engine.equipment import Board, ConductorLoop, Equipment, Transformer
from engine.errors import UserError
from engine.items import Item, Point3
from engine.layout import Layout
from engine.origin_words import origin_text
from engine.report.section_figures import SECTION_UNITS, section_numbers
from engine.report.text import NOTE, bullets, paragraph, table
from engine.report.words import demand_text, length, place, section_text, shape_text
from engine.runs import Connection, Run
from engine.section_words import direction_text, order_text
from engine.units import significant

OTHER_STATES = (
    "No other operating state was calculated. The outage of one of several supplies, "
    "growth and future circuits count only where they are one of these load cases."
)

NET_CURRENT = (
    "Net: magnitude of the phasor sum of the circuit's own conductors, the stray part "
    "left out. It is what a clamp around the whole cable would show; “stray” is the "
    "path that brings it back. Where nothing was entered for it, it is 0 by assumption."
)

#: Conductors side by side in the table of currents.
MOST_LABELS = 6


def circuits(layout: Layout, width: float) -> list[Flowable]:
    """The circuit schedule, as entered."""
    if not layout.circuits:
        return [paragraph("No circuit was entered.")]
    rows = [
        (
            _titled(circuit),
            _supply(circuit),
            f"{demand_text(circuit.demand)}\n"
            f"({origin_text(layout, circuit, 'demand')})",
            _spectrum(circuit),
            f"{circuit.neutral}; net current: {_net_current(circuit)}\n"
            f"({origin_text(layout, circuit, 'net_current')})",
            circuit.phase_relation,
        )
        for circuit in layout.circuits
    ]
    heads = (
        "Circuit", "Supply", "Current as entered", "Harmonics",
        "Neutral and net current", "Phase to others",
    )  # fmt: skip
    return [table(heads, rows, (20, 15, 24, 15, 16, 10), width)]


def _titled(item: Item) -> str:
    """The item's name, its note under it."""
    return f"{item.title}\n{item.note}" if item.note else item.title


def _supply(circuit: Circuit) -> str:
    parts: list[str] = [circuit.supply]
    if circuit.supply != "dc":
        parts.append(f"{circuit.base_frequency:g} Hz")
    if circuit.voltage is not None:
        parts.append(f"{circuit.voltage:g} V")
    return ", ".join(parts)


def _spectrum(circuit: Circuit) -> str:
    lines = []
    for line in circuit.spectrum:
        amount = (
            f"{100 * line.ratio:g} %"
            if line.ratio is not None
            else f"{line.rms or 0:g} A"
        )
        angle = "angle unknown" if line.offset is None else f"offset {line.offset:g}°"
        label = f" {line.label}" if line.label else ""
        lines.append(f"{line.frequency:g} Hz{label}: {amount}, {angle}")
    return "\n".join(lines) or "none entered"


def _net_current(circuit: Circuit) -> str:
    net = circuit.net_current
    if net is None:
        return "none entered"
    if isinstance(net, EnteredNetCurrent):
        angle = "angle unknown" if net.angle is None else f"∠ {net.angle:g}°"
        return f"{net.rms:g} A {angle}"
    return f"{100 * net.share:g} % of the neutral current"


def load_cases(layout: Layout, width: float) -> list[Flowable]:
    """The load cases in words."""
    names = {circuit.id: circuit.title for circuit in layout.circuits}
    opened = {enclosure.id: enclosure.title for enclosure in layout.enclosures}
    rows = []
    for case in layout.cases:
        parts = [
            f"{names.get(f.circuit, f.circuit)} × {f.factor:g}" for f in case.factors
        ]
        parts += [
            f"{names.get(own.circuit, own.circuit)}: "
            + ("own spectrum" if own.demand is None else demand_text(own.demand))
            for own in case.own
        ]
        parts.append(f"others {case.others}")
        rows.append(
            (
                case.title,
                "counted" if case.counted else "for information",
                "; ".join(parts),
                ", ".join(opened.get(e, e) for e in case.open_enclosures) or "none",
                case.basis,
            )
        )
    heads = ("Load case", "Counts", "Currents", "Open for work", "Stands for")
    return [
        table(heads, rows, (20, 11, 40, 15, 14), width),
        paragraph(OTHER_STATES, NOTE),
    ]


def currents(layout: Layout, case: LoadCase, width: float) -> list[Flowable]:
    """The phasors that the calculation used in one case."""
    try:
        phasors = case_phasors(layout, case)
    except UserError as error:
        return [paragraph(f"The currents of this case are not determined: {error}")]
    names = {circuit.id: circuit.title for circuit in layout.circuits}
    labels = [*dict.fromkeys(label for _, label in phasors.values)]
    made: list[Flowable] = []
    for first in range(0, len(labels), MOST_LABELS):
        part = labels[first : first + MOST_LABELS]
        rows = list(_current_rows(phasors, part, names))
        if rows:
            last = first + MOST_LABELS >= len(labels)
            heads = (
                "Circuit", "At", *(f"{label} [A] ∠ [°]" for label in part),
                *(("Net [A]",) if last else ()),
            )  # fmt: skip
            shares = (20, 12, *([60 / len(part)] * len(part)), *((8,) if last else ()))
            shown = [row if last else row[:-1] for row in rows]
            made.append(table(heads, shown, shares, width))
    if not made:
        return [paragraph("No current flows in this case.")]
    notes = sorted(
        {f"{names.get(n.circuit, n.circuit)}: {_angle_note(n)}" for n in phasors.notes}
    )
    return made + bullets(notes)


def _current_rows(
    phasors: CasePhasors, labels: Sequence[str], names: dict[str, str]
) -> Iterator[tuple[str, ...]]:
    """RMS and angle of each label, a row for each circuit and component."""
    for circuit in dict.fromkeys(circuit for circuit, _ in phasors.values):
        for k, component in enumerate(phasors.components):
            values = [phasors.of(circuit, label)[k] for label in labels]
            if not any(values):
                continue
            at = "DC" if component.frequency == 0 else f"{component.frequency:g} Hz"
            if component.group:
                at += ", not added as a phasor"
            cells = ["–" if v == 0 else _phasor(complex(v)) for v in values]
            yield (names.get(circuit, circuit), at, *cells, _net(phasors, circuit, k))


def _net(phasors: CasePhasors, circuit: str, component: int) -> str:
    """Magnitude of the sum of what the circuit's own conductors carry."""
    parts = [
        (label, complex(values[component]))
        for (owner, label), values in phasors.values.items()
        if owner == circuit and label != STRAY
    ]
    size = sum(abs(value) for _, value in parts)
    net = abs(sum(value for _, value in parts))
    return "0" if net < 1e-9 * size else significant(net, 4)


def _phasor(value: complex) -> str:
    angle = f"{math.degrees(cmath.phase(value)):.1f}"
    shown = "0.0" if angle == "-0.0" else angle.replace("-", "−")
    return f"{significant(abs(value), 4)}\n∠ {shown}"


def _angle_note(note: AngleNote) -> str:
    at = "" if note.frequency is None else f" at {note.frequency:g} Hz"
    return f"{note.kind}{at}"


def runs(layout: Layout, width: float) -> list[Flowable]:
    """Runs with their routes, sections and ends."""
    unit = layout.settings.length_unit
    names = {item.id: item.title for item in layout.items()}
    numbers = section_numbers(layout)
    small = SECTION_UNITS[unit]
    if not layout.runs:
        return [paragraph("No run was entered.")]
    rows = [
        (
            _titled(run),
            _kind(run),
            _route(run.route, unit) + f"\nroute: {origin_text(layout, run, 'route')}",
            f"{numbers[run.id]}: {_section(layout, run, names, small)}",
            _ends(run, names),
        )
        for run in layout.runs
    ]
    heads = (
        "Run", "Kind", f"Route x, y, z [{unit}]", f"Section [{small}]", "Ends",
    )  # fmt: skip
    return [table(heads, rows, (20, 10, 18, 32, 20), width)]


def _kind(run: Run) -> str:
    parts: list[str] = [run.kind]
    if run.rated_current is not None:
        parts.append(f"rated {run.rated_current:g} A")
    if run.containment != "not stated":
        parts.append(f"containment {run.containment}")
    return "\n".join(parts)


def _section(layout: Layout, run: Run, names: dict[str, str], unit: str) -> str:
    """A section in words, its order as seen, and from where it is looked at."""
    try:
        order = order_text(run.section)
    except UserError as error:
        order = str(error)
    turned = [f"{turn:g}°" for turn in run.turns]
    text = section_text(run.section, names, unit)
    seen = f"{direction_text(layout, run)}, {order}"
    lines = [text, seen, f"section: {origin_text(layout, run, 'section')}"]
    if any(run.turns):
        lines.append("turned about its legs by " + ", ".join(turned))
    return "\n".join(lines)


def _route(route: tuple[Point3, ...], unit: str) -> str:
    shown = route if len(route) <= 60 else route[:60]
    lines = [place(point, unit) for point in shown]
    if len(shown) < len(route):
        lines.append(f"… {len(route)} vertices in all")
    return "\n".join(lines)


def _ends(run: Run, names: dict[str, str]) -> str:
    def end(connection: Connection | None) -> str:
        if connection is None:
            return "free or joined"
        parts = (connection.way, connection.terminal)
        extra = " ".join(text for text in parts if text)
        return (
            f"{names.get(connection.equipment, connection.equipment)} {extra}".strip()
        )

    return f"start: {end(run.start)}\nend: {end(run.end)}"


def equipment(layout: Layout, width: float) -> list[Flowable]:
    """Transformers, boards and conductor loops."""
    unit = layout.settings.length_unit
    if not layout.equipment:
        return [paragraph("No equipment was entered.")]
    rows = [(_titled(e), *_equipment_text(e, unit)) for e in layout.equipment]
    heads = ("Equipment", "Kind", f"Geometry [{unit}]")
    return [table(heads, rows, (26, 20, 54), width)]


def _equipment_text(unit_item: Equipment, unit: str) -> tuple[str, str]:
    if isinstance(unit_item, Transformer):
        rated = unit_item.rated_power
        kind = "transformer" + (f", {rated / 1e3:g} kVA" if rated else "")
        ends = [f"{t.label} at {place(t.at, unit)}" for t in unit_item.terminals]
        return kind, "\n".join([*ends, f"star at {place(unit_item.star, unit)}"])
    if isinstance(unit_item, ConductorLoop):
        kind = f"{unit_item.kind} loop, {unit_item.turns} turns of {unit_item.label}"
        return kind, _route(unit_item.path, unit)
    assert isinstance(unit_item, Board)
    origin = place(unit_item.origin, unit)
    lines = [f"from {origin} toward {unit_item.direction:g}°"]
    lines += [
        f"{p.label}: {shape_text(p.shape, unit)}, across {length(p.across, unit)}, "
        f"z {length(p.z, unit)}, fed at {length(p.fed_at, unit)}"
        for p in unit_item.poles
    ]
    lines += [
        f"way {w.name} at {length(w.position, unit)}" + (", closed" if w.closed else "")
        for w in unit_item.ways
    ]
    return "board", "\n".join(lines)


def joints(layout: Layout, closed: Sequence[str], width: float) -> list[Flowable]:
    """Joints, and the runs whose free ends an assumed link closes.

    Parameters
    ----------
    closed : sequence of str
        Names of the runs with a closing link.
    """
    names = {item.id: item.title for item in layout.items()}
    unit = layout.settings.length_unit
    rows = [
        (
            _titled(joint),
            "; ".join(
                f"{names.get(e.item, e.item)} {e.slot} {e.end}" for e in joint.ends
            ),
            place(joint.at, unit) if joint.at else "middle of the ends",
        )
        for joint in layout.joints
    ]
    made: list[Flowable] = []
    if rows:
        made.append(
            table(
                ("Joint", "Ends that meet", f"At [{unit}]"), rows, (22, 58, 20), width
            )
        )
    if closed:
        text = "Free ends closed across the section by an assumed link: "
        made.append(paragraph(text + ", ".join(closed) + "."))
    return made
