"""Zones and receptors against levels, on long wires whose field is Ampère's.

The wire runs along x at y = 0, z = 0; its return lies 5 km below, which takes less
than 0.1 % off the field within 4 m of the wire.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from msgspec.structs import replace

from engine.assessment import assess, counts, exit_code, worst_comparisons
from engine.circuits import (
    Circuit,
    CircuitFactor,
    ConductorCurrent,
    DirectCurrents,
    LoadCase,
    SpectrumLine,
)
from engine.criteria import LevelRange, LevelRanges, ReferenceLevel
from engine.equipment import ConductorLoop
from engine.errors import ComputationCancelled
from engine.field import ResponseCache
from engine.layout import Layout, Settings
from engine.maps import field_map
from engine.places import (
    DecisionRule,
    Enclosure,
    MeasuredValue,
    Receptor,
    Uncertainty,
    Zone,
)
from engine.runs import FreeSection, Round, Run, Slot, SlotLoad

AMPERES = 100.0
RADIUS = 0.01


def ampere(distance, current=AMPERES):
    return 2e-7 * current / distance


def wire(id, circuit, y=0.0, z=0.0):
    far = 5000.0
    path = ((-far, y, z), (far, y, z), (far, y, z - far), (-far, y, z - far))
    return ConductorLoop(
        id=id, path=path, circuit=circuit, label="a", shape=Round(diameter=2 * RADIUS)
    )


def circuit(id, rms=AMPERES, frequency=50.0, **fields):
    demand = DirectCurrents(currents=(ConductorCurrent(label="a", rms=rms),))
    return Circuit(
        id=id, supply="free", base_frequency=frequency, demand=demand, neutral="none",
        **fields,
    )  # fmt: skip


def level(value, *, id="level", frequencies=((1.0, 1e5),), **fields):
    ranges = tuple(
        LevelRange(f_from=a, f_to=b, coefficient=value) for a, b in frequencies
    )
    stated = {"source": "Example rule (invented)", "category": "workers"} | fields
    return ReferenceLevel(id=id, values=LevelRanges(ranges=ranges), **stated)


def zone(**fields):
    stated = {
        "id": "zone",
        "outline": ((-2, 1), (2, 1), (2, 3), (-2, 3)),
        "floor_level": 0.0,
        "heights": (0.5, 1.0, 1.5),
        "category": "workers",
        "levels": ("level",),
    }
    return Zone(**(stated | fields))


def room(*zones, levels=(), **fields):
    stated = {"circuits": (circuit("c"),), "equipment": (wire("w", "c"),)}
    return Layout(zones=zones, levels=levels, **(stated | fields))


def one(layout, **options):
    """The only comparison of a layout."""
    (comparison,) = assess(layout, **options).comparisons
    return comparison


def test_the_maximum_lies_nearest_to_the_wire_at_the_lowest_height():
    (result,) = assess(room(zone(levels=()))).zones
    (maximum,) = result.maxima
    assert maximum.value == pytest.approx(ampere(math.hypot(1, 0.5)), rel=1e-3)
    assert maximum.details.at[1:] == pytest.approx((1.0, 0.5))
    assert maximum.details.height == 0.5
    assert [h for h, _ in maximum.details.by_height] == [0.5, 1.0, 1.5]
    assert maximum.details.by_height[2][1] == pytest.approx(
        ampere(math.hypot(1, 1.5)), rel=1e-3
    )
    assert result.area == pytest.approx(8)
    assert "places at most" in result.searched


def test_heights_count_from_the_zones_own_floor():
    (result,) = assess(room(zone(levels=(), floor_level=-0.5))).zones
    assert result.maxima[0].details.at[2] == pytest.approx(0.0)
    assert result.maxima[0].details.height == pytest.approx(0.5)


def test_the_maximum_on_the_edge_of_the_clearance_is_found():
    around = zone(
        outline=((-2, -1), (2, -1), (2, 1), (-2, 1)), heights=(0.0,), levels=()
    )
    (result,) = assess(room(around)).zones
    (maximum,) = result.maxima
    # 0.2 m from the surface; the last step is well below a millimetre.
    assert maximum.value == pytest.approx(ampere(0.2 + RADIUS), rel=2e-3)
    assert maximum.value <= ampere(0.2 + RADIUS)
    assert result.masked_shares["entered-currents"] == pytest.approx(
        # Of 2 m across, to a piece of 50 mm on either side.
        0.2 + RADIUS,
        abs=0.05,
    )


def test_the_volume_rule_finds_the_surface_of_the_clearance():
    around = zone(
        outline=((-1, -1), (1, -1), (1, 1), (-1, 1)),
        heights=(0.9,),
        volume=(-0.5, 0.9),
        rule="maximum over volume",
        clearance=0.3,
        levels=(),
    )
    (result,) = assess(room(around)).zones
    assert result.maxima[0].value == pytest.approx(ampere(0.3 + RADIUS), rel=2e-3)


def test_the_volume_rule_finds_a_wall_between_the_heights():
    beside = zone(
        heights=(1.5,), volume=(-1.0, 1.5), rule="maximum over volume", levels=()
    )
    (result,) = assess(room(beside)).zones
    assert result.maxima[0].value == pytest.approx(ampere(1.0), rel=1e-3)
    assert result.maxima[0].details.at[1:] == pytest.approx((1.0, 0.0), abs=0.03)


def test_the_mean_of_the_heights_is_taken_before_its_maximum():
    (result,) = assess(room(zone(rule="three-height mean", levels=()))).zones
    (maximum,) = result.maxima
    three = [ampere(math.hypot(1, h)) for h in (0.5, 1.0, 1.5)]
    assert maximum.value == pytest.approx(np.mean(three), rel=1e-3)
    assert maximum.details.height is None
    assert maximum.details.at[1] == pytest.approx(1.0)


def test_the_area_mean_is_that_of_the_worst_height():
    (result,) = assess(room(zone(rule="area mean", levels=()))).zones
    # (1/2) ∫ from 1 to 3 of dy / √(y² + 0.5²)
    mean = (math.asinh(3 / 0.5) - math.asinh(1 / 0.5)) / 2
    assert result.maxima[0].value == pytest.approx(2e-7 * AMPERES * mean, rel=2e-3)
    assert result.maxima[0].details.height == 0.5


def test_the_area_above_the_level_ends_where_the_field_reaches_it():
    limit = ampere(math.hypot(2, 0.5))
    comparison = one(room(zone(), levels=(level(limit),)))
    # At the lowest height as far as y = 2: half of 8 m², to a piece of 0.05 m.
    assert comparison.area_above == pytest.approx(4, abs=4 * 0.05)
    assert comparison.ratio == pytest.approx(
        math.hypot(2, 0.5) / math.hypot(1, 0.5), rel=1e-3
    )


@pytest.mark.parametrize(
    ("times", "state"),
    [
        (1.30, "below"),
        (1.10, "below, U reaches"),
        (0.90, "above, U reaches"),
        (0.70, "above"),
    ],
)
def test_four_states_at_a_quarter_of_uncertainty(times, state):
    value = ampere(math.hypot(1, 0.5))
    comparison = one(room(zone(), levels=(level(times * value),)))
    assert comparison.state == state
    assert comparison.level_value == pytest.approx(times * value)
    assert comparison.uncertainty == pytest.approx(0.25 * value, rel=1e-3)


def test_the_absolute_part_of_the_uncertainty_counts_in_tesla():
    value = ampere(math.hypot(1, 0.5))
    own = Uncertainty(relative=0.0, absolute=0.3 * value)
    comparison = one(room(zone(uncertainty=own), levels=(level(1.25 * value),)))
    assert comparison.state == "below, U reaches"
    assert comparison.uncertainty == pytest.approx(0.3 * value)
    assert comparison.uncertainty_ratio == pytest.approx(0.3 / 1.25)


def test_peak_and_axis_levels_compare_their_own_quantity():
    # 45° from the wire the field of one sinusoid is split evenly on two axes.
    at = Receptor(id="r", at=(0, 1, 1), category="workers", levels=("level",))
    value = ampere(math.sqrt(2))

    def ratio(**fields):
        return one(room(receptors=(at,), levels=(level(value, **fields),))).ratio

    assert ratio() == pytest.approx(1, rel=1e-3)
    assert ratio(basis="peak") == pytest.approx(math.sqrt(2), rel=1e-3)
    assert ratio(component="axis") == pytest.approx(1 / math.sqrt(2), rel=1e-3)
    both = ratio(component="axis", basis="peak")
    assert both == pytest.approx(1, rel=1e-3)


def test_harmonics_add_by_the_ratio_sum():
    spectrum = (SpectrumLine(frequency=150, ratio=0.3, offset=0.0),)
    limits = LevelRanges(
        ranges=(
            LevelRange(f_from=50, f_to=50, coefficient=4e-5),
            LevelRange(f_from=150, f_to=150, coefficient=1e-5),
        )
    )
    typed = replace(level(1.0), values=limits)
    comparison = one(
        room(zone(), levels=(typed,), circuits=(circuit("c", spectrum=spectrum),))
    )
    value = ampere(math.hypot(1, 0.5))
    assert comparison.ratio == pytest.approx(
        value / 4e-5 + 0.3 * value / 1e-5, rel=1e-3
    )
    assert comparison.value == pytest.approx(value * math.hypot(1, 0.3), rel=1e-3)
    assert comparison.level_value is None
    rows = {row.frequency: row for row in comparison.details.by_frequency}
    assert rows[150].level == 1e-5
    assert rows[150].value == pytest.approx(0.3 * value, rel=1e-3)


def test_an_outline_that_crosses_itself_is_not_searched_in_part():
    star = tuple(
        (2 * math.sin(0.8 * math.pi * k), 3 + 2 * math.cos(0.8 * math.pi * k))
        for k in range(5)
    )
    comparison = one(room(zone(outline=star), levels=(level(1.0),)))
    assert comparison.state == "not evaluable"
    assert "crosses or touches itself" in comparison.reason


def test_direct_current_is_compared_on_its_own_and_named():
    layout = room(
        zone(),
        levels=(level(1e-3, frequencies=((0, 0), (1, 1e5))),),
        circuits=(circuit("c"), circuit("d", rms=1000, frequency=0)),
        equipment=(wire("w", "c"), wire("v", "d", y=-1)),
    )
    assessment = assess(layout)
    (comparison,) = assessment.comparisons
    assert comparison.kind == "DC"
    assert comparison.ratio == pytest.approx(
        ampere(math.hypot(2, 0.5), 1000) / 1e-3, rel=2e-3
    )
    assert comparison.other_kind_ratio == pytest.approx(
        ampere(math.hypot(1, 0.5)) / 1e-3, rel=1e-3
    )
    assert [m.kind for m in assessment.zones[0].maxima] == ["AC", "DC"]


def test_the_kind_whose_uncertainty_reaches_the_level_is_the_comparison():
    limits = LevelRanges(
        ranges=(
            LevelRange(f_from=0, f_to=0, coefficient=2e-4),
            LevelRange(f_from=1, f_to=400, coefficient=2e-5),
        )
    )
    typed = replace(level(1.0), values=limits)
    layout = room(
        zone(uncertainty=Uncertainty(relative=0.0, absolute=8e-6)),
        levels=(typed,),
        circuits=(circuit("c", rms=70), circuit("d", rms=1500, frequency=0)),
        equipment=(wire("w", "c"), wire("v", "d", y=-1)),
    )
    comparison = one(layout)
    direct = ampere(math.hypot(2, 0.5), 1500) / 2e-4
    alternating = ampere(math.hypot(1, 0.5), 70) / 2e-5
    assert alternating < direct < 0.9
    assert comparison.ratio == pytest.approx(alternating, rel=1e-3)
    assert comparison.other_kind_ratio == pytest.approx(direct, rel=2e-3)
    assert (comparison.kind, comparison.state) == ("AC", "below, U reaches")


def test_a_level_without_0_hz_says_that_direct_current_is_not_covered():
    layout = room(
        zone(),
        levels=(level(1e-3),),
        circuits=(circuit("c"), circuit("d", rms=1000, frequency=0)),
        equipment=(wire("w", "c"), wire("v", "d", y=-1)),
    )
    comparison = one(layout)
    assert comparison.kind == "AC"
    assert comparison.not_covered == (0.0,)


@pytest.mark.parametrize(
    ("place", "rule", "words"),
    [
        ({}, {"source": ""}, "no source"),
        ({}, {"category": ""}, "no category"),
        ({"category": ""}, {}, "The place has no category"),
        ({"category": "equipment"}, {}, "“workers”, the place for “equipment”"),
        (
            {"category": "persons at particular risk"},
            {"category": "persons at particular risk"},
            "individual assessment is required",
        ),
        ({}, {"frequencies": ((100, 200),)}, "50 Hz"),
        ({"floor_level": None}, {}, "floor level"),
        ({"clearance": 10.0}, {}, "masked"),
        ({"levels": ("gone",)}, {}, "“gone”"),
    ],
)
def test_what_cannot_be_compared_says_why(place, rule, words):
    assessment = assess(room(zone(**place), levels=(level(1e-4, **rule),)))
    (comparison,) = assessment.comparisons
    assert comparison.state == "not evaluable"
    assert words in comparison.reason
    assert comparison.ratio is None
    assert exit_code(assessment) == 3


def test_no_current_is_said_and_not_zero():
    silent = circuit("c", rms=0)
    comparison = one(room(zone(), levels=(level(1e-4),), circuits=(silent,)))
    assert comparison.state == "not evaluable"
    assert "No current is entered" in comparison.reason


def test_current_that_does_not_close_blocks_but_is_shown_with_its_reason():
    slot = Slot(name="a", u=0, v=0, loads=(SlotLoad(circuit="c", label="a"),))
    open_run = Run(
        id="r", route=((-5, 0, 0), (5, 0, 0)), section=FreeSection(slots=(slot,))
    )
    assessment = assess(
        room(zone(), levels=(level(1e-4),), equipment=(), runs=(open_run,))
    )
    (comparison,) = assessment.comparisons
    assert comparison.state == "not evaluable"
    assert "Net current" in comparison.reason
    assert assessment.zones[0].maxima[0].reason == comparison.reason


def test_a_fault_of_another_zone_does_not_block_this_one():
    layout = room(zone(), zone(id="other", levels=("gone",)), levels=(level(1.0),))
    first, second = assess(layout).comparisons
    assert first.state == "below"
    assert second.state == "not evaluable"


OPENED: dict[str, tuple[str, ...]] = {"shut": (), "work": ("cabinet",)}
#: Wider than the zone, so that its sides count nowhere.
CABINET = Enclosure(
    id="cabinet", footprint=((-3, 0), (3, 0), (3, 2), (-3, 2)), z_from=0, z_to=2
)


def test_a_closed_enclosure_is_masked_unless_the_case_opens_it():
    cases = (LoadCase(id="shut"), LoadCase(id="work", open_enclosures=("cabinet",)))
    (result,) = assess(
        room(zone(levels=()), enclosures=(CABINET,), load_cases=cases)
    ).zones
    shut, work = result.maxima
    assert shut.value == pytest.approx(ampere(math.hypot(2, 0.5)), rel=2e-3)
    assert work.value == pytest.approx(ampere(math.hypot(1, 0.5)), rel=1e-3)
    assert result.masked_shares["shut"] == pytest.approx(0.5, abs=0.03)
    assert result.masked_shares["work"] == 0


def test_a_body_keeps_the_front_clearance_while_the_enclosure_is_open():
    shut, work = (LoadCase(id=id, open_enclosures=o) for id, o in OPENED.items())
    for front, distance in ((None, 2.5), (90.0, 2.5), (0.0, 2.0), (270.0, 2.0)):
        cabinet = replace(CABINET, front_clearance=0.5, front=front)
        layout = room(zone(levels=()), enclosures=(cabinet,), load_cases=(shut, work))
        (result,) = assess(layout).zones
        closed, opened = result.maxima
        assert closed.value == pytest.approx(ampere(math.hypot(2, 0.5)), rel=2e-3)
        assert opened.value == pytest.approx(
            ampere(math.hypot(distance, 0.5)), rel=2e-3
        )


def test_enclosures_masked_differently_by_case_do_not_mask_each_other():
    shut, work = (LoadCase(id=id, open_enclosures=o) for id, o in OPENED.items())
    cabinet = replace(CABINET, front_clearance=0.5)
    volume = zone(levels=(), rule="maximum over volume", volume=(0.9, 1.1))
    layouts = [
        room(volume, enclosures=(cabinet,), load_cases=cases)
        for cases in ((shut,), (work,), (shut, work))
    ]
    (alone,), (opened,), both = (assess(x).zones[0].maxima for x in layouts)
    assert [m.value for m in both] == [alone.value, opened.value]


def test_a_receptor_within_the_front_clearance_says_so():
    cabinet = replace(CABINET, front_clearance=0.5, state="open for work")
    place = Receptor(id="chest", at=(2.2, 1.0, 1.0))
    layout = room(zone(levels=()), enclosures=(cabinet,), receptors=(place,))
    (found,) = assess(layout).receptors
    assert "front clearance of “cabinet”, open for work" in found.fields[0].reason


def test_load_cases_scale_and_those_for_information_do_not_decide():
    half, twice = (
        LoadCase(
            id=name,
            counted=name == "half",
            factors=(CircuitFactor(circuit="c", factor=f),),
        )
        for name, f in (("half", 0.5), ("twice", 2.0))
    )
    limit = ampere(math.hypot(1, 0.5))
    layout = room(zone(), levels=(level(limit),), load_cases=(half, twice))
    assessment = assess(layout)
    assert [c.state for c in assessment.comparisons] == ["below", "above"]
    assert [c.ratio for c in assessment.comparisons] == pytest.approx(
        [0.5, 2], rel=1e-3
    )
    assert [c.case for c in worst_comparisons(assessment)] == ["half"]
    assert exit_code(assessment) == 0
    assert exit_code(assess(replace(layout, load_cases=(twice,)))) == 3
    counted = replace(twice, counted=True)
    assert exit_code(assess(replace(layout, load_cases=(half, counted)))) == 1


def test_nothing_compared_is_no_below():
    assert exit_code(assess(room(zone(levels=())))) == 3


def test_the_rule_decides_only_how_states_are_counted():
    value = ampere(math.hypot(1, 0.5))
    layout = room(
        zone(levels=("high", "near", "low")),
        levels=tuple(
            level(f * value, id=name)
            for name, f in (("high", 2), ("near", 1.1), ("low", 0.9))
        ),
    )
    found = assess(layout).comparisons
    states = counts(found, DecisionRule())
    assert states.below is None
    assert states.by_state["below, U reaches"] == 1
    assert counts(found, DecisionRule(kind="additive")).below == 1
    by_value = counts(found, DecisionRule(kind="value only"))
    assert (by_value.below, by_value.not_below) == (2, 1)


def test_shares_of_circuits_sum_to_the_value():
    reversed_wire = replace(wire("v", "opposed"), path=wire("v", "c").path[::-1])
    layout = room(
        zone(levels=()),
        circuits=(circuit("c"), circuit("opposed", rms=40)),
        equipment=(wire("w", "c"), reversed_wire),
    )
    # The reversed loop lies in the first one: 100 A less 40 A.
    (result,) = assess(layout).zones
    (maximum,) = result.maxima
    value = ampere(math.hypot(1, 0.5), 60)
    assert maximum.value == pytest.approx(value, rel=1e-3)
    first, second = maximum.details.contributions
    assert (first.circuit, second.circuit) == ("c", "opposed")
    assert first.share + second.share == pytest.approx(maximum.value, rel=1e-9)
    assert second.share == pytest.approx(-40 / 60 * maximum.value, rel=1e-6)
    assert second.without == pytest.approx(100 / 60 * maximum.value, rel=1e-6)


def test_one_ampere_of_net_current_gives_amperes_law():
    (result,) = assess(room(zone(levels=()))).zones
    effect = result.maxima[0].details.net_current
    assert effect.circuit == "c"
    assert effect.per_ampere == pytest.approx(2e-7 / math.hypot(1, 0.5), rel=1e-3)


def test_circuits_of_unknown_phase_are_taken_at_their_worst_and_named():
    layout = room(
        zone(levels=()),
        circuits=(circuit("c"), circuit("d", rms=50, phase_relation="unknown")),
        equipment=(wire("w", "c"), wire("v", "d", y=-1)),
    )
    (result,) = assess(layout).zones
    details = result.maxima[0].details
    assert details.is_bound
    assert details.bound_reason
    # Fields of two parallel wires are nearly parallel here.
    assert result.maxima[0].value > 0.98 * (
        ampere(math.hypot(1, 0.5)) + ampere(math.hypot(2, 0.5), 50)
    )


def test_a_receptor_shows_its_components_and_the_measured_ratio():
    value = ampere(2.0)
    at = Receptor(
        id="r", at=(0, 2, 0), category="workers", levels=("level",),
        measured=MeasuredValue(flux_density=1.2 * value),
    )  # fmt: skip
    assessment = assess(room(receptors=(at,), levels=(level(2 * value),)))
    (result,) = assessment.receptors
    (shown,) = result.fields
    assert shown.ac == pytest.approx(value, rel=1e-3)
    assert shown.dc is None
    # Current along +x: at y > 0 the field points up, along +z.
    assert shown.components[0, 2].real == pytest.approx(value, rel=1e-3)
    assert shown.semi_axes[0] == pytest.approx([value, 0], rel=1e-3, abs=1e-12)
    assert shown.measured_ratio == pytest.approx(1.2, rel=1e-3)
    assert result.comparisons[0].ratio == pytest.approx(0.5, rel=1e-3)
    assert result.comparisons[0].area_above is None


@pytest.mark.parametrize(
    ("kind", "flows", "wanted", "against"),
    [
        ("", {0.0: 30.0}, "DC", 30.0),
        ("", {0.0: 30.0, 50.0: 40.0}, "AC", 40.0),
        ("DC", {0.0: 30.0, 50.0: 40.0}, "DC", 30.0),
        ("AC", {0.0: 30.0, 50.0: 40.0}, "AC", 40.0),
        ("AC", {0.0: 30.0}, None, None),
        ("DC", {50.0: 40.0}, None, None),
    ],
)
def test_a_measured_value_stands_beside_its_own_kind_of_field(
    kind, flows, wanted, against
):
    measured = MeasuredValue(flux_density=1.3 * ampere(2.0, 30.0), kind=kind)
    at = Receptor(id="r", at=(0, 2, 0), measured=measured)
    circuits = tuple(circuit(f"c{f:g}", rms, f) for f, rms in flows.items())
    wires = tuple(wire(f"w{c.id}", c.id) for c in circuits)
    found = assess(Layout(circuits=circuits, equipment=wires, receptors=(at,)))
    (shown,) = found.receptors[0].fields
    assert shown.measured_kind == wanted
    if against is None:
        assert shown.measured_ratio is None
    else:
        assert shown.measured_ratio == pytest.approx(1.3 * 30.0 / against, rel=1e-3)


def test_a_receptor_inside_a_conductor_has_no_value():
    at = Receptor(id="r", at=(0, 0, 0), category="workers", levels=("level",))
    assessment = assess(room(receptors=(at,), levels=(level(1e-4),)))
    (result,) = assessment.receptors
    assert result.fields[0].ac is None
    assert "inside a conductor" in result.fields[0].reason
    assert result.comparisons[0].reason == result.fields[0].reason


def test_a_near_field_is_flagged():
    near = Receptor(id="near", at=(0, 0.03, 0))
    far = Receptor(id="far", at=(0, 0.2, 0))
    found = assess(room(receptors=(near, far))).receptors
    assert [r.fields[0].near_field for r in found] == [True, False]


def test_the_cache_changes_nothing():
    layout = room(zone(), levels=(level(1e-4),))
    cache = ResponseCache()
    plain = one(layout).ratio
    assert one(layout, cache=cache).ratio == pytest.approx(plain, rel=1e-6)
    assert one(layout, cache=cache).ratio == pytest.approx(plain, rel=1e-6)


def test_an_assessment_can_be_cancelled_and_tells_its_progress():
    layout = room(zone(), levels=(level(1e-4),))
    told = []
    assess(layout, progress=lambda part, what: told.append(part))
    assert told[0] == 0
    assert told[-1] == 1
    with pytest.raises(ComputationCancelled):
        assess(layout, cancelled=lambda: True)


def test_the_layouts_uncertainty_holds_where_a_zone_has_none():
    settings = Settings(uncertainty=Uncertainty(relative=0.5))
    value = ampere(math.hypot(1, 0.5))
    layout = room(zone(), levels=(level(1.3 * value),), settings=settings)
    assert one(layout).state == "below, U reaches"


def test_a_map_shows_the_field_and_masks_the_inside():
    layout = room()
    case = layout.cases[0]
    flat = field_map(layout, case, [0.0, 1.0], area=(-1, -2, 1, 2), step=0.5)
    assert flat.values.shape == (len(flat.ys), len(flat.xs)) == (9, 5)
    row = int(np.argmin(np.abs(flat.ys - 2.0)))
    assert flat.values[row] == pytest.approx(np.full(5, ampere(2.0)), rel=1e-3)
    # Over the wire the higher plane has the largest value that can be given.
    middle = int(np.argmin(np.abs(flat.ys)))
    assert flat.values[middle] == pytest.approx(np.full(5, ampere(1.0)), rel=1e-3)
    assert not flat.mask.any()
    lower = field_map(layout, case, [0.0], area=(-1, -2, 1, 2), step=0.5)
    assert lower.mask[middle].all()
    assert np.count_nonzero(lower.mask) == 5
    assert flat.dc is None
