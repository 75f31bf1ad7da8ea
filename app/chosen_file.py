"""Asking for the file to write: its ending is always one that opens again."""

from __future__ import annotations

import re
from pathlib import Path

from PySide6.QtWidgets import QFileDialog, QMessageBox, QWidget


def ask_where_to_write(
    parent: QWidget, title: str, start: str, kinds: str
) -> Path | None:
    """Ask for a file; None when the user goes back.

    A name without one of the endings gets that of the kind chosen: what follows a dot
    in "Board 2.1" is no ending. So does the proposed name, kept under another kind.
    The dialog has asked about the name as typed only, hence the question here.

    Parameters
    ----------
    start : str
        The name proposed.
    kinds : str
        As file dialogs take them, "Vectors (*.svg);;Numbers (*.csv)".
    """
    name, kind = QFileDialog.getSaveFileName(parent, title, start, kinds)
    if not name:
        return None
    path = with_ending(Path(name), Path(start), kind, kinds)
    if path != Path(name) and path.exists() and not _may_replace(parent, path):
        return None
    return path


def with_ending(path: Path, proposed: Path, kind: str, kinds: str) -> Path:
    """The path with an ending of `kinds`, by preference one of the kind chosen."""
    known = _endings(kinds)
    wanted = _endings(kind) or known
    ending = path.suffix.lower()
    if ending not in known:
        return path.with_name(path.name + wanted[0])
    if path.name == proposed.name and ending not in wanted:
        return path.with_suffix(wanted[0])
    return path


def _endings(kinds: str) -> list[str]:
    return [f".{ending.lower()}" for ending in re.findall(r"\*\.(\w+)", kinds)]


def _may_replace(parent: QWidget, path: Path) -> bool:
    box = QMessageBox(parent)
    box.setWindowTitle("The file is there already")
    box.setText(f"{path.name} is there already, in {path.parent}.")
    box.setInformativeText("Should it be written over?")
    over = box.addButton("Write over it", QMessageBox.ButtonRole.DestructiveRole)
    back = box.addButton("Go back", QMessageBox.ButtonRole.RejectRole)
    box.setDefaultButton(back)
    box.setEscapeButton(back)
    box.exec()
    return box.clickedButton() is over
