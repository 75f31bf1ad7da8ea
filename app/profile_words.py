"""A profile in words: crossings, fall-off, hand formulas, captions and its table."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from app.map_request import height_figures
from app.profile_values import NEAREST, HandPlace, LevelLine, Profiled, value_at
from engine.fall_off import FallOff
from engine.hand_formulas import NoHandFormula
from engine.levels import Kind
from engine.printed_text import one_line
from engine.profile_table import ProfileTable, csv_text, profile_table
from engine.profiles import KINDS, ProfileCurve
from engine.units import (
    LENGTH_UNITS,
    flux_density_text,
    in_unit,
    significant,
    text_beside,
)

#: Lines of one level whose values differ less have one name.
_NEARLY = 1.15


def curve_text(done: Profiled, curve: ProfileCurve) -> str:
    """Case and height of a curve: "As logged, z 1.00 m"."""
    unit = done.request.layout.settings.length_unit
    case = done.names.get(curve.case, curve.case)
    if curve.height is None:
        return case
    return f"{case}, z {height_figures(curve.height, unit)} {unit}"


def short_curve_text(done: Profiled, curve: ProfileCurve) -> str:
    """What tells a curve from the others: its case, its height or both."""
    cases = {c.case for c in done.found.curves}
    heights = {c.height for c in done.found.curves}
    text = curve_text(done, curve)
    if len(cases) == 1 < len(heights) and curve.height is not None:
        return text.rsplit(", ", 1)[1]
    if len(heights) == 1:
        return done.names.get(curve.case, curve.case)
    return text


def is_of_all(done: Profiled, line: LevelLine) -> bool:
    """Whether a level's line holds for every curve of its kind of field."""
    return all(
        k in line.curves or curve.values(line.kind) is None
        for k, curve in enumerate(done.found.curves)
    )


def level_line_texts(done: Profiled, lines: Sequence[LevelLine]) -> list[str]:
    """Names of lines; lines of one level that nearly meet have one, at the first."""
    texts = []
    for line in lines:
        own = [x for x in lines if (x.level, x.kind) == (line.level, line.kind)]
        means = [float(x.values.mean()) for x in own]
        if len(own) > 1 and max(means) < _NEARLY * min(means):
            text = f"{line.title}, at each mix"
            texts.append(text if line is own[0] else "")
        else:
            texts.append(level_line_text(done, line))
    return texts


def level_line_text(done: Profiled, line: LevelLine) -> str:
    """The name of a level's line: its value, or for which mix of frequencies."""
    unit = done.request.layout.settings.flux_density_unit
    text = line.title
    if line.value is not None and line.is_stated:
        text += f" {in_unit(line.value, unit):.6g} {unit}"
    elif line.value is not None:
        text += f" ≈ {flux_density_text(line.value, unit)}"
    else:
        text += ", at this mix"
    if is_of_all(done, line):
        return text
    own = [done.found.curves[k] for k in line.curves]
    names = [short_curve_text(done, curve) for curve in own]
    cases = {curve.case for curve in own}
    if all(
        k in line.curves for k, c in enumerate(done.found.curves) if c.case in cases
    ):
        names = [done.names.get(c, c) for c in dict.fromkeys(c.case for c in own)]
    more = f" and {len(names) - 2} more" if len(names) > 2 else ""
    text = text.removesuffix(", at this mix")
    return f"{text}, mix of {' and '.join(names[:2])}{more}"


def distance_text(metres: float, unit: str) -> str:
    """A distance to a millimetre, in the display unit."""
    places = {"m": 3, "mm": 0, "ft": 2, "in": 1}[unit]
    return f"{metres / LENGTH_UNITS[unit]:.{places}f} {unit}"


