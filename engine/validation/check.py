"""One comparison of the field engine with a number from outside the project."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass


@dataclass(frozen=True, kw_only=True)
class Check:
    """A published number, where it stands, and how the engine computes it.

    Attributes
    ----------
    id : str
        Short and unique: "B1 at 10 m".
    source : str
        Who published it; "common practice" and "textbook result" where nobody in
        particular did.
    case : str
        Statement of what is computed.
    published : float
        The number as printed, or the value of the published formula. [unit]
    unit : str
        Unit of the published and of the computed value.
    tolerance : float
        Largest deviation that counts as agreement, either way. [unit]
    reason : str
        Why the tolerance is what it is.
    from_memory : bool
        The source was not opened when the number was entered.
    compute : callable
        Takes nothing and returns the engine's value. [unit]
    """

    id: str
    source: str
    case: str
    published: float
    unit: str
    tolerance: float
    reason: str
    from_memory: bool = False
    compute: Callable[[], float]


@dataclass(frozen=True)
class Outcome:
    """A check and what the engine computed for it."""

    check: Check
    value: float

    @property
    def deviation(self) -> float:
        """Computed less published. [the check's unit]"""
        return self.value - self.check.published

    @property
    def relative_deviation(self) -> float | None:
        """Deviation over the published value; None where that is zero."""
        if self.check.published == 0:
            return None
        return self.deviation / abs(self.check.published)

    @property
    def agrees(self) -> bool:
        """Whether the deviation lies within the check's tolerance."""
        return abs(self.deviation) <= self.check.tolerance


def outcome(check: Check) -> Outcome:
    """Compute one check with the engine."""
    return Outcome(check, check.compute())
