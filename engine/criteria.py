"""Reference levels as the user enters them: values over frequency, with a source.

The program ships none as "the" limit. Without a source, a category or a value there
is no comparison.
"""

from __future__ import annotations

from typing import Annotated, Literal

from msgspec import Meta

from engine.items import Item, Name, Text, Value
from engine.places import Category

Tesla = Annotated[float, Meta(gt=0, le=100)]


class LevelRange(Value, frozen=True, kw_only=True):
    """Level = coefficient · f^(−exponent) from `f_from` to `f_to`, both included.

    The coefficient is in tesla with f in hertz. 0 Hz fits with exponent 0.
    """

    f_from: Annotated[float, Meta(ge=0, le=1e9)]
    f_to: Annotated[float, Meta(ge=0, le=1e9)]
    coefficient: Annotated[float, Meta(gt=0, le=1e12)]
    exponent: Annotated[float, Meta(ge=-4, le=4)] = 0.0


class LevelRanges(Value, tag="ranges", frozen=True, kw_only=True):
    """Power laws over frequency; at a common corner the stricter value counts."""

    ranges: Annotated[tuple[LevelRange, ...], Meta(max_length=50)]


class LevelPoint(Value, frozen=True, kw_only=True):
    """One row of a table."""

    frequency: Annotated[float, Meta(ge=0, le=1e9)]
    level: Tesla


class LevelTable(Value, tag="table", frozen=True, kw_only=True):
    """Values at frequencies, straight lines between them on logarithmic axes.

    Valid at 0 Hz only where a row says so, and nowhere outside the table.
    """

    points: Annotated[tuple[LevelPoint, ...], Meta(max_length=500)]


class ReferenceLevel(Item, frozen=True, kw_only=True):
    """A level to compare with: where it comes from, for whom, and what it means."""

    source: Text = ""
    edition: Name = ""
    category: Category = ""
    entered_by: Name = ""
    values: LevelRanges | LevelTable | None = None
    basis: Literal["RMS", "peak"] = "RMS"
    component: Literal["resultant", "axis"] = "resultant"
    #: How several frequencies count together; 0 Hz is always compared on its own.
    #: The weighted peak takes angles into account (`engine/weighted_peak.py`).
    sum_rule: Literal["ratio sum", "root sum of squares", "weighted peak"] = "ratio sum"
    uncertainty_rule: Text = ""
