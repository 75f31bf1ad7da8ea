"""From the scene as data to what is drawn: colours, edges, letters, and what is hit."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from app.map_request import case_of
from app.theme import Theme, contrast
from app.view_state import Look
from app.views.inks import TWO_COLOURED, YELLOW, conductor_colour
from app.views.space_camera import Point3, SpaceCamera
from app.views.space_drawn import Drawn, Faces, Letters, Lines, joined, lit, rgba
from engine.circuits import LoadCase
from engine.conductor import Bundled, Conductor
from engine.conductors import conductors
from engine.errors import UserError
from engine.layout import Layout
from engine.space_picking import Hit, pick
from engine.space_scene import CLEAR, NOTHING, Label, Mesh, SpaceScene, space_scene

Floats = npt.NDArray[np.float64]
Bools = npt.NDArray[np.bool_]
Box = tuple[Point3, Point3]

#: Layer of the view state that each kind belongs to; conductors go with their item.
_LAYERS = {
    "storey": "rooms",
    "room": "rooms",
    "slab": "rooms",
    "closed enclosure": "enclosures",
    "open enclosure": "enclosures",
    "equipment": "equipment",
    "joint link": "runs",
    "closing link": "runs",
    "zone": "zones",
}
#: Ink of each kind but conductors, its opacity and that of its edges.
_INKS = {
    "storey": ("hairline", 0.0, 0.7),
    "room": ("line", 0.05, 0.9),
    "slab": ("line", 0.14, 0.5),
    "closed enclosure": ("line", 0.18, 0.9),
    "open enclosure": ("line", 0.08, 0.7),
    "equipment": ("muted", 0.30, 1.0),
    "zone": ("accent", 0.05, 0.9),
}
#: Neighbouring faces that turn by more have an edge between them. [cosine]
_SHARP = math.cos(math.radians(35.0))
#: Half the size of a receptor's cross. [m]
_CROSS = 0.08
#: A receptor is hit this near. [px]
_NEAR = 9.0
#: A conductor is hit this near to its axis. [px]
_BESIDE = 4.0
#: Of selected things, how much of the accent covers their own colour.
_MARKED = 0.6
#: Contrast to the paper from which on a conductor is seen; shades for those below.
_SEEN = 1.6
_BLACK_ON_DARK, _WHITE_ON_LIGHT = "#5d666f", "#c3c9ce"
_EMPTY: Box = ((0.0, 0.0, 0.0), (6.0, 4.0, 3.0))

#: Texts that overlap give way in this order.
_RANKS = {"receptor": 0, "conductor": 1, "run": 2, "equipment": 3, "zone": 4, "room": 5}
#: Texts are left out where what they name is shorter than so many letters.
_LETTER_LAYERS = {
    "receptor": "receptors", "conductor": "runs", "run": "runs",
    "equipment": "equipment", "zone": "zones", "room": "rooms",
}  # fmt: skip


class SpaceItems:
    """The scene of a layout, kept while the layout stays, and its drawing.

    Attributes
    ----------
    scene : SpaceScene
        Of the layout shown last.
    drawn : Drawn
        In the theme shown last, without the layers that are hidden.
    problem : str
        Why runs do not show; empty when they do.
    """

    def __init__(self) -> None:
        self.scene = SpaceScene((), (), ())
        self.drawn = Drawn(joined([]), joined([]), (), ())
        self.problem = ""
        self._of: tuple[Layout, LoadCase] | None = None
        self._axes: dict[tuple[str, str], Floats] = {}
        self._seen: tuple[Mesh, ...] = ()
        self._points: tuple[tuple[str, Point3], ...] = ()
        self._edges: dict[int, tuple[Mesh, Floats, npt.NDArray[np.int64]]] = {}

    @property
    def bounds(self) -> Box:
        """Everything; something room-sized where there is nothing. [m]"""
        return self.scene.bounds() or _EMPTY

    @property
    def outline(self) -> Floats:
        """(n, 3) points that the picture holds when it is fitted. [m]"""
        solid = [m.vertices for m in self.scene.meshes if m.kind != "storey"]
        found = [*solid, *(np.array([at]) for _, at in self.scene.points)]
        if not found:
            low, high = self.bounds
            return np.array([low, high])
        return np.concatenate(found)

    @property
    def levels(self) -> tuple[float, float]:
        """Lowest and highest z of everything, apart. [m]"""
        low, high = self.bounds
        return (low[2], max(high[2], low[2] + 1.0))

    def reach(self, target: Point3) -> float:
        """Radius about a target that holds everything, maps and marks too. [m]"""
        low, high = self.bounds
        size = math.dist(low, high)
        middle = [0.5 * (a + b) for a, b in zip(low, high, strict=True)]
        return math.dist(middle, target) + 0.75 * size + 2.0

    def show(
        self, layout: Layout, look: Look, selection: frozenset[str], theme: Theme
    ) -> None:
        """Draw a layout as a look wants it."""
        case = case_of(layout, look.case)
        if self._of is None or layout is not self._of[0] or case is not self._of[1]:
            self._of = (layout, case)
            try:
                parts, self.problem = conductors(layout), ""
            except UserError as error:
                parts, self.problem = Bundled(), str(error)
            self.scene = space_scene(layout, parts, case)
            self._edges = {}
            self._axes = _axes(parts)
        self._seen = _visible(self.scene.meshes, layout, look.hidden)
        self._points = () if "receptors" in look.hidden else self.scene.points
        opaque = [_coloured(m, selection, theme) for m in self._seen if not _clear(m)]
        clear = [_coloured(m, selection, theme) for m in self._seen if _clear(m)]
        self.drawn = Drawn(
            joined(opaque),
            joined(clear),
            tuple(self._lines(selection, theme)),
            tuple(_letters(self.scene.labels, look.hidden, theme)),
        )

    def pick(self, camera: SpaceCamera, x: float, y: float) -> str | None:
        """The item under a pixel, or None."""
        if self._points:
            flat, _ = camera.pixels([at for _, at in self._points])
            away = np.hypot(*(flat - (x, y)).T)
            nearest = int(np.nanargmin(np.where(np.isnan(away), np.inf, away)))
            if away[nearest] <= _NEAR:
                return self._points[nearest][0]
        # What is seen through, housings too, is hit only where nothing else is near.
        solid = tuple(mesh for mesh in self._seen if not _clear(mesh))
        hit = self._hit(solid, camera, x, y)
        near = self._near(camera, x, y) if hit is None else hit.item
        if near is not None:
            return near
        hit = self._hit(self._seen, camera, x, y)
        # Storeys are only what other things stand on.
        return None if hit is None or hit.kind == "storey" else hit.item

    def _hit(
        self, meshes: tuple[Mesh, ...], camera: SpaceCamera, x: float, y: float
    ) -> Hit | None:
        (a, b, c), (u, v, w) = (part.tolist() for part in camera.ray(x, y))
        return pick(replace(self.scene, meshes=meshes), (a, b, c), (u, v, w))

    def _near(self, camera: SpaceCamera, x: float, y: float) -> str | None:
        """The item whose conductor passes nearest to a pixel, or None.

        Conductors may be thinner than a pixel, and bars have gaps.
        """
        found, least = None, _BESIDE
        shown = self._shown_conductors()
        for (item, _), ends in self._axes.items():
            if item in shown:
                flat, _ = camera.pixels(ends)
                away = _distance(flat.reshape(-1, 2, 2), x, y)
                if away < least:
                    found, least = item, away
        return found

    def _shown_conductors(self) -> set[str]:
        conductors = (mesh for mesh in self._seen if mesh.kind not in _INKS)
        return {m.items[k] for m in conductors for k in np.unique(m.owners)}

    def _lines(self, selection: frozenset[str], theme: Theme) -> list[Lines]:
        found = []
        marked: list[Floats] = []
        for mesh in self._seen:
            ends, owners = self._sharp(mesh)
            if mesh.kind in _INKS:
                ink, _, opacity = _INKS[mesh.kind]
                colour = rgba(getattr(theme, ink), opacity)
                found.append(Lines(ends.reshape(-1, 3).astype(np.float32), colour))
            chosen = _owned(mesh, selection)
            if chosen.any():
                marked.append(ends[chosen[owners]].reshape(-1, 3))
        if marked:
            found.append(Lines(_singles(marked), rgba(theme.accent), 2.0, on_top=True))
        found += self._thin(selection, theme)
        for ids, ink, width in (
            ([i for i, _ in self._points if i not in selection], theme.above, 1.6),
            ([i for i, _ in self._points if i in selection], theme.accent, 3.0),
        ):
            crosses = [_cross(at) for i, at in self._points if i in ids]
            if crosses:
                found.append(Lines(_singles(crosses), rgba(ink), width, on_top=True))
        return found

    def _thin(self, selection: frozenset[str], theme: Theme) -> list[Lines]:
        """The axes of conductors, which from afar are thinner than a pixel."""
        shown = self._shown_conductors()
        by_colour: dict[str, list[Floats]] = {}
        for (item, label), ends in self._axes.items():
            if item in shown:
                chosen = item in selection
                colour = theme.accent if chosen else space_colour(label, theme)
                by_colour.setdefault(colour, []).append(ends)
        return [
            Lines(_singles(ends), rgba(colour), 1.4)
            for colour, ends in by_colour.items()
        ]

    def _sharp(self, mesh: Mesh) -> tuple[Floats, npt.NDArray[np.int64]]:
        kept = self._edges.get(id(mesh))
        if kept is None or kept[0] is not mesh:
            kept = self._edges[id(mesh)] = (mesh, *sharp_edges(mesh))
        return kept[1], kept[2]


def space_colour(label: str, theme: Theme) -> str:
    """The colour of a conductor where nothing outlines it: never that of the paper."""
    colour = conductor_colour(label, theme)
    if contrast(colour, theme.paper) >= _SEEN:
        return colour
    return _BLACK_ON_DARK if theme.is_dark else _WHITE_ON_LIGHT


def _axes(parts: Sequence[Conductor]) -> dict[tuple[str, str], Floats]:
    """(2 n, 3) ends of the legs of conductors, by item and label. [m]"""
    found: dict[tuple[str, str], list[Floats]] = {}
    for part in parts:
        legs = np.stack([part.path[:-1], part.path[1:]], axis=1).reshape(-1, 3)
        label = part.loads[0].label if part.loads else NOTHING
        found.setdefault((part.item, label), []).append(legs)
    return {key: np.concatenate(legs) for key, legs in found.items()}


def sharp_edges(mesh: Mesh) -> tuple[Floats, npt.NDArray[np.int64]]:
    """Edges where a mesh turns, or ends.

    Returns
    -------
    (n, 2, 3) float, (n,) int
        Both ends [m], and the owner of each.
    """
    count = len(mesh.faces)
    if not count:
        return np.zeros((0, 2, 3)), np.zeros(0, np.int64)
    # Corners of neighbouring walls are vertices of their own: joined by their place.
    _, place = np.unique(mesh.vertices.round(6), axis=0, return_inverse=True)
    faces = place.reshape(-1)[mesh.faces]
    pairs = np.sort(faces[:, [[0, 1], [1, 2], [2, 0]]].reshape(-1, 2), axis=1)
    of_face = np.repeat(np.arange(count), 3)
    keys = (mesh.owners[of_face], pairs[:, 0], pairs[:, 1])
    order = np.lexsort(keys[::-1])
    sorted_keys = np.stack(keys)[:, order]
    first = np.append(True, np.any(np.diff(sorted_keys, axis=1) != 0, axis=0))
    starts = np.flatnonzero(first)
    sizes = np.diff(np.append(starts, len(order)))
    normals = mesh.normals[of_face[order]]
    following = np.minimum(starts + 1, len(order) - 1)
    turn = np.sum(normals[starts] * normals[following], axis=1)
    kept = starts[(sizes == 1) | (turn < _SHARP)]
    edge = order[kept]
    raw = mesh.faces[:, [[0, 1], [1, 2], [2, 0]]].reshape(-1, 2)[edge]
    return mesh.vertices[raw], mesh.owners[of_face[edge]]


def _clear(mesh: Mesh) -> bool:
    """Enclosures and equipment are seen through: what matters is inside them."""
    return mesh.kind in CLEAR or mesh.kind in ("closed enclosure", "equipment")


def _visible(
    meshes: Sequence[Mesh], layout: Layout, hidden: frozenset[str]
) -> tuple[Mesh, ...]:
    """What is left without hidden layers."""
    runs = {run.id for run in layout.runs}
    found = []
    for mesh in meshes:
        if mesh.kind != "conductor":
            if _LAYERS[mesh.kind] not in hidden:
                found.append(mesh)
            continue
        layers = ["runs" if item in runs else "equipment" for item in mesh.items]
        shown = np.array([layer not in hidden for layer in layers], bool)
        if shown.all():
            found.append(mesh)
        elif shown.any():
            kept = shown[mesh.owners]
            found.append(
                replace(mesh, faces=mesh.faces[kept], owners=mesh.owners[kept])
            )
    return tuple(found)


def _owned(mesh: Mesh, ids: frozenset[str]) -> Bools:
    """(items,) whether each of a mesh's items is among some."""
    return np.array([item in ids for item in mesh.items], bool)


