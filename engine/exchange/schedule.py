"""Conductor schedules: a CSV of conductors and their currents, as a layout.

Every conductor carries exactly what its rows say: nothing is shared, summed or solved.
Frequencies that are whole multiples of the lowest one belong to its base, as harmonics
with known angles; others keep a base of their own, and direct current has base 0.
"""

from __future__ import annotations

import hashlib
import itertools
import math
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path

from engine.circuits import Circuit, ConductorCurrent, DirectCurrents, SpectrumLine
from engine.edits import readable_id
from engine.errors import UserError
from engine.exchange.schedule_conductors import (
    MOST_VERTICES,
    ListedConductor,
    StatedCurrent,
    bend,
    listed_conductors,
)
from engine.exchange.schedule_text import MAX_BYTES, rows
from engine.items import Point3, SourceDocument, TitleData, ValueOrigin
from engine.layout import Layout, Settings
from engine.routes import SHARPEST_BEND
from engine.runs import FreeSection, Joint, Round, Run, Slot, SlotEnd, SlotLoad
from engine.value_faults import told

#: Ends nearer than this in x, y and z are one place. [m]
SAME_PLACE = 1e-6
#: What the layout's types allow of each.
_MOST_CURRENTS = 200
_MOST_LINES = 500
_MOST_RUNS = 20_000
_MOST_CIRCUITS = 5000
_MOST_ENDS = 400

_DOCUMENT = "schedule"


def read_schedule(path: str | Path) -> Layout:
    """The layout that a conductor schedule describes.

    Raises
    ------
    UserError
        When it cannot be read; every fault is named with its line.
    """
    path = Path(path)
    try:
        if path.exists() and not path.is_file():
            raise UserError(f"{path.name} was not read: it is not a file.")
        with path.open("rb") as file:
            data = file.read(MAX_BYTES + 1)
    except FileNotFoundError as error:
        raise UserError(f"{path.name} was not read: there is no such file.") from error
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or error
        raise UserError(f"{path.name} was not read: {reason}.") from error
    return schedule_layout(data, path.name)


def schedule_layout(data: bytes, where: str) -> Layout:
    """The layout of a schedule given as the bytes of a file named `where`.

    Conductors whose ends meet within a micrometre are joined, so that their currents
    are checked to close there. A conductor without a size is round with the default
    diameter, which is an assumption.

    Raises
    ------
    UserError
        Names every fault with its line.
    """
    listed = listed_conductors(rows(data, where), f"{where} was not read")
    taken = {"title", "settings", _DOCUMENT}
    circuits, loads = _circuits(listed, taken)
    runs: list[Run] = []
    for conductor in listed:
        runs.extend(_runs(conductor, loads[conductor.name], taken))
    joints = tuple(_joints(runs, taken))
    _check_counts(circuits, runs, joints, f"{where} was not read")
    frequencies = [c.base_frequency for c in circuits if c.base_frequency > 0]
    return Layout(
        title=TitleData(id="title", project=Path(where).stem[:400]),
        settings=Settings(frequency=min(frequencies)) if frequencies else Settings(),
        documents=(
            SourceDocument(
                id=_DOCUMENT,
                name="Conductor schedule",
                file_name=where[:400],
                sha256=hashlib.sha256(data).hexdigest(),
            ),
        ),
        circuits=tuple(circuits),
        runs=tuple(runs),
        joints=joints,
    )


def _bases(frequencies: Iterable[float]) -> dict[float, float]:
    """The base of each frequency: the lowest of which it is a whole multiple."""
    bases: dict[float, float] = {}
    for frequency in sorted(set(frequencies)):
        candidates = [base for base in dict.fromkeys(bases.values()) if base > 0]
        bases[frequency] = next(
            (base for base in candidates if _is_multiple(frequency, base)), frequency
        )
    return bases


def _is_multiple(frequency: float, base: float) -> bool:
    order = round(frequency / base)
    return abs(frequency - order * base) <= 1e-6


