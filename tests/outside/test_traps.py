"""Places where published figures and programs are known to go wrong.

Empirical formulas for transformers are not tested: the engine has none. Permit
studies by finite elements that differ from theory by 8 to 23 % are no reference, and
neither is a printed table that disagrees with its own geometry.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from engine.field import ellipse, resultant
from engine.validation.shapes import BALANCED, long_wires, phasors

LINE = [(-1.15, 5.5), (0.0, 5.5), (1.15, 5.5)]


def semi_major_share(places: list[tuple[float, float]], x: float, y: float) -> float:
    field = phasors(long_wires(places), BALANCED, (x, y, 0.0))
    return float(ellipse(field).semi_major[0] / resultant(field)[0])


def trefoil(pitch: float) -> list[tuple[float, float]]:
    radius = pitch / math.sqrt(3)
    return [
        (radius * math.cos(math.radians(a)), radius * math.sin(math.radians(a)))
        for a in (90, -30, 210)
    ]


def test_resultant_under_a_line_is_1_1_percent_above_the_semi_major_axis() -> None:
    # Own closed form of parallel filaments; the line of check B1.
    assert 1 / semi_major_share(LINE, 0.0, 1.0) == pytest.approx(1.011, abs=0.0005)


def test_resultant_is_3_percent_above_the_semi_major_axis_at_2_4_spacings() -> None:
    flat = [(-1.0, 0.0), (0.0, 0.0), (1.0, 0.0)]
    assert 1 / semi_major_share(flat, 0.0, 2.4) == pytest.approx(1.03, abs=0.005)


def test_resultant_of_a_distant_trefoil_is_41_percent_above_the_semi_major_axis() -> (
    None
):
    # A circle: √2.
    assert 1 / semi_major_share(trefoil(1.0), 700.0, 700.0) == pytest.approx(
        math.sqrt(2), abs=0.002  # tends to √2 as pitch/distance
    )  # fmt: skip


def test_flat_set_stays_between_0_93_and_1_all_around() -> None:
    flat = [(-1.0, 0.0), (0.0, 0.0), (1.0, 0.0)]
    shares = [
        semi_major_share(flat, r * math.cos(a), r * math.sin(a))
        for r in (1.5, 3.0, 10.0)
        for a in np.radians([0, 30, 60, 90, 150, 270])
    ]
    assert min(shares) == pytest.approx(0.93, abs=0.005)
    assert max(shares) <= 1.0 + 1e-12


def test_a_balanced_trefoil_polarises_in_a_circle_of_both_semi_axes() -> None:
    field = phasors(long_wires(trefoil(0.035)), BALANCED, (0.0, 40.0, 0.0))
    found = ellipse(field)
    total = resultant(field)[0]
    # Pythagoras of the semi-axes is exact, the circle a limit (pitch/distance).
    assert math.hypot(found.semi_major[0], found.semi_minor[0]) == pytest.approx(total)
    assert found.semi_minor[0] / found.semi_major[0] == pytest.approx(1.0, abs=0.005)


def test_resultant_is_rms_and_its_waveform_peaks_root_two_higher() -> None:
    # Check A8: a textbook prints 0.78 µT, the peak of 0.5517 µT RMS.
    pair = long_wires([(-0.5, 6), (0.5, 6)])
    field = phasors(pair, [100, -100], (0.0, 0.0, 0.0))
    instants = np.linspace(0, 2 * math.pi, 721)
    waveform = math.sqrt(2) * np.real(field[0][:, None] * np.exp(1j * instants))
    peak = float(np.sqrt(np.sum(waveform**2, axis=0)).max())
    assert resultant(field)[0] * 1e6 == pytest.approx(0.5517, abs=0.00005)
    assert peak * 1e6 == pytest.approx(0.78, abs=0.005)


def test_clearance_above_ground_is_not_the_height_above_the_evaluation_plane() -> None:
    # B1 is printed for 1 m above ground: taken at the ground it is a third lower.
    wires = long_wires(LINE)
    at_one_metre = resultant(phasors(wires, 200 * BALANCED, (0.0, 1.0, 0.0)))[0]
    at_the_ground = resultant(phasors(wires, 200 * BALANCED, (0.0, 0.0, 0.0)))[0]
    assert at_one_metre * 1e6 == pytest.approx(3.744, rel=0.004)  # geometry rounded
    # Ratio of r²: (4.5/5.5)², distances to the outer conductors included: 0.68.
    assert at_the_ground / at_one_metre == pytest.approx(0.68, abs=0.01)


def test_opposed_circuits_fall_with_one_more_power_of_the_distance() -> None:
    # Two stacked flat sets: alike, they fall with the square of the distance; opposed,
    # with its cube (FSM/FAMES report for the Swiss Federal Office of Energy, 2023).
    places = [(x, y) for y in (0.05, -0.05) for x in (-0.1, 0.0, 0.1)]
    wires = long_wires(places)
    same = np.concatenate((BALANCED, BALANCED))
    opposed = np.concatenate((BALANCED, -BALANCED))

    def ratio(currents: np.ndarray) -> float:
        near, far = ((0.0, 5.0, 0.0), (0.0, 10.0, 0.0))
        return float(
            resultant(phasors(wires, currents, near))[0]
            / resultant(phasors(wires, currents, far))[0]
        )

    assert ratio(same) == pytest.approx(4.0, rel=0.01)  # next order (0.1/5)²
    assert ratio(opposed) == pytest.approx(8.0, rel=0.01)
