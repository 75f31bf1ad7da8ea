"""Currents against formulas written out by hand.

Sources: the power relations S = √3 U I (three phases), S = U I (one phase) and P = U I
(direct current) are common practice; symmetrical components from the definition in
C. L. Fortescue, "Method of symmetrical co-ordinates applied to the solution of
polyphase networks", Trans. AIEE 37, 1918 (written from memory); the three-fold
triplen harmonic in the neutral is common practice, shown here on the time function.
"""

from __future__ import annotations

import cmath
import math

import numpy as np
import pytest

from engine.circuits import (
    BalancedCurrent,
    Circuit,
    ConductorCurrent,
    DirectCurrents,
    Power,
    SpectrumLine,
    Unbalance,
)
from engine.currents import circuit_phasors

A = cmath.exp(2j * math.pi / 3)


def test_apparent_power_of_three_phases() -> None:
    """1000 kVA at 400 V: I = S / (√3 U), 1443 A (common practice)."""
    demand = Power(apparent=1000e3, cos_phi=0.8)
    found = circuit_phasors(Circuit(id="a", voltage=400, demand=demand))
    assert abs(found["L1", 50]) == pytest.approx(1000e3 / (math.sqrt(3) * 400))
    assert abs(found["L1", 50]) == pytest.approx(1443.4, abs=0.05)
    assert cmath.phase(found["L1", 50]) == pytest.approx(-math.acos(0.8))


def test_active_power_of_three_phases_is_what_voltage_and_current_give() -> None:
    """P = Σ Re(U I*) and Q = Σ Im(U I*) > 0 for a lagging load (common practice)."""
    voltage, active, cos_phi = 480.0, 150e3, 0.85
    demand = Power(active=active, cos_phi=cos_phi)
    found = circuit_phasors(
        Circuit(id="a", base_frequency=60, voltage=voltage, demand=demand)
    )
    line_to_neutral = voltage / math.sqrt(3)
    power = sum(
        line_to_neutral * turn * found[label, 60].conjugate()
        for label, turn in (("L1", 1), ("L2", A**2), ("L3", A))
    )
    assert power.real == pytest.approx(active)
    assert power.imag == pytest.approx(active * math.tan(math.acos(cos_phi)))


def test_unbalance_does_not_change_the_power_at_balanced_voltages() -> None:
    """Only the positive sequence meets a positive-sequence voltage (Fortescue)."""
    unbalance = Unbalance(negative_ratio=0.2, negative_angle=50, zero_ratio=0.1)
    demand = Power(active=90e3, cos_phi=0.9, unbalance=unbalance)
    found = circuit_phasors(Circuit(id="a", voltage=400, demand=demand))
    power = sum(
        400 / math.sqrt(3) * turn * found[label, 50].conjugate()
        for label, turn in (("L1", 1), ("L2", A**2), ("L3", A))
    )
    assert power.real == pytest.approx(90e3)


def test_power_of_one_phase() -> None:
    """11.5 kVA at 230 V: 50 A; 9.2 kW at cos φ 0.8: 50 A (common practice)."""
    for demand in (Power(apparent=11.5e3), Power(active=9.2e3, cos_phi=0.8)):
        circuit = Circuit(id="a", supply="single-phase", voltage=230, demand=demand)
        assert abs(circuit_phasors(circuit)["L1", 50]) == pytest.approx(50)


def test_power_of_direct_current() -> None:
    """24 kW at 480 V: 50 A, and back by the other pole (common practice)."""
    for demand in (Power(active=24e3), Power(apparent=24e3)):
        circuit = Circuit(
            id="a", supply="dc", base_frequency=0, voltage=480, demand=demand
        )
        assert circuit_phasors(circuit) == {("L+", 0): 50, ("L-", 0): -50}


def test_unbalance_gives_back_its_symmetrical_components() -> None:
    """I+ = (I1 + a I2 + a² I3)/3, I− with a and a² exchanged, I0 = Σ/3 (Fortescue)."""
    unbalance = Unbalance(
        negative_ratio=0.12, negative_angle=35, zero_ratio=0.07, zero_angle=-80
    )
    demand = BalancedCurrent(rms=300, cos_phi=0.9, unbalance=unbalance)
    found = circuit_phasors(Circuit(id="a", demand=demand))
    l1, l2, l3 = (found[label, 50] for label in ("L1", "L2", "L3"))
    positive = (l1 + A * l2 + A**2 * l3) / 3
    negative = (l1 + A**2 * l2 + A * l3) / 3
    zero = (l1 + l2 + l3) / 3
    assert positive == pytest.approx(cmath.rect(300, -math.acos(0.9)))
    assert negative / positive == pytest.approx(cmath.rect(0.12, math.radians(35)))
    assert zero / positive == pytest.approx(cmath.rect(0.07, math.radians(-80)))
    assert found["N", 50] == pytest.approx(-3 * zero)


def test_neutral_of_unequal_lines_in_phase_with_their_voltages() -> None:
    """|N|² = Σ I² − I1 I2 − I2 I3 − I3 I1 (common practice)."""
    rms = (120.0, 75.0, 40.0)
    angles = (0.0, -120.0, 120.0)
    currents = tuple(
        ConductorCurrent(label=label, rms=i, angle=angle)
        for label, i, angle in zip(("L1", "L2", "L3"), rms, angles, strict=True)
    )
    circuit = Circuit(id="a", demand=DirectCurrents(currents=currents))
    i1, i2, i3 = rms
    squared = i1**2 + i2**2 + i3**2 - i1 * i2 - i2 * i3 - i3 * i1
    assert abs(circuit_phasors(circuit)["N", 50]) == pytest.approx(math.sqrt(squared))


@pytest.mark.parametrize("order", [2, 3, 5, 7, 9, 11, 13, 15])
def test_harmonics_are_one_wave_shifted_by_thirds_of_a_period(order: int) -> None:
    """i2(t) = i1(t − T/3), i3(t) = i1(t + T/3), sampled over a period."""
    spectrum = (SpectrumLine(frequency=50.0 * order, ratio=0.3, offset=25),)
    demand = BalancedCurrent(rms=100, cos_phi=0.9)
    found = circuit_phasors(Circuit(id="a", demand=demand, spectrum=spectrum))
    period = 0.02
    t = np.linspace(0, period, 601)

    def wave(label: str, shift: float) -> np.ndarray:
        return sum(
            math.sqrt(2)
            * np.real(found[label, f] * np.exp(2j * np.pi * f * (t - shift)))
            for f in (50.0, 50.0 * order)
        )

    assert wave("L2", 0) == pytest.approx(wave("L1", period / 3), abs=1e-9)
    assert wave("L3", 0) == pytest.approx(wave("L1", -period / 3), abs=1e-9)
    lines = wave("L1", 0) + wave("L2", 0) + wave("L3", 0)
    assert wave("N", 0) == pytest.approx(-lines, abs=1e-9)
    triplen = 90.0 if order % 3 == 0 else 0.0
    assert abs(found["N", 50.0 * order]) == pytest.approx(triplen, abs=1e-9)
