"""A profile's curves, crossings, fall-off, hand values: asked and answered; no Qt."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from app.map_request import case_of, comparable_levels
from engine.case_fields import CaseCurrents
from engine.criteria import ReferenceLevel
from engine.errors import Cancelled, UserError
from engine.fall_off import (
    FallOff,
    NoFallOff,
    distances_from_nearest,
    distances_from_run,
    fall_off,
)
from engine.hand_formulas import HandFormula, NoHandFormula, hand_formulas
from engine.items import Point3
from engine.layout import Layout
from engine.levels import Kind, is_kind, level_at
from engine.loaded_layout import LoadedLayout, loaded_layout
from engine.places import Profile
from engine.profile_sampling import Line
from engine.profiles import KINDS, FieldProfile, ProfileCurve, profile
from engine.zone_assessment import zone_floor

Floats = npt.NDArray[np.float64]

#: Places along the line where hand formulas are tried.
HAND_PLACES = 40

#: Lines of a level that differ less are one on a plot.
_ALIKE = 0.02

#: A level that varies less than this along the line is drawn straight.
_STRAIGHT = 1e-3

NEAREST = "the nearest conductor"


@dataclass(frozen=True)
class ProfileRequest:
    """What is asked: one profile, over load cases and heights.

    Attributes
    ----------
    profile : str
        Id.
    cases : tuple of str
        Ids, the one shown first.
    heights : tuple of float
        Levels above the datum; none: as the line is drawn. [m]
    held : Layout or None
        Whose curves stand beside, as before.
    """

    layout: Layout
    profile: str
    cases: tuple[str, ...]
    heights: tuple[float, ...] = ()
    held: Layout | None = None


@dataclass(frozen=True, eq=False)
class LevelLine:
    """A reference level against the distance along the line.

    Attributes
    ----------
    values : (n,) float
        Where the curves would cross it. [T]
    curves : tuple of int
        Those that it holds for, by their place among all curves.
    value : float or None
        Where it is the same along all of the line. [T]
    is_stated : bool
        The value is the level's own, at the one frequency that flows.
    """

    level: str
    kind: Kind
    title: str
    along: Floats
    values: Floats
    curves: tuple[int, ...]
    value: float | None
    is_stated: bool


@dataclass(frozen=True)
class HandPlace:
    """Hand formulas at one place of the line, in the first case and height."""

    along: float
    at: Point3
    formulas: tuple[HandFormula | NoHandFormula, ...]

    @property
    def best(self) -> HandFormula | None:
        """Of those that hold, the one that all else disturbs least."""
        held = [f for f in self.formulas if isinstance(f, HandFormula)]
        return min(held, key=lambda f: f.others, default=None)


@dataclass(frozen=True, eq=False)
class Profiled:
    """The answer.

    Attributes
    ----------
    kinds : tuple of Kind
        That flow in any of the cases.
    fall_offs : by what r is measured from, a result for every curve and kind
    reasons : tuple of str
        Why load cases have no curve.
    before : Profiled or None
        Of the layout that is held.
    """

    request: ProfileRequest
    item: Profile
    found: FieldProfile
    kinds: tuple[Kind, ...]
    names: Mapping[str, str]
    levels: tuple[LevelLine, ...]
    fall_offs: Mapping[str, Mapping[tuple[int, Kind], FallOff | NoFallOff]]
    hands: tuple[HandPlace, ...]
    reasons: tuple[str, ...]
    before: Profiled | None = None


def profile_of(layout: Layout, id: str) -> Profile | None:
    """The profile with that id."""
    return next((p for p in layout.profiles if p.id == id), None)


def level_heights(layout: Layout, item: Profile) -> tuple[float, ...]:
    """Heights worth offering: the line's own, and those of zones above their floors."""
    own = {z for _, _, z in item.path}
    low, high = min(own) - 2.0, max(own) + 2.0
    heights = set(own) if len(own) == 1 else set()
    for zone in layout.zones:
        floor = zone_floor(layout, zone)
        if floor is not None:
            heights |= {round(floor + h, 9) for h in zone.heights}
    return tuple(sorted(z for z in heights if low <= z <= high))


def profiled(request: ProfileRequest, cancelled: Cancelled | None = None) -> Profiled:
    """Compute a profile.

    Raises
    ------
    UserError
        When no field can be computed along the line.
    ComputationCancelled
        When `cancelled` says so.
    """
    layout = request.layout
    item = profile_of(layout, request.profile)
    if item is None:
        raise UserError("The profile is not there any more: choose another one.")
    cases = [case_of(layout, case) for case in request.cases]
    loaded = loaded_layout(layout, cases, None, cancelled)
    reasons = tuple(f"{r.case.title}: {r.reason}" for r in loaded.cases if r.reason)
    fields = loaded.fields
    if not fields.cases:
        raise UserError("No field along this line. " + " ".join(reasons))
    heights = request.heights or tuple(sorted({z for _, _, z in item.path}))
    levels = comparable_levels(layout, heights)
    try:
        found = profile(fields, item.path, heights=request.heights, levels=levels)
    except UserError as error:
        raise UserError(f"“{item.title}” is not plotted. {error}") from error
    kinds = _kinds(fields.cases)
    return Profiled(
        request, item, found, kinds, _names(layout),
        _level_lines(found, levels, fields.cases),
        _fall_offs(loaded, found, kinds), _hands(loaded, found, kinds[0]), reasons,
    )  # fmt: skip


