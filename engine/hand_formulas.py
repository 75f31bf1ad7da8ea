"""Hand formulas beside a calculated value, where their conditions hold.

Each looks at one run: its conductors that carry current, the straight leg of it that
is nearest, and how far the place is from their middle.

References
----------
.. [1] Ampère's law: B = µ0 I/(2πr) of a long straight current; of a pair with opposed
   currents at r ≫ s, B = µ0 I s/(2πr²).
.. [2] FSM/FAMES for the Swiss Federal Office of Energy, EMF von Stromtechnologien,
   2023: three balanced conductors, B = µ0 I d/(2πr²), d = √((d12² + d23² + d31²)/2);
   0.2·√3·I·s/r² µT flat and 0.2·√1.5·I·s/r² µT in trefoil.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import pi, sqrt

import numpy as np
from numpy.typing import NDArray

from engine.case_fields import CaseCurrents, CaseFields
from engine.conductor import Conductor
from engine.items import Point3
from engine.levels import Kind, is_kind
from engine.units import MU0, flux_density_text, significant

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

#: The straight leg goes on by so many distances to either side (common practice).
LEG_TO_EITHER_SIDE = 4.0
#: Distance in spacings from which the formulas hold within 4 %.
SPACINGS_AWAY = 5.0
#: All that other runs give, at most, as part of the value (our choice).
OTHERS_AT_MOST = 0.2
#: Of magnitudes and sums that should be equal or zero.
_BALANCED_WITHIN = 0.02
#: What a formula leaves out, as part of what it gives.
_LEFT_OUT_AT_MOST = 0.05
#: Currents below this part of the largest do not count as conductors.
_NO_CURRENT = 0.01
_EQUAL_SPACINGS = 0.01


@dataclass(frozen=True)
class HandFormula:
    """A hand formula's value for a run at a place, with its conditions.

    Attributes
    ----------
    run : str
        Id of the item whose conductors it is about.
    name : str
        "flat", "trefoil", "three conductors", "pair" or "net current".
    value, calculated : float
        By the formula; of everything, as calculated. RMS resultant. [T]
    formula : str
    current : float
        RMS over the frequencies. [A]
    spacing : float or None
        Between neighbours; of three unequal ones the d of [2]_; None for one current.
        [m]
    distance : float
        From the middle of the conductors, at right angles to their leg. [m]
    others : float
        What everything else gives here, as part of the calculated value.
    """

    run: str
    name: str
    value: float
    calculated: float
    formula: str
    current: float
    spacing: float | None
    distance: float
    others: float

    @property
    def validity(self) -> str:
        """The conditions that hold, in words."""
        parts = ["straight for at least 4 distances to either side"]
        if self.spacing is not None:
            parts.append("balanced")
            parts.append(f"{significant(self.distance / self.spacing)} spacings away")
        parts.append(f"all else gives {100 * self.others:.0f} % here")
        return "; ".join(parts)

    def sentence(self, unit: str = "µT") -> str:
        """The value beside the calculated one: "flat, long run: 3.9 µT · ..."."""
        hand = flux_density_text(self.value, unit)
        calculated = flux_density_text(self.calculated, unit)
        return f"{self.name}, long run: {hand} · calculated {calculated}"


@dataclass(frozen=True)
class NoHandFormula:
    """Why no hand formula holds for a run here."""

    run: str
    reason: str


def hand_formulas(
    fields: CaseFields, case: CaseCurrents, at: Point3, kind: Kind = "AC"
) -> tuple[HandFormula | NoHandFormula, ...]:
    """For each run with current, the hand formula that holds at a place, or why none.

    Parameters
    ----------
    fields
        Of the layout; `case` is one of its load cases.
    at
        [m]
    """
    rows = [k for k, c in enumerate(case.components) if is_kind(c.frequency, kind)]
    responses = fields.at(at).responses
    currents = case.currents[rows]
    whole = currents @ responses
    total = float(np.linalg.norm(whole))
    frequencies = [case.components[k].frequency for k in rows]
    found: list[HandFormula | NoHandFormula] = []
    of_item: dict[str, list[int]] = {}
    for k, conductor in enumerate(fields.conductors):
        if conductor.role == "run" and np.any(currents[:, k] != 0):
            of_item.setdefault(conductor.item, []).append(k)
    for item, members in of_item.items():
        own = currents[:, members] @ responses[members]
        others = float(np.linalg.norm(whole - own)) / total if total > 0 else 1.0
        if others > OTHERS_AT_MOST:
            reason = f"all else gives {100 * others:.0f} % of the value here"
            found.append(NoHandFormula(item, reason))
            continue
        if len(set(frequencies)) < len(frequencies):
            reason = "some of its currents have no known angle to each other"
            found.append(NoHandFormula(item, reason))
            continue
        parts = [fields.conductors[k] for k in members]
        bundle = _bundle(parts, currents[:, members], np.array(at, np.float64))
        if isinstance(bundle, str):
            found.append(NoHandFormula(item, bundle))
            continue
        law = _law(bundle)
        if isinstance(law, str):
            found.append(NoHandFormula(item, law))
            continue
        found.append(
            HandFormula(item, law.name, law.value, total, law.formula, law.current,
                        law.spacing, bundle.distance, others)
        )  # fmt: skip
    return tuple(found)


@dataclass(frozen=True, eq=False)
class _Bundle:
    """Parallel currents beside a place: (k, 2) places [m], (f, k) currents [A]."""

    places: Floats
    currents: Complexes
    distance: float


@dataclass(frozen=True)
class _Law:
    name: str
    formula: str
    value: float
    current: float
    spacing: float | None


def _bundle(
    conductors: Sequence[Conductor], currents: Complexes, at: Floats
) -> _Bundle | str:
    """The run's leg beside a place as currents in the plane across it."""
    leg = _nearest_leg(conductors[0].path, at)
    starts = np.array([c.path[leg] for c in conductors if leg + 1 < len(c.path)])
    ends = np.array([c.path[leg + 1] for c in conductors if leg + 1 < len(c.path)])
    if len(starts) < len(conductors):
        return "its conductors do not run side by side"
    start, end = np.mean(starts, axis=0), np.mean(ends, axis=0)
    length = float(np.linalg.norm(end - start))
    t = (end - start) / length
    across = _across(t)
    directions = (ends - starts) / np.linalg.norm(ends - starts, axis=1)[:, None]
    if np.any(directions @ t < 1 - 1e-9):
        return "its conductors are not parallel beside the place"
    places = (starts - at) @ across
    merged, together = _by_label(conductors, places, currents)
    if isinstance(merged, str):
        return merged
    distance = float(np.linalg.norm(np.mean(merged, axis=0)))
    foot = float((at - start) @ t)
    if not min(foot, length - foot) >= LEG_TO_EITHER_SIDE * distance:
        return (
            "it is not straight for 4 distances "
            f"({significant(LEG_TO_EITHER_SIDE * distance)} m) to either side"
        )
    if distance == 0:
        return "the place lies in its middle"
    return _Bundle(merged, together, distance)


