"""A laboratory with a microscope beside a UPS and battery room.

DC, 50 Hz and harmonics. Metres; z from the finished floor. The battery carries
nothing in normal operation, 653 A in discharge, and −60 A with a ripple of 300 Hz
while it is charged again.
"""

from __future__ import annotations

from engine.circuits import (
    Circuit,
    CircuitFactor,
    ConductorCurrent,
    DirectCurrents,
    LoadCase,
    OwnCurrents,
    SpectrumLine,
)
from engine.equipment import ConductorLoop
from engine.items import SourceDocument, TitleData
from engine.layout import Layout, Settings
from engine.places import Profile, Storey
from engine.runs import (
    CircuitShare,
    Flat,
    FreeSection,
    Joint,
    Round,
    Run,
    Slot,
    SlotEnd,
    SlotLoad,
)
from rooms.invented import (
    assumed,
    example_level,
    from_document,
    harmonics,
    lagging,
)
from rooms.laboratory_places import enclosures, levels, receptors, rooms, zones
from rooms.laboratory_variants import variants

POLES = ("L1", "L2", "L3", "N")
#: Places of the output conductors along y. [m]
OUTPUT_Y = (1.40, 1.48, 1.56, 1.86)


def direct(current: float) -> DirectCurrents:
    """Current of the battery's plus conductor, positive in discharge. [A]"""
    return DirectCurrents(
        currents=(
            ConductorCurrent(
                label="L+", rms=abs(current), angle=0.0 if current >= 0 else 180.0
            ),
        )
    )


def circuits() -> tuple[Circuit, ...]:
    """UPS input and output, and the battery."""
    given = from_document(
        "ups-data", "3", "supply", "base_frequency", "demand", "spectrum"
    )
    return (
        Circuit(
            id="ups-input",
            name="UPS input, 300 kVA, six-pulse",
            supply="three-phase three-wire",
            base_frequency=50.0,
            voltage=400.0,
            demand=lagging((455, 18), (455, 18), (455, 18)),
            spectrum=harmonics(
                50.0, {5: 28.0, 7: 11.0, 11: 8.0, 13: 5.0, 17: 3.5, 19: 2.5}
            ),
            neutral="none",
            origins=given,
        ),
        Circuit(
            id="ups-output",
            name="UPS output",
            base_frequency=50.0,
            voltage=400.0,
            demand=lagging((400, 25), (385, 26), (360, 24)),
            spectrum=harmonics(50.0, {3: 18.0, 5: 8.0, 7: 4.0}, offset_of_3rd=180.0),
            origins=given,
        ),
        Circuit(
            id="battery",
            name="Battery, 2 strings of 240 cells",
            note="653 A flow in discharge; see the load cases.",
            supply="dc",
            base_frequency=0.0,
            voltage=480.0,
            demand=direct(653.0),
            origins=given,
        ),
    )


def string(number: int, y: float) -> ConductorLoop:
    """A battery string: a closed rectangle in a plane across y, half the current."""
    return ConductorLoop(
        id=f"string-{number}",
        name=f"Battery string {number}",
        kind="battery",
        path=((1.0, y, 2.2), (5.0, y, 2.2), (5.0, y, 0.4), (1.0, y, 0.4)),
        circuit="battery",
        label="L+",
        share=0.5,
        shape=Round(diameter=0.024),
        origins=(
            *from_document("room-drawing", "section", "path", "turns", "shape"),
            assumed("share", "Equal strings."),
            assumed("shape.diameter", "Cable data sheet not at hand."),
        ),
    )


def input_cables() -> Run:
    """Three cables 80 mm apart; looking along the route L1 is on the right."""
    return Run(
        id="input-cables",
        name="UPS input cables",
        kind="cable ladder",
        route=((0.3, 0.58, 2.6), (3.08, 0.58, 2.6), (3.08, 1.2, 2.6), (3.08, 1.2, 1.8)),
        section=Flat(
            circuits=(CircuitShare(circuit="ups-input"),),
            order=("L3", "L2", "L1"),
            pitch=0.08,
            shape=Round(diameter=0.027),
        ),
        rated_current=520.0,
        origins=(
            *from_document("room-drawing", "plan", "route", "section"),
            assumed("section.shape.diameter", "Cable data sheet not at hand."),
            assumed("rated_current", "Cable data sheet not at hand."),
        ),
    )


def output_cables() -> Run:
    """Four cables along the ceiling, N apart; u runs in −y from the route at y 1.5."""
    return Run(
        id="output-cables",
        name="UPS output cables",
        kind="cable ladder",
        route=((3.4, 1.5, 2.6), (5.7, 1.5, 2.6), (5.7, 1.5, 1.5)),
        section=FreeSection(
            slots=tuple(
                Slot(
                    name=label,
                    u=round(1.5 - y, 4),
                    v=0.0,
                    shape=Round(diameter=0.027),
                    loads=(SlotLoad(circuit="ups-output", label=label),),
                )
                for label, y in zip(POLES, OUTPUT_Y, strict=True)
            )
        ),
        rated_current=520.0,
        origins=(
            *from_document("room-drawing", "plan", "route", "section"),
            *(
                assumed(
                    f"section.slots.{i}.shape.diameter", "Cable data sheet not at hand."
                )
                for i in range(4)
            ),
            assumed("rated_current", "Cable data sheet not at hand."),
        ),
    )


