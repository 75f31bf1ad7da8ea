"""What can be edited of runs and joints, and the currents of their circuits."""

from __future__ import annotations

from typing import Any, get_args

from msgspec.structs import replace

from app.panels.kinds import (
    AMPERES,
    Amount,
    Choice,
    Column,
    Distances,
    Numbers,
    Option,
    Rows,
    Words,
    one_of,
)
from app.panels.panel import decimal_sign
from app.panels.parts import Group, Part
from app.panels.place_forms import path_table
from engine.circuits import Circuit
from engine.edits import checked, replaced
from engine.entered_values import with_value
from engine.equipment import Board, ConductorLoop, Transformer
from engine.errors import UserError
from engine.formations import circuits_of
from engine.items import Item
from engine.layout import Layout
from engine.origins import restated
from engine.runs import Connection, Run, RunKind, SlotEnd
from engine.sections import slots
from engine.shown_currents import current_text
from engine.typed_currents import typed_current
from engine.vertices import without_vertex

_LINES = ("L1", "L2", "L3", "N", "PE")


def carried_by(item: Item) -> list[str]:
    """Ids of the circuits that an item carries, in the order they are met."""
    match item:
        case Run():
            return [share.circuit for share in circuits_of(item.section)]
        case Board():
            shares = [s.circuit for way in item.ways for s in way.circuits]
            return list(dict.fromkeys(shares))
        case ConductorLoop():
            return [item.circuit]
    return []


def current_groups(layout: Layout, items: tuple[Item, ...]) -> list[Group]:
    """The currents of the circuits that all the items carry, editable in place."""
    if not items:
        return []
    common = [
        circuit
        for circuit in carried_by(items[0])
        if all(circuit in carried_by(item) for item in items[1:])
    ]
    groups: list[Group] = []
    for circuit in layout.circuits:
        if circuit.id in common:
            sharing = sum(circuit.id in carried_by(run) for run in layout.runs)
            note = f"Shared by {sharing} runs." if sharing > 1 else ""
            part = replace_part(_CURRENT, circuit.title, note)
            groups.append(Group("" if groups else "Current", (circuit,), (part,)))
    return groups


def replace_part(part: Part, label: str, note: str) -> Part:
    """The part with another label and note."""
    return Part(
        part.path, label, part.kind, part.tip, part.noun, part.read, part.change, note
    )


def _current(_layout: Layout, circuit: Item) -> str:
    assert isinstance(circuit, Circuit)
    return current_text(circuit, decimal_sign())


def _with_current(layout: Layout, items: tuple[Item, ...], text: Any) -> Layout:
    new = []
    for circuit in items:
        assert isinstance(circuit, Circuit)
        typed = typed_current(text, circuit, decimal_sign())
        values: dict[str, Any] = {"demand": typed.demand}
        if typed.voltage is not None:
            values["voltage"] = typed.voltage
        new.append(checked(restated(circuit, **values)))
    return replaced(layout, *new)


_CURRENT = Part(
    "demand",
    "Current",
    Words(),
    "Current of the circuit: 800 A, 1.6 kA 0.9 lag, 575@18, 250 kVA 400 V; also of "
    "each line, 246 / 238 / 251 A @ 27",
    "current",
    _current,
    _with_current,
)


def run(items: tuple[Run, ...]) -> tuple[Part, ...]:
    """The parts of runs."""
    return (
        Part("kind", "Kind", one_of(*get_args(RunKind)), "What the run is built as"),
        Part(
            "rated_current",
            "Rated current",
            Amount(AMPERES, "A", is_optional=True),
            "Rated current of one pole, all its conductors together; may be empty",
        ),
        Part(
            "containment",
            "Containment",
            one_of("not stated", "steel", "not steel"),
            "Whether steel surrounds the run. Steel is not calculated but remarked on",
        ),
        *_connection(items, "start", "Start at"),
        *_connection(items, "end", "End at"),
        _ROUTE,
        Part(
            "turns",
            "Turns of the section",
            Numbers(),
            "Turn of the section about each leg in degrees, one for each; empty: none",
        ),
    )


