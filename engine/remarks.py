"""Everything worth saying about a layout and its results: faults, warnings, notes.

The codes of warnings and notes: W02 assumed closing links, W04 near field, W05 masked
parts of zones, W08 equal sharing, W09 lines that do not close, W10 triplen harmonics
without neutral, W11 unknown angles of harmonics, W12 conductors alone in steel, W15
phase sequence and labels, W16 ratings, W17 DC beside AC, W18 levels and places without
statements, W19 frequencies without a level, W20 values that U reaches, W21 and W22
scaled measurements, W23 heights of receptors, W24 missing heights and scales, W25
coils, W26 persons at particular risk, W27 stray fields of transformers, W28 assumed
values, W29 cables as net current only, W30 rounding, W31 assumed angles, W32 measured
neutrals, W33 circuits without a phase relation, W34 to W36 variants whose base has
changed.
"""

from __future__ import annotations

from collections.abc import Iterator

from engine.circuit_remarks import circuit_remarks
from engine.circuits import LoadCase
from engine.conductors import conductors, nodes
from engine.currents import case_phasors
from engine.errors import UserError
from engine.faults import Remark, case_faults, layout_faults
from engine.items import ConfirmedRemark
from engine.layout import Layout
from engine.place_remarks import level_remarks, place_remarks
from engine.result_remarks import result_remarks
from engine.results import Assessment
from engine.run_remarks import (
    equipment_remarks,
    free_end_remarks,
    rating_remarks,
    run_remarks,
)
from engine.variant_remarks import variant_remarks

__all__ = ["Remark", "confirmed_remarks", "remarks"]

_ORDER = {"blocking": 0, "warning": 1, "note": 2}

#: A circuit's own matter: said once, with the numbers of the first case it is true in.
_SAID_ONCE = frozenset({"W09", "W10", "W15"})


def remarks(
    layout: Layout, assessment: Assessment | None = None, *, unit: str | None = None
) -> tuple[Remark, ...]:
    """What is open: everything but the remarks that a person has confirmed.

    Parameters
    ----------
    layout : Layout
        What is drawn and entered.
    assessment : Assessment, optional
        Its results; without it nothing is said on results.
    unit : str, optional
        Of the flux densities in sentences; None: the layout's.

    Returns
    -------
    tuple of Remark
        Blocking ones first, then warnings, then notes.
    """
    return tuple(
        remark
        for remark in _all(layout, assessment, unit)
        if confirmation(layout, remark) is None
    )


def confirmed_remarks(
    layout: Layout, assessment: Assessment | None = None, *, unit: str | None = None
) -> tuple[tuple[Remark, ConfirmedRemark], ...]:
    """Remarks that a person has looked at and lets stand, with who and when."""
    found = [
        (remark, confirmation(layout, remark))
        for remark in _all(layout, assessment, unit)
    ]
    return tuple((remark, by) for remark, by in found if by is not None)


def confirmation(layout: Layout, remark: Remark) -> ConfirmedRemark | None:
    """Who lets the remark stand, or None while it is open.

    A confirmation names the remark's code and all its items. What blocks cannot be
    confirmed away; net current that ends in the open (W01) stays in the list with the
    name of who confirmed it.
    """
    if remark.severity == "blocking" or remark.code == "W01":
        return None
    for confirmed in layout.confirmed_remarks:
        if confirmed.code == remark.code and set(remark.items) <= set(confirmed.items):
            return confirmed
    return None


def _all(
    layout: Layout, assessment: Assessment | None, unit: str | None
) -> list[Remark]:
    found: dict[object, Remark] = {}
    for remark in _found(layout, assessment, unit or layout.settings.flux_density_unit):
        once = remark.code in _SAID_ONCE
        key = (remark.code, remark.items, remark.place) if once else remark
        found.setdefault(key, remark)
    return sorted(found.values(), key=lambda remark: _ORDER[remark.severity])


def _found(
    layout: Layout, assessment: Assessment | None, unit: str
) -> Iterator[Remark]:
    blocking = layout_faults(layout)
    yield from blocking
    for case in layout.cases:
        yield from case_faults(layout, case)
    yield from run_remarks(layout)
    yield from equipment_remarks(layout)
    yield from place_remarks(layout)
    if not any(fault.code in ("F02", "F03") for fault in blocking):
        yield from free_end_remarks(layout, nodes(layout), conductors(layout))
    for case in layout.cases:
        yield from _of_case(layout, case)
    yield from variant_remarks(layout)
    if assessment is not None:
        yield from result_remarks(assessment, unit)


def _of_case(layout: Layout, case: LoadCase) -> Iterator[Remark]:
    try:
        phasors = case_phasors(layout, case)
    except UserError:
        return  # told by `case_faults`
    yield from circuit_remarks(layout, phasors)
    yield from rating_remarks(layout, phasors)
    yield from level_remarks(layout, phasors)