def with_held(request: ProfileRequest, cancelled: Cancelled | None = None) -> Profiled:
    """As `profiled`, with that of the layout that is held beside it, where it has one.

    Errors as `profiled`.
    """
    done = profiled(request, cancelled)
    if request.held is None or request.held is request.layout:
        return done
    try:
        before = profiled(replace(request, layout=request.held, held=None), cancelled)
    except UserError:
        return done
    return replace(done, before=before)


def _kinds(cases: tuple[CaseCurrents, ...]) -> tuple[Kind, ...]:
    order: tuple[Kind, ...] = ("AC", "DC")
    return tuple(
        k for k in order if any(is_kind(f, k) for c in cases for f in c.frequencies)
    )


def _names(layout: Layout) -> dict[str, str]:
    names = {case.id: case.title for case in layout.cases}
    names.update({level.id: level.title for level in layout.levels})
    names.update({run.id: run.title for run in layout.runs})
    return names


def _level_lines(
    found: FieldProfile,
    levels: tuple[ReferenceLevel, ...],
    cases: tuple[CaseCurrents, ...],
) -> tuple[LevelLine, ...]:
    """Where curves would cross each level: one line for all that share their mix."""
    frequencies = {case.case.id: case.frequencies for case in cases}
    made: list[LevelLine] = []
    for level in levels:
        for kind in KINDS:
            own: list[LevelLine] = []
            for k, curve in enumerate(found.curves):
                line = _level_line(found, k, level, kind, frequencies[curve.case])
                if line is not None:
                    _add(own, line)
            made += own
    return tuple(made)


def _level_line(
    found: FieldProfile,
    k: int,
    level: ReferenceLevel,
    kind: Kind,
    frequencies: tuple[float, ...],
) -> LevelLine | None:
    """Where one curve would cross a level: at its own mix of frequencies."""
    curve = found.curves[k]
    own_uses = [u for u in curve.levels if (u.level, u.kind) == (level.id, kind)]
    values = curve.values(kind)
    if not own_uses or values is None or (ratios := own_uses[0].ratios) is None:
        return None
    shown = ~curve.mask & (ratios > 0)
    if not shown.any():
        return None
    along, at = found.along[shown], values[shown] / ratios[shown]
    own = [f for f in frequencies if is_kind(f, kind)]
    limit = level_at(level, own[0]) if len(own) == 1 else None
    value = None
    if np.ptp(at) <= _STRAIGHT * at.max():
        along = found.along[[0, -1]]
        value = float(np.median(at))
        at = np.full(2, value)
    is_stated = limit is not None and abs(limit - at.mean()) <= _STRAIGHT * limit
    if is_stated:
        value = limit
    return LevelLine(level.id, kind, level.title, along, at, (k,), value, is_stated)


def _add(lines: list[LevelLine], line: LevelLine) -> None:
    """Add a line; of those that look alike on a plot, one for all their curves."""
    for k, other in enumerate(lines):
        same = np.interp(line.along, other.along, other.values)
        if np.all(np.abs(same - line.values) <= _ALIKE * line.values):
            lines[k] = replace(
                other, curves=(*other.curves, *line.curves),
                value=other.value if other.value == line.value else None,
                is_stated=other.is_stated and line.is_stated,
            )  # fmt: skip
            return
    lines.append(line)


def _fall_offs(
    loaded: LoadedLayout, found: FieldProfile, kinds: tuple[Kind, ...]
) -> dict[str, dict[tuple[int, Kind], FallOff | NoFallOff]]:
    fields = loaded.fields
    flowing = {
        conductor.item
        for case in fields.cases
        for k, conductor in enumerate(fields.conductors)
        if conductor.role == "run" and np.any(case.currents[:, k] != 0)
    }
    made: dict[str, dict[tuple[int, Kind], FallOff | NoFallOff]] = {NEAREST: {}}
    runs = [run for run in loaded.layout.runs if run.id in flowing]
    made.update({run.id: {} for run in runs})
    for k, curve in enumerate(found.curves):
        nearest = distances_from_nearest(fields.conductors, curve.points)
        for kind in kinds:
            made[NEAREST][k, kind] = fall_off(curve, kind, nearest, NEAREST)
        for run in runs:
            away = distances_from_run(run, curve.points)
            for kind in kinds:
                made[run.id][k, kind] = fall_off(curve, kind, away, run.title)
    return made


def _hands(
    loaded: LoadedLayout, found: FieldProfile, kind: Kind
) -> tuple[HandPlace, ...]:
    curve, fields = found.curves[0], loaded.fields
    case = fields.cases[loaded.index[curve.case]]
    along = np.linspace(found.along[0], found.along[-1], HAND_PLACES)
    flat = found.path.copy()
    if curve.height is not None:
        flat[:, 2] = 0.0
    points = Line(flat).points(along)
    if curve.height is not None:
        points[:, 2] = curve.height
    free = ~fields.masked_at(case, points, 0.0)
    made = []
    for s, point in zip(along[free], points[free], strict=True):
        at = (float(point[0]), float(point[1]), float(point[2]))
        made.append(HandPlace(float(s), at, hand_formulas(fields, case, at, kind)))
    return tuple(made)


def value_at(done: Profiled, curve: ProfileCurve, kind: Kind, s: float) -> float | None:
    """The value of a curve at a distance along the line; None where masked. [T]"""
    values, along = curve.values(kind), done.found.along
    if values is None:
        return None
    k = min(max(int(np.searchsorted(along, s)), 1), len(along) - 1)
    if curve.mask[k - 1] or curve.mask[k]:
        return None
    return float(np.interp(s, along, values))
