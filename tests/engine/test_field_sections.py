"""Sections as filaments: exact integration of the even current is met to 0.1 %.

Checked against adaptive integration over the section (scipy, QUADPACK) and against
one fixed, far finer set of filaments. What is held is the resultant of a closed group,
not that of each bar.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import dblquad

from engine.conductor import Conductor
from engine.field import flux_density, resultant, surface_distance
from engine.field.filaments import filaments_of, orders_of
from engine.field.kernel import TILE, tile_sum
from engine.field.legs import legs_of
from engine.runs import Bar, Round

THOUSANDTH = 1e-3
BALANCED = np.exp(-2j * np.pi / 3 * np.arange(3))

on_edge = Bar(width=0.1, thickness=0.01)
thin = Bar(width=0.1, thickness=0.006)


def straight(x: float, shape: Round | Bar, group: str = "group") -> Conductor:
    """Along y from −10 m to 10 m, a bar's width along z."""
    axes = np.tile([[0.0, 0.0, 1.0], [-1.0, 0.0, 0.0]], (2, 1, 1))
    path = np.array([[x, -10.0, 0.0], [x, 10.0, 0.0]])
    return Conductor(f"{x}", "run", f"{x}", "run", path, axes, shape, (), group)


def bent(offset: tuple[float, float], shape: Round | Bar) -> Conductor:
    """Along x, then up, then along −y, mitred; `offset` in the section (u, v)."""
    corners = np.array([[-4, 0, 0], [0, 0, 0], [0, 0, 2], [0, -4, 2]], float)
    u = np.array([[0, -1, 0], [0, -1, 0], [1, -1, 0], [1, 0, 0]], float)
    v = np.array([[0, 0, 1], [-1, 0, 1], [-1, 0, 1], [0, 0, 1]], float)
    # Both bends in full: the mitre planes are x = −z and y = z − 2.
    u[2], v[2] = [0, -1, -1], [-1, 0, 0]
    u[3], v[3] = [0, 0, -1], [-1, 0, 0]
    path = corners + offset[0] * u + offset[1] * v
    axes = np.stack([v, -u], axis=1)
    return Conductor(f"{offset}", "run", "s", "run", path, axes, shape, (), "group")


GROUPS: dict[str, tuple[Sequence[Conductor], Sequence[complex]]] = {
    "one bar": ([straight(0, on_edge)], [1.0]),
    "go and return": ([straight(0, on_edge), straight(0.1, on_edge)], [1, -1]),
    "three bars on edge": (
        [straight(x, on_edge) for x in (-0.1, 0.0, 0.1)],
        list(BALANCED),
    ),
    "sandwich": (
        [straight(x, thin) for x in (-0.008, 0.0, 0.008)],
        list(BALANCED),
    ),
    "mirrored sandwich": (
        [straight(x, thin) for x in (-0.02, -0.012, -0.004, 0.004, 0.012, 0.02)],
        [*BALANCED, *BALANCED[::-1]],
    ),
    "third harmonic into half a neutral": (
        [
            *(straight(x, thin) for x in (-0.008, 0.0, 0.008)),
            straight(0.016, Bar(width=0.05, thickness=0.006)),
        ],
        [1, 1, 1, -3],
    ),
    "bent bars": (
        [bent((u, 0.0), on_edge) for u in (-0.1, 0.0, 0.1)],
        list(BALANCED),
    ),
    "bent thick cables": (
        [bent((u, 0.0), Round(diameter=0.05)) for u in (-0.05, 0.0, 0.05)],
        list(BALANCED),
    ),
    "bent unlike cables": (
        [bent((-0.03, 0), Round(diameter=0.04)), bent((0.03, 0), Round(diameter=0.02))],
        [1, -1],
    ),
}


