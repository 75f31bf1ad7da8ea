"""Report and note of every sample: what is printed is what the engine found."""

from __future__ import annotations

import csv
import hashlib
import io
import re
from functools import cache
from pathlib import Path

import numpy as np
import pypdfium2
import pytest
from pypdf import PdfReader

from engine import units
from engine.layout_file import decode, read
from engine.report.choices import MARGIN, Choices
from engine.report.document import report_pdf
from engine.report.wording import QUESTIONS, STATE_SENTENCES
from engine.report.writing import computed_matter

SAMPLES = sorted((Path(__file__).parents[2] / "sample_layouts").glob("*.json"))
NAMES = [path.stem for path in SAMPLES]


@cache
def matter(name):
    path = next(path for path in SAMPLES if path.stem == name)
    return computed_matter(read(path), Choices(validate=False))


@cache
def content(name, kind="report"):
    return report_pdf(matter(name), Choices(kind=kind))


@cache
def pages(name, kind="report"):
    reader = PdfReader(io.BytesIO(content(name, kind)))
    return tuple(" ".join(page.extract_text().split()) for page in reader.pages)


def whole(name):
    return " ".join(pages(name))


@pytest.mark.parametrize("name", NAMES)
def test_every_comparison_is_printed_with_value_ratio_and_state(name):
    text, found = whole(name), matter(name)
    for c in found.assessment.comparisons:
        if c.state == "not evaluable":
            assert " ".join(c.reason.split()) in text
            continue
        value = units.in_unit(c.value, found.unit)
        limit = c.level_value
        shown = units.significant(value)
        if limit is not None:
            shown = units.text_beside(value, units.in_unit(limit, found.unit))
        ratio = units.text_beside(c.ratio, 1.0)
        row = (
            re.escape(f"{shown} ({c.kind})") + r" \S+( frequency)? " + re.escape(ratio)
        )
        assert re.search(row, text), (c.place, c.level, c.case, shown, ratio)
        assert f"{c.state}: {STATE_SENTENCES[c.state]}" in text


@pytest.mark.parametrize("name", NAMES)
def test_largest_values_receptors_and_shares_are_those_of_the_engine(name):
    text, found = whole(name), matter(name)

    def shown(tesla):
        return units.significant(units.in_unit(tesla, found.unit))

    for zone in found.assessment.zones:
        for m in zone.maxima:
            assert f"{shown(m.value)} ({m.kind})" in text
            for c in m.details.contributions[:3]:
                assert shown(c.share).replace("-", "−") in text
    for point in found.assessment.receptors:
        for f in point.fields:
            if f.ac is not None:
                assert shown(f.ac) in text


@pytest.mark.parametrize("name", NAMES)
def test_everything_entered_is_named(name):
    text, layout = whole(name), matter(name).layout
    for item in layout.items():
        if item.id not in ("title", "settings"):
            # A table breaks long names; the appendix has each on one line.
            assert " ".join(item.title.split()) in text, item.id
    for document in layout.documents:
        assert document.revision in text
    for case in layout.cases:
        assert f"Currents used in “{case.title}”" in text


@pytest.mark.parametrize("name", NAMES)
def test_open_remarks_are_printed(name):
    for remark in matter(name).remarks:
        assert " ".join(remark.sentence.split()) in whole(name)


@pytest.mark.parametrize("kind", ["report", "note"])
@pytest.mark.parametrize("name", NAMES)
def test_equal_matter_gives_equal_bytes(name, kind):
    assert report_pdf(matter(name), Choices(kind=kind)) == content(name, kind)


@pytest.mark.parametrize("name", NAMES)
def test_the_report_holds_its_layout_and_grids(name):
    reader = PdfReader(io.BytesIO(content(name)))
    files = {key: data[0] for key, data in reader.attachments.items()}
    assert decode(files["layout.json"], "layout.json") == matter(name).layout
    text = whole(name)
    for data in files.values():
        digest = hashlib.sha256(data).hexdigest()
        assert digest in text.replace(" ", "")
    for k, each in enumerate(matter(name).maps, start=1):
        rows = [*csv.reader(io.StringIO(files[f"map-{k:02d}.csv"].decode()))]
        _same_values(rows, each)