def _circuits(
    listed: Sequence[ListedConductor], taken: set[str]
) -> tuple[list[Circuit], dict[str, list[SlotLoad]]]:
    """Free circuits that state every current, and what each conductor carries.

    Splitting a named circuit in several items changes nothing: those of one base add
    as phasors.
    """
    bases = _bases(s.frequency for c in listed for s in c.currents)
    labels = _own_labels(listed)
    parts: dict[tuple[str, float], dict[str, list[StatedCurrent]]] = {}
    for conductor in listed:
        for stated in conductor.currents:
            label = labels[conductor.name, stated.circuit, stated.label]
            part = parts.setdefault((stated.circuit, bases[stated.frequency]), {})
            part.setdefault(label, []).append(stated)
    circuits: list[Circuit] = []
    ids: dict[tuple[str, float, str], str] = {}
    seen: set[str] = set()
    for (name, base), by_label in parts.items():
        suffix = f" {base:g} Hz" if base else " DC"
        stem = name[:60] + suffix if name in seen else name
        seen.add(name)
        for chunk in _chunks(by_label):
            item_id = readable_id(stem, taken)
            taken.add(item_id)
            circuits.append(_circuit(item_id, name, base, chunk))
            ids.update({(name, base, label): item_id for label in chunk})
    loads: dict[str, list[SlotLoad]] = {}
    for conductor in listed:
        carried = loads.setdefault(conductor.name, [])
        for stated in conductor.currents:
            label = labels[conductor.name, stated.circuit, stated.label]
            key = (stated.circuit, bases[stated.frequency], label)
            load = SlotLoad(circuit=ids[key], label=label)
            if load not in carried:
                carried.append(load)
    return circuits, loads


def _own_labels(listed: Sequence[ListedConductor]) -> dict[tuple[str, str, str], str]:
    """A label of its own for each conductor of a circuit; the stated one if it is."""
    users: dict[tuple[str, str], dict[str, None]] = {}
    for conductor in listed:
        for stated in conductor.currents:
            users.setdefault((stated.circuit, stated.label), {})[conductor.name] = None
    taken = {key for key, names in users.items() if len(names) == 1}
    labels: dict[tuple[str, str, str], str] = {}
    for (circuit, label), names in users.items():
        for name in names:
            own = label
            if len(names) > 1:
                own = _free_label(f"{label} ({name})", circuit, taken)
                taken.add((circuit, own))
            labels[name, circuit, label] = own
    return labels


def _free_label(wanted: str, circuit: str, taken: set[tuple[str, str]]) -> str:
    if len(wanted) <= 40 and (circuit, wanted) not in taken:
        return wanted
    numbered = (f"{wanted[:32]} {number}" for number in itertools.count(2))
    return next(label for label in numbered if (circuit, label) not in taken)


def _chunks(
    by_label: dict[str, list[StatedCurrent]],
) -> Iterator[dict[str, list[StatedCurrent]]]:
    """Parts of a circuit that are small enough for one item."""
    chunk: dict[str, list[StatedCurrent]] = {}
    lines = 0
    for label, currents in by_label.items():
        full = len(chunk) == _MOST_CURRENTS or lines + len(currents) > _MOST_LINES
        if chunk and full:
            yield chunk
            chunk, lines = {}, 0
        chunk[label] = currents
        lines += len(currents)
    yield chunk


def _circuit(
    item_id: str, name: str, base: float, by_label: dict[str, list[StatedCurrent]]
) -> Circuit:
    currents: list[ConductorCurrent] = []
    spectrum: list[SpectrumLine] = []
    for label, all_stated in by_label.items():
        at_base = next((s for s in all_stated if s.frequency == base), None)
        rms, angle = (at_base.current, at_base.angle) if at_base else (0.0, 0.0)
        currents.append(ConductorCurrent(label=label, rms=rms, angle=angle))
        for stated in all_stated:
            if stated.frequency != base:
                # The rule of spectra: angle = h · (angle of the fundamental) + offset.
                turned = stated.frequency / base * math.remainder(angle, 360.0)
                offset = math.remainder(stated.angle - turned, 360.0)
                line = SpectrumLine(
                    frequency=stated.frequency,
                    label=label,
                    rms=stated.current,
                    offset=offset,
                )
                spectrum.append(line)
    fields = ("base_frequency", "demand", *(("spectrum",) if spectrum else ()))
    return Circuit(
        id=item_id,
        name=name,
        origins=tuple(_origin(field) for field in fields),
        supply="free",
        base_frequency=base,
        demand=DirectCurrents(currents=tuple(currents)),
        spectrum=tuple(spectrum),
        neutral="none",
    )


def _origin(field: str, page: str = "") -> ValueOrigin:
    return ValueOrigin(field=field, kind="document", document=_DOCUMENT, page=page)


