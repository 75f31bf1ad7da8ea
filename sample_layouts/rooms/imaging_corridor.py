"""An imaging department's corridor beside a riser shaft.

60 Hz, 480Y/277 V, shown in milligauss. Metres; z from the finished floor of the
storey. Three feeders climb the shaft from the source (z −4.2) to the load (z 12.6).
The neutral of the essential feeder is bonded to earth a second time upstairs, so that
a part of it runs down the steel; the neutral of the UPS feeder is drawn apart from
its lines. Both can be mended, alone or together, and not every place gains.
"""

from __future__ import annotations

from engine.circuits import Circuit, CircuitFactor, LoadCase, NeutralShare
from engine.items import Point3, SourceDocument, TitleData
from engine.layout import Layout, Settings
from engine.places import Profile, Storey
from engine.runs import (
    CircuitShare,
    Flat,
    FreeSection,
    Joint,
    ParallelSets,
    Round,
    Run,
    Sandwich,
    Slot,
    SlotEnd,
    SlotLoad,
)
from rooms.imaging_places import enclosures, milligauss, receptors, rooms, zones
from rooms.imaging_variants import variants
from rooms.invented import (
    assumed,
    example_level,
    flat_then_falling,
    from_document,
    harmonics,
    lagging,
)

POLES = ("L1", "L2", "L3", "N")
#: Heights of the source and of the load. [m]
SOURCE_Z, LOAD_Z = -4.2, 12.6


def circuits() -> tuple[Circuit, ...]:
    """The three feeders of the shaft."""
    given = from_document(
        "power-log", "1", "supply", "base_frequency", "demand", "spectrum"
    )
    return (
        Circuit(
            id="R1",
            name="R1 Normal supply",
            base_frequency=60.0,
            voltage=480.0,
            demand=lagging((1420, 24), (1360, 26), (1310, 25)),
            spectrum=harmonics(60.0, {3: 5.0, 5: 3.0, 7: 1.5}),
            origins=given,
        ),
        Circuit(
            id="R2",
            name="R2 Essential supply",
            note="A second neutral-earth bond upstairs lets 35 % of the neutral "
            "current leave the ladder.",
            base_frequency=60.0,
            voltage=480.0,
            demand=lagging((690, 22), (655, 23), (720, 21)),
            spectrum=harmonics(60.0, {3: 4.0, 5: 3.0, 7: 1.5}),
            net_current=NeutralShare(share=0.35),
            origins=(*given, assumed("net_current", "From one clamp reading.")),
        ),
        Circuit(
            id="R3",
            name="R3 UPS supply",
            base_frequency=60.0,
            voltage=480.0,
            demand=lagging((210, 12), (196, 12), (204, 12)),
            spectrum=harmonics(60.0, {3: 22.0, 5: 10.0, 7: 4.0}),
            origins=given,
        ),
    )


def upright(x: float, y: float) -> tuple[Point3, Point3]:
    """A vertical route from the source to the load."""
    return ((x, y, SOURCE_Z), (x, y, LOAD_Z))


def single(circuit: str, label: str, shape: Round) -> FreeSection:
    """A section of one conductor."""
    load = SlotLoad(circuit=circuit, label=label)
    return FreeSection(
        slots=(Slot(name=label, u=0.0, v=0.0, shape=shape, loads=(load,)),)
    )


def runs() -> tuple[Run, ...]:
    """Busway, ladder, stray path, and the UPS feeder with its neutral apart.

    On a route that rises, u is +x and v is −y: bars listed downwards follow each
    other in +y.
    """
    drawn = from_document("shaft-drawing", "section 2", "route", "section")
    cable = (
        assumed("section.shape.diameter", "Cable data sheet not at hand."),
        assumed("rated_current", "Cable data sheet not at hand."),
    )
    one_cable = (
        assumed("section.slots.0.shape.diameter", "Cable data sheet not at hand."),
        assumed("rated_current", "Cable data sheet not at hand."),
    )
    return (
        Run(
            id="R1-busway",
            name="R1 compact busway 2500 A",
            note="Bars 6 mm thick, 13 mm from middle to middle. Their width of 0.20 m "
            "is assumed. The field-reducing effect of the case is not counted.",
            kind="busbar trunking",
            route=upright(6.6, -0.35),
            section=Sandwich(
                circuits=(CircuitShare(circuit="R1"),),
                order=POLES,
                width=0.20,
                thickness=0.006,
                insulation=0.007,
                direction="down",
            ),
            rated_current=2500.0,
            origins=(
                *drawn,
                *from_document("shaft-drawing", "section 2", "rated_current"),
                assumed("section.width", "Usual for 2500 A."),
            ),
        ),
        Run(
            id="R2-ladder",
            name="R2 ladder, 3 × (4 × 1 × 300 mm²)",
            note="The outside diameter of 30 mm is a usual one for a single-core "
            "300 mm² cable. The cables of a pole are taken to share equally.",
            kind="cable ladder",
            route=upright(7.5, -0.20),
            section=ParallelSets(
                circuits=(CircuitShare(circuit="R2"),),
                orders=(POLES, POLES, POLES),
                formation="flat",
                pitch=0.054,
                set_pitch=0.216,
                shape=Round(diameter=0.030),
            ),
            rated_current=1500.0,
            origins=(*drawn, *cable),
        ),
        Run(
            id="R2-stray",
            name="Stray path over the steel column",
            kind="stray path",
            route=(
                (7.5, -0.2, -4.2),
                (7.5, -0.2, -4.4),
                (13.5, -0.3, -4.4),
                (13.5, -0.3, 12.8),
                (7.5, -0.2, 12.8),
                (7.5, -0.2, 12.6),
            ),
            section=single("R2", "stray", Round(diameter=0.02)),
            origins=(
                assumed("route", "Shortest way over bonded steel."),
                assumed("section", "The steel's section is of no account far from it."),
            ),
        ),
        Run(
            id="R3-lines",
            name="R3 lines, 3 × 1 × 120 mm²",
            note="The outside diameter of 20 mm is a usual one for a single-core "
            "120 mm² cable.",
            kind="cable ladder",
            route=upright(8.03, -0.20),
            section=Flat(
                circuits=(CircuitShare(circuit="R3"),),
                order=("L1", "L2", "L3"),
                pitch=0.03,
                shape=Round(diameter=0.020),
            ),
            rated_current=300.0,
            origins=(*drawn, *cable),
        ),
        Run(
            id="R3-neutral",
            name="R3 neutral, 1 × 120 mm²",
            note="Found on the other side of the shaft, apart from its lines.",
            kind="free conductor",
            route=upright(6.2, -1.0),
            section=single("R3", "N", Round(diameter=0.020)),
            rated_current=300.0,
            origins=(*drawn, *one_cable),
        ),
    )


