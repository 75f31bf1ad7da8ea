"""Drawings of the sections of runs: one for all runs that have the same."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from engine.errors import UserError
from engine.layout import Layout
from engine.picture import Picture
from engine.picture.section_drawing import SectionView, overall_text, section_drawing
from engine.report.words import section_text
from engine.runs import Run, Section
from engine.section_words import order_text
from engine.sections import slots

#: Sections of which a drawing is printed.
MOST_SECTIONS = 60

#: Greatest height of a drawing. [mm]
TALLEST = 78.0

#: Sections are smaller than rooms: the unit of their dimensions.
SECTION_UNITS = {"m": "mm", "mm": "mm", "ft": "in", "in": "in"}

_NAMED = 6


@dataclass(frozen=True)
class NumberedSection:
    """A section with its number in the report, "S1", and the runs that have it."""

    number: str
    section: Section
    runs: tuple[Run, ...]


def numbered_sections(layout: Layout) -> tuple[NumberedSection, ...]:
    """The sections of all runs in their order, equal ones once."""
    found: list[tuple[Section, list[Run]]] = []
    by_text: dict[str, list[Run]] = {}
    for run in layout.runs:
        key = repr(run.section)
        if key not in by_text:
            by_text[key] = []
            found.append((run.section, by_text[key]))
        by_text[key].append(run)
    return tuple(
        NumberedSection(f"S{k}", section, tuple(runs))
        for k, (section, runs) in enumerate(found, start=1)
    )


def section_numbers(layout: Layout) -> dict[str, str]:
    """The number of the section of each run, by the run's id."""
    return {
        run.id: each.number for each in numbered_sections(layout) for run in each.runs
    }


def section_pictures(layout: Layout, width: float) -> tuple[tuple[Picture, str], ...]:
    """Drawings of the sections, each `width` wide, and what each shows. [mm]"""
    return tuple(_pictures(layout, width))


def _pictures(layout: Layout, width: float) -> Iterator[tuple[Picture, str]]:
    unit = SECTION_UNITS.get(layout.settings.length_unit, "mm")
    names = {item.id: item.title for item in layout.items()}
    for each in numbered_sections(layout)[:MOST_SECTIONS]:
        try:
            placed = slots(each.section)
        except UserError:
            continue  # told by the remarks
        titles = [run.title for run in each.runs]
        listed = ", ".join(titles[:_NAMED])
        if len(titles) > _NAMED:
            listed += f" and {len(titles) - _NAMED} more"
        text = section_text(each.section, names, unit)
        lines = (
            f"Of {listed}. Looking along the route, {order_text(each.section)}.",
            f"{text[:400]}; {overall_text(placed, unit)}. Dimensions in {unit}.",
        )
        view = SectionView(f"{each.number}", placed, unit, lines)
        shown = f"Section {each.number}. {' '.join(lines)}"
        yield section_drawing(view, width=width, height=TALLEST), shown
