"""The base and its variants side by side: one table of places, and maps of differences.

All columns are assessed in the same way; a place that a variant raises stands beside
those that it lowers.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Literal

from engine.assessment import assess
from engine.decisions import worst_comparisons
from engine.errors import Cancelled, Progress
from engine.field import ResponseCache
from engine.items import Item
from engine.layout import Layout
from engine.levels import Kind
from engine.places import Receptor, Zone
from engine.results import Assessment, Comparison, State
from engine.variants import layout_of, variant_called

Change = Literal["lower", "higher", "same within 1 %", "not comparable"]

#: What differs by less is called the same, as a part of the base's value.
SAME_WITHIN = 0.01

_KINDS: tuple[Kind, ...] = ("AC", "DC")


@dataclass(frozen=True, eq=False)
class Column:
    """The base (variant None) or one variant, assessed.

    Attributes
    ----------
    differing_cases : tuple of str
        Ids of the load cases that are not those of the base: values then differ for
        that reason too.
    """

    variant: str | None
    title: str
    assessment: Assessment
    differing_cases: tuple[str, ...] = ()


@dataclass(frozen=True)
class Cell:
    """One place in one column, in the worst of its counted load cases.

    Attributes
    ----------
    value : float or None
        What is compared with the level, in its basis; without a level, or where it
        cannot be compared, the largest RMS resultant. [T]
    kind : "AC", "DC" or None
    case : str
        Id of the load case.
    ratio : float or None
        To the level.
    state : State or None
        None without a level.
    reason : str
        Why there is no value or no comparison; empty otherwise.
    is_bound : bool
        The value is an upper bound, because angles are unknown.
    change : Change or None
        Of the value against the base's, AC with AC and DC with DC; None in the base.
    relative : float or None
        By how much, as a part of the base's value.
    ratio_change : Change or None
        Of the ratio, which can rise with harmonics while the value falls.
    place_differs : bool
        The zone or receptor is not that of the base.
    """

    value: float | None = None
    kind: Kind | None = None
    case: str = ""
    ratio: float | None = None
    state: State | None = None
    reason: str = ""
    is_bound: bool = False
    change: Change | None = None
    relative: float | None = None
    ratio_change: Change | None = None
    place_differs: bool = False


@dataclass(frozen=True)
class Row:
    """A place against one level, or its AC or DC field where it has none for it.

    `level` is empty for a field. `cells` stand in the order of the columns.
    """

    place: str
    title: str
    is_zone: bool
    level: str
    kind: Kind | None
    cells: tuple[Cell, ...]


@dataclass(frozen=True, eq=False)
class VariantComparison:
    """The table: the base first, then the variants in their order."""

    columns: tuple[Column, ...]
    rows: tuple[Row, ...]

    def raised(self) -> tuple[tuple[str, str], ...]:
        """Pairs of variant and place where value or ratio rises over the base's."""
        return tuple(
            dict.fromkeys(
                (column.variant, row.place)
                for row in self.rows
                for column, cell in zip(self.columns, row.cells, strict=True)
                if column.variant is not None
                and "higher" in (cell.change, cell.ratio_change)
            )
        )


