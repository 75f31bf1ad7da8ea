"""What each closed circuit gives at a place: its share, and the value without it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from engine import field
from engine.case_fields import CaseCurrents, CaseFields
from engine.closed_circuits import UnclosedPiece, closed_circuits
from engine.contributions import label_responses, net_current_effects
from engine.items import Point3
from engine.layout import Layout
from engine.levels import Kind, is_kind
from engine.results import NetCurrentEffect

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]


@dataclass(frozen=True, eq=False)
class FrequencyShare:
    """A circuit's part of the field at one frequency.

    Attributes
    ----------
    frequency : float
        [Hz]
    share : float
        Projection on the whole field of this frequency; negative where it cancels.
        The shares at one frequency sum to its resultant. [T]
    alone, without : float
        Resultant of this circuit alone; of everything else. [T]
    field : (c, 3) complex
        RMS phasors of x, y and z of the components of this frequency. [T]
    """

    frequency: float
    share: float
    alone: float
    without: float
    field: Complexes

    @property
    def acts(self) -> Literal["adds", "cancels"]:
        """In words."""
        return "cancels" if self.share < 0 else "adds"


@dataclass(frozen=True, eq=False)
class PlaceShare:
    """A closed circuit's part of the field, over all frequencies of the kind.

    Attributes
    ----------
    circuits : tuple of str
        Ids; several where they close only together.
    share, alone, without : float
        As `FrequencyShare`, over the frequencies. [T]
    per_ampere : float or None
        Field alone per ampere of the circuit's largest conductor current, RMS over
        the frequencies; None without current. [T/A]
    """

    circuits: tuple[str, ...]
    share: float
    alone: float
    without: float
    per_ampere: float | None
    by_frequency: tuple[FrequencyShare, ...]

    @property
    def acts(self) -> Literal["adds", "cancels"]:
        """In words."""
        return "cancels" if self.share < 0 else "adds"


@dataclass(frozen=True, eq=False)
class PlaceShares:
    """Where the field at a place comes from.

    Attributes
    ----------
    at : Point3
        [m]
    total : float
        RMS resultant of the phasors as they stand; the shares of all circuits and
        `unclosed_share` sum to it. [T]
    shown : float
        The value that maps and assessments show: larger than `total` where angles are
        unknown, as `bound_reason` says. [T]
    shares : tuple of PlaceShare
        Largest effect first.
    unclosed : tuple of UnclosedPiece
        Circuits that get no share, since no part of a field is theirs alone.
    unclosed_share : float
        What they give together. [T]
    net_currents : tuple of NetCurrentEffect
        What 1 A of net current in each circuit gives here, most first.
    """

    at: Point3
    case: str
    kind: Kind
    total: float
    shown: float
    is_bound: bool
    bound_reason: str
    shares: tuple[PlaceShare, ...]
    unclosed: tuple[UnclosedPiece, ...]
    unclosed_share: float
    net_currents: tuple[NetCurrentEffect, ...]


def place_shares(
    layout: Layout,
    fields: CaseFields,
    case: CaseCurrents,
    at: Point3,
    kind: Kind = "AC",
) -> PlaceShares:
    """The closed circuits' parts of the field at a place.

    Parameters
    ----------
    fields, case
        Of the layout.
    at
        Not inside a conductor. [m]
    kind
        AC: all frequencies above 0 Hz; DC: 0 Hz only.
    """
    rows = [k for k, c in enumerate(case.components) if is_kind(c.frequency, kind)]
    frequencies = np.array([case.components[k].frequency for k in rows])
    responses = fields.at(at).responses
    whole = case.currents[rows] @ responses
    per_ampere = label_responses(fields.conductors, responses)
    known = closed_circuits(layout, case.phasors)
    shares = []
    rest = whole.copy()
    for circuits in known.closed:
        b = np.zeros_like(whole)
        largest = 0.0
        for key, phasors in case.phasors.values.items():
            if key[0] in circuits and key in per_ampere:
                b += phasors[rows, None] * per_ampere[key]
                largest = max(largest, float(np.linalg.norm(phasors[rows])))
        rest -= b
        if np.any(b != 0):
            shares.append(_share(circuits, whole, b, frequencies, largest))
    value = field.combined(whole[:, None, :], [case.components[k] for k in rows])
    shown = value.total_ac if kind == "AC" else value.dc
    unclosed = known.unclosed
    return PlaceShares(
        at=at,
        case=case.case.id,
        kind=kind,
        total=_size(whole),
        shown=0.0 if shown is None else float(shown[0]),
        is_bound=value.is_bound,
        bound_reason=value.reason,
        shares=tuple(sorted(shares, key=lambda part: -abs(part.share))),
        unclosed=unclosed,
        unclosed_share=_projection(rest, whole) if unclosed else 0.0,
        net_currents=net_current_effects(layout.circuits, fields.conductors, responses),
    )


def _share(
    circuits: tuple[str, ...],
    whole: Complexes,
    b: Complexes,
    frequencies: Floats,
    largest: float,
) -> PlaceShare:
    parts: list[FrequencyShare] = []
    for frequency in sorted(set(frequencies.tolist())):
        own = frequencies == frequency
        if np.any(b[own] != 0):
            parts.append(
                FrequencyShare(
                    frequency=frequency,
                    share=_projection(b[own], whole[own]),
                    alone=_size(b[own]),
                    without=_size(whole[own] - b[own]),
                    field=b[own],
                )
            )
    alone = _size(b)
    return PlaceShare(
        circuits=circuits,
        share=_projection(b, whole),
        alone=alone,
        without=_size(whole - b),
        per_ampere=alone / largest if largest > 0 else None,
        by_frequency=tuple(parts),
    )


def _projection(b: Complexes, whole: Complexes) -> float:
    """Part of |whole| that b makes; 0 where there is no field. [T]"""
    total = _size(whole)
    return float(np.sum((b * whole.conj()).real)) / total if total > 0 else 0.0


def _size(b: Complexes) -> float:
    """RMS resultant over axes and components. [T]"""
    return float(np.linalg.norm(b))
