"""Values and picture of a map: what the engine says, drawn where it is."""

from __future__ import annotations

from pathlib import Path

import msgspec
import numpy as np
import numpy.typing as npt
import pytest

from app.caption_bar import QUANTITY, quantity
from app.field_store import FieldStore, Sample, sample_of
from app.map_drawing import coloured, interpolated, map_picture
from app.map_request import (
    MapRequest,
    floor_below,
    height_text,
    heights_of,
    map_values,
    nodes,
)
from app.view_state import Look
from engine import field
from engine.circuits import LineLoads
from engine.colour_ramp import rgb_ramp
from engine.conductors import conductors
from engine.currents import case_phasors, conductor_currents
from engine.edits import replaced
from engine.errors import ComputationCancelled
from engine.layout import Layout
from engine.layout_file import read
from engine.maps import field_map
from engine.masks import keepouts

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"
RECT = (-2.0, -1.5, 12.0, 8.0)


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLE)


@pytest.fixture(scope="module")
def sample() -> Sample:
    generator = np.random.default_rng(7)
    low, high = np.array([-1.0, -1.0, 0.2]), np.array([11.0, 7.0, 6.0])
    return sample_of(low + (high - low) * generator.random((400, 3)))


def request(
    layout: Layout, heights: tuple[float, ...], fineness: str = "coarse"
) -> MapRequest:
    assert fineness in ("coarse", "fine")
    return MapRequest(
        layout,
        "",
        heights,
        RECT,
        (700, 475),
        "fine" if fineness == "fine" else "coarse",
    )


def shifted(layout: Layout, by: float, which: int = 0) -> Layout:
    run = layout.runs[which]
    route = tuple((x, y + by, z) for x, y, z in run.route)
    return replaced(layout, msgspec.structs.replace(run, route=route))


def louder(layout: Layout, factor: float) -> Layout:
    circuit = layout.circuits[0]
    demand = circuit.demand
    assert isinstance(demand, LineLoads)
    loads = tuple(msgspec.structs.replace(x, rms=x.rms * factor) for x in demand.loads)
    new = msgspec.structs.replace(demand, loads=loads)
    return replaced(layout, msgspec.structs.replace(circuit, demand=new))


def stored(
    store: FieldStore, layout: Layout, sample: Sample
) -> npt.NDArray[np.complex128]:
    parts = conductors(layout)
    currents = conductor_currents(case_phasors(layout, layout.cases[0]), parts)
    return store.flux_density(parts, currents, sample)


def direct(layout: Layout, sample: Sample) -> npt.NDArray[np.complex128]:
    parts = conductors(layout)
    currents = conductor_currents(case_phasors(layout, layout.cases[0]), parts)
    return field.flux_density(parts, currents, sample.points)


@pytest.mark.parametrize("limit", [256 * 2**20, 200_000, 0])
def test_store_gives_the_engine_s_field_through_any_edits(
    layout: Layout, sample: Sample, limit: int
) -> None:
    store = FieldStore(limit)
    edits = [
        layout,
        shifted(layout, 0.1),
        shifted(layout, 0.2),
        shifted(layout, 0.2, which=4),
        layout,
        louder(layout, 1.7),
        louder(shifted(layout, -0.1), 0.4),
        replaced(layout, msgspec.structs.replace(layout.runs[1], name="Renamed")),
        layout,
    ]
    for edited in edits:
        found, true = stored(store, edited, sample), direct(edited, sample)
        assert np.abs(found - true).max() <= 1e-12 * np.abs(true).max()
    assert store.bytes_used <= limit


def test_store_computes_nothing_again_for_another_current(
    layout: Layout, sample: Sample, monkeypatch: pytest.MonkeyPatch
) -> None:
    store = FieldStore()
    stored(store, layout, sample)

    def never(*_: object, **__: object) -> None:
        raise AssertionError("the geometry did not change")

    monkeypatch.setattr(field, "responses", never)
    monkeypatch.setattr(field, "flux_density", never)
    stored(store, louder(layout, 1.2), sample)


def test_store_keeps_to_its_limit(layout: Layout) -> None:
    store = FieldStore(3 * 2**20)
    generator = np.random.default_rng(1)
    for _ in range(4):
        stored(store, layout, sample_of(10.0 * generator.random((300, 3))))
    assert 0 < store.bytes_used <= 3 * 2**20


