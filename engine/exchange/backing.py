"""Backing drawings from files: a page of a PDF, a PNG or JPEG, or pasted picture bytes.

What is embedded is a PNG or JPEG of at most `LONGEST` pixels on its long side, white
where the source is transparent. The file itself is not kept; its SHA-256 is.
"""

from __future__ import annotations

import base64
import hashlib
import io
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Literal

import numpy as np
from msgspec.structs import replace
from PIL import Image, ImageOps

from engine.calibration import is_calibrated, on_picture, place_of
from engine.edits import checked, unused_id
from engine.embedded_picture import (
    DAMAGE,
    MAX_PIXELS,
    TooManyPixels,
    decoded,
    picture_bytes,
    picture_size,
)
from engine.errors import Cancelled, Progress, UserError, stop_if
from engine.exchange.pdf_pages import PDF_LIBRARY
from engine.items import Point2
from engine.layout import Layout
from engine.motions import neat
from engine.places import BackingDrawing

__all__ = [
    "ReadPicture",
    "View",
    "backing_drawing",
    "page_count",
    "picture_bytes",
    "read_picture",
    "read_picture_bytes",
    "with_picture",
]

View = Literal["plan", "looking +x", "looking +y"]

#: Largest file that is read. [byte]
MAX_FILE = 100_000_000

#: Long side of an embedded picture. [px]
LONGEST = 4000

#: Finest raster of a PDF page; a small page is not blown up beyond it. [px/inch]
_FINEST = 300.0

#: A PNG beyond this is embedded as JPEG: photographs and scans, not line drawings.
_LARGEST_PNG = 6_000_000

#: Highest quality first; a lower one when the copy would be too large.
_QUALITIES = (88, 75, 60)
_LARGEST_COPY = 12_000_000

#: Sheets whose proportions differ by less are the same sheet in another resolution.
_SAME_SHEET = 0.01

#: How error codes of the PDF reader are told apart: a password is needed.
_PASSWORD = 4


@dataclass(frozen=True)
class ReadPicture:
    """A picture ready to be embedded.

    Attributes
    ----------
    data : bytes
        A PNG or JPEG file.
    width, height : int
        [px]
    file_name : str
        Of the source; empty for the clipboard.
    sha256 : str
        Of the source as it was read.
    page, n_pages : int
        Which page of how many; 1 of 1 for a picture.
    """

    data: bytes
    width: int
    height: int
    file_name: str
    sha256: str
    page: int
    n_pages: int


