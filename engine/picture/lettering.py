"""Labels on a map: where there is room, and on no other label."""

from __future__ import annotations

from collections.abc import Sequence

from shapely.geometry import box

from engine.drawing import Place, Plan, Point
from engine.iso_lines import IsoLine
from engine.picture.marks import BLACK, Picture, Words
from engine.picture.sheet import Sheet
from engine.printed_text import fitted, one_line, text_width
from engine.units import LENGTH_UNITS

LABEL_SIZE = 2.2

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
        _letter(picture, sheet, ", ".join(titles), _around(sheet.paper(*at), 3.4))
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


def letter_sources(
    picture: Picture, sheet: Sheet, plan: Plan, length_unit: str = "m"
) -> None:
    """Name runs with their heights, enclosures and equipment."""
    for run in plan.runs:
        span = _span(run.levels, length_unit)
        at = _around(sheet.paper(*run.label_place), 4.0)[:10]
        title = fitted(run.title, LABEL_SIZE, 45.0)
        _letter(picture, sheet, f"{title}, z {span} {length_unit}", at)
    for place in (*plan.enclosures, *plan.equipment):
        middle = sheet.paper(*place.label_place)
        _letter(picture, sheet, place.title, [middle, *_around(middle, 3.4)])


def _span(levels: tuple[float, float], unit: str) -> str:
    """Two levels in a unit of length, or one where they are the same."""
    digits = {"m": 2, "mm": 0, "ft": 2, "in": 1}[unit]
    low, high = (
        f"{level / LENGTH_UNITS[unit] + 0.0:.{digits}f}".replace("-", "−")
        for level in levels
    )
    return low if levels[1] - levels[0] < 0.005 else f"{low}–{high}"


def _around(at: Point, step: float) -> list[Point]:
    """Places near a point, the nearest first, none on the point itself. [mm]"""
    x, y = at
    return [
        (x + dx, y + dy * step)
        for dy in (1, -1, 2, -2, 3, -3)
        for dx in (0.0, 9.0, -9.0, 18.0, -18.0)
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
    """Write a label at the first place where it covers no other one."""
    shown = fitted(text, LABEL_SIZE, 70.0, bold=bold)
    for at in places:
        words = Words(at, shown, LABEL_SIZE, BLACK, bold, "middle", 0.0, True)
        if sheet.has_room(words):
            picture.add(words)
            return
