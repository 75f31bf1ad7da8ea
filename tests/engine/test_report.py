"""The report prints what was found, says what it is not, and survives any text."""

from __future__ import annotations

import dataclasses
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

from engine.circuits import BalancedCurrent, Circuit, LoadCase, SpectrumLine
from engine.conductors import conductors
from engine.criteria import LevelRange, LevelRanges, ReferenceLevel
from engine.faults import Remark
from engine.items import ConfirmedRemark, SourceDocument, TitleData, ValueOrigin
from engine.layout import Layout, Settings
from engine.picture import MapSubject, ReferenceLine
from engine.places import Enclosure, MeasuredValue, Receptor, Room, Zone
from engine.report.document import report_pdf
from engine.report.matter import HeightMap, Matter
from engine.report.page import MARGIN, PAPERS
from engine.report.wording import CAUTIONS, NOT_MODELLED, STATE_SENTENCES
from engine.results import (
    STATES,
    Assessment,
    AtFrequency,
    CaseResult,
    Comparison,
    Contribution,
    Maximum,
    NetCurrentEffect,
    PlaceDetails,
    ReceptorField,
    ReceptorResult,
    ZoneResult,
)
from engine.runs import CircuitShare, Flat, Run

HOSTILE = (
    '<img src="/etc/hostname"> R&D <LV> <b>unclosed </para> <font size=500> &#x41; '
    '<a href="file:///etc/passwd">x</a> שלום مرحبا \x00\x07\x1b\u202e\ud800 end'
)
ROOM = ((0.0, 0.0), (6.0, 0.0), (6.0, 4.0), (0.0, 4.0))


def layout(text="", unit="µT", paper="A4"):
    """A small room; every user text ends with `text`."""
    tail = f" {text}" if text else ""
    short = tail[:390]
    origin = ValueOrigin(field="route", kind="assumed", note=f"Not surveyed{tail}")
    case = LoadCase(
        id="rated", name=f"Rated{short}"[:400], basis=f"rating{short}"[:400]
    )
    return Layout(
        title=TitleData(
            id="title",
            project=f"Harbour annex{short}"[:400],
            client=f"Quay Estates{short}"[:400],
            document_number=f"HA-01{short}"[:400],
            revision=f"B{short}"[:400],
            status=f"for review{short}"[:400],
            date="2024-05-14",
            prepared_by=f"R. Thornquist{short}"[:400],
            question=f"How strong is it?{tail}",
            scope=f"The office{tail}",
            conclusions=f"Measure later{tail}",
        ),
        settings=Settings(flux_density_unit=unit, paper=paper),
        documents=(SourceDocument(id="d", name=f"Plan{short}"[:400], note=f"n{tail}"),),
        rooms=(
            Room(
                id="room",
                name=f"Switch room{short}"[:400],
                note=f"note{tail}",
                outline=ROOM,
                floor_level=0,
                ceiling_level=3,
            ),
        ),
        enclosures=(
            Enclosure(
                id="cubicle",
                name=f"Cubicle{short}"[:400],
                footprint=((4, 0.2), (5.5, 0.2), (5.5, 0.8), (4, 0.8)),
                z_from=0,
                z_to=2,
            ),
        ),
        circuits=(
            Circuit(
                id="feeder",
                name=f"Feeder{short}"[:400],
                note=f"note{tail}",
                voltage=400,
                demand=BalancedCurrent(rms=575.0, cos_phi=0.9),
                spectrum=(SpectrumLine(frequency=150, ratio=0.12, offset=180),),
            ),
        ),
        runs=(
            Run(
                id="bars",
                name=f"Main bars{short}"[:400],
                note=f"note{tail}",
                kind="busbar",
                route=((0.5, 2, 2.5), (5.5, 2, 2.5)),
                section=Flat(circuits=(CircuitShare(circuit="feeder"),)),
                origins=(origin,),
            ),
        ),
        zones=(
            Zone(
                id="office",
                name=f"Office{short}"[:400],
                outline=ROOM,
                floor_level=0,
                category="workers",
                use=f"desk work{short}"[:400],
                levels=("a",),
            ),
        ),
        receptors=(
            Receptor(
                id="desk",
                name=f"Desk{short}"[:400],
                reason=f"Nearest seat{tail}",
                at=(1, 1, 1),
                levels=("a",),
                measured=MeasuredValue(
                    flux_density=2.5e-6, load=480, load_note=f"clamped{tail}"
                ),
            ),
        ),
        levels=(
            ReferenceLevel(
                id="a",
                name=f"Example A (invented){short}"[:400],
                source=f"Invented for this test{tail}",
                category="workers",
                values=LevelRanges(
                    ranges=(
                        LevelRange(f_from=50, f_to=50, coefficient=7.3e-6),
                        LevelRange(f_from=51, f_to=400, coefficient=3e-4, exponent=1),
                    )
                ),
            ),
        ),
        load_cases=(case,),
        confirmed_remarks=(
            ConfirmedRemark(
                id="c", code="W08", by=f"M. Abelund{short}"[:400], note=f"seen{tail}"
            ),
        ),
    )


