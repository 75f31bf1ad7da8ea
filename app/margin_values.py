"""Margins: every place against the levels it names, exact or sampled; no Qt.

Sampled rows serve while something is dragged: few points, no state word.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt
import shapely

from app.field_store import FieldStore, sample_of
from engine.assessment import assess
from engine.comparability import blocking_sentences
from engine.comparisons import quantities
from engine.decisions import worst_comparisons
from engine.errors import Cancelled, Progress
from engine.evaluations import Evaluation, Quantity
from engine.items import Point3
from engine.layout import Layout
from engine.levels import Kind, is_kind, level_at
from engine.loaded_layout import LoadedLayout, loaded_layout
from engine.masks import masked
from engine.places import Receptor, Zone
from engine.results import STATES, Assessment, Comparison, NetCurrentEffect
from engine.sampling import area_of
from engine.zone_assessment import zone_floor

Floats = npt.NDArray[np.float64]

#: Places per height of a sampled zone, about.
_PLACES = 110


@dataclass(frozen=True)
class MarginRow:
    """A place against one level, in the worst of the counted load cases.

    Attributes
    ----------
    place, level, case : str
        Ids.
    state : str
        One of the five states; empty while sampled.
    reason : str
        Why it is not evaluable, or why nothing can be said while dragging.
    value, level_value, uncertainty : float or None
        `level_value` where one frequency is compared. [T]
    ratio : float or None
    at : Point3 or None
        Where the value is. [m]
    height : float or None
        To show the map at. [m above the datum]
    net_current : NetCurrentEffect or None
        What 1 A of net current alone would give there.
    measured, measured_ratio : float or None
        Of a receptor: the value measured on site [T], and measured over calculated in
        the row's load case, where it is of the row's kind of field.
    kind : Kind or None
        What is compared; None where nothing is.
    """

    place: str
    place_title: str
    level: str
    level_title: str
    case: str = ""
    case_title: str = ""
    state: str = ""
    reason: str = ""
    value: float | None = None
    level_value: float | None = None
    ratio: float | None = None
    uncertainty: float | None = None
    at: Point3 | None = None
    height: float | None = None
    net_current: NetCurrentEffect | None = None
    measured: float | None = None
    measured_ratio: float | None = None
    kind: Kind | None = None


@dataclass(frozen=True, eq=False)
class Margins:
    """All margins of a layout.

    Attributes
    ----------
    rows : tuple of MarginRow
        In the order of the layout.
    is_sampled : bool
        From a few points while something is dragged.
    assessment : Assessment or None
        What the rows were taken from; None when sampled.
    """

    layout: Layout
    rows: tuple[MarginRow, ...]
    is_sampled: bool
    assessment: Assessment | None = None

    @property
    def worst(self) -> MarginRow | None:
        """The row of greatest concern; while sampled, of the largest ratio."""
        return max(self.rows, key=concern, default=None)


def concern(row: MarginRow) -> tuple[int, float]:
    """Grows with how much a row asks for attention."""
    ratio = -1.0 if row.ratio is None else row.ratio
    return (STATES.index(row.state) if row.state in STATES else 0, ratio)


def exact_margins(
    layout: Layout,
    *,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> Margins:
    """Margins of an assessment of the counted load cases.

    Raises
    ------
    ComputationCancelled
        When `cancelled` says so.
    """
    counted = [case for case in layout.cases if case.counted]
    assessment = assess(layout, cases=counted, cancelled=cancelled, progress=progress)
    return margins_of(assessment)


def margins_of(assessment: Assessment) -> Margins:
    """The worst counted comparison of every place and level."""
    layout = assessment.layout
    titles = _titles(layout)
    rows = [_row(c, titles) for c in worst_comparisons(assessment)]
    return Margins(layout, tuple(_with_measured(rows, assessment)), False, assessment)


def _with_measured(
    rows: Sequence[MarginRow], assessment: Assessment
) -> list[MarginRow]:
    """Rows of receptors with what was measured there."""
    measured = {
        (result.receptor.id, found.case, found.measured_kind): (
            result.receptor.measured.flux_density,
            found.measured_ratio,
        )
        for result in assessment.receptors
        if result.receptor.measured is not None
        for found in result.fields
    }
    made = []
    for row in rows:
        found = measured.get((row.place, row.case, row.kind), (None, None))
        value, ratio = found
        made.append(replace(row, measured=value, measured_ratio=ratio))
    return made


def _titles(layout: Layout) -> Mapping[str, str]:
    titles = {item.id: item.title for item in layout.items()}
    titles.update({case.id: case.title for case in layout.cases})
    return titles


def _row(comparison: Comparison, titles: Mapping[str, str]) -> MarginRow:
    details = comparison.details
    return MarginRow(
        place=comparison.place,
        place_title=titles.get(comparison.place, comparison.place),
        level=comparison.level,
        level_title=titles.get(comparison.level, comparison.level),
        case=comparison.case,
        case_title=titles.get(comparison.case, comparison.case),
        state=comparison.state,
        reason=comparison.reason,
        value=comparison.value,
        level_value=comparison.level_value,
        ratio=comparison.ratio,
        uncertainty=comparison.uncertainty,
        at=None if details is None else details.at,
        height=None if details is None else details.at[2],
        net_current=None if details is None else details.net_current,
        kind=comparison.kind,
    )


#: Places known to matter, by id of the zone: where its maxima were last. [m]
Seeds = Mapping[str, tuple[Point3, ...]]


def seeds_of(margins: Margins) -> Seeds:
    """Where the maxima of exact margins are, so that a drag starts from them."""
    seeds: dict[str, tuple[Point3, ...]] = {}
    for row in margins.rows:
        if row.at is not None:
            seeds[row.place] = (*seeds.get(row.place, ()), row.at)
    return seeds


def sampled_margins(
    layout: Layout,
    store: FieldStore,
    seeds: Seeds | None = None,
    *,
    cancelled: Cancelled | None = None,
) -> Margins:
    """Margins from a coarse grid in every zone, for the time of a drag.

    Parameters
    ----------
    seeds
        Places that are looked at too.

    Raises
    ------
    ComputationCancelled
        When `cancelled` says so.
    """
    counted = [case for case in layout.cases if case.counted]
    every: list[Zone | Receptor] = [*layout.zones, *layout.receptors]
    places = [place for place in every if place.levels]
    if not places:
        return Margins(layout, (), True)
    loaded = loaded_layout(layout, counted, None, cancelled)
    titles = _titles(layout)
    spread = [positions(layout, p, (seeds or {}).get(p.id, ())) for p in places]
    if not loaded.fields.cases:
        rows = [_unsampled(place, titles) for place in places]
        return Margins(layout, tuple(r for own in rows for r in own), True)
    points = np.concatenate([*spread, np.zeros((0, 3))])
    currents = np.concatenate([case.currents for case in loaded.fields.cases])
    b = store.flux_density(
        loaded.fields.conductors,
        currents,
        sample_of(points),
        cancelled=cancelled,
    )
    ends = np.cumsum([len(case.components) for case in loaded.fields.cases])
    by_case = np.split(b, ends[:-1])
    rows_of: list[MarginRow] = []
    first = 0
    for place, own in zip(places, spread, strict=True):
        part = slice(first, first + len(own))
        first += len(own)
        rows_of += _sampled(
            loaded, place, own, [x[:, part] for x in by_case], _unsampled(place, titles)
        )
    return Margins(layout, tuple(rows_of), True)


def positions(
    layout: Layout, place: Zone | Receptor, seeds: Sequence[Point3] = ()
) -> Floats:
    """(n, 3) points of a place, over a zone height by height. [m]"""
    if isinstance(place, Receptor):
        return np.array([place.at], np.float64)
    floor, outline = zone_floor(layout, place), area_of(place.outline)
    if floor is None or not outline.area > 0:
        return np.zeros((0, 3))
    x0, y0, x1, y1 = outline.bounds
    step = float(np.sqrt(outline.area / _PLACES))
    xs = np.linspace(x0, x1, max(2, round((x1 - x0) / step) + 1))
    ys = np.linspace(y0, y1, max(2, round((y1 - y0) / step) + 1))
    plan = np.stack(np.meshgrid(xs, ys), axis=-1).reshape(-1, 2)
    inside = plan[shapely.intersects_xy(outline, plan[:, 0], plan[:, 1])]
    if not len(inside):
        inside = np.array(outline.representative_point().coords)
    if seeds and place.rule != "area mean":
        inside = np.concatenate([inside, np.array(seeds)[:, :2]])
    heights = _heights(place)
    return np.concatenate(
        [np.column_stack([inside, np.full(len(inside), floor + h)]) for h in heights]
    )


def _heights(zone: Zone) -> tuple[float, ...]:
    """Heights that are sampled, above the floor: no more than five. [m]"""
    if zone.rule == "maximum over volume":
        low, high = zone.volume or (min(zone.heights), max(zone.heights))
        return (low, 0.5 * (low + high), high)
    heights = tuple(sorted(set(zone.heights)))
    if len(heights) <= 5 or zone.rule == "three-height mean":
        return heights
    chosen = np.linspace(0, len(heights) - 1, 5).round().astype(int)
    return tuple(heights[k] for k in chosen)


def _unsampled(place: Zone | Receptor, titles: Mapping[str, str]) -> list[MarginRow]:
    """Rows of a place of which nothing can be sampled."""
    return [
        MarginRow(place.id, place.title, id, titles.get(id, id), reason="not sampled")
        for id in dict.fromkeys(place.levels)
    ]


def _sampled(
    loaded: LoadedLayout,
    place: Zone | Receptor,
    points: Floats,
    by_case: Sequence[npt.NDArray[np.complex128]],
    empty: Sequence[MarginRow],
) -> list[MarginRow]:
    """The rows of one place, from its points (n, 3) and fields (c, n, 3) by case."""
    rows = {row.level: row for row in empty}
    if not len(points):
        return list(rows.values())
    rule = place.rule if isinstance(place, Zone) else ""
    clearance = place.clearance if isinstance(place, Zone) else 0.0
    q = 1
    if isinstance(place, Zone) and rule == "three-height mean":
        q = len(_heights(place))
    positions = points[: len(points) // q]
    wanted = quantities(loaded, place)
    for k, case in enumerate(loaded.fields.cases):
        faults = next(r.faults for r in loaded.cases if r.case.id == case.case.id)
        if blocking_sentences(loaded.layout, place, faults):
            continue
        mask = masked(loaded.fields.conductors, case.closed, points, clearance)
        evaluation = Evaluation(case, by_case[k], mask, q)
        for quantity in wanted:
            if quantity.case != k or quantity.level is None:
                continue
            score = evaluation.score(quantity)
            best = int(np.argmax(score))
            if not np.isfinite(score[best]):
                continue
            ratio = float(score[best])
            if rule == "area mean":
                ratio = float(np.mean(score[np.isfinite(score)]))
            row = rows[quantity.level.id]
            if row.ratio is not None and ratio <= row.ratio:
                continue
            x, y, z = (float(c) for c in positions[best])
            value, limit = _absolute(
                quantity, evaluation, case.frequencies, best, ratio
            )
            rows[row.level] = replace(
                row,
                case=case.case.id,
                case_title=case.case.title,
                reason="",
                ratio=ratio,
                value=value,
                level_value=limit,
                at=(x, y, z),
                height=z,
            )
    return list(rows.values())


def _absolute(
    quantity: Quantity,
    evaluation: Evaluation,
    frequencies: Sequence[float],
    best: int,
    ratio: float,
) -> tuple[float, float | None]:
    """Value of a sampled ratio, and the level where it is one frequency. [T]"""
    assert quantity.level is not None
    own = [f for f in frequencies if is_kind(f, quantity.kind)]
    limit = level_at(quantity.level, own[0]) if len(own) == 1 else None
    if limit is not None:
        return ratio * limit, limit
    by_frequency = evaluation.by_frequency(quantity.level)[0]
    parts = [float(by_frequency[f][best]) for f in own if f in by_frequency]
    return float(np.linalg.norm(parts)), None
