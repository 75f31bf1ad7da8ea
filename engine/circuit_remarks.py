"""Remarks on circuits and load cases: what their currents leave open or contradict."""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterable, Iterator

import numpy as np

from engine.circuit_currents import CaseTerms, neutral_comparison
from engine.circuits import (
    LINES,
    RETURNS,
    STRAY,
    Circuit,
    LoadCase,
    MeasuredCurrents,
)
from engine.currents import AngleNote, CasePhasors
from engine.errors import UserError
from engine.faults import Remark
from engine.layout import Layout
from engine.units import significant

#: A sum of currents counts as open above both. [A], [1]
OPEN_AMPERES, OPEN_SHARE = 0.5, 1e-3

#: Measured and computed neutral may differ by this part of the larger.
NEUTRAL_DIFFERENCE = 0.10

#: A measurement scaled by more than this is a large extrapolation.
LARGE_FACTOR = 3.0


def circuit_remarks(layout: Layout, phasors: CasePhasors) -> Iterator[Remark]:
    """What is to say on the circuits of a layout in one load case.

    Parameters
    ----------
    layout : Layout
        Whose circuits.
    phasors : CasePhasors
        Their currents in the case.
    """
    terms = CaseTerms(phasors.case)
    for circuit in layout.circuits:
        stated, factor = terms.stated(circuit)
        if factor == 0:
            continue
        yield from _open_sums(stated, phasors)
        yield from _sequence(stated, phasors)
        yield from _measured(stated, factor, phasors.case)
        yield from _neutral(circuit, phasors.case)
    yield from _angles(layout, phasors.notes)
    yield from _direct_and_alternating(phasors)


def _open_sums(circuit: Circuit, phasors: CasePhasors) -> Iterator[Remark]:
    """W09 and W10: the lines do not close and nothing takes their sum back."""
    back = RETURNS.get(circuit.supply)
    has_return = back is not None and circuit.neutral != "none"
    if has_return or circuit.supply == "dc":
        return
    labels = [label for owner, label in phasors.values if owner == circuit.id]
    if STRAY in labels:
        return
    currents = np.array([phasors.of(circuit.id, label) for label in labels])
    if not currents.size:
        return
    sums, entered = np.abs(currents.sum(axis=0)), np.abs(currents).sum(axis=0)
    triplen = np.array(
        [_is_triplen(c.frequency, circuit.base_frequency) for c in phasors.components]
    )
    others = math.sqrt(float(np.sum(sums[~triplen] ** 2)))
    if others > max(OPEN_AMPERES, OPEN_SHARE * float(entered.max(initial=0.0))):
        yield Remark(
            code="W09",
            severity="warning",
            sentence=f"The currents of circuit “{circuit.title}” sum to "
            f"{significant(others)} A and it has neither a neutral nor net current: "
            "enter the missing conductor, or correct the currents.",
            items=(circuit.id,),
            place=None,
        )
    thirds = math.sqrt(float(np.sum(sums[triplen] ** 2)))
    if thirds > OPEN_SHARE * float(entered.max(initial=0.0)):
        yield Remark(
            code="W10",
            severity="warning",
            sentence=f"Circuit “{circuit.title}” has {significant(thirds)} A of "
            "zero-sequence harmonics and no neutral for them to return in: enter the "
            "neutral, or remove the harmonics of orders 3, 9, 15.",
            items=(circuit.id,),
            place=None,
        )


def _is_triplen(frequency: float, base: float) -> bool:
    """Whether the frequency is an odd or even multiple of three times the base."""
    if base <= 0 or frequency <= 0:
        return False
    order = frequency / (3 * base)
    return abs(order - round(order)) < 1e-6 and round(order) >= 1


def _sequence(circuit: Circuit, phasors: CasePhasors) -> Iterator[Remark]:
    """W15: the lines turn L1 L3 L2."""
    if LINES[circuit.supply] != ("L1", "L2", "L3"):
        return
    at_base = [
        i
        for i, component in enumerate(phasors.components)
        if math.isclose(component.frequency, circuit.base_frequency, rel_tol=1e-9)
        and (component.circuit in ("", circuit.id))
    ]
    lines = [
        complex(phasors.of(circuit.id, label)[at_base].sum())
        for label in ("L1", "L2", "L3")
    ]
    turn = cmath.exp(2j * math.pi / 3)
    positive = abs(lines[0] + turn * lines[1] + turn**2 * lines[2])
    negative = abs(lines[0] + turn**2 * lines[1] + turn * lines[2])
    if negative > positive * (1 + 1e-9):
        yield Remark(
            code="W15",
            severity="warning",
            sentence=f"The lines of circuit “{circuit.title}” have a negative "
            "sequence: check the order of L1, L2, L3 and the signs of their angles.",
            items=(circuit.id,),
            place=None,
        )


