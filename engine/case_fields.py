"""The field of all load cases at once: geometry computed once, currents many times."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from engine import field
from engine.circuits import LoadCase
from engine.conductor import Conductor
from engine.currents import CasePhasors, Component, conductor_currents
from engine.errors import Cancelled, stop_if
from engine.masks import Keepout, masked

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Bools = NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class CaseCurrents:
    """One load case: its currents along the conductors, and what is closed in it.

    Attributes
    ----------
    components : c components
        Those in which any current flows.
    currents : (c, m) complex
        RMS phasors along the m conductors. [A]
    phasors : CasePhasors
        Of the circuits, the same components.
    closed
        Enclosures that nobody can be in.
    """

    case: LoadCase
    components: tuple[Component, ...]
    currents: Complexes
    phasors: CasePhasors
    closed: tuple[Keepout, ...]

    @property
    def frequencies(self) -> tuple[float, ...]:
        """Where any current flows, each once, rising. [Hz]"""
        return tuple(sorted({c.frequency for c in self.components}))


def case_currents(
    phasors: CasePhasors,
    conductors: Sequence[Conductor],
    closed: tuple[Keepout, ...],
) -> CaseCurrents:
    """A load case without the components in which nothing flows in any conductor."""
    currents = conductor_currents(phasors, conductors)
    flowing = np.flatnonzero(np.any(currents != 0, axis=1))
    components = tuple(phasors.components[k] for k in flowing)
    values = {key: value[flowing] for key, value in phasors.values.items()}
    kept = replace(phasors, components=components, values=values)
    return CaseCurrents(phasors.case, components, currents[flowing], kept, closed)


@dataclass(frozen=True, eq=False)
class CaseFields:
    """The conductors of a layout with the currents of its load cases."""

    conductors: tuple[Conductor, ...]
    cases: tuple[CaseCurrents, ...]
    cache: field.ResponseCache | None = None
    cancelled: Cancelled | None = None

    def flux_densities(
        self, points: Floats, *, keep: bool = False
    ) -> tuple[Complexes, ...]:
        """Field of every case at the same points.

        Parameters
        ----------
        points : (n, 3) float
            [m]
        keep : bool
            Whether the responses are worth remembering.

        Returns
        -------
        tuple of (c, n, 3) complex
            RMS phasors, by case. [T]
        """
        stop_if(self.cancelled)
        currents = np.concatenate([case.currents for case in self.cases])
        b = self._flux_density(currents, points, self.cache if keep else None)
        ends = np.cumsum([len(case.components) for case in self.cases])
        return tuple(np.split(b, ends[:-1]))

    def flux_density(self, case: CaseCurrents, points: Floats) -> Complexes:
        """(c, n, 3) RMS phasors of one case. [T]"""
        stop_if(self.cancelled)
        return self._flux_density(case.currents, points, None)

    def _flux_density(
        self, currents: Complexes, points: Floats, cache: field.ResponseCache | None
    ) -> Complexes:
        if not len(self.conductors) or not len(currents) or not len(points):
            return np.zeros((len(currents), len(points), 3), np.complex128)
        return field.flux_density(
            self.conductors, currents, points, cache=cache, cancelled=self.cancelled
        )

    def masked(self, case: CaseCurrents, points: Floats, clearance: float) -> Bools:
        """(n,) whether nobody is at a point in this case."""
        return masked(self.conductors, case.closed, points, clearance)

    def distances(self, points: Floats) -> Floats:
        """(n,) to the nearest conductor's surface. [m]"""
        if not len(self.conductors):
            return np.full(len(points), np.inf)
        return field.surface_distance(self.conductors, points)
