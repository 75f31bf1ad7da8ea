"""A picture as marks on paper, in millimetres from the lower left corner.

Built once; painted as pixels by `exchange.map_export` and as vectors by the report.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

import numpy as np
import numpy.typing as npt

from engine.printed_text import text_width

Colour = tuple[int, int, int]
Points = tuple[tuple[float, float], ...]
Box = tuple[float, float, float, float]

BLACK: Colour = (20, 24, 28)
GREY: Colour = (96, 104, 112)
PALE: Colour = (186, 192, 198)
WHITE: Colour = (255, 255, 255)


@dataclass(frozen=True)
class Stroke:
    """A line; `dash` is (on, off) or None. [mm]"""

    points: Points
    width: float = 0.2
    colour: Colour = BLACK
    dash: tuple[float, float] | None = None


@dataclass(frozen=True)
class Raster:
    """Pixels in a box (left, bottom, right, top); row 0 is at the bottom. [mm]"""

    box: Box
    rgba: npt.NDArray[np.uint8]


@dataclass(frozen=True)
class Words:
    """One line of text, `size` high; `at` is on the middle of its height. [mm, deg]"""

    at: tuple[float, float]
    text: str
    size: float = 2.5
    colour: Colour = BLACK
    bold: bool = False
    anchor: Literal["left", "middle", "right"] = "left"
    turn: float = 0.0
    #: A paper-coloured patch under the text, so that it reads on any map.
    patch: bool = False

    @property
    def width(self) -> float:
        """[mm]"""
        return text_width(self.text, self.size, bold=self.bold)


Part = Stroke | Raster | Words


@dataclass
class Picture:
    """Marks in the order in which they are laid on the paper. [mm]"""

    width: float
    height: float
    parts: list[Part] = field(default_factory=list)

    def add(self, *parts: Part) -> None:
        """Lay parts on top of what is there."""
        self.parts.extend(parts)
