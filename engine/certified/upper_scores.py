"""Upper bounds of quantities in boxes, by the same rules by which they are read.

Every quantity is a norm of the phasors of all components at all heights: it is convex,
and of a sum at most the sum. In a box the phasors are affine but for a rest; on the
affine part the quantity is largest at a corner, and to it comes the quantity of the
rest. The curvatures along the sides are taken half way, as if at the middle of their
range, which halves what they leave.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from engine.case_fields import CaseCurrents
from engine.certified.boxes import Boxes
from engine.certified.expansions import Expansion
from engine.certified.masking import MASKED, PART, Masked
from engine.evaluations import Evaluation, Quantity
from engine.weighted_peak import SAMPLING_SLACK, as_ratio_sum

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Bools = NDArray[np.bool_]

#: By how much the search for the worst time shift may exceed the true worst: its
#: samples are raised by ½ (π/128)² Σ |x_k| with 2 Σ |x_k| below the square. Relative.
_SHIFT_SLACK = 2e-4

#: By how much the sampled weighted peak of a cycle may miss the true one.
_PEAK_SLACK = SAMPLING_SLACK

#: Of the largest mean: to a ten-thousandth of the largest value.
_HALVINGS = 14


@dataclass(frozen=True, eq=False)
class Enclosure:
    """Phasors of c components in n boxes at q heights.

    Attributes
    ----------
    centres : (c, q, n, 3) complex
        Of the filaments. [T]
    corners : (c, q, n, k, 3) complex
        Of the affine part. [T]
    rests : (c, q, n) float
        Bound of the rest. [T]
    """

    centres: Complexes
    corners: Complexes
    rests: Floats

    def of_components(self, which: slice) -> Enclosure:
        """Some of the components."""
        return Enclosure(self.centres[which], self.corners[which], self.rests[which])


def enclosure(boxes: Boxes, expansions: Sequence[Expansion]) -> Enclosure:
    """Enclose the phasors in boxes from their expansions at q heights."""
    rows = np.stack([e.rows for e in expansions], axis=1)
    third = np.stack([e.third for e in expansions], axis=1)
    second = np.stack([e.second for e in expansions], axis=1)
    residue = np.stack([e.residue for e in expansions], axis=1)
    h = boxes.halves
    values, slopes, curvatures = rows[..., 0, :], rows[..., 1:4, :], rows[..., 4:, :]
    quarter = 0.25 * np.stack([h[:, 0] ** 2, h[:, 1] ** 2], axis=1)
    middles = values + np.einsum("ns,cqnsx->cqnx", quarter, curvatures[..., ::2, :])
    steps = boxes.signs * h[:, None, :]
    corners = middles[..., None, :] + np.einsum("nks,cqnsx->cqnkx", steps, slopes)
    shares = np.stack([quarter[:, 0], h[:, 0] * h[:, 1], quarter[:, 1]], axis=1)
    bent = np.einsum("ns,cqns->cqn", shares, np.linalg.norm(curvatures, axis=-1))
    # Curvatures that the third side has a part in are bounded without cancellation.
    thick = h[:, 2] * (np.hypot(h[:, 0], h[:, 1]) + 0.5 * h[:, 2])
    with np.errstate(invalid="ignore"):
        rests = bent + boxes.reaches**3 / 6.0 * third + residue
        rests += np.where(thick > 0.0, thick * second, 0.0)
    return Enclosure(values, corners, rests)


def _aligned(sizes: Floats) -> Complexes:
    """Phasors (c, p, 3) of such sizes (c, p), all along one axis and in phase.

    No other directions and angles make a quantity larger.
    """
    b = np.zeros((*sizes.shape, 3), np.complex128)
    b[..., 0] = sizes
    return b


def _at_any_angle(quantity: Quantity) -> Quantity:
    """What bounds the quantity of a rest whose angles are not known.

    The angles of a weighted peak decide whether crests meet; the sum of ratios is
    what they come to at most.
    """
    if quantity.level is None or not quantity.is_weighted:
        return quantity
    return replace(quantity, level=as_ratio_sum(quantity.level))


def unit_scores(case: CaseCurrents, quantity: Quantity) -> Floats:
    """(c,) score of one tesla in one component alone. [1/T] or [-]"""
    c = len(case.components)
    alone = Evaluation(case, _aligned(np.eye(c)), np.zeros(c, np.bool_), 1)
    return alone.unmasked_score(quantity)


def centre_scores(
    case: CaseCurrents,
    quantities: Sequence[Quantity],
    enclosed: Enclosure,
    masks: Masked,
) -> Floats:
    """(quantities, n) scores at the centres, masked where a height is."""
    c, q = enclosed.rests.shape[:2]
    masked = (masks.states == MASKED).reshape(-1)
    there = Evaluation(case, enclosed.centres.reshape(c, -1, 3), masked, q)
    return np.array([there.unmasked_score(quantity) for quantity in quantities])


def upper_scores(
    case: CaseCurrents,
    quantities: Sequence[Quantity],
    enclosed: Enclosure,
    masks: Masked,
) -> Floats:
    """Upper bounds of quantities of one case in boxes.

    Parameters
    ----------
    enclosed : Enclosure
        Of the case's components.
    masks : Masked
        Whether each height counts in all, in a part or nowhere of the box.

    Returns
    -------
    (quantities, n) float
        Infinite where the field is not bounded.
    """
    masked = masks.states == MASKED
    # What is masked may lie in a conductor, where nothing is bounded.
    rests = np.where(masked, 0.0, enclosed.rests)
    bounded = np.isfinite(rests).all(axis=(0, 1))
    rests = np.where(bounded, rests, 0.0)
    c, q, n = rests.shape
    k = enclosed.corners.shape[3]
    whole = Evaluation(
        case, enclosed.corners.reshape(c, -1, 3), np.repeat(masked, k, 1).reshape(-1), q
    )
    rest = Evaluation(case, _aligned(rests.reshape(c, -1)), masked.reshape(-1), q)
    torn: Bools = np.any(masks.states == PART, axis=0) & (q > 1)
    uppers = []
    for quantity in quantities:
        highest = whole.unmasked_score(quantity).reshape(n, k).max(axis=1)
        upper = highest + rest.unmasked_score(_at_any_angle(quantity))
        if np.any(torn):
            corners = enclosed.corners[:, :, torn]
            at_heights = _by_height(case, quantity, corners, rests[:, :, torn])
            upper[torn] = _largest_mean(at_heights, masks[torn])
        if quantity.level is None and whole.total(quantity.kind)[1]:
            upper *= 1.0 + _SHIFT_SLACK
        if quantity.is_weighted:
            upper *= 1.0 + _PEAK_SLACK
        uppers.append(np.where(bounded, upper, np.inf))
    return np.array(uppers)


def _by_height(
    case: CaseCurrents, quantity: Quantity, corners: Complexes, rests: Floats
) -> Floats:
    """(q, n) upper bounds at each height alone."""
    c, q, n, k, _ = corners.shape
    open_everywhere = np.zeros(q * n * k, np.bool_)
    whole = Evaluation(case, corners.reshape(c, -1, 3), open_everywhere, 1)
    rest = Evaluation(case, _aligned(rests.reshape(c, -1)), open_everywhere[: q * n], 1)
    highest = whole.unmasked_score(quantity).reshape(q, n, k).max(axis=2)
    of_rest = rest.unmasked_score(_at_any_angle(quantity))
    upper: Floats = highest + of_rest.reshape(q, n)
    return upper


def _largest_mean(scores: Floats, masks: Masked) -> Floats:
    """(n,) bound of the mean over all heights that count and any of those that may.

    Heights that are tied count together, but for loose ones, which may be masked
    besides. A mean of norms is at least the norm of the mean. A mean exceeds x where
    the excesses over x add up to more than 0; the bound is the x where they no longer
    can, by halving.
    """
    states, ties = masks.states, masks.ties
    sure, maybe = (states != MASKED) & (states != PART), states == PART
    tied = (ties[:, None] == ties[None]) & maybe[:, None] & maybe[None]
    # Each group once, by its first height.
    first = maybe & (np.argmax(tied, axis=1) == np.arange(len(ties))[:, None])
    low = np.zeros(scores.shape[1])
    high: Floats = np.where(sure | maybe, scores, 0.0).max(axis=0)
    for _ in range(_HALVINGS):
        middle = 0.5 * (low + high)
        over = scores - middle
        together = np.where(masks.loose, np.maximum(over, 0.0), over)
        groups = np.where(tied, together[None], 0.0).sum(axis=1)
        total = np.where(sure, over, 0.0).sum(axis=0)
        total += np.where(first, np.maximum(groups, 0.0), 0.0).sum(axis=0)
        low, high = np.where(total > 0, middle, low), np.where(total > 0, high, middle)
    return high
