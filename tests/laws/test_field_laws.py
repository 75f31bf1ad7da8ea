"""Laws that any magnetic field of currents in free space obeys, for random conductors.

Nothing here is compared with a number: each law relates computed fields to each other
or to the current that a loop encircles.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays
from numpy.typing import NDArray

from engine.conductor import Conductor
from engine.currents import Component
from engine.field import (
    ResponseCache,
    cycle,
    flux_density,
    responses,
    resultant,
    vector_potential,
)
from engine.runs import Bar, Round

MU0 = 4e-7 * np.pi

few = settings(max_examples=25, deadline=None)

coordinate = st.floats(-3, 3).map(lambda x: round(x, 3))
current = st.complex_numbers(min_magnitude=0.1, max_magnitude=1000)
seeds = st.integers(0, 2**32 - 1)


def conductor(
    path: NDArray[np.float64], shape: Round | Bar | None = None, group: str = "group"
) -> Conductor:
    """A conductor whose section keeps the same directions in space at every vertex."""
    axes = np.tile([[1.0, 0.0, 0.0], [0.0, 1.0, 0.0]], (len(path), 1, 1))
    return Conductor(
        key="c",
        item="c",
        slot="c",
        role="run",
        path=np.array(path, float),
        axes=axes,
        shape=shape or Round(diameter=0.01),
        loads=(),
        group=group,
    )


def loops(rng: np.random.Generator, count: int, corners: int) -> Sequence[Conductor]:
    """Closed random polygons about the origin, thin, each a group of its own."""
    made = []
    for i in range(count):
        path = rng.uniform(-2, 2, (corners, 3))
        closed = np.concatenate([path, path[:1]])
        made.append(conductor(closed, Round(diameter=1e-4), f"loop {i}"))
    return made


def away(rng: np.random.Generator, count: int) -> NDArray[np.float64]:
    """Points 5 m to 8 m from the origin: outside every loop."""
    direction = rng.normal(size=(count, 3))
    direction /= np.linalg.norm(direction, axis=1)[:, None]
    return direction * rng.uniform(5, 8, (count, 1))


def some_currents(rng: np.random.Generator, c: int, m: int) -> NDArray[np.complex128]:
    return rng.normal(size=(c, m)) + 1j * rng.normal(size=(c, m))


@few
@given(seeds)
def test_fields_of_conductors_add(seed: int) -> None:
    rng = np.random.default_rng(seed)
    made, points = loops(rng, 3, 5), away(rng, 20)
    currents = some_currents(rng, 2, 3)
    together = flux_density(made, currents, points)
    apart = sum(
        flux_density([one], currents[:, i : i + 1], points)
        for i, one in enumerate(made)
    )
    assert np.abs(together - apart).max() <= 1e-13 * np.abs(together).max()


@few
@given(seeds, current)
def test_field_scales_with_the_current(seed: int, factor: complex) -> None:
    rng = np.random.default_rng(seed)
    made, points = loops(rng, 2, 4), away(rng, 20)
    currents = some_currents(rng, 1, 2)
    once = flux_density(made, currents, points)
    scaled = flux_density(made, factor * currents, points)
    assert np.abs(scaled - factor * once).max() <= 1e-13 * np.abs(scaled).max()


@few
@given(seeds, st.floats(0.1, 50))
def test_field_falls_with_the_size_of_everything(seed: int, factor: float) -> None:
    rng = np.random.default_rng(seed)
    made, points = loops(rng, 2, 4), away(rng, 20)
    larger = [conductor(c.path * factor, Round(diameter=1e-4 * factor)) for c in made]
    smaller = [conductor(c.path) for c in made]
    currents = some_currents(rng, 1, 2)
    once = flux_density(smaller, currents, points)
    scaled = flux_density(larger, currents, points * factor)
    # Another number of filaments may be taken at another size.
    assert np.abs(scaled * factor - once).max() <= 1e-3 * np.abs(once).max()


@few
@given(seeds)
def test_reversed_path_reverses_the_field(seed: int) -> None:
    rng = np.random.default_rng(seed)
    (one,), points = loops(rng, 1, 5), away(rng, 20)
    there = flux_density([one], [[1.0]], points)
    back = flux_density([conductor(one.path[::-1], one.shape)], [[1.0]], points)
    assert np.abs(there + back).max() <= 1e-12 * np.abs(there).max()


@few
@given(seeds, arrays(float, 3, elements=st.floats(-50, 50)))
def test_field_moves_with_the_conductors(seed: int, shift: NDArray) -> None:
    rng = np.random.default_rng(seed)
    made, points = loops(rng, 2, 4), away(rng, 20)
    currents = some_currents(rng, 1, 2)
    moved = [conductor(c.path + shift, c.shape, c.group) for c in made]
    here = flux_density(made, currents, points)
    there = flux_density(moved, currents, points + shift)
    # Rounded coordinates may change the number of filaments of these thin loops.
    assert np.abs(here - there).max() <= 1e-9 * np.abs(here).max()


@few
@given(seeds)
def test_field_turns_with_the_conductors(seed: int) -> None:
    rng = np.random.default_rng(seed)
    made, points = loops(rng, 2, 4), away(rng, 20)
    turn, _ = np.linalg.qr(rng.normal(size=(3, 3)))
    turn *= np.sign(np.linalg.det(turn))
    currents = some_currents(rng, 1, 2)
    turned = [conductor(c.path @ turn.T, c.shape, c.group) for c in made]
    here = flux_density(made, currents, points)
    there = flux_density(turned, currents, points @ turn.T)
    # Rounded coordinates may change the number of filaments of these thin loops.
    assert np.abs(here @ turn.T - there).max() <= 1e-9 * np.abs(here).max()


@few
@given(seeds)
def test_mirrored_conductors_give_the_mirrored_field_reversed(seed: int) -> None:
    rng = np.random.default_rng(seed)
    made, points = loops(rng, 2, 4), away(rng, 20)
    mirror = np.array([-1.0, 1.0, 1.0])
    currents = some_currents(rng, 1, 2)
    mirrored = [conductor(c.path * mirror, c.shape, c.group) for c in made]
    here = flux_density(made, currents, points)
    there = flux_density(mirrored, currents, points * mirror)
    # The order of the points, so their tiles, may change the number of filaments.
    assert np.abs(here * -mirror - there).max() <= 1e-9 * np.abs(here).max()


def gradient(field: NDArray[np.complex128], step: float) -> NDArray[np.complex128]:
    """(n, axis of derivative, component) from a field at the points of `stencil`."""
    parts = field.reshape(-1, 3, 4, 3)
    weights = np.array([1.0, -8.0, 8.0, -1.0]) / (12 * step)
    return np.einsum("nakx,k->nax", parts, weights)


def stencil(points: NDArray[np.float64], step: float) -> NDArray[np.float64]:
    """Four points along each axis about each point: (12 n, 3)."""
    offsets = np.array([-2, -1, 1, 2]) * step
    shifts = np.eye(3)[:, None, :] * offsets[:, None]
    return (points[:, None, None, :] + shifts).reshape(-1, 3)


@few
@given(seeds)
def test_flux_density_has_no_divergence_and_no_curl_in_free_space(seed: int) -> None:
    rng = np.random.default_rng(seed)
    made, points = loops(rng, 2, 5), away(rng, 5)
    currents = some_currents(rng, 1, 2)
    step = 0.01
    field = flux_density(made, currents, stencil(points, step))[0]
    slopes = gradient(field, step)
    size = np.abs(slopes).max()
    # Fourth-order differences over a hundredth of a metre, at some metres.
    assert np.abs(np.einsum("naa->n", slopes)).max() <= 1e-6 * size
    assert np.abs(slopes - slopes.transpose(0, 2, 1)).max() <= 1e-6 * size


@few
@given(seeds)
def test_curl_of_the_vector_potential_is_the_flux_density(seed: int) -> None:
    rng = np.random.default_rng(seed)
    made, points = loops(rng, 2, 5), away(rng, 5)
    currents = some_currents(rng, 2, 2)
    step = 0.01
    for i in range(2):
        potential = vector_potential(made, currents, stencil(points, step))[i]
        d = gradient(potential, step)
        curl = np.stack(
            [
                d[:, 1, 2] - d[:, 2, 1],
                d[:, 2, 0] - d[:, 0, 2],
                d[:, 0, 1] - d[:, 1, 0],
            ],
            axis=1,
        )
        field = flux_density(made, currents, points)[i]
        # Fourth-order differences over a hundredth of a metre, at some metres.
        assert np.abs(curl - field).max() <= 1e-6 * np.abs(field).max()


def circulation(
    field_of: object, corners: NDArray[np.float64], parts: int
) -> NDArray[np.complex128]:
    """∮ B·dl per component along the closed polygon, by Gauss-Legendre in parts."""
    nodes, weights = np.polynomial.legendre.leggauss(12)
    t = ((np.arange(parts)[:, None] + (nodes + 1) / 2) / parts).ravel()
    w = np.tile(weights / 2, parts) / parts
    ends = np.roll(corners, -1, axis=0)
    points = corners[:, None] + t[:, None] * (ends - corners)[:, None]
    field = field_of(points.reshape(-1, 3))  # type: ignore[operator]
    field = field.reshape(len(field), len(corners), len(t), 3)
    return np.einsum("cstx,t,sx->c", field, w, ends - corners)


@few
@given(seeds, st.sampled_from([Round(diameter=0.2), Bar(width=0.3, thickness=0.1)]))
def test_circulation_is_the_encircled_current(seed: int, shape: Round | Bar) -> None:
    """A closed rectangle of conductor, and a random polygon around one of its sides.

    The polygon winds once about the z axis, 0.4 m to 1.5 m from it; the other sides
    of the rectangle are 3 m away or more, so that the linking number is one.
    """
    rng = np.random.default_rng(seed)
    x, z = rng.uniform(4.6, 8), rng.uniform(5, 9)
    path = np.array([[0, 0, -z], [0, 0, z], [x, 0, z], [x, 0, -z], [0, 0, -z]])
    # In the mitre planes of a rectangle in the plane y = 0.
    across = np.array([[1, 0, 1], [1, 0, -1], [-1, 0, -1], [-1, 0, 1], [1, 0, 1]])
    axes = np.stack([across, np.tile([0, 1, 0], (5, 1))], axis=1).astype(float)
    one = Conductor("c", "c", "c", "run", path, axes, shape, (), "group")
    angles = np.sort(rng.uniform(0, 0.5, 7) + np.arange(7)) * 2 * np.pi / 7
    # Chords between corners 1.5 sevenths of a turn apart pass at 0.78 of the radius.
    radii = rng.uniform(0.6, 1.5, 7)
    corners = np.stack(
        [radii * np.cos(angles), radii * np.sin(angles), rng.uniform(-1, 1, 7)], axis=1
    )
    currents = np.array([[3.0 - 4.0j], [0.5j]])
    found = circulation(
        lambda points: flux_density([one], currents, points), corners, 12
    )
    # The section is integrated to a thousandth.
    assert np.abs(found / (MU0 * currents[:, 0]) - 1).max() <= 1e-3


@few
@given(seeds)
def test_circulation_around_nothing_vanishes(seed: int) -> None:
    rng = np.random.default_rng(seed)
    made = loops(rng, 2, 5)
    currents = some_currents(rng, 1, 2)
    corners = np.array([6.0, 0, 0]) + rng.uniform(-1, 1, (5, 3))

    def field_of(points: NDArray[np.float64]) -> NDArray[np.complex128]:
        return flux_density(made, currents, points)

    found = circulation(field_of, corners, 6)
    scale = np.abs(field_of(corners)).max()
    assert np.abs(found).max() <= 1e-10 * scale


@few
@given(seeds)
def test_flux_through_a_loop_is_the_circulation_of_the_vector_potential(
    seed: int,
) -> None:
    rng = np.random.default_rng(seed)
    made = loops(rng, 2, 5)
    currents = some_currents(rng, 1, 2)
    corners = np.array([[5.0, 0, 0], [5.0, 1, 0], [5.0, 1, 1], [5.0, 0, 1]])
    around = circulation(lambda p: vector_potential(made, currents, p), corners, 2)
    nodes, weights = np.polynomial.legendre.leggauss(12)
    y, z = np.meshgrid((nodes + 1) / 2, (nodes + 1) / 2)
    points = np.stack([np.full(y.size, 5.0), y.ravel(), z.ravel()], axis=1)
    field = flux_density(made, currents, points)[0]
    flux = (np.outer(weights, weights).ravel() / 4) @ field[:, 0]
    assert abs(around[0] - flux) <= 1e-9 * np.abs(field).max()


@few
@given(seeds)
def test_mutual_flux_is_the_same_both_ways(seed: int) -> None:
    """Neumann's reciprocity: the flux of one loop through the other, per ampere."""
    rng = np.random.default_rng(seed)
    first, second = loops(rng, 2, 5)
    shift = np.array([6.0, 0, 0])
    second = conductor(second.path + shift, second.shape)
    one = np.array([[1.0 + 0j]])
    there = circulation(
        lambda p: vector_potential([first], one, p), second.path[:-1], 3
    )
    back = circulation(lambda p: vector_potential([second], one, p), first.path[:-1], 3)
    scale = np.abs(vector_potential([first], one, second.path[:-1])).max()
    assert abs(there[0] - back[0]) <= 1e-9 * scale


