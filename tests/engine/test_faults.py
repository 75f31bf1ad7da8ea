"""Faults that block an assessment: one seeded fault each, none in a sound room."""

from __future__ import annotations

import pytest
from msgspec.structs import replace

from engine.circuits import (
    ENTERED_CURRENTS,
    BalancedCurrent,
    Circuit,
    CircuitFactor,
    EnteredNetCurrent,
    LineLoad,
    LineLoads,
    LoadCase,
    NeutralShare,
    Power,
    SpectrumLine,
)
from engine.conductors import Node
from engine.criteria import ReferenceLevel
from engine.currents import case_phasors
from engine.equipment import Board, ConductorLoop, Pole, Terminal, Transformer, Way
from engine.faults import Remark, case_faults, faults, open_nodes
from engine.items import ConfirmedRemark, Item
from engine.layout import Layout
from engine.places import Receptor, Room, Storey, Zone
from engine.runs import (
    CircuitShare,
    Connection,
    Flat,
    FreeSection,
    Joint,
    Round,
    Run,
    Slot,
    SlotEnd,
    SlotLoad,
)

FEEDER = Circuit(
    id="feeder",
    demand=LineLoads(
        loads=(
            LineLoad(label="L1", rms=100, lag=20),
            LineLoad(label="L2", rms=90, lag=20),
            LineLoad(label="L3", rms=80, lag=20),
        )
    ),
    spectrum=(SpectrumLine(frequency=150, ratio=0.1, offset=180),),
)
TRAY = Run(
    id="tray",
    name="Long tray",
    route=((0, 0, 3), (10, 0, 3)),
    section=Flat(circuits=(CircuitShare(circuit="feeder"),), shape=Round()),
)
SQUARE = ((0.0, 0.0), (4.0, 0.0), (4.0, 4.0))
SOUND = Layout(
    storeys=(Storey(id="ground", floor_level=0),),
    levels=(ReferenceLevel(id="example"),),
    circuits=(FEEDER,),
    runs=(TRAY,),
    zones=(Zone(id="office", outline=SQUARE, storey="ground", levels=("example",)),),
)


def single(id: str, label: str, start: tuple[float, float, float]) -> Run:
    """A conductor of one slot from `start` to the far end of the tray."""
    load = SlotLoad(circuit="feeder", label=label)
    section = FreeSection(slots=(Slot(name=label, u=0, v=0, loads=(load,)),))
    return Run(id=id, route=(start, (10, 1, 3)), section=section)


def only(layout: Layout, case: LoadCase = ENTERED_CURRENTS) -> Remark:
    """The one fault that is there."""
    (remark,) = faults(layout, case)
    return remark


def test_sound_room_has_no_faults() -> None:
    assert faults(SOUND, ENTERED_CURRENTS) == ()
    assert faults(Layout(), ENTERED_CURRENTS) == ()


# F02


def test_equal_ids_block() -> None:
    room = Room(id="tray", outline=SQUARE, floor_level=0, ceiling_level=3)
    remark = only(replace(SOUND, rooms=(room,)))
    assert (remark.code, remark.severity) == ("F02", "blocking")
    assert remark.sentence == (
        "Two items have the id “tray”: room “tray” and run “Long tray”. Give one of "
        "them another id."
    )


def test_the_same_item_twice_blocks() -> None:
    assert only(replace(SOUND, circuits=(FEEDER, FEEDER))).items == ("feeder",)


# F01

