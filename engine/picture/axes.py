"""Axes with ticks, the scale bar and the north arrow around a map."""

from __future__ import annotations

import math
from collections.abc import Sequence

from engine.iso_lines import round_values
from engine.picture.marks import BLACK, Picture, Stroke, Words
from engine.picture.sheet import Sheet
from engine.units import LENGTH_UNITS

TICK_SIZE = 2.3


def draw_axes(
    picture: Picture,
    sheet: Sheet,
    scale: int,
    *,
    length_unit: str,
    north: float | None = None,
    names: tuple[str, str] = ("x", "y"),
) -> None:
    """Draw the frame, its ticks, the scale bar and, where stated, north.

    `names` are what the axes to the right and upwards stand for; "−y" for an axis on
    which y falls to the right.
    """
    left, bottom = sheet.left, sheet.bottom
    right, top = left + sheet.width, bottom + sheet.height
    corners = ((left, bottom), (right, bottom), (right, top), (left, top))
    picture.add(Stroke((*corners, (left, bottom)), 0.25, BLACK))
    metres = LENGTH_UNITS[length_unit]
    step = _tick_step(14.0 / sheet.factor / metres)
    world = [edge / metres for edge in sheet.world]
    sign = -1.0 if names[0].startswith("−") else 1.0
    for value in _ticks(world[0], world[2], step):
        x, _ = sheet.paper(value * metres, 0.0)
        text = _tick_text(sign * value, step)
        picture.add(Stroke(((x, bottom), (x, bottom - 1.2)), 0.2))
        picture.add(Words((x, bottom - 3.0), text, TICK_SIZE, anchor="middle"))
    for value in _ticks(world[1], world[3], step):
        _, y = sheet.paper(0.0, value * metres)
        picture.add(Stroke(((left, y), (left - 1.2, y)), 0.2))
        picture.add(
            Words((left - 1.8, y), _tick_text(value, step), TICK_SIZE, anchor="right")
        )
    middle = 0.5 * (left + right)
    across = f"{names[0].removeprefix('−')} [{length_unit}]"
    picture.add(Words((middle, bottom - 6.2), across, TICK_SIZE, anchor="middle"))
    picture.add(
        Words(
            (2.0, 0.5 * (bottom + top)),
            f"{names[1]} [{length_unit}]",
            TICK_SIZE,
            anchor="middle",
            turn=90.0,
        )
    )
    end = _draw_scale_bar(picture, sheet, scale, length_unit)
    if north is not None:
        _draw_north(picture, sheet, north, end)


def _draw_scale_bar(
    picture: Picture, sheet: Sheet, scale: int, length_unit: str
) -> float:
    """Two fields, the first one filled, together at most half the map.

    Returns where the words beside them end. [mm]
    """
    metres = LENGTH_UNITS[length_unit]
    room = 0.25 * sheet.width / sheet.factor / metres
    step = round_values(room / 10.0, room)[-1]
    length = step * metres * sheet.factor
    y = sheet.bottom - 10.5
    x = sheet.left
    picture.add(Stroke(((x, y), (x + length, y)), 1.4))
    picture.add(
        Stroke(
            (
                (x + length, y - 0.6),
                (x + 2 * length, y - 0.6),
                (x + 2 * length, y + 0.6),
                (x + length, y + 0.6),
            ),
            0.2,
        )
    )
    text = f"{_tick_text(2 * step, step)} {length_unit}, scale 1:{scale}"
    words = Words((x + 2 * length + 2.0, y), text, TICK_SIZE)
    picture.add(words)
    return words.at[0] + words.width


def _draw_north(picture: Picture, sheet: Sheet, north: float, after: float) -> None:
    """An arrow below the right corner, beyond the words of the scale bar. [mm]"""
    turn = math.radians(north)
    x, y = max(sheet.left + sheet.width - 3.0, after + 9.0), sheet.bottom - 10.5
    tip = (x + 2.6 * math.cos(turn), y + 2.6 * math.sin(turn))
    picture.add(Stroke(((2 * x - tip[0], 2 * y - tip[1]), tip), 0.3))
    for side in (150.0, -150.0):
        wing = math.radians(north + side)
        end = (tip[0] + 1.4 * math.cos(wing), tip[1] + 1.4 * math.sin(wing))
        picture.add(Stroke((tip, end), 0.3))
    picture.add(Words((x - 4.5, y), "N", TICK_SIZE, anchor="right"))


def _tick_step(least: float) -> float:
    return round_values(least, 20.0 * least)[0]


def _ticks(low: float, high: float, step: float) -> Sequence[float]:
    first = math.ceil(low / step - 1e-9)
    last = math.floor(high / step + 1e-9)
    return [k * step for k in range(first, last + 1)]


def _tick_text(value: float, step: float) -> str:
    digits = max(0, -math.floor(math.log10(step) + 1e-9))
    return f"{value + 0.0:.{digits}f}".replace("-", "−")
