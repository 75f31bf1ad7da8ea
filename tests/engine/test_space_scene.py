"""The layout in space as data: volumes, normals, counts of meshes, places, picking."""

from __future__ import annotations

from collections import Counter
from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace
from shapely.geometry import Polygon

from engine import layout_file
from engine.circuits import Circuit, LoadCase
from engine.conductors import conductors
from engine.layout import Layout
from engine.maps import field_map, plane_map
from engine.places import Enclosure, Receptor, Room, Storey, Zone
from engine.runs import Bar, CircuitShare, Flat, Round, Run
from engine.sampling import vertical
from engine.solids import N_SIDES, Solid, conductor_solid, prism, sheet, walls
from engine.space_picking import pick
from engine.space_scene import quads_of_map, space_scene

SAMPLES = Path(__file__).parents[2] / "sample_layouts"
NAMES = (
    "small-switch-room",
    "office-over-switch-room",
    "imaging-corridor",
    "battery-laboratory",
)
#: An L of 3 m², and a square of 4 m² with a hole of 1 m².
ANGLE = Polygon([(0, 0), (2, 0), (2, 1), (1, 1), (1, 2), (0, 2)])
FRAME = Polygon(
    [(0, 0), (2, 0), (2, 2), (0, 2)],
    [[(0.5, 0.5), (1.5, 0.5), (1.5, 1.5), (0.5, 1.5)]],
)


def edges(solid: Solid) -> Counter:
    """How often each directed edge stands on the surface, by place."""
    found: Counter = Counter()
    for triangle in np.round(solid.corners, 9) + 0.0:
        points = [tuple(p) for p in triangle]
        for a, b in zip(points, points[1:] + points[:1], strict=True):
            found[a, b] += 1
    return found


def is_closed(solid: Solid) -> bool:
    """Every edge is walked once each way: closed, and turned the same way all over."""
    found = edges(solid)
    return all(n == found[b, a] for (a, b), n in found.items())


def bar_run(route: tuple, shape: Bar | Round) -> Run:
    return Run(
        id="run",
        name="Main bars",
        route=route,
        section=Flat(
            circuits=(CircuitShare(circuit="C"),),
            order=("L1", "L2", "L3"),
            pitch=0.3,
            shape=shape,
        ),
    )


def of_run(run: Run) -> list[Solid]:
    layout = Layout(circuits=(Circuit(id="C"),), runs=(run,))
    return [conductor_solid(c) for c in conductors(layout) if c.role == "run"]


# ---- solids


@pytest.mark.parametrize(
    "area", [ANGLE, FRAME, Polygon(list(ANGLE.exterior.coords)[::-1])]
)
def test_prisms_hold_their_volume_and_face_outwards(area: Polygon) -> None:
    made = prism(area, 1.0, 3.5)
    assert made.volume == pytest.approx(2.5 * 3.0)
    assert is_closed(made)


def test_sheets_look_up_and_walls_out() -> None:
    flat = sheet(ANGLE, 2.0)
    np.testing.assert_allclose(flat.normals, [[0, 0, 1]] * len(flat.faces), atol=1e-12)
    assert np.all(flat.vertices[:, 2] == 2.0)
    around = walls(Polygon([(0, 0), (4, 0), (4, 2), (0, 2)]), 0.0, 3.0)
    middles = around.corners.mean(axis=1) - (2.0, 1.0, 1.5)
    assert np.all(np.sum(around.normals * middles, axis=1) > 0)
    assert len(sheet(Polygon(), 0.0).faces) == 0
    assert len(prism(ANGLE, 1.0, 1.0).faces) == len(flat.faces)


def test_a_bar_has_its_section_along_its_route() -> None:
    shape = Bar(width=0.1, thickness=0.01, turn=90)
    for made in of_run(bar_run(((0, 0, 2), (5, 0, 2)), shape)):
        assert made.volume == pytest.approx(0.1 * 0.01 * 5.0)
        assert is_closed(made)
        assert len(made.faces) == 2 * 4 + 2 * 2
        # On edge: its width stands upright.
        assert np.ptp(made.vertices, axis=0) == pytest.approx([5.0, 0.01, 0.1])


@pytest.mark.parametrize(
    "route",
    [
        ((0, 0, 2), (5, 0, 2), (5, 5, 2)),
        ((0, 0, 2), (5, 0, 2), (5, 5, 2), (5, 5, 6)),
        ((0, 0, 6), (0, 0, 2), (-5, 3, 2), (-5, 8, 4)),
    ],
)
@pytest.mark.parametrize("shape", [Bar(width=0.1, thickness=0.02), Round(diameter=0.1)])
def test_bends_are_mitred_and_stay_closed(route: tuple, shape: Bar | Round) -> None:
    if isinstance(shape, Bar):
        area = shape.width * shape.thickness
    else:
        area = 0.5 * N_SIDES * np.sin(2 * np.pi / N_SIDES) * (shape.diameter / 2) ** 2
    run = bar_run(route, shape)
    layout = Layout(circuits=(Circuit(id="C"),), runs=(run,))
    for conductor in conductors(layout):
        if conductor.role == "run":
            made = conductor_solid(conductor)
            length = np.linalg.norm(np.diff(conductor.path, axis=0), axis=1).sum()
            # A mitred section keeps its volume along the middle line.
            assert made.volume == pytest.approx(area * length, rel=1e-9)
            assert is_closed(made)


