"""Maps on planes in space: what is wanted, and its colours, computed in a thread."""

from __future__ import annotations

import logging
import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt
from PySide6.QtCore import QObject, Qt, QTimer, Signal

from app.document import Document
from app.field_store import load_kernels
from app.map_drawing import interpolated
from app.map_request import Loaded, height_text, heights_of, loaded, zone_of
from app.view_state import Look, ViewState
from app.worker import Outdated, Worker
from engine import field
from engine.colour_ramp import OPACITY, colours
from engine.errors import ComputationCancelled, UserError
from engine.field import ResponseCache
from engine.items import Point2
from engine.layout import Layout
from engine.maps import Extent, extent
from engine.masks import distances_to
from engine.sampling import Plane, PlaneSample, horizontal, on_plane, vertical

Bytes = npt.NDArray[np.uint8]
Floats = npt.NDArray[np.float64]
Phasors = npt.NDArray[np.complex128]

#: Pieces along the longer side of a plane, while dragging and after; together no
#: more points than that.
_PIECES = {True: 28, False: 90}
_POINTS = {True: 1500, False: 20_000}
#: Shortest edge of a plane. [m]
SHORTEST = 0.01
#: Picture elements between two nodes.
_FINER = 4
#: Stands for no field at all, so that logarithms exist. [T]
_NOTHING = 1e-15
_CACHE = 192 * 2**20


@dataclass(frozen=True)
class MapPlace:
    """A rectangle in space on which a map is wanted, and how to call it."""

    name: str
    plane: Plane

    @property
    def is_level(self) -> bool:
        return self.plane.second[2] == 0.0


@dataclass(frozen=True)
class SpaceMapRequest:
    """Maps on some planes in one load case; coarse while something is dragged."""

    layout: Layout
    case: str
    places: tuple[MapPlace, ...]
    is_coarse: bool


@dataclass(frozen=True, eq=False)
class SpaceMap:
    """A map in space.

    Attributes
    ----------
    place : MapPlace
    rgba : (rows, columns, 4) uint8
        Colours of the ramp at the map's opacity; clear under the range and in masks.
        Columns run along the plane's first edge, rows along its second; the outer
        edges of the picture are the plane's.
    is_bound : bool
        The values are upper bounds.
    is_direct : bool
        Only direct current flows.
    """

    place: MapPlace
    rgba: Bytes
    is_bound: bool = False
    is_direct: bool = False