def details(*, near=True):
    return PlaceDetails(
        at=(1.25, 2.0, 1.5),
        height=1.5,
        by_height=((0.5, 2e-6), (1.5, 7.4996e-6)),
        by_frequency=(AtFrequency(50.0, 7.4996e-6, 7.5e-6, 0.99995),),
        near_field=near,
        step=0.002,
        is_bound=True,
        bound_reason="phase relation of Feeder unknown",
        contributions=(
            Contribution("feeder", 7.4e-6, 7.4e-6, 1e-7),
            Contribution("other", -3.1e-7, 4e-7, 7.7e-6),
        ),
        net_current=NetCurrentEffect("feeder", ("L1", "L2", "L3", "N"), 1.87e-7),
    )


def assessment(made, text=""):
    """A comparison in each state, a receptor, a value close to its level."""
    reason = f"The level has no source{' ' + text if text else ''}."
    comparisons = tuple(
        Comparison(
            place="office",
            level="a",
            case="rated",
            counted=True,
            state=state,
            reason=reason if state == "not evaluable" else "",
            kind=None if state == "not evaluable" else "AC",
            value=None if state == "not evaluable" else 7.4996e-6,
            level_value=None if state == "not evaluable" else 7.5e-6,
            ratio=None if state == "not evaluable" else 0.99995,
            uncertainty=None if state == "not evaluable" else 1.875e-6,
            area_above=0.0,
            masked_share=0.034,
            not_covered=(1000.0,),
            details=details(),
        )
        for state in STATES
    )
    point = ReceptorField(
        case="rated",
        counted=True,
        reason="",
        ac=3.21e-6,
        dc=None,
        frequencies=np.array([50.0]),
        components=np.array([[1e-6, 2e-6j, 2.303e-6]]),
        semi_axes=np.array([[3e-6, 1.14e-6]]),
        by_frequency=(AtFrequency(50.0, 3.21e-6),),
        is_bound=False,
        bound_reason="",
        near_field=False,
        measured_ratio=0.779,
        contributions=(),
        net_current=None,
    )
    zone = ZoneResult(
        zone=made.zones[0],
        floor=0.0,
        area=24.0,
        masked_shares={"rated": 0.034},
        maxima=(Maximum("rated", "AC", 7.4996e-6, details()),),
        comparisons=comparisons,
        searched="Searched 400 places.",
    )
    return Assessment(
        layout=made,
        cases=(CaseResult(made.cases[0], (50.0, 150.0), (), ()),),
        zones=(zone,),
        receptors=(ReceptorResult(made.receptors[0], (point,), ()),),
    )


def remark(text=""):
    return Remark(
        code="W05",
        severity="warning",
        sentence=f"A part of the office is masked. {text}",
        items=("office",),
        place=(1.0, 2.0, 1.0),
    )


def subject(text="", unit="µT"):
    xs, ys = np.linspace(-0.5, 6.5, 71), np.linspace(-0.5, 4.5, 51)
    x, y = np.meshgrid(xs, ys)
    return MapSubject(
        xs=xs,
        ys=ys,
        values=9e-6 / ((x - 3) ** 2 + (y - 2) ** 2 + 0.05),
        mask=(abs(x - 4.75) < 0.7) & (abs(y - 0.5) < 0.3),
        title=f"Rated, z 1.00 m {text}",
        unit=unit,
        references=(ReferenceLine(f"Example A (invented) {text}", 7.3e-6),),
        reference_note="reference level at 50 Hz",
    )


def matter(text="", unit="µT", paper="A4"):
    drawn = layout(text, unit, paper)
    return Matter(
        assessment(drawn, text),
        remarks=(remark(text),),
        confirmed=((replace_code(remark(text)), drawn.confirmed_remarks[0]),),
        maps=(HeightMap(1.0, drawn.cases[0], ("Office",), (subject(text, unit),)),),
        conductors=conductors(drawn),
        unit=unit,
    )


def replace_code(said):
    return dataclasses.replace(said, code="W08")


def made_pdf(text="", unit="µT", paper="A4", kind="report"):
    return report_pdf(matter(text, unit, paper), kind=kind)


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
        ("A4", "w" * 10_000),
        ("A4", "word " * 2_000),
        ("A4", "W\n" * 3_000),
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
        "from test_report import made_pdf;"
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