def test_an_unchanged_conductor_gives_the_identical_solid() -> None:
    layout = layout_file.read(SAMPLES / "small-switch-room.json")
    first, again = conductors(layout)[0], conductors(layout)[0]
    assert conductor_solid(first) is conductor_solid(again)


# ---- the scene


def boxes(n: int) -> Layout:
    corners = ((0.0, 0.0), (0.5, 0.0), (0.5, 0.5), (0.0, 0.5))
    return Layout(
        enclosures=tuple(
            Enclosure(
                id=f"box-{k}",
                footprint=tuple((x + k, y) for x, y in corners),
                z_from=0.0,
                z_to=2.0,
            )
            for k in range(n)
        )
    )


def test_three_hundred_boxes_are_one_mesh() -> None:
    scene = space_scene(boxes(300), ())
    (mesh,) = scene.meshes
    assert (mesh.kind, mesh.label, mesh.is_clear) == ("closed enclosure", "", False)
    assert len(mesh.faces) == 300 * 12
    assert len(mesh.items) == 300
    assert len(mesh.of("box-7")) == 12
    assert np.all(mesh.corners[mesh.of("box-7")][..., 0] >= 7.0)
    assert len(mesh.of("nothing")) == 0
    assert scene.bounds() == ((0.0, 0.0, 0.0), (299.5, 0.5, 2.0))


@pytest.mark.parametrize("name", NAMES)
def test_solids_of_the_samples_face_outwards(name: str) -> None:
    layout = layout_file.read(SAMPLES / f"{name}.json")
    parts = conductors(layout)
    scene = space_scene(layout, parts)
    shown = {item for mesh in scene.meshes for item in mesh.items}
    for item in (*layout.storeys, *layout.rooms, *layout.enclosures, *layout.runs,
                 *layout.equipment, *layout.zones):  # fmt: skip
        assert item.id in shown, item.id
    for mesh in scene.meshes:
        assert np.isfinite(mesh.vertices).all()
        assert np.allclose(np.linalg.norm(mesh.normals, axis=1), 1.0)
    for conductor in parts:
        assert conductor_solid(conductor).volume > 0, conductor.key


def test_conductors_are_apart_by_label() -> None:
    layout = layout_file.read(SAMPLES / "imaging-corridor.json")
    scene = space_scene(layout, conductors(layout))
    labels = {m.label for m in scene.meshes if m.kind == "conductor"}
    assert labels == {"L1", "L2", "L3", "N", "stray"}
    stray = scene.mesh("conductor", "stray")
    assert stray is not None
    assert stray.items == ("R2-stray",)
    assert scene.mesh("conductor", "L9") is None
    texts = {(x.item, x.text) for x in scene.labels if x.kind == "conductor"}
    assert ("R3-lines", "L2") in texts
    places = {x.item: x.at for x in scene.labels if x.kind == "run"}
    assert places["R1-busway"] == pytest.approx((6.6, -0.35, 4.2))
    assert ("stress-test-bed", (4.0, 4.4, 0.8)) in scene.points


def test_a_room_is_open_above_and_its_slab_lies_on_it() -> None:
    outline = ((0.0, 0.0), (4.0, 0.0), (4.0, 3.0), (0.0, 3.0))
    room = Room(
        id="room", outline=outline, floor_level=1.0, ceiling_level=3.5, slab_above=0.3
    )
    scene = space_scene(Layout(rooms=(room,)), ())
    walls_and_floor, slab = scene.mesh("room"), scene.mesh("slab")
    assert walls_and_floor is not None
    assert slab is not None
    assert walls_and_floor.is_clear
    up = walls_and_floor.normals[:, 2] > 0.5
    assert np.all(walls_and_floor.corners[up][..., 2] == 1.0)
    assert Solid(slab.vertices, slab.faces).volume == pytest.approx(4 * 3 * 0.3)
    assert slab.vertices[:, 2].min() == 3.5
    higher = replace(room, soffit_level=3.9)
    scene = space_scene(Layout(rooms=(higher,)), ())
    assert scene.mesh("slab").vertices[:, 2].min() == 3.9


def test_an_enclosure_open_in_a_load_case_is_open_in_its_scene():
    corners = ((0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0))
    cubicle, other = (
        Enclosure(id=id, footprint=corners, z_from=0.0, z_to=2.0)
        for id in ("cubicle", "other")
    )
    work = LoadCase(id="work", open_enclosures=("cubicle",))
    layout = Layout(enclosures=(cubicle, other), load_cases=(work,))
    plain, open_ = space_scene(layout, ()), space_scene(layout, (), work)
    closed = plain.mesh("closed enclosure")
    assert closed is not None
    assert closed.items == ("cubicle", "other")
    assert plain.mesh("open enclosure") is None
    closed, opened = open_.mesh("closed enclosure"), open_.mesh("open enclosure")
    assert closed is not None
    assert opened is not None
    assert (closed.items, opened.items) == (("other",), ("cubicle",))
    assert opened.is_clear