def _runs(
    conductor: ListedConductor, loads: Sequence[SlotLoad], taken: set[str]
) -> Iterator[Run]:
    """The conductor as one run, or as several: too many vertices, or sharp bends."""
    page = f"lines {conductor.first_line} to {conductor.last_line}"
    origins = [_origin("route", page)]
    if conductor.shape is not None:
        origins.append(_origin("section", page))
    slot = Slot(
        name=conductor.currents[0].label,
        u=0.0,
        v=0.0,
        shape=conductor.shape or Round(),
        loads=tuple(loads),
    )
    for route in _routes(conductor.path):
        run_id = readable_id(conductor.name, taken)
        taken.add(run_id)
        yield Run(
            id=run_id,
            name=conductor.name,
            origins=tuple(origins),
            kind="free conductor",
            route=route,
            section=FreeSection(slots=(slot,)),
        )


def _routes(path: tuple[Point3, ...]) -> Iterator[tuple[Point3, ...]]:
    """The path in parts that a run can take; a thin wire may bend as it likes."""
    first = 0
    for i in range(1, len(path)):
        is_last = i == len(path) - 1
        if (
            is_last
            or i - first == MOST_VERTICES - 1
            or bend(*path[i - 1 : i + 2]) > SHARPEST_BEND
        ):
            yield path[first : i + 1]
            first = i


def _joints(runs: Sequence[Run], taken: set[str]) -> Iterator[Joint]:
    """Joints where ends meet, a loop's own start and end among them."""
    number = itertools.count(1)
    for ends in _meeting([(run, end) for run in runs for end in (0, -1)]):
        joint_id = f"joint-{next(number)}"
        while joint_id in taken:
            joint_id = f"joint-{next(number)}"
        taken.add(joint_id)
        yield Joint(
            id=joint_id,
            ends=tuple(_slot_end(run, end) for run, end in ends),
            at=ends[0][0].route[ends[0][1]],
        )


def _slot_end(run: Run, end: int) -> SlotEnd:
    assert isinstance(run.section, FreeSection)
    slot = run.section.slots[0].name
    return SlotEnd(item=run.id, slot=slot, end="start" if end == 0 else "end")


def _meeting(ends: Sequence[tuple[Run, int]]) -> Iterator[list[tuple[Run, int]]]:
    """Groups of two and more ends at one place, in the order of the ends.

    An end joins the group of the first end near it, found through a grid of cells.
    """
    cells: dict[tuple[int, int, int], list[int]] = {}
    groups: list[list[tuple[Run, int]]] = []
    for run, end in ends:
        place = run.route[end]
        cell = tuple(math.floor(c / SAME_PLACE) for c in place)
        near = (
            group
            for step in itertools.product((0, -1, 1), repeat=3)
            for group in cells.get(
                (cell[0] + step[0], cell[1] + step[1], cell[2] + step[2]), ()
            )
            if _is_near(place, groups[group][0])
        )
        found = next(near, None)
        if found is None:
            found = len(groups)
            groups.append([])
            cells.setdefault((cell[0], cell[1], cell[2]), []).append(found)
        groups[found].append((run, end))
    yield from (group for group in groups if len(group) > 1)


def _is_near(place: Point3, other: tuple[Run, int]) -> bool:
    there = other[0].route[other[1]]
    return all(abs(a - b) <= SAME_PLACE for a, b in zip(place, there, strict=True))


def _check_counts(
    circuits: Sequence[Circuit],
    runs: Sequence[Run],
    joints: Sequence[Joint],
    opening: str,
) -> None:
    faults: list[str] = []
    if len(runs) > _MOST_RUNS:
        faults.append(f"it has {len(runs):,} conductors; {_MOST_RUNS:,} are possible")
    if len(circuits) > _MOST_CIRCUITS:
        faults.append(
            f"it has {len(circuits):,} circuits; {_MOST_CIRCUITS:,} are possible"
        )
    for joint in joints:
        if len(joint.ends) > _MOST_ENDS:
            faults.append(
                f"{len(joint.ends)} conductors meet at {joint.at}; "
                f"{_MOST_ENDS} are possible"
            )
    for circuit in circuits:
        if len(circuit.spectrum) > _MOST_LINES:
            faults.append(
                f'a conductor of circuit "{circuit.name}" has more than '
                f"{_MOST_LINES} frequencies"
            )
    if faults:
        raise told(opening, faults)
