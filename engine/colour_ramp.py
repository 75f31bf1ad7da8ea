"""The colour ramps of maps: from pale water to wine, and two-sided for changes.

The ramp is a smooth curve through CIELAB, walked at constant speed, so that equal
steps of the scale are equal steps to the eye. Lightness falls all the way: the order
survives printing in grey and any colour vision. Its ends keep away from white and from
near-black: what lies under the range is paper, light or dark, and must not look like
either end.

Differences have two arms from a pale grey: blue where values fall, orange where they
rise. Both are as dark at the same distance from the middle.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache
from math import comb, log10
from typing import Literal

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Scale = Literal["logarithmic", "linear"]

#: Control points (L*, a*, b*) of the curve, from low to high values.
ANCHORS = (
    (90.0, -18.0, -8.0),
    (76.0, -22.0, -34.0),
    (54.0, 16.0, -58.0),
    (42.0, 62.0, -26.0),
    (30.0, 48.0, 22.0),
)

#: Control points of the two arms of changes, from no change on.
FALLING = (
    (95.0, 0.0, 0.0),
    (81.0, -10.0, -26.0),
    (57.0, 0.0, -60.0),
    (26.0, 34.0, -56.0),
)
RISING = ((95.0, 0.0, 0.0), (81.0, 10.0, 40.0), (57.0, 42.0, 70.0), (26.0, 36.0, 30.0))

N_COLOURS = 256

#: Colours of one arm, the middle among them.
N_ARM = 128

#: Opacity of every map over the paper.
OPACITY = 0.7

#: CIE standard illuminant D65 (2° observer), Y = 1.
_WHITE = np.array([0.95047, 1.0, 1.08883])

#: XYZ (D65) to linear sRGB, IEC 61966-2-1.
_SRGB = np.array(
    [
        [3.2404542, -1.5371385, -0.4985314],
        [-0.9692660, 1.8760108, 0.0415560],
        [0.0556434, -0.2040259, 1.0572252],
    ]
)


def _linear_rgb(lab: Floats) -> Floats:
    """Linear sRGB of CIELAB colours, not clipped."""
    lightness, a, b = np.moveaxis(lab, -1, 0)
    fy = (lightness + 16.0) / 116.0
    f = np.stack([fy + a / 500.0, fy, fy - b / 200.0], axis=-1)
    corner = 6.0 / 29.0
    xyz = np.where(f > corner, f**3, 3.0 * corner**2 * (f - 4.0 / 29.0)) * _WHITE
    return np.asarray(xyz @ _SRGB.T)


@cache
def lab_ramp() -> Floats:
    """The ramp in CIELAB.

    Returns
    -------
    (256, 3) float
        L*, a*, b* from low to high values, equally far apart (CIE 1976 difference).

    Notes
    -----
    A Bézier curve of the anchors: since their lightness falls, so does the curve's.
    """
    curve = _bezier(ANCHORS)
    steps = np.linalg.norm(np.diff(curve, axis=0), axis=1)
    walked = np.concatenate([[0.0], np.cumsum(steps)])
    even = np.linspace(0.0, walked[-1], N_COLOURS)
    lab = np.stack([np.interp(even, walked, axis) for axis in curve.T], axis=1)
    lab.flags.writeable = False
    return lab


def _bezier(anchors: Sequence[tuple[float, float, float]]) -> Floats:
    """(4001, 3) points of the Bézier curve of the anchors."""
    t = np.linspace(0.0, 1.0, 4001)
    degree = len(anchors) - 1
    curve = np.zeros((t.size, 3))
    for k, anchor in enumerate(anchors):
        weight = comb(degree, k) * (1.0 - t) ** (degree - k) * t**k
        curve += weight[:, None] * np.asarray(anchor)
    return curve


@cache
def lab_two_sided() -> Floats:
    """The ramp of changes in CIELAB.

    Returns
    -------
    (255, 3) float
        From the largest fall over no change, at index 127, to the largest rise. The
        lightness falls evenly from the middle to both ends.
    """
    arms = []
    for anchors in (FALLING, RISING):
        curve = _bezier(anchors)
        even = np.linspace(anchors[0][0], anchors[-1][0], N_ARM)
        along = np.interp(-even, -curve[:, 0], np.arange(len(curve), dtype=float))
        arms.append(
            np.stack(
                [np.interp(along, np.arange(len(curve)), axis) for axis in curve.T],
                axis=1,
            )
        )
    lab = np.concatenate([arms[0][:0:-1], arms[1]])
    lab.flags.writeable = False
    return lab


@cache
def rgb_ramp() -> npt.NDArray[np.uint8]:
    """The ramp as sRGB bytes, shape (256, 3), from low to high values."""
    return _bytes(lab_ramp())


@cache
def rgb_two_sided() -> npt.NDArray[np.uint8]:
    """The ramp of changes as sRGB bytes, shape (255, 3)."""
    return _bytes(lab_two_sided())


def _bytes(lab: Floats) -> npt.NDArray[np.uint8]:
    linear = np.clip(_linear_rgb(lab), 0.0, 1.0)
    gamma = np.where(
        linear <= 0.0031308,
        12.92 * linear,
        1.055 * linear ** (1.0 / 2.4) - 0.055,
    )
    rgb = np.round(gamma * 255.0).astype(np.uint8)
    rgb.flags.writeable = False
    return rgb


def position(
    values: npt.ArrayLike, low: float, high: float, scale: Scale = "logarithmic"
) -> Floats:
    """Where values lie on the ramp: 0 at `low`, 1 at `high` and above.

    Parameters
    ----------
    values : float array
        Flux densities, or anything in the unit of `low` and `high`. [T]

    Returns
    -------
    float array of the same shape
        nan under the range (and where the value itself is nan): not coloured.

    Raises
    ------
    ValueError
        When the range is empty, or not positive on a logarithmic scale.
    """
    if not low < high or (scale == "logarithmic" and low <= 0):
        raise ValueError(f"no {scale} range from {low!r} to {high!r}")
    data = np.asarray(values, dtype=np.float64)
    placed = np.full(data.shape, np.nan)
    shown = data >= low
    inside = np.minimum(data[shown], high)
    if scale == "logarithmic":
        placed[shown] = np.log10(inside / low) / log10(high / low)
    else:
        placed[shown] = (inside - low) / (high - low)
    return np.asarray(np.clip(placed, 0.0, 1.0))


def colours(
    values: npt.ArrayLike, low: float, high: float, scale: Scale = "logarithmic"
) -> npt.NDArray[np.uint8]:
    """RGBA bytes of values, shape (…, 4); transparent where nothing is coloured.

    Raises
    ------
    ValueError
        When the range is empty, or not positive on a logarithmic scale.
    """
    placed = position(values, low, high, scale)
    shown = np.isfinite(placed)
    index = np.zeros(placed.shape, dtype=np.intp)
    index[shown] = np.round(placed[shown] * (N_COLOURS - 1)).astype(np.intp)
    rgba = np.zeros((*placed.shape, 4), dtype=np.uint8)
    rgba[..., :3] = rgb_ramp()[index]
    rgba[..., 3] = 255
    rgba[~shown] = 0
    return rgba


def signed_position(
    values: npt.ArrayLike, low: float, high: float, scale: Scale = "logarithmic"
) -> Floats:
    """Where changes lie on the two-sided ramp: −1 at −`high`, 1 at `high`.

    Each side is a scale from `low` to `high` as maps have it; a change of less than
    `low` is none.

    Raises
    ------
    ValueError
        As `position`.
    """
    data = np.asarray(values, dtype=np.float64)
    placed = position(np.abs(data), low, high, scale)
    found = np.where(np.isfinite(placed), np.sign(data) * placed, 0.0)
    return np.asarray(np.where(np.isfinite(data), found, np.nan))


def ratio_position(ratios: npt.ArrayLike, reach: float) -> Floats:
    """Where ratios lie: −1 at 1/`reach` and under it, 0 at 1, 1 at `reach`.

    Raises
    ------
    ValueError
        When `reach` is not over 1.
    """
    if not reach > 1:
        raise ValueError(f"no range of ratios up to {reach!r}")
    data = np.asarray(ratios, dtype=np.float64)
    least = np.maximum(data, 1.0 / reach)
    return np.asarray(np.clip(np.log10(least) / log10(reach), -1.0, 1.0))


def two_sided_colours(placed: npt.ArrayLike) -> npt.NDArray[np.uint8]:
    """RGBA bytes of places from −1 to 1, shape (…, 4); nan is transparent."""
    places = np.asarray(placed, dtype=np.float64)
    shown = np.isfinite(places)
    index = np.zeros(places.shape, dtype=np.intp)
    index[shown] = np.round((places[shown] + 1.0) * (N_ARM - 1)).astype(np.intp)
    rgba = np.zeros((*places.shape, 4), dtype=np.uint8)
    rgba[..., :3] = rgb_two_sided()[index]
    rgba[..., 3] = 255
    rgba[~shown] = 0
    return rgba


def on_paper(rgb: npt.NDArray[np.uint8]) -> npt.NDArray[np.uint8]:
    """Colours at the map's opacity over white, so that drawing lines stand out."""
    over = 255.0 - OPACITY * (255.0 - rgb.astype(np.float64))
    return np.round(over).astype(np.uint8)
