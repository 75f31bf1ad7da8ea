"""Routes: straight legs, mitre planes at bends, and the section's frame on each leg.

Looking along the route u is right and v is up, so u × v = −t. On a first leg that is
vertical u is +x. A bend carries the frame by reflection in its mitre plane, so that
every line of the section keeps its place on every straight.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import cos, hypot, radians

import numpy as np
from numpy.typing import NDArray

from engine.errors import UserError

Array = NDArray[np.float64]

#: What is shorter than this is a place, not a length. [m]
SHORTEST = 1e-6

#: A first leg that leans less than this per metre is vertical.
UPRIGHT = 1e-6

#: Where a bar on the route's line turns at a bend, half the length it does so in. [m]
HALF_TWIST = 1e-3

SHARPEST_BEND = 135.0


@dataclass(frozen=True, eq=False)
class Stations:
    """Where the section stands along a route: at its ends and in its mitre planes.

    A line of the section at (u, v) is the polyline `centres + u·axes[:, 0] +
    v·axes[:, 1]`. A bend at which the turn changes has two stations in its mitre
    plane, one for each leg: the section turns there, from the one to the other.

    Attributes
    ----------
    centres : (k, 3) float
        Points of the route. [m]
    axes : (k, 2, 3) float
        Displacement per metre of u and of v.
    plain_axes : (k, 2, 3) float
        The same without the turns.
    twists : tuple of int
        Stations whose successor lies at the same bend.
    setbacks : (2, legs) float
        Change of a leg's length per metre of u and of v.
    lengths : (legs,) float
        Lengths of the legs. [m]
    tangents : (legs, 3) float
        Directions of the legs.
    """

    centres: Array
    axes: Array
    plain_axes: Array
    twists: tuple[int, ...]
    setbacks: Array
    lengths: Array
    tangents: Array

    def polylines(self, offsets: Array) -> Array:
        """Lines of the section at the offsets (m, 2), as (m, k, 3). [m]"""
        lines: Array = self.centres + np.tensordot(offsets, self.axes, axes=(1, 1))
        return lines

    def straights(self, offsets: Array, halves: Array) -> Array:
        """Lengths left of each leg by bodies that stand around the offsets.

        Parameters
        ----------
        offsets : (m, 2) float
            Middles of the bodies. [m]
        halves : (m, 2, 2) float
            Half their two sides, as vectors in (u, v). [m]

        Returns
        -------
        (m, legs) float
            Length of the shortest edge; negative where bends overlap. [m]
        """
        left: Array = self.lengths + offsets @ self.setbacks
        left -= np.abs(halves @ self.setbacks).sum(axis=1)
        return left


def stations(
    route: Sequence[Sequence[float]],
    turns: Sequence[float] = (),
    *,
    closed: bool = False,
) -> Stations:
    """Stations of a route.

    Parameters
    ----------
    route : sequence of (3,) float
        Vertices. [m]
    turns : sequence of float
        Turn of the section about each leg, from u towards v; empty: none. [degrees]
    closed : bool
        Whether the last vertex is the first again, with a mitre plane there.

    Raises
    ------
    UserError
        When a leg has no length, a bend is sharper than 135°, or the turns are not
        as many as the legs.
    """
    vertices = np.array(route, dtype=np.float64)
    legs = np.diff(vertices, axis=0)
    lengths = np.sqrt((legs * legs).sum(axis=1))
    _refuse_bad_legs(vertices, lengths)
    tangents = legs / lengths[:, None]
    before, after = tangents[:-1], tangents[1:]
    if closed:
        before, after = tangents, np.concatenate([tangents[1:], tangents[:1]])
    _refuse_sharp_bends(before, after)
    normals = before + after
    normals /= np.sqrt((normals * normals).sum(axis=1))[:, None]
    frames = _frames(tangents, normals[: len(legs) - 1])
    plain = _mitred(frames, tangents, normals)
    if not any(turns):
        if len(turns) not in (0, len(legs)):
            raise UserError(_turns_sentence(len(turns), len(legs)))
        turned, twisted = plain, np.zeros(len(legs) - 1, dtype=bool)
    else:
        if len(turns) != len(legs):
            raise UserError(_turns_sentence(len(turns), len(legs)))
        degrees = np.array(turns, dtype=np.float64)
        turned = _mitred(_turned(frames, degrees), tangents, normals)
        twisted = np.abs((np.diff(degrees) + 180) % 360 - 180) > 1e-9
    return _assembled(vertices, plain, turned, twisted, lengths, tangents)


def _assembled(
    vertices: Array,
    plain: tuple[Array, Array],
    turned: tuple[Array, Array],
    twisted: NDArray[np.bool_],
    lengths: Array,
    tangents: Array,
) -> Stations:
    """Put the legs' ends in a row, once where the two legs at a bend agree."""
    centres = vertices
    axes = np.concatenate([turned[0][:1], turned[1]])
    plain_axes = axes
    twists: tuple[int, ...] = ()
    if turned is not plain:
        plain_axes = np.concatenate([plain[0][:1], plain[1]])
    if twisted.any():
        bends = np.flatnonzero(twisted) + 1
        centres = np.insert(centres, bends + 1, vertices[bends], axis=0)
        axes = np.insert(axes, bends + 1, turned[0][bends], axis=0)
        plain_axes = np.insert(plain_axes, bends + 1, plain[0][bends], axis=0)
        twists = tuple(int(bend) + i for i, bend in enumerate(bends))
    setbacks = ((turned[1] - turned[0]) * tangents[:, None, :]).sum(axis=2).T
    for array in (centres, axes, plain_axes):
        array.setflags(write=False)
    return Stations(
        centres=centres,
        axes=axes,
        plain_axes=plain_axes,
        twists=twists,
        setbacks=setbacks,
        lengths=lengths,
        tangents=tangents,
    )


