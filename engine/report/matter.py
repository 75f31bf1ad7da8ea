"""Everything that the report prints, computed before any page is laid out."""

from __future__ import annotations

from dataclasses import dataclass, field

from engine.budget import Budget
from engine.circuits import LoadCase
from engine.conductor import Conductor
from engine.faults import Remark
from engine.items import ConfirmedRemark
from engine.layout import Layout
from engine.picture import MapSubject
from engine.places import Profile
from engine.profiles import FieldProfile
from engine.program_identity import ProgramIdentity
from engine.results import Assessment
from engine.retrace import Retrace
from engine.validation import Outcome
from engine.variant import Variant
from engine.variant_comparison import VariantComparison


@dataclass(frozen=True, eq=False)
class HeightMap:
    """A map of the report: one height, one load case, the zones it is for.

    `subjects` are the AC resultant, the direct field, or both, on one grid.
    """

    z: float
    case: LoadCase
    zones: tuple[str, ...]
    subjects: tuple[MapSubject, ...]


@dataclass(frozen=True, eq=False)
class ProfileResult:
    """The field along a profile of the layout."""

    profile: Profile
    found: FieldProfile


@dataclass(frozen=True, eq=False)
class TracedPlace:
    """A value taken apart, and what its place is called."""

    title: str
    found: Retrace


@dataclass(frozen=True, eq=False)
class Matter:
    """Everything that the report prints.

    Attributes
    ----------
    assessment : Assessment
        Of the whole layout.
    remarks : tuple of Remark
        Those that are not cleared.
    unit : str
        Display unit of flux density, for every value.
    conductors : tuple of Conductor
        Empty where they cannot be built.
    maps : tuple of HeightMap
    left_out : int
        Maps that were not computed for want of room.
    confirmed : pairs of Remark and ConfirmedRemark
        Those that a named person lets stand.
    outcomes : tuple of Outcome or None
        Of the outside checks, run now; None when they were not asked for.
    profiles : tuple of ProfileResult
    comparison : VariantComparison or None
        The base beside its variants; None without any.
    budgets : tuple of Budget
        Of the places, as far as they were computed.
    traced : tuple of TracedPlace
        The place of most concern of each category.
    whole : Layout or None
        The base with its variants; None: the layout that was assessed.
    variant : Variant or None
        The one that was assessed; None: the base.
    """

    assessment: Assessment
    remarks: tuple[Remark, ...]
    unit: str
    conductors: tuple[Conductor, ...] = ()
    maps: tuple[HeightMap, ...] = ()
    left_out: int = 0
    confirmed: tuple[tuple[Remark, ConfirmedRemark], ...] = ()
    outcomes: tuple[Outcome, ...] | None = None
    profiles: tuple[ProfileResult, ...] = ()
    comparison: VariantComparison | None = None
    budgets: tuple[Budget, ...] = ()
    traced: tuple[TracedPlace, ...] = ()
    whole: Layout | None = None
    variant: Variant | None = None
    identity: ProgramIdentity = field(default_factory=ProgramIdentity)

    @property
    def layout(self) -> Layout:
        """The layout that was assessed."""
        return self.assessment.layout

    @property
    def source(self) -> Layout:
        """The layout as its file has it, with every variant."""
        return self.layout if self.whole is None else self.whole

    @property
    def shown(self) -> str:
        """What the title block names: "base", or the variant."""
        return "base" if self.variant is None else self.variant.title
