"""A first room: bars come in, a board serves two ways, one cable run is drawn.

50 Hz, 400 V. Every value is confirmed or comes from a document, so that nothing in the
room is left to remark on. Bars come from the service head at the south wall to the
board in the middle; way F1 feeds the chiller over a trefoil of single-core cables, way
F2 leaves as a four-core cable. A reception room lies behind the north wall.
"""

from __future__ import annotations

from typing import TypeVar

from msgspec.structs import replace

from engine.circuits import Circuit, LoadCase
from engine.equipment import Board, Dropper, Pole, Way
from engine.items import Item, SourceDocument, TitleData, ValueOrigin
from engine.layout import Layout, Settings
from engine.origins import ENTERED_VALUES
from engine.places import (
    DecisionRule,
    Enclosure,
    Receptor,
    Room,
    Storey,
    Uncertainty,
    Zone,
)
from engine.runs import (
    Bar,
    CircuitShare,
    Connection,
    Flat,
    Joint,
    Round,
    Run,
    SlotEnd,
    Trefoil,
)
from rooms.invented import (
    example_level,
    flat_then_falling,
    from_document,
    lagging,
    rectangle,
)

POLES = ("L1", "L2", "L3", "N")

AnItem = TypeVar("AnItem", bound=Item)


def taken_from(item: AnItem, document: str, page: str) -> AnItem:
    """The item with the origin of each of its values in one place of a document."""
    return replace(
        item, origins=from_document(document, page, *ENTERED_VALUES[type(item)])
    )


def confirmed(item: AnItem) -> AnItem:
    """The item with each of its values confirmed by the person who made the sample."""
    return replace(
        item,
        origins=tuple(
            ValueOrigin(
                field=field, kind="confirmed", by="R. Thornquist", date="2024-02-05"
            )
            for field in ENTERED_VALUES[type(item)]
        ),
    )


def circuits() -> tuple[Circuit, ...]:
    """Two feeders without harmonics or net current."""
    chiller = Circuit(
        id="F1",
        name="F1 Chiller",
        base_frequency=50.0,
        voltage=400.0,
        demand=lagging((246, 27), (238, 27), (251, 27)),
    )
    lighting = Circuit(
        id="F2",
        name="F2 Lighting",
        base_frequency=50.0,
        voltage=400.0,
        demand=lagging((64, 12), (57, 12), (61, 12)),
    )
    return tuple(
        taken_from(circuit, "load-list", circuit.id) for circuit in (chiller, lighting)
    )


def incoming_bars() -> Run:
    """Bars 60 mm apart under the ceiling, down to the board; u is +x all along."""
    run = Run(
        id="incoming-bars",
        name="Incoming bars",
        kind="busbar",
        route=((1.6, 0.5, 2.4), (1.6, 1.8, 2.4), (1.6, 1.8, 2.0)),
        section=Flat(
            circuits=(CircuitShare(circuit="F1"), CircuitShare(circuit="F2")),
            order=POLES,
            pitch=0.06,
            shape=Bar(width=0.05, thickness=0.01, turn=90.0),
        ),
        end=Connection(equipment="board", way="incoming"),
        rated_current=630.0,
        containment="not steel",
    )
    return taken_from(run, "room-drawing", "section A")


def chiller_cables() -> Run:
    """Lines in trefoil, N touching beside them, along the floor to the chiller."""
    run = Run(
        id="chiller-cables",
        name="Chiller cables, 4 × 1 × 150 mm²",
        kind="cable tray",
        route=((1.0, 2.3, 0.4), (1.0, 2.6, 0.4), (3.6, 2.6, 0.4)),
        section=Trefoil(
            circuits=(CircuitShare(circuit="F1"),),
            order=POLES,
            pitch=0.022,
            neutral_pitch=0.022,
            shape=Round(diameter=0.022),
        ),
        start=Connection(equipment="board", way="F1"),
        rated_current=340.0,
        containment="not steel",
    )
    return taken_from(run, "room-drawing", "plan")


def board() -> Board:
    """Flat bars one above another; F1 to the left of the infeed, F2 to the right."""
    dropper = Dropper(
        pitch=0.06,
        setback=0.12,
        foot_z=0.60,
        shape=Bar(width=0.03, thickness=0.005),
    )
    item = Board(
        id="board",
        name="Main board",
        origin=(0.0, 2.0),
        poles=tuple(
            Pole(
                label=label,
                z=round(1.9 - 0.1 * k, 4),
                fed_at=round(1.51 + 0.06 * k, 4),
                shape=Bar(width=0.05, thickness=0.01),
            )
            for k, label in enumerate(POLES)
        ),
        ways=(
            Way(
                name="F1",
                position=1.0,
                circuits=(CircuitShare(circuit="F1"),),
                dropper=dropper,
            ),
            Way(
                name="F2",
                position=2.2,
                circuits=(CircuitShare(circuit="F2"),),
                dropper=dropper,
                closed=True,
            ),
        ),
        rated_current=630.0,
        footprint=rectangle(0.6, 2.6, 1.8, 2.25),
    )
    return taken_from(item, "room-drawing", "section A")


