"""The end of the report: remarks, conclusions, revisions issued, signatures."""

from __future__ import annotations

from reportlab.platypus import Flowable, KeepTogether

from engine.report.matter import Matter
from engine.report.names import Wording
from engine.report.text import paragraph, paragraphs, subheading, table
from engine.report.wording import SIGN_OFF
from engine.report.words import place
from engine.revisions import as_issued


def remarks(matter: Matter, words: Wording, width: float) -> list[Flowable]:
    """Remarks that are not cleared, and those that a named person lets stand."""
    if matter.remarks:
        rows = [
            (
                r.code,
                r.severity,
                r.sentence,
                ", ".join(words.name(item) for item in r.items),
                place(r.place, words.length_unit) if r.place else "",
                words.name(r.case) if r.case else "every one",
            )
            for r in matter.remarks
        ]
        heads = (
            "Code", "Severity", "Remark", "Items", f"Place [{words.length_unit}]",
            "Load case",
        )  # fmt: skip
        made: list[Flowable] = [table(heads, rows, (7, 9, 43, 16, 12, 13), width)]
    else:
        made = [paragraph("None.")]
    if matter.layout.confirmed_remarks:
        sentences = {id(by): remark.sentence for remark, by in matter.confirmed}
        rows_of_confirmed = [
            (
                c.code,
                sentences.get(id(c), "It does not arise any more."),
                ", ".join(words.name(i) for i in c.items),
                c.by,
                c.date,
                c.note,
            )
            for c in matter.layout.confirmed_remarks
        ]
        heads_of_confirmed = (
            "Code", "Remark", "Items", "Let stand by", "Date", "Note",
        )  # fmt: skip
        shares = (7, 36, 16, 13, 10, 18)
        made += subheading("Remarks that a named person lets stand")
        made.append(table(heads_of_confirmed, rows_of_confirmed, shares, width))
    return made


def conclusions(matter: Matter) -> list[Flowable]:
    """The author's own text; the program concludes nothing."""
    text = matter.layout.title.conclusions
    if not text:
        return [
            paragraph(
                "Left to the author, who has entered none. The program draws no "
                "conclusion. A measurement when the installation is put to use, at the "
                "places and heights of this report and with the currents read at the "
                "same time, is what confirms it."
            )
        ]
    return paragraphs(text)


def revisions(matter: Matter, width: float) -> list[Flowable]:
    """What left the house before, and whether this layout is as it was issued."""
    layout = matter.source
    if not layout.revisions:
        return [paragraph("No revision of this layout was issued yet.")]
    rows = [
        (
            r.revision,
            r.date,
            r.program_version,
            f"layout {r.layout_digest}\nresults {r.results_digest}",
            r.note,
        )
        for r in layout.revisions
    ]
    heads = ("Revision", "Date", "Program", "Digests (SHA-256)", "Note")
    last = layout.revisions[-1]
    text = (
        f"This layout is as it was issued as revision {last.revision}."
        if as_issued(layout, last)
        else f"This layout was edited after revision {last.revision} was issued."
    )
    return [table(heads, rows, (10, 12, 12, 48, 18), width), paragraph(text)]


def signatures(matter: Matter, width: float) -> list[Flowable]:
    """The house's closing text, competence, and lines to sign on."""
    title = matter.layout.title
    made: list[Flowable] = [*paragraphs(title.closing)]
    made += subheading("Competence of those who sign")
    stated = paragraphs(title.competence)
    made += stated or [paragraph("Nothing is stated; ask those who sign.")]
    rows = [
        ("Prepared", title.prepared_by, "\n\n", ""),
        ("Checked", title.checked_by, "\n\n", ""),
        ("Approved", title.approved_by, "\n\n", ""),
    ]
    heads = ("Role", "Name", "Signature", "Date")
    lines = table(heads, rows, (16, 34, 34, 16), width)
    return [*made, KeepTogether([paragraph(SIGN_OFF), lines])]
