"""Why a place cannot be compared with a level in a load case."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

import numpy as np

from engine.criteria import ReferenceLevel
from engine.faults import Remark
from engine.layout import Layout
from engine.levels import ratios, what_is_missing
from engine.places import Receptor, Zone

NO_CURRENT = "No current is entered in this load case."
NO_CATEGORY = "The place has no category; choose in its form for whom or what it is."
PARTICULAR_RISK = (
    "It is for persons at particular risk: individual assessment is required."
)


def blocking_sentences(
    layout: Layout, place: Zone | Receptor, faults: Iterable[Remark]
) -> tuple[str, ...]:
    """What blocks the assessment of a place, each sentence once.

    A fault of another zone or receptor alone does not block this one.
    """
    others = {item.id for item in (*layout.zones, *layout.receptors)} - {place.id}
    return tuple(
        dict.fromkeys(
            fault.sentence
            for fault in faults
            if fault.severity == "blocking"
            and not (fault.items and set(fault.items) <= others)
        )
    )


def obstacles(
    place: Zone | Receptor, level: ReferenceLevel, frequencies: Sequence[float]
) -> tuple[str, ...]:
    """What keeps a place from being compared with a level, as sentences.

    Parameters
    ----------
    place, level
        Their categories must be the same.
    frequencies
        Where current flows in the load case. [Hz] Without any, only the level and the
        categories are looked at.

    Returns
    -------
    tuple of str
        Empty when the comparison can be made.
    """
    found = list(what_is_missing(level))
    if not place.category:
        found.append(NO_CATEGORY)
    elif place.category == "persons at particular risk":
        found.append(PARTICULAR_RISK)
    elif level.category and level.category != place.category:
        found.append(
            f"The level “{level.title}” is for “{level.category}”, the place for "
            f"“{place.category}”; name a level of the place's category."
        )
    if not found:
        found += _without_value(level, frequencies)
    return tuple(found)


def _without_value(level: ReferenceLevel, frequencies: Sequence[float]) -> list[str]:
    """A sentence that names the frequencies at which the level says nothing."""
    missing = ratios(level, {f: np.zeros(1) for f in frequencies}).missing
    if not missing:
        return []
    listed = ", ".join(f"{f:g}" for f in missing)
    return [
        f"Current flows at {listed} Hz, where the level “{level.title}” has no value; "
        "enter its value there."
    ]