def _nearest_leg(path: Floats, at: Floats) -> int:
    legs = np.diff(path, axis=0)
    part = np.sum((at - path[:-1]) * legs, axis=1) / np.sum(legs**2, axis=1)
    foot = path[:-1] + np.clip(part, 0.0, 1.0)[:, None] * legs
    return int(np.argmin(np.linalg.norm(foot - at, axis=1)))


def _across(t: Floats) -> Floats:
    """(3, 2) two directions at right angles to t and to each other."""
    first = np.cross(t, np.eye(3)[int(np.argmin(np.abs(t)))])
    first /= np.linalg.norm(first)
    return np.column_stack([first, np.cross(t, first)])


def _by_label(
    conductors: Sequence[Conductor], places: Floats, currents: Complexes
) -> tuple[Floats | str, Complexes]:
    """Conductors that share a circuit's conductor as one, in their middle."""
    groups: dict[tuple[tuple[str, str, bool], ...], list[int]] = {}
    for k, conductor in enumerate(conductors):
        # Go and return of one label stand apart.
        key = tuple(
            sorted(
                (load.circuit, load.label, load.share < 0) for load in conductor.loads
            )
        )
        groups.setdefault(key, []).append(k)
    together = np.stack([currents[:, g].sum(axis=1) for g in groups.values()], axis=1)
    sizes = np.linalg.norm(together, axis=0)
    merged = np.stack([places[g].mean(axis=0) for g in groups.values()])
    kept = sizes > _NO_CURRENT * np.max(sizes, initial=0.0)
    if not np.any(kept):
        return "its currents cancel", together
    spread = max(
        float(np.max(np.linalg.norm(places[g] - merged[i], axis=1)))
        for i, g in enumerate(groups.values())
        if kept[i]
    )
    merged, together = merged[kept], together[:, kept]
    apart = [
        float(np.linalg.norm(merged[i] - merged[j]))
        for i in range(len(merged))
        for j in range(i)
    ]
    if apart and spread > 0.5 * min(apart):
        return "several of its conductors share a current and stand apart", together
    return merged, together


