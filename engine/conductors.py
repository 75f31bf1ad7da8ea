"""From a layout to its conductors in space, and the nodes where their currents meet.

Conductors do not depend on the load case. What refers to something that is not there
is left out here and told by `loose_ends`.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

import numpy as np

from engine.conductor import Bundled, Conductor, bundled
from engine.ends import End, Ends, LooseEnd
from engine.equipment import Board, Transformer
from engine.equipment_conductors import STAR, Point, Socket
from engine.errors import UserError
from engine.items import Point3
from engine.layout import Layout
from engine.polylines import SIDES, Role, Side, links, straight
from engine.routes import Array
from engine.run_conductors import (
    N_KEPT,
    Same,
    closing,
    run_conductors,
    run_geometry,
)
from engine.runs import Joint, Run, SlotLoad
from engine.sections import negative, total

__all__ = [
    "Conductor",
    "LooseEnd",
    "Node",
    "conductors",
    "loose_ends",
    "nodes",
    "run_problem",
]


@dataclass(frozen=True)
class Node:
    """A place where the currents that meet must sum to zero.

    Attributes
    ----------
    kind : str
        "joint", "free end" of a run, "terminal" or "star" of a transformer, "way" or
        "board" (its incoming side).
    place : (3,) float
        Where it is. [m]
    items : tuple of str
        Ids of what meets there.
    inflow : tuple of SlotLoad
        Sum of the currents into the node; empty where it vanishes for any currents.
    links : bool
        Whether assumed closing links were made.
    """

    kind: Literal["joint", "free end", "terminal", "star", "way", "board"]
    place: Point3
    items: tuple[str, ...]
    inflow: tuple[SlotLoad, ...]
    links: bool = False


def conductors(layout: Layout) -> Bundled:
    """Every conductor of the layout: of runs, links and equipment.

    An unchanged run gives the identical bundle of conductors again.

    Raises
    ------
    UserError
        When a run or an equipment cannot be built as described, or a joint leaves
        the currents of two transformer terminals open.
    """
    return _network(Same(layout)).conductors


def nodes(layout: Layout) -> tuple[Node, ...]:
    """Every place where Kirchhoff's current law must hold; errors as `conductors`."""
    return _network(Same(layout)).nodes


def loose_ends(layout: Layout) -> tuple[LooseEnd, ...]:
    """References that lead nowhere and were left out; errors as `conductors`."""
    return _network(Same(layout)).loose


def run_problem(layout: Layout, run: Run) -> str | None:
    """The sentence with which `conductors` would refuse the run, or None."""
    try:
        run_geometry(run)
    except UserError as error:
        return str(error)
    return None


@dataclass(frozen=True, eq=False)
class _Network:
    conductors: Bundled
    nodes: tuple[Node, ...]
    loose: tuple[LooseEnd, ...]


@lru_cache(maxsize=16)
def _network(same: Same[Layout]) -> _Network:
    builder = _Builder(same.value)
    builder.fan_out()
    for joint in same.value.joints:
        builder.make_joint(joint)
    builder.close_free_ends()
    builder.close_boards()
    builder.close_transformers()
    return _Network(
        bundled(builder.bundles), tuple(builder.nodes), tuple(builder.ends.loose)
    )


@dataclass(frozen=True, eq=False)
class _FreeEnd:
    links: tuple[Conductor, ...]
    node: Node


@lru_cache(maxsize=2 * N_KEPT)
def _free_end(
    run: Same[Run], group: str, side: Side, which: tuple[int, ...]
) -> _FreeEnd:
    """What closes an end of a run; identical while the run is the same value."""
    made = closing(run.value, group, side, which)
    inflow, is_closed = total(made.inflow), len(which) > 1
    node = Node("free end", made.middle, (run.value.id,), inflow, is_closed)
    return _FreeEnd(made.links, node)


