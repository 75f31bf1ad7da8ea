"""Circuits and load cases as phasors: neutral, net current, spectra, coherence."""

from __future__ import annotations

import cmath
import math

import msgspec
import numpy as np
import pytest

from engine.circuits import (
    ENTERED_CURRENTS,
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
    NeutralShare,
    OwnCurrents,
    Power,
    SpectrumLine,
    Unbalance,
)
from engine.conductor import Conductor
from engine.currents import (
    AngleNote,
    CasePhasors,
    Component,
    case_phasors,
    circuit_phasors,
    conductor_currents,
    load_current,
    neutral_comparison,
    node_currents,
)
from engine.errors import UserError
from engine.layout import Layout
from engine.runs import Round, SlotLoad

UNBALANCED = LineLoads(
    loads=(
        LineLoad(label="L1", rms=575, lag=18),
        LineLoad(label="L2", rms=540, lag=20),
        LineLoad(label="L3", rms=505, lag=22),
    )
)
THIRD = SpectrumLine(frequency=150, ratio=0.12, offset=180)


def polar(rms: float, degrees: float) -> complex:
    return cmath.rect(rms, math.radians(degrees))


def direct(**currents: tuple[float, float]) -> DirectCurrents:
    return DirectCurrents(
        currents=tuple(
            ConductorCurrent(label=label, rms=rms, angle=angle)
            for label, (rms, angle) in currents.items()
        )
    )


def dc(
    rms: float, *spectrum: SpectrumLine, angle: float = 0.0, id: str = "link"
) -> Circuit:
    plus = ConductorCurrent(label="L+", rms=rms, angle=angle)
    return Circuit(
        id=id,
        supply="dc",
        base_frequency=0,
        demand=DirectCurrents(currents=(plus,)),
        spectrum=spectrum,
    )


def phasors_of(*circuits: Circuit, case: LoadCase | None = None) -> CasePhasors:
    layout = Layout(circuits=circuits)
    return case_phasors(layout, case or layout.cases[0])


def balanced(id: str = "feeder", rms: float = 100.0, **other: object) -> Circuit:
    return Circuit(id=id, demand=BalancedCurrent(rms=rms), **other)  # type: ignore[arg-type]


# demand to lines


def test_balanced_lagging_lines_follow_their_voltages() -> None:
    found = circuit_phasors(
        Circuit(id="a", demand=BalancedCurrent(rms=200, cos_phi=0.8))
    )
    lag = math.degrees(math.acos(0.8))
    assert found["L1", 50] == pytest.approx(polar(200, -lag))
    assert found["L2", 50] == pytest.approx(polar(200, -120 - lag))
    assert found["L3", 50] == pytest.approx(polar(200, 120 - lag))
    assert found["N", 50] == 0


def test_leading_power_factor_turns_the_other_way() -> None:
    demand = LineLoads(
        loads=(
            LineLoad(label="L1", rms=10, cos_phi=0.5, sense="leading"),
            LineLoad(label="L2", rms=20, cos_phi=0.5),
            LineLoad(label="L3", rms=30, lag=-10),
        )
    )
    found = circuit_phasors(Circuit(id="a", demand=demand))
    assert found["L1", 50] == pytest.approx(polar(10, 60))
    assert found["L2", 50] == pytest.approx(polar(20, -180))
    assert found["L3", 50] == pytest.approx(polar(30, 130))


def test_direct_currents_are_taken_as_stated() -> None:
    found = circuit_phasors(
        Circuit(id="a", demand=direct(L1=(5, 30), L2=(6, 90), PE=(1, 0)))
    )
    assert found["L1", 50] == pytest.approx(polar(5, 30))
    assert found["PE", 50] == pytest.approx(1)
    assert found["N", 50] == pytest.approx(-(polar(5, 30) + polar(6, 90) + 1))


