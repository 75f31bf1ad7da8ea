"""An open-plan office above the main switch room of a low-voltage installation.

50 Hz, 400 V, TN-S. Metres; z from the finished floor of the switch room. The wide
terminals of the transformer, the bars of the link at z 3.00 and the pair of riser
cables on the office wall are under and beside desks; a part of one feeder's neutral
current comes home over the steel of the building.
"""

from __future__ import annotations

from math import atan2, degrees

from engine.circuits import Circuit, CircuitFactor, LoadCase, NeutralShare
from engine.equipment import Board, Dropper, Pole, Terminal, Transformer, Way
from engine.items import TitleData
from engine.layout import Layout, Settings
from engine.places import Profile, Storey
from engine.runs import (
    Bar,
    CircuitShare,
    Connection,
    FreeSection,
    Joint,
    ParallelSets,
    Round,
    Run,
    Slot,
    SlotEnd,
    SlotLoad,
    StackedBars,
)
from rooms.invented import (
    assumed,
    example_level,
    flat_then_falling,
    from_document,
    harmonics,
    lagging,
    rectangle,
)
from rooms.office_places import documents, enclosures, receptors, rooms, zones

POLES = ("L1", "L2", "L3", "N")
FEEDERS = ("F1", "F2", "F3", "F4", "F5")
#: Where the terminals of T1 stand along y, and the bars of the board over the floor.
TERMINAL_Y = (1.50, 1.95, 2.40, 2.85)
BAR_Z = (2.10, 2.00, 1.90, 1.60)
WAY_X = (5.2, 4.4, 3.6, 2.8, 6.8)
STAR = (1.00, 2.175, 1.50)
RISER_TOP = (5.20, 6.25, 9.00)


def link_place(k: int) -> tuple[float, float]:
    """Pole k's y on the long leg of the link, and the x where it turns to the board.

    The poles are 0.15 m apart. [m]
    """
    return round(1.95 + 0.15 * (k - 1), 4), round(6.00 - 0.15 * (k - 1), 4)


def circuits() -> tuple[Circuit, ...]:
    """The five feeders; F5 has no harmonics."""
    third_harmonic = (12.0, 10.0, 6.0, 15.0, 0.0)
    names = ("Office riser", "Retail", "Kitchen", "Lighting", "Plant")
    loads = (
        lagging((575, 18), (540, 20), (505, 22)),
        lagging((430, 20), (415, 20), (385, 24)),
        lagging((340, 22), (325, 21), (330, 23)),
        lagging((225, 15), (190, 15), (205, 15)),
        lagging((260, 32), (258, 32), (262, 32)),
    )
    from_one_reading = (assumed("net_current", "From one clamp reading."),)
    return tuple(
        Circuit(
            id=feeder,
            name=f"{feeder} {name}",
            base_frequency=50.0,
            voltage=400.0,
            demand=load,
            spectrum=(
                harmonics(50.0, {3: percent}, offset_of_3rd=180.0) if percent else ()
            ),
            net_current=NeutralShare(share=0.15) if feeder == "F1" else None,
            origins=(
                *from_document(
                    "load-list",
                    feeder,
                    "supply",
                    "base_frequency",
                    "demand",
                    "spectrum",
                ),
                *(from_one_reading if feeder == "F1" else ()),
            ),
        )
        for feeder, name, load, percent in zip(
            FEEDERS, names, loads, third_harmonic, strict=True
        )
    )


def transformer() -> Transformer:
    """T1: its low-voltage terminals and the star that closes them."""
    return Transformer(
        id="T1",
        name="T1, 1600 kVA cast resin, Dyn11",
        terminals=tuple(
            Terminal(label=label, at=(1.00, y, 1.90))
            for label, y in zip(POLES, TERMINAL_Y, strict=True)
        ),
        star=STAR,
        rated_power=1.6e6,
        voltage=400.0,
        footprint=rectangle(0.45, 1.55, 1.20, 3.15),
        origins=from_document("room-drawing", "section A", "terminals", "star"),
    )


