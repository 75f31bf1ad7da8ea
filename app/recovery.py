"""Unsaved work that survives a crash: a copy every minute, offered at the next start.

A copy belongs to one running program by its process number. It is removed when the
work is saved or given up; what is found later belongs to a program that crashed.
"""

from __future__ import annotations

import contextlib
import ctypes
import os
import sys
from dataclasses import dataclass
from pathlib import Path

import msgspec
import platformdirs
from PySide6.QtCore import QObject, QTimer

from app.document import Document
from engine import layout_file
from engine.errors import UserError

#: Between two copies of changed work. [ms]
INTERVAL = 60_000

#: PROCESS_QUERY_LIMITED_INFORMATION of the Windows API.
_QUERY = 0x1000


class _Note(msgspec.Struct, frozen=True):
    """What is kept beside a copy."""

    path: str
    process: int


@dataclass(frozen=True)
class Rescue:
    """A copy of unsaved work found at the start.

    Attributes
    ----------
    copy : Path
        The layout file with the work.
    path : Path or None
        Where the work had last been saved; None when never.
    saved_at : float
        When the copy was written. [s since 1970]
    """

    copy: Path
    path: Path | None
    saved_at: float


def folder() -> Path:
    """The user's data folder for copies of unsaved work."""
    return Path(platformdirs.user_data_dir("lodestead", appauthor=False)) / "unsaved"


def rescues(where: Path | None = None) -> tuple[Rescue, ...]:
    """Copies left by programs that no longer run, newest first."""
    found = []
    for note_path in (where or folder()).glob("*.note"):
        copy = note_path.with_suffix(".json")
        try:
            note = msgspec.json.decode(note_path.read_bytes(), type=_Note)
            saved_at = copy.stat().st_mtime
        except (OSError, msgspec.MsgspecError):
            continue
        if not _is_running(note.process):
            found.append(Rescue(copy, Path(note.path) if note.path else None, saved_at))
    return tuple(sorted(found, key=lambda rescue: -rescue.saved_at))


def give_up(rescue: Rescue) -> None:
    """Remove a copy that is not wanted any more."""
    for path in (rescue.copy, rescue.copy.with_suffix(".note")):
        with contextlib.suppress(OSError):
            path.unlink()


def _is_running(process: int) -> bool:
    if process == os.getpid():
        return True
    if sys.platform == "win32":
        # os.kill would end the process there instead of asking.
        kernel = ctypes.windll.kernel32
        handle = kernel.OpenProcess(_QUERY, False, process)
        if handle:
            kernel.CloseHandle(handle)
        return bool(handle)
    try:
        os.kill(process, 0)
    except ProcessLookupError:
        return False
    except OSError:
        return True
    return True


class Autosave(QObject):
    """Keeps a copy of a document's unsaved work."""

    def __init__(
        self, document: Document, where: Path | None = None, interval: int = INTERVAL
    ) -> None:
        super().__init__(document)
        self._document = document
        self._folder = where or folder()
        self._stem = f"work-{os.getpid()}-{id(document):x}"
        self._kept: object = None
        self._timer = QTimer(self)
        self._timer.setInterval(interval)
        self._timer.timeout.connect(self.keep)
        self._timer.start()

    @property
    def copy(self) -> Path:
        return self._folder / f"{self._stem}.json"

    def keep(self) -> None:
        """Write the copy now, if there is unsaved work that it does not hold yet."""
        layout = self._document.whole
        if not self._document.is_modified:
            self.forget()
            return
        if layout is self._kept:
            return
        note = _Note(str(self._document.path or ""), os.getpid())
        # A full disk must not stop the work that it is there to keep.
        with contextlib.suppress(OSError, UserError):
            self._folder.mkdir(parents=True, exist_ok=True)
            layout_file.write(self.copy, layout)
            self.copy.with_suffix(".note").write_bytes(msgspec.json.encode(note))
            self._kept = layout

    def forget(self) -> None:
        """Remove the copy: the work is saved, or was given up."""
        if self._kept is None:
            return
        self._kept = None
        for path in (self.copy, self.copy.with_suffix(".note")):
            with contextlib.suppress(OSError):
                path.unlink()