def compare_variants(
    layout: Layout,
    *,
    variants: Sequence[str] | None = None,
    cache: ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> VariantComparison:
    """Assess the base and its variants, and set them side by side.

    Parameters
    ----------
    layout : Layout
        The base with its variants.
    variants
        Ids or names; None: all.
    cache
        What the variants leave as it is is computed once with it.

    Raises
    ------
    UserError
        When there is no such variant.
    ComputationCancelled
        When `cancelled` says so.
    """
    names = [v.id for v in layout.variants] if variants is None else variants
    chosen = [variant_called(layout, name) for name in names]
    cache = ResponseCache() if cache is None else cache
    ids: list[str | None] = [None, *(v.id for v in chosen)]
    titles = ["Base", *(v.title for v in chosen)]
    columns = []
    for k, (variant, title) in enumerate(zip(ids, titles, strict=True)):
        told = None if progress is None else _part(progress, k, len(ids), title)
        made = layout_of(layout, variant)
        assessment = assess(made, cache=cache, cancelled=cancelled, progress=told)
        columns.append(column_of(layout, variant, assessment))
    return comparison_table(columns)


def column_of(layout: Layout, variant: str | None, assessment: Assessment) -> Column:
    """A column from an assessment that is there already.

    Parameters
    ----------
    layout : Layout
        The base with its variants.
    assessment : Assessment
        Of ``layout_of(layout, variant)``.
    """
    if variant is None:
        return Column(None, "Base", assessment)
    base = {case.id: case for case in layout.cases}
    own = {case.id: case for case in assessment.layout.cases}
    differing = [
        id for id in dict.fromkeys([*base, *own]) if base.get(id) != own.get(id)
    ]
    found = variant_called(layout, variant)
    return Column(found.id, found.title, assessment, tuple(differing))


def comparison_table(columns: Sequence[Column]) -> VariantComparison:
    """The table of columns, of which the first is the base.

    Raises
    ------
    ValueError
        When the first is not the base, or another one is.
    """
    if not columns or [k for k, c in enumerate(columns) if c.variant is None] != [0]:
        raise ValueError("the base must be the first column, and only that")
    readers = [_Reader(column.assessment) for column in columns]
    rows = []
    for place in dict.fromkeys(id for reader in readers for id in reader.places):
        first = next(r.places[place] for r in readers if place in r.places)
        for level, kind in _keys(place, readers):
            cells = [reader.cell(place, level, kind) for reader in readers]
            against = [
                cells[0],
                *(
                    _against(cells[0], cell, readers[0], reader, place)
                    for cell, reader in zip(cells[1:], readers[1:], strict=True)
                ),
            ]
            is_zone = isinstance(first, Zone)
            rows.append(Row(place, first.title, is_zone, level, kind, tuple(against)))
    return VariantComparison(tuple(columns), tuple(rows))


def change(base: float | None, value: float | None) -> Change:
    """How a value stands to that of the base; not comparable where one has none.

    Examples
    --------
    >>> change(100.0, 100.9), change(100.0, 98.0)
    ('same within 1 %', 'lower')
    """
    if base is None or value is None:
        return "not comparable"
    if abs(value - base) <= SAME_WITHIN * base:
        return "same within 1 %"
    return "higher" if value > base else "lower"


def _part(progress: Progress, k: int, n: int, title: str) -> Progress:
    def told(part: float, text: str) -> None:
        progress((k + part) / n, f"{title}: {text}")

    return told


class _Reader:
    """The worst counted values of one assessment, by place."""

    def __init__(self, assessment: Assessment) -> None:
        layout = assessment.layout
        self.places: dict[str, Item] = {
            place.id: place for place in (*layout.zones, *layout.receptors)
        }
        self.compared: dict[str, dict[str, Comparison]] = {}
        for comparison in worst_comparisons(assessment):
            self.compared.setdefault(comparison.place, {})[comparison.level] = (
                comparison
            )
        self._largest: dict[tuple[str, Kind], Cell] = {}
        self._reasons: dict[str, str] = {}
        counted = {c.case.id for c in assessment.cases if c.case.counted}
        for found in _fields(assessment, counted):
            key = found[0]
            kept = self._largest.get(key)
            if kept is None or (found[1].value or 0.0) > (kept.value or 0.0):
                self._largest[key] = found[1]
        for zone in assessment.zones:
            self._reasons[zone.zone.id] = zone.reason
        for receptor in assessment.receptors:
            reasons = dict.fromkeys(f.reason for f in receptor.fields if f.reason)
            self._reasons[receptor.receptor.id] = " ".join(reasons)

    def kinds(self, place: str) -> list[Kind]:
        """What flows in any counted case."""
        return [kind for kind in _KINDS if (place, kind) in self._largest]

    def cell(self, place: str, level: str, kind: Kind | None) -> Cell:
        if place not in self.places:
            return Cell(reason="It is not in this layout.")
        if not level:
            assert kind is not None
            return self._field(place, kind)
        compared = self.compared.get(place, {}).get(level)
        if compared is None:
            return Cell(reason="It names no such level in a counted load case.")
        if compared.state == "not evaluable" or compared.details is None:
            kinds = self.kinds(place)
            shown = self._field(place, kinds[0]) if kinds else Cell()
            return Cell(
                shown.value, shown.kind, compared.case, None, compared.state,
                compared.reason, shown.is_bound,
            )  # fmt: skip
        return Cell(
            compared.value, compared.kind, compared.case, compared.ratio,
            compared.state, "", compared.details.is_bound,
        )  # fmt: skip

    def _field(self, place: str, kind: Kind) -> Cell:
        found = self._largest.get((place, kind))
        if found is not None:
            return found
        reason = self._reasons.get(place, "")
        if reason:
            return Cell(kind=kind, reason=reason)
        return Cell(value=0.0, kind=kind)


def _fields(
    assessment: Assessment, counted: set[str]
) -> Iterator[tuple[tuple[str, Kind], Cell]]:
    """The resultants of places in counted load cases."""
    for zone in assessment.zones:
        for m in zone.maxima:
            if m.case in counted:
                cell = Cell(m.value, m.kind, m.case, is_bound=m.details.is_bound)
                yield (zone.zone.id, m.kind), cell
    for receptor in assessment.receptors:
        for field in receptor.fields:
            values: tuple[tuple[Kind, float | None], ...] = (
                ("AC", field.ac),
                ("DC", field.dc),
            )
            for kind, value in values:
                if field.case in counted and value is not None:
                    cell = Cell(value, kind, field.case, is_bound=field.is_bound)
                    yield (receptor.receptor.id, kind), cell


def _keys(place: str, readers: Sequence[_Reader]) -> Iterator[tuple[str, Kind | None]]:
    """Levels of a place, and kinds of field that no level row shows."""
    levels = dict.fromkeys(
        level for reader in readers for level in reader.compared.get(place, {})
    )
    for level in levels:
        yield level, None
    for kind in _KINDS:
        flows = any(kind in reader.kinds(place) for reader in readers)
        shown = bool(levels) and all(
            any(c.kind == kind for c in reader.compared.get(place, {}).values())
            for reader in readers
            if place in reader.places
        )
        if flows and not shown:
            yield "", kind
    if not levels and not any(reader.kinds(place) for reader in readers):
        yield "", "AC"


def _against(
    base: Cell, cell: Cell, before: _Reader, after: _Reader, place: str
) -> Cell:
    """A cell of a variant with what it is against the base."""
    one, other = before.places.get(place), after.places.get(place)
    differs = one is not None and other is not None and _elsewhere(one, other)
    alike = base.kind == cell.kind
    old, new = (base.value, cell.value) if alike else (None, None)
    relative = new / old - 1.0 if old and new is not None else None
    of_ratio = None
    if base.ratio is not None and cell.ratio is not None:
        of_ratio = change(base.ratio, cell.ratio)
    return replace(
        cell,
        change=change(old, new),
        relative=relative,
        ratio_change=of_ratio,
        place_differs=differs,
    )


def _elsewhere(one: Item, other: Item) -> bool:
    """Whether a place is judged elsewhere or otherwise in the variant."""
    if isinstance(one, Receptor) and isinstance(other, Receptor):
        return one.at != other.at
    if isinstance(one, Zone) and isinstance(other, Zone):
        names = (
            "outline", "storey", "floor_level", "heights", "volume", "rule",
            "clearance",
        )  # fmt: skip
        return any(getattr(one, name) != getattr(other, name) for name in names)
    return True
