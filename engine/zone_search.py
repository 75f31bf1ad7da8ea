"""Where in a zone a quantity is largest: a grid fit for the distances, then zooming."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.case_fields import CaseFields
from engine.criteria import ReferenceLevel
from engine.errors import stop_if
from engine.evaluations import Evaluation, Quantity, evaluation_at, points_over
from engine.levels import Kind, is_kind, ratios
from engine.regions import Region, Sample, first_sample
from engine.sampling import held_inside

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

#: Places that are zoomed into, at least two steps apart.
_CANDIDATES = 10
#: Zooming ends when the maximum changes by less. Relative.
_SETTLED = 1e-3
_MOST_ROUNDS = 12
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
    the maximum changes by less than 0.1 %. Masks are applied at every step, so a
    maximum on the edge of a mask is found. The volume rule looks at the volume's skin
    and the surfaces of the masks: free of currents, RMS² is subharmonic and largest on
    the boundary.

    Raises
    ------
    UserError
        When the region takes too many points.
    """
    sample = first_sample(fields, region)
    scores, masks = _scores(fields, region, quantities, sample.cells.points, keep=True)
    found: list[Found | None] = []
    places: dict[tuple[object, ...], tuple[Floats, float]] = {}
    for quantity, score in zip(quantities, scores, strict=True):
        stop_if(fields.cancelled)
        case = fields.cases[quantity.case]
        above = 0.0 if quantity.level is None else _area_above(sample, score)
        if not np.any(np.isfinite(score)):
            found.append(None)
        elif region.rule == "area mean":
            mask = masks[quantity.case]
            found.append(_area_mean(fields, region, quantity, sample, mask, above))
        else:
            key = quantity.same_place_as(case.frequencies)
            if key not in places:
                places[key] = _zoomed(fields, region, quantity, sample, score)
            position, step = places[key]
            found.append(_at(fields, region, quantity, position, step, above))
    steps = sample.cells.steps
    return Search(
        tuple(found), tuple(_masked_share(sample, mask) for mask in masks),
        len(sample.layers), float(np.max(steps)), float(np.min(steps)),
    )  # fmt: skip


