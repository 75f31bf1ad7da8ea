"""Far conductors interpolated in boxes: never wronger than the bound says."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray

from engine import field
from engine.adaptive_maps import adaptive_layer
from engine.case_fields import CaseCurrents, CaseFields
from engine.circuits import LoadCase
from engine.conductor import Conductor
from engine.currents import CasePhasors, Component
from engine.errors import ComputationCancelled
from engine.field import flux_density, interpolated_flux_density
from engine.field.filaments import orders_of
from engine.field.kernel import TILE, tile_responses
from engine.field.leg_bundles import bundles_of
from engine.field.legs import legs_of
from engine.field.many import FEWEST_LEGS, PRECISION
from engine.field.nested_boxes import Box, interpolation_errors
from engine.runs import Bar, Round
from engine.sampling import horizontal, on_plane

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
TURNS = np.exp(-2j * np.pi / 3 * np.arange(3))


def shift(x: float, y: float, z: float) -> Floats:
    return np.array([x, y, z])


def routes(
    corners: Floats,
    group: str,
    count: int = 4,
    pitch: float = 0.03,
    shape: Round | Bar = Round(diameter=1e-4),  # noqa: B008
) -> list[Conductor]:
    """Conductors side by side along x; thin ones are their axes nearly everywhere."""
    axes = np.tile(np.eye(3)[1:], (len(corners), 1, 1))
    places = [shift(0, (k - (count - 1) / 2) * pitch, 0) for k in range(count)]
    return [
        Conductor(f"{group}/{k}", group, f"{k}", "run", corners + place, axes, shape,
                  (), group)
        for k, place in enumerate(places)
    ]  # fmt: skip


def random_site(
    rng: np.random.Generator, feeders: int, components: int = 1
) -> tuple[list[Conductor], Complexes]:
    """Balanced feeders of four, some single wires, and a DC pair that turns back."""
    parts: list[Conductor] = []
    columns = []
    for k in range(feeders):
        corners = rng.uniform((-20, -20, 1.5), (20, 20, 6), (4, 3))
        parts += routes(corners, f"feeder {k}")
        lines = rng.uniform(20, 200, (components, 1)) * TURNS
        lines = lines * rng.uniform(0.9, 1.1, (components, 3))
        columns.append(np.column_stack([lines, -lines.sum(axis=1)]))
    for k in range(2):
        parts += routes(rng.uniform(-20, 20, (3, 3)) + shift(0, 0, 22), f"wire {k}", 1)
        columns.append(rng.normal(size=(components, 1)) + 1j)
    corners = rng.uniform((-20, -20, 1.5), (20, 20, 6), (3, 3))
    out, back = routes(corners, "pair", 2)
    parts += [out, Conductor(back.key, "pair", "-", "run", back.path[::-1],
                             back.axes[::-1], back.shape, (), "pair")]  # fmt: skip
    columns.append(np.full((components, 2), 70.0 + 0j))
    return parts, np.concatenate(columns, axis=1)


def plane(size: float, count: int, z: float = 1.0) -> Floats:
    x = np.linspace(-size / 2, size / 2, count)
    grid = np.stack(np.meshgrid(x, x), axis=-1).reshape(-1, 2)
    return np.column_stack([grid, np.full(len(grid), z)])


def inclined(points: Floats) -> Floats:
    turn = np.linalg.qr(np.array([[2.0, 1, 0], [-1, 2, 1], [0, 1, -1]]))[0]
    turned: Floats = (points - shift(0, 0, 1)) @ turn * 0.2
    return turned


def in_space(rng: np.random.Generator) -> Floats:
    return rng.uniform((-6, -6, 0), (6, 6, 1.2), (4000, 3))


def sizes(b: Complexes) -> Floats:
    return np.asarray(np.sqrt((np.abs(b) ** 2).sum(axis=2)))


def assert_bounded(
    parts: list[Conductor],
    currents: Complexes,
    points: Floats,
    precision: float = PRECISION,
) -> float:
    """Deviation within the bound, the bound within what is asked; the pairs' share."""
    assert not field.pays(parts, len(points))
    true = flux_density(parts, currents, points)
    found = interpolated_flux_density(parts, currents, points, precision=precision)
    off = sizes(found.b - true)
    # Sums in another order round otherwise.
    rounding = 1e-12 * sizes(true).max()
    assert (off <= found.bound + rounding).all()
    assert (found.bound <= precision * sizes(found.b)).all()
    legs = sum(len(part.path) - 1 for part in parts)
    return found.pairs / (legs * len(points))


@pytest.mark.parametrize("precision", [1e-6, PRECISION, 0.05, 0.5])
@pytest.mark.parametrize("seed", [1, 2, 3])
def test_random_sites_keep_the_bound(seed: int, precision: float) -> None:
    parts, currents = random_site(np.random.default_rng(seed), 12)
    assert assert_bounded(parts, currents, plane(6, 80), precision) < 1


