"""What can be edited of single conductors of a section; it becomes free by that."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from msgspec.structs import replace

from app.panels.kinds import (
    DEGREES,
    Amount,
    Choice,
    Column,
    Dimension,
    Kind,
    Labels,
    Option,
    Rows,
    Words,
    one_of,
)
from app.panels.parts import Part
from engine.edits import checked
from engine.entered_values import value_at, with_part
from engine.errors import UserError
from engine.formations import (
    FIRST_BAR,
    FIRST_ROUND,
    as_free,
)
from engine.items import Item
from engine.layout import Layout
from engine.runs import (
    Bar,
    FreeSection,
    Multicore,
    Round,
    Run,
    Section,
    Shape,
    Slot,
    SlotLoad,
)
from engine.section_edits import with_section
from engine.sections import slots


class SlotItem(Item, frozen=True, kw_only=True):
    """A conductor of a section as something that a form can show; `id` is its name."""

    run: str
    slot: Slot


def slot_items(run: Run, names: frozenset[str]) -> tuple[SlotItem, ...]:
    """The chosen conductors of a run's section, in its order."""
    return tuple(
        SlotItem(id="slot", name=f"{slot.name} of {run.title}", run=run.id, slot=slot)
        for slot in slots(run.section)
        if slot.name in names
    )


def with_new_section(
    layout: Layout, run: Run, section: Section, names: dict[str, str] | None = None
) -> Layout:
    """The layout with another section in a run.

    Raises
    ------
    UserError
        When the section cannot be, or two of its conductors have one name.
    """
    checked(replace(run, section=section))
    slots(section)
    return with_section(layout, run, section, names)


def shape_kind(shape: Shape) -> str:
    """What a shape is called."""
    return str(type(shape).__struct_config__.tag)


def first_shape(kind: str) -> Shape:
    """The size that a shape begins with: common practice."""
    if kind == "bar":
        return FIRST_BAR
    if kind == "round":
        return FIRST_ROUND
    return Multicore(
        outside_diameter=0.05, core_diameter=0.015, core_circle_diameter=0.022
    )


def _slot_part(
    path: str, label: str, kind: Kind, tip: str, noun: str = "",
    change: Callable[[Slot, Any], Slot] | None = None,
    read: Callable[[Slot], Any] | None = None,
) -> Part:  # fmt: skip
    """A part of single conductors; entering it frees the section."""

    def new(slot: Slot, value: Any) -> Slot:
        if change is not None:
            return change(slot, value)
        made: Slot = with_part(slot, path, value)
        return made

    def changed(layout: Layout, items: tuple[Item, ...], value: Any) -> Layout:
        held = {i.slot.name: i for i in items if isinstance(i, SlotItem)}
        run = layout.by_id()[next(iter(held.values())).run]
        assert isinstance(run, Run)
        before = as_free(run.section).slots
        made = tuple(new(slot, value) if slot.name in held else slot for slot in before)
        names = {a.name: b.name for a, b in zip(before, made, strict=True)}
        return with_new_section(layout, run, FreeSection(slots=made), names)

    def shown(_layout: Layout, item: Item) -> Any:
        assert isinstance(item, SlotItem)
        if read is not None:
            return read(item.slot)
        return value_at(item, f"slot.{path}")

    return Part(f"slot.{path}", label, kind, tip, noun, shown, changed)


def _circuits(layout: Layout) -> list[Option]:
    return [(circuit.id, circuit.title) for circuit in layout.circuits]


def _next_load(layout: Layout, rows: tuple[Any, ...], at: int) -> SlotLoad:
    if not layout.circuits:
        raise UserError("There is no circuit yet: enter one under Circuits.")
    label = rows[at].label if rows else "L1"
    taken = {row.circuit for row in rows if row.label == label}
    free = [c.id for c in layout.circuits if c.id not in taken]
    return SlotLoad(circuit=free[0] if free else layout.circuits[0].id, label=label)


_LOADS = Rows(
    (
        Column("circuit", "circuit", Choice(_circuits), "Whose current it carries", 28),
        Column("label", "label", Words(), "Which conductor of the circuit", 14),
        Column("share", "share", Amount({"%": 0.01}, "%"), "Part of its current", 16),
    ),
    _next_load,
    0,
    "load",
)


def conductor_parts(items: tuple[SlotItem, ...]) -> tuple[Part, ...]:
    """The parts of chosen conductors; entering one frees the section."""
    shapes = {type(item.slot.shape) for item in items}
    parts = [
        _slot_part("u", "To the right", Dimension(), "Place u from the route", "place"),
        _slot_part("v", "Up", Dimension(), "Place v above the route", "place"),
        _slot_part(
            "shape",
            "Shape",
            one_of("round", "bar", "multicore"),
            "Shape of the conductor",
            "shape",
            lambda slot, kind: replace(slot, shape=first_shape(kind)),
            lambda slot: shape_kind(slot.shape),
        ),
    ]
    if shapes == {Round}:
        tip = "Outside diameter"
        parts.append(_slot_part("shape.diameter", "Diameter", Dimension(), tip))
    elif shapes == {Bar}:
        turn = "0 lies flat, 90 stands on edge, degrees"
        parts += [
            _slot_part("shape.width", "Bar width", Dimension(), "Width of the bar"),
            _slot_part("shape.thickness", "Thickness", Dimension(), "Its thickness"),
            _slot_part("shape.turn", "Turn", Amount(DEGREES, "°"), turn),
        ]
    elif shapes == {Multicore}:
        parts += _multicore()
    if len(items) == 1:
        parts.insert(0, _slot_part("name", "Name", Words(), "Name of the conductor"))
    tip = "Currents it carries: a negative share flows the other way"
    parts.append(_slot_part("loads", "Carries", _LOADS, tip, "loads"))
    return tuple(parts)


def _multicore() -> list[Part]:
    model = one_of("straight cores", "net current only")
    return [
        _slot_part("shape.outside_diameter", "Outside", Dimension(), "Its diameter"),
        _slot_part("shape.core_diameter", "Core", Dimension(), "Diameter of a core"),
        _slot_part(
            "shape.core_circle_diameter", "Core circle", Dimension(), "Circle of cores"
        ),
        _slot_part("shape.cores", "Cores", Labels(), "Clockwise from the top"),
        _slot_part("shape.model", "Taken as", model, "How the cable is calculated"),
        _slot_part("shape.turn", "Turn", Amount(DEGREES, "°"), "Turn of the cores"),
    ]