def _measured(circuit: Circuit, factor: float, case: LoadCase) -> Iterator[Remark]:
    """W21 and W22: a measurement is scaled."""
    if not isinstance(circuit.demand, MeasuredCurrents) or factor == 1:
        return
    large = factor > LARGE_FACTOR
    ending = (
        "; that is a large extrapolation: measure again nearer to that load."
        if large
        else "; unbalance, power factor and net current are taken to scale alike."
    )
    yield Remark(
        code="W22" if large else "W21",
        severity="warning" if large else "note",
        sentence=f"The measured currents of circuit “{circuit.title}” are multiplied "
        f"by {significant(factor)}{ending}",
        items=(circuit.id, case.id),
        place=None,
        case=case.id,
    )


def _neutral(circuit: Circuit, case: LoadCase) -> Iterator[Remark]:
    """W32: the neutral as measured is not the one that the lines give."""
    stated, _ = CaseTerms(case).stated(circuit)
    if not isinstance(stated.demand, MeasuredCurrents):
        return
    try:
        found = neutral_comparison(circuit, case)
    except UserError:
        return  # told as a fault
    if found.measured is None:
        return
    difference = abs(found.measured - found.computed)
    larger = max(found.measured, found.computed)
    if difference <= max(OPEN_AMPERES, NEUTRAL_DIFFERENCE * larger):
        return
    used = "entered" if stated.neutral == "entered" else "computed"
    yield Remark(
        code="W32",
        severity="warning",
        sentence=f"The neutral of circuit “{circuit.title}” was measured as "
        f"{significant(found.measured)} A and follows from the lines as "
        f"{significant(found.computed)} A; the {used} one is used: check angles, "
        "harmonics and net current.",
        items=(circuit.id,),
        place=None,
        case=case.id,
    )


_ANGLE_SENTENCES: dict[str, tuple[str, str]] = {
    "sequence assumed": (
        "W31",
        "The angles between the lines of circuit {circuit} were not entered: 120° "
        "apart in the order L1, L2, L3 is assumed.",
    ),
    "line offset assumed": (
        "W31",
        "Some lines of circuit {circuit} have a harmonic angle and others none "
        "({frequencies}): those without are taken with an offset of 0°; enter all.",
    ),
    "power factor assumed": (
        "W31",
        "The power factor of circuit {circuit} was not entered: lines in phase with "
        "their voltages are assumed.",
    ),
    "neutral angle assumed": (
        "W31",
        "The angle of the entered neutral of circuit {circuit} is unknown: that of "
        "the neutral which the lines give is assumed.",
    ),
    "net current angle assumed": (
        "W31",
        "The angle of the net current of circuit {circuit} is unknown: that of the "
        "neutral which the lines give is assumed.",
    ),
    "offset unknown": (
        "W11",
        "The angles of harmonics of circuit {circuit} to its fundamental are unknown "
        "({frequencies}): RMS values hold where it is alone at a frequency, sums with "
        "other circuits and peaks are upper bounds.",
    ),
    "relation unknown": (
        "W33",
        "The phase relation of circuit {circuit} to the others is unknown: the "
        "largest field over that angle, or an upper bound, is shown.",
    ),
    "other base": (
        "W33",
        "Circuit {circuit} meets another base frequency at {frequencies}: values of "
        "equal frequency are added as an upper bound.",
    ),
}


def _angles(layout: Layout, notes: Iterable[AngleNote]) -> Iterator[Remark]:
    """W11, W31, W33: angles that are unknown or were assumed."""
    frequencies: dict[tuple[str, str], list[float]] = {}
    for note in notes:
        at = frequencies.setdefault((note.kind, note.circuit), [])
        if note.frequency is not None:
            at.append(note.frequency)
    titles = {circuit.id: circuit.title for circuit in layout.circuits}
    for (kind, circuit), at in frequencies.items():
        code, sentence = _ANGLE_SENTENCES[kind]
        shown = ", ".join(f"{f:g} Hz" for f in sorted(set(at)))
        yield Remark(
            code=code,
            severity="note",
            sentence=sentence.format(
                circuit=f"“{titles.get(circuit, circuit)}”", frequencies=shown
            ),
            items=(circuit,),
            place=None,
        )


def _direct_and_alternating(phasors: CasePhasors) -> Iterator[Remark]:
    """W17: fields of 0 Hz and of higher frequencies are never one number."""
    direct = any(component.frequency == 0 for component in phasors.components)
    if not direct or all(component.frequency == 0 for component in phasors.components):
        return
    zeros = np.array([component.frequency == 0 for component in phasors.components])
    circuits = dict.fromkeys(
        circuit
        for (circuit, _), values in phasors.values.items()
        if np.any(values[zeros])
    )
    yield Remark(
        code="W17",
        severity="note",
        sentence="Direct and alternating currents flow together: their fields are "
        "shown and compared apart, and no total holds both.",
        items=tuple(circuits),
        place=None,
    )
