"""Revisions issued from the desktop, and what changed since one; no Qt.

The long parts take (cancelled, progress) and are meant for a thread; what they find is
written, or shown, afterwards.
"""

from __future__ import annotations

import glob
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from msgspec import structs

from engine import layout_file
from engine.assessment import assess
from engine.edits import added
from engine.errors import Cancelled, Progress, UserError
from engine.items import IssuedResult, IssuedRevision
from engine.layout import Layout
from engine.revisions import (
    Changes,
    MovedResult,
    Recomputed,
    changes_since,
    issued_results,
    layout_digest,
    moved_results,
    recomputed,
)
from engine.units import flux_density_text, significant

if TYPE_CHECKING:
    from engine.report.choices import Choices

HEADS = ("What", "Item", "Value", "Change", "Before", "After")

#: Where frozen layouts were written, by their digest, while the program runs.
_known: dict[str, Path] = {}


@dataclass(frozen=True, eq=False)
class Issue:
    """A revision that is to be issued.

    Attributes
    ----------
    layout : Layout
        The base with its variants.
    choices : Choices
        Of the report that is frozen.
    note : str
        What changed.
    folder, name
        Of the two files, whose names end with the revision.
    """

    layout: Layout
    choices: Choices
    revision: str
    date: str
    note: str
    folder: Path
    name: str


@dataclass(frozen=True, eq=False)
class Frozen:
    """A revision that was written: the layout that lists it, and its files."""

    issue: Issue
    layout: Layout
    layout_file: Path
    report_file: Path

    @property
    def revision(self) -> IssuedRevision:
        """The one that was issued."""
        return self.layout.revisions[-1]


@dataclass(frozen=True, eq=False)
class FoundChanges:
    """What changed since a revision.

    Attributes
    ----------
    has_edits : bool
        Whether edits could be told, which takes the layout that was issued.
    again : Recomputed or None
        How far the issued layout's results are from what was issued.
    names : mapping
        Of items and load cases by their ids.
    """

    revision: IssuedRevision
    changes: Changes
    has_edits: bool
    again: Recomputed | None
    names: Mapping[str, str]
    unit: str

    def rows(self) -> list[tuple[str, ...]]:
        """The table, by `HEADS`."""
        rows = [
            (
                e.kind,
                e.title,
                e.words,
                "",
                _one_line(e.before),
                _one_line(e.after),
            )
            for e in self.changes.edits
        ]
        return [*rows, *(self._moved_row(m) for m in self.changes.moved)]

    def sentence(self) -> str:
        """What the table holds."""
        edits, moved = len(self.changes.edits), len(self.changes.moved)
        told = f"Since revision {self.revision.revision}: "
        if self.has_edits:
            told += f"{_count(edits, 'edit')}, {_count(moved, 'result')} moved."
        else:
            told += (
                f"{_count(moved, 'result')} moved. Edits are not told: that takes the "
                "layout that was issued."
            )
        return told

    def again_sentence(self) -> str:
        """How far this program is from the one that issued; empty where not known."""
        if self.again is None:
            return ""
        return recomputed_sentence(self.again, self.names, self.unit)

    def _moved_row(self, moved: MovedResult) -> tuple[str, ...]:
        known, change = moved.known, moved.relative
        name = self.names.get
        value = [name(known.level, known.level)] if known.level else [known.kind]
        value.append(name(known.case, known.case))
        return (
            "result",
            name(known.place, known.place),
            ", ".join(part for part in value if part),
            "" if change is None else f"{100 * change:+.3g} %".replace("-", "−"),
            _result_text(moved.before, self.unit),
            _result_text(moved.after, self.unit),
        )


def file_stem(path: Path | None, layout: Layout) -> str:
    """The name proposed for files, without an ending: the layout's or the project's.

    Examples
    --------
    >>> file_stem(Path("plant/hall.json"), Layout())
    'hall'
    """
    if path is not None:
        return path.stem
    # Without what file systems refuse.
    signs = (c if c.isalnum() or c in " -_" else "-" for c in layout.title.project)
    return "".join(signs).strip(" -")[:80] or "room"


def check(layout: Layout, revision: str, date: str, name: str) -> None:
    """Refuse at once what need not be computed.

    Raises
    ------
    UserError
        When revision, date or the name of the files cannot be.
    """
    opening = "The revision was not issued: "
    if not revision.strip():
        raise UserError(f"{opening}it has no name. Enter one.")
    if not date.strip():
        raise UserError(f"{opening}it has no date. Enter one.")
    if any(r.revision == revision for r in layout.revisions):
        raise UserError(
            f"Revision {revision} was not issued: it was issued before. Choose another "
            "name; what was issued stays as it is."
        )
    if not name.strip(" .") or set(name) & set('/\\:*?"<>|'):
        raise UserError(
            f"{opening}“{name}” cannot be the name of a file. Enter one without "
            'any of / \\ : * ? " < > |.'
        )


