"""How far the field at points uses a reference level up, or why that cannot be said."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.criteria import ReferenceLevel
from engine.currents import Component
from engine.levels import Kind, is_kind, ratios, what_is_missing
from engine.readings import reading
from engine.weighted_peak import weighted_peak

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]


@dataclass(frozen=True, eq=False)
class LevelUse:
    """Ratios of a field to a level.

    Attributes
    ----------
    ratios : (n,) float or None
        1 where the value equals the level; None where nothing can be compared.
    reason : str
        Why there are none; empty otherwise.
    is_bound, bound_reason
        Whether they are upper bounds because angles are unknown, and why.
    """

    ratios: Floats | None
    reason: str
    is_bound: bool = False
    bound_reason: str = ""


def level_use(
    b: Complexes, components: Sequence[Component], level: ReferenceLevel, kind: Kind
) -> LevelUse:
    """Ratios of a field to a level, AC or DC.

    Parameters
    ----------
    b : (c, n, 3) complex
        RMS phasors. [T]
    components : c components
    level
        Its basis, component and sum rule are kept.
    kind
        AC: all frequencies above 0 Hz; DC: 0 Hz only.
    """
    lacking = what_is_missing(level)
    if lacking:
        return LevelUse(None, " ".join(lacking))
    rows = [k for k, c in enumerate(components) if is_kind(c.frequency, kind)]
    if not rows:
        return LevelUse(None, f"No {kind} current flows in this load case.")
    values = reading(
        b[rows], [components[k] for k in rows], level.basis, level.component
    )
    compared = ratios(level, values.by_frequency)
    found = compared.ac if kind == "AC" else compared.dc
    if found is not None and kind == "AC" and level.sum_rule == "weighted peak":
        peak = weighted_peak(b[rows], [components[k] for k in rows], level)
        return LevelUse(peak.values, "", peak.is_bound, peak.reason)
    if found is None:
        lacked = sorted({*compared.missing, *compared.not_covered})
        listed = ", ".join(f"{f:g}" for f in lacked)
        return LevelUse(
            None,
            f"Current flows at {listed} Hz, where the level “{level.title}” has no "
            "value; enter its value there.",
        )
    return LevelUse(found, "", values.is_bound, values.reason)
