"""While a run is dragged, what stands still is summed once and only the run anew."""

from __future__ import annotations

from collections.abc import Sequence

import msgspec
import numpy as np
import numpy.typing as npt
import pytest

from app.field_store import FieldStore, Sample, sample_of
from engine import field
from engine.circuits import BalancedCurrent, Circuit
from engine.conductor import Conductor
from engine.conductors import conductors
from engine.currents import case_phasors, conductor_currents
from engine.edits import replaced
from engine.layout import Layout
from engine.runs import CircuitShare, ParallelSets, Run

Complexes = npt.NDArray[np.complex128]

_ROW = 6


@pytest.fixture
def layout() -> Layout:
    """36 trays with ten conductors each, closed at both ends."""
    section = ParallelSets(
        circuits=(CircuitShare(circuit="C"),),
        orders=(
            ("L1", "L2", "L3", "N"),
            ("N", "L3", "L2", "L1"),
            ("L1", "L2"),
        ),
        pitch=0.03,
        set_pitch=0.13,
    )
    runs = [
        Run(
            id=f"tray-{i}",
            kind="cable ladder",
            route=((x, y, 2.5), (x + 1.2, y, 2.5), (x + 1.2, y + 1.2, 2.5)),
            section=section,
        )
        for i in range(_ROW * _ROW)
        for x, y in ((2.0 * (i % _ROW), 2.0 * (i // _ROW)),)
    ]
    circuit = Circuit(id="C", demand=BalancedCurrent(rms=100.0))
    return Layout(circuits=(circuit,), runs=tuple(runs))


@pytest.fixture
def sample() -> Sample:
    """Points at the height of the trays and above, some of them near a dragged one."""
    generator = np.random.default_rng(7)
    spread = generator.uniform((-1, -1, 2.4), (12, 12, 4.0), (400, 3))
    near = generator.uniform((0, 0, 2.4), (2, 2, 2.6), (60, 3))
    return sample_of(np.concatenate([spread, near]))


def moved(layout: Layout, by: float, which: int = 0) -> Layout:
    run = layout.runs[which]
    route = tuple((x + by, y, z) for x, y, z in run.route)
    return replaced(layout, msgspec.structs.replace(run, route=route))


def currents_of(layout: Layout, parts: Sequence[Conductor]) -> Complexes:
    return conductor_currents(case_phasors(layout, layout.cases[0]), parts)


def stored(store: FieldStore, layout: Layout, sample: Sample) -> Complexes:
    parts = conductors(layout)
    return store.flux_density(parts, currents_of(layout, parts), sample)


def largest_error(found: Complexes, layout: Layout, sample: Sample) -> float:
    """Against everything at once, relative to the sum of the magnitudes there."""
    parts = conductors(layout)
    currents = currents_of(layout, parts)
    whole = field.flux_density(parts, currents, sample.points)
    per_ampere = field.responses(parts, sample.points)
    each = np.linalg.norm(per_ampere, axis=2)
    magnitudes = np.abs(currents) @ each
    return float((np.abs(found - whole).max(axis=2) / magnitudes).max())


@pytest.mark.parametrize("limit", [256 * 2**20, 0])
def test_rest_and_moved_run_make_the_whole_field(
    layout: Layout, sample: Sample, limit: int
) -> None:
    store = FieldStore(limit)
    stored(store, layout, sample)
    for step in range(1, 6):
        dragged = moved(layout, 0.05 * step)
        found = stored(store, dragged, sample)
        assert largest_error(found, dragged, sample) < 1e-14


def test_drags_one_after_the_other_leave_nothing_but_rounding(
    layout: Layout, sample: Sample
) -> None:
    store = FieldStore(0)
    stored(store, layout, sample)
    for k in range(60):
        layout = moved(layout, 0.02, which=k % len(layout.runs))
        found = stored(store, layout, sample)
    assert largest_error(found, layout, sample) < 1e-13


def test_a_drag_computes_the_moved_run_only(
    layout: Layout, sample: Sample, monkeypatch: pytest.MonkeyPatch
) -> None:
    store = FieldStore(0)
    stored(store, layout, sample)
    computed: list[set[str]] = []
    true = field.flux_density

    def watched(parts: Sequence[Conductor], *rest: object, **more: object) -> Complexes:
        computed.append({part.item for part in parts})
        return true(parts, *rest, **more)

    monkeypatch.setattr(field, "flux_density", watched)
    for step in range(1, 4):
        stored(store, moved(layout, 0.05 * step, which=3), sample)
    # At the first step once where it was, then where it is.
    assert computed == [{"tray-3"}] * 4


def test_the_same_layout_again_computes_nothing(
    layout: Layout, sample: Sample, monkeypatch: pytest.MonkeyPatch
) -> None:
    store = FieldStore(0)
    first = stored(store, layout, sample)

    def never(*_: object, **__: object) -> None:
        raise AssertionError("nothing changed")

    monkeypatch.setattr(field, "flux_density", never)
    renamed = replaced(layout, msgspec.structs.replace(layout.runs[1], name="Other"))
    assert np.array_equal(stored(store, renamed, sample), first)


def test_what_is_handed_out_may_be_changed(layout: Layout, sample: Sample) -> None:
    store = FieldStore()
    first = stored(store, layout, sample)
    kept = first.copy()
    first[:] = 0.0
    assert np.array_equal(stored(store, layout, sample), kept)
    dragged = moved(layout, 0.1)
    assert largest_error(stored(store, dragged, sample), dragged, sample) < 1e-14


def test_a_run_that_goes_and_one_that_comes_are_taken_into_account(
    layout: Layout, sample: Sample
) -> None:
    store = FieldStore(0)
    stored(store, layout, sample)
    fewer = msgspec.structs.replace(layout, runs=layout.runs[:-1])
    assert largest_error(stored(store, fewer, sample), fewer, sample) < 1e-14
    assert largest_error(stored(store, layout, sample), layout, sample) < 1e-14
