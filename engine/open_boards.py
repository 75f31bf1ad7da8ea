"""Zones where workers stand at an enclosure that is open for work.

What the field there says nothing about is told wherever the cautions are. Import
place: after `masks`.
"""

from __future__ import annotations

from engine.layout import Layout
from engine.masks import open_for_work
from engine.sampling import area_of

#: Who stands nearer than this to an open enclosure works at it: arm's reach. [m]
REACH = 1.0


def open_board_sentences(layout: Layout) -> tuple[str, ...]:
    """One sentence for each zone of workers within reach of an open enclosure."""
    opened = [
        enclosure
        for enclosure in layout.enclosures
        if any(open_for_work(enclosure, case) for case in layout.cases)
    ]
    found: list[str] = []
    for zone in layout.zones:
        if zone.category != "workers":
            continue
        area = area_of(zone.outline)
        names = [
            f"“{enclosure.title}”"
            for enclosure in opened
            if area_of(enclosure.footprint).distance(area) <= REACH
        ]
        if names:
            found.append(
                f"Zone “{zone.title}” is for workers at {' and '.join(names)}, open "
                "for work: its values say nothing about electric shock, arc flash, "
                "work on live parts or implants."
            )
    return tuple(found)
