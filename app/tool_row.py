"""The row of tools: one button each, the active one marked, keys 1 to 9."""

from __future__ import annotations

from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QAction, QActionGroup
from PySide6.QtWidgets import QToolBar

from app.icons import SIDE, icon
from app.theme import Theme
from app.toolbox import Toolbox
from app.tools.tool import Tool


class ToolRow(QToolBar):
    """Shows the toolbox and follows it."""

    def __init__(self, toolbox: Toolbox, theme: Theme) -> None:
        super().__init__("Tools")
        self.setMovable(False)
        self.setObjectName("tools")
        self.setIconSize(QSize(SIDE, SIDE))
        self._toolbox = toolbox
        self._actions: dict[Tool, QAction] = {}
        group = QActionGroup(self)
        # A tool that is not in the row can be active.
        group.setExclusionPolicy(QActionGroup.ExclusionPolicy.ExclusiveOptional)
        for tool in toolbox.tools:
            action = QAction(tool.name, self, checkable=True)
            action.setShortcut(tool.key)
            action.setToolTip(f"{tool.name} ({tool.key})")
            action.triggered.connect(lambda _on, chosen=tool: toolbox.activate(chosen))
            group.addAction(action)
            self.addAction(action)
            self._actions[tool] = action
        toolbox.activated.connect(self._on_activated)
        self.set_theme(theme)

    def set_theme(self, theme: Theme) -> None:
        """Draw the icons in the theme's colours."""
        for tool, action in self._actions.items():
            action.setIcon(icon(tool.icon, theme.text, theme.muted))

    def set_wide(self, wide: bool) -> None:
        """With room, the tools show their names beside their icons."""
        style = Qt.ToolButtonStyle.ToolButtonTextBesideIcon
        self.setToolButtonStyle(
            style if wide else Qt.ToolButtonStyle.ToolButtonIconOnly
        )

    def _on_activated(self, tool: Tool) -> None:
        for other, action in self._actions.items():
            action.setChecked(other is tool)
