"""New circuits, runs, boards and transformers with the values drawn first.

Busbar: flat, one 100 × 10 mm bar per pole on edge, 100 mm pitch. Cables: single-core,
28 mm outside, flat, one diameter apart. Afterwards what the last run of the kind has.
Every one of these is an assumption until somebody confirms it.
"""

from __future__ import annotations

from collections.abc import Sequence
from math import atan2, cos, degrees, dist, radians, sin

from msgspec.structs import replace
from shapely.geometry import Point, Polygon

from engine.circuits import LINES, RETURNS, STRAY, Circuit, DirectCurrents
from engine.edits import added, replaced, unused_id
from engine.ends import equipment_parts
from engine.equipment import Board, Dropper, Equipment, Pole, Terminal, Transformer, Way
from engine.errors import UserError
from engine.items import Point2, Point3
from engine.layout import Layout
from engine.motions import neat
from engine.new_places import floor_of, room_at
from engine.runs import (
    Bar,
    Carried,
    CircuitShare,
    Connection,
    Flat,
    FreeSection,
    Round,
    Run,
    RunKind,
    Sandwich,
    Section,
    Slot,
    SlotLoad,
)
from engine.sections import slots

#: Under the ceiling of its room, and above the floor without a room. [m]
UNDER_CEILING = 0.5
ABOVE_FLOOR = 2.5

#: What a riser rises when no floor above is known. [m]
STOREY_HEIGHT = 3.5

_CABLE = 0.028
_BAR = Bar(width=0.1, thickness=0.01, turn=90)


def run_height(layout: Layout, at: Point2, storey: str) -> float:
    """Height at which a run is drawn first: under the ceiling of its room. [m]"""
    room = room_at(layout, at, storey)
    if room is not None:
        return neat(room.ceiling_level - UNDER_CEILING)
    return neat(floor_of(layout, storey) + ABOVE_FLOOR)


def riser_to(layout: Layout, z: float, *, down: bool = False) -> float:
    """Level at which a riser from `z` ends: the next floor, or 3.50 m on. [m]"""
    floors = [storey.floor_level for storey in layout.storeys]
    floors += [room.floor_level for room in layout.rooms]
    if down:
        return max((f for f in floors if f < z - 1e-3), default=neat(z - STOREY_HEIGHT))
    return min((f for f in floors if f > z + 1e-3), default=neat(z + STOREY_HEIGHT))


def new_circuit(layout: Layout) -> Circuit:
    """A three-phase four-wire circuit of the layout's frequency, without currents."""
    number = 1
    taken = {item.id for item in layout.items()}
    while f"circuit-{number}" in taken:
        number += 1
    return Circuit(
        id=f"circuit-{number}",
        name=f"Circuit {number}",
        base_frequency=layout.settings.frequency,
    )


def labels(circuit: Circuit) -> tuple[str, ...]:
    """Labels of the conductors that carry a circuit, in the usual order."""
    if circuit.supply == "free":
        demand = circuit.demand
        if isinstance(demand, DirectCurrents) and demand.currents:
            return tuple(dict.fromkeys(c.label for c in demand.currents))
        return ("L1",)
    back = RETURNS.get(circuit.supply)
    return LINES[circuit.supply] + ((back,) if back else ())


def drawn_circuit(layout: Layout) -> tuple[Layout, Circuit]:
    """The circuit that the next run carries, made when there is none.

    It is that of the last run, else the first.
    """
    known = {circuit.id: circuit for circuit in layout.circuits}
    for run in reversed(layout.runs):
        if not isinstance(run.section, FreeSection):
            for share in run.section.circuits:
                if share.circuit in known:
                    return layout, known[share.circuit]
    if layout.circuits:
        return layout, layout.circuits[0]
    circuit = new_circuit(layout)
    return added(layout, circuit), circuit