def direct_link() -> Run:
    """Plus and minus 60 mm apart from the racks to the UPS; minus is on the left."""
    return Run(
        id="dc-link",
        name="DC link",
        kind="cable ladder",
        route=(
            (1.03, 4.2, 2.6),
            (1.03, 1.63, 2.6),
            (2.6, 1.63, 2.6),
            (2.6, 1.63, 1.8),
        ),
        section=Flat(
            circuits=(CircuitShare(circuit="battery"),),
            order=("L-", "L+"),
            pitch=0.06,
            shape=Round(diameter=0.030),
        ),
        rated_current=700.0,
        origins=(
            *from_document("room-drawing", "plan", "route", "section"),
            assumed("section.shape.diameter", "Cable data sheet not at hand."),
            assumed("rated_current", "Cable data sheet not at hand."),
        ),
    )


def joints() -> tuple[Joint, ...]:
    """Each circuit is closed where it enters the UPS and at its other end."""
    lines = ("L1", "L2", "L3")
    rows = (
        ("input-board", "input-cables", lines, "start", (0.3, 0.58, 2.6)),
        ("input-ups", "input-cables", lines, "end", (3.08, 1.2, 1.8)),
        ("output-ups", "output-cables", POLES, "start", (3.4, 1.2, 1.8)),
        ("output-board", "output-cables", POLES, "end", (5.7, 1.5, 0.6)),
        ("link-racks", "dc-link", ("L+", "L-"), "start", (1.0, 4.2, 2.6)),
        ("link-ups", "dc-link", ("L+", "L-"), "end", (2.6, 1.6, 1.8)),
    )
    return tuple(
        Joint(
            id=id_,
            ends=tuple(SlotEnd(item=run, slot=slot, end=end) for slot in slots),
            at=at,
            origins=from_document("room-drawing", "plan", "at", "category"),
        )
        for id_, run, slots, end, at in rows
    )


def load_cases() -> tuple[LoadCase, ...]:
    """Normal operation, discharge with the input dead, and recharge."""
    given = from_document("ups-data", "5", "factors", "own")
    return (
        LoadCase(
            id="normal",
            name="Normal operation",
            factors=(CircuitFactor(circuit="battery", factor=0.0),),
            basis="rated output",
            origins=given,
        ),
        LoadCase(
            id="discharge",
            name="Battery in discharge",
            factors=(CircuitFactor(circuit="ups-input", factor=0.0),),
            basis="rated output without mains",
            origins=given,
        ),
        LoadCase(
            id="recharge",
            name="Battery being charged",
            note="The angle of the 300 Hz ripple is unknown.",
            own=(
                OwnCurrents(
                    circuit="battery",
                    demand=direct(-60.0),
                    spectrum=(SpectrumLine(frequency=300.0, rms=3.6),),
                ),
            ),
            basis="after a discharge",
            origins=given,
        ),
    )


def battery_laboratory() -> Layout:
    """The layout of room C."""
    return Layout(
        title=TitleData(
            id="title",
            project="Fennbrook Institute, microscope room (invented)",
            client="Fennbrook Institute (invented)",
            document_number="FI-EMF-002",
            revision="A",
            status="for review",
            date="2024-06-03",
            prepared_by="R. Thornquist",
            checked_by="M. Abelund",
            question="Can the microscope stand beside the UPS and battery room, in "
            "normal operation, in discharge and in recharge?",
            scope="UPS input and output, battery strings and DC link.",
        ),
        settings=Settings(frequency=50.0, map_low=1e-8, map_high=1e-3),
        documents=(
            SourceDocument(
                id="room-drawing",
                name="UPS room and laboratory, plan and section",
                file_name="FI-E-021.pdf",
                revision="B",
                date="2024-05-17",
            ),
            SourceDocument(
                id="ups-data",
                name="UPS and battery, data of the tender",
                file_name="FI-E-030.pdf",
                revision="A",
                date="2024-05-10",
            ),
        ),
        storeys=(
            Storey(
                id="ground",
                name="Ground floor",
                floor_level=0.0,
                origins=from_document("room-drawing", "section", "floor_level"),
            ),
        ),
        rooms=rooms(),
        enclosures=enclosures(),
        circuits=circuits(),
        equipment=(string(1, 4.55), string(2, 4.15)),
        runs=(input_cables(), output_cables(), direct_link()),
        joints=joints(),
        zones=zones(),
        receptors=receptors(),
        levels=tuple(
            example_level(letter, category, values, use=use)
            for letter, category, values, use in levels()
        ),
        load_cases=load_cases(),
        variants=variants((string(1, 4.55), string(2, 4.15)), output_cables()),
        profiles=(
            Profile(
                id="to-the-microscope",
                name="From the wall past the microscope",
                path=((6.3, 2.5, 1.0), (12.0, 2.5, 1.0)),
            ),
        ),
    )