LOST = (CircuitShare(circuit="lost"),)
BOARD = Board(
    id="board",
    origin=(0, 0),
    poles=(Pole(label="L1", z=1, fed_at=0),),
    ways=(Way(name="F1", position=1, circuits=LOST),),
)
LOOP = ConductorLoop(
    id="loop", path=((0, 0, 0), (1, 0, 0), (1, 1, 0)), circuit="lost", label="L+"
)
LOST_LOAD = SlotLoad(circuit="lost", label="L1")
FREE_SLOT = FreeSection(slots=(Slot(name="L1", u=0, v=0, loads=(LOST_LOAD,)),))
JOINT_ITEM = Joint(
    id="joint",
    ends=(
        SlotEnd(item="lost", slot="L1", end="end"),
        SlotEnd(item="tray", slot="L1", end="end"),
        SlotEnd(item="tray", slot="L2", end="end"),
        SlotEnd(item="tray", slot="L3", end="end"),
        SlotEnd(item="tray", slot="N", end="end"),
    ),
)
JOINT_SLOT = replace(
    JOINT_ITEM, ends=(replace(JOINT_ITEM.ends[0], item="tray", slot="L9"),
                      *JOINT_ITEM.ends[1:])
)  # fmt: skip
DANGLING: list[tuple[dict[str, tuple[Item, ...]], str, str]] = [
    ({"runs": (replace(TRAY, section=Flat(circuits=LOST)),)}, "tray", "circuit “lost”"),
    ({"runs": (TRAY, replace(TRAY, id="x", section=FREE_SLOT))}, "x", "circuit “lost”"),
    ({"equipment": (BOARD,)}, "board", "Board “board” names the circuit “lost”"),
    ({"equipment": (LOOP,)}, "loop", "Conductor loop “loop” names the circuit “lost”"),
    ({"storeys": ()}, "office", "Zone “office” names the storey “ground”"),
    ({"levels": ()}, "office", "names the reference level “example”"),
    (
        {"receptors": (Receptor(id="bed", at=(1, 1, 1), levels=("lost",)),)},
        "bed",
        "Receptor “bed” names the reference level “lost”",
    ),
    ({"joints": (JOINT_ITEM,)}, "joint", "names lost, which is no run"),
    ({"joints": (JOINT_SLOT,)}, "joint", "slot L9 of run tray"),
    (
        {"runs": (replace(TRAY, start=Connection(equipment="lost")),)},
        "tray",
        "connected to lost",
    ),
]


@pytest.mark.parametrize(("seeded", "item", "sentence"), DANGLING)
def test_dangling_reference_blocks(
    seeded: dict[str, tuple[Item, ...]], item: str, sentence: str
) -> None:
    remark = only(replace(SOUND, **seeded))
    assert (remark.code, remark.severity) == ("F01", "blocking")
    assert item in remark.items
    assert sentence in remark.sentence


def test_dangling_terminal_blocks() -> None:
    transformer = Transformer(
        id="T1", terminals=(Terminal(label="L1", at=(0, 0, 2)),), star=(0, 0, 1)
    )
    tray = replace(TRAY, start=Connection(equipment="T1", terminal="U"))
    found = faults(
        replace(SOUND, runs=(tray,), equipment=(transformer,)), ENTERED_CURRENTS
    )
    lost = [remark for remark in found if remark.code == "F01"]
    assert lost
    assert all("which has no end U" in remark.sentence for remark in lost)
    assert lost[0].items == ("tray", "T1")


@pytest.mark.parametrize(
    "fields",
    [
        {"factors": (CircuitFactor(circuit="lost", factor=1),)},
        {"open_enclosures": ("lost",)},
    ],
)
def test_dangling_reference_of_a_load_case_blocks_that_case(
    fields: dict[str, object],
) -> None:
    case = LoadCase(id="rated", **fields)  # type: ignore[arg-type]
    remark = only(replace(SOUND, load_cases=(case,)), case)
    assert (remark.code, remark.case, remark.items) == ("F01", "rated", ("rated",))


# F03 and F04


def test_geometry_that_cannot_be_blocks() -> None:
    back = replace(TRAY, route=((0, 0, 3), (10, 0, 3), (0, 0, 3)))
    remark = only(replace(SOUND, runs=(back,)))
    assert (remark.code, remark.items) == ("F03", ("tray",))
    assert remark.place == (0, 0, 3)
    assert remark.sentence.endswith(".")


