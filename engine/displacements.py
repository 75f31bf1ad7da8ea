"""What small moves of conductors, and of the place itself, do to the field there."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from engine import field
from engine.case_fields import CaseCurrents, CaseFields
from engine.errors import stop_if
from engine.items import Point3
from engine.layout import Layout
from engine.moved_conductors import Moved, has_middle_line, respaced, shifted

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

_AXES = "xyz"


@dataclass(frozen=True)
class Move:
    """One thing that is moved by its standard tolerance.

    `item` is the id of a run or equipment; None: the place where the field is taken.
    """

    input: Literal["section pitch", "position", "place"]
    item: str | None
    axis: str = ""


class Displacements:
    """Changes of the field when conductors or the place move.

    Parameters
    ----------
    layout : Layout
        Its runs and equipment are moved one by one, by the tolerances of its settings.
    fields : CaseFields
        Of the layout.
    """

    def __init__(self, layout: Layout, fields: CaseFields) -> None:
        self._fields = fields
        self._tolerances = layout.settings.tolerances
        self.moves = tuple(_moves(layout, fields, self._tolerances.pitch > 0))
        #: By point: (moves, 2, cases' components, 3) changes. [T]
        self._known: dict[Point3, list[Complexes]] = {}
        #: By what moves together: its field where it is, at the points at hand. [T]
        self._before: dict[bytes, Complexes] = {}
        self._starts = np.cumsum([0, *(len(c.components) for c in fields.cases)])

    def look_at(self, points: Floats) -> None:
        """Compute and remember all moves for (n, 3) points. [m]"""
        new = [p for p in dict.fromkeys(_places(points)) if p not in self._known]
        if not new:
            return
        at = np.array(new, np.float64)
        currents = np.concatenate([case.currents for case in self._fields.cases])
        changes = []
        self._before.clear()
        for move in self.moves:
            stop_if(self._fields.cancelled)
            pair = [self._change(move, sign, at, currents) for sign in (1.0, -1.0)]
            changes.append(np.array(pair))
        self._before.clear()
        for k, place in enumerate(new):
            self._known[place] = [change[:, :, k] for change in changes]

    def changes(self, move: Move, case: CaseCurrents, points: Floats) -> Complexes:
        """(2, c, q, 3) changes of one case's field at q points, up and down. [T]"""
        self.look_at(points)
        k = self.moves.index(move)
        index = next(i for i, own in enumerate(self._fields.cases) if own is case)
        rows = slice(self._starts[index], self._starts[index + 1])
        found = [self._known[place][k][:, rows] for place in _places(points)]
        return np.stack(found, axis=2)

    def _change(
        self, move: Move, sign: float, points: Floats, currents: Complexes
    ) -> Complexes:
        """(c, n, 3) change of the field when a thing is moved one way. [T]"""
        parts = self._fields.conductors
        if move.item is None:
            by = sign * self._tolerances.place * _unit(move.axis)
            there = field.responses(parts, np.concatenate([points, points + by]))
            before, after = np.split(there, 2, axis=1)
            change: Complexes = np.einsum("cm,mnx->cnx", currents, after - before)
            return change
        if move.input == "section pitch":
            moved = respaced(parts, move.item, 1.0 + sign * self._tolerances.pitch)
        else:
            by = sign * self._tolerances.position * _unit(move.axis)
            moved = shifted(parts, move.item, by)
        return self._of_moved(moved, points, currents)

    def _of_moved(self, moved: Moved, points: Floats, currents: Complexes) -> Complexes:
        left = [k for k, c in enumerate(moved.conductors) if c is not None]
        new = [c for c in moved.conductors if c is not None]
        own = currents[:, moved.indices]
        after = np.einsum("cm,mnx->cnx", own[:, left], field.responses(new, points))
        key = moved.indices.tobytes()
        if key not in self._before:
            old = [self._fields.conductors[k] for k in moved.indices]
            now = field.responses(old, points)
            self._before[key] = np.einsum("cm,mnx->cnx", own, now)
        change: Complexes = after - self._before[key]
        return change


def _moves(layout: Layout, fields: CaseFields, spaced: bool) -> list[Move]:
    """Everything that can move, each carrying a current in some case."""
    tolerances = layout.settings.tolerances
    currents = np.concatenate([case.currents for case in fields.cases])
    live = np.any(currents != 0, axis=0)
    carrying = {c.item for c, on in zip(fields.conductors, live, strict=True) if on}
    found: list[Move] = []
    for run in layout.runs:
        if run.id in carrying and spaced and has_middle_line(fields.conductors, run.id):
            found.append(Move("section pitch", run.id))
    if tolerances.position > 0:
        found.extend(
            Move("position", item.id, axis)
            for item in (*layout.runs, *layout.equipment)
            if item.id in carrying
            for axis in _AXES
        )
    if tolerances.place > 0:
        found.extend(Move("place", None, axis) for axis in _AXES)
    return found


def _unit(axis: str) -> Floats:
    unit: Floats = np.eye(3)[_AXES.index(axis)]
    return unit


def _places(points: Floats) -> list[Point3]:
    return [(float(x), float(y), float(z)) for x, y, z in points]
