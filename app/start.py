"""What the window shows first: rescued work, the named file, or a sample."""

from __future__ import annotations

from importlib import import_module
from pathlib import Path
from threading import Thread

import msgspec

from app import preferences, recovery, window_geometry
from app.document import Document
from app.files import SAMPLES, empty_layout
from app.first_strip import FirstStrip
from app.main_window import MainWindow
from app.messages import Messages

FIRST_SAMPLE = SAMPLES / "office-over-switch-room.json"


def started(path: Path | None) -> MainWindow:
    """The window, not yet shown."""
    choices = preferences.load()
    messages = Messages()
    messages.catch_unexpected()
    document = Document(empty_layout(choices))
    window = MainWindow(document, messages)
    window.follow_preferences()
    window_geometry.restore(window)
    left = recovery.rescues()
    if left:
        rescue = left[0]
        if window.files.open_rescued(rescue.copy, rescue.path):
            # Its own copy first: the next crash may come within the minute.
            window.autosave.keep()
            recovery.give_up(rescue)
            messages.warn(
                "Unsaved work of a program that ended unexpectedly is open again: save "
                "it, or undo to see the file as it was saved."
            )
    elif path is not None:
        window.files.open(path)
    elif not choices.chosen and FIRST_SAMPLE.exists():
        window.files.open_sample(FIRST_SAMPLE)
    if not choices.chosen:
        _ask_first(window)
    return window


def load_ahead(window: MainWindow) -> None:
    """Load plots once the first margins are there, for whoever opens some next."""

    def load(_margins: object) -> None:
        window.recompute.margins_ready.disconnect(load)
        # Aside: the window stays quick meanwhile.
        Thread(target=import_module, args=("pyqtgraph",), daemon=True).start()

    window.recompute.margins_ready.connect(load)


def _ask_first(window: MainWindow) -> None:
    """Units and paper, in one strip above everything."""
    strip = FirstStrip(preferences.load())

    def chosen(choices: preferences.Preferences) -> None:
        recent = preferences.load().recent
        preferences.save(msgspec.structs.replace(choices, chosen=True, recent=recent))
        strip.hide()
        window.drawings.take_keyboard()

    strip.chosen.connect(chosen)
    window.show_first_strip(strip)
