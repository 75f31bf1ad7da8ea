"""Backing drawings from files: what is embedded, and what a bad file is told."""

from __future__ import annotations

import base64
import hashlib
import io
from pathlib import Path

import pytest
from msgspec.structs import replace
from PIL import Image
from pypdf import PdfReader, PdfWriter
from reportlab.pdfgen.canvas import Canvas

from engine.calibration import calibrated, is_calibrated, place_of
from engine.embedded_picture import picture_bytes, picture_size
from engine.errors import UserError
from engine.exchange import backing
from engine.exchange.backing import (
    backing_drawing,
    page_count,
    read_picture,
    read_picture_bytes,
    with_picture,
)
from engine.layout import Layout
from engine.layout_file import decode, encode


def as_bytes(image: Image.Image, kind: str = "PNG", **how: object) -> bytes:
    kept = io.BytesIO()
    image.save(kept, kind, **how)
    return kept.getvalue()


def shown(data: bytes) -> Image.Image:
    return Image.open(io.BytesIO(data))


@pytest.fixture
def sheet(tmp_path: Path) -> Path:
    """Two pages of A4: the first empty, on the second a black lower left quarter."""
    path = tmp_path / "ground floor.pdf"
    canvas = Canvas(str(path), pagesize=(595, 842))
    canvas.showPage()
    canvas.rect(0, 0, 297.5, 421, stroke=0, fill=1)
    canvas.showPage()
    canvas.save()
    return path


def test_a_picture_is_embedded_as_it_is(tmp_path: Path) -> None:
    path = tmp_path / "plan.png"
    path.write_bytes(as_bytes(Image.new("RGB", (40, 30), "red")))
    picture = read_picture(path)
    assert picture.data == path.read_bytes()
    assert picture.sha256 == hashlib.sha256(path.read_bytes()).hexdigest()
    assert (picture.width, picture.height, picture.n_pages) == (40, 30, 1)
    drawing = backing_drawing(Layout(), picture)
    assert (drawing.id, drawing.file_name) == ("plan", "plan.png")
    assert picture_bytes(drawing) == path.read_bytes()
    assert picture_size(drawing) == (40, 30)
    assert not is_calibrated(drawing)
    assert place_of(drawing, (0.0, 30.0)) == pytest.approx((0.0, 0.0))


def test_an_embedded_drawing_survives_its_file(tmp_path: Path) -> None:
    picture = read_picture_bytes(as_bytes(Image.new("L", (9, 9), 128), "JPEG"))
    drawing = backing_drawing(Layout(), picture, "looking +y", (2.0, -1.0))
    layout = Layout(backing_drawings=(drawing,))
    assert decode(encode(layout), "room.json") == layout
    assert drawing.name == "Pasted picture"
    assert place_of(drawing, (0.0, 9.0)) == pytest.approx((2.0, -1.0))


def test_a_page_of_a_pdf_is_a_picture_the_right_way_up(sheet: Path) -> None:
    picture = read_picture(sheet, 2)
    assert (picture.page, picture.n_pages) == (2, 2)
    assert page_count(sheet) == 2
    # 842 points at 300 dots per inch, finer than which nothing is drawn.
    assert max(picture.width, picture.height) == pytest.approx(842 / 72 * 300, abs=2)
    image = shown(picture.data).convert("L")
    x, y = picture.width // 4, picture.height // 4
    assert image.getpixel((x, 3 * y)) == 0
    assert image.getpixel((x, y)) == 255
    assert image.getpixel((3 * x, 3 * y)) == 255
    drawing = backing_drawing(Layout(), picture)
    assert drawing.name == "ground floor.pdf, page 2"


def test_a_large_picture_is_scaled_down_whole() -> None:
    wide = Image.new("RGB", (5000, 1000), "white")
    wide.paste("black", (2500, 0, 5000, 1000))
    picture = read_picture_bytes(as_bytes(wide))
    assert (picture.width, picture.height) == (4000, 800)
    image = shown(picture.data).convert("L")
    assert image.getpixel((1900, 400)) == 255
    assert image.getpixel((2100, 400)) == 0


def test_what_is_transparent_becomes_white() -> None:
    clear = Image.new("RGBA", (10, 10), (0, 0, 0, 0))
    clear.putpixel((5, 5), (0, 0, 0, 255))
    image = shown(read_picture_bytes(as_bytes(clear)).data).convert("RGB")
    assert image.getpixel((0, 0)) == (255, 255, 255)
    assert image.getpixel((5, 5)) == (0, 0, 0)