def _same_values(rows, each):
    """The first column of values is the map's own, at its own points."""
    subject = each.subjects[0]
    factor = units.FLUX_DENSITY_UNITS[subject.unit]
    length = units.LENGTH_UNITS[subject.length_unit]
    for x, y, z, *values in rows[1::97]:
        i = int(np.argmin(abs(subject.ys - float(y) * length)))
        j = int(np.argmin(abs(subject.xs - float(x) * length)))
        assert float(z) * length == pytest.approx(each.z, abs=1e-6)
        assert subject.ys[i] == pytest.approx(float(y) * length, abs=1e-6)
        assert (values[0] == "") == bool(subject.mask[i, j])
        if values[0]:
            assert float(values[0]) * factor == pytest.approx(
                subject.values[i, j], rel=1e-4
            )


@pytest.mark.parametrize("name", NAMES)
def test_page_references_lead_to_the_headings(name):
    printed = pages(name)
    contents = printed[1]
    assert contents.startswith("Project") or "Contents" in contents
    reader = PdfReader(io.BytesIO(content(name)))
    outline = [entry for entry in reader.outline if not isinstance(entry, list)]
    assert len(outline) > 20
    for entry in outline:
        number = reader.get_destination_page_number(entry) + 1
        assert " ".join(entry.title.split()) in printed[number - 1]
        if entry.title[:1].isdigit():
            title = " ".join(entry.title.split())
            assert re.search(re.escape(title) + rf" {number}\b", contents), title


@pytest.mark.parametrize("name", NAMES)
def test_each_of_a_reviewers_questions_names_a_page(name):
    text = " ".join(pages(name)[1:3])
    for question, _ in QUESTIONS:
        assert re.search(re.escape(question) + r" page \d+", text), question


@pytest.mark.parametrize("name", NAMES)
def test_a_note_has_two_pages_at_most(name):
    assert len(pages(name, "note")) <= 2
    assert "not medical advice" in " ".join(pages(name, "note"))


@pytest.mark.parametrize("orientation", ["portrait", "landscape"])
@pytest.mark.parametrize("paper", ["Letter", "A4"])
@pytest.mark.parametrize("name", NAMES)
def test_a_note_fits_every_paper(name, paper, orientation):
    """A sheet that lies is low: the picture has one of its own there."""
    choices = Choices(kind="note", paper=paper, orientation=orientation)
    data = report_pdf(matter(name), choices)
    assert len(PdfReader(io.BytesIO(data)).pages) <= 2
    assert_within_margins(data)


def test_maps_that_fill_half_a_page_stand_two_on_one():
    (page,) = (
        text
        for text in pages("battery-laboratory")
        if "resultant at 0 Hz, z 0.50 m" in text and "scale 1:" in text
    )
    assert "RMS resultant, z 0.50 m" in page
    assert page.count("scale 1:") == 2


def test_a_note_that_nearly_fits_on_one_page_has_one():
    assert len(pages("small-switch-room", "note")) == 1


@pytest.mark.parametrize("kind", ["report", "note"])
@pytest.mark.parametrize("name", NAMES)
def test_nothing_of_a_sample_is_outside_the_margins(name, kind):
    assert_within_margins(content(name, kind))


def assert_within_margins(data):
    document = pypdfium2.PdfDocument(data)
    edge = int(MARGIN / 25.4 * 72) - 2
    for page in document:
        picture = np.asarray(page.render(scale=1.0, grayscale=True).to_numpy())
        picture = picture.reshape(picture.shape[:2]).copy()
        picture[edge:-edge, edge:-edge] = 255
        assert picture.min() > 250
        page.close()
    document.close()


@pytest.mark.parametrize("name", NAMES[:1])
def test_fonts_are_embedded_and_the_document_says_what_it_is(name):
    reader = PdfReader(io.BytesIO(content(name)))
    layout = matter(name).layout
    assert reader.metadata.title == layout.title.project
    assert reader.metadata.author == layout.title.prepared_by
    assert reader.trailer["/Root"]["/Lang"] == "en"
    embedded = 0
    for page in reader.pages:
        for font in page["/Resources"].get("/Font", {}).values():
            descriptor = font.get_object()["/FontDescriptor"]
            assert "/FontFile2" in descriptor
            embedded += 1
    assert embedded