@few
@given(seeds)
def test_rms_of_phasors_is_the_rms_of_the_sampled_cycle(seed: int) -> None:
    rng = np.random.default_rng(seed)
    orders = [0, *sorted(rng.choice(np.arange(1, 26), 4, replace=False).tolist())]
    components = [Component(50.0 * h, 50.0 if h else 0.0, "") for h in orders]
    b = rng.normal(size=(5, 3)) + 1j * rng.normal(size=(5, 3))
    b[0] = b[0].real
    sampled = cycle(b, components, 64)
    assert sampled.times[-1] < 0.02
    rms = np.sqrt((sampled.vectors**2).mean(axis=0))
    assert rms == pytest.approx(np.sqrt((np.abs(b) ** 2).sum(axis=0)), rel=1e-12)
    assert np.sqrt((rms**2).sum()) == pytest.approx(
        np.sqrt((resultant(b) ** 2).sum()), rel=1e-12
    )


@few
@given(seeds, st.integers(1, 4))
def test_responses_times_currents_are_the_direct_sum(seed: int, c: int) -> None:
    rng = np.random.default_rng(seed)
    made, points = [*loops(rng, 3, 5)], rng.uniform(-3, 3, (700, 3))
    made.append(conductor([[0, 0, 2], [0, 0, -2]], Bar(width=0.1, thickness=0.01)))
    currents = some_currents(rng, c, 4)
    direct = flux_density(made, currents, points)
    product = np.einsum("cm,mnx->cnx", currents, responses(made, points))
    cached = flux_density(made, currents, points, cache=ResponseCache())
    scale = np.abs(direct).max(axis=(0, 2))[:, None]
    assert (np.abs(direct - product) <= 1e-12 * scale).all()
    assert (np.abs(direct - cached) <= 1e-12 * scale).all()


@few
@given(seeds)
def test_cached_field_is_the_fresh_field(seed: int) -> None:
    rng = np.random.default_rng(seed)
    made, points = loops(rng, 3, 5), rng.uniform(-3, 3, (300, 3))
    cache = ResponseCache()
    currents = some_currents(rng, 2, 3)
    fresh = flux_density(made, currents, points, cache=cache)
    again = flux_density(made, currents, points, cache=cache)
    other = flux_density(made, currents[::-1], points, cache=cache)
    assert (fresh == again).all()
    assert (fresh[::-1] == other).all()
