"""Backing drawings placed, replaced and turned over: each one step of the history."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QBuffer, QByteArray, QIODevice
from PySide6.QtGui import QImage
from PySide6.QtWidgets import QFileDialog, QWidget

from app.document import Document
from engine.calibration import is_calibrated
from engine.edits import added, replaced
from engine.errors import UserError
from engine.exchange.backing import (
    ReadPicture,
    View,
    backing_drawing,
    page_count,
    read_picture,
    read_picture_bytes,
    with_picture,
)
from engine.exchange.linked_drawings import embedded, linked, linked_path
from engine.layout import Layout
from engine.places import BackingDrawing

KINDS = (
    "Drawings (*.pdf *.png *.jpg *.jpeg);;PDF (*.pdf);;Pictures (*.png *.jpg *.jpeg)"
)

#: Where the files of placed drawings were, by their SHA-256, while the program runs.
_known: dict[str, Path] = {}


def chosen_file(parent: QWidget | None, title: str = "Place backing drawing") -> str:
    """The file that the user chooses; empty when none."""
    name, _ = QFileDialog.getOpenFileName(parent, title, "", KINDS)
    return name


def place_backing_file(
    document: Document, path: str | Path, page: int = 1, view: View = "plan"
) -> str:
    """Put a page of a PDF, a PNG or a JPEG under a view, select it; its id.

    Raises
    ------
    UserError
        When the file cannot be placed.
    """
    return place_read_picture(document, read_picture(path, page), Path(path), view)


def place_read_picture(
    document: Document, picture: ReadPicture, path: Path, view: View = "plan"
) -> str:
    """Put what was read of a file under a view, select it; its id."""
    _known[picture.sha256] = path
    return _place(document, picture, view)


def place_backing_picture(
    document: Document, image: QImage, view: View = "plan"
) -> str:
    """Put a picture, as from the clipboard, under a view, select it; its id.

    Raises
    ------
    UserError
        When there is no picture.
    """
    if image.isNull():
        raise UserError("The clipboard holds no picture: copy one first.")
    kept = QByteArray()
    buffer = QBuffer(kept)
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    # Bytes, which the types ask for, are refused.
    image.save(buffer, "PNG")  # type: ignore[call-overload]
    return _place(document, read_picture_bytes(bytes(kept.data())), view)


def replace_backing_file(
    document: Document, item_id: str, path: str | Path, page: int = 1
) -> None:
    """Give a drawing the picture of another file or page.

    Raises
    ------
    UserError
        When the file cannot be placed.
    """
    take_read_picture(document, item_id, read_picture(path, page), Path(path))


def take_read_picture(
    document: Document, item_id: str, picture: ReadPicture, path: Path
) -> None:
    """Give a drawing what was read of another file or page, unless it is gone."""
    drawing = drawing_of(document.committed, item_id)
    if drawing is None:
        return
    _known[picture.sha256] = path
    after = with_picture(drawing, picture)
    if drawing.linked_file:
        after = linked(after, picture, path, folder_of(document))
    same_file = picture.sha256 == drawing.sha256
    what = f"page {picture.page}" if same_file else picture.file_name
    text = f"Show {what} in {drawing.title}"
    if is_calibrated(drawing) and not is_calibrated(after):
        text += ", no longer calibrated"
    document.edit(text, replaced(document.committed, after))


def known_file(document: Document, drawing: BackingDrawing) -> Path | None:
    """The file that a drawing came from, where it is still to be found.

    It is looked for where it is linked to, where it was placed from, then beside the
    layout's file.
    """
    places = [_known.get(drawing.sha256)]
    if drawing.linked_file:
        places.insert(0, linked_path(drawing, folder_of(document)))
    if document.path is not None and drawing.file_name:
        places.append(document.path.parent / Path(drawing.file_name).name)
    return next((path for path in places if path is not None and path.is_file()), None)


def folder_of(document: Document) -> Path | None:
    """Where links count from: the folder of the layout's file; None without one."""
    return None if document.path is None else document.path.parent


def embed(document: Document, item_id: str) -> None:
    """Keep a copy of a linked drawing in the layout.

    Raises
    ------
    UserError
        When its file has not been read.
    """
    drawing = drawing_of(document.committed, item_id)
    if drawing is not None and drawing.linked_file:
        after = replaced(document.committed, embedded(drawing))
        document.edit(f"Embed {drawing.title}", after)


def link(document: Document, item_id: str, picture: ReadPicture, path: Path) -> None:
    """Keep the path of a drawing's file in the layout instead of a copy.

    Raises
    ------
    UserError
        When the file is not the one that was placed.
    """
    drawing = drawing_of(document.committed, item_id)
    if drawing is None:
        return
    if picture.sha256 != drawing.sha256:
        raise UserError(
            f"“{drawing.title}” was not linked: {path.name} has changed since it was "
            "placed. Choose the file again first, and check the calibration."
        )
    after = linked(drawing, picture, path, folder_of(document))
    document.edit(f"Link {drawing.title}", replaced(document.committed, after))


def pages_of(document: Document, drawing: BackingDrawing) -> int | None:
    """How many pages a drawing's file has; None when it is not to be found."""
    path = known_file(document, drawing)
    if path is None:
        return None
    try:
        return page_count(path)
    except UserError:
        return None


def _place(document: Document, picture: ReadPicture, view: View) -> str:
    made = backing_drawing(document.committed, picture, view)
    document.edit(f"Place {made.title}", added(document.committed, made))
    document.select([made.id])
    return made.id


def drawing_of(layout: Layout, item_id: str) -> BackingDrawing | None:
    """The backing drawing with that id."""
    for drawing in layout.backing_drawings:
        if drawing.id == item_id:
            return drawing
    return None
