"""Conductors that are their axes and conductors of many filaments, in one tile."""

from __future__ import annotations

import numpy as np

from engine.conductor import Conductor
from engine.field import flux_density, responses
from engine.runs import Bar, Round

POINTS = np.random.default_rng(2).uniform(-0.3, 0.3, (300, 3)) + np.eye(3)[2] / 2


def straight(name: str, y: float, shape: Round | Bar) -> Conductor:
    """Along x, in a group of its own. [m]"""
    axes = np.tile(np.eye(3)[1:], (2, 1, 1))
    path = np.array([[-2.0, y, 0.0], [2.0, y, 0.0]])
    return Conductor(name, name, "c", "run", path, axes, shape, (), name)


def test_each_conductor_adds_what_it_adds_alone() -> None:
    parts = [
        straight("far", 8.0, Round(diameter=0.01)),
        straight("bar", 0.0, Bar(width=0.2, thickness=0.01)),
        straight("further", -9.0, Round(diameter=0.01)),
        straight("other bar", 0.3, Bar(width=0.3, thickness=0.02)),
    ]
    currents = np.array([[1.0, 2.0j, -3.0, 4.0]])
    alone = np.array([responses([part], POINTS)[0] for part in parts])
    together = flux_density(parts, currents, POINTS)[0]
    expected = np.einsum("m,mnx->nx", currents[0], alone)
    np.testing.assert_allclose(
        together, expected, rtol=0, atol=1e-12 * abs(expected).max()
    )
    np.testing.assert_allclose(responses(parts, POINTS), alone, rtol=1e-12, atol=0)
