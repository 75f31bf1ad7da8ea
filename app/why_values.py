"""Why a value is what it is: shares of circuits and the retrace, asked and in words."""

from __future__ import annotations

import csv
import io
from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from app.map_request import case_of, height_figures
from engine.closed_circuits import UnclosedPiece
from engine.criteria import ReferenceLevel
from engine.distance_to_level import load_factor
from engine.errors import Cancelled, UserError
from engine.items import Point3
from engine.layout import Layout
from engine.level_use import level_use
from engine.levels import Kind, is_kind, what_is_missing
from engine.loaded_layout import loaded_layout
from engine.place_shares import PlaceShare, PlaceShares, place_shares
from engine.printed_text import one_line
from engine.receptor_assessment import measured_kind
from engine.retrace import Retrace, retrace
from engine.units import flux_density_text, in_unit, significant


@dataclass(frozen=True)
class WhyPlace:
    """Where a value is taken apart.

    Attributes
    ----------
    at : Point3
        [m]
    receptor : str
        Id, where it is one; it is followed when it moves.
    title : str
        Of a place that is no receptor: "Corridor, largest value".
    levels : tuple of str
        Ids of the reference levels that count there.
    """

    at: Point3
    receptor: str = ""
    title: str = ""
    levels: tuple[str, ...] = ()


@dataclass(frozen=True)
class WhyRequest:
    """What is asked: one place in one load case, AC or DC (empty: what flows).

    `held` is the layout whose value stands beside, as before.
    """

    layout: Layout
    case: str
    place: WhyPlace
    kind: str = ""
    held: Layout | None = None


@dataclass(frozen=True)
class LevelFactor:
    """How far the load case may change until the value equals a level."""

    level: str
    title: str
    ratio: float
    factor: float


@dataclass(frozen=True, eq=False)
class Why:
    """The answer; `factors` are of the levels that count at the place.

    `before` is that of the layout that is held, in the same kind of field.
    """

    request: WhyRequest
    shares: PlaceShares
    retraced: Retrace
    kinds: tuple[Kind, ...]
    factors: tuple[LevelFactor, ...]
    names: Mapping[str, str]
    measured: float | None
    before: Why | None = None


def why_at(request: WhyRequest, cancelled: Cancelled | None = None) -> Why:
    """Take the value at a place apart.

    Raises
    ------
    UserError
        When there is no value there.
    ComputationCancelled
        When `cancelled` says so.
    """
    layout, at = request.layout, request.place.at
    chosen = case_of(layout, request.case)
    loaded = loaded_layout(layout, [chosen], None, cancelled)
    fields = loaded.fields
    if not fields.cases:
        raise UserError(f"No field in “{chosen.title}”: {loaded.cases[0].reason}")
    case = fields.cases[loaded.index[chosen.id]]
    if fields.masked_at(case, np.array([at]), 0.0)[0]:
        raise UserError(
            f"{place_text(layout, request.place)} lies inside a conductor or a closed "
            "enclosure, where there is no value: choose another place."
        )
    order: tuple[Kind, ...] = ("AC", "DC")
    kinds = tuple(k for k in order if any(is_kind(f, k) for f in case.frequencies))
    kind = next((k for k in kinds if k == request.kind), kinds[0])
    b = fields.flux_density_at(case, np.array([at]))
    factors = []
    for level in _levels(layout, request.place):
        use = level_use(b, case.components, level, kind)
        factor = None if use.ratios is None else load_factor(float(use.ratios[0]))
        if factor is not None and use.ratios is not None:
            ratio = float(use.ratios[0])
            factors.append(LevelFactor(level.id, level.title, ratio, factor.factor))
    return Why(
        request,
        place_shares(layout, fields, case, at, kind),
        retrace(fields, case, at, kind),
        kinds,
        tuple(factors),
        {item.id: item.title for item in (*layout.items(), *layout.cases)},
        _measured(layout, request.place, kind, kinds),
    )


def with_held(request: WhyRequest, cancelled: Cancelled | None = None) -> Why:
    """As `why_at`, with that of the layout that is held beside it, where it has one.

    A receptor's value was where the receptor was. Errors as `why_at`.
    """
    why = why_at(request, cancelled)
    held = request.held
    if held is None or held is request.layout:
        return why
    kind = why.shares.kind
    place = place_now(held, request.place)
    try:
        before = why_at(
            replace(request, layout=held, place=place, kind=kind, held=None), cancelled
        )
    except UserError:
        return why
    return replace(why, before=before) if before.shares.kind == kind else why