def test_zones_reach_from_their_lowest_to_their_highest_height() -> None:
    outline = ((0.0, 0.0), (2.0, 0.0), (2.0, 2.0), (0.0, 2.0))
    storey = Storey(id="upper", floor_level=4.0)
    zone = Zone(id="zone", outline=outline, storey="upper", heights=(0.5, 1.0, 1.5))
    layout = Layout(storeys=(storey,), zones=(zone,))
    mesh = space_scene(layout, ()).mesh("zone")
    assert (mesh.vertices[:, 2].min(), mesh.vertices[:, 2].max()) == (4.5, 5.5)
    one = replace(layout, zones=(replace(zone, heights=(1.0,)),))
    flat = space_scene(one, ()).mesh("zone")
    assert set(flat.vertices[:, 2]) == {5.0}
    volume = replace(zone, rule="maximum over volume", volume=(0.0, 2.0))
    mesh = space_scene(replace(layout, zones=(volume,)), ()).mesh("zone")
    assert (mesh.vertices[:, 2].min(), mesh.vertices[:, 2].max()) == (4.0, 6.0)
    nowhere = replace(layout, zones=(replace(zone, storey=None),))
    assert space_scene(nowhere, ()).mesh("zone") is None


def test_an_empty_layout_has_no_bounds() -> None:
    scene = space_scene(Layout(), ())
    assert scene.meshes == ()
    assert scene.bounds() is None
    assert pick(scene, (0, 0, 0), (1, 0, 0)) is None


# ---- maps


def test_maps_lie_at_their_heights_and_on_their_planes() -> None:
    layout = layout_file.read(SAMPLES / "small-switch-room.json")
    case = layout.cases[0]
    level = field_map(layout, case, (1.5, 0.5), area=(0, 1, 2, 4), step=0.5)
    low, high = quads_of_map(level)
    assert low.corners == ((0, 1, 0.5), (2, 1, 0.5), (2, 4, 0.5), (0, 4, 0.5))
    assert high.corners[0] == (0, 1, 1.5)
    assert low.heights == (0.5, 1.5)
    assert low.normal == (0, 0, 1)
    upright = plane_map(layout, case, vertical((1, 0), (1, 2), (0, 3)), step=0.5)
    (quad,) = quads_of_map(upright)
    assert quad.corners == ((1, 0, 0), (1, 2, 0), (1, 2, 3), (1, 0, 3))
    # First row along its length, rows upwards.
    assert upright.values.shape == (7, 5)
    assert quad.normal == (1, 0, 0)


# ---- picking


def test_the_nearest_solid_is_picked() -> None:
    scene = space_scene(boxes(5), ())
    hit = pick(scene, (-3.0, 0.25, 1.0), (2.0, 0.0, 0.0))
    assert hit is not None
    assert (hit.item, hit.distance) == ("box-0", pytest.approx(3.0))
    assert hit.at == pytest.approx((0.0, 0.25, 1.0))
    back = pick(scene, (9.0, 0.25, 1.0), (-1.0, 0.0, 0.0))
    assert back is not None
    assert back.item == "box-4"
    assert pick(scene, (3.25, 0.25, 5.0), (0.0, 0.0, -1.0)).item == "box-3"
    assert pick(scene, (-3.0, 0.25, 1.0), (-1.0, 0.0, 0.0)) is None
    assert pick(scene, (-3.0, 0.25, 2.1), (1.0, 0.0, 0.0)) is None
    with pytest.raises(ValueError, match="direction"):
        pick(scene, (0, 0, 0), (0, 0, 0))


def test_one_picks_through_what_is_clear() -> None:
    layout = boxes(1)
    outline = ((-1.0, -1.0), (2.0, -1.0), (2.0, 2.0), (-1.0, 2.0))
    zone = Zone(id="zone", outline=outline, floor_level=0.0)
    scene = space_scene(replace(layout, zones=(zone,)), ())
    start, way = (-3.0, 0.25, 1.0), (1.0, 0.0, 0.0)
    assert pick(scene, start, way).item == "box-0"
    assert pick(scene, start, way, through=False).item == "zone"
    # Beside the box only the zone is met.
    assert pick(scene, (-3.0, 1.5, 1.0), way).item == "zone"


def test_a_thin_bar_is_picked_along_its_whole_length() -> None:
    run = bar_run(((0, 0, 2), (5, 0, 2), (5, 5, 2)), Bar(width=0.1, thickness=0.01))
    layout = Layout(circuits=(Circuit(id="C"),), runs=(run,),
                    receptors=(Receptor(id="r", at=(0, 0, 0)),))  # fmt: skip
    scene = space_scene(layout, conductors(layout))
    for x in np.linspace(0.05, 4.5, 20):
        hit = pick(scene, (x, 0.0, 9.0), (0.0, 0.0, -1.0))
        assert hit is not None
        assert (hit.item, hit.kind) == ("run", "conductor")
        assert hit.at[2] == pytest.approx(2.005)
