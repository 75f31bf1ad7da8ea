"""Where in a zone a quantity is largest: a grid fit for the distances, then zooming."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from engine.case_fields import CaseFields
from engine.criteria import ReferenceLevel
from engine.evaluations import (
    Evaluation,
    Quantity,
    evaluation_at,
    evaluations,
    points_over,
)
from engine.levels import Kind, is_kind, ratios
from engine.mask_edges import MaskEdges
from engine.regions import Region, Sample, first_sample
from engine.surface_cells import joined
from engine.zoom import Zoom, zoom_in

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

#: Field values (components times points) held at once.
_VALUES_AT_ONCE = 2_000_000


@dataclass(frozen=True, eq=False)
class Found:
    """The largest value of one quantity in a region.

    Attributes
    ----------
    position : (3,) float
        Of a mean over heights, its plan position with z of the floor; of an area mean,
        the place of the largest value at its height. [m]
    score : float
        The ratio, or the resultant. [-] or [T]
    by_frequency : dict
        What was compared, at the position or averaged. [T]
    area_above : float
        Where a ratio is above 1, at the worst height; 0 without a level. [m²]
    step : float
        Last step of the search. [m]
    """

    position: Floats
    score: float
    by_frequency: dict[float, float]
    is_bound: bool
    bound_reason: str
    area_above: float
    step: float


@dataclass(frozen=True, eq=False)
class Search:
    """Result of searching one region for several quantities.

    `found` holds None where everything is masked.
    """

    found: tuple[Found | None, ...]
    masked_shares: tuple[float, ...]
    n_places: int
    coarsest: float
    finest: float


def search(
    fields: CaseFields, region: Region, quantities: Sequence[Quantity]
) -> Search:
    """The largest value of each quantity over a region by its spatial rule.

    A grid whose pieces are no longer than half the distance to the nearest conductor
    (down to 20 mm), then ever finer grids around the largest separate candidates until
    the maximum changes by less than 0.1 %. Points that a mask hides are moved onto its
    edge, so a maximum there is found. The volume rule looks at the volume's skin
    and the surfaces of the masks: free of currents, RMS² is subharmonic and largest on
    the boundary.

    Raises
    ------
    UserError
        When the region takes too many points.
    """
    sample = _with_edges(fields, region, first_sample(fields, region))
    scores, masks = _scores(fields, region, quantities, sample.cells.points)
    if region.rule == "area mean":
        found = _area_means(fields, region, quantities, sample)
    else:
        found = _largest(fields, region, quantities, sample, scores)
    for k, (quantity, score) in enumerate(zip(quantities, scores, strict=True)):
        largest = found[k]
        if largest is not None and quantity.level is not None:
            found[k] = replace(largest, area_above=_area_above(sample, score))
    steps = sample.cells.steps
    return Search(
        tuple(found),
        tuple(_masked_share(sample, mask) for mask in masks),
        len(sample.layers),
        float(np.max(steps)),
        float(np.min(steps)),
    )


def _with_edges(fields: CaseFields, region: Region, sample: Sample) -> Sample:
    """The sample with places on the edges of the masks, which stand for no area."""
    if region.rule in ("area mean", "maximum over volume"):
        return sample
    closed = {k.item: k for case in fields.cases for k in case.closed}
    edges = MaskEdges(fields, region, tuple(closed.values())).beside(sample.cells)
    layers = np.full(len(edges.areas), -1)
    return Sample(
        joined([sample.cells, edges]), np.concatenate([sample.layers, layers])
    )


def _largest(
    fields: CaseFields,
    region: Region,
    quantities: Sequence[Quantity],
    sample: Sample,
    scores: Floats,
) -> list[Found | None]:
    """Each quantity at its largest place; proportional ones share the zooming."""
    zooms: dict[tuple[object, ...], Zoom] = {}
    keys = []
    for quantity, score in zip(quantities, scores, strict=True):
        key = quantity.same_place_as(fields.cases[quantity.case].frequencies)
        keys.append(key)
        if key not in zooms and np.any(np.isfinite(score)):
            closed = fields.cases[quantity.case].closed
            edges = MaskEdges(fields, region, closed)
            zooms[key] = Zoom(region, quantity, sample.cells, score, edges)
    zoom_in(fields, region, list(zooms.values()))
    ends = [zooms[key].end if key in zooms else None for key in keys]
    places = [end[0] for end in ends if end is not None]
    if places:
        fields.look_at(points_over(region, np.array(places)))
    found: list[Found | None] = []
    for quantity, end in zip(quantities, ends, strict=True):
        if end is None:
            found.append(None)
            continue
        case = fields.cases[quantity.case]
        evaluation = evaluation_at(fields, region, case, end[0])
        found.append(found_at(evaluation, quantity, *end))
    return found


def _scores(
    fields: CaseFields,
    region: Region,
    quantities: Sequence[Quantity],
    positions: Floats,
) -> tuple[Floats, Bools]:
    """Scores (quantities, p), −inf where masked, and masks (cases, p)."""
    n_components = sum(len(case.components) for case in fields.cases)
    block = max(1000, _VALUES_AT_ONCE // max(1, n_components * len(region.offsets)))
    scores, masks = [], []
    for start in range(0, len(positions), block):
        part = positions[start : start + block]
        in_case = evaluations(fields, region, part, keep=True)
        scores.append([in_case[q.case].score(q) for q in quantities])
        masks.append([evaluation.masked for evaluation in in_case])
    return np.concatenate(scores, axis=1), np.concatenate(masks, axis=1)


def _area_above(sample: Sample, score: Floats) -> float:
    """Area where the ratio is above 1, at the layer where it is largest. [m²]"""
    areas = np.where(score > 1, sample.cells.areas, 0.0)
    level = sample.layers >= 0
    return float(np.max(np.bincount(sample.layers[level], areas[level]), initial=0.0))


def _masked_share(sample: Sample, mask: Bools) -> float:
    """Share of the level areas where nobody is."""
    areas = np.where(sample.layers >= 0, sample.cells.areas, 0.0)
    return float(np.sum(areas[mask]) / np.sum(areas))


def found_at(
    evaluation: Evaluation,
    quantity: Quantity,
    position: Floats,
    step: float = 0.0,
    area_above: float = 0.0,
) -> Found:
    """What an evaluation of one position says of a quantity there."""
    values = evaluation.by_frequency(quantity.level)[0]
    is_bound, reason = evaluation.bound(quantity)
    score = float(evaluation.unmasked_score(quantity)[0])
    by_frequency = {
        f: float(v[0]) for f, v in values.items() if is_kind(f, quantity.kind)
    }
    return Found(position, score, by_frequency, is_bound, reason, area_above, step)


def _area_means(
    fields: CaseFields, region: Region, quantities: Sequence[Quantity], sample: Sample
) -> list[Found | None]:
    """Each quantity's largest mean over the level areas, height by height."""
    best: list[Found | None] = [None] * len(quantities)
    for layer in np.unique(sample.layers):
        rows = sample.layers == layer
        points, areas = sample.cells.points[rows], sample.cells.areas[rows]
        step = float(np.max(sample.cells.steps[rows]))
        in_case = evaluations(fields, region, points)
        for k, quantity in enumerate(quantities):
            evaluation = in_case[quantity.case]
            weights = np.where(evaluation.masked, 0.0, areas)
            if not np.any(weights > 0):
                continue
            mean = _area_mean(evaluation, quantity, points, weights, step)
            before = best[k]
            if before is None or mean.score > before.score:
                best[k] = mean
    return best


def _area_mean(
    evaluation: Evaluation,
    quantity: Quantity,
    points: Floats,
    weights: Floats,
    step: float,
) -> Found:
    """One quantity's mean over one level area."""
    values = evaluation.by_frequency(quantity.level)[0]
    is_bound, reason = evaluation.bound(quantity)
    means = {
        f: np.array([np.average(v, weights=weights)])
        for f, v in values.items()
        if is_kind(f, quantity.kind)
    }
    local = evaluation.unmasked_score(quantity)
    if quantity.level is None or quantity.is_weighted:
        score = float(np.average(local, weights=weights))
    else:
        score = _ratio_of_means(quantity.level, means, quantity.kind)
    place = points[int(np.argmax(np.where(weights > 0, local, -np.inf)))]
    by_frequency = {f: float(v[0]) for f, v in means.items()}
    return Found(place, score, by_frequency, is_bound, reason, 0.0, step)


def _ratio_of_means(
    level: ReferenceLevel, means: dict[float, Floats], kind: Kind
) -> float:
    compared = ratios(level, means)
    values = compared.dc if kind == "DC" else compared.ac
    assert values is not None, "asked for a comparison that cannot be made"
    return float(values[0])
