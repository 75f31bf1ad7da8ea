"""What is proven of maxima and comparisons, as printed beside them."""

from __future__ import annotations

from engine.certificate import Certificate
from engine.results import Comparison, Maximum
from engine.units import bound_beside, in_unit, significant_above


def proof_of_maximum(maximum: Maximum, unit: str) -> str:
    """What is proven of a largest value; empty where it was not asked for."""
    proof = maximum.details.certificate
    if proof is None:
        return ""
    upper = ""
    if proof.upper is not None:
        upper = f"{significant_above(in_unit(proof.upper, unit))} {unit}"
    return _words(proof, upper)


def proof_of_comparison(comparison: Comparison, unit: str) -> str:
    """What is proven of a comparison; empty where it was not asked for.

    Bounds are rounded up, with the figures that show their side of the level.
    """
    proof = None if comparison.details is None else comparison.details.certificate
    if proof is None:
        return ""
    parts = []
    if comparison.upper is not None and comparison.level_value is not None:
        limit = in_unit(comparison.level_value, unit)
        parts.append(f"{bound_beside(in_unit(comparison.upper, unit), limit)} {unit}")
    if comparison.upper_ratio is not None:
        parts.append(f"ratio {bound_beside(comparison.upper_ratio, 1.0)}")
    return _words(proof, ", ".join(parts))


def _words(proof: Certificate, upper: str) -> str:
    if proof.upper is None:
        return f"no bound proven: {proof.reason}"
    if proof.reached:
        return f"at most {upper}, proven to {100 * proof.tolerance:g} %"
    above = significant_above(100 * (proof.upper / proof.found - 1), 2)
    return (
        f"at most {upper}, proven; that is {above} % above the largest value found: "
        f"{proof.reason}"
    )
