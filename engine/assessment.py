"""Zones and receptors against the levels they name, in every load case."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from engine.certified import TOLERANCE
from engine.circuits import LoadCase
from engine.decisions import Counts, counts, exit_code, state_of, worst_comparisons
from engine.errors import Cancelled, Progress, stop_if
from engine.field import ResponseCache
from engine.items import Item
from engine.layout import Layout
from engine.loaded_layout import loaded_layout
from engine.places import Receptor, Zone
from engine.receptor_assessment import receptor_result
from engine.results import (
    STATES,
    Assessment,
    AtFrequency,
    CaseResult,
    Comparison,
    Contribution,
    Maximum,
    NetCurrentEffect,
    PlaceDetails,
    ReceptorField,
    ReceptorResult,
    State,
    ZoneResult,
)
from engine.zone_assessment import zone_floor, zone_result

__all__ = [
    "STATES",
    "TOLERANCE",
    "Assessment",
    "AtFrequency",
    "CaseResult",
    "Comparison",
    "Contribution",
    "Counts",
    "Maximum",
    "NetCurrentEffect",
    "PlaceDetails",
    "ReceptorField",
    "ReceptorResult",
    "State",
    "ZoneResult",
    "assess",
    "counts",
    "exit_code",
    "state_of",
    "worst_comparisons",
    "zone_floor",
]


def assess(
    layout: Layout,
    *,
    cases: Sequence[LoadCase] | None = None,
    certify: bool = False,
    tolerance: float = TOLERANCE,
    cache: ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> Assessment:
    """Compare every zone and receptor with its levels in every load case.

    Whatever stands in the way of a comparison makes it "not evaluable" with its
    reason; nothing is left out in silence.

    Parameters
    ----------
    layout : Layout
        The room.
    cases
        Load cases; None: all of the layout, counted and for information.
    certify : bool
        Whether the maxima of zones get proven upper bounds; the states then use them.
    tolerance : float
        By how much a bound may exceed the value found. Relative.
    cache
        Keeps responses between assessments of layouts with the same geometry.

    Raises
    ------
    ComputationCancelled
        When `cancelled` says so.
    """
    chosen = layout.cases if cases is None else cases
    loaded = loaded_layout(layout, chosen, cache, cancelled)
    if layout.receptors and loaded.fields.cases:
        points = [receptor.at for receptor in layout.receptors]
        loaded.fields.look_at(np.array(points, np.float64))
    places: list[Item] = [*layout.zones, *layout.receptors]
    zones, receptors = [], []
    for k, place in enumerate(places):
        stop_if(cancelled)
        if progress is not None:
            progress(k / len(places), f"Assessing “{place.title}”")
        if isinstance(place, Zone):
            zones.append(
                zone_result(
                    loaded,
                    place,
                    tolerance=tolerance if certify else None,
                    progress=_part(progress, k, len(places)),
                )
            )
        elif isinstance(place, Receptor):
            receptors.append(receptor_result(loaded, place))
    if progress is not None:
        progress(1.0, "Assessed")
    return Assessment(layout, loaded.cases, tuple(zones), tuple(receptors))


def _part(progress: Progress | None, k: int, count: int) -> Progress | None:
    """The progress of the k-th of some places, as progress of them all."""
    if progress is None:
        return None
    tell = progress

    def told(share: float, text: str) -> None:
        tell((k + share) / count, text)

    return told
