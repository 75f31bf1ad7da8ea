"""Which end of a run goes where: to a joint, to an equipment, or nowhere.

Each slot end goes to the first joint that names it; else where its run's end is
connected; else it is free. What leads nowhere is told, not guessed.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

from engine.equipment import Board, Equipment, Transformer
from engine.equipment_conductors import (
    Parts,
    Socket,
    board_parts,
    loop_parts,
    transformer_parts,
)
from engine.layout import Layout
from engine.polylines import SIDES, Side
from engine.run_conductors import Same, called, run_geometry, terminal_label
from engine.runs import Connection, Joint, Run, SlotEnd, SlotLoad
from engine.sections import negative

#: One end of one conductor of a run: run id, side, index of the conductor.
End = tuple[str, Side, int]


@dataclass(frozen=True)
class LooseEnd:
    """A reference of a run's end or a joint that leads nowhere, as a sentence."""

    sentence: str
    items: tuple[str, ...]


@dataclass(frozen=True, eq=False)
class Fan:
    """Conductors (by index) of a run's end and the sockets that they go to."""

    run: Run
    side: Side
    equipment: str
    targets: tuple[tuple[int, Socket], ...]


class Attached:
    """What leaves a socket of an equipment through the runs and joints on it."""

    def __init__(self) -> None:
        self.outflow: list[SlotLoad] = []
        self.items: dict[str, None] = {}
        self.joint = ""


def equipment_parts(equipment: Equipment) -> Parts:
    """Conductors and sockets of an equipment, identical while it is the same value.

    Raises
    ------
    UserError
        When it cannot be built as described.
    """
    return _parts(Same(equipment))


@lru_cache(maxsize=1024)
def _parts(same: Same[Equipment]) -> Parts:
    equipment = same.value
    if isinstance(equipment, Transformer):
        return transformer_parts(equipment)
    if isinstance(equipment, Board):
        return board_parts(equipment)
    return loop_parts(equipment)


