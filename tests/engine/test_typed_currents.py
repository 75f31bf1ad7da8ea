"""Current cells: what is typed, what it becomes, and the text that comes back."""

from __future__ import annotations

import math
from contextlib import suppress

import pytest
from hypothesis import given
from hypothesis import strategies as st
from msgspec.structs import replace

from engine.circuits import (
    BalancedCurrent,
    Circuit,
    ConductorCurrent,
    DirectCurrents,
    EnteredNetCurrent,
    LineLoad,
    LineLoads,
    MeasuredCurrents,
    MeasuredLine,
    NeutralShare,
    Power,
    Unbalance,
)
from engine.edits import checked
from engine.errors import UserError
from engine.shown_currents import (
    current_text,
    made_of_it,
    net_current_text,
    power_factor_text,
    typed_net_current,
)
from engine.typed_currents import typed_current, typed_power_factor
from engine.typed_numbers import typed_number, typed_quantity

FOUR_WIRE = Circuit(id="F1", voltage=400.0)
NO_VOLTAGE = Circuit(id="F1")
DC = Circuit(id="B1", supply="dc", base_frequency=0.0, voltage=110.0)
SINGLE = Circuit(id="S1", supply="single-phase", voltage=230.0)
FREE = Circuit(id="X1", supply="free")


def entered(text: str, circuit: Circuit = FOUR_WIRE, decimal: str = ".") -> Circuit:
    """The circuit after the text was typed in its cell."""
    typed = typed_current(text, circuit, decimal)
    voltage = typed.voltage if typed.voltage is not None else circuit.voltage
    return checked(replace(circuit, demand=typed.demand, voltage=voltage))


@pytest.mark.parametrize(
    ("text", "rms", "cos_phi", "sense"),
    [
        ("800", 800, 0.9, "lagging"),
        ("1.6 kA", 1600, 0.9, "lagging"),
        ("1,6 kA", 1600, 0.9, "lagging"),
        ("1.6kA", 1600, 0.9, "lagging"),
        ("800 A 0.9 lag", 800, 0.9, "lagging"),
        ("800 A 0.95 lead", 800, 0.95, "leading"),
        ("800 cos φ 0.85", 800, 0.85, "lagging"),
        ("800 A pf=0.85 ind", 800, 0.85, "lagging"),
        (".5 kA 1", 500, 1, "lagging"),
        ("0", 0, 0.9, "lagging"),
    ],
)
def test_a_current_is_understood(text, rms, cos_phi, sense):
    demand = typed_current(text, NO_VOLTAGE).demand
    assert demand == BalancedCurrent(rms=rms, cos_phi=cos_phi, sense=sense)


@pytest.mark.parametrize(
    ("text", "demand", "voltage"),
    [
        ("250 kVA 400 V", Power(apparent=250e3), 400),
        ("250 kVA 400V 0.9 lag", Power(apparent=250e3), 400),
        ("1.6 MVA 11 kV 0.8 lead", Power(apparent=1.6e6, cos_phi=0.8, sense="leading"),
         11e3),
        ("180 kW 400 V 0.92", Power(active=180e3, cos_phi=0.92), 400),
        ("180 kW 0.92", Power(active=180e3, cos_phi=0.92), None),
    ],
)  # fmt: skip
def test_a_power_is_understood_with_its_voltage(text, demand, voltage):
    typed = typed_current(text, FOUR_WIRE)
    assert (typed.demand, typed.voltage) == (demand, voltage)


def test_lag_in_degrees_is_kept_as_typed():
    demand = typed_current("575@18", FOUR_WIRE).demand
    assert demand == LineLoads(
        loads=tuple(LineLoad(label=x, rms=575, lag=18) for x in ("L1", "L2", "L3"))
    )
    assert typed_current("575 A @ 18 lead", FOUR_WIRE).demand.loads[0].lag == -18
    assert current_text(entered("575@18")) == "575 A @ 18"
    assert made_of_it(entered("575@18")) == "575 A 18° lagging"


