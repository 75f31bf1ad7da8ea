"""The fall-off of a curve: how it falls with distance from what makes it, and its name.

The slope is that of log B over log r. Far from them, a net current gives 1/r, two or
three conductors with balanced currents 1/r², two opposed circuits 1/r³.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import ceil, floor

import numpy as np
from numpy.typing import NDArray

from engine.conductor import Conductor
from engine.levels import Kind
from engine.profiles import ProfileCurve
from engine.runs import Run
from engine.units import LENGTH_UNITS, significant

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]

#: Exponents this near to a whole number, over all of the range, bear its name.
_NEAR = 0.15
#: The distance must grow at least so many times.
_LEAST_RANGE = 1.5
#: Without a stated range, the outermost part over which the distance grows so much.
_OUTERMOST = 4.0
#: Rises smaller than this are the field's own accuracy.
_FLAT = 2e-3
#: Places of the fit, evenly spread in log r.
_PLACES = 64

_DIGITS = "⁰¹²³⁴⁵⁶⁷⁸⁹"


@dataclass(frozen=True)
class FallOff:
    """How a curve falls with distance.

    Attributes
    ----------
    slope : float
        n of B ∝ 1/rⁿ, fitted over the range.
    near_slope, far_slope : float
        Of the inner and the outer half of the range.
    name : str
        "1/r²", or "between 1/r and 1/r²".
    r_from, r_to : float
        Range of distances. [m]
    measured_from : str
        What r is measured from, in words.
    """

    slope: float
    near_slope: float
    far_slope: float
    name: str
    r_from: float
    r_to: float
    measured_from: str

    def sentence(self, length_unit: str = "m") -> str:
        """In words, with the range in a unit of length."""
        return (
            f"Falls as {self.name} (exponent {self.slope:.2f}) from "
            f"{_range_text(self.r_from, self.r_to, length_unit)} from "
            f"{self.measured_from}."
        )


@dataclass(frozen=True)
class NoFallOff:
    """Why a curve has no fall-off.

    Attributes
    ----------
    reason : str
        In words, up to the range of distances.
    r_from, r_to : float
        That range; both 0 where the reason needs none. [m]
    measured_from : str
        What r is measured from, in words; empty without a range.
    """

    reason: str
    r_from: float = 0.0
    r_to: float = 0.0
    measured_from: str = ""

    def sentence(self, length_unit: str = "m") -> str:
        """In words, with the range in a unit of length."""
        if not self.measured_from:
            return f"{self.reason}."
        span = _range_text(self.r_from, self.r_to, length_unit)
        return f"{self.reason} from {span} from {self.measured_from}."


def _range_text(low: float, high: float, length_unit: str) -> str:
    """ "1.00 to 4.00 m", to three significant figures."""
    one = LENGTH_UNITS[length_unit]
    return f"{significant(low / one)} to {significant(high / one)} {length_unit}"


def distances_from_run(run: Run, points: Floats) -> Floats:
    """(n,) distances of points (n, 3) from the line of a run's route. [m]"""
    return _distances([np.array(run.route, np.float64)], points)


def distances_from_nearest(conductors: Sequence[Conductor], points: Floats) -> Floats:
    """(n,) distances of points (n, 3) from the nearest conductor's axis. [m]

    Infinite without any conductor.
    """
    return _distances([conductor.path for conductor in conductors], points)


def _distances(paths: Sequence[Floats], points: Floats) -> Floats:
    nearest = np.full(len(points), np.inf)
    for path in paths:
        for a, b in pairwise(path):
            leg = b - a
            part = np.clip((points - a) @ leg / (leg @ leg), 0.0, 1.0)
            apart = points - a - part[:, None] * leg
            nearest = np.minimum(nearest, np.linalg.norm(apart, axis=1))
    return nearest