def _connection(items: tuple[Run, ...], side: str, label: str) -> tuple[Part, ...]:
    """Where an end goes: the equipment, its way, a terminal."""

    def change(layout: Layout, runs: tuple[Item, ...], equipment: Any) -> Layout:
        to = _first_connection(layout, equipment, side)
        return replaced(layout, *(with_value(r, side, to) for r in runs))

    first = Part(
        f"{side}.equipment",
        label,
        Choice(_equipment),
        "The equipment that this end of the run goes to",
        f"{side} connection",
        change=change,
    )
    connections = {getattr(item, side) for item in items}
    if len({c.equipment if c else None for c in connections}) != 1:
        return (first,)
    held = next(iter(connections))
    if held is None:
        return (first,)

    def ways(layout: Layout) -> list[Option]:
        unit = layout.by_id().get(held.equipment)
        if not isinstance(unit, Board):
            return [("", "none")]
        return [("incoming", "incoming"), *((way.name, way.name) for way in unit.ways)]

    def terminals(layout: Layout) -> list[Option]:
        unit = layout.by_id().get(held.equipment)
        labels: list[str] = []
        if isinstance(unit, Transformer):
            labels = [*(t.label for t in unit.terminals), "star"]
        elif isinstance(unit, Board):
            labels = [pole.label for pole in unit.poles]
        return [("", "each to its own"), *((x, x) for x in dict.fromkeys(labels))]

    return (
        first,
        Part(
            f"{side}.way",
            "Way",
            Choice(ways),
            "The way of the board that this end goes to",
            f"{side} way",
        ),
        Part(
            f"{side}.terminal",
            "Terminal",
            Choice(terminals),
            "The terminal for all conductors; else each goes to that of its label",
            f"{side} terminal",
        ),
    )


def _equipment(layout: Layout) -> list[Option]:
    found = [u for u in layout.equipment if not isinstance(u, ConductorLoop)]
    return [(None, "not connected"), *((u.id, u.title) for u in found)]


def _first_connection(
    layout: Layout, equipment: str | None, side: str
) -> Connection | None:
    """A connection to an equipment; the way is likely by the side of the run."""
    if equipment is None:
        return None
    unit = layout.by_id().get(equipment)
    way = ""
    if isinstance(unit, Board):
        way = unit.ways[0].name if side == "start" and unit.ways else "incoming"
    return Connection(equipment=equipment, way=way)


def _with_route(layout: Layout, items: tuple[Item, ...], route: Any) -> Layout:
    """Turns of legs stay with their legs when a vertex comes or goes."""
    new = []
    for item in items:
        assert isinstance(item, Run)
        old = item.route
        at = next(
            (i for i, (a, b) in enumerate(zip(old, route, strict=False)) if a != b),
            min(len(old), len(route)),
        )
        if len(route) == len(old) - 1:
            item = replace(item, turns=without_vertex(item, at).turns)
        elif len(route) == len(old) + 1 and item.turns:
            leg = min(at, len(item.turns)) - 1
            turns = (*item.turns[: leg + 1], *item.turns[leg:])
            item = replace(item, turns=turns)
        new.append(checked(with_value(item, "route", route)))
    return replaced(layout, *new)


_ROUTE = Part(
    "route",
    "Route",
    path_table("route", "Route", "").kind,
    "Vertices of the route, in the direction of positive current",
    "route",
    change=_with_route,
)


def _ends(layout: Layout) -> list[Option]:
    return [(i.id, i.title) for i in (*layout.runs, *layout.equipment)]


def _next_end(layout: Layout, rows: tuple[Any, ...], at: int) -> SlotEnd:
    """The next conductor of the same end that does not meet here yet."""
    chosen: SlotEnd = rows[at]
    run = layout.by_id().get(chosen.item)
    names = [slot.name for slot in slots(run.section)] if isinstance(run, Run) else []
    for name in names:
        end = replace(chosen, slot=name)
        if end not in rows:
            return end
    raise UserError(
        "All conductors of that end meet here already: choose the row of another item, "
        "or change the item of one row."
    )


JOINT = (
    Part(
        "at",
        "Place x y z",
        Distances(3, is_optional=True),
        "Where the ends meet; empty: in their middle",
        "place",
    ),
    Part(
        "ends",
        "Ends",
        Rows(
            (
                Column("item", "item", Choice(_ends), "Run or equipment", 28),
                Column("slot", "conductor", Words(), "Name of the conductor", 18),
                Column("end", "end", one_of("start", "end", "terminal"), "", 18),
            ),
            _next_end,
            2,
            "end",
        ),
        "Conductor ends that meet here; their currents sum to zero",
    ),
)