def cross(a: Array, b: Array) -> Array:
    """Vector products of (m, 3) and (m, 3): (m, 3); quick for small m."""
    return a[:, [1, 2, 0]] * b[:, [2, 0, 1]] - a[:, [2, 0, 1]] * b[:, [1, 2, 0]]


def _frames(tangents: Array, normals: Array) -> Array:
    """u and v on each leg, (legs, 2, 3): the first as stated, the others carried."""
    x, y, _ = tangents[0].tolist()
    level = hypot(x, y)
    u = (1.0, 0.0, 0.0) if level < UPRIGHT else (y / level, -x / level, 0.0)
    carried = [u]
    for a, b, c in normals.tolist():
        twice = 2 * (u[0] * a + u[1] * b + u[2] * c)
        u = (u[0] - twice * a, u[1] - twice * b, u[2] - twice * c)
        carried.append(u)
    right = np.array(carried)
    # An almost vertical first leg, and rounding, leave a little of t in u.
    right -= (right * tangents).sum(axis=1)[:, None] * tangents
    right /= np.sqrt((right * right).sum(axis=1))[:, None]
    return np.stack([right, cross(right, tangents)], axis=1)


def _turned(frames: Array, degrees: Array) -> Array:
    angles = np.radians(degrees)[:, None]
    u, v = frames[:, 0], frames[:, 1]
    c, s = np.cos(angles), np.sin(angles)
    return np.stack([c * u + s * v, c * v - s * u], axis=1)


def _mitred(frames: Array, tangents: Array, normals: Array) -> tuple[Array, Array]:
    """The frames at the starts and at the ends of the legs, slid along the legs into
    the planes there: (legs, 2, 3) each."""
    starts, ends = frames.copy(), frames.copy()
    n_bends = len(normals)
    n_inner = len(tangents) - 1
    for axes, legs, planes in (
        (ends, slice(0, n_bends), normals),
        (starts, slice(1, None), normals[:n_inner]),
        (starts, slice(0, 1), normals[n_inner:]),
    ):
        t = tangents[legs][: len(planes), None, :]
        n = planes[:, None, :]
        slid = axes[legs][: len(planes)]
        slid -= (slid * n).sum(axis=2, keepdims=True) / (t * n).sum(
            axis=2, keepdims=True
        ) * t  # fmt: skip
    return starts, ends


def _refuse_bad_legs(vertices: Array, lengths: Array) -> None:
    if not np.isfinite(vertices).all():
        raise UserError("a vertex of the route is not a number: enter it again.")
    if lengths.min() < SHORTEST:
        leg = int(lengths.argmin()) + 1
        raise UserError(
            f"leg {leg} of the route has no length: remove vertex {leg + 1}, which "
            f"lies on vertex {leg}."
        )


def _refuse_sharp_bends(before: Array, after: Array) -> None:
    cosines = (before * after).sum(axis=1)
    # A bend of exactly 135° is allowed whatever its rounding.
    if not cosines.size or cosines.min() > cos(radians(SHARPEST_BEND)) - 1e-9:
        return
    bend = int(cosines.argmin())
    angle = float(np.degrees(np.arccos(max(-1.0, float(cosines[bend])))))
    raise UserError(
        f"the route bends by {angle:.0f}° at vertex {bend + 2}; a bend of more than "
        f"{SHARPEST_BEND:.0f}° cannot be mitred: draw it as two bends."
    )


def _turns_sentence(n_turns: int, n_legs: int) -> str:
    return (
        f"there are {n_turns} turns for {n_legs} legs: give one turn for each leg, "
        "or none."
    )
