"""A map's picture and grid say what they show, where, and in which unit."""

from __future__ import annotations

import csv
import io
from dataclasses import replace

import numpy as np
import pytest
from PIL import Image

from engine.drawing import plan
from engine.errors import UserError
from engine.exchange.map_export import (
    grid_csv,
    offsets_csv,
    png,
    write_csv,
    write_png,
)
from engine.layout import Layout
from engine.picture import (
    MapSubject,
    OffsetLines,
    ReferenceLine,
    Stroke,
    Words,
    map_picture,
)
from engine.picture.legend import BAR_HEIGHT, REFERENCE_WIDTH
from engine.picture.map_picture import _iso_lines
from engine.places import Receptor, Room, Zone

HOSTILE = 'Desk <img src="x"> R&D <LV> \x07\u202e שלום ' + "w" * 300


def subject(**changes):
    xs, ys = np.linspace(-1.0, 7.0, 81), np.linspace(-1.0, 4.0, 51)
    x, y = np.meshgrid(xs, ys)
    values = 8e-6 / ((x - 3.0) ** 2 + (y - 1.5) ** 2 + 0.01)
    mask = (abs(x - 3.0) < 0.3) & (abs(y - 1.5) < 0.3)
    made = MapSubject(
        xs=xs,
        ys=ys,
        values=values,
        mask=mask,
        title="Rated currents, z 1.00 m",
        references=(ReferenceLine("Example A (invented)", 7.3e-6),),
        reference_note="reference level at 50 Hz",
        lines=("Harbour annex, revision B",),
    )
    return replace(made, **changes)


def layout():
    room = Room(
        id="room",
        name="Switch room",
        outline=((0, 0), (6, 0), (6, 3), (0, 3)),
        floor_level=0,
        ceiling_level=3,
    )
    zone = Zone(id="zone", name=HOSTILE, outline=((1, 1), (3, 1), (3, 2.5), (1, 2.5)))
    desk = Receptor(id="desk", name="Desk", at=(5, 2, 1))
    return Layout(rooms=(room,), zones=(zone,), receptors=(desk,))


def picture(**changes):
    return map_picture(subject(**changes), plan(layout(), ()), width=180, height=150)


def texts(drawn):
    return [part.text for part in drawn.parts if isinstance(part, Words)]


def test_every_kind_of_information_is_there():
    written = " | ".join(texts(picture(north=30.0)))
    for wanted in (
        "Rated currents, z 1.00 m",
        "Harbour annex, revision B",
        "RMS resultant [µT]",
        "under 0.1 µT not coloured",
        "x [m]",
        "y [m]",
        "scale 1:",
        "Example A (invented) 7.3 µT",
        "reference level at 50 Hz",
        "not a measurement",
        "not assessed",
        "Switch room",
        "N",
    ):
        assert wanted in written
    for forbidden in ("safe", "complian", " pass"):
        assert forbidden not in written.lower()


def test_labels_follow_the_unit():
    assert "1 µT" in texts(picture())
    assert "10 mG" in texts(picture(unit="mG"))
    written = texts(picture(unit="A/m"))
    assert "1 A/m" in written
    assert not any("µT" in text for text in written)


def test_the_reference_line_is_bold_and_lies_at_its_value():
    drawn = picture()
    bold = [
        part
        for part in drawn.parts
        if isinstance(part, Stroke) and part.width == REFERENCE_WIDTH
    ]
    ring = max(bold, key=lambda part: len(part.points))
    points = np.array(ring.points)
    size = np.ptp(points, axis=0)
    # 8/(r² + 0.01) = 7.3 has r = 1.042 m; the scale bar gives the paper's metres.
    words = next(text for text in texts(drawn) if "scale 1:" in text)
    scale = int(words.partition("scale 1:")[2])
    assert size == pytest.approx(2 * 1042.0 / scale, rel=0.01)


def test_the_scale_bar_is_as_long_as_it_says():
    drawn = picture()
    words = next(part for part in drawn.parts if getattr(part, "width", 0) == 1.4)
    text = next(text for text in texts(drawn) if "scale 1:" in text)
    metres, _, scale = text.partition(" m, scale 1:")
    length = words.points[1][0] - words.points[0][0]
    assert 2 * length == pytest.approx(float(metres) * 1000.0 / float(scale))


@pytest.mark.parametrize("unit", ["µT", "mT", "nT", "mG", "G", "A/m"])
def test_nothing_leaves_the_paper_whatever_the_names(unit):
    drawn = picture(unit=unit, title=HOSTILE * 4, lines=(HOSTILE * 4, HOSTILE))
    for part in drawn.parts:
        if isinstance(part, Words):
            left = {"left": 0.0, "middle": -0.5, "right": -1.0}[part.anchor]
            if part.turn == 0:
                assert part.at[0] + left * part.width >= 0
                assert part.at[0] + (left + 1) * part.width <= drawn.width
            assert 0 <= part.at[1] <= drawn.height
    assert drawn.width <= 180
    assert drawn.height <= 150


def test_labels_do_not_cover_each_other():
    patches = [p for p in picture().parts if isinstance(p, Words) and p.patch]
    flat = [p for p in patches if p.turn == 0]
    for k, a in enumerate(flat):
        for b in flat[k + 1 :]:
            apart_x = abs(a.at[0] - b.at[0]) > 0.5 * (a.width + b.width)
            assert apart_x or abs(a.at[1] - b.at[1]) > 0.9 * a.size


def test_the_legend_has_room_for_its_ticks():
    assert BAR_HEIGHT > 2.6 * 13
    assert {"0.1 µT", "1000 µT"} <= set(texts(picture()))