def share_before(why: Why, circuits: tuple[str, ...]) -> float | None:
    """What the same circuits' share was, where it is held as before. [T]"""
    if why.before is None:
        return None
    shares = why.before.shares.shares
    return next((s.share for s in shares if s.circuits == circuits), None)


def _levels(layout: Layout, place: WhyPlace) -> list[ReferenceLevel]:
    receptor = next((r for r in layout.receptors if r.id == place.receptor), None)
    named = place.levels if receptor is None else receptor.levels
    complete = [level for level in layout.levels if not what_is_missing(level)]
    return [level for level in complete if level.id in named]


def _measured(
    layout: Layout, place: WhyPlace, kind: Kind, kinds: tuple[Kind, ...]
) -> float | None:
    """What was measured there, where it is of this kind of field. [T]"""
    for receptor in layout.receptors:
        measured = receptor.measured
        if receptor.id == place.receptor and measured is not None:
            same = measured_kind(measured, kinds) == kind
            return measured.flux_density if same else None
    return None


def place_now(layout: Layout, place: WhyPlace) -> WhyPlace:
    """The place where its receptor is now; itself without one."""
    receptor = next((r for r in layout.receptors if r.id == place.receptor), None)
    if receptor is None:
        return WhyPlace(place.at, "", place.title, place.levels)
    return WhyPlace(receptor.at, receptor.id, "", receptor.levels)


# -- in words -----------------------------------------------------------------------


def place_text(layout: Layout, place: WhyPlace) -> str:
    """ "Desk, 5.20 1.35 1.00 m", or the coordinates alone."""
    unit = layout.settings.length_unit
    figures = " ".join(height_figures(c, unit) for c in place.at) + f" {unit}"
    names = [r.title for r in layout.receptors if r.id == place.receptor]
    name = names[0] if names else place.title
    return f"{name}, {figures}" if name else figures


def circuits_text(why: Why, circuits: tuple[str, ...]) -> str:
    """One circuit, or several that close only together."""
    names = [why.names.get(c, c) for c in circuits]
    if len(names) == 1:
        return names[0]
    return " + ".join(names) + " (close only together)"


def piece_text(why: Why, piece: UnclosedPiece) -> str:
    """What does not close, and where current remains."""
    unit = why.request.layout.settings.length_unit
    items = ", ".join(why.names.get(i, i) for i in piece.items)
    at = " ".join(height_figures(c, unit) for c in piece.place)
    where = f"{items}, {at} {unit}" if items else f"{at} {unit}"
    names = " + ".join(why.names.get(c, c) for c in piece.circuits)
    return f"{names}: does not close as drawn (current remains at {where}), no share"


def signed(tesla: float, unit: str, digits: int = 3) -> str:
    """A share with its sign and unit."""
    return f"{significant(in_unit(tesla, unit), digits)} {unit}".replace("-", "−")


def percent(part: float, whole: float) -> str:
    """A part of the whole: "+62 %"."""
    if whole <= 0:
        return "–"
    share = round(100 * part / whole)
    return f"{share:+d} %".replace("-", "−") if share else "0 %"


def value_text(why: Why) -> str:
    """The value shown, as a bound where it is one."""
    shares, unit = why.shares, why.request.layout.settings.flux_density_unit
    text = flux_density_text(shares.shown, unit)
    return f"at most {text}" if shares.is_bound else text


def head_text(why: Why) -> str:
    """The value with what limits it: bound, near field, levels, measured."""
    shares, layout = why.shares, why.request.layout
    unit = layout.settings.flux_density_unit
    was = "" if why.before is None else f", was {value_text(why.before)}"
    parts = [f"{shares.kind} {value_text(why)}{was}"]
    if shares.is_bound:
        parts.append(
            f"a bound, because {shares.bound_reason}; shares are of the angles as "
            f"entered, {flux_density_text(shares.total, unit)}"
        )
    if why.retraced.near_field:
        parts.append("near field, even current assumed")
    if why.measured is not None and shares.shown > 0:
        parts.append(
            f"measured {flux_density_text(why.measured, unit)}, measured / calculated "
            f"= {significant(why.measured / shares.shown, 2)}"
        )
    parts += [
        f"{significant(f.ratio)} of {f.title} ({significant(f.factor)} × this case)"
        for f in why.factors
    ]
    told = " · ".join(parts)
    if why.factors:
        told += "; × this case: all its currents together make the value the level"
    return told