@pytest.mark.parametrize("seed", [4, 5])
def test_any_plane_and_any_points_in_space_keep_the_bound(seed: int) -> None:
    rng = np.random.default_rng(seed)
    parts, currents = random_site(rng, 10)
    assert assert_bounded(parts, currents, inclined(plane(20, 70)), 0.01) < 1
    assert assert_bounded(parts, currents, in_space(rng), 0.01) < 1
    line = np.column_stack([np.linspace(-5, 5, 2000)] * 2 + [np.ones(2000)])
    assert assert_bounded(parts, currents, line, 0.01) < 0.5


def test_each_component_keeps_its_own_bound() -> None:
    """One of a thousandth of the other, and one in which nothing flows."""
    rng = np.random.default_rng(6)
    parts, currents = random_site(rng, 10, components=3)
    currents[1] *= 1e-3
    currents[2] = 0
    found = interpolated_flux_density(parts, currents, plane(5, 60))
    assert not found.b[2].any()
    assert not found.bound[2].any()
    assert_bounded(parts, currents, plane(5, 60), 1e-2)


@pytest.mark.parametrize("away", [1.0, 5.0, 40.0])
def test_what_is_left_of_a_balanced_bundle_is_exact_near_and_far(away: float) -> None:
    """At 40 m a thousandth of what each conductor would give is left."""
    corners = np.array([[-30.0, 0, 0], [30, 0, 0]])
    parts = routes(corners, "feeder", 3)
    points = plane(2, 60) + shift(0, away + 1, 0)
    assert_bounded(parts, np.array([100 * TURNS]), points)


def test_one_unbalanced_conductor_keeps_the_bound() -> None:
    parts = routes(np.array([[-3.0, 0, 0], [3, 0, 0], [3, 0, 9]]), "wire", 1)
    share = assert_bounded(parts, np.array([[100 + 0j]]), plane(3, 90) + shift(0, 6, 0))
    # Two legs at the nodes of a few boxes, and at 64 places beforehand.
    assert share < 0.5


@pytest.mark.parametrize(
    "shape", [Bar(width=0.1, thickness=0.01), Round(diameter=0.03)]
)
def test_beside_conductors_the_sections_are_as_exact_as_ever(
    shape: Round | Bar,
) -> None:
    """Two choices of filaments, each within half a thousandth of the closed group."""
    parts = routes(np.array([[-8.0, 0, 1.1], [8, 0, 1.1]]), "near", 3, 0.2, shape)
    parts += routes(np.array([[-8.0, 30, 3], [8, 30, 3]]), "far", 3, 0.2, shape)
    currents = np.array([[*(400 * TURNS), *(200 * TURNS)]])
    points = plane(3, 70)
    points = points[~field.inside(parts, points)]
    true = flux_density(parts, currents, points)
    found = interpolated_flux_density(parts, currents, points)
    assert (sizes(found.b - true) <= (1e-3 + PRECISION) * sizes(true)).all()


def test_sections_that_differ_are_never_only_their_axes() -> None:
    """A neutral of half the size: alone it is as exact as it must be from afar."""
    corners = np.array([[-8.0, 0, 3], [8, 0, 3]])
    parts = routes(corners, "board", 3, 0.2, Bar(width=0.1, thickness=0.01))
    parts += routes(corners + shift(0, 0.4, 0), "board", 1, 0.2,
                    Bar(width=0.05, thickness=0.01))  # fmt: skip
    currents = np.array([[100, -90, 40, -50 + 0j]])
    points = plane(3, 60) + shift(0, 5, 0)
    true = flux_density(parts, currents, points)
    found = interpolated_flux_density(parts, currents, points)
    assert (sizes(found.b - true) <= (1e-3 + PRECISION) * sizes(true)).all()


@pytest.mark.parametrize("away", [2.0, 3.0, 6.0, 20.0])
@pytest.mark.parametrize("balanced", [False, True])
def test_the_bound_of_one_box_holds_and_is_no_fancy(
    away: float, balanced: bool
) -> None:
    rng = np.random.default_rng(7)
    corners = np.array([[-1.0, 0, 0], [4, 1, 0.5]])
    parts = routes(corners, "b", 2)
    currents = np.array([[1.0 + 0j, -1.0 if balanced else 1j]])
    bundles = bundles_of(parts, currents)
    half = np.array([1.0, 0.7, 0.0])
    middle = np.array([0.5, away + 0.7, 0.3])
    box = Box.around(np.arange(2), middle + np.array([half, -half]))
    bound = np.empty((1, 1))
    interpolation_errors(middle, half, np.array(box.nodes), np.zeros(1, np.int64),
                         bundles.table, bundles.flows, bound)  # fmt: skip
    places = middle + half * rng.uniform(-1, 1, (2000, 3))
    at_nodes = flux_density(parts, currents, box.places())[0]
    found = box.weights(places) @ at_nodes
    true = flux_density(parts, currents, places)[0]
    off = sizes((found - true)[None]).max()
    # Rounding of the nodes' values, which are 2e-7 and less, and what it grows to.
    assert off <= bound[0, 0] + 1e-21
    assert bound[0, 0] < 0.1 * sizes(at_nodes[None]).max()


