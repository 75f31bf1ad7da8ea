"""What can be edited of a section: its formation, dimensions, sets and shape."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from msgspec.structs import replace

from app.panels.kinds import (
    DEGREES,
    Amount,
    Dimension,
    Kind,
    Labels,
    one_of,
)
from app.panels.parts import Group, Part
from app.panels.slot_forms import (
    conductor_parts,
    first_shape,
    shape_kind,
    slot_items,
    with_new_section,
)
from app.panels.source_kinds import CarriedCircuits
from engine.edits import checked
from engine.entered_values import with_value
from engine.formations import (
    FORMATIONS,
    formation_of,
    with_formation,
    with_sets,
)
from engine.items import Item
from engine.layout import Layout
from engine.runs import (
    Bar,
    FreeSection,
    ParallelSets,
    Round,
    Run,
    Sandwich,
    Section,
    StackedBars,
    Trefoil,
)
from engine.section_edits import with_shape
from engine.sections import slots

Change = Callable[[Section, Any], Section]


def section_groups(run: Run, names: frozenset[str]) -> tuple[Group, ...]:
    """The form of a run's section, and of its chosen conductors."""
    items = (run,)
    whole = Group("Formation", items, _formation(run.section))
    chosen = slot_items(run, names)
    if not chosen:
        return (whole,)
    name = f"{len(chosen)} conductors chosen"
    if len(chosen) == 1:
        name = f"Conductor {chosen[0].slot.name}"
    note = "" if isinstance(run.section, FreeSection) else _FREES
    return whole, Group(name, chosen, conductor_parts(chosen), note)


_FREES = "Changing one conductor makes this a free section."


def _whole(
    path: str, label: str, kind: Kind, tip: str, change: Change, noun: str = "",
    read: Callable[[Section], Any] | None = None,
) -> Part:  # fmt: skip
    """A part of which a function of the section takes the value."""

    def changed(layout: Layout, items: tuple[Item, ...], value: Any) -> Layout:
        for item in items:
            assert isinstance(item, Run)
            layout = with_new_section(layout, item, change(item.section, value))
        return layout

    def shown(_layout: Layout, item: Item) -> Any:
        assert isinstance(item, Run)
        assert read is not None
        return read(item.section)

    return Part(path, label, kind, tip, noun, shown if read else None, changed)


def _field(path: str, label: str, kind: Kind, tip: str, noun: str = "") -> Part:
    """A part that is one field of the section, by its dotted name."""
    dotted = f"section.{path}"

    def changed(layout: Layout, items: tuple[Item, ...], value: Any) -> Layout:
        for item in items:
            assert isinstance(item, Run)
            run = checked(with_value(item, dotted, value))
            slots(run.section)
            others = tuple(run if r.id == run.id else r for r in layout.runs)
            layout = replace(layout, runs=others)
        return layout

    return Part(dotted, label, kind, tip, noun, None, changed)


def _formation(section: Section) -> tuple[Part, ...]:
    first = _whole(
        "section.formation",
        "Formation",
        one_of(*FORMATIONS),
        "How the conductors stand; the same currents stay in the section",
        lambda held, value: with_formation(held, value),
        "formation",
        formation_of,
    )
    if isinstance(section, FreeSection):
        return (first,)
    circuits = _field(
        "circuits",
        "Circuits",
        CarriedCircuits(),
        "Circuits carried: F1; F2 at 50% for half of it",
    )
    parts = [first, circuits]
    if isinstance(section, ParallelSets):
        parts += _sets(section)
    else:
        parts.append(_field("order", "Order", Labels(), _order_tip(section)))
    if isinstance(section, StackedBars | Sandwich):
        parts += _bars(section)
    else:
        parts += _spacing(section)
        parts += _shape(section.shape, isinstance(section, Trefoil))
    return tuple(parts)


def _order_tip(section: Section) -> str:
    words = {
        "flat": "from left to right",
        "vertical": "from top to bottom",
        "trefoil": "from the apex clockwise, then the one beside",
        "quad": "top left, top right, bottom right, bottom left",
    }.get(formation_of(section), "pole by pole")
    return f"Conductors in their order, {words}, looking along the route"


_DIRECTION = one_of("right", "down")
_PITCH_TIP = "Distance between the middles of neighbouring conductors, in mm or inches"


def _sets(section: ParallelSets) -> list[Part]:
    parts = [
        _whole(
            "section.sets",
            "Sets",
            Amount(is_whole=True),
            "How many sets stand in parallel; a further one has the order of the last",
            with_sets,
            "number of sets",
            lambda held: len(held.orders) if isinstance(held, ParallelSets) else 1,
        ),
        _field(
            "formation",
            "Each set",
            one_of("flat", "vertical", "trefoil", "quad"),
            "Formation of each set",
            "formation of the sets",
        ),
    ]
    parts += [
        _field(
            f"orders.{i}",
            f"Order of set {i + 1}",
            Labels(),
            "Conductors in their order",
        )
        for i in range(len(section.orders))
    ]
    parts += [
        _field("set_pitch", "Set pitch", Dimension(), "From middle to middle of sets"),
        _field("direction", "Sets follow", _DIRECTION, "To the right or downwards"),
    ]
    return parts


def _spacing(section: Section) -> list[Part]:
    parts = [_field("pitch", "Pitch", Dimension(), _PITCH_TIP)]
    if isinstance(section, Trefoil):
        if len(section.order) == 4:
            tip = "From the right conductor to the fourth beside it"
            parts.append(_field("neutral_pitch", "Pitch of fourth", Dimension(), tip))
        parts.append(
            _field("apex", "Apex", one_of("up", "down"), "Where the triangle points")
        )
    return parts


def _bars(section: StackedBars | Sandwich) -> list[Part]:
    parts = [
        _field("width", "Bar width", Dimension(), "Width of one bar"),
        _field("thickness", "Bar thickness", Dimension(), "Thickness of one bar"),
    ]
    if isinstance(section, Sandwich):
        tip = "Gap between the faces of neighbouring bars"
        parts.append(_field("insulation", "Insulation", Dimension(), tip))
    else:
        count = Amount(is_whole=True)
        parts += [
            _field("bars_per_pole", "Bars per pole", count, "Bars of one pole"),
            _field("gap", "Gap", Dimension(), "Between bars of a pole, face to face"),
            _field("pitch", "Pole pitch", Dimension(), "From pole to pole, middles"),
            _field("stand", "Bars stand", one_of("on edge", "flat"), "How bars stand"),
        ]
    parts.append(
        _field("direction", "Poles follow", _DIRECTION, "To the right or downwards")
    )
    return parts


def _shape(shape: Round | Bar, is_round: bool) -> list[Part]:
    """Shape and size of all conductors of a formation."""
    parts = []
    if not is_round:
        parts.append(
            _whole(
                "section.shape kind",
                "Shape",
                one_of("round", "bar"),
                "Shape of the conductors",
                lambda held, kind: with_shape(held, first_shape(kind)),
                "shape of the conductors",
                lambda held: shape_kind(slots(held)[0].shape),
            )
        )
    if isinstance(shape, Round):
        tip = "Outside diameter of a cable or rod"
        parts.append(_field("shape.diameter", "Diameter", Dimension(), tip))
    else:
        turn = "0 lies flat, 90 stands on edge, degrees"
        parts += [
            _field("shape.width", "Bar width", Dimension(), "Width of a bar"),
            _field("shape.thickness", "Thickness", Dimension(), "Its thickness"),
            _field("shape.turn", "Turn", Amount(DEGREES, "°"), turn, "turn of bars"),
        ]
    return parts