def test_free_circuit_keeps_its_labels_and_computes_nothing() -> None:
    circuit = Circuit(
        id="a",
        supply="free",
        demand=direct(go=(5, 0), back=(4, 180)),
        spectrum=(SpectrumLine(frequency=150, ratio=0.5, offset=0),),
    )
    found = circuit_phasors(circuit)
    assert set(found) == {("go", 50), ("back", 50), ("go", 150), ("back", 150)}
    assert found["back", 150] == pytest.approx(-2)


def test_free_conductor_may_have_a_harmonic_only() -> None:
    line = SpectrumLine(frequency=250, label="w", rms=3, offset=90)
    found = circuit_phasors(Circuit(id="a", supply="free", spectrum=(line,)))
    assert found["w", 250] == pytest.approx(3j)


def test_single_phase_neutral_is_minus_the_line() -> None:
    circuit = Circuit(
        id="a",
        supply="single-phase",
        voltage=230,
        demand=Power(active=2300, cos_phi=1.0),
    )
    found = circuit_phasors(circuit)
    assert found == {("L1", 50): pytest.approx(10), ("N", 50): pytest.approx(-10)}


def test_circuit_without_demand_carries_nothing() -> None:
    assert not any(circuit_phasors(Circuit(id="a", spectrum=(THIRD,))).values())
    phasors = phasors_of(Circuit(id="a"))
    assert phasors.components == ()
    assert phasors.of("a", "L1").shape == (0,)


# spectra


def test_triplen_harmonics_add_in_the_neutral_and_the_fifth_cancels() -> None:
    circuit = balanced(
        spectrum=(
            SpectrumLine(frequency=150, ratio=0.2, offset=0),
            SpectrumLine(frequency=250, ratio=0.1, offset=0),
            SpectrumLine(frequency=450, rms=4, offset=0),
        )
    )
    found = circuit_phasors(circuit)
    assert found["N", 150] == pytest.approx(-3 * found["L1", 150])
    assert abs(found["N", 150]) == pytest.approx(60)
    assert abs(found["N", 450]) == pytest.approx(12)
    assert found["N", 250] == 0
    assert ("feeder", "N") in phasors_of(circuit).values


def test_harmonic_angle_is_order_times_the_lines_own_angle_plus_offset() -> None:
    found = circuit_phasors(Circuit(id="a", demand=UNBALANCED, spectrum=(THIRD,)))
    assert found["L1", 150] == pytest.approx(polar(69, -54 + 180))
    assert found["L2", 150] == pytest.approx(polar(64.8, 3 * -140 + 180))
    assert found["L3", 150] == pytest.approx(polar(60.6, 3 * 98 + 180))
    lines = found["L1", 150] + found["L2", 150] + found["L3", 150]
    assert found["N", 150] == pytest.approx(-lines)


def test_named_spectrum_line_replaces_the_one_for_every_line() -> None:
    own = SpectrumLine(frequency=150, label="L2", rms=7, offset=0)
    found = circuit_phasors(balanced(spectrum=(THIRD, own)))
    assert abs(found["L1", 150]) == pytest.approx(12)
    assert abs(found["L2", 150]) == pytest.approx(7)


def test_protective_conductor_is_no_line_of_a_spectrum() -> None:
    demand = direct(L1=(10, 0), L2=(10, -120), L3=(10, 120), PE=(1, 0))
    found = circuit_phasors(Circuit(id="a", demand=demand, spectrum=(THIRD,)))
    assert ("PE", 150) not in found


def test_line_without_fundamental_current_keeps_its_angle_for_harmonics() -> None:
    demand = direct(L1=(0, 0), L2=(0, -120), L3=(0, 120))
    fifth = SpectrumLine(frequency=250, rms=10, offset=0)
    found = circuit_phasors(Circuit(id="a", demand=demand, spectrum=(fifth,)))
    assert found["L2", 250] == pytest.approx(polar(10, 120))
    assert found["N", 250] == 0


def test_ripple_follows_the_direction_of_its_direct_current() -> None:
    ripple = SpectrumLine(frequency=300, rms=3.6, offset=30)
    found = circuit_phasors(dc(60, ripple, angle=180))
    assert found["L+", 0] == -60
    assert found["L-", 0] == 60
    assert found["L+", 300] == pytest.approx(polar(3.6, 210))
    assert found["L-", 300] == pytest.approx(polar(3.6, 30))


