"""The items of a drawing, in step with the layout: only what differs is touched."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from itertools import groupby
from operator import attrgetter, is_

from PySide6.QtCore import QObject, QRectF, Signal
from PySide6.QtWidgets import QGraphicsScene

from app.tools.catch import Targets, joined
from app.view_state import Look
from app.views.backing_item import BackingItem
from app.views.flowing import carries, flowing, shown_case
from app.views.inks import Inks
from app.views.map_layer import MapLayer
from app.views.place_items import LooseStrandsItem, PlaceItem, ReceptorItem
from app.views.profile_item import ProfileItem
from app.views.projection import PLAN, Sight
from app.views.run_item import RunItem
from app.views.shape_item import ShapeItem
from engine.conductor import Conductor, bundles_of
from engine.conductors import conductors
from engine.drawing import Place, Strand, plan
from engine.elevation import elevation
from engine.errors import UserError
from engine.layout import Layout
from engine.run_conductors import run_conductors

#: The layout's coordinates and some room around them. [m]
EXTENT = 1.1e5

#: Layers from below; what is selected is raised within "selection".
_ORDER = (
    "backing drawing", "map", "rooms", "zones", "enclosures", "equipment", "runs",
    "profiles", "receptors",
)  # fmt: skip
_SELECTED = 50.0


class DrawingScene(QGraphicsScene):
    """One item per id of the layout, seen from one side.

    Attributes
    ----------
    items_by_id : dict of ShapeItem
    plan : Plan
        What is shown.
    problem : str
        Why some conductors are not shown; empty when all are.

    Signals
    -------
    touched()
        Something looks different now.
    """

    touched = Signal()

    def __init__(self, sight: Sight, inks: Inks, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.setItemIndexMethod(QGraphicsScene.ItemIndexMethod.NoIndex)
        self.setSceneRect(QRectF(-EXTENT, -EXTENT, 2 * EXTENT, 2 * EXTENT))
        self._sight = sight
        self._inks = inks
        self._look = Look()
        self._selection: frozenset[str] = frozenset()
        self._storeys: dict[str, str | None] = {}
        self._lowest = ""
        self._caught: tuple[frozenset[str], Targets] | None = None
        self.items_by_id: dict[str, ShapeItem] = {}
        self.backings: dict[str, BackingItem] = {}
        self.problem = ""
        self._notes: dict[str, str] = {}
        self.shows_labels = True
        self.plan = plan(Layout(), ())
        self.map_layer = MapLayer(inks)
        self.map_layer.setZValue(_ORDER.index("map"))
        self.addItem(self.map_layer)

    def show_layout(self, layout: Layout, look: Look) -> None:
        """Show a layout; items whose shapes are the same stay as they are."""
        self._look = look
        shown = self._conductors(layout)
        if self._sight is PLAN:
            self.plan = plan(layout, shown)
        else:
            self.plan = elevation(layout, shown, self._sight)
        keys = flowing(layout, shown_case(layout, look.case))
        live = {
            bundle[0].item
            for bundle in bundles_of(shown)
            if bundle[0].role == "run" and any(carries(each, keys) for each in bundle)
        }
        if not shown:
            live = {run.id for run in layout.runs}
        kept: set[str] = set()
        self._show_places(layout, kept)
        self._show_runs(live, kept)
        self._show_receptors(kept)
        self._show_profiles(layout, kept)
        self._show_backings(layout)
        for gone in self.items_by_id.keys() - kept:
            self.removeItem(self.items_by_id.pop(gone))
        self._caught = None
        self._apply_look()
        self.touched.emit()

    def set_sight(self, sight: Sight) -> None:
        """Look from another side, from the next layout shown on."""
        self._sight = sight
        for item in self.items_by_id.values():
            self.removeItem(item)
        self.items_by_id.clear()

    def set_look(self, look: Look) -> None:
        """Hide and show layers, and mute rooms of other storeys."""
        self._look = look
        self._apply_look()
        self.touched.emit()

    @property
    def look(self) -> Look:
        """What is looked at in the layout that shows."""
        return self._look

    def select(self, selection: frozenset[str]) -> None:
        """Show which items are selected."""
        for item_id in self._selection ^ selection:
            item = self.items_by_id.get(item_id)
            if item is not None:
                item.is_selected = item_id in selection
                self._raise(item)
            backing = self.backings.get(item_id)
            if backing is not None:
                backing.set_selected(item_id in selection)
        self._selection = selection
        self.touched.emit()

    def set_notes(self, notes: Mapping[str, str]) -> None:
        """Write something beside the names of receptors, by their ids."""
        if notes != self._notes:
            self._notes = dict(notes)
            for item_id in self.items_by_id:
                self._annotate(item_id)
            self.touched.emit()

    def _annotate(self, item_id: str) -> None:
        item = self.items_by_id.get(item_id)
        if isinstance(item, ReceptorItem):
            item.note = self._notes.get(item_id, "")

    def set_inks(self, inks: Inks) -> None:
        """Draw everything in another theme."""
        self._inks = inks
        self.map_layer.inks = inks
        for item in self.items_by_id.values():
            item.inks = inks
        for backing in self.backings.values():
            backing.set_theme(inks.theme)
        self.touched.emit()

    def set_scale(self, scale: float) -> None:
        """Tell the items how near the view is. [px/m]"""
        for item in self.items_by_id.values():
            item.scale_now = scale

    @property
    def is_empty(self) -> bool:
        """Whether nothing at all is drawn."""
        return not self.items_by_id and not self.backings

    def everything(self) -> QRectF:
        """All that is drawn, or where an empty drawing begins. [m]"""
        bounds = self.plan.bounds()
        box = QRectF()
        if bounds is not None:
            x0, y0, x1, y1 = bounds
            box = QRectF(x0, y0, max(x1 - x0, 1e-6), max(y1 - y0, 1e-6))
        for backing in self.backings.values():
            box = box.united(backing.sceneBoundingRect())
        return QRectF(-1.0, -1.0, 12.0, 8.0) if box.isNull() else box

    def ground_state(self) -> tuple[object, ...]:
        """What lies below the items, to tell whether it has changed."""
        layer = self.map_layer
        below = [b.state for b in self.backings.values() if b.isVisible()]
        return (layer.picture, layer.shows_colours, layer.shows_lines, *below)

    def shapes(self) -> list[ShapeItem]:
        """The visible items, uppermost first."""
        found = [item for item in self.items_by_id.values() if item.isVisible()]
        return sorted(found, key=lambda item: -item.zValue())

    def targets(self, without: frozenset[str]) -> Targets:
        """What can be caught of the visible items, leaving some out."""
        if self._caught is None or self._caught[0] != without:
            parts = [
                item.targets()
                for item in self.items_by_id.values()
                if item.isVisible() and item.item_id not in without
            ]
            self._caught = (without, joined(parts))
        return self._caught[1]

    def _conductors(self, layout: Layout) -> Sequence[Conductor]:
        """All conductors, or those of the runs that can be built."""
        try:
            self.problem = ""
            return conductors(layout)
        except UserError as error:
            self.problem = str(error)
        found: list[Conductor] = []
        for run in layout.runs:
            try:
                found.extend(run_conductors(run, run.id))
            except UserError:
                continue
        return found

    def _show_places(self, layout: Layout, kept: set[str]) -> None:
        of_unit = _by_item(
            [*self.plan.equipment_strands, *self.plan.links],
            {unit.id for unit in layout.equipment},
        )
        for place in (*self.plan.rooms, *self.plan.zones, *self.plan.enclosures):
            self._show_place(place, (), kept)
        for place in self.plan.equipment:
            self._show_place(place, of_unit.pop(place.item, ()), kept)
        titles = {unit.id: unit.title for unit in layout.equipment}
        for item_id, strands in of_unit.items():
            item = self.items_by_id.get(item_id)
            if not isinstance(item, LooseStrandsItem):
                self._add(
                    LooseStrandsItem(item_id, titles[item_id], strands, self._inks)
                )
            elif not _same(item.strands, strands) or item.title != titles[item_id]:
                item.show_shape(titles[item_id], strands)
            kept.add(item_id)
        lowest = min(layout.storeys, key=lambda s: s.floor_level, default=None)
        self._storeys = {room.id: room.storey for room in layout.rooms}
        self._lowest = lowest.id if lowest is not None else ""

    def _show_place(
        self, place: Place, strands: Sequence[Strand], kept: set[str]
    ) -> None:
        item = self.items_by_id.get(place.item)
        if not isinstance(item, PlaceItem) or item.place.kind != place.kind:
            self._add(PlaceItem(place, strands, self._inks))
        elif item.place != place or not _same(item.strands, strands):
            item.show_shape(place, strands)
        kept.add(place.item)

    def _show_runs(self, live: set[str], kept: set[str]) -> None:
        links = _by_item(self.plan.links, {run.item for run in self.plan.runs})
        for run in self.plan.runs:
            own = links.get(run.item, ())
            has_current = run.item in live
            item = self.items_by_id.get(run.item)
            if not isinstance(item, RunItem):
                self._add(RunItem(run, own, has_current, self._inks))
            elif (
                item.run is not run
                or item.has_current != has_current
                or not _same(item.links, own)
            ):
                item.show_shape(run, own, has_current)
            kept.add(run.item)

    def _show_receptors(self, kept: set[str]) -> None:
        for mark in self.plan.receptors:
            item = self.items_by_id.get(mark.item)
            if not isinstance(item, ReceptorItem):
                self._add(ReceptorItem(mark, self._inks))
            elif item.mark != mark:
                item.show_shape(mark)
            self._annotate(mark.item)
            kept.add(mark.item)

    def _show_profiles(self, layout: Layout, kept: set[str]) -> None:
        for profile in layout.profiles:
            item = self.items_by_id.get(profile.id)
            if not isinstance(item, ProfileItem):
                self._add(ProfileItem(profile, self._sight, self._inks))
            elif item.profile is not profile:
                item.show_shape(profile)
            kept.add(profile.id)

    def _show_backings(self, layout: Layout) -> None:
        wanted = {
            drawing.id: drawing
            for drawing in layout.backing_drawings
            if drawing.view == self._sight.name
        }
        for gone in self.backings.keys() - wanted.keys():
            self.removeItem(self.backings.pop(gone))
        for item_id, drawing in wanted.items():
            item = self.backings.get(item_id)
            if item is None:
                item = BackingItem(drawing, self._inks.theme)
                self.backings[item_id] = item
                item.setZValue(_ORDER.index("backing drawing"))
                item.set_selected(item_id in self._selection)
                self.addItem(item)
            else:
                item.show_drawing(drawing)

    def _add(self, item: ShapeItem) -> None:
        before = self.items_by_id.pop(item.item_id, None)
        if before is not None:
            self.removeItem(before)
        item.is_selected = item.item_id in self._selection
        self.items_by_id[item.item_id] = item
        self.addItem(item)
        self._raise(item)

    def _raise(self, item: ShapeItem) -> None:
        base = float(_ORDER.index(item.layer))
        if isinstance(item, RunItem) and item.run.strands:
            # What is nearer to the viewer covers what is farther away.
            nearest = max(strand.nearness for strand in item.run.strands)
            base += 0.5 + 0.4 * nearest / EXTENT
        item.setZValue(base + (_SELECTED if item.is_selected else 0.0))

    def _apply_look(self) -> None:
        hidden = self._look.hidden
        storey = self._look.storey or self._lowest
        for item in self.items_by_id.values():
            item.setVisible(item.layer not in hidden)
            if isinstance(item, PlaceItem) and item.place.kind == "room":
                own = self._storeys.get(item.item_id)
                item.is_on_storey = not own or not storey or own == storey
        for backing in self.backings.values():
            backing.setVisible("backing drawing" not in hidden)
        self.shows_labels = "labels" not in hidden
        self.map_layer.shows_colours = "map" not in hidden
        self.map_layer.shows_lines = "iso-lines" not in hidden
        self._caught = None


def _same(one: Sequence[Strand], other: Sequence[Strand]) -> bool:
    return len(one) == len(other) and all(map(is_, one, other))


def _by_item(
    strands: Iterable[Strand], wanted: set[str]
) -> dict[str, Sequence[Strand]]:
    # Those of one item mostly follow each other; there are thousands at each step.
    found: dict[str, list[Strand]] = {}
    for item, own in groupby(strands, attrgetter("item")):
        if item in wanted:
            found.setdefault(item, []).extend(own)
    return dict(found)
