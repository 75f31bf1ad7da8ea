"""A small room with made-up results in every state, for tests of the report."""

from __future__ import annotations

import dataclasses

import numpy as np

from engine.circuits import BalancedCurrent, Circuit, LoadCase, SpectrumLine
from engine.conductors import conductors
from engine.criteria import LevelRange, LevelRanges, ReferenceLevel
from engine.faults import Remark
from engine.items import ConfirmedRemark, SourceDocument, TitleData, ValueOrigin
from engine.layout import Layout, Settings
from engine.picture import MapSubject, ReferenceLine
from engine.places import Enclosure, MeasuredValue, Receptor, Room, Zone
from engine.report.choices import Choices
from engine.report.document import report_pdf
from engine.report.matter import HeightMap, Matter
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
    return report_pdf(matter(text, unit, paper), Choices(kind=kind))
