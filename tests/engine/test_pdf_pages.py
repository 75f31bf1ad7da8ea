"""Pages of a PDF as pictures, and the sections of its outline."""

from __future__ import annotations

import io

import numpy as np
import pytest
from reportlab.pdfgen.canvas import Canvas

from engine.errors import UserError
from engine.exchange.pdf_pages import Section, page_picture, pdf_pages


@pytest.fixture(scope="module")
def content():
    """Pages of 200 × 400 and 400 × 200 points; half of the second is black."""
    file = io.BytesIO()
    canvas = Canvas(file, pagesize=(200, 400))
    canvas.bookmarkPage("front")
    canvas.addOutlineEntry("Überblick <b>µT</b>", "front", 0)
    canvas.showPage()
    canvas.setPageSize((400, 200))
    canvas.rect(0, 0, 400, 100, stroke=0, fill=1)
    canvas.bookmarkHorizontal("part", 0, 150)
    canvas.addOutlineEntry("Part", "part", 1)
    canvas.showPage()
    canvas.save()
    return file.getvalue()


def test_pages_and_outline_are_told_as_they_are(content):
    found = pdf_pages(content)
    assert found.sizes == ((200, 400), (400, 200))
    first, second = found.sections
    assert first == Section("Überblick <b>µT</b>", 0, 0, 0.0)
    assert (second.title, second.depth, second.page) == ("Part", 1, 1)
    assert second.down == pytest.approx(0.25, abs=0.01)


def test_a_picture_is_as_wide_as_asked_and_upright(content):
    picture = page_picture(content, 1, 100)
    assert (picture.width, picture.height) == (100, 50)
    rows = np.frombuffer(picture.pixels, np.uint8).reshape(50, picture.stride)
    assert np.all(rows[:24, 0:3] == 255)
    assert np.all(rows[26:, 0:3] == 0)


def test_what_is_no_pdf_is_refused_in_a_sentence():
    with pytest.raises(UserError, match="damaged"):
        pdf_pages(b"%PDF-1.4 nothing else")
    with pytest.raises(UserError, match="damaged"):
        page_picture(b"", 0, 100)
