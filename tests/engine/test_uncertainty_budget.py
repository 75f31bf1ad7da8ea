"""Budgets of uncertainty against closed forms, and in assessments."""

from __future__ import annotations

import dataclasses
from collections.abc import Sequence
from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace

from engine import layout_file
from engine.assessment import assess
from engine.budget import Budget
from engine.case_fields import CaseCurrents
from engine.circuits import (
    Circuit,
    ConductorCurrent,
    DirectCurrents,
    LineLoad,
    LineLoads,
    NeutralShare,
)
from engine.conductors import conductors
from engine.currents import case_phasors
from engine.decisions import state_of
from engine.edits import replaced
from engine.field import responses
from engine.items import ValueOrigin
from engine.layout import Layout, Settings
from engine.loaded_layout import loaded_layout
from engine.moved_conductors import respaced, shifted
from engine.place_budgets import place_budgets
from engine.places import Receptor, Tolerances, Uncertainty, Zone
from engine.runs import (
    CircuitShare,
    Flat,
    FreeSection,
    Round,
    Run,
    Slot,
    SlotLoad,
)
from engine.varied_currents import CircuitAtPlace, Spread
from engine.varied_sharing import SharingAtPlace, parallel_sets

SAMPLES = Path(__file__).parents[2] / "sample_layouts"

#: µ0 / 2π [T m/A]
PER_LINE = 2e-7
PITCH, AWAY = 0.15, 2.0
NONE = Tolerances(
    current=0, angle=0, unbalance=0, net_current=0, pitch=0, position=0, place=0,
    model=0,
)  # fmt: skip


def direct(name: str, current: float) -> Circuit:
    currents = (ConductorCurrent(label="L+", rms=current),)
    return Circuit(
        id=name,
        supply="dc",
        base_frequency=0.0,
        demand=DirectCurrents(currents=currents),
    )


def pair(name: str, circuit: str, y: float = 0.0, length: float = 20_000.0) -> Run:
    """Two conductors along x, side by side along y: minus on the left, at +y."""
    half = length / 2
    return Run(
        id=name,
        route=((-half, y, 0.0), (half, y, 0.0)),
        section=Flat(
            circuits=(CircuitShare(circuit=circuit),),
            order=("L-", "L+"),
            pitch=PITCH,
            shape=Round(diameter=0.01),
        ),
    )


def layout_with(tolerances: Tolerances, *currents: float) -> Layout:
    """Pairs at y 0, 1, … and a receptor at y −2 in their plane."""
    circuits = tuple(direct(f"C{k}", x) for k, x in enumerate(currents))
    runs = tuple(pair(f"R{k}", c.id, float(k)) for k, c in enumerate(circuits))
    return Layout(
        settings=Settings(tolerances=tolerances),
        circuits=circuits,
        runs=runs,
        receptors=(Receptor(id="here", at=(0.0, -AWAY, 0.0)),),
    )


def pair_field(current: float, away: float, pitch: float = PITCH) -> float:
    """Two long opposite currents in the plane of the pair. [T]"""
    return PER_LINE * current * (1 / (away - pitch / 2) - 1 / (away + pitch / 2))


def only(layout: Layout, **options: object) -> Budget:
    (budget,) = place_budgets(assess(layout), **options)
    return budget


# ---- closed forms


def test_variance_of_currents_is_that_of_a_sum() -> None:
    budget = only(layout_with(replace(NONE, current=0.05), 100.0, 300.0))
    parts = [0.05 * pair_field(100, AWAY), 0.05 * pair_field(300, AWAY + 1)]
    assert budget.value == pytest.approx(sum(parts) / 0.05, rel=1e-5)
    found = {line.item: line for line in budget.lines}
    assert found["C0"].standard == pytest.approx(parts[0], rel=1e-5)
    assert found["C1"].standard == pytest.approx(parts[1], rel=1e-5)
    assert budget.standard == pytest.approx(np.hypot(*parts), rel=1e-5)
    assert budget.expanded(2.0) == pytest.approx(2 * np.hypot(*parts), rel=1e-5)
    # The lines are ranked, and their shares are those of the variance.
    shares = [line.share for line in budget.lines]
    assert shares == sorted(shares, reverse=True)
    assert sum(shares) == pytest.approx(1)


