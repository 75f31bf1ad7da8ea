"""Remarks: one seeded fault each on a room that has none, and those of the samples."""

from __future__ import annotations

import base64
import dataclasses
import io
from pathlib import Path

import pytest
from msgspec.structs import replace
from PIL import Image

from engine import layout_file
from engine.assessment import assess
from engine.circuits import (
    BalancedCurrent,
    Circuit,
    CircuitFactor,
    ConductorCurrent,
    DirectCurrents,
    EnteredNetCurrent,
    LineLoad,
    LineLoads,
    LoadCase,
    MeasuredCurrents,
    MeasuredLine,
    SpectrumLine,
)
from engine.criteria import LevelPoint, LevelTable
from engine.currents import case_phasors
from engine.equipment import ConductorLoop, Terminal, Transformer
from engine.faults import Remark
from engine.items import ConfirmedRemark, Item, ValueOrigin
from engine.layout import Layout
from engine.places import BackingDrawing, Enclosure
from engine.remarks import confirmed_remarks, remarks
from engine.results import (
    Assessment,
    CaseResult,
    Comparison,
    Maximum,
    PlaceDetails,
    ReceptorResult,
    ZoneResult,
)
from engine.runs import (
    CircuitShare,
    Flat,
    FreeSection,
    Multicore,
    ParallelSets,
    Round,
    Run,
    Slot,
    SlotLoad,
)

ROOT = Path(__file__).resolve().parents[2]
SAMPLES = ROOT / "sample_layouts"
KEPT = ROOT / "tests" / "data" / "remarks-of-samples.txt"
POLES = ("L1", "L2", "L3", "N")


@pytest.fixture(scope="module")
def clean() -> Layout:
    return layout_file.read(SAMPLES / "small-switch-room.json")


def codes(layout: Layout, assessment: Assessment | None = None) -> set[str]:
    return {remark.code for remark in remarks(layout, assessment)}


def only(layout: Layout, code: str) -> Remark:
    """The one remark of a layout, which has this code."""
    found = remarks(layout)
    assert [remark.code for remark in found] == [code], found
    return found[0]


def first(layout: Layout, code: str) -> Remark:
    return next(remark for remark in remarks(layout) if remark.code == code)


def changed(items: tuple, id: str, **values: object) -> tuple:
    """The items with one of them changed; its origins are kept."""
    assert any(item.id == id for item in items)
    return tuple(replace(x, **values) if x.id == id else x for x in items)


def with_circuit(layout: Layout, id: str, **values: object) -> Layout:
    return replace(layout, circuits=changed(layout.circuits, id, **values))


def confirmed(item: Item, *fields: str) -> Item:
    origins = tuple(ValueOrigin(field=f, kind="confirmed", by="X") for f in fields)
    return replace(item, origins=origins)


def run_of(section: object, **values: object) -> Run:
    """A straight run whose values nobody has to confirm."""
    run = Run(
        id="more",
        name="More cables",
        route=((0.0, 0.0, 0.0), (0.0, 5.0, 0.0)),
        section=section,
        **values,
    )
    return confirmed(run, "route", "section", "rated_current", "containment")


def alone(*runs: Run, circuits: tuple[Circuit, ...] = ()) -> Layout:
    """A layout of runs and their circuits, remarks on open ends included."""
    given = circuits or (Circuit(id="C", demand=BalancedCurrent(rms=100.0)),)
    return Layout(circuits=given, runs=runs)


# ---- the clean room and the kept list


def test_small_switch_room_has_no_remarks(clean: Layout) -> None:
    assert remarks(clean) == ()


def test_small_switch_room_has_no_remarks_on_its_results(clean: Layout) -> None:
    assert remarks(clean, assess(clean)) == ()


def kept_list() -> dict[str, list[str]]:
    """By sample: "code | items | sentence"; every entry is followed by its reason."""
    found: dict[str, list[str]] = {}
    lines = KEPT.read_text(encoding="utf-8").splitlines()
    sample = ""
    for line, following in zip(lines, [*lines[1:], ""], strict=True):
        if line.startswith("== "):
            sample = line.removeprefix("== ")
            found[sample] = []
        elif line.startswith(("W", "F")):
            assert following.startswith("  stands because "), line
            found[sample].append(line)
    return found