def test_direct_part_of_an_alternating_current_has_a_sign() -> None:
    offset = SpectrumLine(frequency=0, label="L1", rms=2, offset=180)
    found = circuit_phasors(balanced(spectrum=(offset,)))
    assert found["L1", 0] == -2
    assert found["N", 0] == 2


# neutral and net current


def test_share_of_the_neutral_leaves_at_every_frequency() -> None:
    whole = circuit_phasors(Circuit(id="a", demand=UNBALANCED, spectrum=(THIRD,)))
    circuit = Circuit(
        id="a",
        demand=UNBALANCED,
        spectrum=(THIRD,),
        net_current=NeutralShare(share=0.15),
    )
    found = circuit_phasors(circuit)
    for frequency in (50, 150):
        total = whole["N", frequency]
        assert found["stray", frequency] == pytest.approx(0.15 * total)
        assert found["N", frequency] == pytest.approx(0.85 * total)


def test_entered_net_current_is_taken_out_of_the_neutral() -> None:
    third = SpectrumLine(frequency=150, label="stray", rms=2, offset=0)
    net = EnteredNetCurrent(rms=5, angle=40)
    found = circuit_phasors(balanced(net_current=net, spectrum=(third,)))
    assert found["stray", 50] == pytest.approx(polar(5, 40))
    assert found["N", 50] == pytest.approx(-polar(5, 40))
    assert found["stray", 150] == pytest.approx(polar(2, 120))
    assert found["N", 150] == pytest.approx(-polar(2, 120))


def test_unknown_angle_of_net_current_is_that_of_the_neutral_and_noted() -> None:
    circuit = Circuit(id="a", demand=UNBALANCED, net_current=EnteredNetCurrent(rms=5))
    neutral = circuit_phasors(Circuit(id="a", demand=UNBALANCED))["N", 50]
    phasors = phasors_of(circuit)
    assert phasors.of("a", "stray")[0] == pytest.approx(5 * neutral / abs(neutral))
    assert phasors.of("a", "N")[0] == pytest.approx(neutral * (1 - 5 / abs(neutral)))
    assert phasors.notes == (AngleNote("net current angle assumed", "a"),)


def test_unknown_angle_of_net_current_is_zero_without_a_neutral_current() -> None:
    found = circuit_phasors(balanced(net_current=EnteredNetCurrent(rms=5)))
    assert found["stray", 50] == pytest.approx(5)
    assert found["N", 50] == pytest.approx(-5)


def test_three_wire_residual_stays() -> None:
    circuit = Circuit(id="a", supply="three-phase three-wire", demand=UNBALANCED)
    assert {label for label, _ in circuit_phasors(circuit)} == {"L1", "L2", "L3"}


def test_entered_neutral_is_the_demands_own() -> None:
    circuit = Circuit(
        id="a",
        demand=direct(L1=(10, 0), N=(8, 170)),
        neutral="entered",
        spectrum=(SpectrumLine(frequency=150, label="N", ratio=0.5, offset=0),),
    )
    found = circuit_phasors(circuit)
    assert found["N", 50] == pytest.approx(polar(8, 170))
    assert found["N", 150] == pytest.approx(polar(4, 510))


def test_neutral_none_has_no_neutral() -> None:
    circuit = Circuit(id="a", demand=UNBALANCED, neutral="none")
    assert ("N", 50) not in circuit_phasors(circuit)


# clamp surveys

SURVEY = MeasuredCurrents(
    lines=(
        MeasuredLine(label="L1", rms=100),
        MeasuredLine(label="L2", rms=80),
        MeasuredLine(label="L3", rms=80),
    ),
    neutral=33,
    net=2.5,
    cos_phi=0.8,
)


def test_survey_takes_the_sequence_and_says_so() -> None:
    phasors = phasors_of(Circuit(id="a", demand=SURVEY))
    lag = math.degrees(math.acos(0.8))
    assert phasors.of("a", "L2")[0] == pytest.approx(polar(80, -120 - lag))
    assert phasors.of("a", "N")[0] == pytest.approx(-polar(20, -lag))
    assert phasors.notes == (AngleNote("sequence assumed", "a"),)


