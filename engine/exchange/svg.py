"""Pictures as SVG: the same marks as on paper, as vectors for other documents."""

from __future__ import annotations

import base64
import io
from xml.sax.saxutils import escape

import numpy as np
from PIL import Image

from engine.picture import Picture, Raster, Stroke, Words
from engine.picture.marks import Colour, Points
from engine.printed_text import printable


def svg(picture: Picture) -> str:
    """A picture as an SVG document, in millimetres.

    All text is escaped; the document refers to nothing outside itself.
    """
    lines = [
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{picture.width:.2f}mm" '
        f'height="{picture.height:.2f}mm" '
        f'viewBox="0 0 {picture.width:.2f} {picture.height:.2f}">',
        '<rect width="100%" height="100%" fill="#ffffff"/>',
    ]
    for part in picture.parts:
        if isinstance(part, Stroke):
            lines.append(_stroke(part, picture.height))
        elif isinstance(part, Raster):
            lines.append(_raster(part, picture.height))
        else:
            lines.append(_words(part, picture.height))
    return "\n".join([*lines, "</svg>"]) + "\n"


def _colour(colour: Colour) -> str:
    return "#{:02x}{:02x}{:02x}".format(*colour)


def _points(points: Points, height: float) -> str:
    return " ".join(f"{x:.3f},{height - y:.3f}" for x, y in points)


def _stroke(stroke: Stroke, height: float) -> str:
    dash = ""
    if stroke.dash is not None:
        dash = f' stroke-dasharray="{stroke.dash[0]:g} {stroke.dash[1]:g}"'
    return (
        f'<polyline points="{_points(stroke.points, height)}" fill="none" '
        f'stroke="{_colour(stroke.colour)}" stroke-width="{stroke.width:g}" '
        f'stroke-linejoin="round"{dash}/>'
    )


def _raster(raster: Raster, height: float) -> str:
    file = io.BytesIO()
    Image.fromarray(np.ascontiguousarray(raster.rgba[::-1]), "RGBA").save(file, "PNG")
    left, bottom, right, top = raster.box
    data = base64.b64encode(file.getvalue()).decode("ascii")
    return (
        f'<image x="{left:.3f}" y="{height - top:.3f}" width="{right - left:.3f}" '
        f'height="{top - bottom:.3f}" preserveAspectRatio="none" '
        f'href="data:image/png;base64,{data}"/>'
    )


def _words(words: Words, height: float) -> str:
    x, y = words.at[0], height - words.at[1]
    anchor = {"left": "start", "middle": "middle", "right": "end"}[words.anchor]
    turn = f' transform="rotate({-words.turn:.2f} {x:.3f} {y:.3f})"'
    weight = ' font-weight="bold"' if words.bold else ""
    text = (
        f'<text x="{x:.3f}" y="{y + 0.36 * words.size:.3f}" '
        f'font-family="DejaVu Sans, sans-serif" font-size="{words.size:g}" '
        f'text-anchor="{anchor}" fill="{_colour(words.colour)}"{weight}{turn}>'
        f"{escape(printable(words.text))}</text>"
    )
    if not words.patch:
        return text
    shift = {"left": 0.0, "middle": -0.5, "right": -1.0}[words.anchor] * words.width
    patch = (
        f'<rect x="{x + shift - 0.3:.3f}" y="{y - 0.55 * words.size:.3f}" '
        f'width="{words.width + 0.6:.3f}" height="{1.1 * words.size:.3f}" '
        f'fill="#ffffff" fill-opacity="0.85"{turn}/>'
    )
    return patch + text
