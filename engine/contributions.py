"""What matters at a place: each circuit's part, and what a net current would give."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from engine.case_fields import CaseCurrents
from engine.circuits import LINES, RETURNS, STRAY, Circuit
from engine.conductor import Conductor
from engine.currents import conductor_currents
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
    parts = []
    for circuit in dict.fromkeys(key[0] for key in case.phasors.values):
        own = {k: v for k, v in case.phasors.values.items() if k[0] == circuit}
        currents = conductor_currents(replace(case.phasors, values=own), conductors)
        b = currents[rows] @ responses
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
    """The circuit in which 1 A of net current gives most at a point.

    The ampere flows along the circuit's neutral (or other return), shared as the
    neutral is shared; in a circuit without one, evenly along its lines. Its way back
    is far away and left out. None without any conductor of a circuit.
    """
    best: NetCurrentEffect | None = None
    for circuit in circuits:
        labels = _net_labels(circuit, conductors)
        if not labels:
            continue
        weights = np.array([_weight(c, circuit.id, labels) for c in conductors])
        effect = float(np.linalg.norm(weights @ responses))
        if best is None or effect > best.per_ampere:
            best = NetCurrentEffect(circuit.id, labels, effect)
    return best


def _weight(conductor: Conductor, circuit: str, labels: tuple[str, ...]) -> float:
    """Current along the conductor when 1 A is split evenly over the labels."""
    shares = (
        load.share
        for load in conductor.loads
        if load.circuit == circuit and load.label in labels
    )
    return sum(shares) / len(labels)


def _net_labels(circuit: Circuit, conductors: Sequence[Conductor]) -> tuple[str, ...]:
    """The conductors that the ampere takes: the return, else the lines, else all."""
    drawn = dict.fromkeys(
        load.label
        for conductor in conductors
        for load in conductor.loads
        if load.circuit == circuit.id and load.label not in (STRAY, "PE")
    )
    back = RETURNS.get(circuit.supply)
    if back in drawn:
        return (back,)
    lines = tuple(label for label in LINES[circuit.supply] if label in drawn)
    return lines or tuple(drawn)