def points_at(
    made: Sequence[Conductor], distance: float, count: int
) -> NDArray[np.float64]:
    """Random points whose distance to the nearest surface is `distance`."""
    rng = np.random.default_rng(round(distance * 1e4))
    corners = np.concatenate([c.path for c in made])
    low, high = corners.min(axis=0), corners.max(axis=0)
    low, high = np.maximum(low, -1.5), np.minimum(high, 2.5)
    points = rng.uniform(low - distance - 0.1, high + distance + 0.1, (count * 4, 3))
    for _ in range(80):
        found = surface_distance(made, points)
        gradient = np.stack(
            [
                surface_distance(made, points + e) - surface_distance(made, points - e)
                for e in np.eye(3) * 1e-6
            ],
            axis=1,
        )
        size = np.linalg.norm(gradient, axis=1)
        size[size == 0] = 1.0
        points -= ((found - distance) / size)[:, None] * gradient
    good = np.abs(surface_distance(made, points) - distance) < 1e-3 * distance
    return points[good][:count]


def fixed(
    made: Sequence[Conductor],
    currents: NDArray[np.complex128],
    points: NDArray[np.float64],
    numbers: tuple[int, int],
) -> NDArray[np.complex128]:
    """The sum over one set of filaments, whatever the distance."""
    orders = [np.full((len(c.path) - 1, 2), numbers, np.int16) for c in made]
    f = filaments_of(made, orders)
    assert len(points) <= TILE
    out = np.empty((1, len(points), 3), complex)
    real, imaginary = currents.real.copy(), currents.imag.copy()
    flags = np.zeros(len(points), bool)
    tile_sum(
        points, f.vertices, f.offsets, f.weights, f.owners,
        real, imaginary, False, out, flags,
    )  # fmt: skip
    assert not flags.any()
    return out[0]


@pytest.mark.parametrize("name", GROUPS)
@pytest.mark.parametrize(
    ("distance", "bar_numbers", "round_numbers"),
    [
        (0.001, (1024, 200), (24, 768)),
        (0.003, (384, 96), (20, 384)),
        (0.01, (160, 40), (16, 192)),
        (0.03, (64, 24), (12, 96)),
        (0.1, (32, 12), (8, 48)),
        (0.3, (20, 8), (6, 32)),
        (0.45, (20, 8), (6, 32)),
        (1.0, (12, 6), (5, 24)),
        (3.0, (8, 4), (4, 16)),
        (4.2, (8, 4), (4, 16)),
        (10.0, (8, 4), (4, 16)),
        (30.0, (8, 4), (4, 16)),
    ],
)
def test_closed_group_is_exact_to_a_thousandth(
    name: str,
    distance: float,
    bar_numbers: tuple[int, int],
    round_numbers: tuple[int, int],
) -> None:
    made, values = GROUPS[name]
    currents = np.array([values], complex)
    points = points_at(made, distance, 12 if distance < 0.01 else 48)
    assert len(points) >= 6
    numbers = bar_numbers if isinstance(made[0].shape, Bar) else round_numbers
    fine = fixed(made, currents, points, numbers)
    found = flux_density(made, currents, points)[0]
    assert (resultant(found - fine) <= THOUSANDTH * resultant(fine)).all()


@pytest.mark.parametrize("name", ["three bars on edge", "bent bars", "sandwich"])
def test_axes_alone_would_not_be_exact_enough_beside_the_bars(name: str) -> None:
    """So that the check above checks something."""
    made, values = GROUPS[name]
    currents = np.array([values], complex)
    points = points_at(made, 0.3, 48)
    fine = fixed(made, currents, points, (20, 8))
    axes = fixed(made, currents, points, (1, 1))
    assert (resultant(axes - fine) > 10 * THOUSANDTH * resultant(fine)).any()


