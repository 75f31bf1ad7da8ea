"""Where the upright planes of the elevations stand: chosen, typed, stepped, dragged."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QObject

from app.document import Document
from app.elevation_plane import (
    ELEVATIONS,
    chosen_place,
    middle_depth,
    plane_text,
    upright_of,
    with_depth,
)
from app.margin_values import Margins, concern
from app.view_state import ViewState
from app.views.drawing_view import DrawingView
from app.views.plane_line import PlaneLine
from app.views.projection import LOOKING_Y
from engine.items import Point3

#: Hides the line on the plan.
LAYER = "upright plane"


class PlanePlaces(QObject):
    """Puts the planes of a view state, and shows the last one on the plan.

    Parameters
    ----------
    may_drag : callable
        Whether the line on the plan can be gripped beside its handles.
    """

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        plan: DrawingView,
        may_drag: Callable[[], bool],
    ) -> None:
        super().__init__(plan)
        self._document, self._view_state = document, view_state
        self._worst: dict[str, Point3] = {}
        self._shown = ""
        self.line = PlaneLine(plan, may_drag)
        self.line.dragged.connect(self._on_dragged)

    def set_margins(self, margins: Margins) -> None:
        """Know the worst place of each zone."""
        self._worst = {
            row.place: row.at
            for row in sorted(margins.rows, key=concern)
            if row.at is not None
        }

    def forget(self) -> None:
        """Another layout is shown: its planes are not chosen yet."""
        self._worst, self._shown = {}, ""
        self._view_state.set(plane_x=None, plane_y=None, line="", leg=0)

    def depth(self, view: str) -> float | None:
        """Where the plane of an elevation was put; None: nowhere yet. [m]"""
        look = self._view_state.look
        return look.plane_y if ELEVATIONS[view] is LOOKING_Y else look.plane_x

    def put(self, view: str, depth: float) -> None:
        """Put the plane of an elevation there. [m]"""
        self._view_state.set(**with_depth(ELEVATIONS[view], depth))

    def put_through(self, view: str, at: Point3) -> None:
        """Put the plane of an elevation through a place."""
        self.put(view, float(ELEVATIONS[view].depth(at)))

    def put_through_selection(self, view: str) -> None:
        """Through what is selected, or the middle of what is drawn."""
        layout = self._document.layout
        at = chosen_place(layout, self._document.selection, self._worst)
        if at is None:
            self.put(view, middle_depth(layout, ELEVATIONS[view]))
        else:
            self.put_through(view, at)

    def step(self, view: str, steps: int, grid: float) -> None:
        """Move a plane to another step of the grid. [m]"""
        depth = self.depth(view)
        if depth is not None:
            self.put(view, grid * (round(depth / grid) + steps))

    def show(self, elevation: str) -> None:
        """Show on the plan where the plane of an elevation stands.

        Alone (no elevation), the plan shows the one that was shown last.
        """
        self._shown = elevation or self._shown
        layout, look = self._document.layout, self._view_state.look
        is_hidden = not self._shown or LAYER in look.hidden
        upright = None if is_hidden else upright_of(layout, look, self._shown)
        self.line.set_plane(upright, plane_text(layout, look, self._shown))

    def _on_dragged(self, depth: float) -> None:
        if self._shown in ELEVATIONS:
            self.put(self._shown, depth)
