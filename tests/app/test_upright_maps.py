"""Maps on upright planes: the engine's values, masks where the plane cuts them."""

from __future__ import annotations

from pathlib import Path

import msgspec
import numpy as np
import pytest

from app.field_store import FieldStore
from app.map_drawing import _table, map_picture
from app.map_request import MapRequest, map_values
from app.upright_masks import UprightMasks
from engine import field
from engine.conductors import conductors
from engine.currents import case_phasors, conductor_currents
from engine.elevation import Upright
from engine.layout import Layout
from engine.layout_file import read
from engine.places import Enclosure
from engine.sight import LOOKING_X, LOOKING_Y, along

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"
ACROSS = (-2.0, -0.5, 12.0, 6.5)
PLANES = {
    "looking +y": Upright(LOOKING_Y, 3.2),
    "looking +x": Upright(LOOKING_X, 4.1),
    "along a line": Upright(along((0.0, 0.5, 0.0), (8.0, 5.0, 0.0)), 0.0),
}


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLE)


def request(layout: Layout, upright: Upright, fineness: str = "fine") -> MapRequest:
    levels = (0.5, 1.0, 4.5, 5.0)
    case = layout.cases[0].id
    return MapRequest(
        layout, case, levels, ACROSS, (560, 280), fineness,
        "vertical plane", upright,
    )  # fmt: skip


def resultant(layout: Layout, points: np.ndarray) -> np.ndarray:
    """The engine's RMS resultant at points, asked directly. [T]"""
    parts = conductors(layout)
    phasors = case_phasors(layout, layout.cases[0])
    b = field.flux_density(parts, conductor_currents(phasors, parts), points)
    return np.sqrt(np.sum(np.abs(b) ** 2, axis=(0, 2)))


@pytest.mark.parametrize("name", PLANES)
def test_nodes_hold_the_engines_flux_density_there(layout, name):
    upright = PLANES[name]
    values = map_values(request(layout, upright, "coarse"), FieldStore())
    assert values.values.shape == (1, len(values.ys), len(values.xs))
    rng = np.random.default_rng(3)
    rows = rng.integers(0, len(values.ys), 12)
    columns = rng.integers(0, len(values.xs), 12)
    points = [
        upright.sight.places((values.xs[c], values.ys[r]), upright.depth)
        for r, c in zip(rows, columns, strict=True)
    ]
    expected = resultant(layout, np.array(points))
    # The store switches filaments for groups of its own: 0.1 % each.
    assert values.values[0, rows, columns] == pytest.approx(expected, rel=3e-3)


def test_a_pixel_has_the_colour_of_the_engines_value_there(layout):
    upright = PLANES["looking +x"]
    asked = request(layout, upright)
    values = map_values(asked, FieldStore())
    picture = map_picture(values, UprightMasks(values))
    image = picture.image
    x0, z0, x1, z1 = picture.rect
    column, row = int(0.7 * image.width()), int(0.25 * image.height())
    across = x0 + (column + 0.5) * (x1 - x0) / image.width()
    z = z0 + (row + 0.5) * (z1 - z0) / image.height()
    # Looking +x, −y runs to the right.
    (expected,) = resultant(layout, np.array([(4.1, -across, z)]))
    settings = layout.settings
    place = np.log(expected / settings.map_low) / np.log(
        settings.map_high / settings.map_low
    )
    ramp = _table()[1:]
    found = int(np.flatnonzero(ramp == image.pixel(column, row))[0])
    assert found == pytest.approx(place * (len(ramp) - 1), abs=1.5)


def test_a_closed_enclosure_is_masked_where_the_plane_cuts_it(layout):
    box = Enclosure(
        id="panel", footprint=((1.0, 3.0), (2.0, 3.0), (2.0, 4.0), (1.0, 4.0)),
        z_from=0.0, z_to=2.0,
    )  # fmt: skip
    with_box = msgspec.structs.replace(layout, enclosures=(box,))
    values = map_values(request(with_box, PLANES["looking +y"], "coarse"), FieldStore())
    masks = UprightMasks(values)
    (area,) = masks.areas()
    assert area.outline.min(axis=0) == pytest.approx((1.0, 0.0))
    assert area.outline.max(axis=0) == pytest.approx((2.0, 2.0))
    xs, ys = np.array([0.5, 1.5, 2.5]), np.array([-0.2, 1.0, 2.2])
    logs = masks.largest(np.log10(values.values), xs, ys)
    assert np.isneginf(logs).tolist() == [
        [False, False, False], [False, True, False], [False, False, False],
    ]  # fmt: skip
    elsewhere = map_values(
        request(with_box, Upright(LOOKING_Y, 4.5), "coarse"), FieldStore()
    )
    assert UprightMasks(elsewhere).areas() == ()


def test_the_inside_of_a_conductor_that_the_plane_cuts_is_masked(layout):
    run = layout.runs[0]
    (a, b) = run.route[0], run.route[1]
    middle = [0.5 * (p + q) for p, q in zip(a, b, strict=True)]
    conductor = next(c for c in conductors(layout) if c.item == run.id)
    at = conductor.path[0] + 0.5 * (conductor.path[1] - conductor.path[0])
    assert np.linalg.norm(at - middle) < 1.0
    for sight in (LOOKING_X, LOOKING_Y):
        upright = Upright(sight, float(sight.depth(at)))
        values = map_values(request(layout, upright), FieldStore())
        x, z = sight.seen(at).tolist()
        xs, ys = np.array([x, x + 5.0]), np.array([z, z + 0.9])
        logs = UprightMasks(values).largest(np.log10(values.values), xs, ys)
        assert np.isneginf(logs[0, 0])
        assert np.isfinite(logs[1, 1])
        bare = UprightMasks(values).largest(
            np.log10(values.values), xs, ys, with_conductors=False
        )
        assert np.isfinite(bare[0, 0])


def test_bold_lines_say_that_they_lie_on_this_plane(layout):
    values = map_values(request(layout, PLANES["looking +y"]), FieldStore())
    bold = [line.text for line in map_picture(values, UprightMasks(values)).iso_lines
            if line.bold and line.text]  # fmt: skip
    assert bold
    assert all(text.endswith("· on this plane") for text in bold)
