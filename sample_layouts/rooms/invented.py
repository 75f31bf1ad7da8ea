"""What the sample rooms share: invented levels, and loads as a schedule states them."""

from __future__ import annotations

from collections.abc import Mapping

from engine.circuits import LineLoad, LineLoads, SpectrumLine
from engine.criteria import LevelRange, LevelRanges, LevelTable, ReferenceLevel
from engine.items import Point2, ValueOrigin
from engine.places import Category

#: Printed as the source of every level of the samples.
INVENTED = (
    "Invented for demonstration. Not taken from any law, standard, guide or data "
    "sheet, and of no meaning outside this sample."
)


def example_level(
    letter: str,
    category: Category,
    values: LevelRanges | LevelTable,
    *,
    use: str,
) -> ReferenceLevel:
    """A level named "Example LETTER (invented)".

    Parameters
    ----------
    letter : str
        Tells the levels of one room apart.
    category : str
        For whom the level is.
    values : LevelRanges or LevelTable
        RMS resultant over frequency. [T]
    use : str
        What the sample compares with it.
    """
    return ReferenceLevel(
        id=f"example-{letter.lower()}",
        name=f"Example {letter} (invented)",
        note=use,
        source=INVENTED,
        edition="first edition of the sample",
        category=category,
        entered_by="R. Thornquist",
        values=values,
        uncertainty_rule="Additive: value and expanded uncertainty together.",
        origins=(
            ValueOrigin(field="values", kind="confirmed", by="R. Thornquist"),
            ValueOrigin(field="source", kind="confirmed", by="R. Thornquist"),
        ),
    )


def flat_then_falling(level: float, corner: float, f_to: float) -> LevelRanges:
    """A level that is even from 25 Hz to `corner` and falls as 1/f up to `f_to`.

    Parameters
    ----------
    level : float
        Below the corner. [T]
    corner, f_to : float
        [Hz]
    """
    return LevelRanges(
        ranges=(
            LevelRange(f_from=25.0, f_to=corner, coefficient=level),
            LevelRange(
                f_from=corner, f_to=f_to, coefficient=level * corner, exponent=1.0
            ),
        )
    )


def lagging(*loads: tuple[float, float]) -> LineLoads:
    """Currents of L1, L2, L3 as (RMS [A], lag behind the own voltage [degrees])."""
    return LineLoads(
        loads=tuple(
            LineLoad(label=f"L{number}", rms=float(rms), lag=float(lag))
            for number, (rms, lag) in enumerate(loads, start=1)
        )
    )


def harmonics(
    base: float, percent: Mapping[int, float], *, offset_of_3rd: float = 0.0
) -> tuple[SpectrumLine, ...]:
    """Spectrum of every line by harmonic order, the angles known.

    Parameters
    ----------
    base : float
        Base frequency. [Hz]
    percent : Mapping
        Order to percent of the line's own current at the base frequency.
    offset_of_3rd : float
        Angle added to three times that of the fundamental; 0 at other orders.
        [degrees]
    """
    return tuple(
        SpectrumLine(
            frequency=base * order,
            ratio=round(value / 100, 6),
            offset=offset_of_3rd if order == 3 else 0.0,
        )
        for order, value in percent.items()
    )


def rectangle(x0: float, x1: float, y0: float, y1: float) -> tuple[Point2, ...]:
    """Corners of a rectangle on plan, counter-clockwise."""
    return ((x0, y0), (x1, y0), (x1, y1), (x0, y1))


def from_document(document: str, page: str, *fields: str) -> tuple[ValueOrigin, ...]:
    """Origins of `fields` in one source document."""
    return tuple(
        ValueOrigin(field=field, kind="document", document=document, page=page)
        for field in fields
    )


def assumed(field: str, reason: str) -> ValueOrigin:
    """Origin of a value that nobody has confirmed yet."""
    return ValueOrigin(field=field, kind="assumed", note=reason)