def read_picture(
    path: str | Path,
    page: int = 1,
    *,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> ReadPicture:
    """The picture in a PNG or JPEG file, or one page of a PDF.

    Parameters
    ----------
    path : str or Path
    page : int
        From 1.
    cancelled, progress
        Asked and told between reading the file, drawing it, and keeping its copy.

    Raises
    ------
    UserError
        When the file is missing, too large, damaged, encrypted or of another kind, or
        has no such page.
    """
    tell = _Steps(cancelled, progress)
    tell.step(0.0, f"Reading {Path(path).name}")
    opening, data = _file(Path(path))
    return _read(data, Path(path).name, opening, page, tell)


def page_count(path: str | Path) -> int:
    """How many pages a file has to choose from; 1 for a picture.

    Raises
    ------
    UserError
        As `read_picture`.
    """
    opening, data = _file(Path(path))
    if not _is_pdf(data):
        return 1
    with PDF_LIBRARY:
        document = _opened(data, opening)
        try:
            return len(document)
        finally:
            document.close()


def read_picture_bytes(data: bytes, page: int = 1) -> ReadPicture:
    """The picture in bytes that came without a file, as from the clipboard.

    Raises
    ------
    UserError
        As `read_picture`.
    """
    return _read(data, "", "The picture was not placed", page, _Steps(None, None))


def backing_drawing(
    layout: Layout,
    picture: ReadPicture,
    view: View = "plan",
    at: Point2 = (0.0, 0.0),
) -> BackingDrawing:
    """A new drawing that is not calibrated, its lower left corner at a place. [m]"""
    name = picture.file_name or "Pasted picture"
    if picture.n_pages > 1:
        name = f"{name}, page {picture.page}"
    made = BackingDrawing(
        id=unused_id(layout, Path(picture.file_name).stem or "picture"),
        name=name,
        file_name=picture.file_name,
        sha256=picture.sha256,
        view=view,
        page=picture.page,
        picture=base64.b64encode(picture.data).decode("ascii"),
    )
    corner = place_of(made, (0.0, float(picture.height)))
    origin = (neat(at[0] - corner[0]), neat(at[1] - corner[1]))
    return checked(replace(made, origin=origin))


def with_picture(drawing: BackingDrawing, picture: ReadPicture) -> BackingDrawing:
    """The drawing with another picture, such as a newer revision of the sheet.

    A sheet of the same proportions keeps its calibration, in another resolution too.
    Any other loses it: its two points are elsewhere.
    """
    new = replace(
        drawing,
        file_name=picture.file_name,
        sha256=picture.sha256,
        page=picture.page,
        picture=base64.b64encode(picture.data).decode("ascii"),
    )
    before = picture_size(drawing)
    if before is None or not is_calibrated(drawing):
        return checked(new)
    across, down = picture.width / before[0], picture.height / before[1]
    if abs(across / down - 1.0) <= _SAME_SHEET:
        factor = max(across, down)
        first, second = (
            on_picture((factor * x, factor * y))
            for x, y in (drawing.first, drawing.second)
        )
        return checked(replace(new, first=first, second=second))
    fresh = BackingDrawing(id="fresh")
    return checked(
        replace(new, first=fresh.first, second=fresh.second, distance=fresh.distance)
    )


@dataclass(frozen=True)
class _Steps:
    """Tells where the work is, and stops it between two steps."""

    cancelled: Cancelled | None
    progress: Progress | None

    def step(self, share: float, doing: str) -> None:
        stop_if(self.cancelled)
        if self.progress is not None:
            self.progress(share, doing)


def _file(path: Path) -> tuple[str, bytes]:
    """How sentences on a file begin, and its bytes."""
    opening = f"{path.name} was not placed"
    try:
        if not path.exists():
            raise UserError(f"{opening}: there is no such file.")
        if not path.is_file():
            raise UserError(f"{opening}: it is not a file.")
        with path.open("rb") as file:
            return opening, file.read(MAX_FILE + 1)
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) else str(error)
        raise UserError(f"{opening}: {reason or 'it cannot be read'}.") from error


def _is_pdf(data: bytes) -> bool:
    return b"%PDF-" in data[:1024]


def _read(data: bytes, name: str, opening: str, page: int, tell: _Steps) -> ReadPicture:
    if len(data) > MAX_FILE:
        limit = MAX_FILE // 1_000_000
        raise UserError(
            f"{opening}: it is larger than {limit} MB. Save the sheet you need as a "
            "file of its own."
        )
    if not data:
        raise UserError(f"{opening}: it is empty.")
    n_pages = 1
    tell.step(0.2, f"Drawing page {page}")
    if _is_pdf(data):
        with PDF_LIBRARY:
            image, n_pages = _page(data, opening, page)
        tell.step(0.7, "Keeping the copy")
        copy = _copy(image)
    else:
        if page != 1:
            raise UserError(f"{opening}: a picture has one page, and not {page}.")
        image, copy = _picture(data, opening)
    return ReadPicture(
        data=copy,
        width=image.width,
        height=image.height,
        file_name=name[-400:],
        sha256=hashlib.sha256(data).hexdigest(),
        page=page,
        n_pages=n_pages,
    )


def _picture(data: bytes, opening: str) -> tuple[Image.Image, bytes]:
    """The picture as it is embedded, and the bytes to embed."""
    try:
        found = decoded(data)
        image = _upright(found)
    except TooManyPixels as error:
        size = f"{error.width:,} × {error.height:,} pixels" if error.width else "it"
        limit = f"{MAX_PIXELS // 1_000_000} million pixels"
        raise UserError(
            f"{opening}: {size} is more than {limit}. Save it in a lower resolution."
        ) from error
    except DAMAGE as error:
        if _is_known(data):
            raise UserError(
                f"{opening}: the picture is damaged. Export or copy it again."
            ) from error
        raise UserError(
            f"{opening}: it is neither a PDF nor a PNG or JPEG picture. Save it as "
            "one of these."
        ) from error
    if image is found and len(data) <= _LARGEST_PNG:
        return image, data
    shown = _opaque(_fitted(image))
    return shown, _copy(shown)


