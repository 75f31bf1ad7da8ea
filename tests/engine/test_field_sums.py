"""Field sums: closed forms, on the wire, tiles, cache, progress and cancelling."""

from __future__ import annotations

import dataclasses

import mpmath
import numpy as np
import pytest
from numpy.typing import NDArray

from engine.conductor import Conductor
from engine.errors import ComputationCancelled
from engine.field import ResponseCache, flux_density, responses, vector_potential
from engine.field.kernel import tile_responses
from engine.field.points import compact_order
from engine.runs import Bar, Round, SlotLoad


def wire(*path: tuple[float, float, float], **changes: object) -> Conductor:
    made = Conductor(
        key="wire",
        item="wire",
        slot="L1",
        role="run",
        path=np.array(path, float),
        axes=np.tile([[1.0, 0.0, 0.0], [0.0, 1.0, 0.0]], (len(path), 1, 1)),
        shape=Round(diameter=1e-3),
        loads=(),
        group="wire",
    )
    return dataclasses.replace(made, **changes)  # type: ignore[arg-type]


def one_ampere(path: list[list[float]], points: NDArray[np.float64]) -> tuple:
    """Field and flags straight from the kernel, one filament."""
    vertices = np.array(path, float)
    out = np.empty((1, len(points), 3))
    flags = np.zeros(len(points), bool)
    tile_responses(
        points,
        vertices,
        np.array([0, len(vertices)]),
        np.ones(1),
        np.zeros(1, np.int64),
        out,
        flags,
    )
    return out[0], flags


def test_long_wire_along_z_gives_field_along_y_at_x() -> None:
    """µ₀ I / 2πρ, right-handed: 1 A gives 0.2 µT at 1 m."""
    made = [wire((0, 0, -1e5), (0, 0, 1e5))]
    found = flux_density(made, [[1.0 + 2.0j]], np.array([[1.0, 0, 0], [0, 0.01, 0]]))
    assert found[0, 0] == pytest.approx([0, 2e-7 * (1 + 2j), 0], rel=1e-9, abs=1e-20)
    assert found[0, 1] == pytest.approx([-2e-5 * (1 + 2j), 0, 0], rel=1e-9, abs=1e-20)


def exact_segment(start: list, end: list, point: list) -> list[mpmath.mpf]:
    """The finite wire in 60 digits: µ₀ I / 4πρ · (cos of the two end angles)."""
    with mpmath.workdps(60):
        a = mpmath.matrix(
            [mpmath.mpf(p) - s for p, s in zip(point, start, strict=True)]
        )
        b = mpmath.matrix([mpmath.mpf(p) - e for p, e in zip(point, end, strict=True)])
        run = mpmath.matrix(
            [mpmath.mpf(e) - s for e, s in zip(end, start, strict=True)]
        )
        length = mpmath.norm(run)
        t = run / length
        along = sum(x * y for x, y in zip(a, t, strict=True))
        foot = a - along * t
        rho = mpmath.norm(foot)
        cosines = along / mpmath.norm(a) - (along - length) / mpmath.norm(b)
        across = [
            t[1] * foot[2] - t[2] * foot[1],
            t[2] * foot[0] - t[0] * foot[2],
            t[0] * foot[1] - t[1] * foot[0],
        ]
        return [mpmath.mpf("1e-7") * cosines * c / rho**2 for c in across]


@pytest.mark.parametrize(
    ("start", "end", "point", "digits"),
    [
        ([0, 0, 0], [1, 2, 3], [0.5, -1, 2], 1e-14),
        ([0, 0, 0], [0, 0, 2], [1e-6, 0, 1], 1e-14),
        ([0, 0, 0], [0, 0, 2], [1e-6, 0, 2.5], 1e-14),
        ([0, 0, 0], [0, 0, 1e-3], [40, 30, 20], 1e-14),
        ([0, 0, -1e5], [0, 0, 1e5], [0.3, 0.4, 7], 1e-14),
        # Rounding of the coordinates themselves: 1 µm from a slanting wire of metres.
        ([0, 0, 0], [1, 1, 1], [0.5, 0.5, 0.500001], 1e-9),
    ],
)
def test_segment_is_stable_near_far_short_and_long(
    start: list, end: list, point: list, digits: float
) -> None:
    found, flags = one_ampere([start, end], np.array([point], float))
    expected = [float(x) for x in exact_segment(start, end, point)]
    assert np.abs(found[0] - expected).max() <= digits * np.abs(expected).max()
    assert not flags.any()


