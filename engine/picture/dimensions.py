"""Dimension chains above and beside a drawing, and level marks beside an elevation."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from itertools import pairwise

from engine.picture.marks import BLACK, GREY, Picture, Stroke, Words
from engine.picture.sheet import Sheet
from engine.printed_text import fitted, one_line, text_width, wrapped
from engine.units import LENGTH_UNITS

SIZE = 2.0

#: Of the chain, and of the dimension over all, from the frame.
_NEAR, _FAR = 4.5, 10.5

#: Widest text of a level. [mm]
_MOST_LEVELS = 46.0

#: A level, what it is, and of which place. [m]
Level = tuple[float, str, str]

#: Places nearer than this on paper are one in a chain.
_SAME = 1.2


def draw_chain_above(
    picture: Picture,
    sheet: Sheet,
    places: Iterable[float],
    unit: str,
    over_all: tuple[float, float] | None = None,
) -> None:
    """A chain of dimensions along the upper edge, and one over all. [m]

    `over_all` is what the outer one spans; None: from the first place to the last.
    """
    top = sheet.bottom + sheet.height
    for a, b, far in _spans(places, sheet.factor, over_all):
        first, last = sheet.paper(a, 0.0)[0], sheet.paper(b, 0.0)[0]
        y = top + (_FAR if far else _NEAR)
        _draw_line(picture, (first, y), (last, y))
        text = dimension_text(b - a, unit)
        narrow = text_width(text, SIZE) + 1.0 > last - first
        at = (0.5 * (first + last), y + (1.5 if not narrow else 3.6))
        picture.add(Words(at, text, SIZE, anchor="middle"))
        for x in (first, last):
            picture.add(Stroke(((x, top + 1.0), (x, y + 1.0)), 0.12, GREY))


def draw_chain_beside(
    picture: Picture,
    sheet: Sheet,
    places: Iterable[float],
    unit: str,
    over_all: tuple[float, float] | None = None,
) -> None:
    """A chain of dimensions along the right edge, and one over all. [m]"""
    right = sheet.left + sheet.width
    for a, b, far in _spans(places, sheet.factor, over_all):
        first, last = sheet.paper(0.0, a)[1], sheet.paper(0.0, b)[1]
        x = right + (_FAR if far else _NEAR)
        _draw_line(picture, (x, first), (x, last))
        text = dimension_text(b - a, unit)
        narrow = text_width(text, SIZE) + 1.0 > last - first
        at = (x + (1.5 if not narrow else 3.6), 0.5 * (first + last))
        picture.add(Words(at, text, SIZE, anchor="middle", turn=90.0))
        for y in (first, last):
            picture.add(Stroke(((right + 1.0, y), (x + 1.0, y)), 0.12, GREY))


def draw_levels(
    picture: Picture,
    sheet: Sheet,
    levels: Iterable[Level],
    unit: str,
    width: float,
) -> None:
    """Levels beside an elevation, with what they are, none over another. [m]"""
    right = sheet.left + sheet.width
    most = int((sheet.height + 6.0) / (SIZE + 0.9))
    found = _by_level(levels)
    inside = [z for z in found if sheet.world[1] <= z <= sheet.world[3]]
    # Of too many, those named first: floors and ceilings.
    inside = inside[:most]
    per_level = max(1, min(3, most // max(1, len(inside))))
    lines: list[tuple[float, str, bool]] = []
    for z in sorted(inside):
        texts = _broken(_level_text(z, found[z], unit), width - 7.5, per_level)
        lines += [(z, text, k == 0) for k, text in reversed([*enumerate(texts)])]
    true = [sheet.paper(0.0, z)[1] for z, _, _ in lines]
    places = _spread(true, SIZE + 0.9)
    for y0, y, (_, text, is_first) in zip(true, places, lines, strict=True):
        if is_first:
            line = ((right, y0), (right + 2.0, y0), (right + 5.0, y), (right + 6.5, y))
            picture.add(Stroke(line, 0.15, BLACK))
        picture.add(Words((right + 7.0, y), text, SIZE))


def _broken(text: str, width: float, most: int) -> list[str]:
    """A text in lines, the last one cut where there are more than `most`."""
    lines = wrapped(text, SIZE, width)
    if len(lines) <= most:
        return [*lines]
    rest = " ".join(lines[most - 1 :])
    return [*lines[: most - 1], fitted(rest, SIZE, width)]


def levels_width(levels: Iterable[Level], unit: str) -> float:
    """Room that level marks take beside an elevation, up to a limit. [mm]"""
    texts = [_level_text(z, names, unit) for z, names in _by_level(levels).items()]
    return 8.0 + min(_MOST_LEVELS, max(text_width(text, SIZE) for text in texts))


def _by_level(levels: Iterable[Level]) -> dict[float, dict[str, list[str]]]:
    """By level: what kind of level it is, and of which places."""
    found: dict[float, dict[str, list[str]]] = {}
    for level, kind, name in levels:
        kinds = found.setdefault(round(level, 3), {})
        kinds.setdefault(kind, []).append(name)
    return found


def _level_text(z: float, kinds: dict[str, list[str]], unit: str) -> str:
    told = [f"{kind} {', '.join(dict.fromkeys(n))}" for kind, n in kinds.items()]
    return one_line(f"z {dimension_text(z, unit)} {'; '.join(told)}")


def dimension_text(metres: float, unit: str) -> str:
    """A length as drawings have it, without its unit."""
    digits = {"m": 2, "mm": 0, "ft": 2, "in": 1}[unit]
    return f"{metres / LENGTH_UNITS[unit] + 0.0:.{digits}f}".replace("-", "−")


Spot = tuple[float, float]


def _spans(
    places: Iterable[float], factor: float, over_all: tuple[float, float] | None
) -> list[tuple[float, float, bool]]:
    """From where to where each dimension leads, and whether it is the outer one. [m]"""
    shown = _distinct(places, factor)
    spans = [(a, b, False) for a, b in pairwise(shown)]
    if over_all is not None:
        return [*spans, (*over_all, bool(spans))]
    if len(shown) > 2:
        spans.append((shown[0], shown[-1], True))
    return spans


def _draw_line(picture: Picture, a: Spot, b: Spot) -> None:
    """A dimension line with oblique strokes at its ends."""
    picture.add(Stroke((a, b), 0.15, BLACK))
    for x, y in (a, b):
        picture.add(Stroke(((x - 0.7, y - 0.7), (x + 0.7, y + 0.7)), 0.3, BLACK))


def _distinct(places: Iterable[float], factor: float) -> list[float]:
    """Places in order; of those that coincide on paper, the first. [m]"""
    found: list[float] = []
    for place in sorted(set(places)):
        if not found or (place - found[-1]) * factor >= _SAME:
            found.append(place)
    return found


def _spread(places: Sequence[float], least: float) -> list[float]:
    """Rising places moved as little as needed to stand `least` apart. [mm]"""
    blocks: list[tuple[float, int]] = []
    for place in places:
        blocks.append((place, 1))
        while len(blocks) > 1:
            (low, m), (high, n) = blocks[-2:]
            if high - low >= 0.5 * (m + n) * least:
                break
            middle = (low * m + high * n) / (m + n)
            blocks[-2:] = [(middle, m + n)]
    return [
        middle + (k - 0.5 * (n - 1)) * least for middle, n in blocks for k in range(n)
    ]