def fall_off(
    curve: ProfileCurve,
    kind: Kind,
    distances: Floats,
    measured_from: str,
    *,
    r_range: tuple[float, float] | None = None,
) -> FallOff | NoFallOff:
    """The fall-off of a profile's curve.

    Parameters
    ----------
    distances : (n,) float
        Of the curve's samples from a run or the nearest conductor. [m]
    measured_from
        What these are measured from: "Riser", "the nearest conductor".
    r_range
        Smallest and largest distance to fit; None: the outermost part of the line
        that leads away, over which the distance grows four times. [m]

    Returns
    -------
    FallOff or NoFallOff
        None is given where the line does not lead away, the field does not fall all
        the way, or the distance grows less than one and a half times.
    """
    values = curve.values(kind)
    if values is None:
        return NoFallOff(f"No {kind} current flows in this load case")
    branch = _leading_away(distances, curve.mask)
    r, b = distances[branch], values[branch]
    if r_range is None and len(r):
        r_range = (max(float(r[0]), float(r[-1]) / _OUTERMOST), float(r[-1]))
    if r_range is not None and len(r):
        low, high = max(r_range[0], float(r[0])), min(r_range[1], float(r[-1]))
    if not len(r) or not low > 0 or high < _LEAST_RANGE * low:
        return NoFallOff(
            f"No fall-off is given: the line does not lead far enough away from "
            f"{measured_from}; the distance must grow at least {_LEAST_RANGE:g} times"
        )
    within = (r >= low) & (r <= high)
    if np.any(b <= 0) or _rises(b[within]):
        return NoFallOff(
            "No fall-off is given: the field does not fall all the way",
            low,
            high,
            measured_from,
        )
    slope, near, far = _slopes(r, b, low, high)
    return FallOff(slope, near, far, _name(slope, near, far), low, high, measured_from)


def _leading_away(distances: Floats, masked: NDArray[np.bool_]) -> Integers:
    """Samples of the longer way out, from its innermost; masked ones end it."""
    best = np.zeros(0, np.int64)
    if not len(distances) or not np.all(np.isfinite(distances)):
        return best
    reach = 0.0
    for order in (np.arange(len(distances)), np.arange(len(distances))[::-1]):
        # Inwards from the line's end, as long as nothing turns back or is masked.
        inwards = order[::-1]
        r = distances[inwards]
        stops = np.flatnonzero((np.diff(r) >= 0) | masked[inwards][1:])
        count = int(stops[0]) + 1 if len(stops) else len(r)
        if masked[inwards[0]] or count < 3:
            continue
        if r[0] / max(r[count - 1], 1e-12) > reach:
            reach = r[0] / max(r[count - 1], 1e-12)
            best = inwards[:count][::-1]
    return best


def _rises(b: Floats) -> bool:
    """Whether values anywhere rise above what they had fallen to."""
    return bool(np.any(b > np.minimum.accumulate(b) * (1 + _FLAT)))


def _slopes(
    r: Floats, b: Floats, low: float, high: float
) -> tuple[float, float, float]:
    """Fitted exponent over all of the range, over its inner and its outer half."""
    x = np.linspace(np.log(low), np.log(high), _PLACES)
    y = np.interp(x, np.log(r), np.log(b))

    def fitted(part: slice) -> float:
        return float(-np.polyfit(x[part], y[part], 1)[0])

    half = _PLACES // 2
    return fitted(slice(None)), fitted(slice(None, half)), fitted(slice(half, None))


def _name(slope: float, near: float, far: float) -> str:
    """The power of r that all exponents are near to, or the two they lie between.

    Examples
    --------
    >>> _name(2.0, 1.9, 2.1), _name(1.5, 1.4, 1.6)
    ('1/r²', 'between 1/r and 1/r²')
    """
    low, high = min(slope, near, far), max(slope, near, far)
    below, above = floor(low + _NEAR), ceil(high - _NEAR)
    if below >= above:
        return _power(above)
    return f"between {_power(below)} and {_power(above)}"


def _power(n: int) -> str:
    if n < 1:
        return "no fall-off"
    if n == 1:
        return "1/r"
    return "1/r" + "".join(_DIGITS[int(digit)] for digit in str(n))