class _Builder:
    """Gathers the conductors and nodes of one layout, step by step."""

    def __init__(self, layout: Layout) -> None:
        self.layout = layout
        self.ends = Ends(layout)
        self.nodes: list[Node] = []
        self.groups = {run.id: self._group(run) for run in layout.runs}
        self.of_run = {
            run.id: run_conductors(run, self.groups[run.id]) for run in layout.runs
        }
        self.bundles = list(self.of_run.values())
        for equipment in layout.equipment:
            self.bundles.append(self.ends.parts[equipment.id].conductors)

    def _group(self, run: Run) -> str:
        """Poles drawn as runs of their own switch together with what joins them."""
        if not run_geometry(run).is_one_pole:
            return run.id
        for connection in (run.start, run.end):
            if connection is not None and connection.equipment in self.ends.equipment:
                return connection.equipment
        return self.ends.joint_of.get(run.id, run.id)

    def fan_out(self) -> None:
        """Lead the ends of connected runs straight to their terminals."""
        for fan in self.ends.fans:
            led = [self.of_run[fan.run.id][i] for i, _ in fan.targets]
            places = np.array([socket.at for _, socket in fan.targets])
            name = f"{fan.side} to {fan.equipment}"
            self.bundles.append(links(led, fan.side, places, "joint link", name))

    def make_joint(self, joint: Joint) -> None:
        """Lead the joint's ends to its place, and add up their currents."""
        ends = self.ends.joint_ends[joint.id]
        sockets = self.ends.joint_sockets[joint.id]
        if not ends and not sockets:
            return
        at = self._place(joint, ends, sockets)
        inflow: list[SlotLoad] = []
        for run_id, side in dict.fromkeys((run_id, side) for run_id, side, _ in ends):
            made = [self.of_run[r][i] for r, s, i in ends if (r, s) == (run_id, side)]
            name = f"{side} to {joint.id}"
            self.bundles.append(links(made, side, np.array(at), "joint link", name))
            for conductor in made:
                loads = conductor.loads
                inflow.extend(loads if side == "end" else negative(loads))
        open_sockets = [(e, s) for e, s in sockets if s.supplies is None]
        if len(open_sockets) > 1:
            raise UserError(
                f"Joint {joint.title} joins {len(open_sockets)} transformer terminals, "
                "and how they share its current is not said: lead a run from each "
                "terminal to the joint."
            )
        for equipment, socket in sockets:
            if socket.supplies is not None:
                supply = self._residual(equipment, socket)
                self._lead_socket(equipment, socket, at, joint.id, supply)
                inflow.extend(supply)
        for equipment, socket in open_sockets:
            supply = negative(total(inflow))
            self.ends.at(equipment, socket.name).outflow.extend(supply)
            self._lead_socket(equipment, socket, at, joint.id, supply)
            inflow.extend(supply)
        items = [joint.id, *(run for run, _, _ in ends), *(e for e, _ in sockets)]
        self._add_node("joint", at, items, inflow)

    def _place(
        self, joint: Joint, ends: list[End], sockets: list[tuple[str, Socket]]
    ) -> Point:
        if joint.at is not None:
            return joint.at
        points = [
            self.of_run[run][i].path[0 if side == "start" else -1]
            for run, side, i in ends
        ]
        points.extend(np.array(socket.at) for _, socket in sockets)
        return _middle(points)

    def close_free_ends(self) -> None:
        """Join the ends of a run that go nowhere across its section."""
        for run in self.layout.runs:
            for side in SIDES:
                free = self.ends.free(run, side)
                if free:
                    end = _free_end(Same(run), self.groups[run.id], side, free)
                    self.bundles.append(end.links)
                    self.nodes.append(end.node)

    def close_boards(self) -> None:
        """Sum the currents at a board's ends; join what goes no further."""
        for board in self.layout.equipment:
            if not isinstance(board, Board):
                continue
            parts = self.ends.parts[board.id]
            inner = {name for way in parts.ways for name in way.sockets}
            self._close_sockets(
                board, "incoming", [s for s in parts.sockets if s not in inner], None
            )
            for way in parts.ways:
                self._close_sockets(board, way.name, way.sockets, way.closed_at)

    def _close_sockets(
        self, board: Board, name: str, names: Sequence[str], closed_at: Point | None
    ) -> None:
        kind: Literal["board", "way"] = "board" if name == "incoming" else "way"
        sockets = [self.ends.parts[board.id].sockets[each] for each in names]
        sockets = [s for s in sockets if not self.ends.at(board.id, s.name).joint]
        taken = [s for s in sockets if self.ends.at(board.id, s.name).items]
        free = [s for s in sockets if s not in taken and s.supplies]
        role: Role = "closing link"
        if closed_at is not None:
            role, taken, free = "equipment", [], sockets
        for socket in taken:
            items = [board.id, *self.ends.at(board.id, socket.name).items]
            inflow = self._residual(board.id, socket)
            self._add_node(kind, socket.at, items, inflow)
        if not any(self._residual(board.id, socket) for socket in free):
            return
        at = closed_at or _middle([np.array(socket.at) for socket in free])
        inflow = ()
        for socket in free:
            supply = self._residual(board.id, socket)
            if closed_at is not None or len(free) > 1:
                self._lead_socket(board.id, socket, at, f"closing {name}", supply, role)
            inflow = (*inflow, *supply)
        assumed = closed_at is None and len(free) > 1
        self._add_node(kind, at, [board.id], inflow, links=assumed)

    def close_transformers(self) -> None:
        """Lead the current of each terminal from the star."""
        for transformer in self.layout.equipment:
            if not isinstance(transformer, Transformer):
                continue
            inflow: list[SlotLoad] = []
            star_items: list[str] = [transformer.id]
            for name, socket in self.ends.parts[transformer.id].sockets.items():
                attached = self.ends.at(transformer.id, name)
                loads = total(attached.outflow)
                inflow.extend(negative(loads))
                star_items.extend(attached.items)
                if name == STAR:
                    continue
                self.bundles.append(
                    straight(
                        f"{transformer.id}/{name}",
                        transformer.star,
                        socket.at,
                        loads,
                        item=transformer.id,
                        slot=name,
                        shape=socket.shape,
                    )
                )
                if attached.items:
                    items = [transformer.id, *attached.items]
                    self._add_node("terminal", socket.at, items, ())
            if inflow:
                self._add_node("star", transformer.star, star_items, inflow)

    def _residual(self, equipment: str, socket: Socket) -> tuple[SlotLoad, ...]:
        """Current that comes out of a socket and is not led on by runs."""
        attached = self.ends.at(equipment, socket.name)
        return total((*(socket.supplies or ()), *negative(attached.outflow)))

    def _lead_socket(
        self,
        equipment: str,
        socket: Socket,
        at: Point,
        name: str,
        supply: tuple[SlotLoad, ...],
        role: Role = "joint link",
    ) -> None:
        self.bundles.append(
            straight(
                f"{equipment}/{name}/{socket.name}",
                socket.at,
                at,
                supply,
                item=equipment,
                slot=socket.name,
                shape=socket.shape,
                role=role,
                reference=socket.axes,
            )
        )

    def _add_node(
        self,
        kind: Literal["joint", "free end", "terminal", "star", "way", "board"],
        place: Point,
        items: Iterable[str],
        inflow: Iterable[SlotLoad],
        *,
        links: bool = False,
    ) -> None:
        unique = tuple(dict.fromkeys(items))
        self.nodes.append(Node(kind, place, unique, total(inflow), links))


def _middle(points: Sequence[Array]) -> Point:
    x, y, z = np.mean(points, axis=0).tolist()
    return (x, y, z)