def test_currents_drawn_at_random_agree_with_the_propagation() -> None:
    layout = layout_with(replace(NONE, current=0.05), 100.0, 300.0)
    budget = only(layout, n_samples=20_000)
    drawn = budget.sampled
    # The standard error of a standard deviation of 20 000 values is 0.5 %.
    assert drawn.standard == pytest.approx(budget.currents_standard, rel=0.02)
    assert budget.currents_standard == budget.standard
    assert drawn.p50 == pytest.approx(budget.value, rel=0.002)
    # Quantiles of the normal distribution.
    for low_or_high, sign in ((drawn.p5, -1), (drawn.p95, 1)):
        expected = budget.value + sign * 1.6449 * budget.standard
        assert low_or_high == pytest.approx(expected, rel=0.005)


def test_the_same_seed_draws_the_same_currents() -> None:
    assessment = assess(layout_with(Tolerances(), 100.0))
    (one,) = place_budgets(assessment, seed=7)
    (same,) = place_budgets(assessment, seed=7)
    (other,) = place_budgets(assessment, seed=8)
    assert one == same
    assert one.sampled != other.sampled
    assert one.lines == other.lines


def test_pitch_is_propagated_by_its_derivative() -> None:
    budget = only(layout_with(replace(NONE, pitch=0.01), 100.0))
    wide, close = (pair_field(100, AWAY, f * PITCH) for f in (1.01, 0.99))
    (line,) = budget.lines
    assert (line.input, line.item, line.tolerance) == ("section pitch", "R0", 0.01)
    assert line.effect == pytest.approx((wide - close) / 2, rel=1e-3)
    assert line.standard == pytest.approx((wide - close) / 2, rel=1e-3)


def test_positions_are_propagated_by_their_derivatives() -> None:
    step = 0.01
    nearer, farther = (pair_field(100, AWAY + d) for d in (-step, step))
    budget = only(layout_with(replace(NONE, position=step), 100.0))
    by_axis = {line.axis: line for line in budget.lines}
    # Further along y the run is further away.
    assert by_axis["y"].effect == pytest.approx((farther - nearer) / 2, rel=1e-3)
    assert by_axis["x"].standard < 1e-6 * by_axis["y"].standard
    # Across the plane the field has no slope.
    assert abs(by_axis["z"].effect) < 1e-6 * by_axis["y"].standard
    budget = only(layout_with(replace(NONE, place=step), 100.0))
    by_axis = {line.axis: line for line in budget.lines}
    assert by_axis["y"].item == "here"
    assert by_axis["y"].effect == pytest.approx((nearer - farther) / 2, rel=1e-3)


def test_first_three_lines_of_a_usual_budget_come_to_nine_per_cent() -> None:
    # Common practice: 5 % of current, 7 mm on 150 mm, 50 mm on 2 m, which counts
    # twice for a pair; rounded to 5 % each they are 8.7 % together.
    tolerances = replace(NONE, current=0.05, pitch=7 / 150, place=0.05)
    budget = only(layout_with(tolerances, 100.0))
    expected = np.linalg.norm([0.05, 7 / 150, 2 * 0.05 / 2])
    # The pair is not quite a dipole at 13 pitches.
    assert budget.relative == pytest.approx(expected, rel=0.005)
    assert budget.relative == pytest.approx(0.087, abs=0.003)


def lines_of(rms: float, *lags: float) -> LineLoads:
    labels = ("L1", "L2", "L3")
    return LineLoads(
        loads=tuple(
            LineLoad(label=x, rms=rms, lag=lag)
            for x, lag in zip(labels, lags, strict=False)
        )
    )


