"""Places of the battery room and the laboratory: rooms, zones, receptors, levels."""

from __future__ import annotations

from engine.criteria import LevelPoint, LevelRange, LevelRanges, LevelTable
from engine.items import Point3
from engine.places import Category, Enclosure, Receptor, Room, Zone
from rooms.invented import (
    from_document,
    rectangle,
)


def receptors() -> tuple[Receptor, ...]:
    """Places in the UPS room and in the laboratory."""
    places: tuple[tuple[str, str, Point3, str, Category, str], ...] = (
        (
            "aisle",
            "Aisle",
            (3.2, 2.9, 1.0),
            "Between UPS and racks",
            "workers",
            "example-b",
        ),
        (
            "rack",
            "At the rack",
            (3.0, 3.85, 1.0),
            "0.3 m from the nearer string",
            "workers",
            "example-b",
        ),
        (
            "bench",
            "Bench",
            (6.55, 1.6, 1.0),
            "Nearest place of work to the UPS room",
            "general public, long stay",
            "example-c",
        ),
        (
            "microscope-base",
            "Microscope, base",
            (9.0, 2.5, 0.8),
            "Beam bends in stray fields",
            "equipment",
            "example-a",
        ),
        (
            "microscope-gun",
            "Microscope, gun",
            (9.0, 2.5, 1.8),
            "Beam bends in stray fields",
            "equipment",
            "example-a",
        ),
        (
            "desk",
            "Desk",
            (11.0, 4.5, 1.0),
            "Permanent place of work",
            "general public, long stay",
            "example-c",
        ),
    )
    return tuple(
        Receptor(
            id=id_,
            name=name,
            at=at,
            reason=reason,
            category=category,
            levels=(level,),
            origins=from_document("room-drawing", "plan", "at", "category"),
        )
        for id_, name, at, reason, category, level in places
    )


def rooms() -> tuple[Room, ...]:
    """The two rooms; a wall of 0.25 m stands between them."""
    drawn = from_document(
        "room-drawing", "plan", "outline", "floor_level", "ceiling_level"
    )
    return (
        Room(
            id="ups-room",
            name="UPS and battery room",
            outline=rectangle(0.0, 6.0, 0.0, 5.0),
            storey="ground",
            floor_level=0.0,
            ceiling_level=3.0,
            origins=drawn,
        ),
        Room(
            id="laboratory",
            name="Laboratory",
            outline=rectangle(6.25, 12.25, 0.0, 5.5),
            storey="ground",
            floor_level=0.0,
            ceiling_level=3.0,
            origins=drawn,
        ),
    )


def enclosures() -> tuple[Enclosure, ...]:
    """Racks and cabinets."""
    places = (
        ("battery-racks", "Battery racks", rectangle(0.9, 5.1, 4.0, 4.7), 2.4),
        ("ups-cabinet", "UPS cabinet", rectangle(2.4, 3.6, 1.0, 1.8), 1.9),
        ("output-cabinet", "Output cabinet", rectangle(5.4, 5.95, 1.2, 1.95), 1.7),
    )
    return tuple(
        Enclosure(
            id=id_,
            name=name,
            footprint=footprint,
            z_from=0.0,
            z_to=height,
            origins=from_document(
                "room-drawing", "plan", "footprint", "z_from", "z_to", "state"
            ),
        )
        for id_, name, footprint, height in places
    )


def zones() -> tuple[Zone, ...]:
    """UPS room, laboratory, and the microscope's column."""
    drawn = from_document(
        "room-drawing", "plan", "outline", "heights", "rule", "category"
    )
    return (
        Zone(
            id="ups-room-zone",
            name="Floor of the UPS room",
            outline=rectangle(0.2, 5.8, 0.2, 4.8),
            storey="ground",
            category="workers",
            use="Inspection",
            hours="1 h a week",
            levels=("example-b",),
            origins=drawn,
        ),
        Zone(
            id="laboratory-zone",
            name="Laboratory",
            outline=rectangle(6.45, 12.05, 0.2, 5.3),
            storey="ground",
            category="general public, long stay",
            use="Laboratory work",
            hours="8 h on working days",
            levels=("example-c",),
            origins=drawn,
        ),
        Zone(
            id="microscope-zone",
            name="Microscope column",
            outline=rectangle(8.8, 9.2, 2.3, 2.7),
            storey="ground",
            heights=(0.8, 1.3, 1.8),
            volume=(0.8, 1.8),
            rule="maximum over volume",
            category="equipment",
            use="Microscopy",
            hours="day and night",
            levels=("example-a",),
            origins=(*drawn, *from_document("room-drawing", "plan", "volume")),
        ),
    )


def levels() -> tuple[tuple[str, Category, LevelRanges | LevelTable, str], ...]:
    """Letter, category, values and use of each level; each has a value at 0 Hz."""
    microscope = ((0.0, 1.7e-6), (40.0, 0.37e-6), (1000.0, 0.19e-6))
    return (
        (
            "A",
            "equipment",
            LevelTable(
                points=tuple(
                    LevelPoint(frequency=frequency, level=level)
                    for frequency, level in microscope
                )
            ),
            "Compared with the microscope.",
        ),
        (
            "B",
            "workers",
            even_and_falling(4.3e-3, 463e-6),
            "Compared with the UPS room.",
        ),
        (
            "C",
            "general public, long stay",
            even_and_falling(0.73e-3, 13.9e-6),
            "Compared with the laboratory.",
        ),
    )


def even_and_falling(direct_level: float, level: float) -> LevelRanges:
    """A value at 0 Hz, `level` from 25 to 68 Hz, from there falling as 1/f. [T]"""
    return LevelRanges(
        ranges=(
            LevelRange(f_from=0.0, f_to=0.0, coefficient=direct_level),
            LevelRange(f_from=25.0, f_to=68.0, coefficient=level),
            LevelRange(
                f_from=68.0, f_to=2000.0, coefficient=level * 68.0, exponent=1.0
            ),
        )
    )
