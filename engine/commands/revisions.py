"""`issue` and `changes`: freeze a revision, and say what was edited and moved since."""

from __future__ import annotations

import re
from dataclasses import asdict, dataclass, replace
from pathlib import Path
from typing import Any

import msgspec

from engine import units
from engine.assessment import assess
from engine.errors import Cancelled, Progress, UserError
from engine.field import ResponseCache
from engine.items import IssuedResult
from engine.layout import Layout
from engine.layout_file import read, write
from engine.report.choices import USUAL, Choices
from engine.report.writing import write_report
from engine.results import Assessment
from engine.revisions import (
    Changes,
    MovedResult,
    Recomputed,
    as_issued,
    changes_since,
    issued,
    issued_results,
    recomputed,
)


def issue_revision(
    path: Path,
    revision: str,
    date: str,
    *,
    folder: Path | None = None,
    note: str = "",
    unit: str | None = None,
    progress: Progress | None = None,
) -> tuple[Path, Path]:
    """Freeze a layout and its report; the layout at `path` then lists the revision.

    Parameters
    ----------
    folder : path, optional
        Of the frozen files; None: that of the layout.

    Returns
    -------
    Paths of the frozen layout and report: the layout's name, the revision, the ending.

    Raises
    ------
    UserError
        As `freeze`; the layout stays as it was then.
    """
    made, frozen, printed = freeze(
        read(path),
        path if folder is None else folder / path.name,
        revision,
        date,
        note=note,
        choices=Choices(unit=unit),
        progress=progress,
    )
    write(path, made)
    return frozen, printed


def freeze(
    layout: Layout,
    path: Path,
    revision: str,
    date: str,
    *,
    note: str = "",
    choices: Choices = USUAL,
    assessment: Assessment | None = None,
    cache: ResponseCache | None = None,
    progress: Progress | None = None,
    cancelled: Cancelled | None = None,
) -> tuple[Layout, Path, Path]:
    """Write a layout and its report as a revision, beside each other.

    Parameters
    ----------
    path : path
        Of the layout's file, which is not written: its folder and name are those of
        the frozen files.
    revision, date, note : str
        As the user writes them.
    choices : Choices
        Of the report; a revision is of the base.
    assessment : Assessment, optional
        Of this very layout; None: it is made here.

    Returns
    -------
    The layout that lists the revision, and the paths of the frozen layout and report.

    Raises
    ------
    UserError
        When the revision was issued before, or a file is there already or cannot be
        written; none is left then.
    ComputationCancelled
        When `cancelled` says so; nothing is written then.
    """
    stem = f"{path.stem}-rev-{_plain(revision)}"
    frozen, printed = path.parent / f"{stem}.json", path.parent / f"{stem}.pdf"
    for target in (frozen, printed):
        if target.exists():
            raise UserError(
                f"Revision {revision} was not issued: {target.name} is there already. "
                "What was issued is not written over; choose another revision."
            )
    tell = progress
    if assessment is None:
        assessment = assess(
            layout,
            certify=True,
            cache=cache,
            cancelled=cancelled,
            progress=None if tell is None else lambda x, text: tell(0.4 * x, text),
        )
    made = issued(layout, assessment, revision, date, note=note)
    write_report(
        made,
        printed,
        replace(choices, kind="report", variant=None),
        # The revision is all that differs: the results are those of `made` too.
        assessment=replace(assessment, layout=made),
        cache=cache,
        progress=None if tell is None else lambda x, t: tell(0.4 + 0.6 * x, t),
        cancelled=cancelled,
    )
    try:
        write(frozen, made)
    except UserError:
        printed.unlink(missing_ok=True)
        raise
    return made, frozen, printed


def _plain(text: str) -> str:
    """A revision's name as a part of a file's name."""
    return re.sub(r"[^A-Za-z0-9._-]+", "-", text).strip("-.") or "unnamed"


def changes_between(
    old: Layout, new: Layout, *, progress: Progress | None = None
) -> tuple[Changes, Recomputed | None]:
    """What was edited and moved, by results of this program for both layouts.

    The second value says how far the old one's results are from those it was issued
    with; None where it was not issued, or edited since.
    """
    before = assess(old, certify=True, progress=progress)
    after = assess(new, certify=True, progress=progress)
    changes = changes_since(
        new,
        old,
        results=issued_results(after),
        results_before=issued_results(before),
    )
    return changes, recomputed(old, before)


