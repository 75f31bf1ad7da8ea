"""Select: choose items, move them or their vertices by exact amounts, delete them.

A further click at the same place takes what lies beneath. A box selects what lies
wholly inside it. A drag previews and ends as one step of the
history; its way is counted from the exact place of the item that was gripped.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import dist

from app import commands
from app.document import Document
from app.messages import Messages
from app.tools.drawing_tool import DrawingTool, direction_text
from app.tools.picking import (
    Handle,
    grip,
    handle_near,
    handles,
    in_space,
    inside_box,
    leg_near,
    seen,
    sight,
)
from app.tools.reshaping import first_place, sized, way, with_checked_vertex
from app.tools.stack import Stack
from app.tools.tool import Dimension, Entry, Overlay, Point, Pointer
from app.view_state import ViewState
from engine.edits import checked, replaced
from engine.errors import UserError
from engine.items import Item, Point3
from engine.layout import Layout
from engine.motions import neat
from engine.new_places import outline
from engine.places import Enclosure, Room, Zone
from engine.routes import SHORTEST
from engine.shaping import counted, moved
from engine.vertices import extent, vertices

HINT = (
    "Click to select, Shift adds; a box takes what lies wholly inside it; drag to move."
)


@dataclass
class _Drag:
    """What goes on while the button is held."""

    kind: str
    start: Point
    raw: Point
    at: Point
    #: Where the way begins when its end is caught.
    grip: Point
    #: A click takes what lies beneath the selection.
    goes_down: bool = False
    is_under_way: bool = False


class SelectTool(DrawingTool):
    """Selects and moves."""

    name, key, icon = "Select", "1", "select"
    on_elevations = True

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        messages: Messages | None = None,
    ) -> None:
        super().__init__(document, view_state, messages)
        self._drag: _Drag | None = None
        self._handle: Handle | None = None
        self._stack = Stack()
        self._view = sight("plan")
        self.set_hint(HINT)
        document.selection_changed.connect(self._on_selection)

    def activate(self) -> None:
        self.set_hint(HINT)

    def deactivate(self) -> None:
        self._cancel()

    def anchor(self) -> Point | None:
        drag = self._drag
        if drag is None or drag.kind not in ("items", "vertex"):
            return None
        return drag.start

    def moving(self) -> frozenset[str]:
        drag = self._drag
        if drag is None or not drag.is_under_way or drag.kind == "box":
            return frozenset()
        if drag.kind == "vertex" and self._handle is not None:
            return frozenset({self._handle.item})
        return self._document.selection

    def catches(self) -> bool:
        return self._drag is not None and self._drag.kind != "box"

    def press(self, pointer: Pointer) -> None:
        self._view = sight(pointer.plane)
        document = self._document
        handle = handle_near(
            document.committed,
            document.selection,
            self._view,
            pointer.raw,
            pointer.reach,
        )
        again = self._stack.is_again(pointer, document.selection)
        self._stack.stay()
        if handle is not None and not pointer.shift:
            if not again:
                self._stack.begin(pointer, handle.item, was_chosen=True)
            # The vertex comes first: only when it is chosen does a click go down.
            goes_down = again and self._is_chosen(handle)
            self._begin("vertex", pointer, handle.at, handle, goes_down)
            return
        pick = pointer.pick
        if pick is None:
            self._stack.forget()
            self._begin("box", pointer, pointer.raw)
            return
        again = again and not pointer.shift
        if again:
            pick = self._stack.taken or pick
        elif pointer.shift:
            document.select(document.selection | {pick})
            self._stack.forget()
        else:
            was_chosen = pick in document.selection
            if not was_chosen:
                document.select({pick})
            self._stack.begin(pointer, pick, was_chosen=was_chosen)
        item = document.committed.by_id()[pick]
        gripped = grip(item, self._view, pointer)
        self._begin("items", pointer, gripped, goes_down=again)

    def move(self, pointer: Pointer) -> None:
        drag = self._drag
        if drag is None:
            self._view = sight(pointer.plane)
            return
        if not drag.is_under_way and dist(pointer.raw, drag.raw) <= pointer.reach:
            return
        if not drag.is_under_way:
            drag.is_under_way = True
            if pointer.caught:
                drag.start = drag.grip
            self.set_hint("Release to end the move; Esc leaves everything as it was.")
        drag.at = pointer.raw if drag.kind == "box" else pointer.at
        if drag.kind != "box":
            try:
                self._document.preview(self._dragged())
            except UserError:
                self._document.revert()
        self.overlay_changed.emit()

    def release(self, pointer: Pointer) -> None:
        drag = self._drag
        if drag is None:
            return
        if not drag.is_under_way:
            self._drag = None
            if drag.kind == "box" and not pointer.shift:
                self._document.select(())
            self._take_clicked(pointer, drag.goes_down)
            self.overlay_changed.emit()
            return
        drag.at = pointer.raw if drag.kind == "box" else pointer.at
        if drag.kind == "box":
            self._take_box(pointer.shift)
        else:
            self._end_drag()
        self._drag = None
        self.set_hint(HINT)
        self.overlay_changed.emit()

    def double_click(self, pointer: Pointer) -> None:
        """Insert a vertex where an item's leg was hit twice; in a stack, go down."""
        self._cancel()
        self._view = sight(pointer.plane)
        if self._stack.goes_on(pointer):
            self._take_clicked(pointer, goes_down=True)
            return
        layout = self._document.committed
        meant = self._stack.taken or pointer.pick
        wanted = {meant} if meant else self._document.selection
        for item in layout.items():
            if item.id not in wanted:
                continue
            found = leg_near(item, self._view, pointer.at, pointer.reach)
            if found is None:
                continue
            leg, at = found
            with self._shown():
                commands.insert_vertex(self._document, item.id, leg, at)
                self._document.select({item.id})
                self._handle = Handle(item.id, leg + 1, seen(self._view, at))
            self.overlay_changed.emit()
            return

    def delete(self) -> None:
        """Delete the vertex clicked last, else the selected items."""
        self._cancel()
        handle, self._handle = self._handle, None
        with self._shown():
            if handle is not None:
                commands.delete_vertex(self._document, handle.item, handle.index)
            elif self._document.selection:
                commands.delete_selection(self._document)
        self.overlay_changed.emit()

    def backspace(self) -> None:
        self.delete()

    def back(self) -> bool:
        if self._drag is not None:
            self._cancel()
            return True
        if self._handle is not None:
            self._handle = None
            self.overlay_changed.emit()
            return True
        if self._document.selection:
            self._document.select(())
            return True
        return False

    def nudge(self, dx: float, dy: float) -> None:
        self._shift(in_space(self._view, dx, dy), "Nudge")

    def entry(self, entry: Entry) -> None:
        """`by` moves the selection, `to` its vertex clicked last or its first one;
        `size` gives a rectangle another size."""
        with self._shown():
            items = commands.selected(self._document)
            if entry.kind == "size":
                assert entry.size is not None
                layout = replaced(self._document.committed, sized(items, entry.size))
                self._document.edit(f"Give {counted(items)} another size", layout)
                return
            at = self._reference(items)
            self._shift(way(at, entry.point(at)), "Move")

    def overlay(self) -> Overlay:
        drag = self._drag
        if drag is not None and drag.kind == "box" and drag.is_under_way:
            return Overlay(box=(drag.start, drag.at))
        layout = self._document.layout
        shown = handles(layout, self._document.selection, self._view)
        points = tuple(handle.at for handle in shown)
        if drag is None or not drag.is_under_way:
            return Overlay(points=points, labels=self._active_label())
        start, end = drag.start, drag.at
        if dist(start, end) <= SHORTEST:
            return Overlay(points=points)
        text = f"{self._length_text(dist(start, end))} · {direction_text(start, end)}"
        return Overlay(points=points, dimensions=(Dimension(start, end, text),))

    def _begin(
        self, kind: str, pointer: Pointer, at: Point, handle: Handle | None = None,
        goes_down: bool = False,
    ) -> None:  # fmt: skip
        self._handle = handle
        start = pointer.raw if handle is None else at
        self._drag = _Drag(kind, start, pointer.raw, start, at, goes_down)
        self.overlay_changed.emit()

    def _is_chosen(self, handle: Handle) -> bool:
        held = self._handle
        return held is not None and (held.item, held.index) == (
            handle.item,
            handle.index,
        )

    def _take_clicked(self, pointer: Pointer, goes_down: bool) -> None:
        """End a click: take what lies beneath, and say which one it is."""
        if goes_down:
            self._document.select({self._stack.further(pointer)})
        words = self._stack.words(pointer)
        # A key may have deleted it while the button was held.
        item = self._document.committed.by_id().get(self._stack.taken or "")
        if not words or item is None:
            self.set_hint(HINT)
            return
        self.set_hint(f"{words}: {item.title}. Click again for the next one beneath.")

    def _cancel(self) -> None:
        if self._drag is not None:
            self._drag = None
            self._document.revert()
            self.set_hint(HINT)
            self.overlay_changed.emit()

    def _way(self, drag: _Drag) -> Point3:
        dx, dy = drag.at[0] - drag.start[0], drag.at[1] - drag.start[1]
        return in_space(self._view, dx, dy)

    def _dragged(self) -> Layout:
        drag = self._drag
        assert drag is not None
        return self._shifted(self._way(drag))

    def _end_drag(self) -> None:
        drag = self._drag
        assert drag is not None
        way = self._way(drag)
        if dist(way, (0.0, 0.0, 0.0)) <= SHORTEST:
            self._document.revert()
            return
        self._shift(way, "Move")

    def _shifted(self, way: Point3) -> Layout:
        """The committed layout with the vertex or the selection shifted. [m]"""
        layout = self._document.committed
        handle = self._handle
        if handle is None:
            return moved(layout, self._document.selection, *way)
        item = layout.by_id()[handle.item]
        at = vertices(item)[handle.index]
        x, y, z = (neat(p + d) for p, d in zip(at, way, strict=True))
        return replaced(layout, with_checked_vertex(item, handle.index, (x, y, z)))

    def _shift(self, way: Point3, word: str) -> None:
        """Commit a shift of the vertex or the selection. [m]"""
        if not self._document.selection:
            return
        with self._shown():
            try:
                self._commit_shift(self._shifted(way), word)
            except UserError:
                self._document.revert()
                raise
        self.overlay_changed.emit()

    def _commit_shift(self, layout: Layout, word: str) -> None:
        document = self._document
        by_id = layout.by_id()
        if self._handle is not None:
            item = by_id[self._handle.item]
            if isinstance(item, Room | Enclosure | Zone):
                outline(point[:2] for point in vertices(item))
            document.edit(f"{word} a vertex of {counted((checked(item),))}", layout)
            self._refresh_handle()
            return
        items = [checked(by_id[id]) for id in document.selection]
        if not any(extent(item) for item in items):
            raise UserError("What is selected has no place on the drawing.")
        document.edit(f"{word} {counted(items)}", layout)

    def _refresh_handle(self) -> None:
        handle = self._handle
        item = self._document.committed.by_id().get(handle.item) if handle else None
        if handle is None or item is None or handle.index >= len(vertices(item)):
            self._handle = None
            return
        at = seen(self._view, vertices(item)[handle.index])
        self._handle = Handle(handle.item, handle.index, at)

    def _take_box(self, adds: bool) -> None:
        drag = self._drag
        assert drag is not None
        found = inside_box(
            self._document.committed,
            self._view_state.look,
            self._view,
            drag.start,
            drag.at,
        )
        before = self._document.selection if adds else frozenset()
        self._document.select(before | set(found))

    def _reference(self, items: tuple[Item, ...]) -> Point3:
        """The place of the selection that `to` puts elsewhere. [m]"""
        if self._handle is not None:
            item = self._document.committed.by_id()[self._handle.item]
            return vertices(item)[self._handle.index]
        return first_place(items)

    def _active_label(self) -> tuple[tuple[Point, str], ...]:
        self._refresh_handle()
        if self._handle is None:
            return ()
        return ((self._handle.at, f"vertex {self._handle.index + 1}"),)

    def _on_selection(self, ids: frozenset[str]) -> None:
        if self._handle is not None and self._handle.item not in ids:
            self._handle = None
        if self._stack.taken is not None and ids != {self._stack.taken}:
            self._stack.forget()
            self.set_hint(HINT)
        self.overlay_changed.emit()