def two_single_phases(tolerances: Tolerances, lag: float) -> Layout:
    """The same pair twice, at equal distance on two sides, lagging by an angle."""
    circuits = tuple(
        Circuit(id=id, supply="single-phase", demand=lines_of(100.0, angle))
        for id, angle in (("A", 0.0), ("B", lag))
    )
    runs = tuple(
        replace(
            pair(f"R{c.id}", c.id, y),
            section=Flat(
                circuits=(CircuitShare(circuit=c.id),),
                order=order,
                pitch=PITCH,
                shape=Round(diameter=0.01),
            ),
        )
        for c, y, order in (
            (circuits[0], AWAY, ("N", "L1")),
            (circuits[1], -AWAY, ("L1", "N")),
        )
    )
    return Layout(
        settings=Settings(tolerances=tolerances),
        circuits=circuits,
        runs=runs,
        receptors=(Receptor(id="here", at=(0.0, 0.0, 0.0)),),
    )


def parallel_pair(tolerance: float, **changes: float) -> Layout:
    """L+ in two conductors at y ±0.2, L− in one at y −0.6; along x, 20 km."""
    slots = tuple(
        Slot(
            name=name, u=u, v=0, shape=Round(diameter=0.01),
            loads=(SlotLoad(circuit="C0", label=label, share=share),),
        )
        for name, u, label, share in (
            ("a", 0.2, "L+", 0.5), ("m", 0.6, "L-", 1.0), ("b", -0.2, "L+", 0.5),
        )
    )  # fmt: skip
    run = Run(id="R0", route=((-1e4, 0, 0), (1e4, 0, 0)),
              section=FreeSection(slots=slots))  # fmt: skip
    return Layout(
        settings=Settings(tolerances=replace(NONE, sharing=tolerance, **changes)),
        circuits=(direct("C0", 100.0),),
        runs=(run,),
        receptors=(Receptor(id="here", at=(0.0, -AWAY, 0.0)),),
    )


def test_unequal_sharing_is_propagated_through_both_conductors() -> None:
    budget = only(parallel_pair(0.1), n_samples=20_000)
    (line,) = budget.lines
    assert (line.input, line.item, line.tolerance) == ("sharing", "R0", 0.1)
    # One carries 10 % of its half more; half of that is taken from each: ±2.5 A. Both
    # may: √2 of that.
    apart = PER_LINE * (1 / (AWAY - 0.2) - 1 / (AWAY + 0.2))
    assert line.standard == pytest.approx(np.sqrt(2) * 2.5 * apart, rel=1e-4)
    assert budget.sampled.standard == pytest.approx(budget.currents_standard, rel=0.02)


def test_sharing_is_not_counted_unless_entered() -> None:
    assert only(parallel_pair(0.0)).lines == ()
    assert Tolerances().sharing == 0


def test_runs_that_share_a_current_equally_are_parallel() -> None:
    circuit = direct("C0", 100.0)
    shared = CircuitShare(circuit="C0", share=0.5)
    runs = tuple(
        replace(run, section=replace(run.section, circuits=(shared,)))
        for run in (pair("R0", "C0", 0.0), pair("R1", "C0", 1.0))
    )
    layout = Layout(
        settings=Settings(tolerances=replace(NONE, sharing=0.1)),
        circuits=(circuit,), runs=runs,
        receptors=(Receptor(id="here", at=(0.0, -AWAY, 0.0)),),
    )  # fmt: skip
    (line,) = only(layout).lines
    # L+ and L− share each by itself: 2.5 A go over from one run to the other.
    near, far = PITCH / 2, 1.0
    parts = [
        PER_LINE * 2.5 * (1 / (AWAY + side) - 1 / (AWAY + far + side))
        for side in (-near, near)
    ]
    assert line.standard == pytest.approx(np.sqrt(2) * np.hypot(*parts), rel=1e-3)