def _scores(
    fields: CaseFields,
    region: Region,
    quantities: Sequence[Quantity],
    positions: Floats,
    *,
    keep: bool,
) -> tuple[Floats, Bools]:
    """Scores (quantities, p), −inf where masked, and masks (cases, p)."""
    n_components = sum(len(case.components) for case in fields.cases)
    block = max(1000, _VALUES_AT_ONCE // max(1, n_components * len(region.offsets)))
    scores, masks = [], []
    for start in range(0, len(positions), block):
        part = positions[start : start + block]
        points = points_over(region, part)
        whole = fields.flux_densities(points, keep=keep)
        in_case = [
            Evaluation(case, b, fields.masked(case, points, region.clearance),
                       len(region.offsets))
            for case, b in zip(fields.cases, whole, strict=True)
        ]  # fmt: skip
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


def _zoomed(
    fields: CaseFields,
    region: Region,
    quantity: Quantity,
    sample: Sample,
    score: Floats,
) -> tuple[Floats, float]:
    """Position (3,) of the largest score after zooming, and the last step. [m]"""
    chosen = _candidates(sample, score)
    centres, values = sample.cells.points[chosen], score[chosen]
    reach = sample.cells.steps[chosen]
    offsets = _zoom_offsets(region)
    best = float(np.max(values))
    per_side = round(len(offsets) ** (1 / _zoom_axes(region)))
    step = float(np.max(reach))
    for turn in range(_MOST_ROUNDS):
        places = (centres[:, None] + reach[:, None, None] * offsets).reshape(-1, 3)
        places = _held(region, places)
        tried = _score_of(fields, region, quantity, places).reshape(len(centres), -1)
        pick = np.argmax(tried, axis=1)
        moved = places.reshape(len(centres), -1, 3)[np.arange(len(centres)), pick]
        reached = tried[np.arange(len(centres)), pick]
        better = reached > values
        centres = np.where(better[:, None], moved, centres)
        values = np.maximum(values, reached)
        step = float(np.max(reach)) * 2 / (per_side - 1)
        settled = float(np.max(values)) - best < _SETTLED * float(np.max(values))
        best = float(np.max(values))
        if turn > 0 and settled:
            break
        kept = values >= 0.9 * best
        centres, values = centres[kept], values[kept]
        reach = reach[kept] / 4
    return centres[int(np.argmax(values))], step


def _zoom_axes(region: Region) -> int:
    return 3 if region.rule == "maximum over volume" else 2


def _zoom_offsets(region: Region) -> Floats:
    """(k, 3) places around a candidate, within ±1 of it either way."""
    if _zoom_axes(region) == 3:
        line = np.linspace(-1, 1, 7)
        return np.stack(np.meshgrid(line, line, line), axis=-1).reshape(-1, 3)
    line = np.linspace(-1, 1, 9)
    plan = np.stack(np.meshgrid(line, line), axis=-1).reshape(-1, 2)
    return np.column_stack([plan, np.zeros(len(plan))])


def _held(region: Region, places: Floats) -> Floats:
    """The places, moved onto the region's edge where they lie outside it."""
    held = held_inside(region.outline, places)
    if _zoom_axes(region) == 3:
        low, high = (region.floor + h for h in region.volume)
        held = np.column_stack([held[:, :2], np.clip(held[:, 2], low, high)])
    return held


def _candidates(sample: Sample, score: Floats) -> NDArray[np.int64]:
    """Indices of the largest scores that lie at least two steps apart."""
    order = np.argsort(-score)[: int(np.count_nonzero(np.isfinite(score)))]
    points, steps = sample.cells.points, sample.cells.steps
    left = np.ones(len(order), bool)
    chosen: list[int] = []
    while len(chosen) < _CANDIDATES and np.any(left):
        first = order[int(np.argmax(left))]
        chosen.append(int(first))
        apart = np.linalg.norm(points[order] - points[first], axis=1)
        left &= apart >= 2 * np.maximum(steps[order], steps[first])
        left[order == first] = False
    return np.array(chosen, np.int64)


def _score_of(
    fields: CaseFields, region: Region, quantity: Quantity, positions: Floats
) -> Floats:
    return evaluation_at(fields, region, quantity, positions).score(quantity)


def _at(
    fields: CaseFields,
    region: Region,
    quantity: Quantity,
    position: Floats,
    step: float,
    area_above: float,
) -> Found:
    """What stands at a position that the search ended on."""
    evaluation = evaluation_at(fields, region, quantity, position[None])
    return found_at(evaluation, quantity, position, step, area_above)


def found_at(
    evaluation: Evaluation,
    quantity: Quantity,
    position: Floats,
    step: float = 0.0,
    area_above: float = 0.0,
) -> Found:
    """What an evaluation of one position says of a quantity there."""
    values, is_bound, reason = evaluation.by_frequency(quantity.level)
    if quantity.level is None:
        _, is_bound, reason = evaluation.total(quantity.kind)
    score = float(evaluation.unmasked_score(quantity)[0])
    by_frequency = {
        f: float(v[0]) for f, v in values.items() if is_kind(f, quantity.kind)
    }
    return Found(position, score, by_frequency, is_bound, reason, area_above, step)


def _area_mean(
    fields: CaseFields,
    region: Region,
    quantity: Quantity,
    sample: Sample,
    mask: Bools,
    area_above: float,
) -> Found | None:
    """The largest of the means over the level areas, height by height."""
    best: Found | None = None
    for layer in np.unique(sample.layers):
        rows = (sample.layers == layer) & ~mask
        weights = sample.cells.areas[rows]
        if not np.any(weights > 0):
            continue
        points = sample.cells.points[rows]
        evaluation = evaluation_at(fields, region, quantity, points)
        values, is_bound, reason = evaluation.by_frequency(quantity.level)
        means = {
            f: np.array([np.average(v, weights=weights)])
            for f, v in values.items()
            if is_kind(f, quantity.kind)
        }
        local = evaluation.unmasked_score(quantity)
        if quantity.level is None:
            _, is_bound, reason = evaluation.total(quantity.kind)
            score = float(np.average(local, weights=weights))
        else:
            score = _ratio_of_means(quantity.level, means, quantity.kind)
        if best is None or score > best.score:
            best = Found(
                points[int(np.argmax(local))], score,
                {f: float(v[0]) for f, v in means.items()}, is_bound, reason,
                area_above, float(np.max(sample.cells.steps[rows])),
            )  # fmt: skip
    return best


def _ratio_of_means(
    level: ReferenceLevel, means: dict[float, Floats], kind: Kind
) -> float:
    compared = ratios(level, means)
    values = compared.dc if kind == "DC" else compared.ac
    assert values is not None, "asked for a comparison that cannot be made"
    return float(values[0])
