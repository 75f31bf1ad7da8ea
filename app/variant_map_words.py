"""Maps of variants in words and numbers: what rises, values at a place, the grid."""

from __future__ import annotations

import csv
import io

import numpy as np
import numpy.typing as npt

from app.variant_maps import Change
from engine.units import LENGTH_UNITS, in_unit, significant

Floats = npt.NDArray[np.float64]


def summary_text(change: Change) -> str:
    """Where the field rises most, where it falls most, and over how much of the map."""
    maps, unit = change.maps, change.request.whole.settings.flux_density_unit
    before, after = change.titles
    named = "the base" if change.request.against is None else f"“{before}”"
    free = ~maps.mask
    if not np.any(maps.difference):
        return f"“{after}” has the field of {named} everywhere on this map."
    higher = free & (maps.ratio > 1.01)
    share = 100.0 * higher.sum() / max(1, free.sum())
    parts = []
    for word, pick, sign in (("rise", np.argmax, 1.0), ("fall", np.argmin, -1.0)):
        row, column = np.unravel_index(pick(maps.difference), maps.difference.shape)
        value = sign * float(maps.difference[row, column])
        if value > 0:
            at = _place_text(
                change, float(maps.base.xs[column]), float(maps.base.ys[row])
            )
            parts.append(
                f"largest {word} {significant(in_unit(value, unit))} {unit} at {at}"
            )
    text = f"“{after}” against {named}: {'; '.join(parts)}"
    text += f"; more than 1 % higher on {share:.0f} % of the map."
    if maps.is_bound:
        text += " One of the two is an upper bound, so their difference is none."
    return text


def at_text(change: Change, x: float, y: float) -> str:
    """Both values and their change at a place on plan; empty outside. [m]"""
    maps, unit = change.maps, change.request.whole.settings.flux_density_unit
    before, after = change.titles
    place = _place_text(change, x, y)
    one = _at(change, maps.base.values, x, y)
    other = _at(change, maps.variant.values, x, y)
    if one is None or other is None:
        return ""
    if _at(change, maps.mask.astype(float), x, y):
        return f"{place} · not assessed: inside a conductor or an enclosure"
    texts = [significant(in_unit(v, unit)) for v in (one, other)]
    text = f"{place} · {before} {texts[0]} {unit} · {after} {texts[1]} {unit}"
    if one > 0:
        text += f" · {significant(other / one)} of it"
    return text


def _place_text(change: Change, x: float, y: float) -> str:
    length = change.request.whole.settings.length_unit
    figures = [f"{v / LENGTH_UNITS[length]:.2f}".replace("-", "−") for v in (x, y)]
    return f"x {figures[0]} y {figures[1]} {length}"


def _at(change: Change, values: Floats, x: float, y: float) -> float | None:
    """Bilinear between the nodes; None outside the grid."""
    xs, ys = change.maps.base.xs, change.maps.base.ys
    column = (x - xs[0]) / (xs[1] - xs[0])
    row = (y - ys[0]) / (ys[1] - ys[0])
    if not (0 <= column <= len(xs) - 1 and 0 <= row <= len(ys) - 1):
        return None
    k, i = min(int(column), len(xs) - 2), min(int(row), len(ys) - 2)
    u, v = column - k, row - i
    cell = values[i : i + 2, k : k + 2]
    return float(np.array([1 - v, v]) @ cell @ np.array([1 - u, u]))


def change_csv(change: Change) -> str:
    """x, y, both values, difference and ratio, a node a row; empty where masked."""
    maps, settings = change.maps, change.request.whole.settings
    unit, length = settings.flux_density_unit, settings.length_unit
    before, after = change.titles
    file = io.StringIO()
    writer = csv.writer(file, lineterminator="\n")
    writer.writerow(
        [
            f"x [{length}]", f"y [{length}]", f"{before} [{unit}]", f"{after} [{unit}]",
            f"difference [{unit}]", "ratio",
        ]
    )  # fmt: skip
    for i, y in enumerate(maps.base.ys):
        for k, x in enumerate(maps.base.xs):
            row = [f"{v / LENGTH_UNITS[length]:.6g}" for v in (x, y)]
            values = (maps.base.values, maps.variant.values, maps.difference)
            if maps.mask[i, k]:
                writer.writerow([*row, "", "", "", ""])
                continue
            row += [f"{in_unit(float(v[i, k]), unit):.6g}" for v in values]
            row.append(f"{maps.ratio[i, k]:.6g}" if maps.has_ratio[i, k] else "")
            writer.writerow(row)
    return file.getvalue()
