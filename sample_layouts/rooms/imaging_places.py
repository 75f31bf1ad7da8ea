"""Places of the imaging corridor: rooms, zones, receptors and their levels."""

from __future__ import annotations

from engine.criteria import LevelPoint, LevelTable
from engine.items import Point3
from engine.places import Category, Enclosure, Receptor, Room, Zone
from rooms.invented import (
    from_document,
    rectangle,
)


def receptors() -> tuple[Receptor, ...]:
    """The places that the department asks about."""
    person: Category = "general public, short stay"
    places: tuple[tuple[str, str, Point3, str, Category, str], ...] = (
        (
            "corridor-centre",
            "Corridor centre",
            (7.5, 1.2, 1.0),
            "In front of the riser shaft",
            person,
            "example-a",
        ),
        (
            "corridor-wall",
            "Corridor wall",
            (7.5, 0.2, 1.0),
            "Nearest that a person comes to the riser",
            person,
            "example-a",
        ),
        (
            "stress-test-bed",
            "Stress-test bed",
            (4.0, 4.4, 0.8),
            "Small voltages are recorded on the patient here",
            "equipment",
            "example-c",
        ),
        (
            "magnet-isocentre",
            "Magnet isocentre",
            (9.5, 6.6, 1.05),
            "Middle of the imaging magnet",
            "equipment",
            "example-b",
        ),
        (
            "control-desk",
            "Control desk",
            (11.8, 3.4, 1.1),
            "Permanent place of work",
            "workers",
            "example-d",
        ),
        (
            "by-steel-column",
            "By the steel column",
            (13.5, 0.3, 1.0),
            "The column carries stray current",
            person,
            "example-a",
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
            origins=from_document("department-plan", "1", "at", "category"),
        )
        for id_, name, at, reason, category, level in places
    )


def rooms() -> tuple[Room, ...]:
    """Rooms of the storey."""
    outlines = (
        ("corridor", "Corridor", rectangle(0.0, 14.0, 0.0, 2.4)),
        ("riser-shaft", "Riser shaft", rectangle(6.0, 8.4, -1.2, 0.0)),
        ("stress-test-room", "Stress-test room", rectangle(2.0, 6.2, 2.4, 6.4)),
        ("control-room", "Control room", rectangle(10.4, 14.0, 2.4, 4.6)),
        ("magnet-room", "Magnet room", rectangle(6.6, 12.4, 4.6, 8.8)),
    )
    return tuple(
        Room(
            id=id_,
            name=name,
            outline=outline,
            storey="second",
            floor_level=0.0,
            ceiling_level=4.2,
            origins=from_document(
                "department-plan", "1", "outline", "floor_level", "ceiling_level"
            ),
        )
        for id_, name, outline in outlines
    )


def enclosures() -> tuple[Enclosure, ...]:
    """The locked shaft and the clad steel column."""
    drawn = from_document(
        "department-plan", "1", "footprint", "z_from", "z_to", "state"
    )
    return (
        Enclosure(
            id="locked-shaft",
            name="Locked riser shaft",
            footprint=rectangle(6.0, 8.4, -1.2, 0.0),
            z_from=0.0,
            z_to=4.2,
            origins=drawn,
        ),
        Enclosure(
            id="steel-column",
            name="Steel column",
            footprint=rectangle(13.35, 13.65, -0.45, -0.15),
            z_from=0.0,
            z_to=4.2,
            origins=drawn,
        ),
    )


def zones() -> tuple[Zone, ...]:
    """Corridor, bed, magnet and control room."""
    drawn = from_document(
        "department-plan", "1", "outline", "heights", "rule", "category"
    )
    return (
        Zone(
            id="corridor-zone",
            name="Corridor",
            outline=rectangle(0.2, 13.8, 0.2, 2.2),
            storey="second",
            heights=(0.5, 1.0, 1.5),
            category="general public, short stay",
            use="Passage",
            hours="minutes",
            levels=("example-a",),
            origins=drawn,
        ),
        Zone(
            id="bed-zone",
            name="Stress-test bed",
            outline=rectangle(3.0, 5.0, 3.9, 4.9),
            storey="second",
            heights=(0.8,),
            category="equipment",
            use="Recording of small voltages",
            hours="8 h a day",
            levels=("example-c",),
            origins=drawn,
        ),
        Zone(
            id="magnet-zone",
            name="Magnet",
            outline=rectangle(8.9, 10.1, 5.9, 7.3),
            storey="second",
            heights=(0.5, 1.05, 1.6),
            category="equipment",
            use="Imaging",
            hours="16 h a day",
            levels=("example-b",),
            origins=drawn,
        ),
        Zone(
            id="control-zone",
            name="Control room",
            outline=rectangle(10.6, 13.8, 2.6, 4.4),
            storey="second",
            heights=(0.5, 1.0, 1.5),
            category="workers",
            use="Permanent place of work",
            hours="8 h a day",
            levels=("example-d",),
            origins=drawn,
        ),
    )


def milligauss(*points: tuple[float, float]) -> LevelTable:
    """A table of (frequency [Hz], level [mG])."""
    return LevelTable(
        points=tuple(
            LevelPoint(frequency=frequency, level=round(level * 1e-7, 12))
            for frequency, level in points
        )
    )