def test_survey_without_power_factor_says_so() -> None:
    survey = MeasuredCurrents(lines=SURVEY.lines)
    assert phasors_of(Circuit(id="a", demand=survey)).notes == (
        AngleNote("sequence assumed", "a"),
        AngleNote("power factor assumed", "a"),
    )


def test_measured_neutral_stands_beside_the_computed_one() -> None:
    half = LoadCase(id="half", factors=(CircuitFactor(circuit="a", factor=0.5),))
    third = SpectrumLine(frequency=150, ratio=0.1, offset=0)
    circuit = Circuit(id="a", demand=SURVEY, spectrum=(third,))
    comparison = neutral_comparison(circuit)
    assert comparison.computed == pytest.approx(math.hypot(20, 26))
    assert comparison.measured == 33
    assert comparison.net == 2.5
    assert neutral_comparison(circuit, half).measured == 16.5
    assert neutral_comparison(balanced()).measured is None


def test_comparison_does_not_depend_on_net_current() -> None:
    share = Circuit(id="a", demand=UNBALANCED, net_current=NeutralShare(share=0.5))
    plain = Circuit(id="a", demand=UNBALANCED)
    assert neutral_comparison(share) == neutral_comparison(plain)


def test_measured_neutral_taken_as_entered_has_the_computed_angle_and_says_so() -> None:
    phasors = phasors_of(Circuit(id="a", demand=SURVEY, neutral="entered"))
    lag = math.degrees(math.acos(0.8))
    assert phasors.of("a", "N")[0] == pytest.approx(-polar(33, -lag))
    assert AngleNote("neutral angle assumed", "a") in phasors.notes


# load cases


def test_load_case_scales_replaces_and_switches_off() -> None:
    case = LoadCase(
        id="case",
        factors=(
            CircuitFactor(circuit="a", factor=0.5),
            CircuitFactor(circuit="b", factor=2),
        ),
        own=(OwnCurrents(circuit="b", demand=BalancedCurrent(rms=7)),),
        others="off",
    )
    phasors = phasors_of(
        balanced("a", spectrum=(THIRD,), net_current=EnteredNetCurrent(rms=4, angle=0)),
        balanced("b", spectrum=(THIRD,)),
        balanced("c"),
        case=case,
    )
    assert np.abs(phasors.of("a", "L1")) == pytest.approx([50, 6])
    assert np.abs(phasors.of("a", "stray")) == pytest.approx([2, 0])
    assert np.abs(phasors.of("b", "L1")) == pytest.approx([14, 1.68])
    assert not phasors.of("c", "L1").any()


def test_own_spectrum_may_be_empty() -> None:
    case = LoadCase(id="case", own=(OwnCurrents(circuit="a", spectrum=()),))
    found = circuit_phasors(balanced("a", spectrum=(THIRD,)), case)
    assert {frequency for _, frequency in found} == {50}


def test_own_currents_may_be_a_survey() -> None:
    case = LoadCase(id="case", own=(OwnCurrents(circuit="a", demand=SURVEY),))
    phasors = phasors_of(balanced("a"), case=case)
    assert abs(phasors.of("a", "L1")[0]) == pytest.approx(100)
    assert [note.kind for note in phasors.notes] == ["sequence assumed"]


def test_case_naming_a_circuit_twice_is_refused() -> None:
    factor = CircuitFactor(circuit="a", factor=1)
    case = LoadCase(id="case", name="Rated", factors=(factor, factor))
    with pytest.raises(UserError, match=r"“Rated”.*circuit a comes twice"):
        circuit_phasors(balanced("a"), case)


# components


def test_circuits_of_one_base_share_a_component() -> None:
    phasors = phasors_of(balanced("a", spectrum=(THIRD,)), balanced("b"))
    assert phasors.components == (Component(50, 50), Component(150, 50))
    assert phasors.of("b", "L1")[1] == 0