def test_vector_potential_is_that_of_a_finite_wire() -> None:
    """Griffiths, sec. 5.4: µ₀ I / 4π · (asinh(z₂/ρ) − asinh(z₁/ρ)) along the wire."""
    made = [wire((0, 0, 0), (0, 0, 2))]
    points = np.array([[0.3, 0.4, 0.5], [1e-3, 0, 1], [0, 5, -40]])
    found = vector_potential(made, [[1.0]], points)[0]
    rho = np.hypot(points[:, 0], points[:, 1])
    z = points[:, 2]
    expected = 1e-7 * (np.arcsinh((2 - z) / rho) - np.arcsinh(-z / rho))
    assert found[:, 2].real == pytest.approx(expected, rel=1e-12)
    assert (found[:, :2] == 0).all()


@pytest.mark.parametrize(
    "point",
    [[0, 0, 0], [1, 1, 1], [0.5, 0.5, 0.5], [0.1, 0.1, 0.1], [1 / 3, 1 / 3, 1 / 3]],
)
def test_on_the_wire_is_zero_and_flagged(point: list[float]) -> None:
    found, flags = one_ampere([[0, 0, 0], [1, 1, 1]], np.array([point], float))
    assert flags.all()
    assert (found == 0).all()


def test_beyond_the_end_of_a_wire_is_zero_and_not_flagged() -> None:
    found, flags = one_ampere([[0, 0, 0], [1, 1, 1]], np.array([[2.0, 2, 2]]))
    assert not flags.any()
    assert np.abs(found).max() < 1e-20


def test_point_on_an_axis_keeps_the_field_of_the_other_conductors() -> None:
    made = [wire((0, 0, -5), (0, 0, 5)), wire((1, 0, -5), (1, 0, 5))]
    at = np.array([[1.0, 0, 0]])
    both = flux_density(made, [[3.0, 4.0]], at)
    assert (both == flux_density(made[:1], [[3.0]], at)).all()
    assert (vector_potential(made, [[0.0, 1.0]], at) == 0).all()


def test_every_tile_and_its_rest_are_computed() -> None:
    made = [wire((0, 0, -5), (0, 0, 5))]
    points = np.random.default_rng(5).uniform(1, 5, (3 * 256 + 17, 3))
    together = flux_density(made, [[1.0]], points)[0]
    for i in (0, 255, 256, 700, len(points) - 1):
        alone = flux_density(made, [[1.0]], points[i : i + 1])[0, 0]
        assert together[i] == pytest.approx(alone, rel=1e-12)


@pytest.mark.parametrize("count", [0, 1])
def test_nothing_gives_empty_or_zero_arrays(count: int) -> None:
    points = np.ones((count, 3))
    made = [wire((0, 0, 0), (1, 0, 0))]
    assert flux_density([], np.zeros((2, 0)), points).shape == (2, count, 3)
    assert (flux_density([], np.zeros((2, 0)), points) == 0).all()
    assert flux_density(made, np.zeros((0, 1)), points).shape == (0, count, 3)
    assert responses([], points).shape == (0, count, 3)
    assert responses(made, points).shape == (1, count, 3)
    cache = ResponseCache()
    empty = flux_density([], np.zeros((2, 0)), points, cache=cache)
    assert empty.shape == (2, count, 3)


@pytest.mark.parametrize(
    ("currents", "points"),
    [
        ([[1.0, 2.0]], [[0.0, 0, 0]]),
        ([1.0], [[0.0, 0, 0]]),
        ([[np.nan]], [[0.0, 0, 0]]),
        ([[1.0]], [[0.0, 0]]),
        ([[1.0]], [[np.inf, 0, 0]]),
    ],
)
def test_wrong_arrays_are_refused(currents: list, points: list) -> None:
    made = [wire((0, 0, 0), (1, 0, 0))]
    with pytest.raises(ValueError, match="must be"):
        flux_density(made, currents, points)


def test_neighbours_stay_together_in_compact_order() -> None:
    x, y = np.meshgrid(np.arange(64.0), np.arange(64.0))
    points = np.stack([x.ravel(), y.ravel(), np.ones(x.size)], axis=1)
    order = compact_order(points)
    assert sorted(order.tolist()) == list(range(len(points)))
    sizes = np.ptp(points[order].reshape(-1, 256, 3), axis=1).max(axis=1)
    assert sizes.max() < 33
    assert np.median(sizes) < 17


