"""The note: one to two pages with question, picture, table, assumptions, cautions."""

from __future__ import annotations

from dataclasses import dataclass, replace

from reportlab.platypus import Flowable, PageBreak

from engine.decisions import worst_comparisons
from engine.drawing import plan
from engine.field_words import field_words
from engine.open_boards import open_board_sentences
from engine.origins import assumptions
from engine.picture import Picture, map_picture
from engine.picture.room_drawing import room_drawing
from engine.printed_text import one_line
from engine.report.choices import Paper
from engine.report.drawings import room_views
from engine.report.figures import Figure
from engine.report.front import HEADLINE, letterhead
from engine.report.maps import plan_of_map
from engine.report.matter import HeightMap, Matter
from engine.report.names import Wording
from engine.report.summary import at_risk, state_text
from engine.report.text import (
    NOTE,
    SMALL_BULLET,
    STRONG,
    TITLE,
    bullets,
    fact_table,
    gap,
    paragraph,
    part_heading,
    table,
)
from engine.report.wording import NO_LEVELS, NOTE_CAUTIONS
from engine.report.words import place
from engine.results import STATES, Comparison
from engine.units import text_beside

#: Characters of a name.
_NAME = 60

#: Zones at open enclosures that are named.
_MOST_BOARDS = 3

#: A note has no more pages.
MOST_PAGES = 2


@dataclass(frozen=True)
class Room:
    """How much of everything a note holds: its length follows from it.

    `picture` is the part of a page that the picture may take where it has no sheet of
    its own; `text` the most characters of a text of the author.
    """

    rows: int
    assumed: int
    remarks: int
    picture: float
    text: int


#: Part of the text's height that a picture takes on a sheet of its own.
_OWN_SHEET = 0.96

#: Tried one after the other until the note is short enough.
ROOMS = (
    Room(12, 8, 5, 0.6, 1500),
    Room(8, 6, 4, 0.52, 700),
    Room(5, 4, 3, 0.5, 400),
    Room(3, 3, 2, 0.45, 200),
    Room(3, 1, 1, 0.4, 120),
)

#: Tried for a note that is only a little longer than a page.
ON_ONE_PAGE = tuple(replace(ROOMS[1], picture=part) for part in (0.52, 0.48, 0.44))


def note_story(
    matter: Matter, words: Wording, sheet: Paper, room: Room
) -> list[Flowable]:
    """All that the note prints, title block aside."""
    title, width = matter.layout.title, sheet.text_width
    cases = [case.title for case in matter.layout.cases if case.counted]
    facts = [
        ("Question", brief(title.question, room.text) or "not stated"),
        *([] if matter.variant is None else [("Variant", brief(matter.shown, 120))]),
        ("Load cases that count", brief(", ".join(cases), 300)),
        ("Scope", brief(title.scope, room.text) or "not stated"),
    ]
    made = letterhead(matter, most=120)
    made += [paragraph(HEADLINE, TITLE), fact_table(facts, width)]
    made += _answer(matter, words, width, room)
    picture = _picture(matter, sheet, room)
    # Beside text a sheet that lies is too low for a picture: it has one of its own.
    if picture is not None and sheet.orientation == "portrait":
        made += [gap(1.0), Figure(*picture), gap(1.0)]
    made += part_heading("Assumptions")
    made += bullets(_assumed(matter, words, room), SMALL_BULLET)
    made += _open_remarks(matter, room)
    made += part_heading("Cautions")
    made += bullets([*NOTE_CAUTIONS, *_open_boards(matter)], SMALL_BULLET)
    if title.conclusions:
        made += part_heading("Conclusions of the author")
        made += [paragraph(brief(title.conclusions, room.text))]
    last = matter.identity.sentence() + ". The full report has the rest."
    made += [gap(1.5), paragraph(last, NOTE)]
    if picture is not None and sheet.orientation == "landscape":
        made += [PageBreak(), Figure(*picture)]
    return made


def brief(text: str, most: int) -> str:
    """A text on one line, cut where it is longer than a note has room for."""
    line = one_line(text)
    return line if len(line) <= most else line[: most - 1].rstrip() + "…"