def _is_known(data: bytes) -> bool:
    return data.startswith((b"\x89PNG\r\n\x1a\n", b"\xff\xd8\xff"))


def _upright(found: Image.Image) -> Image.Image:
    """The picture as a viewer shows it; itself when its bytes can be embedded."""
    orientation = found.getexif().get(0x0112, 1)
    plain = found.mode in ("1", "L", "RGB", "P") and "transparency" not in found.info
    if orientation in (0, 1) and plain and max(found.size) <= LONGEST:
        return found
    return ImageOps.exif_transpose(found).copy()


def _fitted(image: Image.Image) -> Image.Image:
    """The picture with at most `LONGEST` pixels on its long side."""
    longest = max(image.size)
    if longest <= LONGEST:
        return image
    width, height = (max(1, round(side * LONGEST / longest)) for side in image.size)
    smooth = image if image.mode in ("L", "RGB", "RGBA") else _opaque(image)
    return smooth.resize((width, height), Image.Resampling.LANCZOS)


def _opaque(image: Image.Image) -> Image.Image:
    """The picture on white, in grey or in colour."""
    if image.mode.startswith("I"):
        # Sixteen bits of grey: the upper eight are seen.
        grey = np.clip(np.asarray(image, dtype=np.int64) >> 8, 0, 255)
        return Image.fromarray(grey.astype(np.uint8))
    if "transparency" not in image.info:
        if image.mode in ("1", "L"):
            return image.convert("L")
        if image.mode in ("RGB", "CMYK", "YCbCr"):
            return image.convert("RGB")
    clear = image.convert("RGBA")
    paper = Image.new("RGBA", clear.size, "white")
    return Image.alpha_composite(paper, clear).convert("RGB")


def _copy(image: Image.Image) -> bytes:
    """The bytes to embed: PNG for drawings, JPEG where that would be large."""
    # Colour profiles and notes of the source do not fit the copy any more.
    image.info = {}
    kept = io.BytesIO()
    image.save(kept, "PNG", compress_level=6)
    if kept.tell() <= _LARGEST_PNG:
        return kept.getvalue()
    for quality in _QUALITIES:
        kept = io.BytesIO()
        image.save(kept, "JPEG", quality=quality, optimize=True)
        if kept.tell() <= _LARGEST_COPY:
            break
    return kept.getvalue()


def _opened(data: bytes, opening: str) -> Any:
    """A PDF for reading."""
    # Loaded here: its library takes longer to load than the rest of the engine.
    import pypdfium2

    try:
        return pypdfium2.PdfDocument(data)
    except pypdfium2.PdfiumError as error:
        if error.err_code == _PASSWORD:
            raise UserError(
                f"{opening}: the PDF is encrypted. Save a copy without a password."
            ) from error
        raise UserError(f"{opening}: the PDF is damaged. Export it again.") from error


def _page(data: bytes, opening: str, page: int) -> tuple[Image.Image, int]:
    """A page of a PDF as a picture, and the number of pages."""
    document = _opened(data, opening)
    try:
        n_pages = len(document)
        if not 1 <= page <= n_pages:
            has = "1 page" if n_pages == 1 else f"{n_pages} pages"
            raise UserError(f"{opening}: the PDF has {has}, and not a page {page}.")
        return _rendered(document[page - 1]), n_pages
    except (RuntimeError, *DAMAGE) as error:
        raise UserError(
            f"{opening}: page {page} of the PDF is damaged. Export it again."
        ) from error
    finally:
        document.close()


def _rendered(page: Any) -> Image.Image:
    """A PDF page on white."""
    longest = max(page.get_size())
    if not longest > 0:
        raise ValueError("the page has no size")
    scale = min(_FINEST / 72.0, LONGEST / longest)
    raster = page.render(scale=scale, fill_color=(255, 255, 255, 255))
    return _fitted(_opaque(raster.to_pil()))