class TestCache:
    points = np.random.default_rng(1).uniform(1, 2, (50, 3))

    def test_response_depends_on_geometry_only(self) -> None:
        cache = ResponseCache()
        first = wire((0, 0, 0), (0, 0, 1))
        responses([first], self.points, cache=cache)
        renamed = dataclasses.replace(
            first,
            key="other",
            item="other",
            slot="N",
            role="equipment",
            group="other",
            loads=(SlotLoad(circuit="C1", label="N", share=0.5),),
        )
        responses([renamed], self.points, cache=cache)
        assert len(cache) == 1

    @pytest.mark.parametrize(
        "change",
        [
            {"path": np.array([[0, 0, 0], [0, 0, 1.000001]])},
            {"shape": Round(diameter=2e-3)},
            {"shape": Bar(width=1e-3, thickness=1e-3)},
            {"axes": np.tile([[0.0, 1.0, 0.0], [1.0, 0.0, 0.0]], (2, 1, 1))},
        ],
    )
    def test_another_geometry_is_another_response(self, change: dict) -> None:
        cache = ResponseCache()
        first = wire((0, 0, 0), (0, 0, 1))
        responses(
            [first, wire((0, 0, 0), (0, 0, 1), **change)], self.points, cache=cache
        )
        assert len(cache) == 2

    def test_other_points_are_another_response(self) -> None:
        cache = ResponseCache()
        made = [wire((0, 0, 0), (0, 0, 1))]
        responses(made, self.points, cache=cache)
        responses(made, self.points[::-1], cache=cache)
        assert len(cache) == 2

    def test_moving_one_run_computes_one_run(self) -> None:
        cache = ResponseCache()
        still = [wire((x, 0, 0), (x, 0, 1), group=f"{x}") for x in (0.0, 0.1, 0.2)]
        responses(still, self.points, cache=cache)
        moved = [*still[:2], wire((0.3, 0, 0), (0.3, 0, 1), group="0.2")]
        responses(moved, self.points, cache=cache)
        assert len(cache) == 4

    def test_least_recently_used_is_dropped_at_the_limit(self) -> None:
        cache = ResponseCache(limit_bytes=2 * self.points.nbytes)
        first, second, third = (wire((x, 0, 0), (x, 0, 1)) for x in (0.0, 0.1, 0.2))
        kept = responses([first], self.points, cache=cache)
        responses([second], self.points, cache=cache)
        again = responses([first], self.points, cache=cache)
        responses([third], self.points, cache=cache)
        assert (kept == again).all()
        assert len(cache) == 2
        assert cache.bytes_used == 2 * self.points.nbytes <= cache.limit

    def test_request_above_the_limit_is_summed_without_keeping(self) -> None:
        cache = ResponseCache(limit_bytes=self.points.nbytes)
        made = [wire((x, 0, 0), (x, 0, 1)) for x in (0.0, 0.1)]
        found = flux_density(made, [[1.0, 2.0]], self.points, cache=cache)
        assert len(cache) == 0
        assert (found == flux_density(made, [[1.0, 2.0]], self.points)).all()

    def test_kept_responses_cannot_be_changed(self) -> None:
        cache = ResponseCache()
        made = [wire((0, 0, 0), (0, 0, 1))]
        mine = responses(made, self.points, cache=cache)
        mine[:] = 0
        assert (responses(made, self.points, cache=cache) != 0).any()

    def test_clear_forgets_everything(self) -> None:
        cache = ResponseCache()
        responses([wire((0, 0, 0), (0, 0, 1))], self.points, cache=cache)
        cache.clear()
        assert len(cache) == 0
        assert cache.bytes_used == 0


def test_progress_rises_to_one() -> None:
    told: list[float] = []
    made = [wire((0, 0, -5), (0, 0, 5))]
    points = np.random.default_rng(5).uniform(1, 5, (5000, 3))
    flux_density(made, [[1.0]], points, progress=lambda part, _: told.append(part))
    assert told == sorted(told)
    assert told[-1] == 1.0


@pytest.mark.parametrize("after", [0, 2])
def test_cancelled_sum_stops_without_a_result(after: int) -> None:
    asked = 0

    def cancelled() -> bool:
        nonlocal asked
        asked += 1
        return asked > after

    cache = ResponseCache()
    made = [wire((0, 0, -5), (0, 0, 5))]
    points = np.random.default_rng(5).uniform(1, 5, (20_000, 3))
    with pytest.raises(ComputationCancelled):
        flux_density(made, [[1.0]], points, cache=cache, cancelled=cancelled)
    assert len(cache) == 0
