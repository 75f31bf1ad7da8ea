"""Conductors of one run, computed once for as long as the run is the same value."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Generic, TypeVar

import numpy as np

from engine.circuits import STRAY
from engine.conductor import Conductor
from engine.errors import UserError
from engine.polylines import Side, along_route, half_sides, links
from engine.routes import SHORTEST, Stations, stations
from engine.runs import Bar, Round, Run, Slot, SlotLoad
from engine.sections import negative, single_conductors, total

N_KEPT = 8192


Kept = TypeVar("Kept")


class Same(Generic[Kept]):
    """A value told from others by identity, as a key of a cache."""

    __slots__ = ("value",)

    def __init__(self, value: Kept) -> None:
        self.value = value

    def __hash__(self) -> int:
        return id(self.value)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Same) and self.value is other.value


@dataclass(frozen=True, eq=False)
class RunGeometry:
    """What follows from a run alone: its slots, one a conductor, and its stations."""

    made: tuple[Slot, ...]
    stations: Stations
    #: Whether it is one pole of something larger.
    is_one_pole: bool


@dataclass(frozen=True, eq=False)
class Closing:
    """The free conductor ends of one end of a run, joined in their middle.

    Attributes
    ----------
    links : tuple of Conductor
        Straight to the middle; none for a single end.
    middle : (3,) float
        [m]
    inflow : tuple of SlotLoad
        What the run brings there in all.
    """

    links: tuple[Conductor, ...]
    middle: tuple[float, float, float]
    inflow: tuple[SlotLoad, ...]


def called(run: Run) -> str:
    """How a sentence names the run."""
    if run.name in ("", run.id):
        return f"Run {run.id}"
    return f"Run {run.name} ({run.id})"


def run_geometry(run: Run) -> RunGeometry:
    """Slots and stations of a run.

    Raises
    ------
    UserError
        When the route or the section cannot be built as described.
    """
    return _geometry(Same(run))


def run_conductors(run: Run, group: str) -> tuple[Conductor, ...]:
    """Conductors of a run without its links; identical for an identical run."""
    return _conductors(Same(run), group)


def closing(run: Run, group: str, side: Side, which: tuple[int, ...]) -> Closing:
    """Join the conductor ends of these indices across the section."""
    conductors = run_conductors(run, group)
    free = [conductors[i] for i in which]
    index = 0 if side == "start" else -1
    middle = np.mean([conductor.path[index] for conductor in free], axis=0)
    inflow = total(load for conductor in free for load in conductor.loads)
    made: tuple[Conductor, ...] = ()
    if len(free) > 1:
        made = links(free, side, middle, "closing link", f"closing {side}")
    x, y, z = middle.tolist()
    return Closing(made, (x, y, z), inflow if side == "end" else negative(inflow))


def terminal_label(slot: Slot) -> str:
    """The label by which a slot finds its terminal: of its first load, or else what
    the slot is called."""
    if slot.loads:
        return slot.loads[0].label
    return slot.name.rpartition("/")[2].partition(".")[0]


@lru_cache(maxsize=N_KEPT)
def _geometry(same: Same[Run]) -> RunGeometry:
    run = same.value
    try:
        made = single_conductors(run.section)
        found = stations(run.route, run.turns)
        _refuse_short_legs(made, found)
    except UserError as error:
        raise UserError(f"{called(run)}: {error}") from None
    labels = {load.label for slot in made for load in slot.loads}
    is_one_pole = len(labels) == 1 and STRAY not in labels
    return RunGeometry(made=made, stations=found, is_one_pole=is_one_pole)


@lru_cache(maxsize=N_KEPT)
def _conductors(same: Same[Run], group: str) -> tuple[Conductor, ...]:
    geometry = _geometry(same)
    return along_route(geometry.made, geometry.stations, same.value.id, group)


def _refuse_short_legs(made: tuple[Slot, ...], found: Stations) -> None:
    offsets = np.array([(slot.u, slot.v) for slot in made])
    shapes = [s.shape for s in made if isinstance(s.shape, Round | Bar)]
    left = found.straights(offsets, half_sides(shapes)).min(axis=0)
    if left.min() >= SHORTEST:
        return
    leg = int(left.argmin())
    length = float(found.lengths[leg])
    raise UserError(
        f"leg {leg + 1} of the route is {length:.3f} m long, {length - left[leg]:.3f} "
        "m of which the section needs for the bends at its ends: make the leg longer, "
        "the bends wider or the section smaller."
    )