def freeze(issue: Issue, cancelled: Cancelled, progress: Progress) -> Frozen:
    """Compute and write layout and report, both or neither.

    Raises
    ------
    UserError
        When the revision cannot be issued, or a file cannot be written.
    ComputationCancelled
        When `cancelled` says so; nothing is written then.
    """
    # Here: what draws on paper takes long to load.
    from engine.commands import revisions

    made, layout_path, report_path = revisions.freeze(
        issue.layout,
        issue.folder / f"{issue.name}.json",
        issue.revision,
        issue.date,
        note=issue.note,
        choices=issue.choices,
        progress=progress,
        cancelled=cancelled,
    )
    frozen = Frozen(issue, made, layout_path, report_path)
    _known[frozen.revision.layout_digest] = layout_path
    return frozen


def recorded(layout: Layout, frozen: Frozen) -> Layout:
    """The layout with the revision in its list and its title block.

    Where it was edited while the revision was written, those edits stay: they are
    edits since.
    """
    if layout is frozen.issue.layout:
        return frozen.layout
    issue = frozen.issue
    title = structs.replace(layout.title, revision=issue.revision, date=issue.date)
    return added(structs.replace(layout, title=title), frozen.revision)


def frozen_file(path: Path | None, revision: IssuedRevision) -> Path | None:
    """Where the layout issued under a revision is; None: it has to be asked for."""
    places = [_known.get(revision.layout_digest)]
    if path is not None:
        places += [*sorted(path.parent.glob(f"{glob.escape(path.stem)}-rev-*.json"))]
    for place in places:
        if place is None or not place.is_file():
            continue
        try:
            if layout_digest(layout_file.read(place)) == revision.layout_digest:
                return place
        except UserError:
            continue
    return None


def frozen_layout(path: Path, revision: IssuedRevision) -> Layout:
    """The layout that was issued, from its file.

    Raises
    ------
    UserError
        When it cannot be read, or is another one.
    """
    layout = layout_file.read(path)
    if layout_digest(layout) != revision.layout_digest:
        raise UserError(
            f"{path.name} is not the layout that was issued as revision "
            f"{revision.revision}: it was edited since, or is another one. Choose the "
            "file that was written when the revision was issued."
        )
    _known[revision.layout_digest] = path
    return layout


def found_changes(
    layout: Layout,
    revision: IssuedRevision,
    before: Layout | None,
    cancelled: Cancelled,
    progress: Progress,
) -> FoundChanges:
    """What changed since a revision, by results of this program.

    Parameters
    ----------
    before : Layout or None
        The layout that was issued. None: results are compared with those that were
        issued, and edits are not told.

    Raises
    ------
    UserError
        When a layout cannot be assessed.
    ComputationCancelled
        When `cancelled` says so.
    """
    after = assess(
        layout, certify=True, cancelled=cancelled, progress=_part(progress, 0.0, 0.5)
    )
    now = issued_results(after)
    names, unit = _names(layout, before), layout.settings.flux_density_unit
    if before is None:
        changes = Changes((), moved_results(revision.results, now))
        return FoundChanges(revision, changes, False, None, names, unit)
    then = assess(
        before, certify=True, cancelled=cancelled, progress=_part(progress, 0.5, 1.0)
    )
    changes = changes_since(
        layout, before, results=now, results_before=issued_results(then)
    )
    again = recomputed(structs.replace(before, revisions=(revision,)), then)
    return FoundChanges(revision, changes, True, again, names, unit)


def recomputed_sentence(again: Recomputed, names: Mapping[str, str], unit: str) -> str:
    """How far an issued layout's results are from what was issued."""
    # Here: it loads what draws on paper.
    from engine.commands.revisions import recomputed_text

    return recomputed_text(again, dict(names), unit)


def _names(layout: Layout, before: Layout | None) -> dict[str, str]:
    found: dict[str, str] = {}
    for each in (before, layout):
        if each is not None:
            found.update({item.id: item.title for item in each.items()})
            found.update({case.id: case.title for case in each.cases})
    return found


def _result_text(result: IssuedResult | None, unit: str) -> str:
    if result is None:
        return "none"
    parts = []
    if result.value is not None:
        # A comparison is of AC or DC, whichever is of more concern.
        kind = f" {result.kind}" if result.level and result.kind else ""
        parts.append(flux_density_text(result.value, unit, 4) + kind)
    if result.ratio is not None:
        parts.append(f"ratio {significant(result.ratio, 4)}")
    if result.state:
        parts.append(result.state)
    return ", ".join(parts) or "no value"


def _count(count: int, noun: str) -> str:
    return f"{count or 'no'} {noun}{'' if count == 1 else 's'}"


def _one_line(text: str) -> str:
    return " ".join(text.split())


def _part(progress: Progress, start: float, end: float) -> Progress:
    return lambda share, text: progress(start + share * (end - start), text)
