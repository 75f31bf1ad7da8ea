"""Level tables against published values; here a user types the levels in.

Sources: ICNIRP 2010, Health Physics 99(6):818-836, reference levels for the general
public and for workers (B in RMS); Council Recommendation 1999/519/EC, annex III.
Percentage and three-height mean: public field survey of the University of Cyprus.
"""

from __future__ import annotations

import numpy as np
import pytest

from engine.case_fields import CaseCurrents
from engine.circuits import ENTERED_CURRENTS
from engine.criteria import LevelRange, LevelRanges, ReferenceLevel
from engine.currents import CasePhasors, Component
from engine.evaluations import Evaluation
from engine.levels import level_at, ratios

MICRO = 1e-6


def published(*rows):
    """Rows of f from, f to, coefficient in µT, exponent."""
    made = tuple(
        LevelRange(f_from=a, f_to=b, coefficient=c * MICRO, exponent=n)
        for a, b, c, n in rows
    )
    return ReferenceLevel(id="published", values=LevelRanges(ranges=made))


ICNIRP_PUBLIC = published(
    (1, 8, 4e4, 2), (8, 25, 5e3, 1), (25, 400, 200, 0), (400, 3000, 8e4, 1),
    (3000, 1e7, 27, 0),
)  # fmt: skip
ICNIRP_OCCUPATIONAL = published(
    (1, 8, 2e5, 2), (8, 25, 2.5e4, 1), (25, 300, 1000, 0), (300, 3000, 3e5, 1),
    (3000, 1e7, 100, 0),
)  # fmt: skip
EC_PUBLIC = published((1, 8, 4e4, 2), (8, 800, 5e3, 1), (800, 150_000, 6.25, 0))

FREQUENCIES = (5, 16.7, 50, 60, 150, 250, 400, 1000)


# Tolerance: half a unit of the last printed digit, 0.03 % of 299.4.
@pytest.mark.parametrize(
    ("level", "values"),
    [
        (ICNIRP_PUBLIC, (1600, 299.4, 200, 200, 200, 200, 200, 80)),
        (EC_PUBLIC, (1600, 299.4, 100, 83.33, 33.33, 20, 12.5, 6.25)),
    ],
)
def test_typed_levels_give_the_published_grid(level, values):
    found = [level_at(level, f) / MICRO for f in FREQUENCIES]
    assert found == pytest.approx(values, rel=3e-4)


def test_occupational_levels_follow_their_ranges():
    # From the table's own formulas: 2e5/25, 1000, 3e5/1000, 100.
    found = [level_at(ICNIRP_OCCUPATIONAL, f) / MICRO for f in (5, 50, 1000, 5000)]
    assert found == pytest.approx([8000, 1000, 300, 100], rel=1e-12)


@pytest.mark.parametrize(
    ("level", "frequency", "left", "right"),
    [
        (ICNIRP_PUBLIC, 8, 4e4 / 64, 5e3 / 8),
        (ICNIRP_PUBLIC, 25, 5e3 / 25, 200),
        (ICNIRP_PUBLIC, 400, 200, 8e4 / 400),
        (ICNIRP_PUBLIC, 3000, 8e4 / 3000, 27),
        (EC_PUBLIC, 800, 5e3 / 800, 6.25),
        (ICNIRP_OCCUPATIONAL, 3000, 3e5 / 3000, 100),
    ],
)
def test_the_stricter_range_counts_at_a_corner(level, frequency, left, right):
    assert level_at(level, frequency) / MICRO == pytest.approx(min(left, right))


def test_the_corner_at_3_khz_is_stricter_than_the_flat_range():
    assert level_at(ICNIRP_PUBLIC, 3000) / MICRO == pytest.approx(26.667, abs=5e-4)
    assert level_at(ICNIRP_PUBLIC, 3000.1) / MICRO == 27


def test_the_sum_rule_adds_the_ratios():
    # ICNIRP 2010 eq. 5 on its own table: 100/200 + 50/200 + 20/80 = 1.
    field = {50.0: 100 * MICRO, 250.0: 50 * MICRO, 1000.0: 20 * MICRO}
    found = ratios(ICNIRP_PUBLIC, {f: np.array([b]) for f, b in field.items()})
    assert found.ac == pytest.approx([1.0], rel=1e-12)


def test_a_published_percentage_of_the_level():
    # 1.237 µT at 51 Hz is 1.2616 % of 1999/519; rounding of the input spans 0.0006.
    found = ratios(EC_PUBLIC, {51.0: np.array([1.237 * MICRO])})
    assert 100 * found.ac[0] == pytest.approx(1.2616, abs=6e-4)


def test_a_published_mean_of_three_heights():
    # 6.195, 6.043 and 1.237 µT at 0.5, 1.0 and 1.5 m: 4.492 µT, one last digit.
    components = (Component(50.0, 50.0),)
    case = CaseCurrents(
        ENTERED_CURRENTS, components, np.zeros((1, 0), complex),
        CasePhasors(ENTERED_CURRENTS, components, {}), (),
    )  # fmt: skip
    b = np.zeros((1, 3, 3), complex)
    b[0, 0, 2], b[0, 1, 0], b[0, 2, 1] = 6.195j, -6.043, 1.237
    mean = Evaluation(case, b * MICRO, np.zeros(3, bool), 3).total("AC")[0]
    assert mean / MICRO == pytest.approx([4.492], abs=5e-4)
