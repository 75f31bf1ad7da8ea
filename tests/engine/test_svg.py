"""SVG of pictures: well formed, escaped, and referring to nothing outside."""

from __future__ import annotations

from xml.etree import ElementTree

import numpy as np

from engine.exchange.svg import svg
from engine.picture import Picture, Raster, Stroke, Words

SPACE = "{http://www.w3.org/2000/svg}"


def test_marks_keep_their_place_with_y_turned_downwards():
    picture = Picture(100.0, 50.0)
    picture.add(Stroke(((0.0, 0.0), (10.0, 20.0))))
    root = ElementTree.fromstring(svg(picture))
    assert root.get("viewBox") == "0 0 100.00 50.00"
    line = root.find(f"{SPACE}polyline")
    assert line is not None
    assert line.get("points") == "0.000,50.000 10.000,30.000"


def test_users_text_is_text():
    picture = Picture(10.0, 10.0)
    hostile = '<script>x</script>&"\x00\x1b<image href="file:///etc/passwd"/>'
    picture.add(Words((1.0, 1.0), hostile, patch=True))
    root = ElementTree.fromstring(svg(picture))
    assert root.find(f"{SPACE}script") is None
    assert root.find(f"{SPACE}image") is None
    (text,) = root.iter(f"{SPACE}text")
    assert "<script>x</script>" in (text.text or "")


def test_pixels_are_embedded():
    picture = Picture(10.0, 10.0)
    picture.add(Raster((0.0, 0.0, 5.0, 5.0), np.zeros((2, 2, 4), np.uint8)))
    (image,) = ElementTree.fromstring(svg(picture)).iter(f"{SPACE}image")
    assert (image.get("href") or "").startswith("data:image/png;base64,")
