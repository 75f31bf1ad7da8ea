"""Edges of masks: hidden points come out onto them, and maxima there are found."""

from __future__ import annotations

import numpy as np
import pytest
from msgspec.structs import replace
from shapely.geometry import Polygon

from engine import field
from engine.assessment import assess
from engine.case_fields import CaseFields
from engine.circuits import BalancedCurrent, Circuit, Unbalance
from engine.conductors import conductors
from engine.currents import case_phasors, conductor_currents
from engine.layout import Layout
from engine.mask_edges import MaskEdges
from engine.masks import Keepout
from engine.places import SpatialRule, Zone
from engine.regions import Region
from engine.runs import CircuitShare, Flat, Round, Run

DIAMETER = 0.03


def room(*heights: float, clearance: float = 0.2, rule: str = "maximum at heights"):
    circuit = Circuit(
        id="c",
        demand=BalancedCurrent(
            rms=640, unbalance=Unbalance(negative_ratio=0.3, zero_ratio=0.095)
        ),
    )
    run = Run(
        id="r",
        route=((-1.0, 0.9, 0.8), (2.3, 0.9, 0.8), (2.3, 2.1, 0.8), (2.3, 2.1, 3.0)),
        section=Flat(
            circuits=(CircuitShare(circuit="c"),),
            pitch=0.15,
            shape=Round(diameter=DIAMETER),
        ),
    )
    zone = Zone(
        id="z",
        outline=((0, 0), (4, 0), (4, 3), (0, 3)),
        floor_level=0.0,
        heights=heights,
        clearance=clearance,
        rule=rule,
    )
    return Layout(circuits=(circuit,), runs=(run,), zones=(zone,))


def region(rule: SpatialRule, clearance: float = 0.2) -> Region:
    outline = Polygon([(0, 0), (4, 0), (4, 3), (0, 3)])
    return Region(outline, 0.0, (0.5, 1.0), (0.5, 1.0), rule, clearance)


def edges_of(rule: SpatialRule, *closed: Keepout) -> tuple[CaseFields, MaskEdges]:
    fields = CaseFields(conductors(room(0.5)), ())
    return fields, MaskEdges(fields, region(rule), closed)


@pytest.mark.parametrize("rule", ["maximum at heights", "maximum over volume"])
def test_hidden_points_come_out_at_the_clearance(rule: SpatialRule) -> None:
    fields, edges = edges_of(rule)
    rng = np.random.default_rng(5)
    places = rng.uniform([0.0, 0.5, 0.8], [2.0, 1.3, 0.8], (400, 3))
    before = fields.distances(places)
    hidden = (before < 0.2) & (before > 0)
    assert hidden.sum() > 50
    (moved,) = edges.variants(places)
    after = fields.distances(moved)
    assert (moved[~hidden] == places[~hidden]).all()
    out = after >= 0.2
    assert out[hidden].mean() > 0.9
    assert after[hidden & out] == pytest.approx(0.2, abs=1e-4)
    if rule == "maximum at heights":
        assert (moved[:, 2] == 0.8).all()


def test_points_in_an_enclosure_come_out_at_its_side() -> None:
    square = Polygon([(3.0, 2.0), (3.8, 2.0), (3.8, 2.8), (3.0, 2.8)])
    keepout = Keepout("e", "Cubicle", square, 0.0, 2.0)
    _, edges = edges_of("maximum at heights", keepout)
    places = np.array([[3.1, 2.4, 1.0], [3.4, 2.7, 1.0], [3.4, 2.4, 2.5]])
    (moved,) = edges.variants(places)
    assert moved == pytest.approx(
        np.array([[3.0, 2.4, 1.0], [3.4, 2.8, 1.0], [3.4, 2.4, 2.5]]), abs=1e-6
    )
    assert not keepout.masks(moved).any()


def test_a_mean_over_heights_keeps_the_place_beside_its_edges() -> None:
    _, edges = edges_of("three-height mean")
    places = np.array([[1.0, 1.4, 0.0], [3.5, 2.5, 0.0]])
    found = edges.variants(places)
    assert (found[0] == places).all()
    assert (found[:, 1] == places[1]).all()
    assert (found[:, :, 2] == 0.0).all()


def test_the_maximum_along_an_edge_is_found() -> None:
    # Every place at the clearance around the conductors of a riser is looked at.
    base = room(0.5, 1.0, 1.5)
    route = ((0.6, 4.7, 0.5), (0.2, 4.7, 0.5), (0.2, -0.08, 0.5), (0.2, -0.08, 2.5))
    layout = replace(base, runs=(replace(base.runs[0], route=route),))
    (maximum,) = assess(layout).zones[0].maxima
    made = conductors(layout)
    turn = np.linspace(0.0, 2.0 * np.pi, 20001)
    circle = np.column_stack([np.cos(turn), np.sin(turn), np.zeros(len(turn))])
    away = 0.2 + DIAMETER / 2 + 1e-9
    centres = [
        (*c.path[-1, :2], z) for c in made if c.role == "run" for z in (1.0, 1.5)
    ]
    points = np.concatenate([np.array(c) + away * circle for c in centres])
    points = points[(points[:, :2] >= 0).all(axis=1)]
    points = points[field.surface_distance(made, points) >= 0.2]
    phasors = case_phasors(layout, layout.cases[0])
    b = field.flux_density(made, conductor_currents(phasors, made), points)
    largest = np.sqrt((np.abs(b) ** 2).sum(axis=(0, 2)).max())
    assert maximum.value == pytest.approx(largest, rel=1e-3)