def test_a_photograph_lies_as_a_viewer_shows_it() -> None:
    lying = Image.new("RGB", (40, 20), "white")
    exif = Image.Exif()
    exif[0x0112] = 6
    picture = read_picture_bytes(as_bytes(lying, "JPEG", exif=exif.tobytes()))
    assert (picture.width, picture.height) == (20, 40)


def test_sixteen_bits_of_grey_keep_their_shades() -> None:
    deep = Image.new("I;16", (4, 4), 0x8000)
    image = shown(read_picture_bytes(as_bytes(deep)).data)
    assert image.convert("L").getpixel((1, 1)) == pytest.approx(0x80, abs=1)


def test_noise_is_kept_as_jpeg(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(backing, "_LARGEST_PNG", 1000)
    noisy = Image.effect_noise((200, 200), 90.0)
    picture = read_picture_bytes(as_bytes(noisy))
    assert shown(picture.data).format == "JPEG"


def test_a_bad_file_is_told_in_a_sentence(
    tmp_path: Path, sheet: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    whole = as_bytes(Image.effect_noise((60, 60), 90.0))
    (tmp_path / "empty.png").write_bytes(b"")
    (tmp_path / "cut.png").write_bytes(whole[: len(whole) // 2])
    (tmp_path / "text.png").write_text("no picture")
    (tmp_path / "cut.jpg").write_bytes(
        as_bytes(Image.effect_noise((60, 60), 90.0), "JPEG")[:900]
    )
    (tmp_path / "flipped.png").write_bytes(
        whole[:500] + bytes([whole[500] ^ 1]) + whole[501:]
    )
    (tmp_path / "cut.pdf").write_bytes(sheet.read_bytes()[:200])
    writer = PdfWriter(clone_from=PdfReader(sheet))
    writer.encrypt("secret", algorithm="RC4-128")
    writer.write(tmp_path / "locked.pdf")
    for name, page, reason in (
        ("gone.png", 1, "there is no such file"),
        (".", 1, "is not a file"),
        ("empty.png", 1, "is empty"),
        ("cut.png", 1, "picture is damaged"),
        ("cut.jpg", 1, "picture is damaged"),
        ("flipped.png", 1, "picture is damaged"),
        ("text.png", 1, "neither a PDF nor a PNG or JPEG"),
        ("cut.pdf", 1, "PDF is damaged"),
        ("locked.pdf", 1, "is encrypted"),
        ("ground floor.pdf", 3, "has 2 pages, and not a page 3"),
        ("ground floor.pdf", 0, "has 2 pages, and not a page 0"),
    ):
        with pytest.raises(UserError, match=reason) as told:
            read_picture(tmp_path / name, page)
        assert str(told.value).endswith(".")
    monkeypatch.setattr(backing, "MAX_FILE", 100)
    with pytest.raises(UserError, match="is larger than"):
        read_picture(sheet)


def test_too_many_pixels_are_not_decoded() -> None:
    header = as_bytes(Image.new("1", (8000, 8000)))
    with pytest.raises(UserError, match="8,000 × 8,000 pixels is more than 60 million"):
        read_picture_bytes(header)
    bomb = bytearray(as_bytes(Image.new("1", (8, 8))))
    bomb[16:24] = (100_000).to_bytes(4, "big") * 2
    with pytest.raises(UserError, match="not placed"):
        read_picture_bytes(bytes(bomb))


def test_a_newer_sheet_keeps_the_calibration_and_another_loses_it() -> None:
    old = read_picture_bytes(as_bytes(Image.new("L", (400, 300), 255)))
    drawing = calibrated(
        backing_drawing(Layout(), old), (40.0, 60.0), (360.0, 60.0), 8.0
    )
    finer = read_picture_bytes(as_bytes(Image.new("L", (800, 600), 0)))
    newer = with_picture(drawing, finer)
    assert place_of(newer, (720.0, 120.0)) == pytest.approx(
        place_of(drawing, (360.0, 60.0))
    )
    assert newer.sha256 == finer.sha256 != drawing.sha256
    other = read_picture_bytes(as_bytes(Image.new("L", (300, 400), 0)))
    assert not is_calibrated(with_picture(drawing, other))


def test_a_damaged_copy_is_told_when_it_is_wanted() -> None:
    picture = read_picture_bytes(as_bytes(Image.new("L", (9, 9), 128)))
    drawing = backing_drawing(Layout(), picture)
    cut = base64.b64encode(picture.data[:30]).decode("ascii")
    with pytest.raises(UserError, match="is damaged: choose its file again"):
        picture_bytes(replace(drawing, picture=cut))
    with pytest.raises(UserError, match="has no picture"):
        picture_bytes(replace(drawing, picture=""))
