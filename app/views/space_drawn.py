"""What the 3D view draws, as plain arrays: faces, lines, letters; no OpenGL, no Qt."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from engine.sampling import Plane

Floats = npt.NDArray[np.float64]
Singles = npt.NDArray[np.float32]

#: Where the light comes from, and what is left of a colour that it does not reach.
_LIGHT = np.array([-0.35, -0.55, 0.76])
_SHADE = 0.55


@dataclass(frozen=True, eq=False)
class Faces:
    """Triangles with their colours.

    Attributes
    ----------
    corners : (n, 3, 3) float32
        [m]
    colours : (n, 4) float32
        Red, green, blue, opacity from 0 to 1.
    """

    corners: Singles
    colours: Singles


@dataclass(frozen=True, eq=False)
class Lines:
    """Straight lines between pairs of points.

    Attributes
    ----------
    ends : (2 n, 3) float32
        [m]
    colour : tuple of float
        Red, green, blue, opacity from 0 to 1.
    width : float
        [px]
    on_top : bool
        Drawn over everything, hidden by nothing.
    """

    ends: Singles
    colour: tuple[float, float, float, float]
    width: float = 1.0
    on_top: bool = False


@dataclass(frozen=True)
class Letters:
    """A text at a place, upright to the viewer.

    Attributes
    ----------
    room : float
        Length in space that must show on some pixels before the text does; 0: always.
        [m]
    rank : int
        Where texts would overlap, the lower rank is drawn.
    lift : float
        Above its place. [px]
    """

    at: tuple[float, float, float]
    text: str
    colour: str
    room: float = 0.0
    rank: int = 0
    lift: float = 0.0
    bold: bool = False


@dataclass(frozen=True, eq=False)
class Drawn:
    """Everything of a scene in one theme."""

    opaque: Faces
    clear: Faces
    lines: tuple[Lines, ...]
    letters: tuple[Letters, ...]


def lit(corners: Floats, colours: Floats) -> Faces:
    """Faces whose colours depend on how they lie to the light, seen from either side.

    Parameters
    ----------
    corners : (n, 3, 3) float
        [m]
    colours : (n, 4) float
        In full light.

    Notes
    -----
    Lambert's cosine over an ambient part; both sides alike, so that the order of the
    corners does not matter.
    """
    edges = corners[:, 1:] - corners[:, :1]
    normals = np.cross(edges[:, 0], edges[:, 1])
    lengths = np.linalg.norm(normals, axis=1)
    normals /= np.where(lengths > 0, lengths, 1.0)[:, None]
    light = _LIGHT / np.linalg.norm(_LIGHT)
    # From below a face is as bright as a wall: half way to the shade.
    cosine = np.abs(normals @ light) * np.where(normals @ light < 0, 0.75, 1.0)
    shades = _SHADE + (1.0 - _SHADE) * cosine
    shaded = colours.copy()
    shaded[:, :3] *= shades[:, None]
    # Indexing leaves arrays in any order; what goes to the screen is read in rows.
    return Faces(
        np.ascontiguousarray(corners, np.float32),
        np.ascontiguousarray(shaded, np.float32),
    )


def joined(parts: list[Faces]) -> Faces:
    """Several faces as one mesh."""
    if not parts:
        return Faces(np.zeros((0, 3, 3), np.float32), np.zeros((0, 4), np.float32))
    return Faces(
        np.concatenate([part.corners for part in parts]),
        np.concatenate([part.colours for part in parts]),
    )


def outline(plane: Plane) -> Singles:
    """(8, 3) the edges of a plane as pairs of ends. [m]"""
    a, u, v = (np.array(x) for x in (plane.origin, plane.first, plane.second))
    corners = [a, a + u, a + u, a + u + v, a + u + v, a + v, a + v, a]
    return np.array(corners, np.float32)


def rgba(colour: str, opacity: float = 1.0) -> tuple[float, float, float, float]:
    """A colour #rrggbb as parts from 0 to 1."""
    red, green, blue = (int(colour[i : i + 2], 16) / 255.0 for i in (1, 3, 5))
    return (red, green, blue, opacity)
