"""What is proven of a maximum: an upper bound beside the largest value found."""

from __future__ import annotations

from dataclasses import dataclass

from engine.items import Point3


@dataclass(frozen=True)
class Certificate:
    """No value in a region is larger than `upper`.

    The proof is for even current in the conductors as entered, but for the rounding of
    double precision.

    Attributes
    ----------
    upper : float or None
        Of the same quantity as `found`; None where nothing is proven.
    found : float
        Largest value found. [T] or ratio [-]
    at : Point3
        Its place; of a mean over heights its plan position with z of the floor. [m]
    tolerance : float
        By how much the bound may exceed the value found. Relative.
    reached : bool
        Whether the bound is within the tolerance.
    cells : int
        Boxes that were bounded.
    reason : str
        Why nothing is proven, or why the tolerance is not reached; else empty.
    """

    upper: float | None
    found: float
    at: Point3
    tolerance: float
    reached: bool
    cells: int
    reason: str = ""