@pytest.mark.parametrize(
    "name", ["office-over-switch-room", "imaging-corridor", "battery-laboratory"]
)
def test_remarks_of_the_samples_are_those_that_were_explained(name: str) -> None:
    layout = layout_file.read(SAMPLES / f"{name}.json")
    found = [
        f"{remark.code} | {', '.join(remark.items)} | {remark.sentence}"
        for remark in remarks(layout)
    ]
    assert found == kept_list()[name]


def test_every_sentence_is_whole_and_names_items_that_exist() -> None:
    for path in SAMPLES.glob("*.json"):
        layout = layout_file.read(path)
        ids = set(layout.by_id())
        for remark in remarks(layout):
            assert remark.sentence[0].isupper() or not remark.sentence[0].isalpha()
            assert remark.sentence.endswith(".")
            assert set(remark.items) <= ids


# ---- runs and equipment


def test_free_ends_far_apart_are_a_warning(clean: Layout) -> None:
    layout = replace(
        clean, joints=tuple(j for j in clean.joints if j.id != "service-head")
    )
    found = only(layout, "W02")
    assert found.severity == "warning"
    assert found.items == ("incoming-bars",)
    # Four bars at 60 mm: the outer ones are 0.18 m apart.
    assert "0.180 m apart" in found.sentence
    assert found.place == pytest.approx((1.6, 0.5, 2.4))
    in_feet = replace(layout, settings=replace(layout.settings, length_unit="ft"))
    # 0.18 m / 0.3048 m
    assert "0.591 ft apart" in only(in_feet, "W02").sentence


def test_the_height_of_a_receptor_is_told_in_the_unit_of_the_layout(
    clean: Layout,
) -> None:
    receptors = changed(clean.receptors, "chair", at=(1.6, 3.7, 3.048))
    settings = replace(clean.settings, length_unit="ft")
    layout = replace(clean, receptors=receptors, settings=settings)
    found = only(layout, "W23").sentence
    assert "is 10.0 ft above its floor, outside 0.656 to 6.56 ft" in found


def test_free_ends_close_together_are_a_note() -> None:
    section = Flat(
        circuits=(CircuitShare(circuit="C"),),
        order=("L1", "L2", "L3"),
        pitch=0.03,
        shape=Round(diameter=0.03),
    )
    found = [r for r in remarks(alone(run_of(section))) if r.code == "W02"]
    # Two pitches of 30 mm: not more than two.
    assert [r.severity for r in found] == ["note", "note"]


def test_parallel_sets_say_that_equal_sharing_is_assumed() -> None:
    section = ParallelSets(
        circuits=(CircuitShare(circuit="C"),), orders=(POLES, POLES, POLES)
    )
    found = first(alone(run_of(section)), "W08")
    assert found.severity == "note"
    assert "3 conductors each of L1, L2, L3 and N of circuit “C”" in found.sentence
    assert "assumed" in found.sentence


def test_entered_unequal_shares_are_no_assumption() -> None:
    loads = [SlotLoad(circuit="C", label="L1", share=s) for s in (0.4, 0.6)]
    section = FreeSection(
        slots=tuple(
            Slot(name=f"{i}", u=0.1 * i, v=0.0, loads=(load,))
            for i, load in enumerate(loads)
        )
    )
    assert "W08" not in codes(alone(run_of(section)))


def test_loops_that_halve_a_current_share_equally() -> None:
    path = ((0.0, 0.0, 0.0), (1.0, 0.0, 0.0), (1.0, 0.0, 1.0))
    loops = tuple(
        ConductorLoop(id=f"string-{i}", path=path, circuit="C", label="L+", share=0.5)
        for i in (1, 2)
    )
    layout = Layout(
        circuits=(Circuit(id="C", supply="dc", base_frequency=0.0),), equipment=loops
    )
    assert first(layout, "W08").items == ("string-1", "string-2")
    assert "W08" not in codes(replace(layout, equipment=loops[:1]))


def test_conductors_of_a_circuit_alone_in_steel_are_a_warning() -> None:
    lines = Flat(circuits=(CircuitShare(circuit="C"),), order=("L1", "L2", "L3"))
    found = first(alone(run_of(lines, containment="steel")), "W12")
    assert found.severity == "warning"
    assert "without N" in found.sentence
    whole = Flat(circuits=(CircuitShare(circuit="C"),), order=POLES)
    assert "W12" not in codes(alone(run_of(whole, containment="steel")))
    assert "W12" not in codes(alone(run_of(lines, containment="not steel")))


