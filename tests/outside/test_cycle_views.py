"""The field over one period against closed forms.

A single current gives a field along a line; a distant balanced trefoil a circle, whose
semi-major axis is 1/√2 of the resultant (common practice; FSM/FAMES 2023 as the source
of the far-field law). The peak of two frequencies is that of a sum of sines.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from long_lines import direct, flat, loaded, three_phase, trefoil
from msgspec.structs import replace

from engine.circuits import SpectrumLine
from engine.cycle_view import cycle_view


def view(circuits, runs, at):
    found = loaded(circuits, runs)
    return cycle_view(found.fields, found.fields.cases[0], at)


def test_single_current_draws_a_line_with_its_peak_root_two_higher():
    seen = view([direct("c", a=10.0)], [flat("c", order=("a",))], (2.0, 0.0, 0.0))
    (drawn,) = seen.ellipses
    assert drawn.semi_major == pytest.approx(1e-6)
    assert drawn.semi_minor == pytest.approx(0.0, abs=1e-18)
    assert np.abs(drawn.axes[0]) == pytest.approx([0, 0, 1])
    assert not drawn.normal.any()
    assert seen.is_waveform
    (wave,) = seen.waves
    assert wave.period == pytest.approx(0.02)
    assert wave.peak == pytest.approx(math.sqrt(2) * 1e-6)
    assert seen.peak == pytest.approx(wave.peak)
    assert np.sqrt(np.mean(wave.magnitudes**2)) == pytest.approx(seen.rms)
    # The current is at its own crest at t = 0.
    assert min(wave.peak_time % 0.01, 0.01 - wave.peak_time % 0.01) < 1e-7


def test_distant_trefoil_draws_a_circle_of_0_7071_resultants():
    seen = view([three_phase("c")], [trefoil("c", 0.05)], (0.0, 0.0, 100.0))
    (drawn,) = seen.ellipses
    # The circle is a limit: pitch over distance.
    assert drawn.semi_major / seen.rms == pytest.approx(1 / math.sqrt(2), abs=5e-4)
    assert drawn.semi_minor / drawn.semi_major == pytest.approx(1, abs=2e-3)
    assert np.abs(drawn.normal) == pytest.approx([0, 1, 0], abs=1e-9)
    assert seen.peak == pytest.approx(math.sqrt(2) * drawn.semi_major)
    assert sorted(round(abs(c.current)) for c in seen.currents) == [100, 100, 100]


def with_third(offset, **fields):
    circuit = direct("c", a=10.0, **fields)
    line = SpectrumLine(frequency=150.0, ratio=0.5, offset=offset)
    return replace(circuit, spectrum=(line,))


def test_third_harmonic_in_step_adds_its_crest():
    seen = view([with_third(0.0)], [flat("c", order=("a",))], (2.0, 0.0, 0.0))
    assert seen.is_waveform
    assert seen.waves[0].peak == pytest.approx(1.5 * math.sqrt(2) * 1e-6)
    assert seen.rms == pytest.approx(math.hypot(1, 0.5) * 1e-6)


def test_third_harmonic_opposed_has_its_crest_elsewhere():
    seen = view([with_third(180.0)], [flat("c", order=("a",))], (2.0, 0.0, 0.0))
    t = np.linspace(0, 2 * np.pi, 200_001)
    crest = np.max(np.abs(np.cos(t) - 0.5 * np.cos(3 * t)))
    assert seen.waves[0].peak == pytest.approx(crest * math.sqrt(2) * 1e-6, rel=1e-8)
    assert seen.peak == pytest.approx(seen.waves[0].peak, rel=1e-8)


def test_unknown_angle_gives_parts_and_a_named_bound_instead_of_a_waveform():
    seen = view([with_third(None)], [flat("c", order=("a",))], (2.0, 0.0, 0.0))
    assert not seen.is_waveform
    assert len(seen.waves) == 2
    assert "unknown" in seen.peak_reason
    assert seen.peak == pytest.approx(1.5 * math.sqrt(2) * 1e-6)
