"""Text from right to left: its order on paper, joined letters, what a reader is told.

Orders follow UAX 9 (Unicode bidirectional algorithm), forms the chart of Arabic
Presentation Forms-B; both worked out by hand.
"""

from __future__ import annotations

import io

import pytest
from pypdf import PdfReader
from test_report_hard_cases import filled_matter, with_title
from test_report_samples import assert_within_margins
from test_report_structure import check, elements

from engine.printed_text import BOLD, REGULAR
from engine.report.choices import Choices
from engine.report.directions import displayed, joined
from engine.report.document import report_pdf
from engine.report.scripts import ScriptCanvas

SHALOM = "שלום"


@pytest.mark.parametrize(
    ("read", "drawn"),
    [
        ("Bar L1 (old)", "Bar L1 (old)"),
        (SHALOM, "םולש"),
        (f"Bar {SHALOM} L1", "Bar םולש L1"),
        # Digits keep their order, brackets turn with the text around them.
        (f"{SHALOM} (12)", "(12) םולש"),
        (f"{SHALOM} 400 V", "400 םולש V"),
        # A value stays behind the name that it is of, though the name ends on a digit.
        (f"Zone {SHALOM} 12, 7.5 µT", "Zone 12 םולש, 7.5 µT"),
        (f"Zone “{SHALOM}” 7.5 µT", "Zone “םולש” 7.5 µT"),
        # meem, reh, hah, beh, alef: reh joins to nothing after it.
        ("مرحبا", "\ufe8e\ufe92\ufea3\ufeae\ufee3"),
    ],
)
def test_a_line_is_drawn_in_its_order_on_paper(read, drawn):
    assert displayed(read) == drawn


def test_a_line_of_a_paragraph_from_the_right_is_turned_as_a_whole():
    assert displayed(f"{SHALOM} L1", from_right=True) == "L1 םולש"
    assert displayed(f"{SHALOM} L1", from_right=False) == "םולש L1"


@pytest.mark.parametrize(
    ("read", "drawn"),
    [
        ("ب", "\ufe8f"),
        ("بب", "\ufe91\ufe90"),
        ("ببب", "\ufe91\ufe92\ufe90"),
        ("اب", "\ufe8d\ufe8f"),
        # lam and alef are one letter, in a word and alone.
        ("لا", "\ufefb"),
        ("سلام", "\ufeb3\ufefc\ufee1"),
        # A mark over a letter parts nothing.
        ("ب\u064eب", "\ufe91\u064e\ufe90"),
        ("ب ب", "\ufe8f \ufe8f"),
    ],
)
def test_arabic_letters_join(read, drawn):
    assert joined(read) == drawn


def test_the_fonts_have_the_joined_forms():
    from fontTools.ttLib import TTFont

    text = joined("ابتثجحخدذرزسشصضطظعغفقكلمنهوي لا بببببب")
    for path in (REGULAR, BOLD):
        known = TTFont(path).getBestCmap()
        assert [c for c in text if ord(c) not in known] == []


@pytest.mark.parametrize("kind", ["report", "note"])
def test_a_reader_who_cannot_see_is_told_the_text_as_it_was_typed(kind):
    name = f"{SHALOM} 12 (مرحبا)"
    data = report_pdf(with_title(project=name, question=name), Choices(kind=kind))
    document = check(PdfReader(io.BytesIO(data)))
    told = [e["/ActualText"] for e in elements(document) if "/ActualText" in e]
    assert name in told
    assert_within_margins(data)


def test_strings_reach_the_paper_in_order(monkeypatch):
    drawn = []

    def note(self, x, y, text, *rest, **options):
        drawn.append(text)

    monkeypatch.setattr(ScriptCanvas, "draw_ordered", note)
    report_pdf(filled_matter(f"Bar {SHALOM} 12"), Choices(kind="note"))
    assert any("םולש" in text for text in drawn)
    assert not any(SHALOM in text for text in drawn)


def test_a_long_paragraph_from_the_right_runs_over_pages():
    text = f"{SHALOM} 12 kV, " * 900
    data = report_pdf(with_title(conclusions=text))
    assert_within_margins(data)
    document = check(PdfReader(io.BytesIO(data)))
    (long,) = (e for e in elements(document) if len(e.get("/ActualText", "")) > 5000)
    assert long["/ActualText"].strip() == text.strip()