def _law(bundle: _Bundle) -> _Law | str:
    """The formula for the currents of a bundle, or why there is none."""
    net = np.linalg.norm(bundle.currents.sum(axis=1))
    pull = MU0 / (2 * pi * bundle.distance)
    # Moments of the currents about the middle: what falls as 1/r².
    middle = bundle.places - bundle.places.mean(axis=0)
    moment = float(np.linalg.norm(bundle.currents @ middle)) / bundle.distance
    reach = float(np.max(np.linalg.norm(middle, axis=1)))
    if net > 0 and moment <= _LEFT_OUT_AT_MOST * net:
        if bundle.distance < SPACINGS_AWAY * reach:
            return _too_near(2 * reach)
        return _Law("net current", "µ0·I/(2π·r)", float(pull * net), float(net), None)
    if net > _LEFT_OUT_AT_MOST * moment:
        return (
            "its net current and its spacings both matter here; no single formula holds"
        )
    if len(bundle.places) == 2:
        return _pair(bundle, pull)
    if len(bundle.places) == 3:
        return _three(bundle, pull)
    return f"it carries current in {len(bundle.places)} conductors"


def _too_near(spacing: float) -> str:
    least = significant(SPACINGS_AWAY * spacing)
    return f"the place is nearer than 5 spacings ({least} m)"


def _pair(bundle: _Bundle, pull: float) -> _Law | str:
    spacing = float(np.linalg.norm(bundle.places[0] - bundle.places[1]))
    if bundle.distance < SPACINGS_AWAY * spacing:
        return _too_near(spacing)
    current = float(np.linalg.norm(bundle.currents[:, 0]))
    value = pull * current * spacing / bundle.distance
    return _Law("pair", "µ0·I·s/(2π·r²)", value, current, spacing)


def _three(bundle: _Bundle, pull: float) -> _Law | str:
    sides = sorted(
        float(np.linalg.norm(bundle.places[i] - bundle.places[j]))
        for i, j in ((0, 1), (1, 2), (2, 0))
    )
    if bundle.distance < SPACINGS_AWAY * sides[1]:
        return _too_near(sides[1])
    for row in bundle.currents:
        size = float(np.max(np.abs(row)))
        if size > 0 and not _balanced(row, size):
            return "its three currents are not balanced"
    current = float(np.linalg.norm(bundle.currents, axis=0).mean())
    d = sqrt(sum(side**2 for side in sides) / 2)
    name, formula, spacing = "three conductors", "µ0·I·d/(2π·r²)", d
    if sides[2] <= sides[0] * (1 + _EQUAL_SPACINGS):
        name, formula, spacing = "trefoil", "0.2·√1.5·I·s/r² µT", sides[0]
    elif (
        sides[1] <= sides[0] * (1 + _EQUAL_SPACINGS)
        and abs(sides[2] - 2 * sides[0]) <= 2 * _EQUAL_SPACINGS * sides[0]
    ):
        name, formula, spacing = "flat", "0.2·√3·I·s/r² µT", sides[0]
    return _Law(name, formula, pull * current * d / bundle.distance, current, spacing)


def _balanced(row: Complexes, size: float) -> bool:
    """Equal magnitudes a third of a turn apart, in either sequence."""
    sizes = np.abs(row)
    alike = float(np.max(sizes) - np.min(sizes)) <= _BALANCED_WITHIN * size
    remains = float(np.abs(row.sum()))
    return alike and remains <= _BALANCED_WITHIN * size
