"""Which item a pointer means: its label, its grips, else the uppermost near enough."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QPointF

from app.views.drawing_scene import DrawingScene
from app.views.labels import PlacedLabel
from app.views.shape_item import ShapeItem
from engine.drawing import Point

#: What lies within reach is taken in this order, the nearest first.
_ORDER = (
    "receptors", "runs", "profiles", "equipment", "enclosures", "zones", "rooms",
)  # fmt: skip


def picked(
    scene: DrawingScene,
    labels: Sequence[PlacedLabel],
    at: Point,
    pixel: QPointF,
    reach: float,
) -> str | None:
    """Id of the item under the pointer, or None.

    Rooms and zones are meant by their outlines and labels only, so that a press inside
    them can begin something else.
    """
    gripped = next((i for i in selected(scene) if _is_gripped(i, at, reach)), None)
    if gripped is not None:
        return gripped.item_id
    for each in reversed(labels):
        if each.label.item and each.box.contains(pixel):
            return each.label.item
    return picked_shape(scene, at, reach)


def picked_shape(scene: DrawingScene, at: Point, reach: float) -> str | None:
    """Id of the uppermost item within reach. [m]"""
    best: tuple[int, float, float] | None = None
    found = None
    for item in scene.shapes():
        box = item.boundingRect().adjusted(-reach, -reach, reach, reach)
        # A mark of constant size is larger than its box in metres.
        wide = 2.0 * reach if item.layer == "receptors" else reach
        if not box.contains(QPointF(*at)):
            continue
        distance = item.distance(at)
        rank = (_ORDER.index(item.layer), distance, -item.zValue())
        if distance <= wide and (best is None or rank < best):
            best, found = rank, item.item_id
    return found or _picked_backing(scene, at, reach)


def _picked_backing(scene: DrawingScene, at: Point, reach: float) -> str | None:
    """The uppermost backing drawing whose edge is within reach, unless locked. [m]"""
    for item_id, backing in reversed(scene.backings.items()):
        drawing = backing.drawing
        is_free = drawing is not None and not drawing.locked and backing.isVisible()
        if is_free and backing.edge_distance(at) <= reach:
            return item_id
    return None


def selected(scene: DrawingScene) -> list[ShapeItem]:
    """The items that show grips: the only one selected."""
    found = [item for item in scene.items_by_id.values() if item.is_selected]
    return found if len(found) == 1 and found[0].isVisible() else []


def _is_gripped(item: ShapeItem, at: Point, reach: float) -> bool:
    return any(
        abs(x - at[0]) <= 1.4 * reach and abs(y - at[1]) <= 1.4 * reach
        for x, y in item.grips()
    )
