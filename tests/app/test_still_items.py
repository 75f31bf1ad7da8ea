"""What stays as it is, is painted once, and the picture is the same as painted anew."""

from __future__ import annotations

import msgspec
import numpy as np
import pytest
from PySide6.QtCore import QRectF
from PySide6.QtGui import QImage, QPixmap
from pytestqt.qtbot import QtBot

from app.theme import LIGHT
from app.view_state import Look
from app.views.camera import Camera
from app.views.drawing_scene import DrawingScene
from app.views.inks import Inks
from app.views.picture_painter import PicturePainter
from app.views.projection import PLAN
from app.views.run_item import RunItem
from engine.edits import replaced
from engine.layout import Layout
from engine.places import Room
from engine.runs import CircuitShare, Flat, Run

CAMERA = Camera(20.0, 40.0, 360.0, 400.0, 400.0)


@pytest.fixture
def layout() -> Layout:
    section = Flat(
        circuits=(CircuitShare(circuit="C"),), order=("L1", "L2", "L3"), pitch=0.1
    )
    runs = tuple(
        Run(
            id=f"r{i}",
            kind="cable",
            route=((0.0, y, 2.0), (6.0, y, 2.0)),
            section=section,
        )
        for i in range(20)
        for y in (0.9 * i,)
    )
    room = Room(
        id="room",
        floor_level=0.0,
        ceiling_level=3.0,
        outline=((-1, -1), (8, -1), (8, 18), (-1, 18)),
    )
    return Layout(rooms=(room,), runs=runs)


class Easel:
    """A scene and its painter, without a window."""

    def __init__(self, selected: str = "") -> None:
        self.selected = selected
        self.inks = Inks(LIGHT)
        self.scene = DrawingScene(PLAN, self.inks)
        self.painter = PicturePainter(self.scene, PLAN, self.inks)

    def picture(self, layout: Layout, camera: Camera = CAMERA) -> QImage:
        self.scene.show_layout(layout, Look())
        self.scene.select(frozenset({self.selected} - {""}))
        self.scene.set_scale(camera.scale)
        pixels = QPixmap(int(camera.width), int(camera.height))
        self.painter.paint(pixels, camera, layout, QRectF())
        return pixels.toImage().convertToFormat(QImage.Format.Format_RGB888)


def moved(layout: Layout, by: float, which: int = 3) -> Layout:
    run = layout.runs[which]
    route = tuple((x + by, y + by, z) for x, y, z in run.route)
    return replaced(layout, msgspec.structs.replace(run, route=route))


def differ(one: QImage, other: QImage) -> float:
    """Largest difference of a colour, of 255."""
    arrays = [np.frombuffer(i.constBits(), np.uint8).astype(int) for i in (one, other)]
    return float(np.abs(arrays[0] - arrays[1]).max())


def test_a_drag_looks_as_if_painted_anew(qtbot: QtBot, layout: Layout) -> None:
    easel = Easel("r3")
    easel.picture(layout)
    for step in range(1, 5):
        dragged = moved(layout, 0.03 * step)
        found = easel.picture(dragged)
        # Colours laid over each other in another order differ by their rounding.
        assert differ(found, Easel("r3").picture(dragged)) <= 3
    assert differ(easel.picture(layout), Easel("r3").picture(layout)) <= 3


def test_other_views_and_selections_look_as_if_painted_anew(
    qtbot: QtBot, layout: Layout
) -> None:
    easel = Easel()
    for camera in (CAMERA, CAMERA):
        easel.picture(layout, camera)
    nearer = Camera(35.0, 20.0, 380.0, 400.0, 400.0)
    assert differ(easel.picture(layout, nearer), Easel().picture(layout, nearer)) == 0
    easel.picture(layout, nearer)
    easel.selected = "r5"
    assert (
        differ(easel.picture(layout, nearer), Easel("r5").picture(layout, nearer)) <= 3
    )
    fewer = msgspec.structs.replace(layout, runs=layout.runs[:-4])
    easel.selected = ""
    assert differ(easel.picture(fewer, nearer), Easel().picture(fewer, nearer)) <= 3


def test_only_what_moves_is_painted_in_a_drag(
    qtbot: QtBot, layout: Layout, monkeypatch: pytest.MonkeyPatch
) -> None:
    easel = Easel()
    easel.picture(layout)
    easel.picture(moved(layout, 0.1))
    painted: list[str] = []
    true = RunItem.paint

    def watched(item: RunItem, *rest: object) -> None:
        painted.append(item.item_id)
        true(item, *rest)

    monkeypatch.setattr(RunItem, "paint", watched)
    easel.picture(moved(layout, 0.2))
    easel.picture(moved(layout, 0.3))
    assert painted == ["r3", "r3"]
