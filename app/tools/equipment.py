"""Equipment: a board by the two ends of its bars, a transformer by its place."""

from __future__ import annotations

from app.tools.drawing_tool import Choice, Points
from engine.edits import added
from engine.equipment import Board, Transformer
from engine.new_sources import new_board, new_transformer

BOARD, TRANSFORMER, ASIDE = "board", "transformer", "transformer, turned by 90°"


class EquipmentTool(Points):
    """Places boards and transformers with values to be edited."""

    name, key, icon = "Equipment", "4", "equipment"

    def choices(self) -> tuple[Choice, ...]:
        return (self._choice("kind", (BOARD, TRANSFORMER, ASIDE)),)

    @property
    def kind(self) -> str:
        """What is placed."""
        return self.choices()[0].value

    @property
    def _fewest(self) -> int:  # type: ignore[override]
        return 2 if self.kind == BOARD else 1

    @property
    def _most(self) -> int:  # type: ignore[override]
        return self._fewest

    def _finish(self) -> None:
        layout = self._document.committed
        places = [point[:2] for point in self._points]
        made: Board | Transformer
        if self.kind == BOARD:
            made = new_board(layout, places[0], places[1], self._storey)
        else:
            turn = 90.0 if self.kind == ASIDE else 0.0
            made = new_transformer(layout, places[0], self._storey, turn)
        self._commit(f"Place {made.title}", added(layout, made), (made.id,))

    def _choice_made(self) -> None:
        self._start_over()

    def _next_hint(self) -> str:
        if self.kind != BOARD:
            return "Click the middle of the transformer."
        if not self._points:
            return "Click where the board is fed; its bars run from there."
        return "Click the other end of the bars; Esc goes one step back."
