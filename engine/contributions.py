"""What matters at a place: each circuit's part, and what a net current would give."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from engine.case_fields import CaseCurrents
from engine.circuits import LINES, RETURNS, STRAY, Circuit
from engine.conductor import Conductor
from engine.levels import Kind, is_kind
from engine.results import Contribution, NetCurrentEffect

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]


def contributions(
    case: CaseCurrents, conductors: Sequence[Conductor], responses: Floats, kind: Kind
) -> tuple[Contribution, ...]:
    """The circuits' parts of the field at a point, the largest first.

    Parameters
    ----------
    case : CaseCurrents
        [A]
    conductors : m conductors
    responses : (m, 3) float
        Of the conductors at the point. [T/A]
    kind
        AC: all frequencies above 0 Hz; DC: 0 Hz only.

    Returns
    -------
    tuple of Contribution
        Their shares sum to the RMS resultant of the phasors as they stand. Where the
        angle between circuits is unknown, the value compared may be larger than that.
    """
    rows = [k for k, c in enumerate(case.components) if is_kind(c.frequency, kind)]
    whole = case.currents[rows] @ responses
    total = _size(whole)
    per_ampere = label_responses(conductors, responses)
    fields: dict[str, Complexes] = {}
    for key, phasors in case.phasors.values.items():
        if key in per_ampere:
            b = phasors[rows, None] * per_ampere[key]
            fields[key[0]] = fields[key[0]] + b if key[0] in fields else b
    parts = []
    for circuit, b in fields.items():
        alone = _size(b)
        if alone == 0:
            continue
        share = float(np.sum((b * whole.conj()).real)) / total if total > 0 else 0.0
        parts.append(Contribution(circuit, share, alone, _size(whole - b)))
    return tuple(sorted(parts, key=lambda part: -abs(part.share)))


def _size(b: Complexes) -> float:
    """RMS resultant over axes and components. [T]"""
    return float(np.linalg.norm(b))


def net_current_effect(
    circuits: Sequence[Circuit], conductors: Sequence[Conductor], responses: Floats
) -> NetCurrentEffect | None:
    """The circuit in which 1 A of net current gives most at a point, or None."""
    effects = net_current_effects(circuits, conductors, responses)
    return effects[0] if effects else None


def net_current_effects(
    circuits: Sequence[Circuit], conductors: Sequence[Conductor], responses: Floats
) -> tuple[NetCurrentEffect, ...]:
    """What 1 A of net current in each drawn circuit gives at a point, most first.

    The ampere flows along the circuit's neutral (or other return), shared as the
    neutral is shared; in a circuit without one, evenly along its lines. Its way back
    is far away and left out.
    """
    per_ampere = label_responses(conductors, responses)
    drawn: dict[str, list[str]] = {}
    for owner, label in per_ampere:
        drawn.setdefault(owner, []).append(label)
    effects = []
    for circuit in circuits:
        labels = _net_labels(circuit, drawn.get(circuit.id, ()))
        if not labels:
            continue
        # The ampere is split evenly over the labels.
        whole = np.sum([per_ampere[circuit.id, label] for label in labels], axis=0)
        effect = float(np.linalg.norm(whole)) / len(labels)
        effects.append(NetCurrentEffect(circuit.id, labels, effect))
    return tuple(sorted(effects, key=lambda effect: -effect.per_ampere))


def label_responses(
    conductors: Sequence[Conductor], responses: Floats
) -> dict[tuple[str, str], Floats]:
    """(3,) field at the point of 1 A in each circuit's label, as it is shared. [T/A]"""
    rows: dict[tuple[str, str], int] = {}
    into: list[int] = []
    which: list[int] = []
    shares: list[float] = []
    for k, conductor in enumerate(conductors):
        for load in conductor.loads:
            into.append(rows.setdefault((load.circuit, load.label), len(rows)))
            which.append(k)
            shares.append(load.share)
    sums = np.zeros((len(rows), 3))
    if rows:
        np.add.at(sums, into, responses[which] * np.array(shares)[:, None])
    return {key: sums[row] for key, row in rows.items()}


def _net_labels(circuit: Circuit, drawn: Sequence[str]) -> tuple[str, ...]:
    """The conductors that the ampere takes: the return, else the lines, else all."""
    taken = tuple(label for label in drawn if label not in (STRAY, "PE"))
    back = RETURNS.get(circuit.supply)
    if back in taken:
        return (back,)
    lines = tuple(label for label in LINES[circuit.supply] if label in taken)
    return lines or taken
