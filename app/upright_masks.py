"""What an upright plane of a map cuts: closed enclosures, and conductors."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from app.map_drawing import half_size, interpolated
from app.map_picture import MaskedArea
from app.map_request import MapValues
from engine import field
from engine.conductor import Conductor

Floats = npt.NDArray[np.float64]
Bools = npt.NDArray[np.bool_]


class UprightMasks:
    """Where nobody is on an upright plane; `app.map_drawing.Masks`."""

    def __init__(self, values: MapValues) -> None:
        upright = values.request.upright
        assert upright is not None, "the map stands on an upright plane"
        self._upright, self._rect = upright, values.request.rect
        self._axes = (values.xs, values.ys)
        self._closed = values.loaded.currents.closed
        fine = values.request.fineness == "fine"
        self._conductors = values.loaded.conductors if fine else ()

    def areas(self) -> tuple[MaskedArea, ...]:
        """Closed enclosures that the plane cuts, as far as they show."""
        bottom, top = self._rect[1], self._rect[3]
        found = []
        for keepout in self._closed:
            low, high = max(keepout.z_from, bottom), min(keepout.z_to, top)
            if keepout.outline.is_empty or not low < high:
                continue
            for left, right in self._upright.cut(keepout.outline, self._rect):
                corners = ((left, low), (right, low), (right, high), (left, high))
                state = "kept clear" if keepout.is_open else "closed"
                text = f"{state}: {keepout.title}"
                found.append(MaskedArea(np.array(corners), text))
        return tuple(found)

    def largest(
        self, logs: Floats, xs: Floats, ys: Floats, *, with_conductors: bool = True
    ) -> Floats:
        """(rows, columns) of the layer (1, ny, nx), smoothly; −inf where masked."""
        found = interpolated(logs[0], xs, ys, self._axes)
        mask = np.zeros(found.shape, np.bool_)
        for keepout in self._closed:
            for left, right in self._upright.cut(keepout.outline, self._rect):
                # The prism's own test decides; this only says where to ask.
                across = slice(*np.searchsorted(xs, (left, right)))
                up = slice(*np.searchsorted(ys, (keepout.z_from, keepout.z_to)))
                part = mask[up, across]
                if part.size:
                    inside = keepout.masks(self._places(xs[across], ys[up]))
                    part |= inside.reshape(part.shape)
        if with_conductors:
            self._add_conductors(mask, xs, ys)
        found[mask] = -np.inf
        return found

    def _places(self, xs: Floats, ys: Floats) -> Floats:
        grid = np.stack(np.meshgrid(xs, ys), axis=-1).reshape(-1, 2)
        return self._upright.places(grid)

    def _add_conductors(self, mask: Bools, xs: Floats, ys: Floats) -> None:
        """Mask what lies inside conductors; looked for around their legs only."""
        around = np.zeros_like(mask)
        crossing: list[Conductor] = []
        sight, depth = self._upright.sight, self._upright.depth
        for conductor in self._conductors:
            # At a mitre a corner reaches further than the section.
            reach = 2.5 * half_size(conductor)
            depths = sight.depth(conductor.path) - depth
            nearest = np.minimum(depths[:-1], depths[1:])
            farthest = np.maximum(depths[:-1], depths[1:])
            legs = np.flatnonzero((nearest < reach) & (farthest > -reach))
            if not len(legs):
                continue
            crossing.append(conductor)
            seen = sight.seen(conductor.path)
            low = np.minimum(seen[:-1], seen[1:]) - reach
            high = np.maximum(seen[:-1], seen[1:]) + reach
            for k in legs:
                across = slice(*np.searchsorted(xs, (low[k, 0], high[k, 0])))
                up = slice(*np.searchsorted(ys, (low[k, 1], high[k, 1])))
                around[up, across] = True
        rows, columns = np.nonzero(around)
        if len(rows):
            seen = np.column_stack([xs[columns], ys[rows]])
            points = self._upright.places(seen)
            mask[rows, columns] |= field.inside(crossing, points)
