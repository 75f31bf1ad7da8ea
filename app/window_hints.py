"""What the line at the foot of the window says can be done now."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from app.main_window import MainWindow

BACK = "Esc goes back to the drawing."
_SECTION = "Click a conductor, Shift adds; drag it or press an arrow key to move it. "


def hint_of(window: MainWindow) -> str:
    """The hint for what stands in the drawing's place."""
    page, tool = window.pages.currentWidget(), window.toolbox.active
    if window.splitter.isHidden():
        # The table or the cautions stand in the place of everything else.
        is_table = window.margins.below.currentWidget() is window.margins.table
        return f"Click a row to see its place. {BACK}" if is_table else BACK
    if page is window.section:
        return _SECTION + BACK
    hint = window.drawings.hint or (tool.hint if tool is not None else "")
    return hint if page is window.drawings and tool is not None else BACK
