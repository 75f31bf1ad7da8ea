"""A load case as phasors by coherent component, and the currents of conductors.

Phasors of one component add; those of two never do, because nothing is known of the
angle between them. A conductor that a result does not hold carries nothing.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from threading import Lock

import numpy as np
from numpy.typing import NDArray

from engine.circuit_currents import (
    AngleKind,
    AngleNote,
    CaseTerms,
    CircuitCurrents,
    NeutralComparison,
    circuit_phasors,
    neutral_comparison,
)
from engine.circuits import Circuit, LoadCase
from engine.conductor import Conductor
from engine.errors import UserError
from engine.layout import Layout
from engine.run_conductors import Same
from engine.runs import SlotLoad
from engine.spectra import frequency_key

__all__ = [
    "AngleKind",
    "AngleNote",
    "CasePhasors",
    "Component",
    "NeutralComparison",
    "case_phasors",
    "circuit_phasors",
    "conductor_currents",
    "load_current",
    "neutral_comparison",
    "node_currents",
]

#: Components times circuit conductors that a load case may have (0.3 GB).
MOST_VALUES = 20_000_000

#: Load cases whose phasors are remembered, with what conductors carry in them.
_N_KEPT = 16

#: Loads known by identity before they are looked up anew.
_MOST_KNOWN = 50_000

#: Stands between circuit and frequency in the group of an unknown offset; no id has it.
_AT = " @ "

_Key = tuple[str, str]


@dataclass(frozen=True)
class Component:
    """Currents of one frequency that add as phasors.

    Attributes
    ----------
    frequency
        [Hz]
    base
        Base frequency that the angles belong to; 0 for every direct current, which has
        a sign and no angle. [Hz]
    group
        Empty: adds with everything of its base. The id of a circuit: that circuit is
        shifted by an unknown time, the same at all its frequencies. "ID @ 150 Hz": the
        angle of that circuit at this one frequency is unknown by itself.
    """

    frequency: float
    base: float
    group: str = ""

    @property
    def circuit(self) -> str:
        """Id of the circuit that does not add with the others, or empty."""
        return self.group.partition(_AT)[0]


@dataclass(frozen=True, eq=False)
class CasePhasors:
    """The currents of all circuits in one load case.

    Attributes
    ----------
    case
        The load case.
    components
        By frequency, base and group; none where no current flows at all.
    values
        By circuit id and label: (c,) complex RMS phasors, one per component. [A]
    notes
        Angles that are unknown or were assumed.
    """

    case: LoadCase
    components: tuple[Component, ...]
    values: Mapping[_Key, NDArray[np.complex128]]
    notes: tuple[AngleNote, ...] = ()

    def of(self, circuit: str, label: str) -> NDArray[np.complex128]:
        """(c,) complex phasors of one conductor, zeros where nothing flows. [A]"""
        found = self.values.get((circuit, label))
        if found is None:
            return np.zeros(len(self.components), np.complex128)
        return found


def case_phasors(layout: Layout, case: LoadCase) -> CasePhasors:
    """The currents of a layout's circuits in a load case.

    Circuits of one base frequency add as phasors at each frequency. Kept apart are:
    equal frequencies of different bases, circuits whose phase relation is unknown, and
    harmonics whose offset is unknown. Direct currents always add, with their signs.
    The identical phasors again while circuits and case are the same values.

    Raises
    ------
    UserError
        When a circuit's entries do not determine its currents; when there are two
        circuits with one id; when more currents do not add than can be held.
    """
    return _case_phasors(Same(layout.circuits), Same(case))


@lru_cache(maxsize=_N_KEPT)
def _case_phasors(
    circuits: Same[tuple[Circuit, ...]], same_case: Same[LoadCase]
) -> CasePhasors:
    case = same_case.value
    terms = CaseTerms(case)
    flowing: dict[str, tuple[Circuit, CircuitCurrents]] = {}
    seen: set[str] = set()
    for circuit in circuits.value:
        if circuit.id in seen:
            raise UserError(
                f"Two circuits have the id {circuit.id}; give one of them another id."
            )
        seen.add(circuit.id)
        currents = terms.currents(circuit)
        if any(currents.values.values()):
            flowing[circuit.id] = (circuit, currents)
    components, relation_notes = _components(flowing)
    ordered = sorted(set(components.values()), key=_order)
    notes = [note for _, currents in flowing.values() for note in currents.notes]
    return CasePhasors(
        case=case,
        components=tuple(ordered),
        values=_values(flowing, components, ordered, case),
        notes=tuple(notes + relation_notes),
    )


def conductor_currents(
    phasors: CasePhasors, conductors: Sequence[Conductor]
) -> NDArray[np.complex128]:
    """The currents along the conductors' paths.

    Parameters
    ----------
    phasors : CasePhasors
        c components.
    conductors : m conductors
        Each carries the sum of its loads.

    Returns
    -------
    (c, m) complex
        RMS phasors. [A]
    """
    if isinstance(conductors, tuple):
        return _conductor_currents(Same(phasors), Same(conductors))
    return _carried(Same(phasors)).of([conductor.loads for conductor in conductors])


@lru_cache(maxsize=_N_KEPT)
def _conductor_currents(
    phasors: Same[CasePhasors], conductors: Same[tuple[Conductor, ...]]
) -> NDArray[np.complex128]:
    currents = _carried(phasors).of([each.loads for each in conductors.value])
    currents.flags.writeable = False
    return currents


def node_currents(
    phasors: CasePhasors, inflows: Sequence[tuple[SlotLoad, ...]]
) -> NDArray[np.complex128]:
    """(c, n) complex sums of the currents into n nodes. [A]"""
    return _carried(Same(phasors)).of(inflows)


class _Carried:
    """What loads come to in one load case, each computed once.

    A drag asks for the currents of thousands of unchanged conductors at every step.
    """

    def __init__(self, phasors: CasePhasors) -> None:
        self._phasors = phasors
        self._lock = Lock()
        self._rows: dict[tuple[SlotLoad, ...], int] = {}
        self._values = np.zeros((0, len(phasors.components)), np.complex128)
        # By identity, which the held loads keep from being used again.
        self._known: dict[int, int] = {}
        self._held: list[tuple[SlotLoad, ...]] = []

    def of(self, loads: Sequence[tuple[SlotLoad, ...]]) -> NDArray[np.complex128]:
        """(c, m) complex sums. [A]"""
        with self._lock:
            known = self._known
            rows = [known.get(id(together), -1) for together in loads]
            if -1 in rows:
                new = [each for each, row in zip(loads, rows, strict=True) if row < 0]
                self._learn(new)
                rows = [
                    self._rows[each] if row < 0 else row
                    for each, row in zip(loads, rows, strict=True)
                ]
            return self._values[rows].T

    def _learn(self, loads: Sequence[tuple[SlotLoad, ...]]) -> None:
        new = [each for each in dict.fromkeys(loads) if each not in self._rows]
        if new:
            first = len(self._rows)
            self._rows.update((each, first + k) for k, each in enumerate(new))
            made = _load_currents(self._phasors, new).T
            self._values = np.concatenate([self._values, made])
        if len(self._held) > _MOST_KNOWN:
            self._known.clear()
            self._held.clear()
        self._known.update((id(each), self._rows[each]) for each in loads)
        self._held.extend(loads)


@lru_cache(maxsize=_N_KEPT)
def _carried(phasors: Same[CasePhasors]) -> _Carried:
    return _Carried(phasors.value)


def load_current(
    phasors: CasePhasors, loads: Sequence[SlotLoad]
) -> NDArray[np.complex128]:
    """(c,) complex sum of shares of circuit conductors. [A]"""
    current: NDArray[np.complex128] = _load_currents(phasors, [loads])[:, 0]
    return current


def _load_currents(
    phasors: CasePhasors, loads: Sequence[Sequence[SlotLoad]]
) -> NDArray[np.complex128]:
    """(c, m) complex sums of the m sequences of loads. [A]"""
    currents = np.zeros((len(loads), len(phasors.components)), np.complex128)
    rows = {key: row for row, key in enumerate(phasors.values)}
    places: list[int] = []
    found: list[int] = []
    shares: list[float] = []
    for place, together in enumerate(loads):
        for load in together:
            row = rows.get((load.circuit, load.label))
            if row is not None:
                places.append(place)
                found.append(row)
                shares.append(load.share)
    if not found:
        return currents.T
    phasor_rows = np.array(list(phasors.values.values()))
    terms = phasor_rows[found] * np.array(shares)[:, np.newaxis]
    filled, starts = np.unique(places, return_index=True)
    currents[filled] = np.add.reduceat(terms, starts, axis=0)
    return currents.T


def _order(component: Component) -> tuple[float, float, str]:
    return component.frequency, component.base, component.group


def _components(
    flowing: Mapping[str, tuple[Circuit, CircuitCurrents]],
) -> tuple[dict[tuple[str, float], Component], list[AngleNote]]:
    """The component of each circuit at each of its frequencies, and what is unknown."""
    present = [
        (circuit, frequency)
        for circuit, currents in flowing.values()
        for frequency in dict.fromkeys(f for (_, f), x in currents.values.items() if x)
    ]
    n_alternating = sum(frequency > 0 for _, frequency in present)
    of_base: dict[float, set[str]] = {}
    bases_at: dict[float, set[float]] = {}
    for circuit, frequency in present:
        base = frequency_key(circuit.base_frequency)
        if frequency > 0:
            of_base.setdefault(base, set()).add(circuit.id)
            bases_at.setdefault(frequency, set()).add(base)
    components: dict[tuple[str, float], Component] = {}
    notes: list[AngleNote] = []
    shifted: dict[str, None] = {}
    for circuit, frequency in present:
        base = frequency_key(circuit.base_frequency) if frequency > 0 else 0.0
        group = ""
        if frequency in flowing[circuit.id][1].unknown and n_alternating > 1:
            group = f"{circuit.id}{_AT}{frequency:.10g} Hz"
        elif (
            frequency > 0
            and circuit.phase_relation == "unknown"
            and len(of_base[base]) > 1
        ):
            group = circuit.id
            shifted[circuit.id] = None
        components[circuit.id, frequency] = Component(frequency, base, group)
        if frequency > 0 and len(bases_at[frequency]) > 1:
            notes.append(AngleNote("other base", circuit.id, frequency))
    return components, [AngleNote("relation unknown", x) for x in shifted] + notes


def _values(
    flowing: Mapping[str, tuple[Circuit, CircuitCurrents]],
    components: Mapping[tuple[str, float], Component],
    ordered: Sequence[Component],
    case: LoadCase,
) -> dict[_Key, NDArray[np.complex128]]:
    """The phasors by conductor, as read-only rows of one array."""
    place = {component: index for index, component in enumerate(ordered)}
    columns = {key: place[component] for key, component in components.items()}
    rows: dict[_Key, int] = {}
    at_rows: list[int] = []
    at_columns: list[int] = []
    phasors: list[complex] = []
    for circuit_id, (_, currents) in flowing.items():
        for (label, frequency), value in currents.values.items():
            if value:
                at_rows.append(rows.setdefault((circuit_id, label), len(rows)))
                at_columns.append(columns[circuit_id, frequency])
                phasors.append(value)
    if len(rows) * len(ordered) > MOST_VALUES:
        raise UserError(
            f"Load case “{case.title}”: {len(ordered)} groups of currents in "
            f"{len(rows)} conductors do not add as phasors, which is more than can be "
            "calculated; enter the offsets of harmonics or mark phase relations as "
            "known."
        )
    table = np.zeros((len(rows), len(ordered)), np.complex128)
    table[at_rows, at_columns] = phasors
    table.flags.writeable = False
    return {key: table[row] for key, row in rows.items()}