def board() -> Board:
    """The main board: flat bars one above another, fed between F1 and F5.

    The bars are no more than 0.10 m apart in height, so 120 mm wide bars lie flat.
    """
    ways = tuple(
        Way(
            name=feeder,
            position=x,
            circuits=(CircuitShare(circuit=feeder),),
            dropper=Dropper(
                pitch=0.08,
                setback=0.15,
                foot_z=0.80,
                shape=Bar(width=0.04, thickness=0.01),
            ),
            closed=feeder != "F1",
        )
        for feeder, x in zip(FEEDERS, WAY_X, strict=True)
    )
    return Board(
        id="MDB",
        name="Main distribution board",
        note="F2 to F5 leave below their droppers as four-core cables with no net "
        "current; they are not drawn further.",
        origin=(0.0, 4.60),
        poles=tuple(
            Pole(
                label=label,
                z=z,
                fed_at=link_place(k)[1],
                shape=Bar(width=0.12, thickness=0.01),
            )
            for k, (label, z) in enumerate(zip(POLES, BAR_Z, strict=True))
        ),
        ways=ways,
        rated_current=2500.0,
        footprint=rectangle(2.40, 7.20, 4.35, 4.85),
        origins=from_document(
            "board-drawing",
            "1",
            "origin",
            "direction",
            "poles",
            "ways",
            "rated_current",
        ),
    )


def link(k: int) -> Run:
    """The bars of pole k from T1's terminal to the board; a pair, N a single bar.

    The pair is turned about the route so that it stands on edge, side by side, on
    every level leg: carried through the first bend, the frame of the rising leg
    arrives there tipped over by 90° less the plan angle of the second leg.
    """
    y, x = link_place(k)
    terminal_y, z = TERMINAL_Y[k], BAR_Z[k]
    route = (
        (1.00, terminal_y, 1.90),
        (1.00, terminal_y, 3.00),
        (1.30, y, 3.00),
        (x, y, 3.00),
        (x, 4.45, 3.00),
        (x, 4.45, z),
        (x, 4.60, z),
    )
    turn = round(90.0 - degrees(atan2(y - terminal_y, 0.30)), 6)
    return Run(
        id=f"link-{POLES[k]}",
        name=f"Link {POLES[k]}",
        kind="busbar",
        route=route,
        section=StackedBars(
            circuits=tuple(CircuitShare(circuit=feeder) for feeder in FEEDERS),
            order=(POLES[k],),
            bars_per_pole=1 if POLES[k] == "N" else 2,
            width=0.12,
            thickness=0.01,
            gap=0.01,
        ),
        turns=(turn,) * (len(route) - 1),
        start=Connection(equipment="T1"),
        end=Connection(equipment="MDB", way="incoming"),
        rated_current=1250.0 if POLES[k] == "N" else 2500.0,
        origins=(
            *from_document("room-drawing", "plan", "route", "section", "turns"),
            assumed("rated_current", "Bar data not at hand."),
        ),
    )


def riser() -> Run:
    """F1's eight single-core cables, 60 mm apart, up the wall beside the office."""
    return Run(
        id="riser",
        name="F1 riser, 2 × (4 × 1 × 240 mm²)",
        note="The outside diameter of 27 mm is a usual one for a single-core 240 mm² "
        "cable. The two cables of a pole are taken to share its current equally.",
        kind="cable ladder",
        route=(
            (5.20, 4.90, 0.50),
            (5.20, 5.30, 0.50),
            (5.20, 5.30, 3.20),
            (5.20, 6.25, 3.20),
            (5.20, 6.25, 9.00),
        ),
        section=ParallelSets(
            circuits=(CircuitShare(circuit="F1"),),
            orders=(POLES, POLES),
            formation="flat",
            pitch=0.06,
            set_pitch=0.24,
            shape=Round(diameter=0.027),
        ),
        start=Connection(equipment="MDB", way="F1"),
        rated_current=850.0,
        containment="not steel",
        origins=(
            *from_document(
                "room-drawing", "section B", "route", "section", "containment"
            ),
            assumed("section.shape.diameter", "Cable data sheet not at hand."),
            assumed("rated_current", "Cable data sheet not at hand."),
        ),
    )