def _answer(matter: Matter, words: Wording, width: float, room: Room) -> list[Flowable]:
    assessment = matter.assessment
    blocking = [r for r in matter.remarks if r.severity == "blocking"]
    made: list[Flowable] = []
    if blocking:
        text = f"Not evaluable: {len(blocking)} remarks block. {blocking[0].sentence}"
        made.append(paragraph(brief(text, 400), STRONG))
    found = sorted(worst_comparisons(assessment), key=_concern, reverse=True)
    if found:
        heads = (
            "Place, reference level", "Load case", f"B [{words.unit}]",
            f"L [{words.unit}]", "B/L", f"U [{words.unit}]", "State in words",
        )  # fmt: skip
        rows = [_row(c, words) for c in found[: room.rows]]
        made.append(table(heads, rows, (25, 16, 10, 10, 8, 8, 23), width))
        if len(found) > room.rows:
            text = f"More comparisons, in the report: {len(found) - room.rows}."
            made.append(paragraph(text))
        return made
    if not assessment.layout.levels:
        made.append(paragraph(NO_LEVELS, STRONG))
    rows = [
        (
            brief(zone.zone.title, _NAME),
            brief(words.name(m.case), _NAME),
            f"{words.value(m.value)} ({m.kind})",
            place(m.details.at, words.length_unit),
        )
        for zone in assessment.zones
        for m in zone.maxima
    ]
    if rows:
        heads_of_values = (
            "Zone", "Load case", f"Largest B [{words.unit}]",
            f"At x, y, z [{words.length_unit}]",
        )  # fmt: skip
        values = table(heads_of_values, rows[: room.rows], (34, 26, 18, 22), width)
        made.append(values)
    return made


def _concern(c: Comparison) -> tuple[int, float]:
    return STATES.index(c.state), c.ratio or -1.0


def _row(c: Comparison, words: Wording) -> tuple[str, ...]:
    several = "per frequency" if c.ratio is not None else "–"
    state = state_text(c)
    if c.state == "not evaluable" and not at_risk(c):
        state = brief(state, 160)
    return (
        f"{brief(words.name(c.place), _NAME)}\n{brief(words.name(c.level), _NAME)}",
        brief(words.name(c.case), _NAME),
        words.beside(c.value, c.level_value),
        words.limit(c.level_value) if c.level_value is not None else several,
        "–" if c.ratio is None else text_beside(c.ratio, 1.0),
        words.value(c.uncertainty),
        state,
    )


def _leading_map(matter: Matter) -> HeightMap | None:
    """The map on which the value of most concern was found, else the first."""
    ordered = sorted(worst_comparisons(matter.assessment), key=_concern, reverse=True)
    names = {zone.id: zone.title for zone in matter.layout.zones}
    for c in ordered:
        if c.details is None:
            continue
        for each in matter.maps:
            near = abs(each.z - c.details.at[2]) < 1e-3
            if near and each.case.id == c.case and names.get(c.place) in each.zones:
                return each
    return matter.maps[0] if matter.maps else None


def _picture(matter: Matter, sheet: Paper, room: Room) -> tuple[Picture, str] | None:
    """The picture of the note, and what it shows."""
    part = room.picture if sheet.orientation == "portrait" else _OWN_SHEET
    width, height = sheet.text_width, part * sheet.text_height
    leading = _leading_map(matter)
    if leading is not None:
        whole = plan(matter.layout, matter.conductors)
        shown = plan_of_map(whole, leading)
        subject = leading.subjects[0]
        drawn = map_picture(subject, shown, width=width, height=height)
        return drawn, f"Map, {subject.title}"
    views = room_views(matter)
    if not views:
        return None
    return room_drawing(views[0], width=width, height=height), views[0].title


def _assumed(matter: Matter, words: Wording, room: Room) -> list[str]:
    # Those about which the author says something first.
    found = sorted(assumptions(matter.layout), key=lambda a: not a.reason)
    if not found:
        return ["Every entered value has an origin."]
    kinds = {item.id: type(item) for item in matter.layout.items()}
    texts = [
        f"{words.name(a.item)}, {field_words(a.field, kinds.get(a.item))}: {a.value}"
        + (f" ({a.reason})" if a.reason else "")
        for a in found[: room.assumed]
    ]
    texts = [brief(text, 200) for text in texts]
    if len(found) > room.assumed:
        texts.append(f"and {len(found) - room.assumed} more, listed in the report")
    return texts


def _open_boards(matter: Matter) -> list[str]:
    """What the values do not say where workers stand at an open enclosure."""
    found = open_board_sentences(matter.layout)
    texts = [brief(text, 300) for text in found[:_MOST_BOARDS]]
    if len(found) > _MOST_BOARDS:
        texts.append(f"and {len(found) - _MOST_BOARDS} more such zones")
    return texts


def _open_remarks(matter: Matter, room: Room) -> list[Flowable]:
    if not matter.remarks:
        return []
    shown = [f"{r.code} {r.severity}: {r.sentence}" for r in matter.remarks]
    shown = [brief(text, 300) for text in shown]
    more = len(shown) - room.remarks
    texts = shown[: room.remarks]
    if more > 0:
        texts.append(f"and {more} more, listed in the report")
    return [
        *part_heading("Remarks not cleared"),
        *bullets(texts, SMALL_BULLET),
    ]