def test_values_at_nodes_are_those_of_the_engine_s_map(layout: Layout) -> None:
    wanted = request(layout, (4.6, 5.1, 5.6))
    found = map_values(wanted, FieldStore())
    xs, ys, _ = nodes(wanted)
    step = max(xs[1] - xs[0], ys[1] - ys[0])
    true = field_map(layout, layout.cases[0], (5.1,), area=RECT, step=step / 4)
    column, row = len(xs) // 3, len(ys) // 3
    parts = conductors(layout)
    currents = conductor_currents(case_phasors(layout, layout.cases[0]), parts)
    b = field.flux_density(parts, currents, [[xs[column], ys[row], 5.1]])
    total = float(np.sqrt((np.abs(b) ** 2).sum()))
    assert found.values[1, row, column] == pytest.approx(total, rel=1e-3)
    k, m = np.abs(true.xs - xs[column]).argmin(), np.abs(true.ys - ys[row]).argmin()
    assert true.values[m, k] == pytest.approx(total, rel=0.05)


def test_cancelled_map_stops(layout: Layout) -> None:
    with pytest.raises(ComputationCancelled):
        map_values(
            request(layout, (1.0,), "fine"), FieldStore(), cancelled=lambda: True
        )


@pytest.mark.parametrize("heights", [(1.0,), (1.0, 1.5, 2.0), tuple(range(1, 31))])
@pytest.mark.parametrize("fineness", ["coarse", "fine"])
def test_a_map_never_takes_too_many_points(
    layout: Layout, heights: tuple[float, ...], fineness: str
) -> None:
    xs, ys, sample = nodes(request(layout, heights, fineness))
    assert len(sample.points) == len(xs) * len(ys) * len(heights)
    assert len(sample.points) <= {"coarse": 10_000, "fine": 20_000}[fineness]
    assert (xs[0], ys[0], xs[-1], ys[-1]) == RECT


def test_interpolation_passes_through_the_nodes_and_keeps_straight_slopes() -> None:
    xs, ys = np.linspace(0.0, 4.0, 9), np.linspace(1.0, 3.0, 5)
    slope = 2.0 * xs[None, :] - 3.0 * ys[:, None]
    fine_x, fine_y = np.linspace(0.1, 3.9, 50), np.linspace(1.05, 2.95, 40)
    smooth = interpolated(slope, fine_x, fine_y, (xs, ys))
    expected = 2.0 * fine_x[None, :] - 3.0 * fine_y[:, None]
    assert smooth == pytest.approx(expected, abs=1e-9)
    rough = np.random.default_rng(3).random((5, 9))
    assert interpolated(rough, xs, ys, (xs, ys)) == pytest.approx(rough, abs=1e-12)


def test_colours_follow_the_ramp_and_leave_small_values_clear() -> None:
    logs = np.array([[-8.0, -7.0, -3.0, 2.0, -np.inf]])
    image = coloured(logs, 1e-7, 1e-3, "logarithmic")
    pixels = [image.pixelColor(k, 0) for k in range(5)]
    assert [p.alpha() for p in pixels] == [0, 255, 255, 255, 0]
    ramp = rgb_ramp()
    assert pixels[1].getRgb()[:3] == tuple(ramp[0])
    assert pixels[2].getRgb()[:3] == pixels[3].getRgb()[:3] == tuple(ramp[-1])


def test_picture_shows_the_field_where_it_is(layout: Layout) -> None:
    """Row 0 of the image lies along y0 and column 0 along x0."""
    picture = map_picture(map_values(request(layout, (5.1,), "fine"), FieldStore()))
    image = picture.image
    x, y = 4.0, 2.0
    column = int((x - RECT[0]) / (RECT[2] - RECT[0]) * image.width())
    row = int((y - RECT[1]) / (RECT[3] - RECT[1]) * image.height())
    parts = conductors(layout)
    currents = conductor_currents(case_phasors(layout, layout.cases[0]), parts)
    b = field.flux_density(parts, currents, [[x, y, 5.1]])
    value = np.log10(np.sqrt((np.abs(b) ** 2).sum()))
    expected = rgb_ramp()[round(255 * (value + 7.0) / 4.0)].astype(int)
    shown = np.array(image.pixelColor(column, row).getRgb()[:3])
    assert np.abs(shown - expected).max() <= 8


