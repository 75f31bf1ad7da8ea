"""Revisions that were issued: what they froze, what was edited and moved since.

A digest ties a revision to its layout, another one to its results; the results stand
in the revision too, so that a later program can be held against what was issued.
"""

from __future__ import annotations

import hashlib
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import msgspec
from msgspec import structs
from msgspec.structs import replace

import engine
from engine.edits import added, unused_id
from engine.errors import UserError
from engine.field_words import field_words
from engine.items import IssuedResult, IssuedRevision, Item
from engine.layout import Layout
from engine.layout_file import encode
from engine.moved_places import told_places
from engine.origin_words import told_origin
from engine.origins import value_text
from engine.results import Assessment

#: Results that differ by less are the same. Relative.
SAME = 1e-6

#: Figures of results that count for their digest.
_FIGURES = 9

#: Before and after of values whose short texts are the same.
_TOO_LONG = ("as it was", "changed in parts that are too long to print")

_Key = tuple[str, str, str, str]


@dataclass(frozen=True)
class Edit:
    """A difference between two layouts: an item came, went, or one value changed.

    `field` is the value's dotted name, "origins." before it where its origin changed;
    `words` say it to people.
    """

    kind: str
    item: str
    title: str
    field: str = ""
    before: str = ""
    after: str = ""
    words: str = ""


@dataclass(frozen=True)
class MovedResult:
    """A result that differs; None where there was or is none."""

    before: IssuedResult | None
    after: IssuedResult | None

    @property
    def known(self) -> IssuedResult:
        """What says which result it is."""
        found = self.after or self.before
        assert found is not None
        return found

    @property
    def relative(self) -> float | None:
        """Change of the value over the value before; None where it has no meaning.

        It has none between AC and DC, of which a comparison names the one of concern.
        """
        if self.before is None or self.after is None:
            return None
        if self.before.kind != self.after.kind:
            return None
        old, new = self.before.value, self.after.value
        if old is None or new is None or old == 0:
            return None
        return new / old - 1.0


@dataclass(frozen=True)
class Changes:
    """What was edited since a layout was issued, and which results moved."""

    edits: tuple[Edit, ...]
    moved: tuple[MovedResult, ...]


@dataclass(frozen=True)
class Recomputed:
    """An issued layout computed again: how far the results are from what was issued.

    `largest` is the result that moved most; None where every one is the same.
    """

    revision: IssuedRevision
    version: str
    moved: tuple[MovedResult, ...]
    largest: MovedResult | None


def layout_digest(layout: Layout) -> str:
    """SHA-256 of the layout's file, the issued revisions left out.

    Raises
    ------
    UserError
        When the layout could not be saved.
    """
    return hashlib.sha256(encode(replace(layout, revisions=()))).hexdigest()


def issued_results(assessment: Assessment) -> tuple[IssuedResult, ...]:
    """The results that a revision freezes: largest values, receptors, comparisons."""
    return tuple(_results(assessment))


def _results(assessment: Assessment) -> Iterator[IssuedResult]:
    for zone in assessment.zones:
        for m in zone.maxima:
            yield IssuedResult(
                place=zone.zone.id, case=m.case, kind=m.kind, value=m.value
            )
    for point in assessment.receptors:
        for f in point.fields:
            for kind, value in (("AC", f.ac), ("DC", f.dc)):
                if value is not None:
                    at = point.receptor.id
                    yield IssuedResult(place=at, case=f.case, kind=kind, value=value)
    for c in assessment.comparisons:
        yield IssuedResult(
            place=c.place,
            case=c.case,
            level=c.level,
            kind=c.kind or "",
            value=c.value,
            ratio=c.ratio,
            state=c.state,
        )


def results_digest(results: Sequence[IssuedResult]) -> str:
    """SHA-256 of results, their numbers rounded to nine figures."""
    rounded = [
        replace(r, value=_rounded(r.value), ratio=_rounded(r.ratio)) for r in results
    ]
    return hashlib.sha256(msgspec.json.encode(rounded)).hexdigest()


def _rounded(value: float | None) -> float | None:
    return None if value is None else float(f"{value:.{_FIGURES}g}")


def issued(
    layout: Layout, assessment: Assessment, revision: str, date: str, *, note: str = ""
) -> Layout:
    """The layout issued under a revision: title block and list of revisions say so.

    Parameters
    ----------
    assessment : Assessment
        Of this layout, all of its load cases.
    revision, date : str
        As the user writes them; they become those of the title block.

    Raises
    ------
    UserError
        When the revision has no name, was issued before, or the layout could not be
        saved.
    ValueError
        When the assessment is of another layout.
    """
    if assessment.layout is not layout and assessment.layout != layout:
        raise ValueError("the assessment is of another layout")
    if not revision.strip():
        raise UserError("The revision was not issued: it has no name. Enter one.")
    if not date.strip():
        raise UserError("The revision was not issued: it has no date. Enter one.")
    if any(r.revision == revision for r in layout.revisions):
        raise UserError(
            f"Revision {revision} was not issued: it was issued before. Choose another "
            "name; what was issued stays as it is."
        )
    titled = replace(layout, title=replace(layout.title, revision=revision, date=date))
    results = issued_results(assessment)
    entry = IssuedRevision(
        id=unused_id(layout, "revision-1"),
        revision=revision,
        date=date,
        note=note,
        layout_digest=layout_digest(titled),
        results_digest=results_digest(results),
        program_version=engine.__version__,
        results=results,
    )
    return added(titled, entry)