def test_duplicated_label_in_a_section_is_a_warning() -> None:
    section = Flat(circuits=(CircuitShare(circuit="C"),), order=("L1", "L1", "L3", "N"))
    found = first(alone(run_of(section)), "W15")
    assert "L1 stands more than once and L2 is missing" in found.sentence


def test_conductors_that_a_supply_does_not_have_are_a_warning() -> None:
    section = Flat(circuits=(CircuitShare(circuit="C"),), order=POLES)
    plain = alone(run_of(section))

    def supplied(supply: str) -> Layout:
        (circuit,) = plain.circuits
        return replace(plain, circuits=(replace(circuit, supply=supply),))

    direct = first(supplied("dc"), "W15").sentence
    assert "it is DC, with L+ and L-; nothing of it flows in L1, L2 and L3" in direct
    single = first(supplied("single-phase"), "W15").sentence
    assert "with L1 and N; nothing of it flows in L2 and L3" in single
    assert "W15" not in codes(supplied("three-phase three-wire"))
    assert "W15" not in codes(supplied("free"))


def test_currents_stated_for_conductors_that_a_supply_does_not_have_are_said() -> None:
    section = Flat(circuits=(CircuitShare(circuit="C"),), order=POLES)
    plain = alone(run_of(section))
    (circuit,) = plain.circuits
    loads = tuple(LineLoad(label=label, rms=9.0, lag=0.0) for label in ("L1", "L2"))
    circuit = replace(circuit, supply="single-phase", demand=LineLoads(loads=loads))
    layout = replace(plain, circuits=(circuit,))
    assert case_phasors(layout, layout.cases[0]).of("C", "L2").any()
    said = first(layout, "W15").sentence
    assert "with L1 and N; yet currents are stated for L2 and flow there" in said


def test_label_carried_in_full_twice_is_a_warning() -> None:
    slots = tuple(
        Slot(name=n, u=u, v=0.0, loads=(SlotLoad(circuit="C", label="L1"),))
        for n, u in (("a", 0.0), ("b", 0.1))
    )
    found = first(alone(run_of(FreeSection(slots=slots))), "W15")
    assert "200 % of its current" in found.sentence


def test_negative_phase_sequence_is_a_warning(clean: Layout) -> None:
    swapped = DirectCurrents(
        currents=(
            ConductorCurrent(label="L1", rms=64.0, angle=0.0),
            ConductorCurrent(label="L2", rms=64.0, angle=120.0),
            ConductorCurrent(label="L3", rms=64.0, angle=-120.0),
        )
    )
    found = only(with_circuit(clean, "F2", demand=swapped), "W15")
    assert "negative sequence" in found.sentence
    assert found.items == ("F2",)


def test_current_above_the_rating_of_a_run_names_the_case(clean: Layout) -> None:
    # F1's 251 A in L3, F2's 61 A: the cables carry F1 alone.
    runs = changed(clean.runs, "chiller-cables", rated_current=250.0)
    found = only(replace(clean, runs=runs), "W16")
    assert found.case == "highest-operation"
    assert "251.0 A flow in L3" in found.sentence
    runs = changed(clean.runs, "chiller-cables", rated_current=252.0)
    assert remarks(replace(clean, runs=runs)) == ()


def test_current_above_the_rating_of_a_board_is_a_warning(clean: Layout) -> None:
    equipment = changed(clean.equipment, "board", rated_current=300.0)
    found = only(replace(clean, equipment=equipment), "W16")
    assert found.items == ("board",)


def test_coil_is_outside_the_scope_of_keep_out_distances(clean: Layout) -> None:
    coil = ConductorLoop(
        id="reactor",
        kind="coil",
        path=((0.0, 0.0, 0.0), (1.0, 0.0, 0.0), (1.0, 1.0, 0.0)),
        circuit="F2",
        label="L1",
    )
    coil = confirmed(coil, "path", "share", "turns", "shape")
    layout = replace(clean, equipment=(*clean.equipment, coil))
    assert only(layout, "W25").items == ("reactor",)


def transformer(**values: object) -> Transformer:
    made = Transformer(
        id="T9",
        terminals=(Terminal(label="L1", at=(0.0, 0.0, 1.0)),),
        star=(0.0, 0.0, 0.5),
    )
    return replace(confirmed(made, "terminals", "star"), **values)


def test_stray_field_of_a_transformer_is_not_modelled(clean: Layout) -> None:
    layout = replace(clean, equipment=(*clean.equipment, transformer()))
    found = only(layout, "W27")
    assert found.severity == "note"
    assert found.items == ("T9",)