def test_a_large_site_is_the_sum_of_its_parts() -> None:
    """Parts below the size from which `flux_density` interpolates."""
    rng = np.random.default_rng(8)
    parts, currents = random_site(rng, 420)
    points = plane(8, 110)
    assert field.pays(parts, len(points))
    whole = flux_density(parts, currents, points)
    half = len(parts) // 2
    pieces = [(parts[:half], currents[:, :half]), (parts[half:], currents[:, half:])]
    assert not any(field.pays(own, len(points)) for own, _ in pieces)
    true = sum(flux_density(*own, points) for own in pieces)
    assert (sizes(whole - true) <= PRECISION * sizes(true)).all()
    assert (whole != true).any()


def test_small_layouts_are_summed_directly() -> None:
    parts, currents = random_site(np.random.default_rng(9), 3)
    points = plane(3, 40)
    assert not field.pays(parts, 10**9)
    assert not field.pays(parts * FEWEST_LEGS, 1000)
    tile = points[:TILE]
    out, flags = np.empty((len(parts), TILE, 3)), np.zeros(TILE, bool)
    path = [part.path for part in parts]
    offsets = np.concatenate([[0], np.cumsum([len(p) for p in path])])
    tile_responses(tile, np.concatenate(path), offsets, np.ones(len(parts)),
                   np.arange(len(parts)), out, flags)  # fmt: skip
    direct = np.einsum("cm,mnx->cnx", currents, out)
    assert flux_density(parts, currents, tile) == pytest.approx(direct, rel=1e-12)


def test_nothing_gives_zeros() -> None:
    parts, currents = random_site(np.random.default_rng(9), 2)
    found = interpolated_flux_density(parts, 0 * currents, plane(1, 3))
    assert not found.b.any()
    assert not found.bound.any()
    assert interpolated_flux_density(parts, currents, np.zeros((0, 3))).b.size == 0
    one = interpolated_flux_density(parts, currents, np.ones((300, 3)))
    true = flux_density(parts, currents, np.ones((1, 3)))
    assert one.b == pytest.approx(np.repeat(true, 300, axis=1), rel=1e-9)
    with pytest.raises(ValueError, match="precision"):
        interpolated_flux_density(parts, currents, plane(1, 3), precision=0)


def test_cancelling_stops_and_progress_rises_to_one() -> None:
    parts, currents = random_site(np.random.default_rng(10), 20)
    asked = iter([False] * 3 + [True] * 1000)
    with pytest.raises(ComputationCancelled):
        interpolated_flux_density(
            parts, currents, plane(6, 80), cancelled=lambda: next(asked)
        )
    told: list[float] = []
    interpolated_flux_density(
        parts, currents, plane(6, 80), progress=lambda part, _: told.append(part)
    )
    assert told == sorted(told)
    assert told[-1] == 1.0


def test_results_do_not_depend_on_threads_or_on_what_was_asked_before() -> None:
    parts, currents = random_site(np.random.default_rng(11), 12)
    first = interpolated_flux_density(parts, currents, plane(6, 80))
    interpolated_flux_density(parts, 2 * currents, plane(5, 30))
    again = interpolated_flux_density(parts, currents, plane(6, 80))
    assert (first.b == again.b).all()
    assert (first.bound == again.bound).all()


def test_many_tiles_are_measured_as_each_by_itself() -> None:
    parts, _ = random_site(np.random.default_rng(12), 12)
    points = plane(30, 60)
    legs = legs_of(parts)
    whole = orders_of(parts, legs, points)
    single = [
        orders_of(parts, legs, points[first : first + TILE])[0]
        for first in range(0, len(points), TILE)
    ]
    assert (whole == np.array(single)).all()


def test_a_map_of_a_large_site_is_right_everywhere() -> None:
    rng = np.random.default_rng(13)
    parts, currents = random_site(rng, 420)
    sample = on_plane(horizontal((-7.0, 7.0), (-7.0, 7.0), 0.2), 0.1)
    assert field.pays(parts, len(sample.points))
    component = Component(50.0, 50.0, "")
    phasors = CasePhasors(LoadCase(id="all"), (component,), {}, ())
    case = CaseCurrents(phasors.case, (component,), currents, phasors, ())
    found = adaptive_layer(CaseFields(tuple(parts), (case,)), sample)
    half = len(parts) // 2
    true = flux_density(parts[:half], currents[:, :half], sample.points)
    true += flux_density(parts[half:], currents[:, half:], sample.points)
    assert found.evaluations < len(sample.points)
    assert found.ac == pytest.approx(sizes(true)[0], rel=2e-3)
