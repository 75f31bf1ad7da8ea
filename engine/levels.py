"""Reference levels over frequency: their value, what they lack, the ratio to them."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from engine.criteria import LevelRange, LevelRanges, LevelTable, ReferenceLevel

Floats = NDArray[np.float64]
Kind = Literal["AC", "DC"]

#: Frequencies that differ by less are the same row or corner. Relative.
_SAME_FREQUENCY = 1e-9


def level_at(level: ReferenceLevel, frequency: float) -> float | None:
    """The level's value at one frequency, or None where it states none. [T]

    Ranges include both ends; where several hold, the strictest counts. A table is exact
    at its rows and straight between them on logarithmic axes; nothing is extrapolated,
    and 0 Hz holds only where a row or a range from 0 to 0 Hz says so.

    Raises
    ------
    ValueError
        When the frequency is negative or not finite.

    Examples
    --------
    >>> flat = LevelRange(f_from=25, f_to=400, coefficient=2e-4)
    >>> falling = LevelRange(f_from=400, f_to=3000, coefficient=0.08, exponent=1)
    >>> level = ReferenceLevel(id="a", values=LevelRanges(ranges=(flat, falling)))
    >>> level_at(level, 1000.0)
    8e-05
    >>> level_at(level, 3500.0) is None
    True
    """
    if not (math.isfinite(frequency) and frequency >= 0):
        raise ValueError(f"frequency {frequency} Hz is not a frequency")
    if isinstance(level.values, LevelRanges):
        found = [_in_range(r, frequency) for r in level.values.ranges]
        return min((value for value in found if value is not None), default=None)
    if isinstance(level.values, LevelTable):
        return _in_table(level.values, frequency)
    return None


def _same(first: float, second: float) -> bool:
    return math.isclose(first, second, rel_tol=_SAME_FREQUENCY, abs_tol=0.0)


def _in_range(power_law: LevelRange, frequency: float) -> float | None:
    """Coefficient · f^(−exponent), or None outside the range. [T]"""
    low, high = power_law.f_from, power_law.f_to
    inside = low <= frequency <= high or _same(frequency, low) or _same(frequency, high)
    if not inside or _mixes_dc(power_law):
        return None
    if frequency == 0:
        return power_law.coefficient if power_law.exponent == 0 else None
    return float(power_law.coefficient * frequency**-power_law.exponent)


def _mixes_dc(power_law: LevelRange) -> bool:
    """Whether the range takes 0 Hz and AC together, which is no comparison."""
    return power_law.f_from == 0 < power_law.f_to


def _in_table(table: LevelTable, frequency: float) -> float | None:
    """Row, or a straight line between two rows on logarithmic axes. [T]"""
    at = [p.level for p in table.points if _same(p.frequency, frequency)]
    if at:
        return min(at)
    below = [p for p in table.points if 0 < p.frequency < frequency]
    above = [p for p in table.points if p.frequency > frequency]
    if frequency == 0 or not below or not above:
        return None
    near = max(p.frequency for p in below)
    far = min(p.frequency for p in above)
    # Two rows at one frequency are a step: the stricter side counts.
    start = min(p.level for p in below if p.frequency == near)
    stop = min(p.level for p in above if p.frequency == far)
    part = math.log(frequency / near) / math.log(far / near)
    return float(start * (stop / start) ** part)


def is_kind(frequency: float, kind: Kind) -> bool:
    """Whether a frequency counts to DC (0 Hz) or to AC."""
    return (frequency == 0) == (kind == "DC")


def covers(level: ReferenceLevel, kind: Kind) -> bool:
    """Whether the level states any value at 0 Hz (DC) or above it (AC)."""
    if kind == "DC":
        return level_at(level, 0.0) is not None
    if isinstance(level.values, LevelRanges):
        return any(r.f_to > 0 and not _mixes_dc(r) for r in level.values.ranges)
    if isinstance(level.values, LevelTable):
        return any(p.frequency > 0 for p in level.values.points)
    return False


def what_is_missing(level: ReferenceLevel) -> tuple[str, ...]:
    """Sentences that say why nothing can be compared with this level, if so."""
    name = level.title
    sentences = []
    if not level.source.strip():
        sentences.append(
            f"The level “{name}” has no source; state where it comes from."
        )
    if not level.category:
        sentences.append(f"The level “{name}” has no category; state whom it is for.")
    sentences += _missing_values(level)
    return tuple(sentences)


def _missing_values(level: ReferenceLevel) -> list[str]:
    """What the values lack, as sentences."""
    name, values = level.title, level.values
    if isinstance(values, LevelTable):
        return (
            [] if values.points else [f"The level “{name}” has no values; enter them."]
        )
    if values is None or not values.ranges:
        return [f"The level “{name}” has no values; enter them."]
    sentences = []
    for r in values.ranges:
        if _mixes_dc(r):
            sentences.append(
                f"The level “{name}” has a range from 0 to {r.f_to:g} Hz, which puts "
                "DC and AC in one total; enter 0 Hz as a range of its own."
            )
        elif r.f_from > r.f_to:
            sentences.append(
                f"The level “{name}” has a range from {r.f_from:g} to {r.f_to:g} Hz; "
                "enter the lower frequency first."
            )
        elif r.f_from == 0 and r.exponent != 0:
            sentences.append(
                f"The level “{name}” has an exponent of {r.exponent:g} at 0 Hz, where "
                "no power of the frequency exists; enter exponent 0."
            )
    return sentences


@dataclass(frozen=True, eq=False)
class Ratios:
    """How far the field uses a level up: B/L over its frequencies, AC and DC apart.

    Attributes
    ----------
    ac, dc : (n,) float or None
        Ratio of the AC frequencies together, and of 0 Hz. None: none compared.
    missing : tuple of float
        Frequencies with a field for which the level states nothing. AC frequencies
        here forbid the AC comparison where the level covers AC. [Hz]
    not_covered : tuple of float
        Frequencies of the kind (AC or DC) that the level does not deal with. [Hz]
    """

    ac: Floats | None
    dc: Floats | None
    missing: tuple[float, ...]
    not_covered: tuple[float, ...]

    @property
    def larger(self) -> tuple[Kind, Floats] | None:
        """The kind with the larger ratio anywhere, and its ratios; never a mixture."""
        if self.ac is None or self.dc is None:
            if self.ac is not None:
                return ("AC", self.ac)
            return None if self.dc is None else ("DC", self.dc)
        if np.max(self.dc, initial=0.0) > np.max(self.ac, initial=0.0):
            return ("DC", self.dc)
        return ("AC", self.ac)


def ratios(level: ReferenceLevel, by_frequency: Mapping[float, Floats]) -> Ratios:
    """Ratios of a field to a level.

    Parameters
    ----------
    level : ReferenceLevel
        Its sum rule says how several frequencies count together.
    by_frequency : (n,) float by frequency [Hz]
        The field in the level's own basis and component. [T]

    Returns
    -------
    Ratios
        ``Σ B_f / L_f`` for the ratio sum (ICNIRP 2010, Health Physics 99(6):818,
        eq. 5) or ``sqrt(Σ (B_f / L_f)²)``, over the frequencies above 0 Hz. Values by
        frequency know no angles: for the weighted peak it is the ratio sum, which is
        never below it (`engine/weighted_peak.py` has the peak itself).
    """
    at = {f: level_at(level, f) for f in by_frequency}
    not_covered = tuple(
        f for f in sorted(at) if not covers(level, "DC" if f == 0 else "AC")
    )
    compared = {f: value for f, value in at.items() if value is not None}
    missing = tuple(f for f in sorted(at) if f not in compared and f not in not_covered)
    if not compared:
        # Nothing that flows is covered: then every frequency lacks its value.
        return Ratios(None, None, tuple(sorted(at)), ())
    parts = [by_frequency[f] / value for f, value in compared.items() if f > 0]
    if not parts or missing:
        ac = None
    elif level.sum_rule == "root sum of squares":
        ac = np.sqrt(np.sum(np.square(parts), axis=0))
    else:
        ac = np.sum(parts, axis=0)
    dc = by_frequency[0.0] / compared[0.0] if 0.0 in compared else None
    return Ratios(ac, dc, missing, not_covered)
