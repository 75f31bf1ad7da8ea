"""The appendix: the full input as text, and the files inside the PDF."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache

from msgspec.structs import replace

from engine.errors import UserError
from engine.layout import Layout
from engine.layout_file import encode
from engine.printed_text import printable, wrapped
from engine.report.attachments import Attachment
from engine.report.matter import Matter
from engine.report.scripts import remarks_on
from engine.report.story import Story
from engine.report.text import Lines, paragraph, table

#: Longer input is printed in part; the attached file has all of it.
MOST_LINES = 12_000

VARIANT = (
    "The variant “{title}” is applied to what is printed below. The attached file has "
    "the base and every variant; choose this one there to have this report again."
)
#: Width of a column of the printed input, and at least between columns. [mm]
_COLUMN, _APART = 90.0, 4.0

ATTACHED = (
    "These files are part of the PDF; a viewer lists them as attachments. The layout "
    "file opens in the program and gives this report again."
)
PRINTED = (
    "What was entered, as the layout file has it; values left out have the program's "
    "defaults. Embedded pictures and the results of issued revisions are left out "
    "here; the attached file has them."
)


def appendix(told: Story, matter: Matter, attachments: Sequence[Attachment]) -> None:
    """Add the appendix to the story."""
    width = told.sheet.text_width
    if attachments:
        rows = [
            (each.name, each.about, f"{len(each.content):,}", each.sha256)
            for each in attachments
        ]
        heads = ("File", "Holds", "Bytes", "SHA-256")
        listed = table(heads, rows, (22, 34, 10, 34), width)
        told.section(
            "attachments", "Attached files", [paragraph(ATTACHED), listed], number="A"
        )
    else:
        text = "Omitted: the document was made without attachments."
        told.section("attachments", "Attached files", [paragraph(text)], number="A")
    columns = max(1, round(width / _COLUMN))
    room = 72 / 25.4 * (width - (columns - 1) * _APART) / columns
    lines = input_lines(matter.layout, round(room))
    said = [PRINTED, *remarks_on("".join(lines))]
    if matter.variant is not None:
        said.insert(1, VARIANT.format(title=matter.variant.title))
    told.section("input", "Full input", [paragraph(t) for t in said], number="B")
    told.add([Lines(lines[:MOST_LINES], columns)])
    if len(lines) > MOST_LINES:
        left = len(lines) - MOST_LINES
        told.add([paragraph(f"{left:,} more lines: see the attached layout file.")])


@lru_cache(maxsize=2)
def input_lines(layout: Layout, width: int) -> tuple[str, ...]:
    """The layout file as lines that fit into a width. [pt]"""
    lines: list[str] = []
    for line in printed_input(layout).split("\n"):
        indent = line[: len(line) - len(line.lstrip())]
        room = width - 2.0 * len(indent)
        for k, part in enumerate(wrapped(line, Lines.SIZE, room)):
            lines.append(indent + ("  " if k else "") + part)
    return tuple(lines)


def printed_input(layout: Layout) -> str:
    """The text of the layout file without pictures and results that were issued."""
    drawings = [
        replace(d, picture=_left_out(d.picture)) for d in layout.backing_drawings
    ]
    slim = replace(
        layout,
        title=replace(layout.title, logo=_left_out(layout.title.logo)),
        backing_drawings=tuple(drawings),
        revisions=tuple(replace(r, results=()) for r in layout.revisions),
    )
    try:
        return printable(encode(slim).decode("utf-8"))
    except UserError as error:
        return str(error)


def _left_out(picture: str) -> str:
    return f"picture of {len(picture)} characters, left out" if picture else ""
