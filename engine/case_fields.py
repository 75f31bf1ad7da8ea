"""The field of all load cases at once: geometry computed once, currents many times."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from dataclasses import field as dataclass_field

import numpy as np
from numpy.typing import NDArray

from engine import field
from engine.circuits import LoadCase
from engine.conductor import Conductor
from engine.currents import CasePhasors, Component, conductor_currents
from engine.errors import Cancelled, stop_if
from engine.items import Point3
from engine.masks import Keepout, distances_to, masked_at

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
class Seen:
    """What geometry says of one place.

    Attributes
    ----------
    responses : (m, 3) float
        Of the conductors. [T/A]
    distance : float
        To the nearest conductor's surface. [m]
    near : bool
        Nearer than two bar widths or diameters.
    """

    responses: Floats
    distance: float
    near: bool


def _places(points: Floats) -> list[Point3]:
    return [(float(x), float(y), float(z)) for x, y, z in points]


@dataclass(frozen=True, eq=False)
class CaseFields:
    """The conductors of a layout with the currents of its load cases."""

    conductors: tuple[Conductor, ...]
    cases: tuple[CaseCurrents, ...]
    cache: field.ResponseCache | None = None
    cancelled: Cancelled | None = None
    _seen: dict[Point3, Seen] = dataclass_field(default_factory=dict, init=False)

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

    def _flux_density(
        self, currents: Complexes, points: Floats, cache: field.ResponseCache | None
    ) -> Complexes:
        if not len(self.conductors) or not len(currents) or not len(points):
            return np.zeros((len(currents), len(points), 3), np.complex128)
        return field.flux_density(
            self.conductors, currents, points, cache=cache, cancelled=self.cancelled
        )

    def look_at(self, points: Floats) -> None:
        """Remember all about a few places at once, (n, 3) points [m], for `at`."""
        places = {place: None for place in _places(points) if place not in self._seen}
        if not places:
            return
        stop_if(self.cancelled)
        fresh = np.array(list(places), np.float64)
        n, m = len(fresh), len(self.conductors)
        responses, near = np.zeros((m, n, 3)), np.zeros(n, bool)
        if m:
            responses = field.responses(
                self.conductors, fresh, cancelled=self.cancelled
            )
            near = field.near_field(self.conductors, fresh)
        distances = self.distances(fresh)
        for k, place in enumerate(places):
            self._seen[place] = Seen(
                responses[:, k], float(distances[k]), bool(near[k])
            )

    def at(self, place: Point3) -> Seen:
        """What is known of a place."""
        if place not in self._seen:
            self.look_at(np.array([place], np.float64))
        return self._seen[place]

    def flux_density_at(self, case: CaseCurrents, points: Floats) -> Complexes:
        """(c, n, 3) RMS phasors of one case at a few places. [T]"""
        self.look_at(points)
        responses = [self.at(place).responses for place in _places(points)]
        b: Complexes = np.einsum("cm,nmx->cnx", case.currents, np.array(responses))
        return b

    def masked_at(self, case: CaseCurrents, points: Floats, clearance: float) -> Bools:
        """(n,) whether nobody is at a few places in this case."""
        self.look_at(points)
        distances = np.array([self.at(place).distance for place in _places(points)])
        return masked_at(distances, case.closed, points, clearance)

    def masked(self, points: Floats, clearance: float) -> tuple[Bools, ...]:
        """(n,) whether nobody is at a point, by case."""
        distances = self.distances(points)
        return tuple(
            masked_at(distances, case.closed, points, clearance) for case in self.cases
        )

    def distances(self, points: Floats) -> Floats:
        """(n,) to the nearest conductor's surface. [m]"""
        return distances_to(self.conductors, points)
