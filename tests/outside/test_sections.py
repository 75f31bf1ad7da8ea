"""Bars and cables of finite section against area integrals of the 2-D kernel.

An infinite straight conductor with even current density J has
B = µ₀ J/2π ∬ ẑ × (p − q)/|p − q|² dA (textbook; Griffiths, sec. 5.2 and 5.3).
scipy integrates it. The engine promises 0.1 % of the resultant of the closed group.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import dblquad

from engine.runs import Bar, Round
from engine.validation.shapes import BALANCED, conductor, long_wires, phasors

MU0 = 4e-7 * math.pi

#: The engine's own bound for filaments that stand in for a section.
PROMISED = 1e-3


def bar_field(
    width: float, thickness: float, x: float, y: float
) -> NDArray[np.float64]:
    """Field of 1 A in a bar with its width along x, by area quadrature. [T]"""

    def component(sign: float, axis: int) -> float:
        def kernel(v: float, u: float) -> float:
            r = (x - u, y - v)
            return sign * r[axis] / (r[0] ** 2 + r[1] ** 2)

        value, _ = dblquad(
            kernel, -width / 2, width / 2, -thickness / 2, thickness / 2,
            epsabs=1e-12, epsrel=1e-9,
        )  # fmt: skip
        return float(MU0 / (2 * math.pi) * value / (width * thickness))

    return np.array([component(-1.0, 1), component(1.0, 0), 0.0])


@pytest.mark.parametrize("angle", [0, 20, 45, 70, 90])
@pytest.mark.parametrize("distance", [0.08, 0.15, 0.3, 1.0])
def test_rectangular_bar_equals_area_integral(distance: float, angle: float) -> None:
    x = distance * math.cos(math.radians(angle))
    y = distance * math.sin(math.radians(angle))
    field = phasors(
        long_wires([(0, 0)], Bar(width=0.1, thickness=0.01)), [1.0], (x, y, 0.0)
    )[0].real
    expected = bar_field(0.1, 0.01, x, y)
    assert np.linalg.norm(field - expected) < PROMISED * np.linalg.norm(expected)


@pytest.mark.parametrize("distance", [0.12, 0.3, 0.6, 2.0])
@pytest.mark.parametrize("seen", ["edge-on", "face-on", "askew"])
def test_three_bars_on_edge_equal_area_integrals_after_cancellation(
    distance: float, seen: str
) -> None:
    # Bars on edge at 0.1 m pitch: width along the direction across the row. Above the
    # row the bars are seen edge-on, beside it face-on.
    pitch = 0.1
    bars = [
        conductor(
            str(i), [(x, 0, -1e5), (x, 0, 1e5)], Bar(width=0.1, thickness=0.01),
            across=(0, 1, 0),
        )
        for i, x in enumerate((-pitch, 0.0, pitch))
    ]  # fmt: skip
    x, y = {
        "edge-on": (0.0, distance),
        "face-on": (pitch + distance, 0.0),
        "askew": (0.8 * distance, 0.6 * distance),
    }[seen]
    field = phasors(bars, BALANCED, (x, y, 0.0))[0]
    expected = np.zeros(3, complex)
    for place, current in zip((-pitch, 0.0, pitch), BALANCED, strict=True):
        # The integral has its width along x: look from the bar's own axes.
        turned = bar_field(0.1, 0.01, y, -(x - place))
        expected += current * np.array([-turned[1], turned[0], 0.0])
    size = np.sqrt(np.sum(np.abs(expected) ** 2))
    assert np.sqrt(np.sum(np.abs(field - expected) ** 2)) < PROMISED * size


def test_round_conductor_is_its_axis_from_outside() -> None:
    # Ampère: outside a round conductor with even current only its axis counts.
    thick = phasors(long_wires([(0, 0)], Round(diameter=0.1)), [1.0], (0.06, 0.02, 0))
    thin = phasors(long_wires([(0, 0)]), [1.0], (0.06, 0.02, 0))
    # The bound of the engine, not of the law.
    np.testing.assert_allclose(thick, thin, rtol=0, atol=PROMISED * np.abs(thin).max())


def test_strip_far_away_is_a_filament() -> None:
    strip = phasors(
        long_wires([(0, 0)], Bar(width=0.1, thickness=1e-5)), [1.0], (10.0, 0, 0)
    )
    assert strip[0, 1].real == pytest.approx(2e-8, rel=1e-4)  # (width/r)²/12