class Ends:
    """Where the ends of a layout's runs go, and what hangs on its equipment.

    Attributes
    ----------
    led : dict
        Ends that go somewhere, and the id of the joint or equipment they go to.
    fans : list of Fan
        What goes to equipment.
    joint_ends, joint_sockets : dict
        What meets in each joint, by its id.
    joint_of : dict
        The first joint of each run.
    loose : list of LooseEnd
        What leads nowhere.
    """

    def __init__(self, layout: Layout) -> None:
        self.runs = {run.id: run for run in layout.runs}
        self.equipment = {e.id: e for e in layout.equipment}
        self.parts = {e.id: equipment_parts(e) for e in layout.equipment}
        self.led: dict[End, str] = {}
        self.fans: list[Fan] = []
        self.joint_ends: dict[str, list[End]] = {}
        self.joint_sockets: dict[str, list[tuple[str, Socket]]] = {}
        self.joint_of: dict[str, str] = {}
        self.loose: list[LooseEnd] = []
        self._attached: dict[tuple[str, str], Attached] = {}
        for joint in layout.joints:
            self._claim(joint)
        for run in layout.runs:
            for side in SIDES:
                connection = run.start if side == "start" else run.end
                if connection is not None:
                    self._connect(run, side, connection)

    def at(self, equipment: str, socket: str) -> Attached:
        """What hangs on a socket."""
        return self._attached.setdefault((equipment, socket), Attached())

    def free(self, run: Run, side: Side) -> tuple[int, ...]:
        """Indices of a run's conductors whose end goes nowhere."""
        n = len(run_geometry(run).made)
        if run.start is run.end is None and run.id not in self.joint_of:
            return tuple(range(n))
        return tuple([i for i in range(n) if (run.id, side, i) not in self.led])

    def _claim(self, joint: Joint) -> None:
        """Give the joint the slot ends that no joint before it has named."""
        ends: list[End] = []
        sockets: list[tuple[str, Socket]] = []
        for slot_end in joint.ends:
            if slot_end.item in self.runs:
                ends.extend(self._run_ends(joint, slot_end))
            elif slot_end.item in self.equipment:
                sockets.extend(self._socket_end(joint, slot_end))
            else:
                self._say(
                    f"Joint {joint.title} names {slot_end.item}, which is no run or "
                    "equipment: remove that end, or name another.",
                    joint.id,
                )
        for run_id, _, _ in ends:
            self.joint_of.setdefault(run_id, joint.id)
        self.joint_ends[joint.id] = ends
        self.joint_sockets[joint.id] = sockets

    def _run_ends(self, joint: Joint, slot_end: SlotEnd) -> list[End]:
        made = run_geometry(self.runs[slot_end.item]).made
        side: Side = "start" if slot_end.end == "start" else "end"
        named = [
            i
            for i, slot in enumerate(made)
            if slot_end.slot in (slot.name, slot.name.rpartition("/")[0])
        ]
        if slot_end.end == "terminal" or not named:
            self._say(
                f"Joint {joint.title} names the {slot_end.end} of slot "
                f"{slot_end.slot} of run {slot_end.item}, which there is not: remove "
                "that end, or name another.",
                joint.id,
                slot_end.item,
            )
            return []
        found: list[End] = []
        for i in named:
            end: End = (slot_end.item, side, i)
            if end in self.led:
                self._say(
                    f"The {side} of slot {made[i].name} of run {slot_end.item} is "
                    f"named twice, by joint {self.led[end]} and by joint "
                    f"{joint.title}: remove it from one of them.",
                    joint.id,
                    slot_end.item,
                )
            else:
                self.led[end] = joint.id
                found.append(end)
        return found

    def _socket_end(self, joint: Joint, slot_end: SlotEnd) -> list[tuple[str, Socket]]:
        socket = self.parts[slot_end.item].sockets.get(slot_end.slot)
        if socket is None:
            self._say(
                f"Joint {joint.title} names {slot_end.slot} of {slot_end.item}, which "
                "there is not: remove that end, or name another.",
                joint.id,
                slot_end.item,
            )
            return []
        attached = self.at(slot_end.item, socket.name)
        if attached.joint:
            self._say(
                f"{slot_end.slot} of {slot_end.item} is named twice, by joint "
                f"{attached.joint} and by joint {joint.title}: remove it from one of "
                "them.",
                joint.id,
                slot_end.item,
            )
            return []
        attached.joint = joint.id
        attached.items[joint.id] = None
        return [(slot_end.item, socket)]

    def _connect(self, run: Run, side: Side, connection: Connection) -> None:
        equipment = self.equipment.get(connection.equipment)
        if equipment is None:
            self._say(
                f"The {side} of {called(run)} is connected to {connection.equipment}, "
                "which is no equipment: connect it to another, or leave it free.",
                run.id,
            )
            return
        made = run_geometry(run).made
        sockets = self.parts[equipment.id].sockets
        targets: list[tuple[int, Socket]] = []
        for i in self.free(run, side):
            label = connection.terminal or terminal_label(made[i])
            name = made[i].name
            socket = _socket(sockets, equipment, connection.way, label, name)
            if socket is None:
                where = f"way {connection.way} of " if connection.way else ""
                self._say(
                    f"The {side} of slot {name} of {called(run)} is connected to "
                    f"{where}{equipment.title}, which has no end {label}: name a "
                    "terminal, or join it elsewhere.",
                    run.id,
                    equipment.id,
                )
                continue
            self.led[(run.id, side, i)] = equipment.id
            attached = self.at(equipment.id, socket.name)
            attached.items[run.id] = None
            loads = made[i].loads
            attached.outflow.extend(loads if side == "start" else negative(loads))
            targets.append((i, socket))
        if targets:
            self.fans.append(Fan(run, side, equipment.id, tuple(targets)))

    def _say(self, sentence: str, *items: str) -> None:
        self.loose.append(LooseEnd(sentence, items))


def _socket(
    sockets: dict[str, Socket],
    equipment: Equipment,
    way: str,
    label: str,
    slot: str,
) -> Socket | None:
    """The socket of a label, or of the slot's own name where labels are numbered."""
    prefix = ""
    if isinstance(equipment, Board):
        prefix = f"{way or 'incoming'}/"
    return sockets.get(prefix + label) or sockets.get(prefix + slot)
