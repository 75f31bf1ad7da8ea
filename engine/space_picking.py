"""Which item of a space scene a line of sight meets first."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.items import Point3
from engine.space_scene import CLEAR, Floats, Kind, Mesh, SpaceScene


@dataclass(frozen=True)
class Hit:
    """What a line of sight meets first, where, and how far away. [m]"""

    item: str
    kind: Kind
    at: Point3
    distance: float


def pick(
    scene: SpaceScene, origin: Point3, direction: Point3, *, through: bool = True
) -> Hit | None:
    """The item that a line of sight meets first, from outside or inside.

    Parameters
    ----------
    origin, direction : Point3
        Where it begins [m], and which way it goes, of any length.
    through : bool
        Whether what one sees through counts only where nothing else is met.

    Raises
    ------
    ValueError
        When the direction is zero.
    """
    length = float(np.linalg.norm(direction))
    if length == 0:
        raise ValueError("a line of sight needs a direction")
    start, way = np.array(origin, float), np.array(direction, float) / length
    hits = [hit for mesh in scene.meshes if (hit := _hit(mesh, start, way)) is not None]
    solid = [hit for hit in hits if hit.kind not in CLEAR]
    considered = solid if solid and through else hits
    return min(considered, key=lambda hit: hit.distance, default=None)


def _hit(mesh: Mesh, start: Floats, way: Floats) -> Hit | None:
    """Nearest triangle that a ray meets; the method of Möller and Trumbore (1997)."""
    a, b, c = np.moveaxis(mesh.corners, 1, 0)
    along, beside = b - a, c - a
    p = np.cross(way, beside)
    determinant = np.sum(along * p, axis=1)
    # Triangles seen edge-on are not met.
    faces = np.abs(determinant) > 1e-14
    inverse = 1.0 / np.where(faces, determinant, 1.0)
    t = start - a
    u = np.sum(t * p, axis=1) * inverse
    q = np.cross(t, along)
    v = q @ way * inverse
    distance = np.sum(beside * q, axis=1) * inverse
    slack = 1e-12
    met = faces & (u >= -slack) & (v >= -slack) & (u + v <= 1 + slack) & (distance > 0)
    if not met.any():
        return None
    k = int(np.where(met, distance, np.inf).argmin())
    x, y, z = (start + distance[k] * way).tolist()
    item = mesh.items[mesh.owners[k]]
    return Hit(item, mesh.kind, (x, y, z), float(distance[k]))
