"""What an assessment says, as frozen values: everything that a report prints."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np
from numpy.typing import NDArray

from engine.certificate import Certificate
from engine.circuits import LoadCase
from engine.criteria import ReferenceLevel
from engine.items import Point3
from engine.layout import Layout
from engine.levels import Kind
from engine.places import Receptor, Zone

if TYPE_CHECKING:
    from engine.currents import AngleNote
    from engine.faults import Remark

State = Literal[
    "below", "below, U reaches", "above, U reaches", "above", "not evaluable"
]

#: In the order of growing concern.
STATES: tuple[State, ...] = (
    "below",
    "below, U reaches",
    "not evaluable",
    "above, U reaches",
    "above",
)


@dataclass(frozen=True)
class AtFrequency:
    """The field at one frequency, and what a level says there.

    `level` and `ratio` are None without a level. The values are in the level's basis
    and component, RMS resultants without a level. [Hz, T, T, -]
    """

    frequency: float
    value: float
    level: float | None = None
    ratio: float | None = None


@dataclass(frozen=True)
class Contribution:
    """A circuit's part of the value at a place.

    Attributes
    ----------
    share : float
        Projection of its phasors on those of the whole field, over axes and
        frequencies: Re Σ B_k · conj(B) / |B|. The shares of all circuits sum to |B|,
        the RMS resultant; a negative share weakens the field. [T]
    alone : float
        RMS resultant of this circuit's field. [T]
    without : float
        RMS resultant without this circuit. [T]
    """

    circuit: str
    share: float
    alone: float
    without: float


@dataclass(frozen=True)
class NetCurrentEffect:
    """What 1 A of net current in the most sensitive circuit alone would give.

    The ampere flows once along the circuit's conductors of the `labels`, shared as they
    share their current; its return is far away and not part of the figure. [T/A]
    """

    circuit: str
    labels: tuple[str, ...]
    per_ampere: float


@dataclass(frozen=True)
class PlaceDetails:
    """What a report says about the place of a maximum.

    Attributes
    ----------
    at : Point3
        The place, of a mean over heights the place of its largest part. [m]
    height : float or None
        Above the floor of the zone; None for a mean over heights and for receptors,
        whose floor is not stated. [m]
    by_height : pairs of height and value
        At the heights of the zone over the same point on plan; masked ones left out.
        [m, T]
    by_frequency
        At the place, or the mean that was compared.
    near_field : bool
        Nearer than two bar widths or diameters: computed with even current.
    step : float
        Last step of the search. [m]
    is_bound, bound_reason
        Whether the value is an upper bound because angles are unknown, and why.
    certificate : Certificate or None
        What is proven of the maximum, where that was asked for: a ratio against a
        level, else a flux density.
    """

    at: Point3
    height: float | None
    by_height: tuple[tuple[float, float], ...]
    by_frequency: tuple[AtFrequency, ...]
    near_field: bool
    step: float
    is_bound: bool
    bound_reason: str
    contributions: tuple[Contribution, ...]
    net_current: NetCurrentEffect | None
    certificate: Certificate | None = None

    @property
    def upper(self) -> float | None:
        """Proven upper bound of the ratio, or without a level of the value [T]."""
        return None if self.certificate is None else self.certificate.upper


@dataclass(frozen=True)
class Maximum:
    """The largest RMS resultant of a zone or receptor by its spatial rule, no level.

    `kind` "AC" is the total over all frequencies above 0 Hz. [T] `reason` says what
    blocks the load case, so that the value is not that of a real room; empty otherwise.
    """

    case: str
    kind: Kind
    value: float
    details: PlaceDetails
    reason: str = ""


@dataclass(frozen=True)
class Comparison:
    """A zone or receptor against one level in one load case.

    Attributes
    ----------
    place, level, case : str
        Ids of the zone or receptor, of the level, of the load case.
    counted : bool
        Whether the case counts, or is for information.
    state, reason
        The reason says why it is not evaluable, in sentences; empty otherwise.
    kind : "AC", "DC" or None
        Which comparison this is: of the two the one in the state of more concern, then
        with the larger ratio.
    value : float or None
        The compared field in the level's basis and component; over several frequencies
        the root of the sum of squares. [T]
    level_value : float or None
        The level where one frequency is compared. [T]
    ratio, uncertainty_ratio : float or None
        B/L over the frequencies by the level's rule, and U in the same measure.
    upper_ratio : float or None
        No place has a larger ratio, where a bound was asked for and proven. The state
        is that of the bound where the value itself is not above the level.
    upper : float or None
        The same as a flux density where one frequency is compared. [T]
    uncertainty : float or None
        Expanded uncertainty U of the value. [T]
    other_kind_ratio : float or None
        The ratio of the other of AC and DC at its own worst place, where both were
        compared.
    area_above : float or None
        Area of the zone where the ratio is above 1, at the worst height; None for
        points. [m²]
    masked_share : float
        Share of the zone's area, over its heights, where nobody is.
    not_covered : tuple of float
        Frequencies that flow and that the level does not deal with. [Hz]
    details : PlaceDetails or None
    """

    place: str
    level: str
    case: str
    counted: bool
    state: State
    reason: str = ""
    kind: Kind | None = None
    value: float | None = None
    level_value: float | None = None
    ratio: float | None = None
    uncertainty_ratio: float | None = None
    uncertainty: float | None = None
    upper_ratio: float | None = None
    upper: float | None = None
    other_kind_ratio: float | None = None
    area_above: float | None = None
    masked_share: float = 0.0
    not_covered: tuple[float, ...] = ()
    details: PlaceDetails | None = None


@dataclass(frozen=True)
class ZoneResult:
    """A zone: its maxima without any level, and its comparisons.

    Attributes
    ----------
    floor : float or None
        Level of the zone's floor above the datum. [m]
    area : float
        [m²]
    masked_shares : by id of the load case
        Share of the area, over the heights, where nobody is.
    searched : str
        How the maximum was looked for, as a sentence.
    reason : str
        Why nothing could be computed at all; empty otherwise.
    """

    zone: Zone
    floor: float | None
    area: float
    masked_shares: Mapping[str, float]
    maxima: tuple[Maximum, ...]
    comparisons: tuple[Comparison, ...]
    searched: str
    reason: str = ""


@dataclass(frozen=True, eq=False)
class ReceptorField:
    """The field at a receptor in one load case.

    Attributes
    ----------
    reason : str
        Why there is no value here (inside a conductor, ...); empty otherwise.
    ac, dc : float or None
        RMS resultant of all frequencies above 0 Hz; at 0 Hz. [T]
    frequencies : (c,) float
        Of the components. [Hz]
    components : (c, 3) complex
        RMS phasors of x, y and z. [T]
    semi_axes : (c, 2) float
        RMS semi-major and semi-minor axes of each component's ellipse. [T]
    measured_ratio : float or None
        Measured over the calculated resultant of the same kind of field.
    measured_kind : Kind or None
        Which of both that is: `ac` or `dc`; None without a ratio.
    """

    case: str
    counted: bool
    reason: str
    ac: float | None
    dc: float | None
    frequencies: NDArray[np.float64]
    components: NDArray[np.complex128]
    semi_axes: NDArray[np.float64]
    by_frequency: tuple[AtFrequency, ...]
    is_bound: bool
    bound_reason: str
    near_field: bool
    measured_ratio: float | None
    contributions: tuple[Contribution, ...]
    net_current: NetCurrentEffect | None
    measured_kind: Kind | None = None


@dataclass(frozen=True)
class ReceptorResult:
    """A receptor: its field in every case, and its comparisons."""

    receptor: Receptor
    fields: tuple[ReceptorField, ...]
    comparisons: tuple[Comparison, ...]


@dataclass(frozen=True)
class CaseResult:
    """A load case: what was assumed of its angles, and what stands in its way.

    `reason` says why its currents could not be evaluated; empty otherwise.
    """

    case: LoadCase
    frequencies: tuple[float, ...]
    angle_notes: tuple[AngleNote, ...]
    faults: tuple[Remark, ...]
    reason: str = ""


@dataclass(frozen=True)
class Assessment:
    """All results of a layout; a function of the layout alone."""

    layout: Layout
    cases: tuple[CaseResult, ...]
    zones: tuple[ZoneResult, ...]
    receptors: tuple[ReceptorResult, ...]

    @property
    def comparisons(self) -> tuple[Comparison, ...]:
        """Of zones, then of receptors."""
        of_zones = (c for zone in self.zones for c in zone.comparisons)
        of_receptors = (c for place in self.receptors for c in place.comparisons)
        return (*of_zones, *of_receptors)

    @property
    def faults(self) -> tuple[Remark, ...]:
        """What blocks, over all cases, each once."""
        found = {f: None for case in self.cases for f in case.faults}
        return tuple(found)

    def level(self, comparison: Comparison) -> ReferenceLevel | None:
        """The level that a comparison names."""
        return next((x for x in self.layout.levels if x.id == comparison.level), None)
