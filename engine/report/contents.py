"""The report's sections in their order."""

from __future__ import annotations

from collections.abc import Sequence

from reportlab.lib.units import mm
from reportlab.platypus import CondPageBreak, Flowable, KeepTogether

import engine
from engine.drawing import Plan
from engine.faults import Remark
from engine.layout import Layout
from engine.picture import MapSubject, map_picture
from engine.report import inputs, sources
from engine.report.figures import Figure
from engine.report.names import Wording
from engine.report.page import Paper
from engine.report.receptor_tables import receptor_section
from engine.report.summary import state_table, summary
from engine.report.text import (
    NOTE,
    TITLE,
    bullets,
    fact_table,
    gap,
    heading,
    paragraph,
    paragraphs,
    subheading,
    table,
)
from engine.report.wording import CAUTIONS, METHOD, NOT_MODELLED, SIGN_OFF
from engine.report.words import place
from engine.report.zone_tables import zone_section
from engine.results import Assessment


class Story:
    """Flowables in order, with numbered headings."""

    def __init__(self) -> None:
        self.flowables: list[Flowable] = []
        self._number = 0

    def section(self, text: str, *parts: Sequence[Flowable], room: float = 0.0) -> None:
        """Add a section; `room` is what its first part needs below the heading. [mm]"""
        self._number += 1
        self.flowables.append(CondPageBreak((room + 16.0) * mm))
        self.flowables += heading(f"{self._number}  {text}")
        for part in parts:
            self.flowables.extend(part)


def story(
    assessment: Assessment,
    remarks: Sequence[Remark],
    maps: Sequence[MapSubject],
    plan: Plan,
    words: Wording,
    paper: Paper,
    left_out: int,
) -> list[Flowable]:
    """All that the report prints, title block aside."""
    layout = assessment.layout
    width = paper.text_width
    told = Story()
    told.flowables += _opening(layout, width)
    told.section("Summary", summary(assessment, words, width), _conclusions(layout))
    _inputs(told, layout, plan, words, width)
    told.section("Remarks not cleared", _remarks(layout, remarks, words, width))
    figures = [_figure(subject, plan, paper) for subject in maps]
    told.section(
        "Maps",
        _maps(figures, left_out),
        room=figures[0].height / mm if figures else 0.0,
    )
    told.section("Zones", zone_section(assessment, words, width))
    told.section("Receptors", receptor_section(assessment, words, width))
    told.section(
        "Method and conventions",
        bullets(METHOD),
        [state_table(width)],
        [paragraph(_program(words), NOTE)],
    )
    told.section("Not modelled, and excluded", bullets(NOT_MODELLED))
    told.section("Cautions and deferrals", bullets(CAUTIONS))
    told.section("Signatures", [_signatures(layout, width)])
    return told.flowables


def _opening(layout: Layout, width: float) -> list[Flowable]:
    title = layout.title
    facts = [
        ("Project", title.project or title.name),
        ("Client", title.client),
        ("Question", title.question),
        ("Scope", title.scope),
        ("Notes", title.note),
    ]
    return [
        paragraph("Magnetic flux density at power frequency, calculated", TITLE),
        fact_table([(matter, text or "not stated") for matter, text in facts], width),
    ]


def _conclusions(layout: Layout) -> list[Flowable]:
    text = layout.title.conclusions
    if not text:
        return []
    return [*subheading("Conclusions of the author"), *paragraphs(text)]


def _inputs(
    told: Story, layout: Layout, plan: Plan, words: Wording, width: float
) -> None:
    links = [link for link in plan.links if link.role == "closing link"]
    closed = [*dict.fromkeys(words.name(link.item) for link in links)]
    told.section(
        "Reference levels as entered", inputs.levels(layout, words.unit, width)
    )
    told.section("Source documents", inputs.documents(layout, width))
    told.section(
        "Circuits and load cases",
        sources.circuits(layout, width),
        subheading("Load cases"),
        sources.load_cases(layout, width),
        *(
            [
                *subheading(f"Currents used in “{case.title}”"),
                *sources.currents(layout, case, width),
            ]
            for case in layout.cases
        ),
    )
    told.section(
        "Runs and equipment",
        sources.runs(layout, width),
        sources.equipment(layout, width),
        sources.joints(layout, closed, width),
    )
    told.section(
        "Rooms, zones and settings as entered",
        inputs.places(layout, width),
        inputs.zones(layout, words.unit, width),
        inputs.settings(layout, words.unit, width),
    )
    told.section("Assumptions", inputs.assumption_list(layout, width))


def _remarks(
    layout: Layout, remarks: Sequence[Remark], words: Wording, width: float
) -> list[Flowable]:
    if remarks:
        rows = [
            (
                r.code,
                r.severity,
                r.sentence,
                ", ".join(words.name(item) for item in r.items),
                place(r.place, words.length_unit) if r.place else "",
                words.name(r.case) if r.case else "every one",
            )
            for r in remarks
        ]
        heads = (
            "Code", "Severity", "Remark", "Items", f"Place [{words.length_unit}]",
            "Load case",
        )  # fmt: skip
        made: list[Flowable] = [table(heads, rows, (6, 10, 46, 16, 12, 10), width)]
    else:
        made = [paragraph("None.")]
    if layout.confirmed_remarks:
        rows_of_confirmed = [
            (c.code, ", ".join(words.name(i) for i in c.items), c.by, c.date, c.note)
            for c in layout.confirmed_remarks
        ]
        heads_of_confirmed = ("Code", "Items", "Let stand by", "Date", "Note")
        made += subheading("Remarks that a named person lets stand")
        made.append(
            table(heads_of_confirmed, rows_of_confirmed, (8, 36, 18, 14, 24), width)
        )
    return made


def _figure(subject: MapSubject, plan: Plan, paper: Paper) -> Figure:
    room = paper.text_height - 20.0
    return Figure(map_picture(subject, plan, width=paper.text_width, height=room))


def _maps(figures: Sequence[Figure], left_out: int) -> list[Flowable]:
    if not figures:
        return [paragraph("No map: there is no zone, or its field is not determined.")]
    made: list[Flowable] = []
    for figure in figures:
        made += [figure, gap(4.0)]
    if left_out:
        made.append(paragraph(f"Heights of zones without a map here: {left_out}."))
    return made


def _program(words: Wording) -> str:
    return (
        f"Lodestead {engine.__version__}. Flux densities in {words.unit} (A/m through "
        f"µ0 of air), lengths in {words.length_unit}, angles in degrees; inside the "
        "program SI units and double precision."
    )


def _signatures(layout: Layout, width: float) -> Flowable:
    title = layout.title
    rows = [
        ("Prepared", title.prepared_by, "\n\n", ""),
        ("Checked", title.checked_by, "\n\n", ""),
        ("Approved", title.approved_by, "\n\n", ""),
    ]
    heads = ("Role", "Name", "Signature", "Date")
    lines = table(heads, rows, (16, 34, 34, 16), width)
    return KeepTogether([paragraph(SIGN_OFF), lines])
