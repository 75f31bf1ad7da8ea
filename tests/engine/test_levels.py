"""Reference levels over frequency and the ratio of a field to them."""

from __future__ import annotations

import numpy as np
import pytest

from engine.criteria import (
    LevelPoint,
    LevelRange,
    LevelRanges,
    LevelTable,
    ReferenceLevel,
)
from engine.levels import covers, level_at, ratios, what_is_missing


def ranges(*rows, **fields):
    made = tuple(
        LevelRange(f_from=a, f_to=b, coefficient=c, exponent=n) for a, b, c, n in rows
    )
    return ReferenceLevel(id="level", values=LevelRanges(ranges=made), **fields)


def table(*rows, **fields):
    points = tuple(LevelPoint(frequency=f, level=b) for f, b in rows)
    return ReferenceLevel(id="level", values=LevelTable(points=points), **fields)


def test_a_range_holds_at_both_ends_and_nowhere_else():
    level = ranges((10, 100, 2e-3, 1))
    assert level_at(level, 10) == pytest.approx(2e-4)
    assert level_at(level, 100) == pytest.approx(2e-5)
    assert level_at(level, 9.99) is None
    assert level_at(level, 100.01) is None


@pytest.mark.parametrize("order", [1, -1])
def test_the_stricter_value_counts_at_a_shared_corner(order):
    rows = [(10, 50, 3e-4, 0), (50, 100, 1e-4, 0)][::order]
    assert level_at(ranges(*rows), 50) == pytest.approx(1e-4)


def test_a_gap_between_ranges_has_no_value():
    assert level_at(ranges((1, 8, 1e-3, 0), (10, 100, 1e-4, 0)), 9) is None


def test_a_table_is_exact_at_rows_and_straight_on_logarithmic_axes():
    level = table((10, 1e-3), (1000, 1e-5))
    assert level_at(level, 10) == 1e-3
    assert level_at(level, 1000) == 1e-5
    assert level_at(level, 100) == pytest.approx(1e-4, rel=1e-12)
    assert level_at(level, 9) is None
    assert level_at(level, 1001) is None


def test_rows_in_any_order_give_the_same_table():
    level = table((1000, 1e-5), (10, 1e-3), (100, 5e-4))
    assert level_at(level, np.sqrt(1000)) == pytest.approx(np.sqrt(5e-7), rel=1e-12)


def test_two_rows_at_one_frequency_are_a_step_with_the_stricter_value():
    level = table((10, 1e-3), (50, 1e-3), (50, 2e-4), (100, 2e-4))
    assert level_at(level, 50) == 2e-4


def test_direct_current_holds_only_where_a_row_says_so():
    assert level_at(table((10, 1e-3), (100, 1e-4)), 0) is None
    level = table((0, 4e-2), (10, 1e-3), (100, 1e-4))
    assert level_at(level, 0) == 4e-2
    assert level_at(level, 5) is None


def test_a_range_at_0_hz_holds_for_direct_current_alone():
    level = ranges((0, 0, 4e-2, 0), (1, 100, 1e-3, 0))
    assert level_at(level, 0) == 4e-2
    assert level_at(level, 0.5) is None
    assert covers(level, "DC")
    assert not covers(ranges((1, 100, 1e-3, 0)), "DC")


@pytest.mark.parametrize("frequency", [-1.0, float("nan"), float("inf")])
def test_what_is_no_frequency_is_refused(frequency):
    with pytest.raises(ValueError, match="is not a frequency"):
        level_at(ranges((1, 100, 1e-3, 0)), frequency)


def test_a_complete_level_lacks_nothing():
    level = ranges((1, 100, 1e-3, 0), source="Local rule 7", category="workers")
    assert what_is_missing(level) == ()


def test_every_gap_of_a_level_has_its_sentence():
    sentences = what_is_missing(ReferenceLevel(id="mine"))
    assert [word in s for word, s in zip(
        ("source", "category", "values"), sentences, strict=True
    )] == [True] * 3  # fmt: skip
    assert all(s.endswith(".") and "mine" in s for s in sentences)


def test_a_range_from_0_hz_into_ac_is_one_total_and_refused():
    level = ranges((0, 100, 1e-3, 0), source="x", category="workers")
    (sentence,) = what_is_missing(level)
    assert "DC and AC in one total" in sentence
    assert level_at(level, 0) is None
    assert level_at(level, 50) is None


def test_the_ratio_sum_adds_parts_and_the_root_sums_their_squares():
    field = {50.0: np.array([3e-5, 0.0]), 150.0: np.array([2e-5, 1e-5])}
    level = ranges((50, 50, 1e-4, 0), (150, 150, 5e-5, 0))
    assert ratios(level, field).ac == pytest.approx([0.3 + 0.4, 0.2])
    rooted = ranges(
        (50, 50, 1e-4, 0), (150, 150, 5e-5, 0), sum_rule="root sum of squares"
    )
    assert ratios(rooted, field).ac == pytest.approx([0.5, 0.2])


def test_direct_current_is_never_added_to_ac():
    field = {0.0: np.array([3e-2]), 50.0: np.array([5e-5])}
    level = ranges((0, 0, 4e-2, 0), (50, 50, 1e-4, 0))
    found = ratios(level, field)
    assert found.ac == pytest.approx([0.5])
    assert found.dc == pytest.approx([0.75])
    assert found.larger is not None
    assert found.larger[0] == "DC"


def test_a_frequency_without_a_value_forbids_the_ac_comparison_by_name():
    found = ratios(
        ranges((50, 50, 1e-4, 0)), {50.0: np.array([1e-5]), 150.0: np.array([1e-6])}
    )
    assert found.missing == (150.0,)
    assert found.ac is None


def test_a_level_that_says_nothing_of_0_hz_compares_ac_and_names_0_hz():
    found = ratios(
        ranges((1, 400, 1e-4, 0)), {0.0: np.array([1e-3]), 50.0: np.array([1e-5])}
    )
    assert found.not_covered == (0.0,)
    assert found.missing == ()
    assert found.dc is None
    assert found.ac == pytest.approx([0.1])


def test_a_level_that_covers_nothing_that_flows_names_it_all():
    found = ratios(ranges((0, 0, 1e-2, 0)), {50.0: np.array([1e-5])})
    assert found.missing == (50.0,)
    assert found.larger is None
