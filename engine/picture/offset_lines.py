"""The distance to a reference level on a map: its lines, and the dimension to them."""

from __future__ import annotations

from math import hypot

import numpy as np
from shapely.geometry import LineString

from engine.iso_lines import IsoLine
from engine.picture.lettering import letter_line
from engine.picture.marks import BLACK, WHITE, Picture, Points, Stroke, Words
from engine.picture.sheet import Sheet
from engine.picture.source_labels import LABEL_SIZE
from engine.picture.subject import OffsetLines
from engine.printed_text import fitted, one_line

#: Width and dashes of the lines, also in the legend. [mm]
WIDTH = 0.8
DASH = (2.4, 0.8)

_TICK = 1.0


def draw_offsets(picture: Picture, sheet: Sheet, offsets: OffsetLines) -> None:
    """Draw the lines and the dimension that lie in the frame."""
    for line in offsets.lines:
        for piece in sheet.clipped(_on_paper(sheet, line)):
            picture.add(Stroke(piece, WIDTH + 0.8, WHITE))
            picture.add(Stroke(piece, WIDTH, BLACK, DASH))
    if offsets.dimension is None:
        return
    for piece in sheet.clipped(_on_paper(sheet, offsets.measured_from)):
        picture.add(Stroke(piece, 0.4, BLACK, (1.2, 0.8)))
    start, end, _ = offsets.dimension
    a, b = sheet.paper(*start), sheet.paper(*end)
    for piece in sheet.clipped((a, b)):
        picture.add(Stroke(piece, 1.2, WHITE))
        picture.add(Stroke(piece, 0.3, BLACK))
    for x, y in (a, b):
        tick = ((x - _TICK, y - _TICK), (x + _TICK, y + _TICK))
        for piece in sheet.clipped(tick):
            picture.add(Stroke(piece, 0.5, BLACK))


def letter_offsets(picture: Picture, sheet: Sheet, offsets: OffsetLines) -> None:
    """Write the dimension beside its middle, and the name on the longest line."""
    if offsets.dimension is not None:
        start, end, text = offsets.dimension
        a, b = sheet.paper(*start), sheet.paper(*end)
        _letter_dimension(picture, sheet, (a, b), fitted(text, LABEL_SIZE, 70.0))
    lines = [IsoLine(0.0, line) for line in offsets.lines if len(line) > 1]
    if lines:
        longest = max(lines, key=lambda line: line.length)
        name = one_line(offsets.name)
        if not letter_line(picture, sheet, longest, name, True):
            letter_line(picture, sheet, longest, name, True, flat=True)


def _letter_dimension(picture: Picture, sheet: Sheet, ends: Points, text: str) -> None:
    """Beside the middle of the part in sight, level, where there is room."""
    pieces = sheet.clipped(ends)
    if not pieces:
        return
    seen = LineString(pieces[0])
    middle = seen.interpolate(0.5, normalized=True)
    (ax, ay), (bx, by) = ends
    length = max(hypot(bx - ax, by - ay), 1e-9)
    across = np.array([-(by - ay), bx - ax]) / length
    half = 0.5 * Words((0, 0), text, LABEL_SIZE, bold=True).width
    reach = 1.0 + LABEL_SIZE + abs(across[0]) * half
    for away in (reach, -reach, 2 * reach, -2 * reach, 0.0):
        at = (middle.x + away * across[0], middle.y + away * across[1])
        words = Words(at, text, LABEL_SIZE, BLACK, True, "middle", 0.0, True)
        if sheet.has_room(words):
            picture.add(words)
            return


def _on_paper(sheet: Sheet, line: np.typing.NDArray[np.float64]) -> Points:
    return tuple(sheet.paper(float(x), float(y)) for x, y in line)