def test_sharing_is_closed_at_the_ends() -> None:
    layout = parallel_pair(0.1)
    short = replace(layout.runs[0], route=((-1, 0, 0), (1, 0, 0)))
    (found,) = (
        s for s in parallel_sets(conductors(replaced(layout, short)))
        if s.label == "L+"
    )  # fmt: skip
    parts = conductors(replaced(layout, short))
    points = np.array([(0.3, 0.4, 0.5)])
    here = SharingAtPlace(parts, responses(parts, points), points)
    fields = loaded_layout(replaced(layout, short), layout.cases, None, None).fields
    case = fields.cases[0]
    change = here.changes(found, case, 0.1)[0, 0, 0]
    # A loop of 2.5 A around both conductors, as a polyline.
    ring = [(-1, 0, 0), (-1, 0.2, 0), (1, 0.2, 0), (1, -0.2, 0), (-1, -0.2, 0),
            (-1, 0, 0)]  # fmt: skip
    loop = dataclasses.replace(
        parts[0], path=np.array(ring, np.float64), axes=np.zeros((6, 2, 3)),
        shape=Round(diameter=1e-6),
    )  # fmt: skip
    expected = 2.5 * responses([loop], points)[0, 0]
    assert np.abs(change.real) == pytest.approx(np.abs(expected), rel=1e-6)


def test_angles_between_circuits_are_propagated() -> None:
    # |B1 + B2 e^{jφ}| at 90° turns by B1 B2 sin φ / |B| a radian.
    budget = only(two_single_phases(replace(NONE, angle=1.0), 90.0))
    one = pair_field(100, AWAY)
    assert budget.value == pytest.approx(np.sqrt(2) * one, rel=1e-5)
    expected = np.radians(1.0) * one / np.sqrt(2)
    assert [line.item for line in budget.lines] in (["A", "B"], ["B", "A"])
    for line in budget.lines:
        assert line.unit == "degrees"
        assert line.standard == pytest.approx(expected, rel=1e-3)
    assert {np.sign(line.effect) for line in budget.lines} == {-1, 1}


def test_a_field_that_cancels_keeps_its_uncertainty() -> None:
    budget = only(two_single_phases(replace(NONE, current=0.05), 1e-6))
    one = pair_field(100, AWAY)
    assert budget.value < 1e-6 * one
    assert budget.standard == pytest.approx(np.hypot(0.05 * one, 0.05 * one), rel=1e-3)


def test_model_is_a_part_of_the_value() -> None:
    budget = only(layout_with(replace(NONE, model=0.03), 100.0))
    (line,) = budget.lines
    assert line.standard == pytest.approx(0.03 * budget.value)
    assert budget.relative == pytest.approx(0.03)


def test_without_tolerances_there_is_no_uncertainty() -> None:
    budget = only(layout_with(NONE, 100.0))
    assert budget.lines == ()
    assert budget.standard == 0
    assert budget.sampled.p5 == budget.sampled.p95 == budget.value


def test_what_is_measured_counts_less() -> None:
    layout = layout_with(replace(NONE, current=0.05, position=0.01), 100.0)
    before = only(layout)
    circuit, run = layout.circuits[0], layout.runs[0]
    measured = replaced(
        layout,
        replace(circuit, origins=(ValueOrigin(field="demand", kind="measured"),)),
        replace(run, origins=(ValueOrigin(field="route", kind="document"),)),
    )
    after = only(measured)
    one, other = (
        {x.input: x for x in b.lines if x.axis in "y"} for b in (before, after)
    )
    assert one["current magnitude"].origin == "assumed"
    assert other["current magnitude"].origin == "measured"
    assert other["current magnitude"].tolerance == 0.025
    half = 0.5 * one["current magnitude"].standard
    assert other["current magnitude"].standard == pytest.approx(half)
    assert other["position"].origin == "document"
    assert other["position"].standard == one["position"].standard


# ---- currents still close


def at_unit_axes(circuit: Circuit, labels: Sequence[str]) -> CircuitAtPlace:
    """A circuit alone in its case, each label of which has a field of 1 T/A."""
    layout = Layout(circuits=(circuit,))
    phasors = case_phasors(layout, layout.cases[0])
    none = np.zeros((len(phasors.components), 0), np.complex128)
    case = CaseCurrents(layout.cases[0], phasors.components, none, phasors, ())
    per_label = {(circuit.id, label): np.ones((1, 3)) for label in labels}
    return CircuitAtPlace(circuit, case, per_label, 1)