def as_text(
    changes: Changes, again: Recomputed | None, names: dict[str, str], unit: str
) -> str:
    """Changes as printed."""
    lines = ["Edits"]
    for edit in changes.edits:
        text = f"  {edit.kind} {edit.title}"
        if edit.field:
            text += f", {edit.words}: {edit.before} → {edit.after}"
        lines.append(text)
    if not changes.edits:
        lines.append("  none")
    lines += ["", "Results that moved"]
    lines += [f"  {moved_text(m, names, unit)}" for m in changes.moved] or ["  none"]
    if again is not None:
        lines += ["", recomputed_text(again, names, unit)]
    return "\n".join(lines) + "\n"


def moved_text(moved: MovedResult, names: dict[str, str], unit: str) -> str:
    """A result that moved, in words."""
    known = moved.known
    where = [names.get(known.place, known.place)]
    if known.level:
        where.append(names.get(known.level, known.level))
    where.append(names.get(known.case, known.case))
    change = moved.relative
    text = f"{', '.join(where)}: {_result(moved.before, unit)} → "
    text += _result(moved.after, unit)
    return text if change is None else f"{text} ({100 * change:+.3g} %)"


def _result(result: IssuedResult | None, unit: str) -> str:
    if result is None:
        return "none"
    parts = []
    if result.value is not None:
        parts.append(units.flux_density_text(result.value, unit, 4))
    if result.ratio is not None:
        parts.append(f"ratio {units.significant(result.ratio, 4)}")
    if result.state:
        parts.append(result.state)
    return ", ".join(parts) or "no value"


@dataclass(frozen=True)
class Opening:
    """What became of an issued layout, in a sentence, and whether results moved."""

    sentence: str
    moved: bool = False


def opening(
    layout: Layout,
    assessment: Assessment | None = None,
    unit: str | None = None,
    *,
    cancelled: Cancelled | None = None,
) -> Opening | None:
    """What is to be said when a layout that may have been issued is opened.

    Parameters
    ----------
    assessment : Assessment, optional
        Of this layout, by this program; None: it is made here where it is needed.
    unit : str, optional
        Display unit of flux density; None: the layout's.

    Returns
    -------
    Opening or None
        None where nothing was issued.

    Raises
    ------
    ComputationCancelled
        When `cancelled` says so.
    """
    if not layout.revisions:
        return None
    last = layout.revisions[-1]
    if not as_issued(layout, last):
        return Opening(
            f"The layout was edited after revision {last.revision} was issued; its "
            "results are not held against what was issued then."
        )
    if not last.results:
        return Opening(
            f"Revision {last.revision} was issued without results, so nothing can be "
            "held against it."
        )
    if assessment is None:
        assessment = assess(layout, certify=True, cancelled=cancelled)
    again = recomputed(layout, assessment)
    assert again is not None
    shown = unit or layout.settings.flux_density_unit
    sentence = recomputed_text(again, names_of(layout), shown)
    return Opening(sentence, moved=again.largest is not None)


def recomputed_text(again: Recomputed, names: dict[str, str], unit: str) -> str:
    """How far an issued layout's results are from what was issued, as a sentence."""
    head = (
        f"Revision {again.revision.revision} was issued with Lodestead "
        f"{again.revision.program_version}; computed again with {again.version}: "
    )
    if again.largest is None:
        return head + "every result is the same."
    text = moved_text(again.largest, names, unit)
    if len(again.moved) == 1:
        return f"{head}one result differs: {text}."
    return f"{head}{len(again.moved)} results differ, most of all {text}."


def as_json(changes: Changes, again: Recomputed | None) -> dict[str, Any]:
    """Changes as plain values, flux densities in tesla."""
    plain: dict[str, Any] = {
        "edits": [asdict(edit) for edit in changes.edits],
        "moved": [_moved_json(m) for m in changes.moved],
        "recomputed": None,
    }
    if again is not None:
        plain["recomputed"] = {
            "revision": again.revision.revision,
            "issued_with": again.revision.program_version,
            "computed_with": again.version,
            "moved": [_moved_json(m) for m in again.moved],
        }
    return plain


def _moved_json(moved: MovedResult) -> dict[str, Any]:
    return {
        "before": None if moved.before is None else msgspec.to_builtins(moved.before),
        "after": None if moved.after is None else msgspec.to_builtins(moved.after),
        "relative": moved.relative,
    }


def names_of(*layouts: Layout) -> dict[str, str]:
    """Names of items and load cases by their ids."""
    names = {item.id: item.title for layout in layouts for item in layout.items()}
    names.update({case.id: case.title for layout in layouts for case in layout.cases})
    return names
