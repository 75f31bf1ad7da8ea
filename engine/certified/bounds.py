"""Branch and bound over the surfaces of a region: its maxima with proven bounds."""

from __future__ import annotations

from collections.abc import Sequence

from engine.case_fields import CaseFields
from engine.certificate import Certificate
from engine.certified.branching import NO_FIELD, Branching, unproven
from engine.errors import Progress, stop_if
from engine.evaluations import Quantity
from engine.regions import Region
from engine.zone_search import Found

#: How much a bound may exceed the value found, unless somebody says otherwise.
TOLERANCE = 0.01

#: Work that one region may take, in segments; a core does some 5 million a second,
#: and a box counts as 2000 besides.
MOST_WORK = 200_000_000

AREA_MEAN = (
    "A mean over an area has no largest place between its samples; the error of its "
    "sum is not bounded."
)
AT_CONDUCTORS = (
    "The zone's clearance is 0, so it reaches up to conductors, beside which no bound "
    "holds; enter a clearance."
)


def certified_maximum(
    fields: CaseFields,
    region: Region,
    quantity: Quantity,
    found: Found,
    *,
    tolerance: float = TOLERANCE,
    most_work: int = MOST_WORK,
    progress: Progress | None = None,
) -> tuple[Certificate, Found]:
    """As `certified_maxima`, of one quantity."""
    ((certificate, better),) = certified_maxima(
        fields,
        region,
        [quantity],
        [found],
        tolerance=tolerance,
        most_work=most_work,
        progress=progress,
    )
    return certificate, better


def certified_maxima(
    fields: CaseFields,
    region: Region,
    quantities: Sequence[Quantity],
    found: Sequence[Found],
    *,
    tolerance: float = TOLERANCE,
    most_work: int = MOST_WORK,
    progress: Progress | None = None,
) -> list[tuple[Certificate, Found]]:
    """Upper bounds of the largest values of quantities in a region.

    The region is covered by boxes. In each the field is expanded to second order at
    the centre, so that what cancels there cancels in the bound, and the rest is
    bounded by third derivatives segment by segment, and by what filaments differ from
    sections. Boxes that may hold more than the value found and the tolerance are cut;
    those wholly masked are left out, those masked in a part count as a whole. A higher
    value at a centre takes the place of the value found.

    Parameters
    ----------
    fields, region, quantities
        As searched.
    found
        What the search found, of each quantity.
    tolerance : float
        By how much the bound may exceed the value found. Relative.
    most_work : int
        In segments; after it the bound reached so far is told.

    Returns
    -------
    list of (Certificate, Found)
        What is proven, and the largest value now.

    Raises
    ------
    ValueError
        When the tolerance is not above 0.
    ComputationCancelled
        When `fields.cancelled` says so.

    Notes
    -----
    The bound holds for even current in sections as entered, currents as entered, and
    double precision without error. Where boxes masked in a part reach the smallest
    size, it includes up to that much of what is masked.
    """
    if not tolerance > 0:
        raise ValueError(f"tolerance {tolerance} is not above 0")
    if region.rule == "area mean":
        return unproven(found, tolerance, AREA_MEAN)
    search = Branching(fields, region, quantities, found, tolerance)
    if not search.asked:
        return unproven(found, tolerance, NO_FIELD)
    while len(search.open) and search.work < most_work:
        stop_if(fields.cancelled)
        if progress is not None:
            progress(search.work / most_work, "Proving the maximum")
        search.step()
        if search.touches and region.clearance == 0.0:
            return unproven(search.best(), tolerance, AT_CONDUCTORS)
    return search.results()