def test_equipment_that_cannot_be_built_blocks() -> None:
    way = Way(name="F1", position=1)
    board = replace(BOARD, ways=(way, way))
    remark = only(replace(SOUND, equipment=(board,)))
    assert (remark.code, remark.items) == ("F03", ("board",))


def test_every_circuit_without_currents_is_named() -> None:
    circuits = (
        FEEDER,
        Circuit(id="a", demand=Power(active=1000)),
        Circuit(id="b", supply="dc"),
    )
    found = faults(replace(SOUND, circuits=circuits), ENTERED_CURRENTS)
    assert [(remark.code, remark.items) for remark in found] == [
        ("F04", ("a",)),
        ("F04", ("b",)),
    ]
    assert "enter the voltage between lines" in found[0].sentence


def test_circuit_that_is_switched_off_needs_no_currents() -> None:
    circuits = (FEEDER, Circuit(id="a", demand=Power(active=1000)))
    case = LoadCase(id="night", factors=(CircuitFactor(circuit="a", factor=0),))
    assert case_faults(replace(SOUND, circuits=circuits), case) == ()


def test_case_naming_a_circuit_twice_blocks() -> None:
    factor = CircuitFactor(circuit="feeder", factor=1)
    remark = only(SOUND, LoadCase(id="rated", factors=(factor, factor)))
    assert (remark.code, remark.items) == ("F04", ("rated",))


# Kirchhoff


def test_missing_neutral_leaves_net_current_at_both_free_ends() -> None:
    lines = Flat(
        circuits=(CircuitShare(circuit="feeder"),),
        order=("L1", "L2", "L3"),
        shape=Round(),
    )
    layout = replace(SOUND, runs=(replace(TRAY, section=lines),))
    start, end = faults(layout, ENTERED_CURRENTS)
    assert (start.code, start.severity, start.items) == ("W01", "blocking", ("tray",))
    assert start.place == pytest.approx((0, 0, 3))
    assert end.place == pytest.approx((10, 0, 3))
    # |100 + 90∠−120° + 80∠120°| = 17.3 A, and the third harmonics 10 + 9 + 8 A
    assert "(0.00, 0.00, 3.00) m: 17.3 A at 50 Hz, 27.0 A at 150 Hz" in start.sentence


def test_confirmed_net_current_is_a_warning() -> None:
    circuit = replace(FEEDER, net_current=NeutralShare(share=0.5))
    confirmed = ConfirmedRemark(id="ok", code="W01", items=("tray",), by="A. Berg")
    layout = replace(SOUND, circuits=(circuit,), confirmed_remarks=(confirmed,))
    found = faults(layout, ENTERED_CURRENTS)
    assert [remark.severity for remark in found] == ["warning", "warning"]
    assert found[0].sentence.endswith("Confirmed by A. Berg.")


@pytest.mark.parametrize(
    "other", [{"code": "W03"}, {"items": ("feeder",)}, {"items": ()}]
)
def test_confirmation_of_something_else_does_not_count(
    other: dict[str, object],
) -> None:
    circuit = replace(FEEDER, net_current=NeutralShare(share=0.5))
    confirmed = ConfirmedRemark(id="ok", code="W01", items=("tray",))
    layout = replace(
        SOUND, circuits=(circuit,), confirmed_remarks=(replace(confirmed, **other),)
    )
    assert faults(layout, ENTERED_CURRENTS)[0].severity == "blocking"


def test_joint_that_leaves_a_conductor_out_blocks() -> None:
    onwards = [single(f"on {x}", x, (10, 0, 3)) for x in ("L1", "L2", "L3")]
    ends = [SlotEnd(item="tray", slot=x, end="end") for x in ("L1", "L2", "L3", "N")]
    ends += [SlotEnd(item=run.id, slot=run.id[3:], end="start") for run in onwards]
    far = tuple(SlotEnd(item=run.id, slot=run.id[3:], end="end") for run in onwards)
    layout = replace(
        SOUND,
        runs=(TRAY, *onwards),
        joints=(Joint(id="tap", ends=tuple(ends)), Joint(id="far", ends=far)),
    )
    tap, far_end = faults(layout, ENTERED_CURRENTS)
    assert (tap.code, tap.severity, tap.items[0]) == ("W03", "blocking", "tap")
    assert tap.sentence.startswith("Currents do not close at joint “tap” (10.00, ")
    assert "17.3 A at 50 Hz, 27.0 A at 150 Hz remain" in tap.sentence
    assert far_end.items[0] == "far"


