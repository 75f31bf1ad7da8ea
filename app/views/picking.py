"""Which items a pointer means: by label, by grips, else all near enough in order."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QPointF, Qt

from app.tools.tool import Pointer, Tool
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
) -> tuple[str, ...]:
    """Ids of the items under the pointer, from the one it means downwards.

    Rooms and zones are meant by their outlines and labels only, so that a press inside
    them can begin something else.
    """
    gripped = [i.item_id for i in selected(scene) if _is_gripped(i, at, reach)]
    labelled = [
        each.label.item
        for each in reversed(labels)
        if each.label.item and each.box.contains(pixel)
    ]
    found = (*gripped, *labelled, *picked_shapes(scene, at, reach))
    return tuple(dict.fromkeys(found))


def cursor_of(tool: Tool, pointer: Pointer) -> Qt.CursorShape:
    """How the pointer looks: a tool catches places, or something can be taken."""
    if tool.catches():
        return Qt.CursorShape.CrossCursor
    if pointer.pick is not None:
        return Qt.CursorShape.PointingHandCursor
    return Qt.CursorShape.ArrowCursor


def picked_shapes(scene: DrawingScene, at: Point, reach: float) -> tuple[str, ...]:
    """Ids of the items within reach, the uppermost first. [m]"""
    found: list[tuple[tuple[int, float, float], str]] = []
    for item in scene.shapes():
        box = item.boundingRect().adjusted(-reach, -reach, reach, reach)
        # A mark of constant size is larger than its box in metres.
        wide = 2.0 * reach if item.layer == "receptors" else reach
        if not box.contains(QPointF(*at)):
            continue
        distance = item.distance(at)
        if distance <= wide:
            rank = (_ORDER.index(item.layer), distance, -item.zValue())
            found.append((rank, item.item_id))
    found.sort(key=lambda each: each[0])
    backing = _picked_backing(scene, at, reach)
    ids = [item_id for _, item_id in found]
    return tuple(dict.fromkeys(ids if backing is None else [*ids, backing]))


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
