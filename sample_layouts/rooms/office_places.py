"""Places of the office above the switch room: rooms, zones, receptors, levels."""

from __future__ import annotations

from engine.items import SourceDocument
from engine.places import Enclosure, Receptor, Room, Zone
from rooms.invented import (
    from_document,
    rectangle,
)


def receptors() -> tuple[Receptor, ...]:
    """Points of the office that matter, with the reason."""
    places = (
        ("desk-050", "Desk, 0.50 m", (3.0, 2.0, 4.60), "Desk over the link"),
        ("desk-100", "Desk, 1.00 m", (3.0, 2.0, 5.10), "Desk over the link"),
        ("desk-150", "Desk, 1.50 m", (3.0, 2.0, 5.60), "Desk over the link"),
        (
            "over-transformer",
            "Over the transformer",
            (1.0, 2.2, 5.10),
            "Above the widely spaced terminals of T1",
        ),
        ("riser-wall", "Riser wall", (5.2, 5.8, 5.10), "Nearest to the riser"),
        (
            "by-column",
            "By the column",
            (9.6, 0.6, 5.10),
            "Nearest to the steel that carries stray current",
        ),
        ("far", "Far desk", (9.0, 3.0, 5.10), "Away from the link"),
    )
    return tuple(
        Receptor(
            id=id_,
            name=name,
            at=at,
            reason=reason,
            use="Office work",
            category="general public, long stay",
            levels=("example-a",),
            origins=from_document("room-drawing", "plan", "at", "category"),
        )
        for id_, name, at, reason in places
    )


def rooms() -> tuple[Room, ...]:
    """Switch room, office, and the shaft of the riser behind the office wall."""
    drawn = from_document(
        "room-drawing", "plan", "outline", "floor_level", "ceiling_level"
    )
    return (
        Room(
            id="switch-room",
            name="Main switch room",
            outline=rectangle(0.0, 10.0, 0.0, 6.0),
            storey="ground",
            floor_level=0.0,
            ceiling_level=3.60,
            soffit_level=3.60,
            slab_above=0.30,
            origins=drawn,
        ),
        Room(
            id="office",
            name="Open-plan office",
            outline=rectangle(0.0, 10.0, 0.0, 6.0),
            storey="first",
            floor_level=4.10,
            ceiling_level=6.90,
            origins=drawn,
        ),
        Room(
            id="riser-shaft",
            name="Riser shaft",
            outline=rectangle(4.70, 5.70, 6.00, 6.60),
            storey="first",
            floor_level=3.90,
            ceiling_level=9.30,
            origins=drawn,
        ),
    )


def enclosures() -> tuple[Enclosure, ...]:
    """Where nobody can stand."""
    drawn = from_document(
        "room-drawing", "plan", "footprint", "z_from", "z_to", "state"
    )
    return (
        Enclosure(
            id="steel-column",
            name="Steel column",
            footprint=rectangle(9.70, 9.90, 0.30, 0.50),
            z_from=0.0,
            z_to=9.30,
            origins=drawn,
        ),
        Enclosure(
            id="board-cubicle",
            name="Cubicles of the main board",
            footprint=rectangle(2.40, 7.20, 4.35, 4.85),
            z_from=0.0,
            z_to=2.30,
            origins=drawn,
        ),
        Enclosure(
            id="transformer-housing",
            name="Housing of T1",
            footprint=rectangle(0.45, 1.55, 1.20, 3.15),
            z_from=0.0,
            z_to=2.20,
            origins=drawn,
        ),
    )


def zones() -> tuple[Zone, ...]:
    """The office, and the floor of the switch room for its keepers."""
    return (
        Zone(
            id="office-zone",
            name="Office",
            outline=rectangle(0.2, 9.8, 0.2, 5.8),
            storey="first",
            floor_level=4.10,
            heights=(0.5, 1.0, 1.5),
            category="general public, long stay",
            use="Office work",
            hours="8 h on working days",
            levels=("example-a",),
            origins=from_document(
                "room-drawing",
                "plan",
                "outline",
                "floor_level",
                "heights",
                "rule",
                "category",
            ),
        ),
        Zone(
            id="switch-room-floor",
            name="Floor of the switch room",
            outline=rectangle(0.2, 9.8, 0.2, 4.2),
            storey="ground",
            floor_level=0.0,
            heights=(0.5, 1.0, 1.5),
            category="workers",
            use="Inspection and switching",
            hours="2 h a month",
            levels=("example-b",),
            origins=from_document(
                "room-drawing",
                "plan",
                "outline",
                "floor_level",
                "heights",
                "rule",
                "category",
            ),
        ),
    )


def documents() -> tuple[SourceDocument, ...]:
    """The drawings and the list that the values were taken from; all invented."""
    return (
        SourceDocument(
            id="room-drawing",
            name="Main switch room, plan and sections",
            file_name="HL-E-101.pdf",
            revision="C",
            date="2024-03-11",
        ),
        SourceDocument(
            id="board-drawing",
            name="Main distribution board, arrangement",
            file_name="HL-E-205.pdf",
            revision="A",
            date="2024-02-26",
        ),
        SourceDocument(
            id="load-list",
            name="Load list",
            file_name="HL-E-310.csv",
            revision="B",
            date="2024-03-04",
        ),
    )
