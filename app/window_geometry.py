"""Where the windows stood and how the width was shared: kept for the next time."""

from __future__ import annotations

from typing import TYPE_CHECKING

from msgspec.structs import replace
from PySide6.QtCore import QByteArray

from app import preferences

if TYPE_CHECKING:
    from app.main_window import MainWindow


def restore(window: MainWindow) -> None:
    """Bring back size, place and sharing of the last time, and panels that left."""
    choices = preferences.load()
    if choices.geometry:
        window.restoreGeometry(_bytes(choices.geometry))
    if choices.sharing:
        window.splitter.restoreState(_bytes(choices.sharing))
    window.panels.send_away(choices.away)


def remember(window: MainWindow) -> None:
    """Keep size, place and sharing for the next time, and panels that left."""
    geometry = _text(window.saveGeometry())
    sharing = _text(window.splitter.saveState())
    away = window.panels.away()
    preferences.save(
        replace(preferences.load(), geometry=geometry, sharing=sharing, away=away)
    )


def _bytes(text: str) -> QByteArray:
    return QByteArray.fromBase64(text.encode("ascii"))


def _text(state: QByteArray) -> str:
    return bytes(state.toBase64().data()).decode("ascii")