def test_components_are_sorted_by_frequency_then_base() -> None:
    fifth = SpectrumLine(frequency=300, ratio=0.1, offset=0)
    sixty = balanced("sixty", base_frequency=60, spectrum=(fifth,))
    fifty = balanced("fifty", spectrum=(fifth,))
    phasors = phasors_of(sixty, fifty, dc(10))
    assert phasors.components == (
        Component(0, 0), Component(50, 50), Component(60, 60),
        Component(300, 50), Component(300, 60),
    )  # fmt: skip
    assert set(phasors.notes) == {
        AngleNote("other base", "fifty", 300),
        AngleNote("other base", "sixty", 300),
    }


def test_direct_currents_add_whatever_their_base() -> None:
    part = SpectrumLine(frequency=0, label="L1", rms=2, offset=0)
    phasors = phasors_of(dc(10), balanced("a", spectrum=(part,)))
    assert phasors.components == (Component(0, 0), Component(50, 50))
    assert phasors.of("a", "L1")[0] == 2


def test_unknown_relation_keeps_a_circuit_apart_at_all_its_frequencies() -> None:
    phasors = phasors_of(
        balanced("a", spectrum=(THIRD,)),
        balanced("b", spectrum=(THIRD,), phase_relation="unknown"),
    )
    assert phasors.components == (
        Component(50, 50), Component(50, 50, "b"),
        Component(150, 50), Component(150, 50, "b"),
    )  # fmt: skip
    assert phasors.notes == (AngleNote("relation unknown", "b"),)
    assert abs(phasors.of("b", "L1")) == pytest.approx([0, 100, 0, 12])


def test_unknown_relation_means_nothing_to_a_circuit_alone_at_its_base() -> None:
    alone = balanced("b", base_frequency=60, phase_relation="unknown")
    phasors = phasors_of(balanced("a"), alone)
    assert [component.group for component in phasors.components] == ["", ""]
    assert phasors.notes == ()


def test_circuit_switched_off_is_no_company() -> None:
    case = LoadCase(id="case", factors=(CircuitFactor(circuit="a", factor=0),))
    other = balanced("b", phase_relation="unknown")
    assert phasors_of(balanced("a"), other, case=case).components == (
        Component(50, 50),
    )


def test_unknown_offsets_are_independent_of_each_other() -> None:
    third = SpectrumLine(frequency=150, ratio=0.1)
    fifth = SpectrumLine(frequency=250, ratio=0.1)
    phasors = phasors_of(
        balanced("a", spectrum=(third, fifth)), balanced("b", spectrum=(THIRD,))
    )
    assert phasors.components == (
        Component(50, 50), Component(150, 50), Component(150, 50, "a @ 150 Hz"),
        Component(250, 50, "a @ 250 Hz"),
    )  # fmt: skip
    assert phasors.components[2].circuit == "a"
    assert set(phasors.notes) == {
        AngleNote("offset unknown", "a", 150),
        AngleNote("offset unknown", "a", 250),
    }


def test_unknown_offset_beats_unknown_relation_at_its_frequency() -> None:
    third = SpectrumLine(frequency=150, ratio=0.1)
    phasors = phasors_of(
        balanced("a", spectrum=(third,), phase_relation="unknown"), balanced("b")
    )
    groups = [component.group for component in phasors.components]
    assert groups == ["", "a", "a @ 150 Hz"]


def test_lone_ripple_of_unknown_angle_needs_no_group() -> None:
    ripple = SpectrumLine(frequency=300, rms=3.6)
    phasors = phasors_of(dc(60, ripple))
    assert phasors.components == (Component(0, 0), Component(300, 0))
    assert phasors.notes == (AngleNote("offset unknown", "link", 300),)


def test_two_ripples_of_unknown_angle_do_not_add() -> None:
    ripple = SpectrumLine(frequency=300, rms=3.6)
    phasors = phasors_of(dc(60, ripple), dc(30, ripple, id="string"))
    assert [component.group for component in phasors.components] == [
        "", "link @ 300 Hz", "string @ 300 Hz",
    ]  # fmt: skip


