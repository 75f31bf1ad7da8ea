"""Reference levels as lines on a map, where a line can say something true."""

from __future__ import annotations

from collections.abc import Iterable

from engine.layout import Layout
from engine.levels import level_at, what_is_missing
from engine.picture.subject import ReferenceLine


def reference_lines(
    layout: Layout, frequencies: Iterable[float]
) -> tuple[tuple[ReferenceLine, ...], str]:
    """The levels that a map can show, and a note for its legend.

    Parameters
    ----------
    frequencies : float
        Of the currents whose field the map shows: AC, or 0 Hz alone. [Hz]

    Notes
    -----
    A line compares the whole resultant with the level at one frequency: the supply's,
    or the only one. Where several frequencies flow the note says so. Levels of peak or
    axis values, and those that lack a source, a category or a value, are not drawn.
    """
    flowing = sorted(set(frequencies))
    if not flowing or not layout.levels:
        return (), ""
    at = layout.settings.frequency
    if at not in flowing:
        at = flowing[0]
    drawn = []
    left_out = 0
    for level in layout.levels:
        value = level_at(level, at)
        fits = level.basis == "RMS" and level.component == "resultant"
        if value is None or not fits or what_is_missing(level):
            left_out += 1
        else:
            drawn.append(ReferenceLine(level.title, value))
    note = f"reference level at {at:g} Hz" if drawn else ""
    if drawn and len(flowing) > 1:
        note += "; comparisons count every frequency, this line only the resultant"
    if left_out:
        more = f"reference levels not drawn: {left_out}"
        note = f"{note}. {more}" if note else more
    return tuple(drawn), note
