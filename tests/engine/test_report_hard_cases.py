"""The report under hostile text, great numbers, missing entries and blocked results."""

from __future__ import annotations

import base64
import dataclasses
import io
from functools import cache

import msgspec
import pypdfium2
import pytest
from fontTools.fontBuilder import FontBuilder
from fontTools.pens.ttGlyphPen import TTGlyphPen
from msgspec.structs import replace
from PIL import Image
from pypdf import PdfReader
from reported_room import HOSTILE, assessment, layout, matter, remark
from test_report_samples import assert_within_margins

from engine.comparability import PARTICULAR_RISK
from engine.conductors import conductors
from engine.errors import ComputationCancelled, UserError
from engine.items import IssuedRevision, Item
from engine.layout import Layout
from engine.places import BackingDrawing
from engine.report import scripts
from engine.report.choices import Choices
from engine.report.document import report_pdf
from engine.report.matter import Matter
from engine.report.page import Watch
from engine.report.wording import INDIVIDUAL, STATE_VALUE
from engine.results import Assessment, CaseResult, ReceptorResult, ZoneResult

#: Each longer than any room for it, or of a kind that breaks careless printing.
TEXTS = {
    "markup": HOSTILE,
    "right to left": "שלום עולם مرحبا \u202e\u2067 abc",
    "one long word": "w" * 10_000,
    "many lines": "line\n" * 300,
    "controls": "".join(chr(k) for k in range(32)) + "\x7f\x85\u2028\ufeff",
    "other scripts": "数据中心 변전소 Ωμφ Кабель ﷽ 👷 ﬃ",
    "formula": '=HYPERLINK("http://x.example","x")',
}
_KEPT = {"id", "field", "kind", "label", "sha256", "category", "terminal", "way"}


def filled(value, text):
    """A layout's value with `text` in every free text of it, as long as it may be."""
    if isinstance(value, tuple):
        return tuple(filled(part, text) for part in value)
    if not isinstance(value, msgspec.Struct):
        return value
    changes = {}
    for field in msgspec.structs.fields(value):
        old = getattr(value, field.name)
        if isinstance(old, tuple | msgspec.Struct):
            changes[field.name] = filled(old, text)
        elif isinstance(old, str) and _is_free(value, field.name):
            long = field.name in ("note", "question", "scope", "conclusions", "reason")
            changes[field.name] = text if long else text[:400]
    return replace(value, **changes)


def _is_free(value, name):
    if name in _KEPT:
        return False
    if isinstance(value, Item) and name in ("name", "note"):
        return True
    hints = type(value).__annotations__
    return str(hints.get(name, "")) in ("Name", "Text")


def filled_matter(text):
    made = filled(layout(), text)
    found = matter()
    results = dataclasses.replace(assessment(made, text), layout=made)
    zone = dataclasses.replace(results.zones[0], zone=made.zones[0], searched=text)
    point = dataclasses.replace(results.receptors[0], receptor=made.receptors[0])
    case = dataclasses.replace(results.cases[0], case=made.cases[0])
    whole = Assessment(made, (case,), (zone,), (point,))
    return dataclasses.replace(
        found, assessment=whole, remarks=(remark(text),), conductors=conductors(made)
    )


@pytest.mark.parametrize("kind", ["report", "note"])
@pytest.mark.parametrize("name", TEXTS)
def test_any_text_in_every_field_is_printed_within_the_margins(name, kind):
    data = report_pdf(filled_matter(TEXTS[name]), Choices(kind=kind))
    assert_within_margins(data)
    reader = PdfReader(io.BytesIO(data))
    for page in reader.pages:
        for link in page.get("/Annots", ()):
            assert "/A" not in link.get_object()
    if kind == "note":
        assert len(reader.pages) <= 2


def test_markup_in_every_field_stands_there_as_text():
    reader = PdfReader(io.BytesIO(report_pdf(filled_matter(HOSTILE))))
    text = " ".join(" ".join(page.extract_text().split()) for page in reader.pages)
    assert text.count('<img src="/etc/hostname"> R&D <LV> <b>unclosed </para>') > 20
    pictures = [image for page in reader.pages for image in page.images]
    assert len(pictures) == 2  # the map and its colour bar


def great(n_zones, n_runs):
    """A matter with many zones and runs; their results are made up."""
    small = layout()
    zones = [
        replace(small.zones[0], id=f"z{k}", name=f"Zone number {k}")
        for k in range(n_zones)
    ]
    runs = [
        replace(
            small.runs[0],
            id=f"r{k}",
            name=f"Run number {k}",
            route=((0.5, 0.02 * k, 2.5), (5.5, 0.02 * k, 2.5)),
            section=replace(small.runs[0].section, pitch=0.05 + 0.001 * (k % 100)),
        )
        for k in range(n_runs)
    ]
    made = replace(small, zones=tuple(zones), runs=tuple(runs))
    one = assessment(small)
    results = [
        dataclasses.replace(
            one.zones[0],
            zone=zone,
            comparisons=tuple(
                dataclasses.replace(c, place=zone.id) for c in one.zones[0].comparisons
            ),
        )
        for zone in zones
    ]
    whole = Assessment(made, one.cases, tuple(results), one.receptors)
    return dataclasses.replace(matter(), assessment=whole, conductors=conductors(made))