def _coloured(mesh: Mesh, selection: frozenset[str], theme: Theme) -> Faces:
    """The faces of a role in its colour; those of selected items in the accent too."""
    if mesh.kind in _INKS:
        ink, opacity, _ = _INKS[mesh.kind]
        colour = rgba(getattr(theme, ink), opacity)
    else:
        colour = rgba(space_colour(mesh.label, theme))
    colours = np.tile(np.array(colour), (len(mesh.faces), 1))
    if mesh.label in TWO_COLOURED:
        striped = np.arange(len(mesh.faces)) // 2 % 2 == 1
        colours[striped] = rgba(YELLOW)
    chosen = _owned(mesh, selection)
    if chosen.any():
        marked = chosen[mesh.owners]
        accent = np.array(rgba(theme.accent)[:3])
        colours[marked, :3] = _MARKED * accent + (1.0 - _MARKED) * colours[marked, :3]
    return lit(mesh.corners, colours)


def _letters(
    labels: Sequence[Label], hidden: frozenset[str], theme: Theme
) -> list[Letters]:
    found = []
    room = _spacings(labels)
    for k, label in enumerate(labels):
        if _LETTER_LAYERS[label.kind] in hidden:
            continue
        is_letter = label.kind == "conductor"
        found.append(
            Letters(
                label.at,
                label.text,
                theme.text if label.kind in ("receptor", "conductor") else theme.muted,
                room=room.get(k, label.length / max(1, len(label.text) // 2)),
                rank=_RANKS[label.kind],
                lift=13.0 if label.kind == "receptor" else 0.0,
                bold=is_letter,
            )
        )
    return found


def _spacings(labels: Sequence[Label]) -> dict[int, float]:
    """How far the letters of a run's conductors are apart, at the nearest. [m]"""
    groups: dict[str, list[int]] = {}
    for k, label in enumerate(labels):
        if label.kind == "conductor":
            groups.setdefault(label.item, []).append(k)
    found: dict[int, float] = {}
    for members in groups.values():
        if len(members) < 2:
            continue
        at = np.array([labels[k].at for k in members])
        away = np.linalg.norm(at[:, None] - at[None], axis=2)
        np.fill_diagonal(away, np.inf)
        # All letters of a run or none: one alone would seem to be the only one.
        found.update(dict.fromkeys(members, float(away.min())))
    return found


def _singles(parts: list[Floats]) -> npt.NDArray[np.float32]:
    """Points of several parts as the screen takes them. [m]"""
    return np.concatenate(parts).astype(np.float32)


def _distance(legs: Floats, x: float, y: float) -> float:
    """From a pixel to the nearest of legs (n, 2, 2); infinite without any. [px]"""
    start, way = legs[:, 0], legs[:, 1] - legs[:, 0]
    long = np.sum(way * way, axis=1)
    along = np.sum(((x, y) - start) * way, axis=1) / np.where(long > 0, long, 1.0)
    nearest = start + np.clip(along, 0.0, 1.0)[:, None] * way
    away = np.hypot(*(nearest - (x, y)).T)
    return float(np.min(away[np.isfinite(away)], initial=np.inf))


def _cross(at: Point3) -> Floats:
    """(6, 3) ends of three short lines through a place. [m]"""
    arms = np.repeat(np.eye(3), 2, axis=0) * np.tile([[-1.0], [1.0]], (3, 1))
    return np.asarray(at + _CROSS * arms)
