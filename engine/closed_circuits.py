"""Which circuits close in themselves, so that the field of each has a meaning alone."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.conductors import nodes
from engine.currents import CasePhasors, load_current
from engine.faults import MAY_REMAIN, MAY_REMAIN_RELATIVE
from engine.items import Point3
from engine.layout import Layout
from engine.runs import SlotLoad

Bools = NDArray[np.bool_]


@dataclass(frozen=True)
class UnclosedPiece:
    """Circuits whose currents do not close as drawn: no part of a field is theirs.

    `items` meet at `place`, where current remains. [m]
    """

    circuits: tuple[str, ...]
    items: tuple[str, ...]
    place: Point3


@dataclass(frozen=True)
class ClosedCircuits:
    """Circuits that close, each alone or several only together, and what does not."""

    closed: tuple[tuple[str, ...], ...]
    unclosed: tuple[UnclosedPiece, ...]


def closed_circuits(layout: Layout, phasors: CasePhasors) -> ClosedCircuits:
    """The circuits with current in a load case, by Kirchhoff's law at every node.

    A circuit closes when no node keeps more of its current than `faults` lets stand.
    Circuits that leave current at the same node may close together, as when one
    returns through the conductor of another.

    Raises
    ------
    UserError
        When the layout's geometry cannot be built.
    """
    flowing = list(dict.fromkeys(circuit for circuit, _ in phasors.values))
    group = {circuit: circuit for circuit in flowing}

    def first(circuit: str) -> str:
        while group[circuit] != circuit:
            circuit = group[circuit]
        return circuit

    places = nodes(layout)
    for node in places:
        left = [
            circuit
            for circuit in dict.fromkeys(load.circuit for load in node.inflow)
            if circuit in group and _remains(phasors, node.inflow, (circuit,))
        ]
        for circuit in left[1:]:
            group[first(circuit)] = first(left[0])
    groups: dict[str, list[str]] = {}
    for circuit in flowing:
        groups.setdefault(first(circuit), []).append(circuit)
    closed: list[tuple[str, ...]] = []
    unclosed: list[UnclosedPiece] = []
    for members in groups.values():
        together = tuple(members)
        open_ = next((n for n in places if _remains(phasors, n.inflow, together)), None)
        if open_ is None:
            closed.append(together)
        else:
            unclosed.append(UnclosedPiece(together, open_.items, open_.place))
    return ClosedCircuits(tuple(closed), tuple(unclosed))


def _remains(
    phasors: CasePhasors, inflow: tuple[SlotLoad, ...], circuits: tuple[str, ...]
) -> bool:
    """Whether these circuits leave current at a node, in any component."""
    own = tuple(load for load in inflow if load.circuit in circuits)
    if not own:
        return False
    total = np.zeros(len(phasors.components))
    for load in own:
        total += abs(load.share) * np.abs(phasors.of(load.circuit, load.label))
    remaining = np.abs(load_current(phasors, own))
    over: Bools = remaining > np.maximum(MAY_REMAIN, MAY_REMAIN_RELATIVE * total)
    return bool(np.any(over))
