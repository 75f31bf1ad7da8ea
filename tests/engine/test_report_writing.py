"""A report is computed and written whole, or the old file stays."""

from __future__ import annotations

import io
import re

import pytest
from msgspec.structs import replace
from pypdf import PdfReader

from engine.assessment import assess
from engine.circuits import (
    BalancedCurrent,
    Circuit,
    CircuitFactor,
    ConductorCurrent,
    DirectCurrents,
    LoadCase,
)
from engine.criteria import LevelRange, LevelRanges, ReferenceLevel
from engine.errors import ComputationCancelled, UserError
from engine.layout import Layout, Settings
from engine.layout_file import decode
from engine.places import Receptor, Room, Zone
from engine.report import maps
from engine.report.choices import ORIENTATIONS, PAPERS, Choices
from engine.report.document import report_pdf
from engine.report.matter import Matter
from engine.report.writing import computed_matter, report_bytes, write_report
from engine.results import Assessment, CaseResult
from engine.runs import CircuitShare, Flat, Run
from engine.variant import Variant, VariantItems
from engine.variants import layout_of

ROOM = ((0.0, 0.0), (4.0, 0.0), (4.0, 3.0), (0.0, 3.0))


def layout(rms=400.0):
    return Layout(
        rooms=(Room(id="room", outline=ROOM, floor_level=0, ceiling_level=3),),
        circuits=(
            Circuit(
                id="feeder", name="Feeder", demand=BalancedCurrent(rms=rms), voltage=400
            ),
        ),
        runs=(
            Run(
                id="bars",
                name="Bars",
                kind="busbar",
                route=((0.5, 1.5, 2.5), (3.5, 1.5, 2.5)),
                section=Flat(circuits=(CircuitShare(circuit="feeder"),)),
            ),
        ),
        zones=(
            Zone(id="floor", name="Floor", outline=ROOM, floor_level=0, heights=(1.0,)),
        ),
        receptors=(Receptor(id="desk", name="Desk", at=(1, 1, 1)),),
    )


def text_of(path):
    reader = PdfReader(io.BytesIO(path.read_bytes()))
    return " ".join(" ".join(page.extract_text().split()) for page in reader.pages)


def test_a_report_is_computed_in_the_asked_unit(tmp_path):
    told = []
    path = tmp_path / "report.pdf"
    write_report(
        layout(),
        path,
        Choices(unit="uT", validate=False),
        progress=lambda share, _: told.append(share),
    )
    text = text_of(path)
    assert "Entered currents: RMS resultant, z 1.00 m" in text
    assert "Largest B [µT]" in text
    assert told == sorted(told)
    assert told[-1] == 1.0
    write_report(layout(), path, Choices(unit="mG", validate=False))
    assert "Largest B [mG]" in text_of(path)


def test_the_largest_value_is_that_of_the_assessment(tmp_path):
    drawn = layout()
    assessment = assess(drawn)
    path = tmp_path / "report.pdf"
    write_report(drawn, path, Choices(validate=False), assessment=assessment)
    largest = assessment.zones[0].maxima[0].value * 1e6
    assert f"{largest:.3g} (AC)" in text_of(path)