def test_closed_enclosures_are_clear_to_the_pixel(layout: Layout) -> None:
    picture = map_picture(map_values(request(layout, (1.0,), "fine"), FieldStore()))
    image = picture.image
    columns = RECT[0] + (np.arange(image.width()) + 0.5) * 14.0 / image.width()
    rows = RECT[1] + (np.arange(image.height()) + 0.5) * 9.5 / image.height()
    plan = np.stack(np.meshgrid(columns, rows), axis=-1).reshape(-1, 2)
    points = np.column_stack([plan, np.full(len(plan), 1.0)])
    masked = np.any([k.masks(points) for k in keepouts(layout)], axis=0)
    masked |= field.inside(conductors(layout), points)
    bits = np.frombuffer(image.constBits(), np.uint32).reshape(image.height(), -1)
    clear = (bits[:, : image.width()] >> 24 == 0).reshape(-1)
    assert masked.any()
    assert (clear == masked).all()
    assert {area.reason for area in picture.masked} == {
        f"closed: {k.title}" for k in keepouts(layout) if k.z_from < 1.0 < k.z_to
    }


def test_lines_at_reference_levels_are_bold_and_named(layout: Layout) -> None:
    picture = map_picture(map_values(request(layout, (5.1,)), FieldStore()))
    bold = {line.text for line in picture.iso_lines if line.bold and line.text}
    assert bold == {"Example A (invented), ratio 1 · at z 5.10 m"}
    thin = {line.text for line in picture.iso_lines if not line.bold and line.text}
    assert "10 µT" in thin


def test_no_thin_line_beside_the_line_of_a_level() -> None:
    layout = read(SAMPLE.with_name("small-switch-room.json"))

    def lines(micro: float) -> dict[bool, set[str]]:
        (level,) = layout.levels[:1]
        first = msgspec.structs.replace(
            level.values.ranges[0], coefficient=micro * 1e-6
        )
        values = msgspec.structs.replace(level.values, ranges=(first,))
        own = msgspec.structs.replace(level, values=values)
        heights, _ = heights_of(layout, Look())
        asked = request(replaced(layout, own), heights)
        drawn = map_picture(map_values(asked, FieldStore())).iso_lines
        return {
            bold: {line.text for line in drawn if line.bold is bold and line.text}
            for bold in (True, False)
        }

    assert "20 µT" in lines(20.5)[False]
    near = lines(19.7)
    assert near[True]
    assert "20 µT" not in near[False]
    assert "10 µT" in near[False]


def test_without_a_height_the_map_is_over_the_zone_s_heights(layout: Layout) -> None:
    heights, name = heights_of(layout, Look())
    assert heights == pytest.approx((4.6, 5.1, 5.6))
    assert name == "largest over heights, Office"
    assert heights_of(Layout(), Look()) == ((1.0,), "z 1.00 m")
    assert heights_of(layout, Look(height=5.1)) == (
        (5.1,),
        "z 5.10 m (Office +1.00)",
    )


def test_heights_are_told_in_the_layout_s_unit(layout: Layout) -> None:
    settings = msgspec.structs.replace(layout.settings, length_unit="mm")
    metric = replaced(layout, settings)
    assert height_text(metric, 0.5) == "z 500 mm (Ground floor +500)"
    assert floor_below(layout, -1.0) == ("", None)


def test_a_direct_field_is_named_as_such(layout: Layout) -> None:
    battery = read(SAMPLE.with_name("battery-laboratory.json"))
    direct = [c for c in battery.circuits if c.supply == "dc"]
    alone = msgspec.structs.replace(battery, circuits=tuple(direct[:1]))
    found = {quantity(alone, case.id) for case in alone.cases}
    # In a case without any current there is nothing direct.
    assert found == {"Flux density, DC", QUANTITY}
    # An alternating part is what the map shows.
    assert quantity(layout, "") == "RMS flux density"
    assert quantity(msgspec.structs.replace(layout, circuits=()), "") == QUANTITY
