"""Scope and exclusions: what was looked at, and what was left out."""

from __future__ import annotations

from collections.abc import Sized

from reportlab.platypus import Flowable

from engine.report.matter import Matter
from engine.report.text import bullets, fact_table, paragraph, paragraphs, subheading
from engine.report.wording import NOT_MODELLED
from engine.report.words import length


def scope(matter: Matter, width: float) -> list[Flowable]:
    """What was looked at, in the author's words and in numbers; what was left out."""
    layout = matter.layout
    title, unit = layout.title, layout.settings.length_unit
    found = sorted({f for case in matter.assessment.cases for f in case.frequencies})
    at = ", ".join("DC" if f == 0 else f"{f:g} Hz" for f in found[:40])
    more = f" and {len(found) - 40} more" if len(found) > 40 else ""
    heights = sorted({h for zone in layout.zones for h in zone.heights})
    above = ", ".join(length(h, unit) for h in heights[:40])
    facts = [
        ("Areas", f"{_of(layout.zones, 'zone')}, {_of(layout.receptors, 'receptor')}"),
        ("Heights above the zones' floors", f"{above} {unit}" if above else "none"),
        ("Frequencies of the currents", at + more or "no current flows"),
        ("Load cases", f"{len(layout.cases)}, of which {_counted(matter)} counted"),
        (
            "Sources",
            f"{_of(layout.circuits, 'circuit')}, {_of(layout.runs, 'run')}, "
            f"{_of(layout.equipment, 'piece')} of equipment",
        ),
    ]
    made: list[Flowable] = [
        *(paragraphs(title.scope) or [paragraph("The author states no scope.")]),
        fact_table(facts, width),
        *subheading("Left out by the author"),
        *(paragraphs(title.exclusions) or [paragraph("Nothing is stated.")]),
        *subheading("Never modelled by the program"),
        *bullets(NOT_MODELLED),
    ]
    if title.note:
        made += [*subheading("Notes of the author"), *paragraphs(title.note)]
    return made


def _of(items: Sized, noun: str) -> str:
    """ "1 zone", "3 zones"."""
    return f"{len(items)} {noun}{'' if len(items) == 1 else 's'}"


def _counted(matter: Matter) -> int:
    return sum(case.counted for case in matter.layout.cases)