def test_currents_of_the_lines_share_the_angle_at_the_end():
    demand = typed_current("246 / 238 / 251 A @ 27", FOUR_WIRE).demand
    assert [load.rms for load in demand.loads] == [246, 238, 251]
    assert {load.lag for load in demand.loads} == {27}
    apart = typed_current("246@27 / 238 0.9 / 251 @ 20 lead", FOUR_WIRE).demand
    assert [load.lag for load in apart.loads] == [27, None, -20]
    assert apart.loads[1].cos_phi == 0.9


def test_what_it_made_of_a_power_is_the_line_current():
    # Common practice: I = S / (√3 U); 250 kVA at 400 V is 360.84 A.
    assert made_of_it(entered("250 kVA 400 V 0.9 lag")) == "361 A at 0.90 lagging"
    # I = P / (√3 U cos φ) = 282.4 A.
    assert made_of_it(entered("180 kW 400 V 0.92")) == "282 A at 0.92 lagging"
    # One phase: I = S / U = 46 A.
    assert made_of_it(entered("10.58 kVA 230 V", SINGLE)).startswith("46.0 A at")
    # DC: I = P / U = 50 A, whatever a power factor says.
    assert made_of_it(entered("5.5 kW 110 V", DC)) == "50.0 A direct current"
    assert made_of_it(entered("")) == "no current entered"


def test_present_power_factor_and_unbalance_stay_when_only_amperes_are_typed():
    unbalance = Unbalance(negative_ratio=0.05)
    before = BalancedCurrent(rms=700, cos_phi=0.8, unbalance=unbalance)
    after = typed_current("800", replace(FOUR_WIRE, demand=before)).demand
    assert after == BalancedCurrent(rms=800, cos_phi=0.8, unbalance=unbalance)
    lag = typed_current("575@18", FOUR_WIRE).demand
    again = typed_current("600", replace(FOUR_WIRE, demand=lag)).demand
    assert {load.lag for load in again.loads} == {18}
    assert {load.rms for load in again.loads} == {600}


@pytest.mark.parametrize(
    ("text", "circuit", "words"),
    [
        ("1,600", NO_VOLTAGE, "two ways"),
        ("1.600,5 A", NO_VOLTAGE, "two ways"),
        ("250 kVA", NO_VOLTAGE, "without a voltage"),
        ("250 kVA 0 V", NO_VOLTAGE, "more than 0 V"),
        ("five", FOUR_WIRE, "Nothing can be made"),
        ("5 apples", FOUR_WIRE, "no unit"),
        ("180 mW 400 V", FOUR_WIRE, "thousandth"),
        ("800 A 1.2", FOUR_WIRE, "power factor lies"),
        ("800 A 0 lag", FOUR_WIRE, "power factor lies"),
        ("800 A lag", FOUR_WIRE, "no power factor"),
        ("800 A @ 270", FOUR_WIRE, "-180"),
        ("250 kVA 400 V @ 95", FOUR_WIRE, "flows back"),
        ("800 A 0.9 lag", DC, "no power factor"),
        ("650 / 650", DC, "one current"),
        ("800", FREE, "no lines"),
        ("246 / 238", FOUR_WIRE, "2 currents for 3 lines"),
        ("L1 100 / L2 90 / L3 80", FOUR_WIRE, "not the current of a line"),
        ("measured", FOUR_WIRE, "Nothing can be made"),
        ("-800", FOUR_WIRE, "Nothing can be made"),
        ("nan A", FOUR_WIRE, "Nothing can be made"),
        ("1e999", FOUR_WIRE, "too large"),
    ],
)
def test_what_cannot_be_is_told_in_a_sentence(text, circuit, words):
    with pytest.raises(UserError, match=words) as told:
        typed_current(text, circuit)
    assert str(told.value).endswith(".")


def test_a_comma_before_three_digits_is_a_decimal_where_commas_are():
    assert typed_current("1,625 kA", NO_VOLTAGE, ",").demand.rms == 1625
    with pytest.raises(UserError, match="two ways"):
        typed_current("1.625 kA", NO_VOLTAGE, ",")
    # No thousands begin with a zero.
    assert typed_number("0,625") == 0.625
    assert typed_quantity("320mm", {"m": 1.0, "mm": 1e-3}, "m") == 0.32