def crossing_texts(done: Profiled, kind: Kind) -> tuple[str, ...]:
    """Each crossing with its distance, curve and direction."""
    unit = done.request.layout.settings.length_unit
    curves = {(c.case, c.height): c for c in done.found.curves}
    order = list(curves)
    found: dict[str, list[str]] = {}
    crossings = [c for c in done.found.crossings if c.kind == kind]
    for c in sorted(
        crossings, key=lambda c: (order.index((c.case, c.height)), c.along)
    ):
        text = f"{distance_text(c.along, unit)}, {'rising' if c.rising else 'falling'}"
        if len(curves) > 1:
            text += f" · {curve_text(done, curves[c.case, c.height])}"
        found.setdefault(c.level, []).append(text)
    made: list[str] = []
    for level, texts in found.items():
        name = done.names.get(level, level)
        if len(texts) == 1:
            made.append(f"{name} is crossed at {texts[0]}")
        else:
            made += [f"{name} is crossed at", *(f"    {text}" for text in texts)]
    return tuple(made)


def held_text(done: Profiled, kind: Kind) -> str:
    """What the first curve and the crossings were, where they are held as before."""
    before = done.before
    if before is None or kind not in before.kinds:
        return ""
    told = [*extremum_texts(before, kind), *crossing_texts(before, kind)]
    return "\n".join(
        f"Was: {text}" if not text[:1].isspace() else text for text in told
    )


def _held_curve(done: Profiled, curve: ProfileCurve) -> ProfileCurve | None:
    """The curve of the same load case and height in the layout that is held."""
    if done.before is None:
        return None
    same = (curve.case, curve.height)
    curves = done.before.found.curves
    return next((c for c in curves if (c.case, c.height) == same), None)


def fall_off_text(done: Profiled, measured_from: str, kind: Kind) -> str:
    """The fall-off of the first curve, in one sentence."""
    found = done.fall_offs.get(measured_from, {}).get((0, kind))
    unit = done.request.layout.settings.length_unit
    return "" if found is None else found.sentence(unit)


def first_measured_from(done: Profiled, kind: Kind) -> str:
    """What r is measured from unless somebody chooses: the first that gives one."""
    for name, found in done.fall_offs.items():
        if isinstance(found.get((0, kind)), FallOff):
            return name
    return NEAREST


def hand_near(done: Profiled, s: float) -> HandPlace | None:
    """The place nearest to a distance where hand formulas were tried. [m]"""
    return min(done.hands, key=lambda place: abs(place.along - s), default=None)


def hand_text(done: Profiled, place: HandPlace) -> str:
    """The hand formula there beside the calculated value, or why none holds."""
    settings = done.request.layout.settings
    where = distance_text(place.along, settings.length_unit)
    best = place.best
    if best is not None:
        sentence = best.sentence(settings.flux_density_unit)
        run = done.names.get(best.run, best.run)
        spread = 100 * (best.value / best.calculated - 1) if best.calculated else 0.0
        text = f"{spread:+.0f} %".replace("-", "−")
        return (
            f"At {where}, {run}: {sentence} ({text}). {best.formula}; {best.validity}."
        )
    none = [f for f in place.formulas if isinstance(f, NoHandFormula)]
    if not none:
        return f"At {where} no hand formula holds: no run carries current."
    said = "; ".join(f"{done.names.get(f.run, f.run)}: {f.reason}" for f in none[:3])
    more = f"; {len(none) - 3} more" if len(none) > 3 else ""
    return f"At {where} no hand formula holds. {said}{more}."


def caption_text(done: Profiled, kind: Kind) -> str:
    """Quantity, line and load cases in one line, as exports print it."""
    request = done.request
    cases = ", ".join(done.names.get(c, c) for c in request.cases)
    unit = request.layout.settings.length_unit
    length = distance_text(float(done.found.along[-1]), unit)
    heights = ", ".join(height_figures(z, unit) for z in request.heights)
    levels = f"z {heights} {unit}" if heights else _own_heights(done, unit)
    bound = " · upper bound, because angles are unknown" * any(
        c.is_bound for c in done.found.curves
    )
    return (
        f"RMS flux density, {kind} · along {done.item.title}, {length} · {levels} · "
        f"case {cases}{bound}"
    )


def _own_heights(done: Profiled, unit: str) -> str:
    own = sorted({z for _, _, z in done.item.path})
    figures = " to ".join(
        height_figures(z, unit) for z in dict.fromkeys((own[0], own[-1]))
    )
    return f"z {figures} {unit}"


