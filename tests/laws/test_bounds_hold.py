"""A proven bound is never below a value that somebody computes in the zone."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from shapely import contains_xy

from engine.case_fields import CaseFields
from engine.certified import certified_maxima
from engine.certified.boxes import Boxes
from engine.certified.expansions import Source
from engine.certified.masking import Masked
from engine.certified.upper_scores import enclosure, upper_scores
from engine.circuits import Circuit, ConductorCurrent, DirectCurrents
from engine.comparisons import quantities
from engine.criteria import LevelRange, LevelRanges, ReferenceLevel
from engine.equipment import ConductorLoop
from engine.evaluations import evaluations
from engine.layout import Layout
from engine.loaded_layout import LoadedLayout, loaded_layout
from engine.places import Enclosure, Zone
from engine.regions import Region
from engine.runs import Bar, Round
from engine.sampling import area_of
from engine.zone_search import search

TOLERANCE = 0.01

#: The program's own field may be off by a thousandth, which the bound is not.
FIELD_ERROR = 1e-3


def random_layout(seed: int, *, rule: str) -> Layout:
    """Loops of random legs through and beside a zone, of one to three currents."""
    rng = np.random.default_rng(seed)
    circuits, loops = [], []
    for k in range(int(rng.integers(2, 5))):
        corner = rng.uniform((-1, -1, 0.2), (2, 2, 2.2))
        first, second = rng.normal(size=(2, 3))
        first *= rng.uniform(1, 4) / np.linalg.norm(first)
        second -= (second @ first) / (first @ first) * first
        second *= rng.uniform(0.3, 1.5) / np.linalg.norm(second)
        path = [corner, corner + first, corner + first + second, corner + second]
        shape = Round(diameter=float(rng.uniform(0.01, 0.05)))
        frequency = float(rng.choice([50.0, 150.0, 0.0]))
        currents = (ConductorCurrent(label="a", rms=float(rng.uniform(50, 500))),)
        circuits.append(
            Circuit(
                id=f"c{k}", supply="free", base_frequency=frequency, neutral="none",
                demand=DirectCurrents(currents=currents),
            )
        )  # fmt: skip
        loops.append(
            ConductorLoop(
                id=f"loop{k}", circuit=f"c{k}", label="a", shape=shape,
                path=tuple(tuple(float(x) for x in p) for p in path),
            )
        )  # fmt: skip
    levels = tuple(
        ReferenceLevel(
            id=f"level{k}", source="invented", category="workers", basis=basis,
            component=component, sum_rule=sum_rule,
            values=LevelRanges(
                ranges=(
                    LevelRange(f_from=0, f_to=0, coefficient=4e-4),
                    LevelRange(f_from=1, f_to=1e5, coefficient=5e-3, exponent=1),
                )
            ),
        )
        for k, (basis, component, sum_rule) in enumerate(
            [
                ("RMS", "resultant", "ratio sum"),
                ("peak", "resultant", "root sum of squares"),
                ("peak", "axis", "ratio sum"),
            ]
        )
    )  # fmt: skip
    width, depth = rng.uniform(1, 2.5, 2)
    outline = ((0, 0), (width, 0), (width * 0.8, depth), (0.0, depth * 0.7))
    zone = Zone(
        id="zone", outline=outline, floor_level=0.0, heights=(0.5, 1.0, 1.5),
        volume=(0.4, 1.6), rule=rule, category="workers", clearance=0.2,
        levels=tuple(level.id for level in levels),
    )  # fmt: skip
    cupboard = Enclosure(
        id="cupboard",
        footprint=((0.2, 0.2), (0.9, 0.2), (0.9, 0.6), (0.2, 0.6)),
        z_from=0.0,
        z_to=float(rng.uniform(0.9, 2.0)),
    )
    return Layout(
        circuits=tuple(circuits), equipment=tuple(loops), levels=levels,
        zones=(zone,), enclosures=(cupboard,),
    )  # fmt: skip


def loaded_with(layout: Layout, bars: bool) -> tuple[LoadedLayout, CaseFields]:
    """The layout, its conductors exchanged for bars on edge or flat, mitred."""
    loaded = loaded_layout(layout, layout.cases, None, None)
    fields = loaded.fields
    if bars:
        swapped = tuple(
            replace(c, shape=Bar(width=0.02 * (k % 4 + 2), thickness=0.01))
            for k, c in enumerate(fields.conductors)
        )
        fields = CaseFields(swapped, fields.cases)
    return loaded, fields


def region_of(zone: Zone) -> Region:
    assert zone.floor_level is not None
    assert zone.volume is not None
    return Region(
        area_of(zone.outline), zone.floor_level, zone.heights, zone.volume, zone.rule,
        zone.clearance,
    )  # fmt: skip


def random_places(region: Region, rng: np.random.Generator, count: int):
    """Positions all over the region, as its rule asks for them."""
    x0, y0, x1, y1 = region.outline.bounds
    xy = rng.uniform((x0, y0), (x1, y1), (count, 2))
    xy = xy[contains_xy(region.outline, xy[:, 0], xy[:, 1])]
    if region.rule == "maximum over volume":
        z = rng.uniform(*region.volume, len(xy))
    elif region.rule == "three-height mean":
        z = np.zeros(len(xy))
    else:
        z = rng.choice(region.heights, len(xy))
    return np.column_stack([xy, region.floor + z])


@pytest.mark.parametrize("bars", [False, True], ids=["round", "bars"])
@pytest.mark.parametrize(
    "rule", ["maximum at heights", "three-height mean", "maximum over volume"]
)
@pytest.mark.parametrize("seed", range(4))
def test_no_value_exceeds_the_bound(seed: int, rule: str, bars: bool):
    layout = random_layout(seed, rule=rule)
    loaded, fields = loaded_with(layout, bars)
    (zone,) = layout.zones
    region = region_of(zone)
    wanted = quantities(loaded, zone)
    found = [f for f in search(fields, region, wanted).found if f is not None]
    assert len(found) == len(wanted)
    results = certified_maxima(fields, region, wanted, found, tolerance=TOLERANCE)
    rng = np.random.default_rng(seed + 100)
    anywhere = random_places(region, rng, 20_000)
    for quantity, before, (certificate, now) in zip(
        wanted, found, results, strict=True
    ):
        near = now.position + rng.normal(size=(2000, 3)) * (0.05, 0.05, 0.0)
        held = near[_inside(region, near)]
        places = np.concatenate([anywhere, held])
        (evaluation,) = evaluations(fields, region, places)
        brute = float(np.max(evaluation.score(quantity)))
        assert certificate.upper is not None
        assert certificate.reached, certificate
        assert certificate.upper >= brute / (1 + FIELD_ERROR)
        assert now.score >= before.score
        assert certificate.found == now.score <= certificate.upper
        assert certificate.upper <= now.score * (1 + 1.001 * TOLERANCE)
        assert brute <= now.score * (1 + 1.001 * TOLERANCE + FIELD_ERROR)


def _inside(region: Region, places):
    return contains_xy(region.outline, places[:, 0], places[:, 1])


@pytest.mark.parametrize("bars", [False, True], ids=["round", "bars"])
@pytest.mark.parametrize("flat", [False, True], ids=["thick", "flat"])
@pytest.mark.parametrize("size", [0.002, 0.02, 0.1])
def test_no_value_in_a_box_exceeds_its_bound(size: float, flat: bool, bars: bool):
    """Box by box, of every quantity, and not much above the largest one."""
    layout = random_layout(5, rule="maximum at heights")
    loaded, fields = loaded_with(layout, bars)
    (zone,), (case,) = layout.zones, fields.cases
    region, wanted = region_of(zone), quantities(loaded, zone)
    rng = np.random.default_rng(7)
    centres = rng.uniform((0, 0, 0.4), (2, 2, 1.6), (60, 3))
    frames = np.linalg.qr(rng.normal(size=(60, 3, 3)))[0]
    halves = size * rng.uniform(0.3, 1.0, (60, 3)) * (1.0, 1.0, 0.0 if flat else 0.05)
    boxes = Boxes(centres, frames, halves, np.zeros(60, np.int64))
    needs = np.full(len(fields.conductors), 1e8)
    expansion = Source(fields.conductors, case.currents, needs).expansion(boxes)
    nowhere = np.zeros((1, 60), np.int8)
    masks = Masked(nowhere, nowhere.astype(np.int64), nowhere > 0)
    uppers = upper_scores(case, wanted, enclosure(boxes, [expansion]), masks)
    bounded = np.isfinite(uppers[0])
    assert bounded.sum() > 20
    steps = rng.uniform(-1, 1, (60, 400, 3))
    steps[:, :200] = np.sign(steps[:, :200])
    places = centres[:, None] + np.einsum(
        "nks,nsx->nkx", steps * halves[:, None], frames
    )
    (evaluation,) = evaluations(fields, region, places.reshape(-1, 3))
    for quantity, upper in zip(wanted, uppers, strict=True):
        scores = evaluation.unmasked_score(quantity).reshape(60, 400).max(axis=1)
        assert np.all(scores[bounded] <= upper[bounded] * (1 + FIELD_ERROR))
        if size < 0.01:
            closest = np.median(upper[bounded] / scores[bounded])
            assert closest < 1.02


def test_a_bound_too_soon_is_still_a_bound():
    layout = random_layout(1, rule="maximum at heights")
    loaded = loaded_layout(layout, layout.cases, None, None)
    (zone,) = layout.zones
    region = region_of(zone)
    wanted = quantities(loaded, zone)
    found = [f for f in search(loaded.fields, region, wanted).found if f is not None]
    # Told of a value far too small, the bound must still hold.
    low = [replace(f, score=0.9 * f.score) for f in found]
    whole = certified_maxima(loaded.fields, region, wanted, found)
    for work in (1, 100_000, 1_000_000):
        early = certified_maxima(loaded.fields, region, wanted, low, most_work=work)
        for (soon, _), (_, now) in zip(early, whole, strict=True):
            assert soon.upper is None or soon.upper >= now.score
            assert soon.reached or soon.reason