def test_phasors_of_a_case_cannot_be_written_over() -> None:
    with pytest.raises(ValueError, match="read-only"):
        phasors_of(balanced("a")).values["a", "L1"][0] = 0


# conductors


def conductor(*loads: SlotLoad) -> Conductor:
    path = np.array([[0.0, 0, 0], [1, 0, 0]])
    return Conductor(
        key="x", item="x", slot="x", role="run", path=path, axes=np.zeros((2, 2, 3)),
        shape=Round(), loads=loads, group="x",
    )  # fmt: skip


def test_conductor_carries_the_sum_of_its_loads() -> None:
    phasors = phasors_of(balanced("a", rms=100), balanced("b", rms=10))
    both = (
        SlotLoad(circuit="a", label="L1", share=0.5),
        SlotLoad(circuit="b", label="L1", share=-1),
        SlotLoad(circuit="gone", label="L1"),
    )
    l2 = SlotLoad(circuit="a", label="L2")
    currents = conductor_currents(
        phasors, [conductor(l2), conductor(), conductor(*both)]
    )
    expected = 0.5 * phasors.of("a", "L1") - phasors.of("b", "L1")
    assert currents.shape == (1, 3)
    assert currents[:, 0] == pytest.approx(phasors.of("a", "L2"))
    assert currents[0, 1] == 0
    assert currents[:, 2] == pytest.approx(expected)
    assert load_current(phasors, both) == pytest.approx(expected)


def test_dead_layout_gives_no_components() -> None:
    phasors = phasors_of(Circuit(id="a"))
    load = SlotLoad(circuit="a", label="L1")
    assert conductor_currents(phasors, [conductor(load)]).shape == (0, 1)
    assert load_current(phasors, [load]).shape == (0,)


# what is refused

BOTH = LineLoads(loads=(LineLoad(label="L1", rms=1, cos_phi=0.9, lag=5),))
NEITHER = LineLoads(loads=(LineLoad(label="L1", rms=1),))
TWICE = DirectCurrents(
    currents=(ConductorCurrent(label="L1", rms=1), ConductorCurrent(label="L1", rms=2))
)
REFUSED: list[tuple[dict[str, object], str]] = [
    ({"demand": Power(active=1)}, "voltage.*between lines"),
    ({"demand": Power(), "voltage": 400}, "either the apparent power"),
    ({"demand": Power(active=1, apparent=1), "voltage": 400}, "not both"),
    ({"demand": BOTH}, "L1: enter either the power factor"),
    ({"demand": NEITHER}, "L1: enter either the power factor"),
    ({"demand": TWICE}, "L1 comes twice"),
    ({"demand": direct(L1=(1, 0), stray=(1, 0))}, "enter it as net current"),
    ({"demand": direct(l1=(1, 0))}, "no conductor l1; use L1, L2, L3, N, PE"),
    ({"demand": LineLoads(loads=(LineLoad(label="N", rms=1, lag=0),))}, "N has no"),
    ({"supply": "free", "demand": BalancedCurrent(rms=1)}, "no lines to spread"),
    ({"supply": "dc"}, "0 Hz, not 50 Hz"),
    ({"base_frequency": 0}, "0 Hz does not fit"),
    (
        {"supply": "dc", "base_frequency": 0,
         "demand": DirectCurrents(
             currents=(ConductorCurrent(label="L+", rms=1, angle=30),))},
        "no angle of 30°",
    ),
    (
        {"supply": "single-phase",
         "demand": BalancedCurrent(rms=1, unbalance=Unbalance(negative_ratio=0.1))},
        "no sequence components",
    ),
    ({"neutral": "entered", "demand": UNBALANCED}, "the demand states no N"),
    ({"neutral": "entered", "supply": "three-phase three-wire"}, "none to enter"),
    (
        {"supply": "three-phase three-wire", "net_current": NeutralShare(share=0.1)},
        "no neutral to take a share of",
    ),
    ({"neutral": "none", "net_current": NeutralShare(share=0.1)}, "no neutral to take"),
    ({"spectrum": (SpectrumLine(frequency=150),)}, "150 Hz: enter either a ratio"),
    ({"spectrum": (THIRD, THIRD)}, "150 Hz: the frequency comes twice"),
    ({"spectrum": (SpectrumLine(frequency=50, ratio=1),)}, "the base frequency"),
    ({"spectrum": (SpectrumLine(frequency=150, label="N", rms=1),)}, "no current of N"),
    ({"spectrum": (SpectrumLine(frequency=150, label="stray", rms=1),)}, "of stray"),
    ({"spectrum": (SpectrumLine(frequency=0, label="L1", rms=1),)}, "needs a dire"),
    (
        {"spectrum": (SpectrumLine(frequency=0, label="L1", rms=1, offset=45),)},
        "no angle of 45°",
    ),
]  # fmt: skip


