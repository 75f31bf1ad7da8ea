"""Labels on a map: where there is room, and on no other label."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from shapely.geometry import Point as Spot
from shapely.geometry import box

from engine.drawing import Place, Plan, Point
from engine.iso_lines import IsoLine
from engine.picture.marks import BLACK, Picture, Words
from engine.picture.sheet import Sheet
from engine.picture.source_labels import LABEL_SIZE
from engine.printed_text import fitted, one_line, text_width

#: Labels of one reference level on a map.
MOST_LABELS = 3

#: Parts of an iso-line before its label, the best ones first.
_ALONG = (0.5, 0.3, 0.7, 0.15, 0.85, 0.4, 0.6, 0.22, 0.78, 0.08, 0.92, 0.04, 0.96)

#: A line bends too much under a label when its chord is shorter than this part.
_STRAIGHT = 0.94


def keep_clear(sheet: Sheet, plan: Plan) -> None:
    """Let no label cover a receptor."""
    for mark in plan.receptors:
        x, y = sheet.paper(*mark.seen)
        sheet.occupy(box(x - 1.3, y - 1.3, x + 1.3, y + 1.3))


def letter_references(
    picture: Picture, sheet: Sheet, lines: Sequence[tuple[IsoLine, str]]
) -> None:
    """Write the labels of reference levels, on the longest lines of each.

    A level none of whose lines has a straight part gets its label flat across one.
    """
    by_text: dict[str, list[IsoLine]] = {}
    for line, text in lines:
        by_text.setdefault(text, []).append(line)
    for text, its_lines in by_text.items():
        longest = sorted(its_lines, key=lambda line: -line.length)[:MOST_LABELS]
        written = [letter_line(picture, sheet, line, text, True) for line in longest]
        if not any(written):
            letter_line(picture, sheet, longest[0], text, True, flat=True)


def letter_line(
    picture: Picture,
    sheet: Sheet,
    line: IsoLine,
    text: str,
    bold: bool = False,
    flat: bool = False,
) -> bool:
    """Write the label of an iso-line where it is straight enough and there is room.

    Returns whether it was written. `flat`: level across the line, straight or not.
    """
    shown = fitted(text, LABEL_SIZE, 60.0, bold=bold)
    span = text_width(shown, LABEL_SIZE, bold=bold) / sheet.factor
    if not flat and line.length < 1.1 * span:
        return False
    for fraction in _ALONG:
        if not flat and line.straightness(fraction, span) < _STRAIGHT:
            continue
        x, y, turn = line.label_place(fraction, span)
        at = sheet.paper(x, y)
        turn = 0.0 if flat else turn
        words = Words(at, shown, LABEL_SIZE, BLACK, bold, "middle", turn, True)
        if sheet.has_room(words):
            picture.add(words)
            return True
    return False


def letter_places(picture: Picture, sheet: Sheet, plan: Plan) -> None:
    """Name receptors, rooms and zones."""
    for at, titles in _by_place(plan).items():
        x, y = sheet.paper(*at)
        if not sheet.frame.contains(Spot(x, y)):
            continue
        text = ", ".join(titles)
        half = 0.5 * text_width(fitted(text, LABEL_SIZE, 70.0), LABEL_SIZE)
        beside = [(x + half + 2.6, y), (x - half - 2.6, y)]
        places = _around((x, y), 3.4, half)
        _letter(picture, sheet, text, [*places[:1], *beside, *places[1:]])
    for place in plan.rooms:
        _letter(picture, sheet, place.title, _corners(sheet, place, 2.6), bold=True)
    for place in plan.zones:
        _letter(picture, sheet, place.title, _corners(sheet, place, -2.6), bold=True)


def _by_place(plan: Plan) -> dict[Point, list[str]]:
    """Names of receptors by where they show: several may stand over one point."""
    found: dict[Point, list[str]] = {}
    for mark in plan.receptors:
        found.setdefault(mark.seen, []).append(mark.title)
    return found


def _around(at: Point, step: float, aside: float = 9.0) -> list[Point]:
    """Places near a point, the nearest first, none on the point itself. [mm]"""
    x, y = at
    aside = min(9.0, aside + 1.6)
    return [
        (x + dx, y + dy * step)
        for dy in (1, -1, 2, -2, 3, -3)
        for dx in (0.0, aside, -aside, 2.0 * aside, -2.0 * aside)
    ]


def _corners(sheet: Sheet, place: Place, inset: float) -> list[Point]:
    """Along a place's upper edge (inset > 0) or lower one, then within. [mm]"""
    points = [sheet.paper(x, y) for x, y in place.area.outline]
    left, right = min(p[0] for p in points), max(p[0] for p in points)
    edge = max(p[1] for p in points) if inset > 0 else min(p[1] for p in points)
    half = 0.5 * text_width(one_line(place.title)[:60], LABEL_SIZE, bold=True)
    return [
        (left + half + 2.0, edge - inset),
        (right - half - 2.0, edge - inset),
        (left + half + 2.0, edge - 2.0 * inset),
        *_around(sheet.paper(*place.label_place), 3.4),
    ]


def _letter(
    picture: Picture,
    sheet: Sheet,
    text: str,
    places: list[Point],
    bold: bool = False,
) -> None:
    """Write a label where it covers no other one, of the first places on few lines."""
    shown = fitted(text, LABEL_SIZE, 70.0, bold=bold)
    half, tall = 0.5 * text_width(shown, LABEL_SIZE, bold=bold), 0.5 * LABEL_SIZE
    boxes = [box(x - half, y - tall, x + half, y + tall) for x, y in places]
    lines = sheet.lines_under(np.array(boxes))
    order = sorted(range(len(places)), key=lambda k: (0.5 * lines[k] + 0.4 * k, k))
    for k in order:
        words = Words(places[k], shown, LABEL_SIZE, BLACK, bold, "middle", 0.0, True)
        if sheet.has_room(words):
            picture.add(words)
            return
