"""The rows of a conductor schedule as conductors with all their currents.

A conductor may come again at another frequency, with the same vertices and size.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from engine.exchange.schedule_text import Row
from engine.items import Point3
from engine.routes import SHARPEST_BEND
from engine.runs import Bar, Round
from engine.value_faults import told

#: Of one run; a round conductor with more becomes several runs.
MOST_VERTICES = 500

#: A bend this near to 180° turns straight back. [degrees]
_STRAIGHT_BACK = 1e-4


@dataclass(frozen=True)
class StatedCurrent:
    """A conductor's current at one frequency."""

    circuit: str
    label: str
    frequency: float
    current: float
    angle: float


@dataclass(frozen=True)
class ListedConductor:
    """A conductor of the schedule with all its currents."""

    name: str
    path: tuple[Point3, ...]
    shape: Round | Bar | None
    currents: tuple[StatedCurrent, ...]
    first_line: int
    last_line: int


def listed_conductors(schedule: Sequence[Row], opening: str) -> list[ListedConductor]:
    """The conductors, in the order in which they first come.

    Raises
    ------
    UserError
        Begins with `opening` and names every fault with its line.
    """
    faults: list[str] = []
    blocks: dict[str, dict[float, list[Row]]] = {}
    by_block = itertools.groupby(schedule, lambda row: (row.conductor, row.frequency))
    for (name, frequency), group in by_block:
        block = list(group)
        earlier = blocks.setdefault(name, {})
        if frequency in earlier:
            faults.append(
                f'line {block[0].line}: conductor "{name}" comes again at '
                f"{frequency:g} Hz (first in line {earlier[frequency][0].line}); its "
                "rows must follow each other, and each frequency may come once"
            )
            continue
        faults.extend(_block_faults(block))
        faults.extend(_bend_faults(block))
        if earlier:
            faults.extend(_repeat_faults(next(iter(earlier.values())), block))
        earlier[frequency] = block
        if isinstance(block[0].shape, Bar) and len(block) > MOST_VERTICES:
            faults.append(
                f'line {block[0].line}: conductor "{name}" is a bar of more than '
                f"{MOST_VERTICES} vertices; divide it into several conductors"
            )
    if faults:
        raise told(opening, faults)
    return [_listed(name, list(found.values())) for name, found in blocks.items()]


def _block_faults(block: Sequence[Row]) -> Iterator[str]:
    """What is wrong within one conductor's rows at one frequency."""
    first = block[0]
    if len(block) < 2:
        yield (
            f'line {first.line}: conductor "{first.conductor}" has one vertex only at '
            f"{first.frequency:g} Hz; it needs at least two"
        )
    for row, before in zip(block[1:], block, strict=False):
        if row.at == before.at:
            yield f"line {row.line}: the vertex is the same as in line {before.line}"
        for column, here, there in (
            ("circuit", row.circuit, first.circuit),
            ("label", row.label, first.label),
            ("current_A", row.current, first.current),
            ("angle_deg", row.angle, first.angle),
            ("size", row.shape, first.shape),
        ):
            if here != there:
                yield (
                    f"line {row.line}: {column} differs from line {first.line}, the "
                    f'first of conductor "{row.conductor}" at {row.frequency:g} Hz'
                )


def bend(before: Point3, at: Point3, after: Point3) -> float:
    """Change of direction at a vertex; 0 beside a leg without length. [degrees]"""
    there = [b - a for a, b in zip(before, at, strict=True)]
    on = [b - a for a, b in zip(at, after, strict=True)]
    across = math.hypot(
        there[1] * on[2] - there[2] * on[1],
        there[2] * on[0] - there[0] * on[2],
        there[0] * on[1] - there[1] * on[0],
    )
    return math.degrees(
        math.atan2(across, sum(a * b for a, b in zip(there, on, strict=True)))
    )


def _bend_faults(block: Sequence[Row]) -> Iterator[str]:
    """Bends that a conductor cannot make: back along itself, or too sharp for a bar."""
    for before, row, after in zip(block, block[1:], block[2:], strict=False):
        angle = bend(before.at, row.at, after.at)
        if angle > 180.0 - _STRAIGHT_BACK:
            yield (
                f'line {after.line}: conductor "{row.conductor}" goes straight back '
                f"from line {row.line}; remove the vertex, or divide the conductor"
            )
        elif isinstance(row.shape, Bar) and angle > SHARPEST_BEND + 1e-6:
            yield (
                f'line {row.line}: the bar "{row.conductor}" bends by {angle:.0f}°, '
                f"more than {SHARPEST_BEND:.0f}°; draw it as two bends, or divide it "
                "into two conductors"
            )


def _repeat_faults(first: Sequence[Row], again: Sequence[Row]) -> Iterator[str]:
    """What differs where a conductor comes again at another frequency."""
    name, start = first[0].conductor, first[0].line
    if len(first) != len(again):
        yield (
            f"lines {again[0].line} to {again[-1].line}: conductor "
            f'"{name}" has {len(again)} vertices here, but {len(first)} in lines '
            f"{start} to {first[-1].line}; at every frequency it has the same"
        )
        return
    for row, before in zip(again, first, strict=True):
        if row.at != before.at:
            yield (
                f'line {row.line}: conductor "{name}" has another vertex here than in '
                f"line {before.line}; at every frequency it has the same"
            )
    if again[0].shape != first[0].shape:
        yield f"line {again[0].line}: size differs from line {start}"


def _listed(name: str, blocks: Sequence[Sequence[Row]]) -> ListedConductor:
    first = blocks[0]
    return ListedConductor(
        name=name,
        path=tuple(row.at for row in first),
        shape=first[0].shape,
        currents=tuple(
            StatedCurrent(
                b[0].circuit, b[0].label, b[0].frequency, b[0].current, b[0].angle
            )
            for b in blocks
        ),
        first_line=first[0].line,
        last_line=blocks[-1][-1].line,
    )