@pytest.mark.parametrize("unit", ["µT", "mT", "nT", "mG", "G"])
def test_no_tick_of_the_legend_is_written_twice(unit):
    written = texts(picture(unit=unit, references=(), mask=np.zeros((51, 81), bool)))
    end = {"µT": "1000 µT", "mT": "1 mT", "nT": "1000000 nT"}
    assert written.count(end.get(unit, {"mG": "10000 mG", "G": "10 G"}.get(unit))) == 1


def test_a_picture_is_written_and_can_be_read(tmp_path):
    path = tmp_path / "map.png"
    write_png(path, subject(), plan(layout(), ()), width=180, height=150)
    image = Image.open(path)
    assert image.size[0] > 600
    colours = {tuple(pixel) for pixel in np.asarray(image).reshape(-1, 3)[::50]}
    assert len(colours) > 50


def test_the_same_map_gives_the_same_bytes():
    assert png(picture()) == png(picture())


def test_grid_has_units_places_and_empty_masked_values():
    shown = subject()
    rows = list(csv.reader(io.StringIO(grid_csv((shown,), [1.0] * shown.values.size))))
    assert rows[0] == ["x [m]", "y [m]", "z [m]", "B RMS resultant [µT]"]
    assert len(rows) == 1 + shown.values.size
    assert [float(cell) for cell in rows[1][:3]] == [-1.0, -1.0, 1.0]
    assert float(rows[1][3]) == pytest.approx(shown.values[0, 0] * 1e6, rel=1e-8)
    middle = rows[1 + 25 * 81 + 40]
    assert [float(cell) for cell in middle[:2]] == pytest.approx([3.0, 1.5])
    assert middle[3] == ""


def test_grid_in_milligauss_and_feet():
    shown = subject(unit="mG", length_unit="ft")
    rows = list(
        csv.reader(io.StringIO(grid_csv((shown,), [0.3048] * shown.values.size)))
    )
    assert rows[0] == ["x [ft]", "y [ft]", "z [ft]", "B RMS resultant [mG]"]
    assert float(rows[1][2]) == pytest.approx(1.0)
    assert float(rows[1][3]) == pytest.approx(shown.values[0, 0] * 1e7, rel=1e-8)


def test_a_folder_that_is_not_there_is_named(tmp_path):
    with pytest.raises(UserError, match=r"map\.csv was not written"):
        write_csv(tmp_path / "none" / "map.csv", (subject(),), [1.0] * 81 * 51)


def test_values_that_do_not_fit_their_grid_are_refused():
    wrong = subject(values=np.ones((3, 3)))
    with pytest.raises(ValueError, match="on a grid of"):
        map_picture(wrong, plan(Layout(), ()), width=180, height=150)


def test_alternating_and_direct_fields_stand_side_by_side():
    shown = subject()
    direct = subject(quantity="resultant at 0 Hz", values=2.0 * shown.values)
    rows = list(
        csv.reader(io.StringIO(grid_csv((shown, direct), [1.0] * shown.values.size)))
    )
    assert rows[0][3:] == ["B RMS resultant [µT]", "B resultant at 0 Hz [µT]"]
    assert float(rows[1][4]) == pytest.approx(2.0 * float(rows[1][3]))


def test_offset_lines_carry_their_dimension_and_stay_in_the_frame():
    turns = np.linspace(0.0, 2.0 * np.pi, 91)
    ring = np.column_stack([3.0 + 2.0 * np.cos(turns), 1.5 + 2.0 * np.sin(turns)])
    far = np.array([(20.0, 0.0), (30.0, 0.0)])
    offsets = OffsetLines(
        "Target · at 1.00 m", "Target reaches 2.00 m.", (ring, far),
        np.array([(3.0, 0.0), (3.0, 3.0)]), ((3.0, 1.5), (5.0, 1.5), "2.00 m from R"),
    )  # fmt: skip
    plain, drawn = picture(), picture(offsets=offsets)
    for wanted in ("2.00 m from R", "Target · at 1.00 m"):
        assert wanted in texts(drawn)
        assert wanted not in texts(plain)
    dashed = [p for p in drawn.parts if isinstance(p, Stroke) and p.width == 0.8]
    places = np.concatenate([np.array(p.points) for p in dashed])
    assert places[:, 0].max() < drawn.width
    # Its own shape: as wide as high, twice the radius.
    ring_on_paper = max(dashed, key=lambda p: len(p.points))
    span = np.ptp(np.array(ring_on_paper.points), axis=0)
    assert span[0] == pytest.approx(span[1], rel=1e-3)


def test_offset_lines_as_numbers_name_their_unit():
    line = np.array([(0.3048, 0.0), (0.6096, 0.3048)])
    offsets = OffsetLines("Target", "Target reaches.", (line,), np.zeros((0, 2)))
    rows = list(csv.reader(io.StringIO(offsets_csv(offsets, "Case A", "ft"))))
    assert rows[:3] == [["Case A"], ["Target reaches."], ["line", "x [ft]", "y [ft]"]]
    assert rows[3:] == [["1", "1", "0"], ["1", "2", "1"]]


def test_no_round_line_stands_beside_the_line_of_a_level():
    def thin(level):
        lines = _iso_lines(subject(references=(ReferenceLine("Example A", level),)))
        return {text for _, text, is_bold in lines if not is_bold}

    assert "5 µT" in thin(5.2e-6)
    assert "5 µT" not in thin(4.95e-6)
    assert "2 µT" in thin(4.95e-6)
