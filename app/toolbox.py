"""The tools in their row, and which one is active."""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal

from app.document import Document
from app.messages import Messages
from app.tools.calibrate import CalibrateTool
from app.tools.enclosure import EnclosureTool
from app.tools.equipment import EquipmentTool
from app.tools.measure import MeasureTool
from app.tools.profile import ProfileTool
from app.tools.receptor import ReceptorTool
from app.tools.room import RoomTool
from app.tools.run import RunTool
from app.tools.select import SelectTool
from app.tools.tool import Tool
from app.tools.zone import ZoneTool
from app.view_state import ViewState

#: In the order of the row; their keys are 1 to 9.
ROW = (
    SelectTool,
    RoomTool,
    EnclosureTool,
    EquipmentTool,
    RunTool,
    ZoneTool,
    ReceptorTool,
    ProfileTool,
    MeasureTool,
)


class Toolbox(QObject):
    """One tool of each kind; exactly one is active.

    Signals
    -------
    activated(tool)
    hint_changed(text)
        Of the active tool.
    """

    activated = Signal(object)
    hint_changed = Signal(str)

    def __init__(
        self, document: Document, view_state: ViewState, messages: Messages
    ) -> None:
        super().__init__()
        self.tools: tuple[Tool, ...] = tuple(
            kind(document, view_state, messages) for kind in ROW
        )
        #: Not in the row: begun from a backing drawing.
        self.calibrate = CalibrateTool(document, view_state, messages)
        self._active: Tool | None = None

    @property
    def active(self) -> Tool | None:
        return self._active

    def activate(self, tool: Tool) -> None:
        """Make this the active tool; what the other one had begun is dropped."""
        if tool is self._active:
            return
        if self._active is not None:
            self._active.deactivate()
            self._active.hint_changed.disconnect(self.hint_changed)
        self._active = tool
        tool.hint_changed.connect(self.hint_changed)
        tool.activate()
        self.activated.emit(tool)
        self.hint_changed.emit(tool.hint)

    def back(self) -> bool:
        """Escape: one step back in the tool, or back to the first tool."""
        if self._active is not None and self._active.back():
            return True
        if self._active is not self.tools[0]:
            self.activate(self.tools[0])
            return True
        return False
