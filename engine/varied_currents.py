"""The field at a place with currents that differ a little: one by one, and at random.

Whatever is varied, the currents of a circuit still sum to zero: a line that carries
more sends it back through the neutral (and in its share through the stray path), or
through the other lines where there is no neutral.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.case_fields import CaseCurrents
from engine.circuits import LINES, RETURNS, STRAY, Circuit, NeutralShare
from engine.levels import is_kind
from engine.places import Tolerances

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

#: Field of 1 A in each label of a circuit at q points, (q, 3). [T/A]
PerLabel = dict[tuple[str, str], Floats]


@dataclass(frozen=True)
class Spread:
    """Standard tolerances of one circuit's currents in one load case.

    `angle` in radians; the others are parts of the current.
    """

    current: float
    angle: float
    unbalance: float
    net_current: float


def spread_of(tolerances: Tolerances, current: float, net_current: float) -> Spread:
    """The tolerances of a circuit; two factors say how far each is measured."""
    return Spread(
        tolerances.current * current,
        float(np.radians(tolerances.angle)) * current,
        tolerances.unbalance * current,
        tolerances.net_current * net_current,
    )


class CircuitAtPlace:
    """One circuit's phasors in a case, and its field per ampere at a place.

    Parameters
    ----------
    per_label
        Labels that are not drawn have no field.
    """

    def __init__(
        self, circuit: Circuit, case: CaseCurrents, per_label: PerLabel, n_points: int
    ) -> None:
        self.circuit = circuit
        own = {
            label: values
            for (id, label), values in case.phasors.values.items()
            if id == circuit.id
        }
        # A neutral that carries nothing as entered carries what varied lines leave.
        drawn = [label for id, label in per_label if id == circuit.id]
        self.labels = list(dict.fromkeys([*own, *drawn]))
        c = len(case.components)
        still = np.zeros(c, np.complex128)
        phasors = [own.get(label, still) for label in self.labels]
        self.phasors = np.array(phasors).reshape(-1, c)
        none = np.zeros((n_points, 3))
        self.responses = np.array(
            [per_label.get((circuit.id, label), none) for label in self.labels]
        ).reshape(-1, n_points, 3)
        frequencies = np.array([x.frequency for x in case.components])
        base = circuit.base_frequency
        #: How much faster than the base each component turns; 0 for direct current.
        self.orders = frequencies / base if base > 0 else np.zeros(c)
        self.has_angle = any(is_kind(x, "AC") for x in frequencies) and base > 0
        lines = LINES[circuit.supply]
        self.lines = [k for k, label in enumerate(self.labels) if label in lines]
        back = RETURNS.get(circuit.supply)
        self.back = self.labels.index(back) if back in self.labels else None
        stray = STRAY in self.labels
        self.stray = self.labels.index(STRAY) if stray else None

    @property
    def shares_lines(self) -> bool:
        """Whether its lines can differ from each other."""
        return len(self.lines) > 1

    def field(self, phasors: Complexes) -> Complexes:
        """(..., c, q, 3) field of (..., labels, c) phasors. [T]"""
        b: Complexes = np.einsum("...lc,lqx->...cqx", phasors, self.responses)
        return b

    def turned(self, angles: Floats) -> Complexes:
        """(..., c) factors of a turn of the base by (...) angles. [rad]"""
        factors: Complexes = np.exp(1j * angles[..., None] * self.orders)
        return factors

    def closed(self, deviations: Complexes) -> Complexes:
        """(..., labels, c) deviations of the lines with what flows back for them."""
        whole = deviations.sum(axis=-2)
        out = deviations.copy()
        if self.back is None:
            out[..., self.lines, :] -= whole[..., None, :] / len(self.lines)
            return out
        share = 0.0
        net = self.circuit.net_current
        if isinstance(net, NeutralShare) and self.stray is not None:
            share = net.share
            out[..., self.stray, :] -= share * whole
        out[..., self.back, :] -= (1.0 - share) * whole
        return out

    def leaving(self, parts: Floats) -> Complexes:
        """(..., labels, c) deviations when (...) parts more net current leave."""
        out = np.zeros((*parts.shape, *self.phasors.shape), np.complex128)
        if self.stray is None:
            return out
        more = parts[..., None] * self.phasors[self.stray]
        out[..., self.stray, :] = more
        if self.back is not None:
            out[..., self.back, :] -= more
        elif self.lines:
            out[..., self.lines, :] -= more[..., None, :] / len(self.lines)
        return out

    def one_by_one(self, spread: Spread) -> Iterator[tuple[str, Complexes]]:
        """Name of what is varied, and the (2 v, c, q, 3) changes of the field.

        First all steps up, then all steps down, each of one standard tolerance; v is
        1, or 2 for each line of an unbalance (in step with it and across it). [T]
        """
        signs = np.array([1.0, -1.0])
        now = self.phasors
        if spread.current:
            yield (
                "current magnitude",
                self.field(signs[:, None, None] * spread.current * now),
            )
        if spread.angle and self.has_angle:
            turns = self.turned(signs * spread.angle) - 1.0
            yield "current angle", self.field(turns[:, None, :] * now)
        if spread.unbalance and self.shares_lines:
            yield "unbalance", self.field(self._unbalances(spread.unbalance))
        if spread.net_current and self.stray is not None:
            yield "net current", self.field(self.leaving(signs * spread.net_current))

    def _unbalances(self, part: float) -> Complexes:
        steps = []
        for sign in (part, -part):
            for k in self.lines:
                in_step = np.zeros_like(self.phasors)
                in_step[k] = sign * self.phasors[k]
                steps.append(in_step)
                if self.has_angle:
                    across = np.zeros_like(self.phasors)
                    turn = self.turned(np.array(sign)) - 1.0
                    across[k] = turn * self.phasors[k]
                    steps.append(across)
        return self.closed(np.array(steps))

    def at_random(
        self, spread: Spread, n: int, random: np.random.Generator
    ) -> Complexes:
        """(n, c, q, 3) fields of currents drawn at random, normally distributed. [T]"""
        common = (1.0 + spread.current * random.standard_normal(n))[:, None] * (
            self.turned(spread.angle * random.standard_normal(n))
        )
        phasors = common[:, None, :] * self.phasors
        if self.shares_lines and spread.unbalance:
            own = np.zeros_like(phasors)
            for k in self.lines:
                size = 1.0 + spread.unbalance * random.standard_normal(n)
                turn = self.turned(spread.unbalance * random.standard_normal(n))
                own[:, k] = phasors[:, k] * (size[:, None] * turn - 1.0)
            phasors = phasors + self.closed(own)
        if spread.net_current and self.stray is not None:
            more = self.leaving(spread.net_current * random.standard_normal(n))
            phasors = phasors + common[:, None, :] * more
        return self.field(phasors)