def test_note_of_a_transformer_confirms_its_stray_field(clean: Layout) -> None:
    made = transformer()
    made = replace(
        made, origins=(*made.origins, ValueOrigin(field="note", kind="confirmed"))
    )
    assert remarks(replace(clean, equipment=(*clean.equipment, made))) == ()


def test_cable_as_net_current_only_says_so() -> None:
    cable = Multicore(
        outside_diameter=0.05,
        core_diameter=0.01,
        core_circle_diameter=0.02,
        model="net current only",
    )
    loads = tuple(SlotLoad(circuit="C", label=label) for label in POLES)
    slot = Slot(name="cable", u=0.0, v=0.0, shape=cable, loads=loads)
    straight = replace(slot, shape=replace(cable, model="straight cores"))
    layout = alone(run_of(FreeSection(slots=(slot,))))
    assert first(layout, "W29").severity == "note"
    assert "W29" not in codes(alone(run_of(FreeSection(slots=(straight,)))))


# ---- circuits and load cases


def test_unbalanced_lines_without_neutral_are_a_warning(clean: Layout) -> None:
    layout = with_circuit(clean, "F2", neutral="none")
    found = first(layout, "W09")
    assert found.items == ("F2",)
    assert "neither a neutral nor net current" in found.sentence


def test_third_harmonic_without_neutral_is_a_warning() -> None:
    circuit = Circuit(
        id="C",
        supply="three-phase three-wire",
        neutral="none",
        demand=BalancedCurrent(rms=100.0),
        spectrum=(SpectrumLine(frequency=150.0, ratio=0.2, offset=0.0),),
    )
    found = remarks(Layout(circuits=(circuit,)))
    assert {r.code for r in found} & {"W09", "W10"} == {"W10"}
    # Three lines of 20 A in phase.
    assert (
        "60.0 A of zero-sequence" in first(Layout(circuits=(circuit,)), "W10").sentence
    )
    fifth = (SpectrumLine(frequency=250.0, ratio=0.2, offset=0.0),)
    balanced = Layout(circuits=(replace(circuit, spectrum=fifth),))
    assert not codes(balanced) & {"W09", "W10"}


def test_unknown_harmonic_angles_are_a_note(clean: Layout) -> None:
    spectrum = (SpectrumLine(frequency=150.0, ratio=0.1),)
    found = only(with_circuit(clean, "F2", spectrum=spectrum), "W11")
    assert "150 Hz" in found.sentence
    known = (SpectrumLine(frequency=150.0, ratio=0.1, offset=0.0),)
    assert remarks(with_circuit(clean, "F2", spectrum=known)) == ()


def test_direct_and_alternating_currents_are_compared_apart(clean: Layout) -> None:
    circuit = Circuit(
        id="battery",
        supply="dc",
        base_frequency=0.0,
        demand=DirectCurrents(currents=(ConductorCurrent(label="L+", rms=10.0),)),
    )
    layout = replace(clean, circuits=(*clean.circuits, circuit))
    found = first(layout, "W17")
    assert found.severity == "note"
    assert found.items == ("battery",)
    assert "W17" not in codes(replace(clean, circuits=(circuit,)))


def measured(neutral: float | None = None) -> MeasuredCurrents:
    lines = (("L1", 60.0), ("L2", 60.0), ("L3", 30.0))
    return MeasuredCurrents(
        lines=tuple(MeasuredLine(label=label, rms=rms) for label, rms in lines),
        neutral=neutral,
        cos_phi=0.9,
    )


def test_sequence_of_measured_lines_is_assumed(clean: Layout) -> None:
    found = only(with_circuit(clean, "F2", demand=measured()), "W31")
    assert "120°" in found.sentence


@pytest.mark.parametrize(
    ("neutral", "expected"),
    # The lines give 30 A.
    [(32.0, {"W31"}), (30.0, {"W31"}), (35.0, {"W31", "W32"}), (5.0, {"W31", "W32"})],
)
def test_measured_neutral_that_differs_by_a_tenth_is_a_warning(
    clean: Layout, neutral: float, expected: set[str]
) -> None:
    layout = with_circuit(clean, "F2", demand=measured(neutral))
    assert codes(layout) == expected


