"""Flux density and vector potential of conductors at points, and responses per ampere.

Accuracy: the section's even current is integrated to a thousandth of the resultant
of a closed group, from a millimetre off the surface outwards. On a filament itself
that filament adds zero; such a point lies inside a conductor, where no value is
assessable: `masks.inside` flags it.
Iron, screens, eddy currents and skin effect are not modelled.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from engine.conductor import Conductor
from engine.errors import Cancelled, Progress
from engine.field.cache import Key, ResponseCache
from engine.field.filaments import Filaments
from engine.field.kernel import Floats, Integers, tile_responses, tile_sum
from engine.field.many import interpolated_flux_density, pays
from engine.field.points import as_points, digest
from engine.field.tiles import Tiling, complex_currents, over_tiles, tiling_of
from engine.runs import Bar

Phasors = NDArray[np.complex128]

_BLOCK = 4096  # points of one matrix product


def flux_density(
    conductors: Sequence[Conductor],
    currents: Phasors,
    points: Floats,
    *,
    cache: ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> Phasors:
    """Flux-density phasors of currents in free space.

    Parameters
    ----------
    conductors : sequence of Conductor
        m of them.
    currents : (c, m) complex
        RMS phasors along each conductor's path, per component. [A]
    points : (n, 3) float
        [m]
    cache : ResponseCache, optional
        Where responses are looked up and left. Without one, or when the responses
        would exceed its limit, the field is summed without keeping them; for many
        conductors at many points far ones are interpolated, with a proven bound of a
        fifth of what the engine allows (see `many`).
    cancelled, progress
        Called from this thread.

    Returns
    -------
    (c, n, 3) complex
        RMS phasors of the three components. [T]

    Raises
    ------
    ValueError
        When an array has another shape or is not finite.
    ComputationCancelled
        When `cancelled` says so.
    """
    checked = complex_currents(conductors, currents)
    places = as_points(points)
    needed = len(conductors) * places.nbytes
    room = 0 if cache is None else cache.limit
    # Where it pays, responses that would push out many others are not worth the time.
    if needed > room // 8 and pays(conductors, len(places)):
        return interpolated_flux_density(
            conductors, checked, places, cancelled=cancelled, progress=progress
        ).b
    tiling = tiling_of(conductors, places)
    if cache is None or needed > room:
        return _direct(tiling, checked, False, cancelled, progress)
    rows = _responses(tiling, cache, cancelled, progress)
    out = np.zeros((len(checked), len(tiling.points), 3), np.complex128)
    if not rows:
        return out
    for first in range(0, len(tiling.points), _BLOCK):
        block = np.stack([row[first : first + _BLOCK] for row in rows])
        flat = block.reshape(len(rows), -1)
        part = out[:, first : first + _BLOCK]
        part.real = (checked.real @ flat).reshape(part.shape)
        part.imag = (checked.imag @ flat).reshape(part.shape)
    return out


def responses(
    conductors: Sequence[Conductor],
    points: Floats,
    *,
    cache: ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> Floats:
    """Flux density per ampere of each conductor: geometry alone.

    Parameters and errors as `flux_density`.

    Returns
    -------
    (m, n, 3) float64
        [T/A]
    """
    tiling = tiling_of(conductors, points)
    rows = _responses(tiling, cache, cancelled, progress)
    if not rows:
        return np.zeros((0, len(tiling.points), 3))
    return np.stack(rows)


def vector_potential(
    conductors: Sequence[Conductor],
    currents: Phasors,
    points: Floats,
    *,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> Phasors:
    """Vector-potential phasors: its circulation is the flux through a loop.

    Parameters and errors as `flux_density`. Of currents that are not closed it is one
    choice of many, as their field is.

    Returns
    -------
    (c, n, 3) complex
        [Wb/m]
    """
    checked = complex_currents(conductors, currents)
    tiling = tiling_of(conductors, points)
    return _direct(tiling, checked, True, cancelled, progress)


def _direct(
    tiling: Tiling,
    currents: Phasors,
    potential: bool,
    cancelled: Cancelled | None,
    progress: Progress | None,
) -> Phasors:
    out = np.zeros((len(currents), len(tiling.points), 3), np.complex128)
    flowing = np.flatnonzero(currents.any(axis=0)).tolist()
    real = np.ascontiguousarray(currents.real[:, flowing])
    imaginary = np.ascontiguousarray(currents.imag[:, flowing])

    def work(filaments: Filaments, points: Floats, rows: Integers) -> None:
        part = np.empty((len(currents), len(rows), 3), np.complex128)
        tile_sum(
            points,
            filaments.vertices,
            filaments.offsets,
            filaments.weights,
            filaments.owners,
            real,
            imaginary,
            potential,
            part,
            np.zeros(len(rows), np.bool_),
        )
        out[:, rows] = part

    over_tiles(tiling, flowing, work, cancelled, progress)
    return out


def _responses(
    tiling: Tiling,
    cache: ResponseCache | None,
    cancelled: Cancelled | None,
    progress: Progress | None,
) -> list[Floats]:
    """(n, 3) for each conductor, in order; equal geometry is computed once."""
    sample = digest(tiling.points)
    keys = [_key(tiling, i, sample) for i in range(len(tiling.conductors))]
    known: dict[Key, Floats] = {}
    missing: dict[Key, int] = {}
    for i, key in enumerate(keys):
        found = cache.find(key) if cache is not None else None
        if found is not None:
            known[key] = found
        else:
            missing.setdefault(key, i)
    which = sorted(missing.values())
    out = [np.empty_like(tiling.points) for _ in which]

    def work(filaments: Filaments, points: Floats, rows: Integers) -> None:
        part = np.empty((len(which), len(rows), 3))
        tile_responses(
            points,
            filaments.vertices,
            filaments.offsets,
            filaments.weights,
            filaments.owners,
            part,
            np.zeros(len(rows), np.bool_),
        )
        for row, values in zip(out, part, strict=True):
            row[rows] = values

    over_tiles(tiling, which, work, cancelled, progress)
    for i, row in zip(which, out, strict=True):
        known[keys[i]] = row
        if cache is not None:
            cache.keep(keys[i], row)
    return [known[key] for key in keys]


def _key(tiling: Tiling, i: int, sample: bytes) -> Key:
    """Never of an id, a name, a circuit, a label or a share."""
    conductor = tiling.conductors[i]
    shape = conductor.shape
    sides = (
        (shape.width, shape.thickness) if isinstance(shape, Bar) else (shape.diameter,)
    )
    first, last = tiling.legs.first[i : i + 2]
    geometry = digest(
        conductor.path,
        conductor.axes,
        np.array(sides),
        np.ascontiguousarray(tiling.orders[:, first:last]),
    )
    return geometry, sample
