"""A budget of uncertainty, as frozen values: all that a chart or report prints."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from engine.items import Point3
from engine.levels import Kind

InputKind = Literal[
    "current magnitude", "current angle", "unbalance", "net current",
    "sharing", "section pitch", "position", "place", "model",
]  # fmt: skip
OriginKind = Literal["assumed", "document", "measured", "confirmed"]


@dataclass(frozen=True)
class BudgetLine:
    """One input of a budget.

    Attributes
    ----------
    item : str
        Id of the circuit, run, equipment or place; empty for the model.
    axis : str
        "x", "y" or "z" of a position; empty otherwise.
    tolerance : float
        Its standard uncertainty, in `unit`: "part", "degrees" or "m".
    origin
        Where the input comes from.
    standard : float
        Standard uncertainty of the value because of it. [T]
    effect : float
        What one standard tolerance more does to the value, with its sign; 0 for an
        unbalance or a sharing, which have several directions. [T]
    share : float
        Of the combined variance.
    """

    input: InputKind
    item: str
    axis: str
    tolerance: float
    unit: str
    origin: OriginKind
    standard: float
    effect: float
    share: float = 0.0


@dataclass(frozen=True)
class Sampled:
    """The value with currents drawn at random, n times from a stated beginning. [T]

    `p5`, `p50` and `p95` are exceeded by 95, 50 and 5 % of the values.
    """

    n: int
    seed: int
    standard: float
    p5: float
    p50: float
    p95: float


@dataclass(frozen=True)
class Budget:
    """The uncertainty of one value: its lines, the largest first.

    Attributes
    ----------
    place, case, level : str
        Ids; the level is empty for an RMS resultant.
    at : tuple of Point3
        The place, or those over which the value is a mean. [m]
    value : float
        [T]
    standard : float
        Combined standard uncertainty. [T]
    ratio_standard : float or None
        The same of the ratio to the level.
    currents_standard : float
        Combined from the lines of currents alone, to be held against `sampled`. [T]
    """

    place: str
    case: str
    level: str
    kind: Kind
    at: tuple[Point3, ...]
    value: float
    lines: tuple[BudgetLine, ...]
    standard: float
    ratio_standard: float | None
    currents_standard: float
    sampled: Sampled

    def expanded(self, coverage: float = 2.0) -> float:
        """Expanded uncertainty U = k u. [T]"""
        return coverage * self.standard

    @property
    def relative(self) -> float | None:
        """Combined standard uncertainty as a part of the value; None of no field."""
        return self.standard / self.value if self.value > 0 else None