def test_star_that_misses_a_line_blocks() -> None:
    terminals = tuple(
        Terminal(label=x, at=(0, 0.4 * i, 2)) for i, x in enumerate(("L1", "L2", "N"))
    )
    transformer = Transformer(id="T1", terminals=terminals, star=(0, 0.4, 1.5))
    section = Flat(
        circuits=(CircuitShare(circuit="feeder"),),
        order=("L1", "L2", "N"),
        shape=Round(),
    )
    run = replace(TRAY, section=section, start=Connection(equipment="T1"))
    found = faults(
        replace(SOUND, runs=(run,), equipment=(transformer,)), ENTERED_CURRENTS
    )
    star = next(remark for remark in found if remark.code == "W03")
    assert "the star point of “T1” (0.00, 0.40, 1.50) m: 80.0 A at 50 Hz" in (
        star.sentence
    )


# the rule itself, on nodes made by hand


def node(kind: str, *loads: tuple[str, float]) -> Node:
    inflow = tuple(SlotLoad(circuit="c", label=x, share=share) for x, share in loads)
    return Node(kind, (1, 2, 3), ("tray",), inflow)  # type: ignore[arg-type]


def remaining(circuit: Circuit, place: Node) -> list[Remark]:
    layout = replace(SOUND, circuits=(circuit,))
    phasors = case_phasors(layout, ENTERED_CURRENTS)
    return list(open_nodes(layout, phasors, (place,)))


def with_stray(amperes: float, rms: float) -> Circuit:
    net = EnteredNetCurrent(rms=amperes, angle=0)
    return Circuit(id="c", demand=BalancedCurrent(rms=rms), net_current=net)


CABLE = (("L1", 1.0), ("L2", 1.0), ("L3", 1.0), ("N", 1.0))


def test_half_an_ampere_may_remain() -> None:
    assert not remaining(with_stray(0.49, 100), node("joint", *CABLE))
    assert remaining(with_stray(0.51, 100), node("joint", *CABLE))


def test_a_thousandth_of_the_currents_may_remain() -> None:
    assert not remaining(with_stray(2.9, 1000), node("joint", *CABLE))
    assert remaining(with_stray(3.1, 1000), node("joint", *CABLE))


def test_stray_path_closes_the_joint() -> None:
    assert not remaining(with_stray(50, 100), node("joint", *CABLE, ("stray", 1)))


def test_frequencies_do_not_cancel_each_other() -> None:
    third = SpectrumLine(frequency=150, label="L1", rms=5, offset=180)
    circuit = Circuit(
        id="c", supply="single-phase", demand=BalancedCurrent(rms=100, cos_phi=1),
        spectrum=(third,), neutral="none",
    )  # fmt: skip
    (remark,) = remaining(circuit, node("way", ("L1", 1)))
    assert "a way of “Long tray” (1.00, 2.00, 3.00) m" in remark.sentence
    assert "100 A at 50 Hz, 5.00 A at 150 Hz remain" in remark.sentence


def test_remark_says_its_load_case() -> None:
    layout = replace(SOUND, circuits=(with_stray(9, 10),))
    case = LoadCase(id="rated", factors=(CircuitFactor(circuit="c", factor=2),))
    phasors = case_phasors(layout, case)
    (remark,) = open_nodes(layout, phasors, (node("board", *CABLE),))
    assert remark.case == "rated"
    assert "18.0 A at 50 Hz remain" in remark.sentence