def net_current_texts(why: Why, most: int = 5) -> tuple[str, ...]:
    """What 1 A of net current in each circuit gives here, the most first."""
    unit = why.request.layout.settings.flux_density_unit
    return tuple(
        f"{why.names.get(e.circuit, e.circuit)} ({' '.join(e.labels)}): "
        f"{flux_density_text(e.per_ampere, unit)} per A"
        for e in why.shares.net_currents[:most]
    )


def sentence(why: Why) -> str:
    """All of it as one sentence to copy."""
    shares, layout = why.shares, why.request.layout
    unit = layout.settings.flux_density_unit
    case = case_of(layout, why.request.case).title
    text = (
        f"{place_text(layout, why.request.place)}, load case {case}: "
        f"{shares.kind} {value_text(why)}"
    )
    parts = [
        f"{circuits_text(why, s.circuits)} {s.acts} {signed(abs(s.share), unit)} "
        f"(without it {flux_density_text(s.without, unit)})"
        for s in shares.shares[:3]
    ]
    if parts:
        text += "; " + "; ".join(parts)
    rest = len(shares.shares) - 3
    if rest > 0:
        left = sum(s.share for s in shares.shares[3:])
        text += f"; {rest} more give {signed(left, unit)} together"
    if shares.unclosed:
        text += f"; unclosed pieces give {signed(shares.unclosed_share, unit)} together"
    if shares.net_currents:
        first = shares.net_currents[0]
        text += (
            f"; 1 A of net current matters most in "
            f"{why.names.get(first.circuit, first.circuit)}, where it would give "
            f"{flux_density_text(first.per_ampere, unit)}"
        )
    return text + "."


def caption_text(why: Why) -> str:
    """Quantity, place and case in one line, as exports print it."""
    layout = why.request.layout
    case = case_of(layout, why.request.case).title
    where = place_text(layout, why.request.place)
    return (
        f"Where the flux density comes from · {where} · case {case} · {why_kind(why)}"
    )


def why_kind(why: Why) -> str:
    """AC or DC with the value."""
    return f"{why.shares.kind} {value_text(why)}"


def shares_csv(why: Why) -> str:
    """Shares by circuit and frequency as a table; the sum of circuits stands last."""
    return _shares_table(why, ",")


def shares_tabs(why: Why) -> str:
    """The same as cells for a spreadsheet."""
    return _shares_table(why, "\t")


def _shares_table(why: Why, delimiter: str) -> str:
    shares, unit = why.shares, why.request.layout.settings.flux_density_unit
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n", delimiter=delimiter)
    writer.writerow([one_line(caption_text(why))])
    writer.writerow(
        ["circuit", "frequency [Hz]", f"share [{unit}]", f"alone [{unit}]",
         f"without it [{unit}]", f"per ampere [{unit}/A]"]
    )  # fmt: skip

    def row(name: str, hertz: str, part: PlaceShare | object, more: str = "") -> None:
        values = [getattr(part, n) for n in ("share", "alone", "without")]
        # What is left of a field that one circuit makes alone is rounding.
        values = [v if abs(v) > 1e-12 * shares.total else 0.0 for v in values]
        writer.writerow(
            [name, hertz, *(f"{in_unit(v, unit) + 0.0:.9g}" for v in values), more]
        )

    for share in shares.shares:
        name = one_line(circuits_text(why, share.circuits))
        per = share.per_ampere
        more = "" if per is None else f"{in_unit(per, unit):.9g}"
        row(name, "all", share, more)
        for part in share.by_frequency:
            row(name, f"{part.frequency:.12g}", part)
    if shares.unclosed:
        for piece in shares.unclosed:
            writer.writerow([one_line(piece_text(why, piece)), "", "", "", "", ""])
        given = f"{in_unit(shares.unclosed_share, unit) + 0.0:.9g}"
        writer.writerow(["unclosed pieces together", "all", given, "", "", ""])
    total = f"{in_unit(shares.total, unit):.9g}"
    writer.writerow(["sum", "all", total, "", "", ""])
    return out.getvalue()
