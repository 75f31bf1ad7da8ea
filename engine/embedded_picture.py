"""The copy of a backing drawing that shows: its bytes, its size, whether it is whole.

It is embedded, or was read of the linked file: such copies are kept here, by the
SHA-256 of the file and its page, as long as the program runs.

Import place: after `places`.
"""

from __future__ import annotations

import base64
import binascii
import io
import struct
import warnings
import zlib

from PIL import Image

from engine.errors import UserError
from engine.places import BackingDrawing

FORMATS = ("PNG", "JPEG")

#: Most pixels of a picture that is decoded. [px]
MAX_PIXELS = 60_000_000

#: What the decoders raise on bytes that are no whole picture.
DAMAGE = (
    OSError,
    ValueError,
    SyntaxError,
    EOFError,
    IndexError,
    KeyError,
    TypeError,
    OverflowError,
    struct.error,
    zlib.error,
)


class TooManyPixels(Exception):
    """A picture larger than is decoded: `width` and `height` in pixels."""

    def __init__(self, width: int, height: int) -> None:
        super().__init__(width, height)
        self.width, self.height = width, height


def decoded(data: bytes) -> Image.Image:
    """The picture in the bytes of a PNG or JPEG file, every pixel read.

    Raises
    ------
    TooManyPixels
        Before any pixel is read.
    one of DAMAGE
        When it is not a whole picture.
    """
    with warnings.catch_warnings():
        # The number of pixels is checked here, and by a limit of our own.
        warnings.simplefilter("ignore", Image.DecompressionBombWarning)
        try:
            with Image.open(io.BytesIO(data), formats=FORMATS) as opened:
                if opened.width * opened.height > MAX_PIXELS:
                    raise TooManyPixels(opened.width, opened.height)
                # Finds wrong checksums, which reading the pixels does not.
                opened.verify()
        except Image.DecompressionBombError as error:
            raise TooManyPixels(0, 0) from error
        picture = Image.open(io.BytesIO(data), formats=FORMATS)
        picture.load()
    return picture


#: Copies of linked files, base64, by SHA-256 of the file and page.
_linked: dict[tuple[str, int], str] = {}


def keep_linked(sha256: str, page: int, copy: str) -> None:
    """Have the copy (base64) of a page of a linked file at hand."""
    _linked[sha256, page] = copy


def shown_picture(drawing: BackingDrawing) -> str:
    """What shows, base64: the embedded copy, or that of the linked file; or empty."""
    if drawing.picture or not drawing.linked_file:
        return drawing.picture
    return _linked.get((drawing.sha256, drawing.page), "")


def picture_bytes(drawing: BackingDrawing) -> bytes:
    """The copy that shows as the bytes of a PNG or JPEG file.

    Raises
    ------
    UserError
        When there is none, or it is damaged.
    """
    picture = shown_picture(drawing)
    if not picture:
        raise UserError(
            f"Backing drawing “{drawing.title}” has no picture in this layout: "
            "choose its file again."
        )
    if picture_size(drawing) is None:
        raise UserError(
            f"The picture of backing drawing “{drawing.title}” is damaged: choose "
            "its file again."
        )
    return base64.b64decode(picture, validate=True)


def picture_size(drawing: BackingDrawing) -> tuple[int, int] | None:
    """Width and height of a whole copy that shows; None without one. [px]"""
    picture = shown_picture(drawing)
    # The hash of a text is kept with it, so that asking again costs nothing, and no
    # large text is held for it.
    key = (hash(picture), len(picture))
    if key not in _sizes:
        if len(_sizes) >= _MOST_KEPT:
            _sizes.clear()
        _sizes[key] = _size(picture)
    return _sizes[key]


_MOST_KEPT = 1000
_sizes: dict[tuple[int, int], tuple[int, int] | None] = {}


def _size(picture: str) -> tuple[int, int] | None:
    try:
        return decoded(base64.b64decode(picture, validate=True)).size
    except (binascii.Error, TooManyPixels, *DAMAGE):
        return None
