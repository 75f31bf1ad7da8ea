"""Linked backing drawings: where their files are, and what is said without them."""

from __future__ import annotations

from pathlib import Path

import pytest
from msgspec.structs import replace
from PIL import Image

from engine.__main__ import main
from engine.edits import added
from engine.embedded_picture import picture_size, shown_picture
from engine.errors import UserError
from engine.exchange.backing import backing_drawing, read_picture, with_picture
from engine.exchange.linked_drawings import (
    embedded,
    link_fault,
    link_remarks,
    link_text,
    linked,
    linked_path,
    read_linked,
    with_links_moved,
)
from engine.layout import Layout
from engine.layout_file import decode, encode, read, write
from engine.places import BackingDrawing
from engine.remarks import remarks


@pytest.fixture
def sheet(tmp_path: Path) -> Path:
    path = tmp_path / "plans" / "ground.png"
    path.parent.mkdir()
    Image.new("RGB", (70, 40), "white").save(path)
    return path


def placed(sheet: Path, folder: Path | None) -> BackingDrawing:
    picture = read_picture(sheet)
    return linked(backing_drawing(Layout(), picture), picture, sheet, folder)


def test_a_link_holds_no_copy_and_counts_from_the_layouts_folder(tmp_path, sheet):
    drawing = placed(sheet, tmp_path / "rooms")
    assert drawing.picture == ""
    assert drawing.linked_file == "../plans/ground.png"
    assert linked_path(drawing, tmp_path / "rooms") == sheet
    picture = read_picture(sheet)
    assert picture_size(drawing) == (picture.width, picture.height)
    layout = added(Layout(), drawing)
    assert len(encode(layout)) < 2000
    assert decode(encode(layout), "room.json") == layout


def test_without_a_folder_or_far_away_a_link_is_whole(tmp_path, sheet):
    assert link_text(sheet, None) == str(sheet)
    deep = tmp_path / "a" / "b" / "c" / "d"
    assert link_text(sheet, deep) == str(sheet)
    assert link_text(sheet, deep.parent) == "../../../plans/ground.png"
    root = Path(sheet.anchor)
    assert link_text(root / "a" / "p.png", root / "b") == str(root / "a" / "p.png")


def test_what_holds_says_nothing(tmp_path, sheet):
    drawing = placed(sheet, tmp_path)
    layout = added(Layout(), drawing)
    assert link_fault(drawing, tmp_path) == ""
    assert list(link_remarks(layout, tmp_path)) == []
    codes = [(r.code, r.sentence) for r in remarks(layout) if r.code == "W24"]
    assert len(codes) == 1
    assert "not calibrated" in codes[0][1]


def test_a_missing_file_is_a_remark_in_a_whole_sentence(tmp_path, sheet):
    drawing = placed(sheet, tmp_path)
    sheet.unlink()
    (remark,) = link_remarks(added(Layout(), drawing), tmp_path)
    assert (remark.code, remark.severity, remark.items) == (
        "W24", "warning", (drawing.id,),
    )  # fmt: skip
    assert remark.sentence == (
        "Backing drawing “ground.png” is linked to “plans/ground.png”, and there is no "
        "such file: put it back, or choose its file again."
    )
    with pytest.raises(UserError, match="no such file"):
        read_linked(drawing, tmp_path)


def test_a_changed_file_is_a_remark_and_never_shows_by_itself(tmp_path, sheet):
    drawing = placed(sheet, tmp_path)
    Image.new("RGB", (333, 222), "black").save(sheet)
    (remark,) = link_remarks(added(Layout(), drawing), tmp_path)
    assert "has changed since it was placed" in remark.sentence
    assert picture_size(drawing) == (70, 40)
    with pytest.raises(UserError, match="has changed"):
        read_linked(drawing, tmp_path)
    # Chosen again it shows, as another sheet without the old calibration.
    picture = read_picture(sheet)
    again = linked(with_picture(drawing, picture), picture, sheet, tmp_path)
    assert picture_size(again) == (333, 222)
    assert link_fault(again, tmp_path) == ""


def test_a_link_to_another_computer_is_not_followed():
    drawing = BackingDrawing(id="d", linked_file="//elsewhere/share/plan.pdf")
    assert "on another computer" in link_fault(drawing, None)
    drawing = replace(drawing, linked_file="\\\\elsewhere\\share\\plan.pdf")
    assert "on another computer" in link_fault(drawing, None)


def test_a_folder_in_the_place_of_the_file_is_no_file(tmp_path):
    drawing = BackingDrawing(id="d", linked_file=".", sha256="0" * 64)
    assert "no such file" in link_fault(drawing, tmp_path)


def test_a_linked_file_is_read_when_the_layout_is_opened(tmp_path, sheet):
    picture = read_picture(sheet)
    bare = BackingDrawing(id="d", linked_file="plans/ground.png", sha256=picture.sha256)
    read_linked(bare, tmp_path)
    assert picture_size(bare) == (picture.width, picture.height)


def test_embedding_takes_the_copy_that_shows(tmp_path, sheet):
    drawing = placed(sheet, tmp_path)
    whole = embedded(drawing)
    assert whole.linked_file == ""
    assert whole.picture == shown_picture(drawing)
    lost = replace(drawing, sha256="1" * 64)
    with pytest.raises(UserError, match="cannot be embedded"):
        embedded(lost)


def test_links_follow_the_layout_to_another_folder(tmp_path, sheet):
    layout = added(Layout(), placed(sheet, None))
    saved = with_links_moved(layout, None, tmp_path)
    assert saved.backing_drawings[0].linked_file == "plans/ground.png"
    elsewhere = with_links_moved(saved, tmp_path, tmp_path / "rooms")
    assert elsewhere.backing_drawings[0].linked_file == "../plans/ground.png"
    assert with_links_moved(saved, tmp_path, tmp_path) is saved
    assert with_links_moved(elsewhere, tmp_path / "rooms", None) == layout


def test_the_command_line_tells_of_a_missing_file(tmp_path, sheet, capsys):
    sample = Path(__file__).parents[2] / "sample_layouts" / "small-switch-room.json"
    drawing = replace(placed(sheet, tmp_path), id="sheet")
    layout = added(read(sample), drawing)
    write(tmp_path / "room.json", layout)
    sheet.unlink()
    main(["assess", str(tmp_path / "room.json")])
    assert "linked to “plans/ground.png”, and there is no such" in " ".join(
        capsys.readouterr().out.split()
    )