@pytest.mark.parametrize(
    ("factor", "code", "severity"), [(2.0, "W21", "note"), (4.0, "W22", "warning")]
)
def test_scaled_measurement_is_remarked_on(
    clean: Layout, factor: float, code: str, severity: str
) -> None:
    case = LoadCase(id="scaled", factors=(CircuitFactor(circuit="F2", factor=factor),))
    case = confirmed(case, "factors")
    layout = with_circuit(clean, "F2", demand=measured())
    layout = replace(layout, load_cases=(*layout.load_cases, case))
    assert codes(layout) == {"W31", code}
    assert first(layout, code).severity == severity
    assert first(layout, code).case == "scaled"


def test_scaling_entered_currents_is_no_extrapolation(clean: Layout) -> None:
    case = LoadCase(id="low", factors=(CircuitFactor(circuit="F2", factor=0.2),))
    case = confirmed(case, "factors")
    assert remarks(replace(clean, load_cases=(*clean.load_cases, case))) == ()


def test_unknown_phase_relation_is_a_note(clean: Layout) -> None:
    found = only(with_circuit(clean, "F2", phase_relation="unknown"), "W33")
    assert found.items == ("F2",)


def test_net_current_of_unknown_angle_is_a_note(clean: Layout) -> None:
    layout = with_circuit(clean, "F2", net_current=EnteredNetCurrent(rms=2.0))
    assert "net current" in first(layout, "W31").sentence


# ---- places and levels


@pytest.mark.parametrize("field", ["source", "category", "values"])
def test_level_without_a_statement_is_a_warning(clean: Layout, field: str) -> None:
    value = None if field == "values" else ""
    levels = changed(clean.levels, "example-a", **{field: value})
    found = only(replace(clean, levels=levels), "W18")
    assert "nothing is compared" in found.sentence
    assert field in found.sentence or "no values" in found.sentence


def test_zone_without_category_is_a_warning(clean: Layout) -> None:
    zones = changed(clean.zones, "reception-zone", category="")
    assert only(replace(clean, zones=zones), "W18").items == ("reception-zone",)


def test_frequency_without_a_level_is_a_warning(clean: Layout) -> None:
    table = LevelTable(
        points=(
            LevelPoint(frequency=40.0, level=9e-6),
            LevelPoint(frequency=60.0, level=9e-6),
        )
    )
    levels = changed(clean.levels, "example-a", values=table)
    layout = replace(clean, levels=levels)
    assert remarks(layout) == ()
    spectrum = (SpectrumLine(frequency=150.0, ratio=0.1, offset=0.0),)
    found = only(with_circuit(layout, "F2", spectrum=spectrum), "W19")
    assert "150 Hz" in found.sentence


def test_root_sum_over_differing_levels_is_a_warning(clean: Layout) -> None:
    spectrum = (SpectrumLine(frequency=150.0, ratio=0.1, offset=0.0),)
    levels = changed(clean.levels, "example-a", sum_rule="root sum of squares")
    layout = replace(with_circuit(clean, "F2", spectrum=spectrum), levels=levels)
    assert "root sum of squares" in only(layout, "W19").sentence


@pytest.mark.parametrize("height", [0.1, 2.1])
def test_receptor_at_an_unusual_height_is_a_warning(
    clean: Layout, height: float
) -> None:
    receptors = changed(clean.receptors, "chair", at=(1.6, 3.7, height))
    assert only(replace(clean, receptors=receptors), "W23").items == ("chair",)


@pytest.mark.parametrize("height", [0.2, 2.0])
def test_receptor_at_the_edge_of_usual_heights_is_none(
    clean: Layout, height: float
) -> None:
    receptors = changed(clean.receptors, "chair", at=(1.6, 3.7, height))
    assert remarks(replace(clean, receptors=receptors)) == ()


def test_receptor_below_every_floor_is_a_warning(clean: Layout) -> None:
    receptors = changed(clean.receptors, "chair", at=(1.6, 3.7, -1.0))
    assert (
        "below every floor" in only(replace(clean, receptors=receptors), "W23").sentence
    )


def test_missing_floors_are_a_warning(clean: Layout) -> None:
    zones = changed(clean.zones, "reception-zone", storey=None)
    layout = replace(clean, storeys=(), rooms=(), zones=zones)
    assert "Neither storeys nor rooms" in only(layout, "W24").sentence


def test_zone_without_a_floor_is_a_warning(clean: Layout) -> None:
    zones = changed(clean.zones, "reception-zone", storey=None, floor_level=None)
    assert only(replace(clean, zones=zones), "W24").items == ("reception-zone",)


