"""Further results of the report: profiles, variants, budgets of uncertainty."""

from __future__ import annotations

from dataclasses import dataclass

from engine.assessment import assess
from engine.budget import Budget
from engine.decisions import worst_comparisons
from engine.errors import Cancelled, Progress, UserError, stop_if
from engine.field import ResponseCache
from engine.layout import Layout
from engine.loaded_layout import LoadedLayout, loaded_layout
from engine.place_budgets import place_budgets
from engine.places import Receptor, Zone
from engine.profiles import profile
from engine.report.matter import ProfileResult, TracedPlace
from engine.results import Assessment, Comparison
from engine.retrace import retrace
from engine.variant_comparison import VariantComparison, column_of, comparison_table
from engine.variants import layout_of

#: Places that get a budget of their own; more are too long to read.
MOST_BUDGETS = 40

#: Profiles that are printed.
MOST_PROFILES = 30


@dataclass(frozen=True, eq=False)
class Further:
    """Profiles, the comparison of variants, and budgets."""

    profiles: tuple[ProfileResult, ...]
    comparison: VariantComparison | None
    budgets: tuple[Budget, ...]
    traced: tuple[TracedPlace, ...]


#: A note has none of them.
NOTHING_FURTHER = Further((), None, (), ())


def further_results(
    whole: Layout,
    variant: str | None,
    assessment: Assessment,
    cache: ResponseCache | None,
    cancelled: Cancelled | None,
    progress: Progress | None,
) -> Further:
    """What a report has besides the assessment and the maps.

    Parameters
    ----------
    whole : Layout
        The base with its variants.
    variant : str or None
        Id of the variant that was assessed; None: the base.
    """
    stop_if(cancelled)
    if progress is not None:
        progress(0.0, "Computing profiles, options and budgets")
    layout = assessment.layout
    loaded = loaded_layout(layout, layout.cases, cache, cancelled)
    profiles = _profiles(loaded, cancelled)
    traced = _traced(loaded, assessment)
    comparison = _comparison(whole, variant, assessment, cache, cancelled)
    if progress is not None:
        progress(0.6, "Computing budgets of uncertainty")
    budgets = _budgets(assessment, cache, cancelled)
    return Further(profiles, comparison, budgets, traced)


def _traced(loaded: LoadedLayout, assessment: Assessment) -> tuple[TracedPlace, ...]:
    """The place of most concern of each category, taken apart."""
    layout = loaded.layout
    places: tuple[Zone | Receptor, ...] = (*layout.zones, *layout.receptors)
    titles = {place.id: place for place in places}
    chosen: dict[str, Comparison] = {}
    for c in worst_comparisons(assessment):
        category = titles[c.place].category
        if c.details is None or c.kind is None or c.case not in loaded.index:
            continue
        if category not in chosen or (c.ratio or 0) > (chosen[category].ratio or 0):
            chosen[category] = c
    made = []
    for c in chosen.values():
        assert c.details is not None
        assert c.kind is not None
        case = loaded.fields.cases[loaded.index[c.case]]
        found = retrace(loaded.fields, case, c.details.at, c.kind)
        made.append(TracedPlace(titles[c.place].title, found))
    return tuple(made)


def _profiles(
    loaded: LoadedLayout, cancelled: Cancelled | None
) -> tuple[ProfileResult, ...]:
    layout = loaded.layout
    if not layout.profiles or not loaded.fields.cases:
        return ()
    made = []
    for line in layout.profiles[:MOST_PROFILES]:
        stop_if(cancelled)
        try:
            found = profile(loaded.fields, line.path, levels=layout.levels)
        except UserError:
            continue  # A line without length has no profile.
        made.append(ProfileResult(line, found))
    return tuple(made)


def _comparison(
    whole: Layout,
    chosen: str | None,
    assessment: Assessment,
    cache: ResponseCache | None,
    cancelled: Cancelled | None,
) -> VariantComparison | None:
    """The base beside its variants; one of them is assessed already."""
    if not whole.variants:
        return None
    columns = []
    for variant in (None, *(each.id for each in whole.variants)):
        stop_if(cancelled)
        found = assessment
        if variant != chosen:
            layout = layout_of(whole, variant)
            found = assess(layout, certify=True, cache=cache, cancelled=cancelled)
        columns.append(column_of(whole, variant, found))
    return comparison_table(columns)


def _budgets(
    assessment: Assessment, cache: ResponseCache | None, cancelled: Cancelled | None
) -> tuple[Budget, ...]:
    layout = assessment.layout
    places = [place.id for place in (*layout.zones, *layout.receptors)]
    try:
        return place_budgets(
            assessment,
            places=places[:MOST_BUDGETS],
            cache=cache,
            cancelled=cancelled,
        )
    except UserError:
        return ()  # What keeps the field from being determined stands in the remarks.
