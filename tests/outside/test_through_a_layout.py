"""Published values through a whole layout: circuit, run, load case, conductors, field.

Source: UK electricity network operators, public information pages (emfs.info), as
checks B1 and B3 of `engine.validation`; tolerance one unit of the last printed digit.
"""

from __future__ import annotations

import numpy as np
import pytest

from engine.circuits import (
    BalancedCurrent,
    Circuit,
    ConductorCurrent,
    DirectCurrents,
)
from engine.conductors import conductors
from engine.currents import case_phasors, conductor_currents
from engine.field import combined, flux_density
from engine.layout import Layout
from engine.runs import CircuitShare, Flat, Round, Run

#: Longest coordinate of a layout: stands in for an infinite line. [m]
FAR = 1e5


def line(circuit: Circuit, order: tuple[str, ...], pitch: float, z: float) -> Layout:
    """A flat line along y at height z, the ground at z = 0."""
    run = Run(
        id="line",
        route=((0.0, -FAR, z), (0.0, FAR, z)),
        section=Flat(
            circuits=(CircuitShare(circuit=circuit.id),),
            order=order,
            pitch=pitch,
            shape=Round(diameter=0.01),
        ),
    )
    return Layout(circuits=(circuit,), runs=(run,))


@pytest.mark.parametrize(
    ("x", "published", "tolerance"),
    # First value: geometry printed rounded, 0.4 %.
    [(0, 3.744, 0.015), (10, 0.668, 0.001), (25, 0.124, 0.001), (50, 0.032, 0.001)],
)
def test_wood_pole_line_of_200_amperes_as_a_layout(
    x: float, published: float, tolerance: float
) -> None:
    circuit = Circuit(
        id="line-circuit",
        supply="three-phase three-wire",
        neutral="none",
        demand=BalancedCurrent(rms=200.0),
    )
    layout = line(circuit, ("L1", "L2", "L3"), 1.15, 5.5)
    made = conductors(layout)
    phasors = case_phasors(layout, layout.cases[0])
    point = np.array([[x, 0.0, 1.0]])
    b = flux_density(made, conductor_currents(phasors, made), point)
    found = combined(b, phasors.components)
    assert found.total_ac is not None
    assert found.total_ac[0] * 1e6 == pytest.approx(published, abs=tolerance)
    assert found.dc is None


@pytest.mark.parametrize(("x", "published"), [(0, 49.23), (5, 6.91), (10, 1.92)])
def test_buried_dc_pair_of_2000_amperes_as_a_layout(x: float, published: float) -> None:
    circuit = Circuit(
        id="link",
        supply="dc",
        base_frequency=0.0,
        demand=DirectCurrents(currents=(ConductorCurrent(label="L+", rms=2000.0),)),
    )
    layout = line(circuit, ("L+", "L-"), 0.5, -1.0)
    made = conductors(layout)
    phasors = case_phasors(layout, layout.cases[0])
    point = np.array([[x, 0.0, 1.0]])
    b = flux_density(made, conductor_currents(phasors, made), point)
    found = combined(b, phasors.components)
    assert found.dc is not None
    assert found.dc[0] * 1e6 == pytest.approx(published, abs=0.01)
    assert found.total_ac is None