def test_backing_drawing_without_scale_is_a_warning(clean: Layout) -> None:
    drawing = BackingDrawing(id="plan", picture=dot())
    layout = replace(clean, backing_drawings=(drawing,))
    assert "is not calibrated" in only(layout, "W24").sentence
    scaled = replace(drawing, second=(800.0, 0.0), distance=8.0)
    assert remarks(replace(clean, backing_drawings=(scaled,))) == ()


def test_damaged_or_missing_backing_drawing_is_a_warning(clean: Layout) -> None:
    whole = BackingDrawing(id="plan", second=(800.0, 0.0), distance=8.0, picture=dot())
    middle = len(whole.picture) // 2
    other = "A" if whole.picture[middle] != "A" else "B"
    for picture, fault in (
        (whole.picture[:middle] + other + whole.picture[middle + 1 :], "is damaged"),
        (whole.picture[:middle], "is damaged"),
        ("no base64 at all", "is damaged"),
        ("", "is missing"),
    ):
        drawing = replace(whole, picture=picture)
        remark = only(replace(clean, backing_drawings=(drawing,)), "W24")
        assert fault in remark.sentence
        assert remark.items == ("plan",)


def dot() -> str:
    """A small picture as a backing drawing holds it."""
    kept = io.BytesIO()
    Image.new("RGB", (8, 6), "white").save(kept, "PNG")
    return base64.b64encode(kept.getvalue()).decode("ascii")


def test_enclosure_in_a_zone_is_a_note(clean: Layout) -> None:
    cupboard = Enclosure(
        id="cupboard",
        footprint=((1.0, 4.0), (2.0, 4.0), (2.0, 4.5), (1.0, 4.5)),
        z_from=0.0,
        z_to=2.0,
    )
    cupboard = confirmed(cupboard, "footprint", "z_from", "z_to", "state")
    layout = replace(clean, enclosures=(*clean.enclosures, cupboard))
    found = only(layout, "W05")
    assert found.items == ("reception-zone", "cupboard")
    assert "0.500 m² of 10.1 m²" in found.sentence
    opened = replace(cupboard, state="open for work")
    assert remarks(replace(clean, enclosures=(*clean.enclosures, opened))) == ()
    values = ("footprint", "z_from", "z_to", "state", "front_clearance")
    kept = confirmed(replace(opened, front_clearance=0.4), *values)
    found = only(replace(clean, enclosures=(*clean.enclosures, kept)), "W05")
    assert "or are kept clear before open ones (“" in found.sentence
    low = replace(cupboard, z_to=0.3)
    assert remarks(replace(clean, enclosures=(*clean.enclosures, low))) == ()


def test_a_front_clearance_of_what_is_never_open_counts_nowhere(clean: Layout) -> None:
    values = ("footprint", "z_from", "z_to", "state", "front_clearance")
    kept = confirmed(replace(clean.enclosures[0], front_clearance=0.4), *values)
    layout = replace(clean, enclosures=(kept, *clean.enclosures[1:]))
    found = only(layout, "W37")
    assert found.items == (kept.id,)
    case = replace(layout.cases[0], open_enclosures=(kept.id,))
    opened = replace(layout, load_cases=(case, *layout.cases[1:]))
    assert "W37" not in {remark.code for remark in remarks(opened)}


def test_persons_at_particular_risk_need_an_assessment_of_their_own(
    clean: Layout,
) -> None:
    zones = changed(
        clean.zones, "reception-zone", category="persons at particular risk"
    )
    assert only(replace(clean, zones=zones), "W26").items == ("reception-zone",)


def test_values_without_an_origin_are_counted(clean: Layout) -> None:
    runs = changed(clean.runs, "incoming-bars", origins=())
    found = only(replace(clean, runs=runs), "W28")
    assert found.items == ("incoming-bars",)
    # route, section, rated current, containment
    assert found.sentence.startswith("4 values are still assumed, in 1 item")


def test_a_fresh_layout_assumes_its_uncertainty() -> None:
    assert only(Layout(), "W28").items == ("settings",)


# ---- results


DETAILS = PlaceDetails(
    at=(1.0, 4.0, 1.0),
    height=1.0,
    by_height=(),
    by_frequency=(),
    near_field=False,
    step=0.01,
    is_bound=False,
    bound_reason="",
    contributions=(),
    net_current=None,
)


