"""Resultant, ellipse, cycle, peak and combination of components."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from engine.currents import Component
from engine.field import (
    combined,
    common_frequency,
    cycle,
    ellipse,
    peak,
    resultant,
    worst_semi_major,
)

ROOT2 = np.sqrt(2)
seeds = st.integers(0, 2**32 - 1)
few = settings(max_examples=30, deadline=None)


def phasors(rng: np.random.Generator, *shape: int) -> NDArray[np.complex128]:
    return rng.normal(size=(*shape, 3)) + 1j * rng.normal(size=(*shape, 3))


def ac(*frequencies: float) -> list[Component]:
    return [Component(f, 50.0, "") for f in frequencies]


def test_resultant_counts_both_parts_of_every_axis() -> None:
    assert resultant(np.array([[3 + 4j, 12j, 0]])) == pytest.approx([13.0])


class TestEllipse:
    @pytest.mark.parametrize("turn", [1, 1j, np.exp(1j)])
    def test_field_along_a_line_has_no_minor_axis(self, turn: complex) -> None:
        found = ellipse(np.array([[3e-6, 4e-6, 0]]) * turn)
        assert found.semi_major == pytest.approx([5e-6], rel=1e-14)
        assert found.semi_minor == pytest.approx([0], abs=1e-21)
        assert np.abs(found.axes[0, 0]) == pytest.approx([0.6, 0.8, 0])
        assert found.axes[0, 1].tolist() == [0, 0, 0]

    def test_circular_field_has_equal_axes(self) -> None:
        found = ellipse(np.array([[1e-6, 1e-6j, 0]]))
        assert found.semi_major == pytest.approx([1e-6], rel=1e-14)
        assert found.semi_minor == pytest.approx([1e-6], rel=1e-14)
        major, minor = found.axes[0]
        assert np.linalg.norm(major) == pytest.approx(1)
        assert np.linalg.norm(minor) == pytest.approx(1)
        assert major @ minor == pytest.approx(0, abs=1e-15)
        assert major[2] == minor[2] == 0

    def test_flat_ellipse_by_hand(self) -> None:
        """2 along x in phase, 1 along z in quadrature, turned by any time."""
        found = ellipse(np.array([[2, 0, 1j]]) * np.exp(0.7j))
        assert found.semi_major == pytest.approx([2])
        assert found.semi_minor == pytest.approx([1])
        assert np.abs(found.axes[0]) == pytest.approx(np.array([[1, 0, 0], [0, 0, 1]]))

    def test_no_field_has_no_axes(self) -> None:
        found = ellipse(np.zeros((2, 3), complex))
        assert (found.semi_major == 0).all()
        assert (found.semi_minor == 0).all()
        assert (found.axes == 0).all()

    def test_tiny_field_keeps_its_digits(self) -> None:
        found = ellipse(np.array([[1e-200, 1e-205j, 0]]))
        assert found.semi_major == pytest.approx([1e-200], rel=1e-14)
        assert found.semi_minor == pytest.approx([1e-205], rel=1e-9)

    @few
    @given(seeds)
    def test_axes_are_those_of_the_sampled_cycle(self, seed: int) -> None:
        b = phasors(np.random.default_rng(seed), 4)
        found = ellipse(b)
        assert found.semi_major**2 + found.semi_minor**2 == pytest.approx(
            resultant(b) ** 2
        )
        t = np.exp(2j * np.pi * np.arange(3600) / 3600)[:, None, None]
        path = (b * t).real
        sizes = np.linalg.norm(path, axis=2)
        # A tenth of a degree between samples.
        assert found.semi_major == pytest.approx(sizes.max(axis=0), rel=1e-5)
        assert found.semi_minor == pytest.approx(sizes.min(axis=0), rel=1e-2, abs=1e-3)
        along = np.abs(np.einsum("tnx,nax->tna", path, found.axes)).max(axis=0)
        assert along[:, 0] == pytest.approx(found.semi_major, rel=1e-5)
        assert along[:, 1] == pytest.approx(found.semi_minor, rel=1e-5)


class TestCycle:
    def test_alternating_field_is_root_two_of_its_rms(self) -> None:
        found = cycle(np.array([[1.0 + 0j, 1j, 0]]), ac(50), 4)
        assert found.times == pytest.approx([0, 0.005, 0.01, 0.015])
        expected = ROOT2 * np.array([[1, 0, 0], [0, -1, 0], [-1, 0, 0], [0, 1, 0]])
        assert found.vectors == pytest.approx(expected, abs=1e-15)

    def test_direct_field_is_itself(self) -> None:
        b = np.array([[2.0 + 0j, 0, -1]])
        found = cycle(b, [Component(0.0, 0.0, "")], 3)
        assert found.vectors == pytest.approx(np.tile([2, 0, -1], (3, 1)))
        both = cycle(
            np.concatenate([b, [[1, 0, 0]]]), [Component(0, 0, ""), *ac(50)], 2
        )
        assert both.vectors[0] == pytest.approx([2 + ROOT2, 0, -1])

    def test_traction_and_mains_have_a_common_period(self) -> None:
        assert common_frequency([50.0, 150.0]) == 50.0
        assert common_frequency([16.7, 50.0]) == pytest.approx(0.1)
        assert common_frequency([50 / 3, 50.0]) == pytest.approx(50 / 3)
        assert common_frequency([0.0]) is None
        assert common_frequency([50.0, 50.001]) is None
        assert common_frequency([50.0, 50.0 * np.pi]) is None

    def test_no_common_period_is_refused(self) -> None:
        with pytest.raises(ValueError, match="common period"):
            cycle(np.ones((2, 3), complex), ac(50, 157.0796), 8)


class TestPeak:
    def test_one_frequency_is_root_two_of_the_semi_major_axis(self) -> None:
        b = phasors(np.random.default_rng(1), 1, 5)
        found = peak(b, ac(50))
        assert found.values == pytest.approx(ROOT2 * ellipse(b[0]).semi_major)
        assert not found.is_bound
        assert found.reason == ""

    def test_third_harmonic_raises_or_flattens_the_crest(self) -> None:
        """By hand: cos t ± 0.3 cos 3t; at the crest, or where cos² t = 1.9/3.6."""
        b = np.array([[[1.0, 0, 0]], [[0.3, 0, 0]]], complex)
        assert peak(b, ac(50, 150)).values == pytest.approx([1.3 * ROOT2])
        flat = 1.9 * 2 / 3 * np.sqrt(1.9 / 3.6) * ROOT2
        b[1] *= -1
        assert peak(b, ac(50, 150)).values == pytest.approx([flat])

    def test_direct_field_is_left_out(self) -> None:
        b = np.array([[[7.0, 0, 0]], [[1.0, 0, 0]]], complex)
        both = [Component(0.0, 0.0, ""), *ac(50)]
        assert peak(b, both).values == pytest.approx([ROOT2])
        assert peak(b[:1], both[:1]).values.tolist() == [0]

    @few
    @given(seeds)
    def test_peak_is_that_of_a_finely_sampled_cycle(self, seed: int) -> None:
        rng = np.random.default_rng(seed)
        orders = sorted(rng.choice(np.arange(1, 14), 3, replace=False).tolist())
        b = phasors(rng, 3, 6)
        components = ac(*(50.0 * h for h in orders))
        found = peak(b, components)
        fine = [
            np.linalg.norm(cycle(b[:, i], components, 40_000).vectors, axis=1).max()
            for i in range(6)
        ]
        assert found.values == pytest.approx(fine, rel=1e-6)
        assert not found.is_bound

    @pytest.mark.parametrize(
        ("components", "word"),
        [
            ([Component(50, 50, ""), Component(60, 60, "")], "synchronised"),
            ([Component(50, 50, ""), Component(150, 50, "C2")], "unknown"),
            (ac(50, 157.0796), "period"),
        ],
    )
    def test_unknown_relation_gives_a_named_bound(
        self, components: list[Component], word: str
    ) -> None:
        b = phasors(np.random.default_rng(4), 2, 5)
        found = peak(b, components)
        assert found.is_bound
        assert word in found.reason
        assert found.values == pytest.approx(
            ROOT2 * (ellipse(b[0]).semi_major + ellipse(b[1]).semi_major)
        )

    def test_caller_can_name_an_unknown_offset(self) -> None:
        b = phasors(np.random.default_rng(4), 2, 5)
        found = peak(b, ac(50, 150), unknown_angles="offset of the 3rd unknown")
        assert found.is_bound
        assert found.reason == "offset of the 3rd unknown"
        assert (found.values >= peak(b, ac(50, 150)).values).all()


def worst_by_trial(
    turned: list[tuple[int, NDArray]], still: NDArray, count: int
) -> NDArray:
    """Largest total over a common time shift of `turned` = (order, field), sampled.

    `turned` and `still` pair up by position.
    """
    best = np.zeros(still.shape[1])
    for theta in 2 * np.pi * np.arange(count) / count:
        total = sum(
            resultant(fixed + np.exp(1j * order * theta) * field) ** 2
            for (order, field), fixed in zip(turned, still, strict=True)
        )
        best = np.maximum(best, np.sqrt(total))
    return best


class TestCombined:
    rng = np.random.default_rng(6)
    b = phasors(rng, 4, 8)

    def test_frequencies_add_as_squares_and_direct_stays_apart(self) -> None:
        b = self.b[:3].copy()
        b[0] = b[0].real
        found = combined(b, [Component(0, 0, ""), *ac(50, 150)])
        assert found.dc == pytest.approx(resultant(b[0]))
        assert found.total_ac == pytest.approx(
            np.hypot(resultant(b[1]), resultant(b[2]))
        )
        assert list(found.by_frequency) == [0, 50, 150]
        assert not found.is_bound
        assert found.reason == ""

    def test_direct_currents_alone_have_no_alternating_total(self) -> None:
        found = combined(self.b[:2], [Component(0, 0, ""), Component(0, 0, "C2")])
        assert found.total_ac is None
        assert found.dc == pytest.approx(resultant(self.b[0] + self.b[1]))

    def test_nothing_is_nothing(self) -> None:
        found = combined(np.zeros((0, 3, 3), complex), [])
        assert found.total_ac is None
        assert found.dc is None

    def test_two_sources_are_worst_over_their_angle(self) -> None:
        components = [Component(50, 50, ""), Component(50, 50, "C2")]
        found = combined(self.b[:2], components)
        trial = worst_by_trial([(1, self.b[1])], self.b[:1], 720)
        # Half a degree between the trials.
        assert found.total_ac == pytest.approx(trial, rel=2e-5)
        assert (found.total_ac >= trial * (1 - 1e-12)).all()
        assert found.is_bound
        assert "phase relation" in found.reason

    def test_equal_frequencies_of_two_bases_never_add_as_phasors(self) -> None:
        components = [Component(300, 50, ""), Component(300, 60, "")]
        b = np.array([[[1, 0, 0]], [[-1, 0, 0]]], complex)
        assert combined(b, components).by_frequency[300] == pytest.approx([2])

    def test_three_sources_are_bounded_by_their_sum(self) -> None:
        components = [Component(50, 50, g) for g in ("", "C2", "C3")]
        found = combined(self.b[:3], components)
        assert found.total_ac == pytest.approx(resultant(self.b[:3]).sum(axis=0))
        assert "sum" in found.reason

    @few
    @given(seeds)
    def test_one_shifted_circuit_is_worst_over_one_time_shift(self, seed: int) -> None:
        b = phasors(np.random.default_rng(seed), 4, 8)
        components = [
            Component(50, 50, ""),
            Component(50, 50, "C2"),
            Component(150, 50, ""),
            Component(150, 50, "C2"),
        ]
        found = combined(b, components)
        trial = worst_by_trial([(1, b[1]), (3, b[3])], b[[0, 2]], 3000)
        apart = np.hypot(*found.by_frequency.values())
        assert found.total_ac is not None
        assert (found.total_ac <= apart * (1 + 1e-12)).all()
        # Never below, and above by a thirtieth of a per cent of the products.
        assert (found.total_ac >= trial * (1 - 1e-6)).all()
        assert found.total_ac == pytest.approx(trial, rel=1e-3)
        assert "time shift" in found.reason

    def test_bounded_frequency_keeps_its_bound_beside_a_time_shift(self) -> None:
        b = phasors(np.random.default_rng(8), 7, 4)
        shifted = [Component(f, 50, g) for f in (50, 150) for g in ("", "C2")]
        bounded = [Component(350, 50, g) for g in ("", "C2 @ 350 Hz", "C3 @ 350 Hz")]
        found = combined(b, [*shifted, *bounded])
        alone = combined(b[:4], shifted).total_ac
        assert alone is not None
        assert found.total_ac == pytest.approx(
            np.hypot(alone, resultant(b[4:]).sum(axis=0))
        )

    def test_angles_unknown_one_by_one_are_worst_one_by_one(self) -> None:
        components = [
            Component(150, 50, ""),
            Component(150, 50, "C2 @ 150 Hz"),
            Component(250, 50, ""),
            Component(250, 50, "C2 @ 250 Hz"),
        ]
        found = combined(self.b, components)
        apart = np.hypot(found.by_frequency[150], found.by_frequency[250])
        assert found.total_ac == pytest.approx(apart)
        assert "time shift" not in found.reason

    def test_wrong_shapes_are_refused(self) -> None:
        with pytest.raises(ValueError, match="must be"):
            combined(self.b, ac(50))
        with pytest.raises(ValueError, match="must be"):
            peak(self.b, ac(50))
        with pytest.raises(ValueError, match="must be"):
            cycle(self.b[0], ac(50), 4)


@few
@given(seeds)
def test_two_sources_peak_together_at_the_worst_angle(seed: int) -> None:
    first, second = phasors(np.random.default_rng(seed), 2, 8)
    found = worst_semi_major(first, second)
    angles = np.linspace(0, 2 * np.pi, 2001)[:, None, None]
    trials = ellipse(first + np.exp(1j * angles) * second).semi_major.max(axis=0)
    assert (found >= trials * (1 - 1e-12)).all()
    # What 128 angles may miss is added: half of (π/128)² of the second source.
    apart = 3.1e-4 * ellipse(second).semi_major
    assert (found <= trials * (1 + 2e-6) + apart).all()
    both = ellipse(first).semi_major + ellipse(second).semi_major
    assert (found <= both + apart).all()


def test_two_fields_along_lines_at_right_angles_peak_at_their_hypotenuse() -> None:
    # In phase the sum is a line of length √(3² + 4²); no angle gives more.
    first, second = np.array([[3.0, 0, 0]], complex), np.array([[0, 4.0, 0]], complex)
    assert worst_semi_major(first, second) == pytest.approx([5.0], rel=3e-4)
    assert worst_semi_major(first, 1j * second)[0] >= 5.0
