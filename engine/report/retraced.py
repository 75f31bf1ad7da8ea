"""Values taken apart into conductors, at the places of most concern."""

from __future__ import annotations

from reportlab.platypus import Flowable

from engine.report.matter import Matter, TracedPlace
from engine.report.names import Wording
from engine.report.text import paragraph, subheading, table
from engine.report.words import frequency_text, length, place
from engine.retrace import RetraceRow
from engine.section_currents import phasor_text

#: Rows of one place; the attached file has all.
_MOST_ROWS = 16

EXPLAINED = (
    "The RMS resultant at a point as the sum over conductors and frequencies: the "
    "share of each is the part of its field along the whole field, negative where it "
    "weakens it. A reader can compute each from current, distance and direction."
)


def retraced(matter: Matter, words: Wording, width: float) -> list[Flowable]:
    """A table for each place; empty without any."""
    made: list[Flowable] = []
    for k, traced in enumerate(matter.traced):
        title = f"{traced.title} taken apart by conductor"
        made += subheading(title, "retraced" if k == 0 else "")
        if k == 0:
            made.append(paragraph(EXPLAINED))
        made += _one(traced, words, width)
    return made


def _named(row: RetraceRow, words: Wording) -> str:
    """A conductor by the name of its item, and its place there."""
    return words.name(row.item) + row.conductor.removeprefix(row.item).replace(
        "/", ", ", 1
    )


def _one(traced: TracedPlace, words: Wording, width: float) -> list[Flowable]:
    found = traced.found
    at = place(found.at, words.length_unit)
    text = (
        f"At ({at}) {words.length_unit}, “{words.name(found.case)}”, {found.kind}: "
        f"{words.value(found.total)} {words.unit}"
    )
    if found.is_bound:
        bound = f"{words.value(found.shown)} {words.unit}"
        text += f" with angles as entered; {bound} as bound: {found.bound_reason}"
    ordered = sorted(found.rows, key=lambda row: -abs(row.share))
    rows = [
        (
            _named(row, words),
            row.role,
            frequency_text(row.frequency),
            phasor_text(row.current),
            length(row.distance, words.length_unit),
            *(words.value(share).replace("-", "−") for share in row.shares),
            words.value(row.share).replace("-", "−"),
        )
        for row in ordered[:_MOST_ROWS]
    ]
    rest = ordered[_MOST_ROWS:]
    if rest:
        left = sum(row.share for row in rest)
        shown = words.value(left).replace("-", "−")
        rows.append((f"{len(rest)} more", "", "", "", "", "", "", "", shown))
    rows.append(("sum", "", "", "", "", "", "", "", words.value(found.total)))
    heads = (
        "Conductor", "Part of", "At", "Current", f"Distance [{words.length_unit}]",
        f"x [{words.unit}]", f"y [{words.unit}]", f"z [{words.unit}]",
        f"Share [{words.unit}]",
    )  # fmt: skip
    made = table(heads, rows, (19, 9, 9, 15, 10, 9, 9, 9, 11), width)
    return [paragraph(text + "."), made]
