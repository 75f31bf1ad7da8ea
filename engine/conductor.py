"""A conductor in space: what the field is computed from, and what it carries."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import chain, groupby
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from engine.runs import Bar, Round, SlotLoad


@dataclass(frozen=True, eq=False)
class Conductor:
    """A polyline with a section, and the loads whose sum flows along it.

    Attributes
    ----------
    key : str
        Unique and readable: "riser/L1.2", "link/closing start/L1".
    item : str
        Id of the layout item that made it.
    slot : str
        Name of the slot (or terminal, or way); of a multicore's core "slot/core".
    role : str
        What it stands for; closing links are assumed.
    path : (n, 3) float64
        Axis of the conductor, read-only; consecutive vertices differ. [m]
    axes : (n, 2, 3) float64
        Displacement at each vertex per metre of offset along the shape's width and
        along its thickness. It lies in the mitre plane at bends, so that
        ``path + a * axes[:, 0] + b * axes[:, 1]`` is the filament at (a, b) in the
        section on every leg. A bar's turn is already in it.
    shape : Round or Bar
        The section; the current is even over it.
    loads : tuple of SlotLoad
        The current along the path is the sum of share x phasor(circuit, label).
    group : str
        Conductors of a group switch discretisation together.
    """

    key: str
    item: str
    slot: str
    role: Literal["run", "joint link", "closing link", "equipment"]
    path: NDArray[np.float64]
    axes: NDArray[np.float64]
    shape: Round | Bar
    loads: tuple[SlotLoad, ...]
    group: str


class Bundled(tuple[Conductor, ...]):
    """Conductors that know which of them were made together.

    Attributes
    ----------
    bundles : tuple of tuples of Conductor
        In the same order, none empty; of one group, item and role each. What did not
        change in an edit comes as the identical bundle again, so that nothing need be
        asked of each of its conductors.
    """

    bundles: tuple[tuple[Conductor, ...], ...]


def bundled(bundles: Iterable[tuple[Conductor, ...]]) -> Bundled:
    """All conductors of some bundles; empty ones are left out."""
    kept = tuple(bundle for bundle in bundles if bundle)
    made = Bundled(chain.from_iterable(kept))
    made.bundles = kept
    return made


def bundles_of(conductors: Sequence[Conductor]) -> tuple[tuple[Conductor, ...], ...]:
    """Conductors by what they were made together with, in their order."""
    if isinstance(conductors, Bundled):
        return conductors.bundles
    return tuple(
        tuple(together)
        for _, together in groupby(conductors, lambda c: (c.group, c.item, c.role))
    )