@pytest.mark.parametrize(
    "at", [(0.006, 0.02), (0.02, 0.055), (0.002, 0.06), (0.3, 0.1)]
)
@pytest.mark.parametrize("name", ["one bar", "three bars on edge"])
def test_straight_bars_meet_adaptive_integration(
    name: str, at: tuple[float, float]
) -> None:
    """QUADPACK over the section, of the field of a straight filament by hand.

    In the plane y = 0, at `at` = (x beyond the right bar's axis, z).
    """
    made, values = GROUPS[name]
    x, z = made[-1].path[0, 0] + at[0], at[1]

    def filament(dx: float, dz: float) -> tuple[float, float]:
        square = dx * dx + dz * dz
        # µ₀ I / 2πρ · sin of the angle that half the length subtends, along ŷ × ρ.
        value = 2e-7 / square * 10.0 / np.sqrt(100.0 + square)
        return value * dz, -value * dx

    expected = np.zeros(3, complex)
    for bar, current in zip(made, values, strict=True):
        left = bar.path[0, 0]
        for axis, part in ((0, 0), (2, 1)):
            integral, _ = dblquad(
                lambda b, a, left=left, part=part: filament(x - left - b, z - a)[part],
                -0.05,
                0.05,
                -0.005,
                0.005,
                epsabs=0,
                epsrel=1e-6,
            )
            expected[axis] += current * integral / (0.1 * 0.01)
    found = flux_density(made, np.array([values], complex), np.array([[x, 0, z]]))[0, 0]
    assert resultant(found - expected) <= THOUSANDTH * resultant(expected)


def test_straight_round_conductor_is_its_axis() -> None:
    made = [straight(0, Round(diameter=0.1))]
    points = np.array([[0.051, 0, 0], [0.06, 1, 0], [0.5, -2, 0.3]])
    assert (orders_of(made, legs_of(made), points) == 1).all()


def test_filaments_get_fewer_with_distance() -> None:
    made, _ = GROUPS["three bars on edge"]
    counts = []
    for x in np.geomspace(0.106, 30, 40):
        orders = orders_of(made, legs_of(made), np.array([[x, 0.0, 0.0]]))
        counts.append(int(orders.astype(int).prod(axis=2).sum()))
    assert counts == sorted(counts, reverse=True)
    assert counts[-1] == 3


def test_short_closed_loop_keeps_its_section_far_away() -> None:
    """The mean of a square loop's area over its section is more than that of its axis.

    By hand: a = 0.2 m, R = 0.02 m; the mean of (a + 2x)² over the disc, x across it
    in the loop's plane, is a² + R². Far away the field is that of the dipole I·area.
    """
    a, radius = 0.2, 0.02
    path = np.array([[0, 0, 0], [a, 0, 0], [a, a, 0], [0, a, 0], [0, 0, 0]])
    outwards = np.array([[-1, -1, 0], [1, -1, 0], [1, 1, 0], [-1, 1, 0], [-1, -1, 0]])
    axes = np.stack([outwards, np.tile([0, 0, 1], (5, 1))], axis=1).astype(float)
    loop = Conductor(
        "c", "c", "c", "equipment", path, axes, Round(diameter=2 * radius), (), "c"
    )
    far = 30.0
    found = flux_density([loop], [[1.0]], np.array([[a / 2, a / 2, far]]))[0, 0, 2]
    dipole = 2e-7 * (a * a + radius * radius) / far**3
    # The next moment adds 3/4 (a/far)² and less.
    assert found.real == pytest.approx(dipole, rel=1e-4)


def test_twisted_bar_is_integrated_too() -> None:
    """A bar that turns by 90° over two millimetres, 0.2 m and more away."""
    path = np.array([[0, -3, 0], [0, -0.001, 0], [0, 0.001, 0], [0, 3, 0]], float)
    axes = np.array(
        [
            [[1, 0, 0], [0, 0, 1]],
            [[1, 0, 0], [0, 0, 1]],
            [[0, 0, 1], [-1, 0, 0]],
            [[0, 0, 1], [-1, 0, 0]],
        ],
        float,
    )
    bar = Conductor("c", "c", "c", "run", path, axes, on_edge, (), "group")
    points = np.array([[0.2, 0, 0], [0.1, 0.1, 0.1], [0.02, 0.0, 0.06], [0, 0.3, 1]])
    currents = np.array([[1.0 + 0j]])
    fine = fixed([bar], currents, points, (96, 48))
    found = flux_density([bar], currents, points)[0]
    assert (resultant(found - fine) <= THOUSANDTH * resultant(fine)).all()