@pytest.mark.parametrize("supply", ["three-phase four-wire", "three-phase three-wire"])
@pytest.mark.parametrize("share", [None, 0.4])
def test_varied_currents_sum_to_zero(supply: str, share: float | None) -> None:
    net = None if share is None else NeutralShare(share=share)
    if supply == "three-phase three-wire":
        net = None
    circuit = Circuit(
        id="C", supply=supply, demand=lines_of(100.0, 10.0, 20.0, 30.0), net_current=net
    )
    if supply == "three-phase three-wire":
        circuit = replace(
            circuit, demand=lines_of(100.0, 0.0, 0.0, 0.0), neutral="none"
        )
    labels = ["L1", "L2", "L3"]
    labels += ["N"] if "four" in supply else []
    labels += ["stray"] if net is not None else []
    # Every label has the same field, so that what is left is the sum of currents.
    at_place = at_unit_axes(circuit, labels)
    spread = Spread(0.05, 0.1, 0.05, 0.2)
    for name, changes in at_place.one_by_one(spread):
        assert np.abs(changes).max() < 1e-10, name
    drawn = at_place.at_random(spread, 50, np.random.default_rng(1))
    assert np.abs(drawn).max() < 1e-10


def test_stray_takes_its_share_of_an_unbalance() -> None:
    circuit = Circuit(
        id="C",
        demand=lines_of(100.0, 0.0, 0.0, 0.0),
        net_current=NeutralShare(share=0.25),
    )
    at_place = at_unit_axes(circuit, ("L1", "L2", "L3", "N", "stray"))
    k = {label: i for i, label in enumerate(at_place.labels)}
    up = np.zeros_like(at_place.phasors)
    up[k["L2"]] = 4.0
    closed = at_place.closed(up)
    assert closed[k["N"]] == pytest.approx(-3.0)
    assert closed[k["stray"]] == pytest.approx(-1.0)


# ---- conductors moved


def vertex_sums(parts: list) -> dict[tuple, dict[str, float]]:
    """Current into each vertex by label."""
    sums: dict[tuple, dict[str, float]] = {}
    for conductor in parts:
        for end, sign in ((0, -1.0), (-1, 1.0)):
            key = tuple(np.round(conductor.path[end], 6) + 0.0)
            at = sums.setdefault(key, {})
            for load in conductor.loads:
                label = f"{load.circuit}/{load.label}"
                at[label] = at.get(label, 0.0) + sign * load.share
    return sums


def open_ends(parts: list) -> set[tuple]:
    """Vertices where one label's current alone begins or ends."""
    return {
        key
        for key, at in vertex_sums(parts).items()
        if len([x for x in at.values() if abs(x) > 1e-9]) == 1
    }


@pytest.mark.parametrize("name", ["imaging-corridor", "office-over-switch-room"])
def test_moved_conductors_still_meet(name: str) -> None:
    layout = layout_file.read(SAMPLES / f"{name}.json")
    parts = conductors(layout)
    assert open_ends(list(parts)) == set()
    for item in (*layout.runs, *layout.equipment):
        moved = shifted(parts, item.id, np.array([0.011, 0.023, 0.037]))
        new = list(parts)
        for k, conductor in zip(moved.indices, moved.conductors, strict=True):
            new[k] = conductor
        assert open_ends([c for c in new if c is not None]) == set(), item.id


def test_a_moved_run_has_the_field_of_a_layout_with_it_there() -> None:
    layout = layout_file.read(SAMPLES / "imaging-corridor.json")
    by = np.array([0.03, -0.02, 0.0])
    run = next(r for r in layout.runs if r.id == "R3-neutral")
    there = replace(run, route=tuple(tuple(np.add(p, by)) for p in run.route))
    parts, point = conductors(layout), np.array([[7.5, 1.2, 1.0]])
    moved = shifted(parts, run.id, by)
    expected = conductors(replaced(layout, there))
    by_key = {c.key: c for c in expected}
    for conductor in moved.conductors:
        np.testing.assert_allclose(conductor.path, by_key[conductor.key].path)
    np.testing.assert_allclose(
        responses(moved.conductors, point),
        responses([by_key[c.key] for c in moved.conductors], point),
        rtol=1e-3,  # The links' sections keep their directions.
    )


