"""Method and conventions, and the outside checks that were run."""

from __future__ import annotations

from collections.abc import Sequence

from reportlab.platypus import Flowable

from engine.report.matter import Matter
from engine.report.names import Wording
from engine.report.text import (
    NOTE,
    bullets,
    paragraph,
    subheading,
    table,
    whole_height,
)
from engine.report.wording import METHOD, METHOD_ASSUMPTIONS
from engine.units import significant
from engine.validation import NEAR_FIELD, Outcome, near_field_rows

#: What is kept on one page, if there is as much room on it. [mm]
_TALLEST = 130.0


def method(matter: Matter, words: Wording, width: float) -> list[Flowable]:
    """Formulas, conventions, discretisation, search, program."""
    made: list[Flowable] = bullets(METHOD)
    made += subheading("What the method assumes, and which way it acts")
    rows = [(f"M{k}", *row) for k, row in enumerate(METHOD_ASSUMPTIONS, start=1)]
    made.append(table(("No.", "Assumption", "Effect"), rows, (6, 54, 40), width))
    notes = _angle_notes(matter)
    if notes:
        made += subheading("Angles that are unknown or were assumed")
        made += bullets(notes)
    searched = [
        f"{z.zone.title}: {z.searched}" for z in matter.assessment.zones if z.searched
    ]
    if searched:
        made += subheading("How the largest value of each zone was looked for")
        made += bullets(searched)
    text = (
        f"Flux densities in {words.unit} (A/m through µ0 of air), lengths in "
        f"{words.length_unit}, angles in degrees; inside the program SI units and "
        "double precision."
    )
    made += [*subheading("Program"), paragraph(matter.identity.sentence() + ".")]
    return [*made, paragraph(text, NOTE)]


def _angle_notes(matter: Matter) -> list[str]:
    names = {circuit.id: circuit.title for circuit in matter.layout.circuits}
    found: dict[str, None] = {}
    for result in matter.assessment.cases:
        for note in result.angle_notes:
            at = "" if note.frequency is None else f" at {note.frequency:g} Hz"
            circuit = names.get(note.circuit, note.circuit)
            found[f"{circuit}: {note.kind}{at} (in “{result.case.title}”)"] = None
    return list(found)


def validation(outcomes: Sequence[Outcome], width: float) -> list[Flowable]:
    """The outside checks with what this program computed for them just now."""
    agree = sum(outcome.agrees for outcome in outcomes)
    text = (
        f"{len(outcomes)} published or textbook values, computed by this program when "
        f"this report was written: {agree} within their tolerance, "
        f"{len(outcomes) - agree} outside. Deviation: computed less published."
    )
    rows = [
        (
            outcome.check.id,
            outcome.check.case,
            _value(outcome.check.published, outcome.check.unit),
            _value(outcome.value, outcome.check.unit),
            _deviation(outcome),
            _tolerance(outcome),
            outcome.check.source
            + (" (from memory)" if outcome.check.from_memory else ""),
        )
        for outcome in outcomes
    ]
    heads = (
        "No.", "Case", "Published", "Computed", "Deviation", "Tolerance", "Source",
    )  # fmt: skip
    checked = table(heads, rows, (11, 25, 13, 13, 11, 12, 25), width)
    return [paragraph(text), checked, *_near_field(width)]


def _near_field(width: float) -> list[Flowable]:
    """The error near bars and cables, by distance from the surface."""
    # A row for each distance: there are more of them than formations.
    heads, *rows = zip(*near_field_rows(), strict=True)
    columns = (14.0, *(86.0 / (len(heads) - 1) for _ in heads[1:]))
    made = table(heads, rows, columns, width)
    # The formations are compared down the columns: one page, as on any paper.
    room = min(whole_height(made) + 25.0, _TALLEST)
    title = "Error near conductors, by distance from the surface"
    return [*subheading(title, room=room), paragraph(NEAR_FIELD), made]


_RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def _value(value: float, unit: str, digits: int = 5) -> str:
    """A value with its unit; a small one as a number times a power of ten.

    >>> _value(-6e-05, "T"), _value(0.5, "1", 2)
    ('−6.0000·10⁻⁵ T', '0.50')
    """
    text = significant(value, digits)
    if value != 0 and abs(value) < 1e-3:
        number, _, power = f"{value:.{digits - 1}e}".partition("e")
        text = f"{number}·10{str(int(power)).translate(_RAISED)}"
    text = text.replace("-", "−")
    return text if unit == "1" else f"{text} {unit}"


def _deviation(outcome: Outcome) -> str:
    relative = outcome.relative_deviation
    if relative is None:
        return _value(outcome.deviation, outcome.check.unit, 2)
    return f"{100 * relative:+.3f} %".replace("-", "−")


def _tolerance(outcome: Outcome) -> str:
    word = "within" if outcome.agrees else "OUTSIDE"
    return f"{word} {_value(outcome.check.tolerance, outcome.check.unit, 2)}"