@pytest.mark.parametrize(("fields", "sentence"), REFUSED)
def test_refusal_names_circuit_and_what_to_do(
    fields: dict[str, object], sentence: str
) -> None:
    circuit = Circuit(id="f1", name="Office riser", **fields)  # type: ignore[arg-type]
    with pytest.raises(UserError, match=sentence) as refusal:
        circuit_phasors(circuit)
    text = str(refusal.value)
    assert text.startswith("Circuit “Office riser”, ")
    assert text.endswith(".")


def test_two_circuits_of_one_id_are_refused() -> None:
    with pytest.raises(UserError, match="Two circuits have the id a"):
        phasors_of(balanced("a"), balanced("a"))


def test_a_frequency_with_known_and_unknown_offsets_says_what_it_assumes():
    circuit = Circuit(
        id="C",
        demand=BalancedCurrent(rms=100.0),
        spectrum=(
            SpectrumLine(frequency=250.0, label="L1", ratio=0.1, offset=30.0),
            SpectrumLine(frequency=250.0, label="L2", ratio=0.1),
            SpectrumLine(frequency=350.0, ratio=0.1),
        ),
    )
    notes = case_phasors(Layout(circuits=(circuit,)), ENTERED_CURRENTS).notes
    kinds = {(note.kind, note.frequency) for note in notes}
    assert ("line offset assumed", 250.0) in kinds
    assert ("offset unknown", 250.0) in kinds
    assert ("line offset assumed", 350.0) not in kinds


def test_the_same_circuits_and_case_give_the_identical_phasors():
    layout = Layout(circuits=(Circuit(id="C", demand=BalancedCurrent(rms=100.0)),))
    renamed = msgspec.structs.replace(layout, runs=())
    case = layout.cases[0]
    assert case_phasors(renamed, case) is case_phasors(layout, case)
    louder = Circuit(id="C", demand=BalancedCurrent(rms=200.0))
    changed = msgspec.structs.replace(layout, circuits=(louder,))
    assert abs(case_phasors(changed, case).of("C", "L1")[0]) == pytest.approx(200.0)


def test_currents_into_nodes_are_those_of_their_loads_asked_often_or_once():
    layout = Layout(circuits=(Circuit(id="C", demand=BalancedCurrent(rms=100.0)),))
    phasors = case_phasors(layout, layout.cases[0])
    inflows = [
        (SlotLoad(circuit="C", label="L1", share=0.5),),
        (),
        (
            SlotLoad(circuit="C", label="L1"),
            SlotLoad(circuit="C", label="L2"),
            SlotLoad(circuit="C", label="L3"),
        ),
        (SlotLoad(circuit="gone", label="L1"),),
    ]
    expected = np.stack([load_current(phasors, x) for x in inflows], axis=1)
    first = node_currents(phasors, inflows)
    assert np.array_equal(first, expected)
    assert abs(first[0, 0]) == pytest.approx(50.0)
    assert abs(first[0, 2]) < 1e-9
    # Equal values that are other objects, and others in between.
    again = [inflows[2], (SlotLoad(circuit="C", label="L1", share=0.5),), inflows[0]]
    assert np.array_equal(node_currents(phasors, again), expected[:, [2, 0, 0]])
