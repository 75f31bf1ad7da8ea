"""The legend beside a map and the caption under it."""

from __future__ import annotations

from itertools import pairwise

import numpy as np

from engine.colour_ramp import on_paper, position, rgb_ramp
from engine.iso_lines import round_values
from engine.picture.marks import (
    BLACK,
    GREY,
    WHITE,
    Picture,
    Points,
    Raster,
    Stroke,
    Words,
)
from engine.picture.offset_lines import DASH, WIDTH
from engine.picture.subject import MapSubject, value_text
from engine.printed_text import wrapped
from engine.units import FLUX_DENSITY_UNITS, significant

SIZE = 2.2
STEP = 3.1
BAR_WIDTH = 4.5
BAR_HEIGHT = 40.0

CAUTION = (
    "Calculated from the currents and positions entered, in the undisturbed field; not "
    "a measurement, not a statement on health, and not a judgement under any rule. "
    "Local regulation and licensed, competent practice decide."
)


#: Width that the legend takes beside a map, and width and height under it. [mm]
BESIDE = 40.0
UNDER = (120.0, 64.0)


#: Of a reference level's line, and of the white in its middle: without colours, too,
#: it is not the edge of a room. [mm]
REFERENCE_WIDTH, REFERENCE_CORE = 0.85, 0.3


def reference_strokes(line: Points) -> tuple[Stroke, Stroke]:
    """A line of a reference level on paper. [mm]"""
    return (
        Stroke(line, REFERENCE_WIDTH, BLACK),
        Stroke(line, REFERENCE_CORE, WHITE),
    )


def height_beside(subject: MapSubject) -> float:
    """Height that the legend takes beside a map. [mm]"""
    measured = Picture(BESIDE, 0.0)
    y = _draw_scale(measured, subject, 0.0, 0.0)
    return -_draw_entries(measured, subject, 0.0, y - 1.0, BESIDE - 2.0)


def draw_legend_beside(
    picture: Picture, subject: MapSubject, left: float, top: float
) -> None:
    """Draw the colour bar, and what the marks on the map mean, one over the other."""
    y = _draw_scale(picture, subject, left, top)
    _draw_entries(picture, subject, left, y - 1.0, BESIDE - 2.0)


def draw_legend_under(
    picture: Picture, subject: MapSubject, left: float, top: float
) -> None:
    """Draw the colour bar, and what the marks on the map mean, side by side."""
    _draw_scale(picture, subject, left, top)
    _draw_entries(picture, subject, left + 46.0, top - 1.5, UNDER[0] - 48.0)


def _draw_scale(
    picture: Picture, subject: MapSubject, left: float, top: float
) -> float:
    """The colour bar with its unit and its ends; the height where it stops. [mm]"""
    picture.add(Words((left, top - 1.5), "Flux density B", SIZE, bold=True))
    unit = f"{subject.quantity} [{subject.unit}]"
    picture.add(Words((left, top - 1.5 - STEP), unit, SIZE))
    bottom = top - 9.0 - BAR_HEIGHT
    _draw_bar(picture, subject, left, bottom)
    y = bottom - 4.0
    low = value_text(subject.low, subject.unit)
    high = value_text(subject.high, subject.unit)
    for text in (f"under {low} not coloured", f"over {high} as {high}"):
        y = _paragraph(picture, text, left, y, BESIDE - 2.0)
    return y


def _draw_entries(
    picture: Picture, subject: MapSubject, left: float, top: float, width: float
) -> float:
    """What the marks on the map mean; the height where it stops. [mm]"""
    y = top
    for strokes, text in _entries(subject):
        for line, stroke in strokes:
            moved: Points = tuple((left + px, y + py) for px, py in line)
            picture.add(Stroke(moved, stroke.width, stroke.colour, stroke.dash))
        y = _paragraph(picture, text, left + 8.0, y, width - 8.0)
    return y


def _draw_bar(
    picture: Picture, subject: MapSubject, left: float, bottom: float
) -> None:
    colours = on_paper(rgb_ramp())[:, None, :]
    solid = np.full((*colours.shape[:2], 1), 255, np.uint8)
    area = (left, bottom, left + BAR_WIDTH, bottom + BAR_HEIGHT)
    picture.add(Raster(area, np.concatenate([colours, solid], axis=2)))
    top, right = bottom + BAR_HEIGHT, left + BAR_WIDTH
    frame = ((left, bottom), (right, bottom), (right, top), (left, top), (left, bottom))
    picture.add(Stroke(frame, 0.2))
    for value in _bar_ticks(subject):
        at = float(position(value, subject.low, subject.high, subject.scale))
        y = bottom + BAR_HEIGHT * at
        picture.add(Stroke(((right, y), (right + 1.0, y)), 0.2))
        text = value_text(value, subject.unit)
        picture.add(Words((right + 1.8, y), text, SIZE))