def comparison(**values: object) -> Comparison:
    given: dict[str, object] = {
        "place": "reception-zone",
        "level": "example-a",
        "case": "highest-operation",
        "counted": True,
        "state": "below",
        "kind": "AC",
        "ratio": 0.5,
        "details": DETAILS,
    }
    return Comparison(**{**given, **values})


def assessed(
    layout: Layout,
    *comparisons: Comparison,
    maxima: tuple[Maximum, ...] = (),
    receptors: tuple[ReceptorResult, ...] = (),
) -> Assessment:
    zone = ZoneResult(layout.zones[0], 0.0, 10.0, {}, maxima, comparisons, "")
    cases = tuple(CaseResult(case, (50.0,), (), ()) for case in layout.cases)
    return Assessment(layout, cases, (zone,), receptors)


def test_ordinary_results_have_no_remarks(clean: Layout) -> None:
    maximum = Maximum("highest-operation", "AC", 4e-6, DETAILS)
    assessment = assessed(clean, comparison(), maxima=(maximum,))
    assert remarks(clean, assessment) == ()


def test_maximum_near_a_conductor_is_a_warning(clean: Layout) -> None:
    near = Maximum(
        "highest-operation", "AC", 4e-6, dataclasses.replace(DETAILS, near_field=True)
    )
    found = remarks(clean, assessed(clean, maxima=(near,)))
    assert [r.code for r in found] == ["W04"]
    assert "near field, even current assumed" in found[0].sentence
    assert found[0].place == DETAILS.at


@pytest.mark.parametrize("state", ["below, U reaches", "above, U reaches"])
def test_level_within_the_uncertainty_is_a_warning(clean: Layout, state: str) -> None:
    close = comparison(state=state, ratio=0.95, uncertainty=1.7e-6)
    found = remarks(clean, assessed(clean, close))
    assert [r.code for r in found] == ["W20"]
    assert "U of 1.70 µT reaches across the level" in found[0].sentence
    assert found[0].sentence.count(state.partition(",")[0]) >= 1


def test_uncertainty_in_a_case_for_information_is_a_note(clean: Layout) -> None:
    close = comparison(state="below, U reaches", ratio=0.95, counted=False)
    assert [r.severity for r in remarks(clean, assessed(clean, close))] == ["note"]


def test_rounding_that_hides_the_side_of_the_level_is_a_note(clean: Layout) -> None:
    close = comparison(state="above", ratio=1.0004)
    found = remarks(clean, assessed(clean, close))
    assert [r.code for r in found] == ["W30"]
    assert "1.00; it is 1.0004" in found[0].sentence
    assert remarks(clean, assessed(clean, comparison(ratio=1.01))) == ()


# ---- confirming


def test_confirmed_remark_is_no_longer_listed(clean: Layout) -> None:
    layout = replace(clean, equipment=(*clean.equipment, transformer()))
    by = ConfirmedRemark(id="c1", code="W27", items=("T9",), by="R. Thornquist")
    layout = replace(layout, confirmed_remarks=(by,))
    assert remarks(layout) == ()
    ((remark, who),) = confirmed_remarks(layout)
    assert (remark.code, who.by) == ("W27", "R. Thornquist")


def test_confirmation_of_other_items_or_codes_changes_nothing(clean: Layout) -> None:
    layout = replace(clean, equipment=(*clean.equipment, transformer()))
    others = (
        ConfirmedRemark(id="c1", code="W27", items=("T1",)),
        ConfirmedRemark(id="c2", code="W25", items=("T9",)),
        ConfirmedRemark(id="c3", code="W27"),
    )
    only(replace(layout, confirmed_remarks=others), "W27")


def test_what_blocks_cannot_be_confirmed_away(clean: Layout) -> None:
    zones = changed(clean.zones, "reception-zone", levels=("nowhere",))
    layout = replace(
        clean,
        zones=zones,
        confirmed_remarks=(
            ConfirmedRemark(id="c1", code="F01", items=("reception-zone",)),
        ),
    )
    assert only(layout, "F01").severity == "blocking"


def test_blocking_remarks_come_first(clean: Layout) -> None:
    zones = changed(clean.zones, "reception-zone", levels=("nowhere",), category="")
    layout = replace(clean, zones=zones, equipment=(*clean.equipment, transformer()))
    assert [r.severity for r in remarks(layout)] == ["blocking", "warning", "note"]
