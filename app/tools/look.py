"""Look: selecting and reading in a view where nothing can be drawn exactly."""

from __future__ import annotations

from app.document import Document
from app.tools.tool import Pointer, Tool

HINT = (
    "Along a drawn line one looks, reads and selects: click an item, Shift adds. "
    "Draw and move on the plan or the other elevations."
)


class LookTool(Tool):
    """Selects what is clicked; moves nothing."""

    name = "Look"

    def __init__(self, document: Document) -> None:
        super().__init__()
        self._document = document
        self.set_hint(HINT)

    def catches(self) -> bool:
        return False

    def press(self, pointer: Pointer) -> None:
        chosen = frozenset() if pointer.pick is None else frozenset({pointer.pick})
        if pointer.shift:
            chosen |= self._document.selection
        self._document.select(chosen)

    def back(self) -> bool:
        if not self._document.selection:
            return False
        self._document.select(())
        return True