DEMANDS = [
    BalancedCurrent(rms=800, cos_phi=0.9),
    BalancedCurrent(rms=12_500.25, cos_phi=0.87, sense="leading"),
    Power(apparent=250e3, cos_phi=0.9),
    Power(active=180e3, cos_phi=0.92, sense="leading"),
    LineLoads(
        loads=(
            LineLoad(label="L1", rms=246, lag=27),
            LineLoad(label="L2", rms=238, lag=27),
            LineLoad(label="L3", rms=251, lag=27),
        )
    ),
    LineLoads(
        loads=(
            LineLoad(label="L1", rms=246, lag=27),
            LineLoad(label="L2", rms=238, cos_phi=0.95, sense="leading"),
            LineLoad(label="L3", rms=251, lag=-3.5),
        )
    ),
    DirectCurrents(
        currents=(
            ConductorCurrent(label="L1", rms=100.5, angle=-27),
            ConductorCurrent(label="N", rms=12, angle=153.25),
        )
    ),
    MeasuredCurrents(
        lines=tuple(
            MeasuredLine(label=x, rms=r)
            for x, r in (("L1", 64.0), ("L2", 57.5), ("L3", 61.0))
        ),
        neutral=12.0,
        net=0.4,
        cos_phi=0.9,
        date="2024-02-05",
        instrument="Clamp 7",
    ),
]


@pytest.mark.parametrize("decimal", [".", ","])
@pytest.mark.parametrize("demand", DEMANDS)
def test_the_text_of_a_demand_reads_back_as_the_same_demand(demand, decimal):
    circuit = replace(FOUR_WIRE, demand=demand)
    typed = typed_current(current_text(circuit, decimal), circuit, decimal)
    assert typed.demand == demand
    assert typed.voltage in (None, circuit.voltage)
    assert made_of_it(circuit, decimal)


@given(
    st.floats(0, 1e9, allow_nan=False).map(lambda x: round(x, 3)),
    st.floats(0.01, 1).map(lambda x: round(x, 4)),
    st.sampled_from([".", ","]),
)
def test_any_current_reads_back(rms, cos_phi, decimal):
    demand = BalancedCurrent(rms=rms, cos_phi=cos_phi)
    circuit = replace(FOUR_WIRE, demand=demand)
    again = typed_current(current_text(circuit, decimal), circuit, decimal).demand
    assert math.isclose(again.rms, rms, rel_tol=1e-11)
    assert again.cos_phi == cos_phi


@given(st.text(max_size=30))
def test_any_text_gives_a_demand_or_a_sentence(text):
    for circuit in (FOUR_WIRE, DC, SINGLE, FREE):
        with suppress(UserError):
            entered(text, circuit)


def test_a_power_factor_can_be_typed_by_itself():
    circuit = replace(FOUR_WIRE, demand=BalancedCurrent(rms=800))
    assert typed_power_factor("0.8 lead", circuit).cos_phi == 0.8
    assert typed_power_factor("0.8 lead", circuit).sense == "leading"
    assert typed_power_factor("@18", circuit).loads[0].lag == 18
    assert power_factor_text(circuit) == "0.9 lag"
    with pytest.raises(UserError, match="type the current first"):
        typed_power_factor("0.8", FOUR_WIRE)
    with pytest.raises(UserError, match="direct current"):
        typed_power_factor("0.8", DC)


@pytest.mark.parametrize(
    ("text", "net"),
    [
        ("", None),
        ("5 % of N", NeutralShare(share=0.05)),
        ("5%", NeutralShare(share=0.05)),
        ("2 A", EnteredNetCurrent(rms=2)),
        ("400 mA", EnteredNetCurrent(rms=0.4)),
        ("2 A ∠ -30", EnteredNetCurrent(rms=2, angle=-30)),
        ("2<30", EnteredNetCurrent(rms=2, angle=30)),
    ],
)
def test_a_net_current_is_understood_and_reads_back(text, net):
    assert typed_net_current(text) == net
    assert typed_net_current(net_current_text(net)) == net


@pytest.mark.parametrize("text", ["120 %", "much", "2 V"])
def test_what_is_no_net_current_is_told(text):
    with pytest.raises(UserError):
        typed_net_current(text)