def joints() -> tuple[Joint, ...]:
    """The service head and the chiller's terminals."""
    return tuple(
        taken_from(joint, "room-drawing", "plan")
        for joint in (
            Joint(
                id="service-head",
                name="Service head",
                ends=tuple(
                    SlotEnd(item="incoming-bars", slot=label, end="start")
                    for label in POLES
                ),
                at=(1.6, 0.3, 2.4),
            ),
            Joint(
                id="chiller-terminals",
                name="Chiller terminals",
                ends=tuple(
                    SlotEnd(item="chiller-cables", slot=label, end="end")
                    for label in POLES
                ),
                at=(3.7, 2.6, 0.4),
            ),
        )
    )


def rooms() -> tuple[Room, ...]:
    """The switch room and its neighbour, a wall of 0.2 m between them."""
    return tuple(
        taken_from(room, "room-drawing", "plan")
        for room in (
            Room(
                id="switch-room",
                name="Switch room",
                outline=rectangle(0.0, 4.0, 0.0, 3.0),
                storey="ground",
                floor_level=0.0,
                ceiling_level=2.8,
                soffit_level=2.8,
                slab_above=0.2,
            ),
            Room(
                id="reception",
                name="Reception",
                outline=rectangle(0.0, 4.0, 3.2, 6.4),
                storey="ground",
                floor_level=0.0,
                ceiling_level=2.8,
                soffit_level=2.8,
                slab_above=0.2,
            ),
        )
    )


def places() -> tuple[Enclosure, Zone, Receptor]:
    """The board's cubicle, the reception, and the chair nearest to the wall."""
    cubicle = Enclosure(
        id="board-cubicle",
        name="Cubicle of the main board",
        footprint=rectangle(0.6, 2.6, 1.8, 2.25),
        z_from=0.0,
        z_to=2.1,
    )
    zone = Zone(
        id="reception-zone",
        name="Reception",
        outline=rectangle(0.2, 3.8, 3.4, 6.2),
        storey="ground",
        floor_level=0.0,
        heights=(0.5, 1.0, 1.5),
        category="general public, long stay",
        part_of_body="whole body",
        use="Reception desk and waiting",
        hours="8 h on working days",
        levels=("example-a",),
    )
    chair = Receptor(
        id="chair",
        name="Chair at the wall",
        at=(1.6, 3.7, 1.0),
        reason="Nearest place of long stay",
        use="Reception desk",
        category="general public, long stay",
        levels=("example-a",),
    )
    return (
        taken_from(cubicle, "room-drawing", "section A"),
        confirmed(zone),
        confirmed(chair),
    )


def small_switch_room() -> Layout:
    """The layout of the first room."""
    cubicle, zone, chair = places()
    return Layout(
        title=TitleData(
            id="title",
            project="Millbeck House (invented)",
            client="Millbeck House Association (invented)",
            document_number="MB-EMF-001",
            revision="A",
            status="for review",
            date="2024-02-05",
            prepared_by="R. Thornquist",
            checked_by="M. Abelund",
            question="How strong is the magnetic field in the reception behind "
            "the switch room's wall?",
            scope="Incoming bars, main board and the cables of the chiller.",
        ),
        settings=confirmed(
            Settings(
                frequency=50.0,
                uncertainty=Uncertainty(
                    relative=0.22,
                    basis="Budget of the sample: currents, places, angles.",
                ),
                decision_rule=DecisionRule(kind="additive", chosen_by="R. Thornquist"),
                north=90.0,
            )
        ),
        documents=(
            SourceDocument(
                id="room-drawing",
                name="Switch room, plan and section A",
                file_name="MB-E-001.pdf",
                revision="A",
                date="2024-01-15",
            ),
            SourceDocument(
                id="load-list",
                name="Load list",
                file_name="MB-E-002.csv",
                revision="A",
                date="2024-01-22",
            ),
        ),
        storeys=(
            taken_from(
                Storey(id="ground", name="Ground floor", floor_level=0.0),
                "room-drawing",
                "section A",
            ),
        ),
        rooms=rooms(),
        enclosures=(cubicle,),
        circuits=circuits(),
        equipment=(board(),),
        runs=(incoming_bars(), chiller_cables()),
        joints=joints(),
        zones=(zone,),
        receptors=(chair,),
        levels=(
            example_level(
                "A",
                "general public, long stay",
                flat_then_falling(5.3e-6, 71.0, 2000.0),
                use="Compared with the reception.",
            ),
        ),
        load_cases=(
            confirmed(
                LoadCase(
                    id="highest-operation",
                    name="Highest simultaneous load",
                    basis="highest operation, from the load list",
                )
            ),
        ),
    )