def look_heights(layout: Layout, look: Look) -> tuple[float, ...]:
    """The height that a look shows; of several, the middle one. [m]"""
    heights, _ = heights_of(layout, look)
    return (heights[len(heights) // 2],)


def level_places(
    layout: Layout, heights: Sequence[float], look: Look
) -> tuple[MapPlace, ...]:
    """Level planes around everything that is placed, from below. [m]"""
    x0, y0, x1, y1 = extent(layout)
    zone = zone_of(layout, look.zone)
    return tuple(
        MapPlace(height_text(layout, z, zone), horizontal((x0, x1), (y0, y1), z))
        for z in sorted(set(heights))
    )


def upright_place(
    name: str, start: Point2, end: Point2, levels: tuple[float, float]
) -> MapPlace:
    """An upright plane over a line on plan. [m]

    Raises
    ------
    UserError
        When the line or the height is too short for a map.
    """
    if math.dist(start, end) < SHORTEST or levels[1] - levels[0] < SHORTEST:
        raise UserError(
            "An upright map needs a line of at least 0.01 m on plan: enter two "
            "different places."
        )
    return MapPlace(name, vertical(start, end, levels))


def across(letter: str, at: float, area: Extent) -> tuple[Point2, Point2]:
    """The line on plan at one x (or y), over all of an area's other side. [m]"""
    x0, y0, x1, y1 = area
    return ((at, y0), (at, y1)) if letter == "x" else ((x0, at), (x1, at))


def space_maps(
    request: SpaceMapRequest, cache: ResponseCache, outdated: Outdated | None = None
) -> tuple[SpaceMap, ...]:
    """Compute maps.

    Raises
    ------
    UserError
        When the geometry or the currents cannot be evaluated.
    ComputationCancelled
        When `outdated` says so.
    """
    ready = loaded(request.layout, request.case)
    share = len(request.places)
    found = []
    for place in request.places:
        sample = on_plane(place.plane, _step(place.plane, request.is_coarse, share))
        b = field.flux_density(
            ready.conductors,
            ready.currents.currents,
            sample.points,
            cache=cache,
            cancelled=outdated,
        )
        found.append(_coloured(request.layout, ready, place, sample, b))
    return tuple(found)


def _coloured(
    layout: Layout, ready: Loaded, place: MapPlace, sample: PlaneSample, b: Phasors
) -> SpaceMap:
    """The picture of a map, smooth between its nodes; masks at its own fineness."""
    whole = field.combined(b, ready.currents.components)
    is_direct = whole.total_ac is None and whole.dc is not None
    values = whole.dc if whole.total_ac is None else whole.total_ac
    values = np.zeros(len(sample.points)) if values is None else values
    nodes = (sample.first, sample.second)
    xs, ys = (_finer(axis) for axis in nodes)
    logs = np.log10(np.maximum(values, _NOTHING)).reshape(sample.shape)
    settings = layout.settings
    rgba = colours(
        10.0 ** interpolated(logs, xs, ys, nodes),
        settings.map_low,
        settings.map_high,
        settings.map_scale,
    )
    inside = distances_to(ready.conductors, sample.points).reshape(sample.shape) == 0
    hidden = inside[np.ix_(_nearest(sample.second, ys), _nearest(sample.first, xs))]
    points = _points(place.plane, xs, ys)
    for keepout in ready.currents.closed:
        hidden |= keepout.masks(points).reshape(hidden.shape)
    rgba[..., 3] = np.where((rgba[..., 3] > 0) & ~hidden, round(255 * OPACITY), 0)
    return SpaceMap(place, rgba, whole.is_bound, is_direct)


def _points(plane: Plane, xs: Floats, ys: Floats) -> Floats:
    """(rows · columns, 3) places at distances along the edges of a plane. [m]"""
    first, second = (np.array(edge) for edge in (plane.first, plane.second))
    first, second = (edge / np.linalg.norm(edge) for edge in (first, second))
    grid = ys[:, None, None] * second + xs[None, :, None] * first + plane.origin
    points: Floats = grid.reshape(-1, 3)
    return points


def _finer(axis: Floats) -> Floats:
    """Middles of picture elements between the ends of an even axis."""
    count = _FINER * (len(axis) - 1)
    step = (axis[-1] - axis[0]) / count
    finer: Floats = axis[0] + step * (np.arange(count) + 0.5)
    return finer


def _nearest(axis: Floats, places: Floats) -> npt.NDArray[np.intp]:
    step = (axis[-1] - axis[0]) / (len(axis) - 1)
    return np.rint((places - axis[0]) / step).astype(np.intp)


def _step(plane: Plane, is_coarse: bool, share: int) -> float:
    """Distance of nodes that keeps all maps together affordable. [m]"""
    a, b = math.hypot(*plane.first), math.hypot(*plane.second)
    return max(
        max(a, b) / _PIECES[is_coarse], math.sqrt(a * b * share / _POINTS[is_coarse])
    )


class SpaceMaps(QObject):
    """Keeps maps in space in step with document and view, off the window's thread.

    Signals
    -------
    ready(tuple of SpaceMap)
    problem(str)
        Why there is no map; empty when there is one again.
    """

    ready = Signal(object)
    problem = Signal(str)
    _found = Signal(object, object)

    def __init__(self, document: Document, view_state: ViewState) -> None:
        super().__init__()
        self._document, self._view_state = document, view_state
        self._places: tuple[MapPlace, ...] = ()
        self._is_coarse = False
        self._asked: SpaceMapRequest | None = None
        self._cache = ResponseCache(_CACHE)
        self._found.connect(self._show, Qt.ConnectionType.QueuedConnection)
        self._worker: Worker[SpaceMapRequest] = Worker(
            "maps in space", self._compute, load_kernels
        )
        self._soon = QTimer(self)
        self._soon.setSingleShot(True)
        self._soon.setInterval(0)
        self._soon.timeout.connect(self._ask)

    @property
    def is_idle(self) -> bool:
        """Nothing is being computed or waits to be asked."""
        return self._worker.is_idle and not self._soon.isActive()

    def want(self, places: tuple[MapPlace, ...], *, is_coarse: bool = False) -> None:
        """Compute maps on these planes, of the layout and case that are shown.

        Coarse while planes are dragged, as while the layout is.
        """
        self._places, self._is_coarse = places, is_coarse
        self._soon.start()

    def close_worker(self) -> None:
        """Stop the thread, before the window goes."""
        self._soon.stop()
        self._worker.close()

    def _ask(self) -> None:
        request = SpaceMapRequest(
            self._document.layout,
            self._view_state.look.case,
            self._places,
            self._is_coarse or self._document.is_previewing,
        )
        if request == self._asked:
            return
        self._asked = request
        if request.places:
            self._worker.ask(request)
        else:
            self.ready.emit(())
            self.problem.emit("")

    def _compute(self, request: SpaceMapRequest, outdated: Outdated) -> None:
        """In the thread: coarse at once, then fine."""
        try:
            if not request.is_coarse:
                coarse = replace(request, is_coarse=True)
                self._found.emit(request, space_maps(coarse, self._cache, outdated))
            # A drag keeps up by finishing what it began.
            stop = None if request.is_coarse else outdated
            self._found.emit(request, space_maps(request, self._cache, stop))
        except ComputationCancelled:
            return
        except UserError as error:
            self._found.emit(request, str(error))
        except Exception:
            logging.getLogger(__name__).exception("A map in space failed")
            self._found.emit(request, "The map could not be computed.")

    def _show(self, request: SpaceMapRequest, found: object) -> None:
        if request != self._asked and not request.is_coarse:
            return
        if isinstance(found, tuple):
            self.ready.emit(found)
            self.problem.emit("")
        else:
            self.ready.emit(())
            self.problem.emit(str(found))