def stray() -> Run:
    """The way of 15 % of F1's neutral current over earthing conductor and steel."""
    return Run(
        id="stray-F1",
        name="Stray path over the steel column",
        note="Drawn from the star point to the riser's top; it passes the N terminal.",
        kind="stray path",
        route=(
            STAR,
            (1.00, 2.85, 1.90),
            (0.60, 2.85, 1.90),
            (0.60, 0.40, 3.75),
            (9.80, 0.40, 3.75),
            (9.80, 0.40, 9.00),
            (9.80, 6.25, 9.00),
            RISER_TOP,
        ),
        section=FreeSection(
            slots=(
                Slot(
                    name="stray",
                    u=0.0,
                    v=0.0,
                    loads=(SlotLoad(circuit="F1", label="stray"),),
                ),
            )
        ),
        start=Connection(equipment="T1", terminal="star"),
        origins=(
            assumed("route", "Shortest way over bonded steel."),
            assumed("section", "The steel's section is of no account far from it."),
        ),
    )


def riser_top() -> Joint:
    """Where the riser's cables and the stray path meet at the load."""
    cables = tuple(
        SlotEnd(item="riser", slot=f"{label}.{number}", end="end")
        for number in (1, 2)
        for label in POLES
    )
    return Joint(
        id="riser-top",
        name="Riser top",
        ends=(*cables, SlotEnd(item="stray-F1", slot="stray", end="end")),
        at=RISER_TOP,
        origins=from_document("room-drawing", "section B", "at"),
    )


def load_cases() -> tuple[LoadCase, ...]:
    """Highest operation is counted; rated current and night are for information."""

    def scaled(factor: float) -> tuple[CircuitFactor, ...]:
        return tuple(CircuitFactor(circuit=f, factor=factor) for f in FEEDERS)

    return (
        LoadCase(
            id="highest-operation",
            name="Highest simultaneous load",
            basis="highest operation, from the load list",
            origins=from_document("load-list", "1", "factors"),
        ),
        LoadCase(
            id="rated-current",
            name="Feeders raised to the rated current of T1",
            factors=scaled(1.26),
            counted=False,
            basis="rated: 2309 A of T1",
        ),
        LoadCase(
            id="night",
            name="Night",
            factors=scaled(0.3),
            counted=False,
            basis="estimate",
        ),
    )


def office_over_switch_room() -> Layout:
    """The layout of room A."""
    return Layout(
        title=TitleData(
            id="title",
            project="Harrowgate Lane 7 (invented)",
            client="Harrowgate Lane Estates (invented)",
            document_number="HL-EMF-001",
            revision="A",
            status="for review",
            date="2024-03-18",
            prepared_by="R. Thornquist",
            checked_by="M. Abelund",
            question="How strong is the magnetic field at the desks above the main "
            "switch room at the highest simultaneous load?",
            scope="Link, main board, riser of F1 and the stray path of F1.",
        ),
        settings=Settings(frequency=50.0),
        documents=documents(),
        storeys=(
            Storey(
                id="ground",
                name="Ground floor",
                floor_level=0.0,
                origins=from_document("room-drawing", "section A", "floor_level"),
            ),
            Storey(
                id="first",
                name="First floor, raised floor",
                floor_level=4.10,
                origins=from_document("room-drawing", "section A", "floor_level"),
            ),
        ),
        rooms=rooms(),
        enclosures=enclosures(),
        circuits=circuits(),
        equipment=(transformer(), board()),
        runs=(*(link(k) for k in range(4)), riser(), stray()),
        joints=(riser_top(),),
        zones=zones(),
        receptors=receptors(),
        levels=(
            example_level(
                "A",
                "general public, long stay",
                flat_then_falling(38.7e-6, 74.0, 2000.0),
                use="Compared with the office.",
            ),
            example_level(
                "B",
                "workers",
                flat_then_falling(463e-6, 68.0, 2000.0),
                use="Compared with the floor of the switch room.",
            ),
        ),
        load_cases=load_cases(),
        profiles=(
            Profile(
                id="over-the-link",
                name="Across the link at desk height",
                path=((3.0, 0.2, 5.10), (3.0, 5.8, 5.10)),
            ),
        ),
    )