def test_respaced_slots_stand_about_their_middle() -> None:
    layout = layout_with(NONE, 100.0)
    parts = conductors(layout)
    moved = respaced(parts, "R0", 1.1)
    y = sorted(c.path[0, 1] for c in moved.conductors if c.role == "run")
    assert y == pytest.approx([-1.1 * PITCH / 2, 1.1 * PITCH / 2])
    ends = [c for c in moved.conductors if c.role == "closing link"]
    assert len(ends) == 4
    assert open_ends(list(moved.conductors)) == set()
    with pytest.raises(ValueError, match="no common middle line"):
        respaced(parts, "elsewhere", 1.1)


# ---- in an assessment


def test_assessment_takes_the_uncertainty_from_the_budget() -> None:
    layout = layout_file.read(SAMPLES / "imaging-corridor.json")
    settings = replace(layout.settings, uncertainty=Uncertainty(kind="from the budget"))
    chosen = replace(layout, settings=settings)
    entered, budgeted = assess(layout), assess(chosen)
    budgets = {b.place: b for b in place_budgets(budgeted)}
    n_other_states = 0
    for before, after in zip(entered.comparisons, budgeted.comparisons, strict=True):
        assert (before.value, before.ratio) == (after.value, after.ratio)
        assert after.uncertainty != before.uncertainty
        n_other_states += before.state != after.state
        assert after.state == state_of(after.ratio, after.uncertainty_ratio)
        if after.counted:
            budget = budgets[after.place]
            assert after.uncertainty == pytest.approx(2 * budget.standard)
            assert after.uncertainty_ratio == pytest.approx(2 * budget.ratio_standard)
    assert n_other_states > 0


def test_a_place_can_take_its_own_uncertainty_from_the_budget() -> None:
    layout = layout_file.read(SAMPLES / "small-switch-room.json")
    chair = next(r for r in layout.receptors if r.id == "chair")
    own = Uncertainty(kind="from the budget", absolute=1e-8, coverage=1.0)
    made = assess(replaced(layout, replace(chair, uncertainty=own)))
    (budget,) = place_budgets(made, places=("chair",))
    of_chair = next(c for c in made.comparisons if c.place == "chair")
    assert of_chair.uncertainty == pytest.approx(budget.standard + 1e-8)
    of_zone = next(c for c in made.comparisons if c.place == "reception-zone")
    assert of_zone.uncertainty == pytest.approx(
        layout.settings.uncertainty.relative * of_zone.value
    )


def test_a_mean_over_heights_has_a_budget_of_its_mean() -> None:
    layout = layout_with(replace(NONE, current=0.05), 100.0)
    zone = Zone(
        id="zone",
        outline=((-0.5, -3.0), (0.5, -3.0), (0.5, -2.0), (-0.5, -2.0)),
        floor_level=0.0,
        rule="three-height mean",
    )
    made = assess(replace(layout, zones=(zone,), receptors=()))
    (budget,) = place_budgets(made)
    assert len(budget.at) == 3
    assert budget.value == pytest.approx(made.zones[0].maxima[0].value)
    assert budget.relative == pytest.approx(0.05, rel=1e-6)


def test_samples_agree_with_their_propagation() -> None:
    layout = layout_file.read(SAMPLES / "imaging-corridor.json")
    for budget in place_budgets(assess(layout)):
        # Curvature of the cancelling field: up to a tenth of its spread.
        assert budget.sampled.standard == pytest.approx(
            budget.currents_standard, rel=0.12
        )
        assert budget.sampled.p5 < budget.value < budget.sampled.p95