def _bar_ticks(subject: MapSubject) -> list[float]:
    """Values with a tick: as many as there is room for, the ends among them."""
    factor = FLUX_DENSITY_UNITS[subject.unit]
    inner = round_values(subject.low / factor, subject.high / factor)
    for kept in (("1", "2", "5"), ("1", "5"), ("1",)):
        chosen = [subject.low, subject.high]
        chosen += [
            v * factor for v in inner if significant(v, 1).strip("0.")[0] in kept
        ]
        # Rounded: 1000 mG is both an end and a round value, apart by the last digit.
        ticks = sorted({float(f"{v:.9g}") for v in chosen})
        places = [
            float(position(v, subject.low, subject.high, subject.scale)) * BAR_HEIGHT
            for v in ticks
        ]
        spaced = [b - a for a, b in pairwise(places)]
        if all(gap > 2.6 for gap in spaced):
            return ticks
    return [subject.low, subject.high]


def _entries(
    subject: MapSubject,
) -> list[tuple[list[tuple[Points, Stroke]], str]]:
    """Samples of the marks, drawn about (0, 0), and what they mean."""

    def bar(stroke_width: float, dash: tuple[float, float] | None = None) -> Stroke:
        return Stroke((), stroke_width, BLACK, dash)

    flat: Points = ((0.0, 0.0), (6.0, 0.0))
    entries = [([(flat, bar(0.18))], "line of equal value, labelled")]
    if subject.reference_note:
        strokes = reference_strokes(flat) if subject.references else ()
        samples = [(stroke.points, stroke) for stroke in strokes]
        entries.append((samples, subject.reference_note))
    if subject.offsets is not None:
        text = "reference level met, every frequency counted by its rule"
        entries.append(([(flat, bar(WIDTH, DASH))], text))
    entries.append(([(flat, bar(0.3, (2.0, 1.2)))], "edge of a zone"))
    entries.append(([(flat, bar(0.5))], "edge of a room"))
    cross: list[tuple[Points, Stroke]] = [
        (((1.8, -1.2), (4.2, 1.2)), bar(0.35)),
        (((1.8, 1.2), (4.2, -1.2)), bar(0.35)),
    ]
    entries.append((cross, "receptor"))
    if subject.largest is not None:
        ring: Points = tuple(
            (3.0 + 1.5 * float(np.cos(a)), 1.5 * float(np.sin(a)))
            for a in np.linspace(0.0, 2.0 * np.pi, 25)
        )
        entries.append(([(ring, bar(0.4))], "largest value of a zone at this height"))
    if subject.mask.any():
        lines: list[tuple[Points, Stroke]] = [
            (((x, -1.0), (x + 2.0, 1.0)), Stroke((), 0.12, GREY))
            for x in (0.0, 1.3, 2.6, 3.9)
        ]
        entries.append((lines, "not assessed: inside a conductor or an enclosure"))
    return entries


def _paragraph(
    picture: Picture, text: str, left: float, y: float, width: float
) -> float:
    """Write wrapped lines from `y` downwards; the height where the next one goes."""
    for line in wrapped(text, SIZE, width):
        picture.add(Words((left, y), line, SIZE))
        y -= STEP
    return y - 0.6


def _caption(subject: MapSubject, width: float) -> list[tuple[str, bool]]:
    lines: list[tuple[str, bool]] = []
    if subject.title:
        title = wrapped(subject.title, 2.8, width, bold=True)[:3]
        lines = [(line, True) for line in title]
    for text in (*subject.lines, CAUTION):
        lines += [(line, False) for line in wrapped(text, SIZE, width)[:4]]
    return lines


def caption_height(subject: MapSubject, width: float) -> float:
    """Height that the caption takes on paper. [mm]"""
    return 2.0 + 3.4 * len(_caption(subject, width - 4.0))


def draw_caption(picture: Picture, subject: MapSubject, width: float) -> None:
    """Write the caption at the foot of the picture."""
    lines = _caption(subject, width - 4.0)
    for k, (line, bold) in enumerate(reversed(lines)):
        size = 2.8 if bold else SIZE
        picture.add(Words((2.0, 2.0 + 3.4 * k), line, size, bold=bold))
