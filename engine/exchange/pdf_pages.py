"""Pages of a PDF as pictures, and the sections that its outline names.

The library that reads PDFs serves one thread at a time: `PDF_LIBRARY` is held while
it is at work, here and wherever else it is used.
"""

from __future__ import annotations

import ctypes
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from threading import RLock
from typing import Any

from engine.errors import UserError

#: Held while the library that reads PDFs is at work.
PDF_LIBRARY = RLock()

#: Sections within sections that are looked for; an outline that goes in a circle ends.
_DEEPEST = 6
_MOST_SECTIONS = 5000

#: Most pixels of a page's picture. [px]
_MOST_PIXELS = 60_000_000


@dataclass(frozen=True)
class Section:
    """An entry of the outline.

    Attributes
    ----------
    depth : int
        0 for the outermost.
    page : int
        From 0.
    down : float
        How far down the page it begins, as a share of the page's height.
    """

    title: str
    depth: int
    page: int
    down: float


@dataclass(frozen=True, eq=False)
class PagePicture:
    """A page's picture: rows from above, four bytes a pixel, blue, green, red, unused.

    `stride` is the number of bytes from row to row.
    """

    width: int
    height: int
    stride: int
    pixels: bytes


@dataclass(frozen=True)
class PdfPages:
    """What is known of the pages of a PDF.

    Attributes
    ----------
    sizes : tuple of (width, height)
        As they are shown, in points of 1/72 inch.
    sections : tuple of Section
        In the order of the outline.
    """

    sizes: tuple[tuple[float, float], ...]
    sections: tuple[Section, ...]


def pdf_pages(content: bytes) -> PdfPages:
    """The pages of a PDF, from its bytes.

    Raises
    ------
    UserError
        When the bytes are no PDF.
    """
    with _opened(content) as document:
        sizes = tuple(document.get_page_size(k) for k in range(len(document)))
        return PdfPages(sizes, tuple(_sections(document, sizes)))


def page_picture(content: bytes, page: int, width: int) -> PagePicture:
    """The picture of a page, from 0, `width` pixels wide.

    Raises
    ------
    UserError
        When the bytes are no PDF, or the page is damaged.
    """
    with _opened(content) as document:
        wide, high = document.get_page_size(page)
        width = max(1, min(width, int((_MOST_PIXELS * wide / high) ** 0.5)))
        opened = document[page]
        made = opened.render(
            scale=width / wide, fill_color=(255,) * 4, force_bitmap_format=_BGRX
        )
        picture = PagePicture(made.width, made.height, made.stride, bytes(made.buffer))
        # Not left to the collector, which may run in another thread.
        made.close()
        opened.close()
        return picture


@contextmanager
def _opened(content: bytes) -> Iterator[Any]:
    """The PDF, open while nobody else uses the library."""
    # Loaded here: it takes longer to load than the rest of the engine.
    import pypdfium2

    with PDF_LIBRARY:
        try:
            document = pypdfium2.PdfDocument(content)
            try:
                yield document
            finally:
                document.close()
        except pypdfium2.PdfiumError as error:
            raise UserError(
                "The pages were not shown: the PDF is damaged. Make it again."
            ) from error


#: Four bytes a pixel, whatever the page holds: `FPDFBitmap_BGRx`.
_BGRX = 3


def _sections(
    document: Any, sizes: tuple[tuple[float, float], ...]
) -> Iterator[Section]:
    """The outline, read with the library's own calls: its wrapper has changed them."""
    import pypdfium2.raw as library

    def title_of(entry: Any) -> str:
        size = library.FPDFBookmark_GetTitle(entry, None, 0)
        text = ctypes.create_string_buffer(size)
        library.FPDFBookmark_GetTitle(entry, text, size)
        return text.raw[: max(0, size - 2)].decode("utf-16-le", "replace")

    def below(parent: Any, depth: int) -> Iterator[Section]:
        entry = library.FPDFBookmark_GetFirstChild(document, parent)
        for _ in range(_MOST_SECTIONS):
            if not entry:
                return
            place = library.FPDFBookmark_GetDest(document, entry)
            page = library.FPDFDest_GetDestPageIndex(document, place) if place else -1
            if 0 <= page < len(sizes):
                down = _down(library, place, sizes[page][1])
                yield Section(title_of(entry), depth, page, down)
            if depth < _DEEPEST:
                yield from below(entry, depth + 1)
            entry = library.FPDFBookmark_GetNextSibling(document, entry)

    yield from below(None, 0)


def _down(library: Any, place: Any, high: float) -> float:
    has_x, has_y, has_zoom = (ctypes.c_int() for _ in range(3))
    x, y, zoom = (ctypes.c_float() for _ in range(3))
    told = library.FPDFDest_GetLocationInPage(place, has_x, has_y, has_zoom, x, y, zoom)
    if not told or not has_y.value:
        return 0.0
    return min(max(1.0 - y.value / high, 0.0), 1.0)