def marked_text(done: Profiled, kind: Kind, s: float) -> str:
    """The values of all curves at a distance."""
    layout = done.request.layout
    unit = layout.settings.flux_density_unit
    parts = []
    for curve in done.found.curves:
        value = value_at(done, curve, kind, s)
        text = "no value" if value is None else flux_density_text(value, unit)
        held = _held_curve(done, curve)
        if done.before is not None and held is not None:
            was = value_at(done.before, held, kind, s)
            text += "" if was is None else f", was {flux_density_text(was, unit)}"
        parts.append(f"{curve_text(done, curve)}: {text}")
    where = distance_text(s, layout.settings.length_unit)
    return f"At {where} · " + " · ".join(parts)


def extremum_texts(done: Profiled, kind: Kind) -> tuple[str, ...]:
    """Where the first curve is largest, its ends counted."""
    curve = done.found.curves[0]
    values = curve.values(kind)
    if values is None or curve.mask.all():
        return ()
    settings = done.request.layout.settings
    k = int(np.argmax(np.where(curve.mask, -1.0, values)))
    value = flux_density_text(float(values[k]), settings.flux_density_unit)
    where = distance_text(float(done.found.along[k]), settings.length_unit)
    return (f"Largest: {value} at {where}",)


def level_texts(done: Profiled, kind: Kind) -> tuple[str, ...]:
    """Levels that no curve meets, and on which side all of the line lies."""
    met = {(c.level, c.kind) for c in done.found.crossings}
    made: dict[str, str] = {}
    for curve in done.found.curves:
        for use in curve.levels:
            if use.kind != kind or (use.level, kind) in met or use.level in made:
                continue
            name = done.names.get(use.level, use.level)
            if use.ratios is None:
                made[use.level] = use.reason
                continue
            shown = use.ratios[~curve.mask]
            if not len(shown):
                continue
            least, most = float(shown.min()), float(shown.max())
            bound = (
                f"largest ratio {text_beside(most, 1.0)}" if most <= 1
                else f"smallest ratio {text_beside(least, 1.0)}"
            )  # fmt: skip
            made[use.level] = f"{name} is not crossed, {bound}"
    return tuple(made.values())


def whole_table(done: Profiled) -> ProfileTable:
    """All curves, then those of the layout that is held, at the same distances."""
    settings = done.request.layout.settings
    unit = settings.flux_density_unit
    table = profile_table(
        done.found, done.names, unit=unit, length_unit=settings.length_unit
    )
    heads, columns = list(table.heads), []
    for curve in done.found.curves:
        held = _held_curve(done, curve)
        for kind in KINDS:
            if done.before is None or held is None or held.values(kind) is None:
                continue
            before = done.before
            values = [value_at(before, held, kind, s) for s in done.found.along]
            columns.append([None if v is None else in_unit(v, unit) for v in values])
            where = one_line(curve_text(done, curve))
            heads.append(f"B {kind}, {where}, as before [{unit}]")
    rows = tuple(
        (*row, *(column[k] for column in columns)) for k, row in enumerate(table.rows)
    )
    return ProfileTable(tuple(heads), rows)


def table_texts(done: Profiled) -> tuple[tuple[str, ...], list[list[str]]]:
    """Heads and cells of the table as shown."""
    table = whole_table(done)
    places = sum(
        head.startswith(("distance", "x [", "y [", "z [")) for head in table.heads
    )
    length_unit = done.request.layout.settings.length_unit
    digits = {"m": 3, "mm": 0, "ft": 3, "in": 2}[length_unit]
    rows = [
        [
            "–" if v is None else f"{v:.{digits}f}" if k < places else significant(v)
            for k, v in enumerate(row)
        ]
        for row in table.rows
    ]
    return table.heads, rows


def profile_csv(done: Profiled, caption: str) -> str:
    """The caption, then the table with full figures."""
    quoted = one_line(caption).replace('"', '""')
    return f'"{quoted}"\n' + csv_text(whole_table(done))