def first_section(layout: Layout, kind: RunKind, circuit: Circuit) -> Section:
    """The section that a new run of a kind has: the last used, else the default."""
    order = labels(circuit)
    carried = (CircuitShare(circuit=circuit.id),)
    for run in reversed(layout.runs):
        section = run.section
        if run.kind != kind or isinstance(section, FreeSection):
            continue
        used = {label.partition(".")[0] for label in _labels_of(section)}
        if used == set(order):
            return replace(section, circuits=carried)
    match kind:
        case "busbar":
            return Flat(circuits=carried, order=order, pitch=0.1, shape=_BAR)
        case "busbar trunking":
            return Sandwich(circuits=carried, order=order)
        case "free conductor":
            return _single(circuit.id, order[0])
        case "stray path":
            return _single(circuit.id, STRAY)
    shape = Round(diameter=_CABLE)
    return Flat(circuits=carried, order=order, pitch=2 * _CABLE, shape=shape)


def with_new_run(
    layout: Layout, route: Sequence[Point3], kind: RunKind, circuit: str = ""
) -> tuple[Layout, str]:
    """The layout with a new run, and the run's id.

    The first run of a layout makes its circuit. An end at equipment that has all its
    conductors' terminals is connected to it.

    Raises
    ------
    UserError
        When the route has fewer than two vertices.
    """
    places = tuple((neat(x), neat(y), neat(z)) for x, y, z in route)
    if len(places) < 2:
        raise UserError("A run needs at least two vertices.")
    known = {one.id: one for one in layout.circuits}
    if circuit in known:
        carried = known[circuit]
    else:
        layout, carried = drawn_circuit(layout)
    number = sum(run.kind == kind for run in layout.runs) + 1
    run = Run(
        id=unused_id(layout, f"{kind.replace(' ', '-')}-{number}"),
        name=f"{kind.capitalize()} {number}",
        kind=kind,
        route=places,
        section=first_section(layout, kind, carried),
    )
    return with_connections(added(layout, run), run.id), run.id


def with_connections(layout: Layout, run_id: str) -> Layout:
    """The layout with the free ends of a run connected to equipment they lie at.

    Only where the currents close: a transformer has all the run's terminals; a board is
    fed with the circuits that it serves, or, serving none yet, gets the run's circuits
    on its first closed way; a run starts from the way that carries its circuits.
    """
    run = next(run for run in layout.runs if run.id == run_id)
    if isinstance(run.section, FreeSection):
        return layout
    circuits = run.section.circuits
    if run.start is None:
        match _equipment_at(layout, run, run.route[0]):
            case Transformer() as unit:
                run = replace(run, start=Connection(equipment=unit.id))
            case Board() as board:
                for k, way in enumerate(board.ways):
                    if way.closed and set(way.circuits) == set(circuits):
                        start = Connection(equipment=board.id, way=way.name)
                        run = replace(run, start=start)
                        layout = replaced(
                            layout, _with_way(board, k, replace(way, closed=False))
                        )
                        break
    if run.end is None:
        match _equipment_at(layout, run, run.route[-1]):
            case Transformer() as unit:
                if run.start is None or run.start.equipment != unit.id:
                    run = replace(run, end=Connection(equipment=unit.id))
            case Board() as board:
                serving = _serving(board, circuits)
                if serving is not None and not _is_fed(layout, board):
                    run = replace(run, end=Connection(equipment=board.id))
                    layout = replaced(layout, serving)
    return replaced(layout, run)


def new_board(layout: Layout, start: Point2, end: Point2, storey: str) -> Board:
    """A board whose bars lie between two places on plan, one above another.

    It is fed at its beginning; its one way, closed at its foot, carries nothing yet.

    Raises
    ------
    UserError
        When the places are nearer than 0.4 m.
    """
    length = neat(dist(start, end))
    if length < 0.4:
        raise UserError("A board is at least 0.40 m long: click its other end.")
    floor = _floor_at(layout, start, storey)
    direction = degrees(atan2(end[1] - start[1], end[0] - start[0]))
    step = min(0.1, length / 8)
    order = _usual_labels(layout)
    poles = tuple(
        Pole(
            label=label,
            z=neat(floor + 1.9 - 0.1 * k),
            fed_at=neat(step * (k + 1)),
            shape=Bar(width=0.1, thickness=0.01),
        )
        for k, label in enumerate(order)
    )
    way = Way(
        name="1",
        position=neat(0.75 * length),
        dropper=Dropper(
            pitch=min(0.06, length / 12),
            setback=0.12,
            foot_z=neat(floor + 0.6),
            shape=Bar(width=0.03, thickness=0.005),
        ),
        closed=True,
    )
    number = sum(isinstance(unit, Board) for unit in layout.equipment) + 1
    return Board(
        id=unused_id(layout, f"board-{number}"),
        name=f"Board {number}",
        origin=(neat(start[0]), neat(start[1])),
        direction=neat(direction % 360.0),
        poles=poles,
        ways=(way,),
        footprint=_strip(start, direction, length, 0.25),
    )