def test_a_great_layout_has_a_report():
    data = report_pdf(great(200, 300))
    # This reader is the faster one on so many pages.
    document = pypdfium2.PdfDocument(data)
    text = " ".join(page.get_textpage().get_text_range() for page in document)
    document.close()
    for wanted in ("Zone number 199", "Run number 299", "Sections without a drawing"):
        assert wanted in text
    assert_within_margins(data)


@pytest.mark.parametrize("kind", ["report", "note"])
def test_nothing_entered_gives_a_document_that_says_so(kind):
    empty = Layout()
    result = Assessment(empty, (CaseResult(empty.cases[0], (), (), ()),), (), ())
    data = report_pdf(Matter(result, (), "µT"), Choices(kind=kind))
    text = " ".join(
        " ".join(page.extract_text().split())
        for page in PdfReader(io.BytesIO(data)).pages
    )
    assert "No reference level was entered" in text
    if kind == "report":
        assert text.count("Omitted:") >= 7


def text_of(data):
    reader = PdfReader(io.BytesIO(data))
    return " ".join(" ".join(page.extract_text().split()) for page in reader.pages)


@cache
def plain_text(kind):
    """Of the room as it is."""
    return text_of(report_pdf(matter(), Choices(kind=kind)))


def at_risk():
    """The room with its zone and receptor for persons at particular risk."""
    found = matter()
    category = "persons at particular risk"
    zone = replace(found.layout.zones[0], category=category)
    receptor = replace(found.layout.receptors[0], category=category)
    made = replace(found.layout, zones=(zone,), receptors=(receptor,))
    one = found.assessment
    comparison = dataclasses.replace(
        next(c for c in one.zones[0].comparisons if c.state == "not evaluable"),
        reason=PARTICULAR_RISK,
    )
    zones = (dataclasses.replace(one.zones[0], zone=zone, comparisons=(comparison,)),)
    points = (ReceptorResult(receptor, one.receptors[0].fields, ()),)
    return dataclasses.replace(
        found, assessment=Assessment(made, one.cases, zones, points)
    )


@pytest.mark.parametrize("kind", ["report", "note"])
def test_persons_at_particular_risk_have_no_state(kind):
    text = text_of(report_pdf(at_risk(), Choices(kind=kind)))
    assert INDIVIDUAL in text
    assert "not evaluable: " not in text.partition("State Holds when")[0]
    assert "below the reference level, uncertainty included (below)" not in text


@pytest.mark.parametrize("kind", ["report", "note"])
def test_workers_at_an_open_board_are_a_caution(kind):
    found = matter()
    case = replace(found.layout.load_cases[0], open_enclosures=("cubicle",))
    made = replace(found.layout, load_cases=(case,))
    results = dataclasses.replace(found.assessment, layout=made)
    opened = dataclasses.replace(found, assessment=results)
    said = "its values say nothing about electric shock, arc flash"
    assert said in text_of(report_pdf(opened, Choices(kind=kind)))
    assert said not in plain_text(kind)


def test_the_rules_of_the_states_tell_of_proven_bounds():
    text = plain_text("report")
    assert text.count(STATE_VALUE) == 2  # with the method, and with the states


def test_blocking_remarks_say_not_evaluable_and_why():
    found = matter()
    blocking = dataclasses.replace(
        remark(), code="W01", severity="blocking", sentence="Net current ends nowhere."
    )
    text = text_of(report_pdf(dataclasses.replace(found, remarks=(blocking,))))
    first = text.partition("Contents")[0]
    assert "Not evaluable: 1 remarks block" in first
    assert "Net current ends nowhere." in first


@pytest.mark.parametrize("part", ["cases", "zones", "receptors"])
def test_results_of_a_part_are_refused(part):
    found = matter()
    partial = dataclasses.replace(found.assessment, **{part: ()})
    with pytest.raises(UserError, match="of a part of the layout only"):
        report_pdf(dataclasses.replace(found, assessment=partial))


def test_laying_out_can_be_cancelled():
    with pytest.raises(ComputationCancelled):
        report_pdf(matter(), watch=Watch(cancelled=lambda: True))


def picture(kind="PNG"):
    file = io.BytesIO()
    Image.new("RGB", (40, 20), (10, 80, 160)).save(file, kind)
    return base64.b64encode(file.getvalue()).decode("ascii")


