"""A computed map as the views show it: pixels, iso-lines, masks, and its words."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from PySide6.QtGui import QImage

from engine.colour_ramp import Scale

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class DrawnIsoLine:
    """A line of equal value.

    Attributes
    ----------
    text : str
        Its label: value and unit, or name and value of a reference level.
    bold : bool
        At a reference level.
    points : (n, 2) float
        In the plane of the map. [m]
    label_place : (3,) float
        x and y of the label, and the line's direction there. [m, m, degrees]
    """

    text: str
    bold: bool
    points: Floats
    label_place: tuple[float, float, float]


@dataclass(frozen=True, eq=False)
class MaskedArea:
    """Where no value counts.

    Attributes
    ----------
    outline : (n, 2) float
        In the plane of the map, closed or not. [m]
    reason : str
        Why, in two or three words: "closed enclosure".
    """

    outline: Floats
    reason: str


@dataclass(frozen=True, eq=False)
class MapPicture:
    """A map on the plane of a view.

    Attributes
    ----------
    image : QImage
        Colours of the ramp, RGBA premultiplied, not yet with the map's opacity; clear
        where values are under the range or masked. Row 0 lies along `rect`'s y0.
    rect : (4,) float
        x0, y0, x1, y1 of the outer edges of the image. [m]
    iso_lines : tuple of DrawnIsoLine
    masked : tuple of MaskedArea
    caption : str
        Quantity, height, case: one line.
    unit : str
        Of the legend.
    low, high : float
        Range of the colours. [`unit`]
    scale : str
        "logarithmic" or "linear".
    marks : tuple of (value, name)
        Reference levels that the legend marks. [`unit`]
    extent : (2,) float or None
        Smallest and largest value that shows; None for a coarse map. [T]
    is_coarse : bool
        A preview with few points.
    is_stale : bool
        No longer of the layout that is shown.
    is_direct : bool
        Of the field at 0 Hz, where only direct current flows.
    """

    image: QImage
    rect: tuple[float, float, float, float]
    iso_lines: tuple[DrawnIsoLine, ...] = ()
    masked: tuple[MaskedArea, ...] = ()
    caption: str = ""
    unit: str = "µT"
    low: float = 0.1
    high: float = 1000.0
    scale: Scale = "logarithmic"
    marks: tuple[tuple[float, str], ...] = ()
    extent: tuple[float, float] | None = None
    is_coarse: bool = False
    is_stale: bool = False
    is_direct: bool = False
