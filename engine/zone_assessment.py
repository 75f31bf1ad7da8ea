"""One zone: its maxima without any level, and its comparisons."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from shapely.geometry import Polygon

from engine.certificate import Certificate
from engine.certified import certified_maxima
from engine.comparability import blocking_sentences
from engine.comparisons import KINDS, Largest, comparisons, quantities
from engine.errors import Progress, UserError
from engine.evaluations import Quantity
from engine.layout import Layout
from engine.loaded_layout import LoadedLayout
from engine.places import Zone
from engine.regions import Region
from engine.results import Maximum, PlaceDetails, ZoneResult
from engine.sampling import area_of
from engine.zone_search import Found, Search, search

ALL_MASKED = "Nobody can be anywhere in it: all of it is masked."


def zone_floor(layout: Layout, zone: Zone) -> float | None:
    """Level of a zone's floor, its own or its storey's; None: none is stated. [m]"""
    if zone.floor_level is not None:
        return zone.floor_level
    return next((s.floor_level for s in layout.storeys if s.id == zone.storey), None)


def _region(layout: Layout, zone: Zone) -> Region | str:
    """The region to search, or why there is none."""
    floor = zone_floor(layout, zone)
    if floor is None:
        return "It states neither a floor level nor a storey; state one of them."
    outline = area_of(zone.outline)
    if not outline.area > 0:
        return "Its outline encloses no area; draw it anew."
    if not Polygon(zone.outline).is_valid:
        return "Its outline crosses or touches itself; draw it anew."
    low, high = zone.volume or (min(zone.heights), max(zone.heights))
    if low > high:
        return "Its volume ends below its beginning; enter the lower height first."
    return Region(outline, floor, zone.heights, (low, high), zone.rule, zone.clearance)


def zone_result(
    loaded: LoadedLayout,
    zone: Zone,
    *,
    tolerance: float | None = None,
    progress: Progress | None = None,
) -> ZoneResult:
    """The largest values of a zone by its spatial rule, and its comparisons.

    With a tolerance they get a proven upper bound.
    """
    region = _region(loaded.layout, zone)
    wanted = quantities(loaded, zone)
    problem, searched = "", None
    found: dict[Quantity, tuple[Found, PlaceDetails]] = {}
    shares: dict[str, float] = {}
    problems: dict[str, str] = {}
    if isinstance(region, str):
        problem = region
    elif loaded.fields.cases:
        try:
            searched = search(loaded.fields, region, wanted)
        except UserError as error:
            problem = str(error)
    certificates: dict[Quantity, Certificate] = {}
    if searched is not None and isinstance(region, Region):
        if tolerance is not None:
            searched, certificates = _proven(
                loaded, region, wanted, searched, tolerance, progress
            )
        positions = [f.position for f in searched.found if f is not None]
        if positions:
            loaded.surroundings.look_around(region, np.array(positions))
        for quantity, largest in zip(wanted, searched.found, strict=True):
            if largest is not None:
                details = loaded.surroundings.details(region, quantity, largest)
                proof = certificates.get(quantity)
                found[quantity] = (largest, replace(details, certificate=proof))
        shares = {id: searched.masked_shares[k] for id, k in loaded.index.items()}
        seen = {quantity.case for quantity in found}
        problems = {id: ALL_MASKED for id, k in loaded.index.items() if k not in seen}
        problem = "" if found else ALL_MASKED
    elif problem:
        problems = {result.case.id: problem for result in loaded.cases}
    elif loaded.cases:
        problem = loaded.cases[0].reason
    return ZoneResult(
        zone=zone,
        floor=zone_floor(loaded.layout, zone),
        area=area_of(zone.outline).area,
        masked_shares=shares,
        maxima=_maxima(loaded, zone, found),
        comparisons=comparisons(loaded, zone, found, problems, shares),
        searched=(
            ""
            if searched is None
            else _described(zone, searched) + _how_proven([*certificates.values()])
        ),
        reason=problem,
    )


def _proven(
    loaded: LoadedLayout,
    region: Region,
    wanted: Sequence[Quantity],
    searched: Search,
    tolerance: float,
    progress: Progress | None,
) -> tuple[Search, dict[Quantity, Certificate]]:
    """The search with higher values where the proof met some, and what is proven."""
    rows = [k for k, found in enumerate(searched.found) if found is not None]
    results = certified_maxima(
        loaded.fields,
        region,
        [wanted[k] for k in rows],
        [found for found in searched.found if found is not None],
        tolerance=tolerance,
        progress=progress,
    )
    largest = list(searched.found)
    certificates = {}
    for k, (certificate, found) in zip(rows, results, strict=True):
        largest[k], certificates[wanted[k]] = found, certificate
    return replace(searched, found=tuple(largest)), certificates


def _how_proven(certificates: Sequence[Certificate]) -> str:
    """How the bounds were proven, as a sentence after others."""
    cells = max((c.cells for c in certificates if c.upper is not None), default=0)
    if not cells:
        return ""
    return (
        f" Upper bounds hold between the places too: proven in {cells:,} boxes from "
        "the field, its slopes and curvatures at their middles and from bounds of its "
        "third derivatives in them, for even current in the conductors as entered."
    )


def _described(zone: Zone, searched: Search) -> str:
    """How the maximum was looked for."""
    places = f"{searched.n_places:,} places at most {searched.coarsest:.3g} m apart"
    near = f"down to {searched.finest:.3g} m near conductors"
    if zone.rule == "area mean":
        return f"Averaged over {places}, {near}."
    steps = [f.step for f in searched.found if f is not None]
    finest = f" down to {max(steps):.2g} m" if steps else ""
    skin = (
        " on the skin of the volume and of the masks in it"
        if zone.rule == "maximum over volume"
        else ""
    )
    return (
        f"Searched {places}, {near}{skin}; then around the largest ones{finest}, until "
        "the maximum changed by less than 0.1 %."
    )


def _maxima(
    loaded: LoadedLayout,
    zone: Zone,
    found: Largest,
) -> tuple[Maximum, ...]:
    """The largest resultants without any level, by case and kind."""
    maxima = []
    for result in loaded.cases:
        for kind in KINDS:
            largest = found.get(Quantity(loaded.index.get(result.case.id, -1), kind))
            if largest is not None:
                blocking = blocking_sentences(loaded.layout, zone, result.faults)
                maxima.append(
                    Maximum(
                        result.case.id, kind, largest[0].score, largest[1],
                        " ".join(blocking),
                    )
                )  # fmt: skip
    return tuple(maxima)
