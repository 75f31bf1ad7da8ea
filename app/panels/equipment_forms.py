"""What can be edited of equipment: transformers, boards with poles and ways, loops."""

from __future__ import annotations

from typing import Any

from msgspec.structs import replace

from app.panels.kinds import (
    AMPERES,
    DEGREES,
    VOLT_AMPERES,
    VOLTS,
    Amount,
    Choice,
    Column,
    Distance,
    Distances,
    Option,
    Rows,
    Words,
    one_of,
)
from app.panels.parts import Part
from app.panels.place_forms import path_table, plan_table
from app.panels.source_kinds import CarriedCircuits, SolidShape
from engine.edits import readable_id
from engine.entered_values import with_part
from engine.equipment import Pole, Terminal, Way
from engine.layout import Layout

_LINES = ("L1", "L2", "L3", "N", "PE")


def _next_label(rows: tuple[Any, ...]) -> str:
    taken = {row.label for row in rows}
    free = [label for label in _LINES if label not in taken]
    return free[0] if free else rows[-1].label


def _next_terminal(_layout: Layout, rows: tuple[Any, ...], at: int) -> Terminal:
    x, y, z = rows[at].at
    return Terminal(label=_next_label(rows), at=(x + 0.1, y, z))


def _next_pole(_layout: Layout, rows: tuple[Any, ...], at: int) -> Pole:
    pole: Pole = rows[at]
    return replace(pole, label=_next_label(rows), across=pole.across + 0.1)


def _next_way(_layout: Layout, rows: tuple[Any, ...], at: int) -> Way:
    name = readable_id("F1", {row.name for row in rows}) if rows else "F1"
    numbers = (f"F{n}" for n in range(1, len(rows) + 2))
    name = next((n for n in numbers if n not in {r.name for r in rows}), name)
    position = rows[at].position + 0.4 if rows else 0.0
    return Way(name=name, position=position)


def _with_pitch(way: Any, pitch: Any) -> Any:
    """An empty pitch takes the dropper away."""
    if pitch is None:
        return replace(way, dropper=None)
    return with_part(way, "dropper.pitch", pitch)


TRANSFORMER = (
    Part(
        "rated_power",
        "Rated power",
        Amount(VOLT_AMPERES, "kVA", is_optional=True),
        "Rated power; may be empty",
    ),
    Part(
        "voltage",
        "Voltage",
        Amount(VOLTS, "V", is_optional=True),
        "Between lines at the low-voltage side; may be empty",
    ),
    Part("star", "Star x y z", Distances(3), "Where the star closes", "star point"),
    Part(
        "terminals",
        "Terminals",
        Rows(
            (
                Column("label", "label", Words(), "Conductor", 12),
                Column("at.0", "x", Distance(), "x of the terminal", 16),
                Column("at.1", "y", Distance(), "y of the terminal", 16),
                Column("at.2", "z", Distance(), "z of the terminal", 16),
            ),
            _next_terminal,
            1,
            "terminal",
        ),
        "Low-voltage terminals with their places",
    ),
    plan_table(
        "footprint", "Footprint", "What stands on the floor, for drawing", fewest=0
    ),
)

BOARD = (
    Part("origin", "Origin x y", Distances(2), "Where positions count from", "origin"),
    Part(
        "direction",
        "Direction",
        Amount(DEGREES, "°"),
        "Direction of the board on plan, counter-clockwise from +x, degrees",
    ),
    Part(
        "rated_current",
        "Rated current",
        Amount(AMPERES, "A", is_optional=True),
        "Rated current of one pole; may be empty",
    ),
    Part(
        "poles",
        "Poles",
        Rows(
            (
                Column("label", "label", Words(), "Conductor", 12),
                Column("across", "across", Distance(), "To the left of the board", 15),
                Column("z", "z", Distance(), "Above the datum", 15),
                Column("fed_at", "fed at", Distance(), "Along the board", 15),
                Column("shape", "shape", SolidShape(), "100 x 10, turn 90", 34),
            ),
            _next_pole,
            1,
            "pole",
        ),
        "Bars of the board",
    ),
    Part(
        "ways",
        "Ways",
        Rows(
            (
                Column("name", "name", Words(), "Name of the way", 12),
                Column("position", "position", Distance(), "Along the board", 16),
                Column("circuits", "circuits", CarriedCircuits(), "F1; F2 at 50%", 26),
                Column(
                    "closed",
                    "at its foot",
                    Choice(lambda _l: [(False, "goes on"), (True, "closed")]),
                    "Closed: the circuit goes on with no net current, not drawn",
                    18,
                ),
                Column(
                    "dropper.pitch",
                    "pitch",
                    Distance(is_optional=True),
                    "Pitch of the dropper's conductors; empty: no dropper",
                    15,
                    _with_pitch,
                ),
                Column("dropper.setback", "set-back", Distance(), "To the left", 15),
                Column("dropper.foot_z", "foot z", Distance(), "Above the datum", 15),
            ),
            _next_way,
            0,
            "way",
        ),
        "Outgoing ways; the current of the bars tapers at each",
    ),
    plan_table(
        "footprint", "Footprint", "What stands on the floor, for drawing", fewest=0
    ),
)


def _circuits(layout: Layout) -> list[Option]:
    return [(circuit.id, circuit.title) for circuit in layout.circuits]


LOOP = (
    Part("kind", "Kind", one_of("battery", "UPS", "coil", "other"), "What the loop is"),
    Part("circuit", "Circuit", Choice(_circuits), "Whose current it carries"),
    Part("label", "Conductor", Words(), "Label of the circuit's conductor, such as L+"),
    Part(
        "share",
        "Share",
        Amount({"%": 0.01}, "%"),
        "Share of that conductor's current, per cent",
    ),
    Part("turns", "Turns", Amount(is_whole=True), "How often the path is wound"),
    Part("shape", "Shape", SolidShape(), "A bar as 100 x 10, or a diameter as 28 mm"),
    path_table("path", "Path", "It closes from the last to the first", fewest=3),
)