def test_a_failed_write_keeps_the_old_file(tmp_path, monkeypatch):
    path = tmp_path / "report.pdf"
    path.write_bytes(b"old")

    def refuse(*_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("engine.written_file.os.replace", refuse)
    with pytest.raises(UserError, match=r"report\.pdf was not written: No space left"):
        write_report(layout(), path)
    assert path.read_bytes() == b"old"
    assert [entry.name for entry in tmp_path.iterdir()] == ["report.pdf"]


def test_a_cancelled_report_writes_nothing(tmp_path):
    with pytest.raises(ComputationCancelled):
        write_report(layout(), tmp_path / "report.pdf", cancelled=lambda: True)
    assert list(tmp_path.iterdir()) == []


def test_an_assessment_of_another_layout_is_refused(tmp_path):
    other = assess(layout(rms=100.0))
    with pytest.raises(UserError, match="another layout or of an earlier state"):
        write_report(layout(), tmp_path / "report.pdf", assessment=other)


def test_maps_show_the_case_of_most_concern():
    """The level counts the direct field less: the case with less of it leads."""
    drawn = layout()
    circuit = drawn.circuits[0]
    currents = (
        ConductorCurrent(label="L+", rms=3000.0),
        ConductorCurrent(label="L-", rms=3000.0, angle=180.0),
    )
    battery = Circuit(
        id="battery",
        name="Battery",
        supply="dc",
        base_frequency=0,
        demand=DirectCurrents(currents=currents),
    )
    level = ReferenceLevel(
        id="a",
        name="Invented",
        source="Invented for this test",
        edition="first",
        values=LevelRanges(
            ranges=(
                LevelRange(f_from=0, f_to=0, coefficient=1.0),
                LevelRange(f_from=50, f_to=50, coefficient=1e-6),
            )
        ),
    )
    section = Flat(circuits=(CircuitShare(circuit="battery"),), order=("L+", "L-"))
    line = replace(drawn.runs[0], id="line", name="Line", section=section)
    drawn = replace(
        drawn,
        circuits=(circuit, battery),
        runs=(*drawn.runs, replace(line, route=((0.5, 2.5, 2.5), (3.5, 2.5, 2.5)))),
        zones=(replace(drawn.zones[0], category="workers", levels=("a",)),),
        levels=(replace(level, category="workers"),),
        load_cases=(
            LoadCase(id="ac", factors=(CircuitFactor(circuit="battery", factor=0),)),
            LoadCase(id="dc", factors=(CircuitFactor(circuit="feeder", factor=0.5),)),
        ),
    )
    (zone,) = assess(drawn).zones
    largest = max(zone.maxima, key=lambda m: m.value)
    assert (largest.case, largest.kind) == ("dc", "DC")
    (wanted,) = maps.wanted_maps(assess(drawn))
    assert wanted.case.id == "ac"


def with_variant():
    moved = replace(layout().runs[0], route=((0.5, 1.5, 1.5), (3.5, 1.5, 1.5)))
    variant = Variant(
        id="low", name="Lower bars", replaced=VariantItems(runs=(moved,)), note="Cheap."
    )
    return replace(layout(), variants=(variant,))


@pytest.mark.parametrize("kind", ["report", "note"])
def test_a_variant_has_a_report_that_names_it_on_every_page(kind):
    whole = with_variant()
    content = report_bytes(
        whole, Choices(kind=kind, variant="Lower bars", validate=False)
    )
    reader = PdfReader(io.BytesIO(content))
    for page in reader.pages:
        assert "Variant" in page.extract_text()
        assert "Lower bars" in page.extract_text()
    text = " ".join(" ".join(page.extract_text().split()) for page in reader.pages)
    largest = assess(layout_of(whole, "low"), certify=True).zones[0].maxima[0].value
    assert f"{largest * 1e6:.3g}" in text
    (data,) = reader.attachments["layout.json"]
    assert decode(data, "layout.json") == whole
    if kind == "report":
        assert "B [µT] Base Lower bars" not in text
        assert "Place, level Base Lower bars" in text


def test_the_base_beside_a_variant_is_called_base():
    found = computed_matter(with_variant(), Choices(validate=False))
    reader = PdfReader(io.BytesIO(report_pdf(found)))
    for page in reader.pages:
        assert re.search(r"Variant\s+base", page.extract_text())
    other = computed_matter(
        with_variant(), Choices(validate=False, variant="low")
    ).comparison
    for mine, its in zip(found.comparison.rows, other.rows, strict=True):
        assert mine.cells == its.cells


def test_a_variant_that_is_not_there_is_named():
    with pytest.raises(UserError, match="no variant “Higher bars”"):
        report_bytes(with_variant(), Choices(variant="Higher bars"))


@pytest.mark.parametrize("paper", ["A4", "A3", "Letter", "Tabloid"])
@pytest.mark.parametrize("orientation", [None, "portrait", "landscape"])
def test_text_pages_lie_as_asked(paper, orientation):
    empty = Layout()
    result = Assessment(empty, (CaseResult(empty.cases[0], (), (), ()),), (), ())
    choices = Choices(kind="note", paper=paper, orientation=orientation)
    (page, *_) = PdfReader(
        io.BytesIO(report_pdf(Matter(result, (), "µT"), choices))
    ).pages
    short, long = sorted(PAPERS[paper])
    wanted = orientation or ORIENTATIONS[paper]
    size = (short, long) if wanted == "portrait" else (long, short)
    assert (page.mediabox.width, page.mediabox.height) == pytest.approx(size, abs=0.01)


def test_maps_show_the_counted_case_with_the_largest_value():
    drawn = replace(
        layout(),
        load_cases=(
            LoadCase(id="night", others="off", counted=True),
            LoadCase(id="day", counted=True),
        ),
    )
    (wanted,) = maps.wanted_maps(assess(drawn))
    assert (wanted.z, wanted.case.id) == (pytest.approx(1.0), "day")


def test_a_layout_that_cannot_be_computed_still_has_a_report(tmp_path):
    broken = replace(
        layout(),
        circuits=(Circuit(id="feeder", name="Feeder"),),
        settings=Settings(paper="Letter"),
    )
    path = tmp_path / "report.pdf"
    write_report(broken, path, Choices(validate=False))
    text = text_of(path)
    assert "no current entered" in text
    assert "the field is not determined at any height" in text
