"""The table of base and variants, made in the background; what is known is kept."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from engine.assessment import assess
from engine.errors import Cancelled
from engine.field import ResponseCache
from engine.layout import Layout
from engine.results import Assessment
from engine.variant_comparison import VariantComparison, column_of, comparison_table
from engine.variants import layout_of

#: Assessments that are remembered: an edit of one variant leaves the others.
_REMEMBERED = 24


@dataclass(frozen=True)
class TableRequest:
    """All columns of a layout with its variants, and of one that is held as before."""

    whole: Layout
    held: Layout | None = None


@dataclass(frozen=True, eq=False)
class TableAnswer:
    """The table and what it was asked for; `before` is that of the held layout."""

    request: TableRequest
    table: VariantComparison
    before: VariantComparison | None = None


class VariantTables:
    """Makes tables in a thread of its own.

    Parameters
    ----------
    tell : callable
        Gets a share from 0 to 1 and what is being done, in the thread.
    """

    def __init__(self, tell: Callable[[float, str], None]) -> None:
        self._tell = tell
        self._cache = ResponseCache()
        self._known: list[Assessment] = []

    def table(self, request: TableRequest, cancelled: Cancelled) -> TableAnswer:
        """Assess base and variants, those that are not known yet.

        Raises
        ------
        UserError
            When a layout cannot be evaluated.
        ComputationCancelled
            When `cancelled` says so.
        """
        before = None
        if request.held is not None:
            before = self._table(request.held, cancelled)
        return TableAnswer(request, self._table(request.whole, cancelled), before)

    def _table(self, whole: Layout, cancelled: Cancelled) -> VariantComparison:
        columns: list[tuple[str | None, str]] = [(None, "Base")]
        columns += [(v.id, v.title) for v in whole.variants]
        made = []
        for k, (variant, title) in enumerate(columns):
            told = self._part(k, len(columns), title)
            layout = layout_of(whole, variant)
            assessment = self._assessed(layout, cancelled, told)
            made.append(column_of(whole, variant, assessment))
        return comparison_table(made)

    def _part(self, k: int, n: int, title: str) -> Callable[[float, str], None]:
        return lambda part, text: self._tell((k + part) / n, f"{title}: {text}")

    def _assessed(
        self,
        layout: Layout,
        cancelled: Cancelled,
        told: Callable[[float, str], None],
    ) -> Assessment:
        known = next((a for a in self._known if a.layout == layout), None)
        if known is None:
            known = assess(
                layout, cache=self._cache, cancelled=cancelled, progress=told
            )
            self._known = [known, *self._known][:_REMEMBERED]
        return known
