"""The logo of the house: read from a file, checked, and taken into the title block."""

from __future__ import annotations

import base64
import binascii
from pathlib import Path

from msgspec.structs import replace

from app.document import Document
from engine.edits import checked, replaced
from engine.embedded_picture import DAMAGE, MAX_PIXELS, TooManyPixels, decoded
from engine.errors import UserError

KINDS = "Pictures (*.png *.jpg *.jpeg)"

#: Largest file: as text it is a third longer, and the layout holds 4 million signs.
LARGEST = 2_900_000


def choose_logo(document: Document, path: Path) -> None:
    """Print the picture in this file at the head of the first page; one undo step.

    Raises
    ------
    UserError
        When it cannot be read, is too large, damaged, or no PNG or JPEG.
    """
    logo = base64.b64encode(_read(path)).decode("ascii")
    _edit(document, "Set the logo", logo)


def remove_logo(document: Document) -> None:
    """Print none; one undo step."""
    _edit(document, "Remove the logo", "")


def logo_bytes(logo: str) -> bytes | None:
    """The picture of a title block as the bytes of its file; None: it is damaged.

    Examples
    --------
    >>> logo_bytes("nothing") is None
    True
    """
    try:
        data = base64.b64decode(logo, validate=True)
        decoded(data)
    except (binascii.Error, TooManyPixels, *DAMAGE):
        return None
    return data


def _edit(document: Document, text: str, logo: str) -> None:
    layout = document.committed
    title = checked(replace(layout.title, logo=logo))
    document.edit(text, replaced(layout, title))


def _read(path: Path) -> bytes:
    opening = f"The logo was not taken from {path.name}"
    try:
        size = path.stat().st_size
        if size > LARGEST:
            raise UserError(
                f"{opening}: it is larger than {LARGEST / 1e6:.1f} MB. Save it "
                "smaller; it is printed 60 × 18 mm at most."
            )
        data = path.read_bytes()
    except OSError as error:
        raise UserError(
            f"{opening}: {error.strerror or error}. Check that it is there and that "
            "you may read it."
        ) from error
    try:
        decoded(data)
    except TooManyPixels as error:
        raise UserError(
            f"{opening}: it has more than {MAX_PIXELS // 1_000_000} million pixels. "
            "Save it smaller."
        ) from error
    except DAMAGE as error:
        raise UserError(
            f"{opening}: it is no PNG or JPEG, or it is damaged. Export it again."
        ) from error
    return data