def joints() -> tuple[Joint, ...]:
    """Each feeder is joined in one point at the source and in one at the load."""
    busway = tuple(("R1-busway", label) for label in POLES)
    ladder = tuple(
        ("R2-ladder", f"{label}.{number}") for number in (1, 2, 3) for label in POLES
    )
    lines = tuple(("R3-lines", label) for label in ("L1", "L2", "L3"))
    feeders = (
        ("R1", busway, (6.6, -0.35)),
        ("R2", (*ladder, ("R2-stray", "stray")), (7.5, -0.20)),
        ("R3", (*lines, ("R3-neutral", "N")), (8.03, -0.20)),
    )
    return tuple(
        Joint(
            id=f"{feeder}-{place}",
            name=f"{feeder} at the {place}",
            ends=tuple(SlotEnd(item=item, slot=slot, end=end) for item, slot in slots),
            at=(x, y, z),
            origins=from_document("shaft-drawing", "section 2", "at"),
        )
        for feeder, slots, (x, y) in feeders
        for place, end, z in (("source", "start", SOURCE_Z), ("load", "end", LOAD_Z))
    )


def imaging_corridor() -> Layout:
    """The layout of room B."""
    return Layout(
        title=TitleData(
            id="title",
            project="Larkmoor Clinic, imaging storey (invented)",
            client="Larkmoor Clinic (invented)",
            document_number="LC-EMF-004",
            revision="A",
            status="for review",
            date="2024-05-06",
            prepared_by="R. Thornquist",
            checked_by="M. Abelund",
            question="Which wiring fault in the riser shaft matters at the bed, the "
            "magnet and the corridor, and what does mending it change?",
            scope="Three feeders of the riser shaft and the stray path of R2.",
        ),
        settings=Settings(
            frequency=60.0, flux_density_unit="mG", map_low=1e-8, map_high=1e-4
        ),
        documents=(
            SourceDocument(
                id="department-plan",
                name="Imaging storey, plan",
                file_name="LC-A-112.pdf",
                revision="F",
                date="2024-04-15",
            ),
            SourceDocument(
                id="shaft-drawing",
                name="Riser shaft, sections as found",
                file_name="LC-E-044.pdf",
                revision="as found",
                date="2024-04-22",
            ),
            SourceDocument(
                id="power-log",
                name="Power-quality log of the riser feeders",
                file_name="LC-E-log-17.csv",
                date="2024-04-24",
            ),
        ),
        storeys=tuple(
            Storey(
                id=id_,
                name=name,
                floor_level=level,
                origins=from_document("department-plan", "1", "floor_level"),
            )
            for id_, name, level in (
                ("first", "Source storey", -4.2),
                ("second", "Imaging storey", 0.0),
                ("third", "Third storey", 4.2),
            )
        ),
        rooms=rooms(),
        enclosures=enclosures(),
        circuits=circuits(),
        runs=runs(),
        joints=joints(),
        zones=zones(),
        receptors=receptors(),
        levels=(
            example_level(
                "A",
                "general public, short stay",
                flat_then_falling(463e-7, 67.0, 3000.0),
                use="Compared with the corridor.",
            ),
            example_level(
                "B",
                "equipment",
                milligauss((60, 11.7), (180, 8.9), (300, 6.1), (420, 4.3)),
                use="Compared with the magnet.",
            ),
            example_level(
                "C",
                "equipment",
                milligauss((60, 9.3), (180, 17.9), (300, 6.7), (420, 4.7)),
                use="Compared with the stress-test bed.",
            ),
            example_level(
                "D",
                "workers",
                flat_then_falling(47e-7, 67.0, 3000.0),
                use="Compared with the control room.",
            ),
        ),
        load_cases=(
            LoadCase(
                id="as-logged",
                name="As logged",
                basis="measured at the weekly peak",
                origins=from_document("power-log", "1", "factors"),
            ),
            LoadCase(
                id="essential-only",
                name="Essential supply only",
                factors=(CircuitFactor(circuit="R1", factor=0.0),),
                counted=False,
                basis="normal supply lost",
            ),
        ),
        variants=variants(circuits(), runs()),
        profiles=(
            Profile(
                id="from-the-shaft",
                name="From the shaft wall through the corridor",
                path=((7.5, 0.1, 1.0), (7.5, 2.3, 1.0)),
            ),
        ),
    )
