"""What is asked of a document: which one, of which variant, on which paper."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from reportlab.lib.pagesizes import A3, A4, LETTER, TABLOID
from reportlab.lib.units import mm

from engine.layout import Layout

DocumentKind = Literal["report", "note"]
PaperName = Literal["A4", "A3", "Letter", "Tabloid"]
Orientation = Literal["portrait", "landscape"]

#: White edge around everything that is printed. [mm]
MARGIN = 15.0

#: Height of the title block. [mm]
TITLE_BLOCK = 20.0

#: Short and long side. [pt]
PAPERS: dict[PaperName, tuple[float, float]] = {
    "A4": A4,
    "A3": A3,
    "Letter": LETTER,
    "Tabloid": TABLOID,
}

#: How text pages lie: on large paper lines would become too long upright.
ORIENTATIONS: dict[PaperName, Orientation] = {
    "A4": "portrait",
    "A3": "landscape",
    "Letter": "portrait",
    "Tabloid": "landscape",
}


@dataclass(frozen=True)
class Choices:
    """What is asked of a document; None: as the layout's settings say.

    Attributes
    ----------
    kind
        "report", or "note" for one to two pages.
    variant : str or None
        Id or name of a variant of the layout; None: the base.
    unit : str or None
        Display unit of flux density.
    paper
        Name of the paper.
    orientation
        How text pages lie; None: as is usual for the paper. Pages with drawings and
        maps lie as these want it.
    validate : bool
        Whether the outside checks are run and printed; they take some seconds the
        first time. A note has none.
    """

    kind: DocumentKind = "report"
    variant: str | None = None
    unit: str | None = None
    paper: PaperName | None = None
    orientation: Orientation | None = None
    validate: bool = True


#: The report of the base, as the settings say.
USUAL = Choices()


@dataclass(frozen=True)
class Paper:
    """Size of the sheet and of the space for text. [mm]"""

    width: float
    height: float

    @property
    def orientation(self) -> Orientation:
        """How the sheet lies."""
        return "portrait" if self.width < self.height else "landscape"

    @property
    def turned(self) -> Paper:
        """The same sheet, lying the other way."""
        return Paper(self.height, self.width)

    @property
    def text_width(self) -> float:
        """[mm]"""
        return self.width - 2 * MARGIN

    @property
    def text_height(self) -> float:
        """[mm]"""
        return self.height - 2 * MARGIN - TITLE_BLOCK - 4.0


def paper(layout: Layout, choices: Choices) -> Paper:
    """The paper that is asked for, as text pages lie."""
    name = choices.paper or layout.settings.paper
    short, long = (side / mm for side in PAPERS[name])
    upright = (choices.orientation or ORIENTATIONS[name]) == "portrait"
    return Paper(short, long) if upright else Paper(long, short)