def new_transformer(
    layout: Layout, at: Point2, storey: str, turn: float = 0.0
) -> Transformer:
    """A transformer of 1.80 × 1.20 m around a place, its terminals 0.15 m apart.

    Terminals stand in a row along `turn` (from +x), 1.75 m above the floor; the star
    lies under their middle.
    """
    floor = _floor_at(layout, at, storey)
    order = _usual_labels(layout)
    along = (cos(radians(turn)), sin(radians(turn)))
    first = -0.15 * (len(order) - 1) / 2

    def place(step: float, z: float) -> Point3:
        x, y = at[0] + step * along[0], at[1] + step * along[1]
        return (neat(x), neat(y), neat(floor + z))

    corner = (at[0] - 0.9 * along[0], at[1] - 0.9 * along[1])
    number = sum(isinstance(unit, Transformer) for unit in layout.equipment) + 1
    return Transformer(
        id=unused_id(layout, f"transformer-{number}"),
        name=f"Transformer {number}",
        terminals=tuple(
            Terminal(label=label, at=place(first + 0.15 * k, 1.75))
            for k, label in enumerate(order)
        ),
        star=place(0.0, 1.4),
        footprint=_strip(corner, turn, 1.8, 0.6),
    )


def _single(circuit: str, label: str) -> FreeSection:
    load = SlotLoad(circuit=circuit, label=label)
    return FreeSection(slots=(Slot(name=label, u=0.0, v=0.0, loads=(load,)),))


def _labels_of(section: Section) -> set[str]:
    return {load.label for slot in slots(section) for load in slot.loads}


def _usual_labels(layout: Layout) -> tuple[str, ...]:
    """Labels of the first circuit, else of a three-phase four-wire one."""
    return labels(layout.circuits[0] if layout.circuits else Circuit(id="none"))


def _floor_at(layout: Layout, at: Point2, storey: str) -> float:
    room = room_at(layout, at, storey)
    return floor_of(layout, storey) if room is None else room.floor_level


def _strip(
    start: Point2, direction: float, length: float, half_width: float
) -> tuple[Point2, ...]:
    """A rectangle about a line on plan. [m]"""
    c, s = cos(radians(direction)), sin(radians(direction))
    return tuple(
        (
            neat(start[0] + along * c - across * s),
            neat(start[1] + along * s + across * c),
        )
        for along, across in (
            (0.0, -half_width),
            (length, -half_width),
            (length, half_width),
            (0.0, half_width),
        )
    )


def _equipment_at(layout: Layout, run: Run, at: Point3) -> Equipment | None:
    """Equipment that an end lies on or in, and that has all its conductors' ends."""
    wanted = {label.partition(".")[0] for label in _labels_of(run.section)}
    for unit in layout.equipment:
        if not isinstance(unit, Board | Transformer) or len(unit.footprint) < 3:
            continue
        prefix = "incoming/" if isinstance(unit, Board) else ""
        names = equipment_parts(unit).sockets.keys()
        if not wanted or not {prefix + label for label in wanted} <= names:
            continue
        if Polygon(unit.footprint).buffer(1e-6).intersects(Point(at[:2])):
            return unit
    return None


def _is_fed(layout: Layout, board: Board) -> bool:
    """Whether a run is connected to the board's incoming side."""
    return any(
        end is not None and end.equipment == board.id and end.way in ("", "incoming")
        for run in layout.runs
        for end in (run.start, run.end)
    )


def _serving(board: Board, circuits: Carried) -> Board | None:
    """The board serving just these circuits; None when it serves others."""
    served = {share for way in board.ways for share in way.circuits}
    if served:
        return board if served == set(circuits) else None
    for k, way in enumerate(board.ways):
        if way.closed:
            return _with_way(board, k, replace(way, circuits=circuits))
    return None


def _with_way(board: Board, k: int, way: Way) -> Board:
    return replace(board, ways=(*board.ways[:k], way, *board.ways[k + 1 :]))
