"""A profile as a table: rows of numbers, and CSV text with units in its heads."""

from __future__ import annotations

import csv
import io
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.printed_text import one_line
from engine.profiles import KINDS, FieldProfile, ProfileCurve
from engine.units import FLUX_DENSITY_UNITS, LENGTH_UNITS


@dataclass(frozen=True)
class ProfileTable:
    """Heads and rows; a cell is None where nothing can be assessed."""

    heads: tuple[str, ...]
    rows: tuple[tuple[float | None, ...], ...]


def profile_table(
    found: FieldProfile,
    names: Mapping[str, str],
    *,
    unit: str = "µT",
    length_unit: str = "m",
) -> ProfileTable:
    """A row for each sample: distance, place on plan, then every curve's values.

    Parameters
    ----------
    names
        Of load cases and levels by their ids; an id without a name stands for itself.
    unit, length_unit
        In which the cells are.

    Notes
    -----
    Where the line keeps its own heights, z has a column; otherwise it is in the heads.
    """
    metres, tesla = LENGTH_UNITS[length_unit], FLUX_DENSITY_UNITS[unit]
    own_height = bool(found.curves) and found.curves[0].height is None
    places = found.curves[0].points / metres if found.curves else None
    heads = [f"distance [{length_unit}]"]
    columns: list[NDArray[np.float64]] = [found.along / metres]
    masks: list[NDArray[np.bool_] | None] = [None]
    if places is not None:
        for k, axis in enumerate("xyz" if own_height else "xy"):
            heads.append(f"{axis} [{length_unit}]")
            columns.append(places[:, k])
            masks.append(None)
    for curve in found.curves:
        where = _where(curve, names, metres, length_unit)
        for kind in KINDS:
            values = curve.values(kind)
            if values is not None:
                bound = ", upper bound" if curve.is_bound and kind == "AC" else ""
                heads.append(f"B {kind}, {where}{bound} [{unit}]")
                columns.append(values / tesla)
                masks.append(curve.mask)
        for level in curve.levels:
            if level.ratios is not None:
                name = one_line(names.get(level.level, level.level))
                bound = ", upper bound" if level.is_bound else ""
                heads.append(f"ratio {level.kind} to {name}, {where}{bound}")
                columns.append(level.ratios)
                masks.append(curve.mask)
    rows = tuple(
        tuple(
            None if mask is not None and mask[k] else float(column[k]) + 0.0
            for column, mask in zip(columns, masks, strict=True)
        )
        for k in range(len(found.along))
    )
    return ProfileTable(tuple(heads), rows)


def _where(
    curve: ProfileCurve, names: Mapping[str, str], metres: float, length_unit: str
) -> str:
    case = one_line(names.get(curve.case, curve.case))
    if curve.height is None:
        return case
    return f"{case}, z {curve.height / metres:.9g} {length_unit}"


def csv_text(table: ProfileTable) -> str:
    """The table as CSV; cells without a value are empty."""
    file = io.StringIO()
    writer = csv.writer(file, lineterminator="\n")
    writer.writerow(table.heads)
    for row in table.rows:
        writer.writerow(["" if v is None else f"{v:.9g}" for v in row])
    return file.getvalue()
