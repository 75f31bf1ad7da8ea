"""The first page, the table of contents, and where usual questions are answered."""

from __future__ import annotations

import base64
import binascii
import io

from reportlab.lib.units import mm
from reportlab.lib.utils import ImageReader
from reportlab.platypus import Flowable

from engine.embedded_picture import DAMAGE, TooManyPixels, decoded
from engine.report.choices import Paper
from engine.report.figures import Logo
from engine.report.matter import Matter
from engine.report.names import Wording
from engine.report.story import Story
from engine.report.summary import summary
from engine.report.text import (
    HEADING,
    NOTE,
    TITLE,
    ContentsLine,
    Heading,
    fact_table,
    gap,
    paragraph,
    paragraphs,
    table,
)
from engine.report.wording import QUESTIONS

#: Largest logo. [mm]
LOGO = (60.0, 18.0)

#: Lines of an address.
_ADDRESS = 6

#: Longer conclusions stand in their own section only.
_SHORT = 700

HEADLINE = "Magnetic flux density at power frequency, calculated"


def letterhead(matter: Matter, most: int = 800) -> list[Flowable]:
    """The house's logo and address, or what keeps the logo from being printed."""
    title = matter.layout.title
    made: list[Flowable] = []
    if title.logo:
        try:
            data = base64.b64decode(title.logo, validate=True)
            wide, high = decoded(data).size
        except (binascii.Error, TooManyPixels, *DAMAGE):
            made.append(paragraph("The logo is damaged and not printed.", NOTE))
        else:
            scale = min(LOGO[0] * mm / wide, LOGO[1] * mm / high)
            picture = Logo(io.BytesIO(data), wide * scale, high * scale, hAlign="LEFT")
            # Read once: the file is laid out several times.
            picture._img = ImageReader(io.BytesIO(data))
            made += [picture, gap(2.0)]
    if title.letterhead:
        lines = title.letterhead[:most].split("\n")[:_ADDRESS]
        made += [*paragraphs("\n".join(lines)), gap(2.0)]
    return made


def front_page(
    matter: Matter, words: Wording, sheet: Paper, told: Story
) -> list[Flowable]:
    """Title, question, and the summary on one page."""
    title, width = matter.layout.title, sheet.text_width
    cases = [case.title for case in matter.layout.cases if case.counted]
    facts = [
        ("Project", title.project or title.name),
        ("Client", title.client),
        ("Variant", _variant(matter)),
        ("Question", title.question[:1500]),
        ("Load cases that count", ", ".join(cases)[:600]),
        ("Scope", title.scope[:1000]),
    ]
    facts = [(matter_of, text or "not stated") for matter_of, text in facts]
    made = letterhead(matter)
    made += [paragraph(HEADLINE, TITLE), fact_table(facts, width)]
    made.append(Heading("Summary", HEADING, 0, "summary"))
    made += summary(matter, words, width, told)
    text = title.conclusions
    if text and len(text) <= _SHORT:
        made.append(paragraph("Conclusions of the author", HEADING))
        made += paragraphs(text)
    elif text:
        made.append(
            paragraph(f"Conclusions of the author: {told.page('conclusions')}.")
        )
    return made


def _variant(matter: Matter) -> str:
    """What is reported on: the base, or which variant of it."""
    if matter.variant is None:
        others = len(matter.source.variants)
        return f"base; its variants are options: {others}" if others else "base"
    note = matter.variant.note[:600]
    text = f"{matter.variant.title}: the base with the changes of this variant"
    return f"{text}. {note}" if note else text


def overview(told: Story) -> list[Flowable]:
    """The table of contents, and the page that answers each usual question."""
    made: list[Flowable] = [Heading("Contents", HEADING, 0, "contents")]
    made.append(ContentsLine("Summary", "summary", told.pages.get("summary")))
    made += [ContentsLine(t, key, told.pages.get(key)) for key, t in told.titles]
    made.append(gap(4.0))
    made.append(Heading("Questions often asked", HEADING, 0, "questions"))
    rows = [
        (question, ", ".join(dict.fromkeys(told.page(key) for key in keys)))
        for question, keys in QUESTIONS
    ]
    heads = ("A reviewer asks", "Answered on")
    made.append(table(heads, rows, (72, 28), told.sheet.text_width))
    return made
