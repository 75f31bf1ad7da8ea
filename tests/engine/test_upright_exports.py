"""Maps on upright planes as files: places in space, axes and words of the elevation."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest

from engine import field
from engine.commands.upright_map import write_upright_map
from engine.conductors import conductors
from engine.currents import case_phasors, conductor_currents
from engine.elevation import Upright
from engine.errors import UserError
from engine.layout import Layout
from engine.layout_file import read
from engine.sight import LOOKING_X, LOOKING_Y, along
from engine.units import to_tesla

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "small-switch-room.json"


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLE)


def rows_of(path: Path) -> tuple[list[str], np.ndarray, list[str]]:
    """Header, places [m] and values as text."""
    head, *rows = csv.reader(path.read_text(encoding="utf-8").splitlines())
    return head, np.array([row[:3] for row in rows], float), [row[3] for row in rows]


@pytest.mark.parametrize(
    "upright",
    [
        Upright(LOOKING_Y, 1.25),
        Upright(LOOKING_X, 2.5),
        Upright(along((0.5, 0.5, 0.0), (3.5, 4.5, 0.0)), 0.0),
    ],
)
def test_numbers_stand_beside_their_places_in_space(layout, tmp_path, upright):
    out = tmp_path / "map.csv"
    write_upright_map(layout, layout.cases[0], upright, "plane", out)
    head, places, texts = rows_of(out)
    assert head[:3] == ["x [m]", "y [m]", "z [m]"]
    assert upright.sight.depth(places) == pytest.approx(upright.depth, abs=1e-7)
    chosen = [k for k in range(0, len(texts), 977) if texts[k]][:12]
    parts = conductors(layout)
    phasors = case_phasors(layout, layout.cases[0])
    b = field.flux_density(parts, conductor_currents(phasors, parts), places[chosen])
    expected = np.sqrt(np.sum(np.abs(b) ** 2, axis=(0, 2)))
    unit = layout.settings.flux_density_unit
    found = [to_tesla(float(texts[k]), unit) for k in chosen]
    # Maps interpolate between checked nodes, and switch filaments: 0.1 % each.
    assert found == pytest.approx(expected, rel=3e-3)


def test_the_picture_has_the_axes_and_the_words_of_the_elevation(layout, tmp_path):
    out = tmp_path / "map.svg"
    write_upright_map(
        layout, layout.cases[0], Upright(LOOKING_X, 2.5), "vertical plane x 2.50 m",
        out, shown="variant Other way",
    )  # fmt: skip
    text = out.read_text(encoding="utf-8")
    assert "vertical plane x 2.50 m" in text
    assert "Variant Other way." in text
    assert ">y [m]<" in text
    assert ">z [m]<" in text
    assert ">x [m]<" not in text


def test_a_png_is_written_too(layout, tmp_path):
    out = tmp_path / "map.png"
    upright = Upright(along((0.5, 0.5, 0.0), (3.5, 4.5, 0.0)), 0.0)
    write_upright_map(layout, layout.cases[0], upright, "along the line", out)
    assert out.read_bytes().startswith(b"\x89PNG")


def test_an_unknown_ending_says_which_are_known(layout, tmp_path):
    with pytest.raises(UserError, match=r"\.png, \.svg or \.csv"):
        write_upright_map(
            layout, layout.cases[0], Upright(LOOKING_X, 2.5), "", tmp_path / "map.pdf"
        )
