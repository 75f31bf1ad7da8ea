"""The report's bytes from finished results: no computing, no file, no clock."""

from __future__ import annotations

from collections.abc import Sequence

from engine.drawing import Plan
from engine.faults import Remark
from engine.picture import MapSubject
from engine.report.contents import story
from engine.report.names import wording
from engine.report.page import paper, pdf, register_fonts
from engine.results import Assessment
from engine.units import flux_density_unit


def report_pdf(
    assessment: Assessment,
    *,
    remarks: Sequence[Remark],
    maps: Sequence[MapSubject],
    plan: Plan,
    unit: str,
    left_out: int = 0,
) -> bytes:
    """The report as the bytes of a PDF file; equal results give equal bytes.

    Parameters
    ----------
    remarks : sequence of Remark
        Those that are not cleared.
    maps : sequence of MapSubject
        In the order in which they are printed.
    unit : str
        Display unit of flux density, for every value.
    left_out : int
        Maps that were not computed for want of room.

    Raises
    ------
    ValueError
        When the unit is not known.
    """
    register_fonts()
    layout = assessment.layout
    words = wording(layout, flux_density_unit(unit))
    parts = story(assessment, remarks, maps, plan, words, paper(layout), left_out)
    return pdf(layout, parts)