def as_issued(layout: Layout, revision: IssuedRevision) -> bool:
    """Whether nothing was edited since the revision was issued."""
    try:
        return layout_digest(layout) == revision.layout_digest
    except UserError:
        return False


def recomputed(layout: Layout, assessment: Assessment) -> Recomputed | None:
    """The last issued revision held against results of now.

    None where none was issued, or where the layout was edited since: then the results
    differ for other reasons.
    """
    if not layout.revisions:
        return None
    last = layout.revisions[-1]
    if not last.results or not as_issued(layout, last):
        return None
    moved = moved_results(last.results, issued_results(assessment))
    largest = max(moved, key=lambda m: abs(m.relative or 0.0), default=None)
    return Recomputed(last, engine.__version__, moved, largest)


def changes_since(
    layout: Layout,
    before: Layout,
    *,
    results: Sequence[IssuedResult] = (),
    results_before: Sequence[IssuedResult] = (),
) -> Changes:
    """What was edited since `before`, and which of the results moved.

    Parameters
    ----------
    results, results_before
        Of the two layouts, as `issued_results` gives them.
    """
    edits = tuple(_edits(before, layout))
    return Changes(edits, moved_results(results_before, results))


def moved_results(
    before: Sequence[IssuedResult], after: Sequence[IssuedResult]
) -> tuple[MovedResult, ...]:
    """Results that differ in value or state, came or went."""
    old = {_key(r): r for r in before}
    new = {_key(r): r for r in after}
    moved = []
    for key in dict.fromkeys([*old, *new]):
        was, now = old.get(key), new.get(key)
        if was is None or now is None or not _same(was, now):
            moved.append(MovedResult(was, now))
    return tuple(moved)


def _key(result: IssuedResult) -> _Key:
    """A comparison is one result, whichever of AC and DC is of more concern."""
    kind = "" if result.level else result.kind
    return result.place, result.case, result.level, kind


def _same(was: IssuedResult, now: IssuedResult) -> bool:
    if was.state != now.state or was.kind != now.kind:
        return False
    pairs = ((was.value, now.value), (was.ratio, now.ratio))
    return all(_close(a, b) for a, b in pairs)


def _close(a: float | None, b: float | None) -> bool:
    if a is None or b is None:
        return a is b
    return abs(a - b) <= SAME * max(abs(a), abs(b))


def _edits(before: Layout, after: Layout) -> Iterator[Edit]:
    old, new = _items(before), _items(after)
    for id, item in old.items():
        if id not in new:
            yield Edit("removed", id, item.title)
    for id, item in new.items():
        if id not in old:
            yield Edit("added", id, item.title)
        elif item != old[id]:
            yield from _field_edits(old[id], item, (before, after))


def _kind_words(item: Item) -> str:
    """Which kind of item it is: "conductor loop"."""
    return re.sub("(?<!^)(?=[A-Z])", " ", type(item).__name__).lower()


def _items(layout: Layout) -> dict[str, Item]:
    revisions = {revision.id for revision in layout.revisions}
    return {id: x for id, x in layout.by_id().items() if id not in revisions}


def _origin_edits(
    was: Item, now: Item, layouts: tuple[Layout, Layout]
) -> Iterator[Edit]:
    """Which values came to have another origin, one edit each."""
    old, new = ({o.field: o for o in item.origins} for item in (was, now))
    for field in dict.fromkeys([*old, *new]):
        if old.get(field) == new.get(field):
            continue
        told = [
            "assumed" if origin is None else told_origin(layout, origin)
            for origin, layout in zip(
                (old.get(field), new.get(field)), layouts, strict=True
            )
        ]
        name = f"origins.{field}"
        words = field_words(name, type(now))
        yield Edit("changed", now.id, now.title, name, told[0], told[1], words)


def _field_edits(
    was: Item, now: Item, layouts: tuple[Layout, Layout]
) -> Iterator[Edit]:
    if type(was) is not type(now):
        kinds = (_kind_words(was), _kind_words(now))
        yield Edit("changed", now.id, now.title, "kind", *kinds, "kind")
        return
    for field in structs.fields(now):
        a, b = getattr(was, field.name), getattr(now, field.name)
        if field.name == "origins":
            yield from _origin_edits(was, now, layouts)
        elif a != b:
            texts = value_text(a, field.name), value_text(b, field.name)
            if texts[0] == texts[1]:
                texts = told_places(a, b) or _TOO_LONG
            words = field_words(field.name, type(now))
            yield Edit("changed", now.id, now.title, field.name, *texts, words)
