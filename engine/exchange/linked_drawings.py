"""Backing drawings that are linked: where their files are, and whether they still hold.

A link is relative to the folder of the layout's file where it can be; of a layout that
has no file yet it is absolute. What was read of a file is kept by its SHA-256, so that
a file that has changed never shows in the place of the one that was calibrated.
"""

from __future__ import annotations

import base64
import hashlib
import os
from collections.abc import Iterator
from pathlib import Path

from msgspec.structs import replace

from engine.edits import checked
from engine.embedded_picture import keep_linked, shown_picture
from engine.errors import Cancelled, Progress, UserError
from engine.exchange.backing import ReadPicture, read_picture
from engine.faults import Remark
from engine.layout import Layout
from engine.places import BackingDrawing
from engine.remarks import confirmation

#: A relative link goes up no more than so many folders, and not to the root: beyond,
#: it means nothing elsewhere.
_MOST_UP = 3

_BLOCK = 1 << 20


def linked_path(drawing: BackingDrawing, folder: Path | None) -> Path:
    """Where the linked file is.

    Parameters
    ----------
    folder : Path or None
        Of the layout's file; None: it has none yet.
    """
    path = Path(drawing.linked_file)
    if folder is not None and not path.is_absolute():
        path = Path(os.path.normpath(folder / path))
    return path


def link_text(path: Path, folder: Path | None) -> str:
    """How a layout in a folder holds the path of a file."""
    whole = Path(os.path.abspath(path))
    if folder is None:
        return str(whole)
    start = os.path.abspath(folder)
    try:
        shared = Path(os.path.commonpath((whole, start)))
    except ValueError:
        # On another drive.
        return str(whole)
    relative = Path(os.path.relpath(whole, start))
    is_far = relative.parts.count("..") > _MOST_UP
    if is_far or shared == Path(shared.anchor):
        return str(whole)
    return relative.as_posix()


def linked(
    drawing: BackingDrawing, picture: ReadPicture, path: Path, folder: Path | None
) -> BackingDrawing:
    """The drawing with a link instead of its copy; the copy is at hand."""
    copy = base64.b64encode(picture.data).decode("ascii")
    keep_linked(picture.sha256, picture.page, copy)
    return checked(
        replace(
            drawing,
            picture="",
            linked_file=link_text(path, folder),
            sha256=picture.sha256,
            page=picture.page,
            file_name=picture.file_name,
        )
    )


def embedded(drawing: BackingDrawing) -> BackingDrawing:
    """The drawing with the copy that shows, and without its link.

    Raises
    ------
    UserError
        When the linked file has not been read.
    """
    copy = shown_picture(drawing)
    if not copy:
        raise UserError(
            f"The linked file of “{drawing.title}” cannot be embedded: it is not at "
            "hand. Put it back, or choose its file again."
        )
    return checked(replace(drawing, picture=copy, linked_file=""))


def with_links_moved(layout: Layout, old: Path | None, new: Path | None) -> Layout:
    """The layout as it is held in another folder; itself when no link differs."""
    drawings = tuple(
        replace(d, linked_file=link_text(linked_path(d, old), new))
        if d.linked_file and linked_path(d, old).is_absolute()
        else d
        for d in layout.backing_drawings
    )
    if drawings == layout.backing_drawings:
        return layout
    return replace(layout, backing_drawings=drawings)


def read_linked(
    drawing: BackingDrawing,
    folder: Path | None,
    *,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> None:
    """Have the copy of a linked file at hand, so that it shows.

    Raises
    ------
    UserError
        When the file is not there, has changed, or cannot be read.
    """
    fault = link_fault(drawing, folder)
    if fault:
        raise UserError(fault)
    found = read_picture(
        linked_path(drawing, folder), drawing.page, cancelled=cancelled,
        progress=progress,
    )  # fmt: skip
    keep_linked(found.sha256, found.page, base64.b64encode(found.data).decode("ascii"))


def link_fault(drawing: BackingDrawing, folder: Path | None) -> str:
    """Why a linked file does not show as it was placed; empty when it does."""
    path = linked_path(drawing, folder)
    opening = f"Backing drawing “{drawing.title}” is linked to “{drawing.linked_file}”"
    if drawing.linked_file.startswith(("\\\\", "//")):
        return (
            f"{opening}, on another computer: it is not opened from there by itself. "
            "Choose its file again."
        )
    try:
        if not path.is_file():
            return (
                f"{opening}, and there is no such file: put it back, or choose its "
                "file again."
            )
        found = _sha256(path)
    except OSError as error:
        reason = error.strerror or "it cannot be read"
        return f"{opening}, which cannot be read ({reason}): choose its file again."
    if found != drawing.sha256:
        return (
            f"{opening}, and that file has changed since it was placed: choose it "
            "again to see it as it is now, and check its calibration."
        )
    return ""


def link_remarks(layout: Layout, folder: Path | None) -> Iterator[Remark]:
    """W24: linked drawings whose file is missing or has changed."""
    for drawing in layout.backing_drawings:
        if drawing.linked_file:
            fault = link_fault(drawing, folder)
            if fault:
                yield Remark("W24", "warning", fault, (drawing.id,))


def open_link_remarks(layout: Layout, folder: Path | None) -> tuple[Remark, ...]:
    """Those of `link_remarks` that nobody has confirmed."""
    found = link_remarks(layout, folder)
    return tuple(r for r in found if confirmation(layout, r) is None)


#: SHA-256 of files by path, time and size: a file is read again only when it differs.
_digests: dict[tuple[str, int, int], str] = {}


def _sha256(path: Path) -> str:
    state = path.stat()
    key = (str(path), state.st_mtime_ns, state.st_size)
    if key not in _digests:
        found = hashlib.sha256()
        with path.open("rb") as file:
            while block := file.read(_BLOCK):
                found.update(block)
        _digests[key] = found.hexdigest()
    return _digests[key]
