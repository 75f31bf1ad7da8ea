"""The report prints what was found, says what it is not, and survives any text."""

from __future__ import annotations

import hashlib
import io
import subprocess
import sys
from functools import cache

import numpy as np
import pypdfium2
import pytest
from msgspec.structs import replace
from pypdf import PdfReader
from reported_room import (
    HOSTILE,
    assessment,
    layout,
    made_pdf,
)

from engine.layout import Layout
from engine.report.choices import MARGIN, PAPERS
from engine.report.document import report_pdf
from engine.report.matter import Matter
from engine.report.wording import CAUTIONS, NOT_MODELLED, STATE_SENTENCES
from engine.results import (
    STATES,
    Assessment,
    CaseResult,
)


@cache
def pages(text="", unit="µT", paper="A4"):
    reader = PdfReader(io.BytesIO(made_pdf(text, unit, paper)))
    return tuple(" ".join(page.extract_text().split()) for page in reader.pages)


def everything(*arguments):
    return " ".join(pages(*arguments))


def test_every_page_has_the_title_data_and_its_number():
    count = len(pages())
    for number, page in enumerate(pages(), start=1):
        for wanted in ("Harbour annex", "HA-01", "for review", "2024-05-14"):
            assert wanted in page
        assert f"{number} of {count}" in page


@pytest.mark.parametrize("state", STATES)
def test_all_five_states_are_printed_in_words(state):
    assert f"{state}: " in everything()
    assert STATE_SENTENCES[state] in everything()


def test_results_say_value_place_height_uncertainty_and_what_limits_them():
    text = everything()
    for wanted in (
        "7.4996 (AC)",
        "0.99995",
        "1.25, 2.00, 1.50 1.50 above the floor",
        "masked 3 %",
        "near field, even current assumed",
        "upper bound: phase relation of Feeder unknown",
        "not dealt with by the level: 1000 Hz",
        "not evaluable: The level has no source.",
        "Searched 400 places.",
        "last step of the search 2 mm",
    ):
        assert wanted in text, wanted


def test_a_value_close_to_its_level_shows_its_side():
    assert "7.4996 µT in the load case" in everything()


def test_circuits_that_matter_and_the_effect_of_one_ampere():
    text = everything()
    assert "Feeder: 7.40 (0.100)" in text
    assert "other: −0.310 (7.70)" in text
    assert "0.187 in Feeder, along L1 L2 L3 N" in text


def test_receptor_shows_axes_and_its_measurement():
    text = everything()
    assert "50 Hz AC total 1.00 2.00 2.30 3.21 3.21 3.00 1.14" in text
    assert "measured / calculated 0.779" in text
    assert "2.50 µT clamped at 480 A" in text


def test_inputs_are_printed_so_that_they_can_be_retraced():
    text = everything()
    for wanted in (
        "575.0 A, cos φ 0.9 lagging",
        "150 Hz: 12 %, offset 180°",
        "575.0 ∠ −25.8",
        "69.00 ∠ 102.5",
        "0.50, 2.00, 2.50",
        "flat, L1 L2 L3 N, pitch 100",
        "bar 100 × 10 turned 90°",
        "Not surveyed",
        "Entered values without an origin",
        "Free ends closed across the section by an assumed link: Main bars",
        "7.300 µT",
        "300.0 µT · 1 Hz / f",
        "Invented for this test",
        "A part of the office is masked.",
        "M. Abelund",
    ):
        assert wanted in text, wanted


def test_what_the_report_is_not_is_said_in_full():
    text = everything()
    for sentence in (*CAUTIONS, *NOT_MODELLED):
        assert " ".join(sentence.split()) in text


def test_no_verdict_is_given():
    words = everything().lower().replace("electrical safety", "")
    for forbidden in ("safe", "complian", "comply", "passed", "harmless"):
        assert forbidden not in words


def test_the_map_is_labelled_and_to_scale():
    text = everything()
    for wanted in ("scale 1:", "under 0.1 µT not coloured", "10 µT", "Rated, z 1.00 m"):
        assert wanted in text


@pytest.mark.parametrize(
    ("unit", "value", "level"),
    [("mG", "74.996", "73.00 mG"), ("A/m", "5.968", "5.809 A/m")],
)
def test_every_value_follows_the_unit(unit, value, level):
    text = everything("", unit)
    assert value in text
    assert level in text
    assert "µT" not in text


@pytest.mark.parametrize("field", ["Harbour annex", "Quay Estates", "Feeder", "Desk"])
def test_hostile_text_is_printed_as_text(field):
    text = everything(HOSTILE)
    assert f'{field} <img src="/etc/hostname"> R&D <LV> <b>unclosed </para>' in text


def test_hostile_text_loads_nothing_and_links_nowhere():
    reader = PdfReader(io.BytesIO(made_pdf(HOSTILE)))
    pictures = [image for page in reader.pages for image in page.images]
    assert len(pictures) == 2  # the map and its colour bar
    links = [
        link.get_object() for page in reader.pages for link in page.get("/Annots", ())
    ]
    assert links  # of the table of contents
    assert all("/A" not in link and "/Dest" in link for link in links)


@pytest.mark.parametrize(
    ("paper", "text"),
    [
        *((paper, text) for paper in PAPERS for text in ("", HOSTILE)),
        ("A4", "word " * 500),
        ("A4", "W\n" * 150),
    ],
    ids=lambda value: value[:8].strip() or "plain",
)
def test_nothing_is_printed_outside_the_margins(paper, text):
    document = pypdfium2.PdfDocument(made_pdf(text, "µT", paper))
    scale = 1.0
    edge = int(MARGIN / 25.4 * 72 * scale) - 2
    for page in document:
        picture = np.asarray(page.render(scale=scale, grayscale=True).to_numpy())
        picture = picture.reshape(picture.shape[:2]).copy()
        picture[edge:-edge, edge:-edge] = 255
        assert picture.min() > 250
        page.close()
    document.close()


def test_equal_results_give_equal_bytes():
    assert made_pdf() == made_pdf()


def test_bytes_do_not_depend_on_the_process():
    here = hashlib.sha256(made_pdf()).hexdigest()
    code = (
        "import sys, hashlib; sys.path.insert(0, sys.argv[1]);"
        "from reported_room import made_pdf;"
        "print(hashlib.sha256(made_pdf()).hexdigest())"
    )
    folder = __file__.rpartition("test_report")[0]
    run = subprocess.run(
        [sys.executable, "-c", code, folder], capture_output=True, text=True, check=True
    )
    assert run.stdout.strip() == here


def test_a_layout_without_anything_has_a_report():
    empty = Layout()
    result = Assessment(empty, (CaseResult(empty.cases[0], (), (), ()),), (), ())
    content = report_pdf(Matter(result, (), "µT"))
    reader = PdfReader(io.BytesIO(content))
    text = " ".join(" ".join(page.extract_text().split()) for page in reader.pages)
    assert "No reference level was entered" in text
    assert "The program ships none" in text


def test_an_unknown_unit_is_refused():
    with pytest.raises(ValueError, match="unknown unit"):
        report_pdf(Matter(assessment(layout()), (), "T"))


def test_a_level_without_a_source_says_so():
    drawn = layout()
    drawn = replace(drawn, levels=(replace(drawn.levels[0], source=""),))
    content = report_pdf(Matter(assessment(drawn), (), "µT"))
    reader = PdfReader(io.BytesIO(content))
    text = " ".join(" ".join(page.extract_text().split()) for page in reader.pages)
    assert "no source entered: no comparison" in text