def with_title(**values):
    found = matter()
    made = replace(found.layout, title=replace(found.layout.title, **values))
    results = dataclasses.replace(found.assessment, layout=made)
    return dataclasses.replace(found, assessment=results)


@cache
def of_a_house(kind):
    return report_pdf(
        with_title(
            logo=picture(kind),
            letterhead="Thornquist Fields\n4 Quay Street",
            exclusions="The lift motor.",
            competence="Twenty years of measuring.",
            closing="One copy goes to the owner.",
        )
    )


@pytest.mark.parametrize("kind", ["PNG", "JPEG"])
def test_logo_and_texts_of_the_house_are_printed(kind):
    reader = PdfReader(io.BytesIO(of_a_house(kind)))
    assert len(reader.pages[0].images) == 1
    text = text_of(of_a_house(kind))
    for wanted in ("4 Quay Street", "The lift motor.", "Twenty years", "One copy goes"):
        assert wanted in text


def test_a_logo_has_the_same_bytes_again():
    assert of_a_house("PNG") == of_a_house.__wrapped__("PNG")


@pytest.mark.parametrize("logo", ["no base64!", base64.b64encode(b"GIF89a").decode()])
def test_a_damaged_logo_is_named_and_the_report_is_whole(logo):
    assert "The logo is damaged" in text_of(report_pdf(with_title(logo=logo)))


def test_documents_say_whether_a_backing_drawing_is_in_the_layout():
    found = matter()
    drawings = (
        BackingDrawing(id="held", name="Held", picture=picture()),
        BackingDrawing(id="linked", name="Linked", linked_file="plans/level 1.pdf"),
    )
    made = replace(found.layout, backing_drawings=drawings)
    results = dataclasses.replace(found.assessment, layout=made)
    text = text_of(report_pdf(dataclasses.replace(found, assessment=results)))
    assert "page 1 in the layout's file" in text
    assert "linked, not in the layout's file: plans/level 1.pdf" in text


def test_issued_revisions_are_listed():
    found = matter()
    revision = IssuedRevision(
        id="rev-a",
        revision="A",
        date="2024-04-02",
        layout_digest="a" * 64,
        results_digest="b" * 64,
        program_version="0.0.9",
        note="For tender",
    )
    made = replace(found.layout, revisions=(revision,))
    results = dataclasses.replace(found.assessment, layout=made)
    text = text_of(report_pdf(dataclasses.replace(found, assessment=results)))
    for wanted in ("2024-04-02", "0.0.9", "For tender", "was edited after revision A"):
        assert wanted in text


def test_zones_without_results_keep_their_reason():
    found = matter()
    zone = found.layout.zones[0]
    none = ZoneResult(zone, None, 24.0, {}, (), (), "", "It states no floor level.")
    results = dataclasses.replace(found.assessment, zones=(none,))
    text = text_of(report_pdf(dataclasses.replace(found, assessment=results)))
    assert "Office: It states no floor level." in text


def made_up_font(path):
    """A font with one outline for two Chinese characters."""
    pen = TTGlyphPen(None)
    pen.moveTo((0, 0))
    pen.lineTo((0, 800))
    pen.lineTo((800, 800))
    pen.lineTo((800, 0))
    pen.closePath()
    builder = FontBuilder(1000)
    names = [".notdef", "one", "two"]
    builder.setupGlyphOrder(names)
    builder.setupCharacterMap({ord("数"): "one", ord("据"): "two"})
    builder.setupGlyf({name: pen.glyph() for name in names})
    builder.setupHorizontalMetrics({name: (1000, 0) for name in names})
    builder.setupHorizontalHeader(ascent=800, descent=-200)
    builder.setupNameTable({"familyName": "Made Up", "styleName": "Regular"})
    builder.setupOS2()
    builder.setupPost()
    builder.save(path)


def test_other_scripts_are_printed_in_a_font_of_the_machine(tmp_path, monkeypatch):
    made_up_font(tmp_path / "made-up.ttf")
    covered = scripts.registered(tmp_path / "made-up.ttf")
    assert covered >= {ord("数"), ord("据")}
    monkeypatch.setattr(scripts, "fallback", lambda: covered)
    data = report_pdf(filled_matter("Raum 数据 end"))
    assert_within_margins(data)
    text = text_of(data)
    assert "Raum 数据 end" in text
    assert "Characters without a picture" not in text


def test_characters_without_a_font_are_noted(monkeypatch):
    monkeypatch.setattr(scripts, "fallback", frozenset)
    text = text_of(report_pdf(filled_matter("Raum 数据 שלום")))
    assert "Characters without a picture in the fonts at hand: 2" in text
    assert "written from right to left stands here in its order on paper" in text


def test_a_font_that_cannot_be_embedded_is_passed_over(tmp_path):
    (tmp_path / "no.ttf").write_bytes(b"no font")
    assert scripts.registered(tmp_path / "no.ttf") == frozenset()
