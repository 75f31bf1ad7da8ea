"""Computed maps as subjects of pictures: which value, and what must be said of it."""

from __future__ import annotations

from engine.circuits import LoadCase
from engine.layout import Layout
from engine.maps import MapResult
from engine.picture.references import reference_lines
from engine.picture.subject import MapSubject
from engine.units import LENGTH_UNITS, flux_density_unit

ALTERNATING = "RMS resultant"
DIRECT = "resultant at 0 Hz"


def map_subjects(
    layout: Layout, case: LoadCase, result: MapResult, *, unit: str | None = None
) -> tuple[MapSubject, ...]:
    """What a computed map shows: the AC resultant, DC, or one after the other.

    Parameters
    ----------
    case : LoadCase
        The one that the map was computed for.
    unit : str, optional
        Display unit of flux density; None: the layout's.

    Raises
    ------
    ValueError
        When the unit is not known.
    """
    alternating = [f for f in result.frequencies if f > 0]
    subjects = []
    if alternating or result.dc is None:
        subjects.append(_subject(layout, case, result, alternating, unit))
    if result.dc is not None:
        subjects.append(_subject(layout, case, result, [0.0], unit))
    return tuple(subjects)


def _subject(
    layout: Layout,
    case: LoadCase,
    result: MapResult,
    frequencies: list[float],
    unit: str | None,
) -> MapSubject:
    settings = layout.settings
    is_direct = frequencies == [0.0] and result.dc is not None
    values = result.dc if is_direct else result.values
    assert values is not None
    references, note = reference_lines(layout, frequencies)
    quantity = DIRECT if is_direct else ALTERNATING
    return MapSubject(
        xs=result.xs,
        ys=result.ys,
        values=values,
        mask=result.mask,
        title=f"{case.title}: {quantity}, {height_text(layout, result.heights)}",
        quantity=quantity,
        unit=flux_density_unit(unit or settings.flux_density_unit),
        low=settings.map_low,
        high=settings.map_high,
        scale=settings.map_scale,
        references=references,
        reference_note=note,
        lines=_lines(layout, result, frequencies),
        length_unit=settings.length_unit,
        north=settings.north,
    )


def height_text(layout: Layout, heights: tuple[float, ...]) -> str:
    """The heights of a map above the datum, in words."""
    unit = layout.settings.length_unit
    digits = {"m": 2, "mm": 0, "ft": 2, "in": 1}[unit]
    shown = [f"{z / LENGTH_UNITS[unit] + 0.0:.{digits}f}" for z in heights]
    text = ", ".join(shown).replace("-", "−")
    if len(heights) > 1:
        return f"largest over z {text} {unit}"
    return f"z {text} {unit}"


def _lines(
    layout: Layout, result: MapResult, frequencies: list[float]
) -> tuple[str, ...]:
    title = layout.title
    named = (
        title.project,
        title.document_number,
        title.revision and f"revision {title.revision}",
        title.date,
    )
    lines = [" · ".join(text for text in named if text)]
    listed = ", ".join(f"{f:g} Hz" for f in frequencies[:12])
    more = f" and {len(frequencies) - 12} more" if len(frequencies) > 12 else ""
    if frequencies:
        lines.append(f"Frequencies: {listed}{more}. Heights z are above the datum.")
    else:
        lines.append("No current flows in this load case.")
    if result.dc is not None and frequencies != [0.0]:
        lines.append("Direct current flows too; its field is not in this map.")
    if result.is_bound and frequencies != [0.0]:
        lines.append(f"Upper bound: {result.bound_reason}")
    return tuple(line for line in lines if line)
