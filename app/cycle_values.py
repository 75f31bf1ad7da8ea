"""The field over one period at a place: computed, in words and as a table; no Qt."""

from __future__ import annotations

import csv
import io
import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from app.map_request import case_of, height_figures, loaded
from engine.case_fields import CaseFields
from engine.currents import Component
from engine.cycle_view import CycleView, FieldEllipse, Wave, cycle_view
from engine.errors import UserError
from engine.items import Point3
from engine.layout import Layout
from engine.masks import masked
from engine.units import in_unit, significant

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class CyclePlace:
    """Where the field is shown over a period; a receptor's id, or none."""

    at: Point3
    receptor: str = ""


@dataclass(frozen=True)
class CycleRequest:
    """What is asked: one place in one load case.

    `held` is the layout whose values stand beside, as before.
    """

    layout: Layout
    case: str
    place: CyclePlace
    held: Layout | None = None


@dataclass(frozen=True, eq=False)
class Cycle:
    """The answer; `before` is that of the layout that is held, where it has one."""

    request: CycleRequest
    view: CycleView
    before: CycleView | None = None


def with_held(request: CycleRequest, _cancelled: object = None) -> Cycle:
    """As `cycle_at`, now and in the layout that is held; errors the same.

    One place is quick: a drag keeps up by finishing it.
    """
    view, held = cycle_at(request), request.held
    if held is None or held is request.layout:
        return Cycle(request, view)
    place = at_place(held, request.place)
    try:
        return Cycle(request, view, cycle_at(CycleRequest(held, request.case, place)))
    except UserError:
        return Cycle(request, view)


def cycle_at(request: CycleRequest) -> CycleView:
    """The field over one period.

    Raises
    ------
    UserError
        When the geometry or the currents cannot be evaluated, when nothing flows, or
        when the place lies where no value counts.
    """
    ready = loaded(request.layout, request.case)
    at = request.place.at
    if masked(ready.conductors, (), np.array([at])).any():
        raise UserError(
            f"The place {place_text(request.layout, request.place)} lies inside a "
            "conductor, where there is no value: choose another place."
        )
    found = cycle_view(CaseFields(ready.conductors, (ready.currents,)),
                       ready.currents, at)  # fmt: skip
    if not found.ellipses:
        still = " Only direct current flows: its field does not change." * bool(
            np.any(found.dc)
        )
        raise UserError(
            f"No alternating current flows in “{ready.case.title}”, so there is no "
            f"period to show.{still}"
        )
    return found


def at_place(layout: Layout, place: CyclePlace) -> CyclePlace:
    """The place where its receptor is now; itself without one."""
    receptor = next((r for r in layout.receptors if r.id == place.receptor), None)
    if receptor is None:
        return CyclePlace(place.at)
    return CyclePlace(receptor.at, receptor.id)


def place_text(layout: Layout, place: CyclePlace) -> str:
    """ "Desk, 5.20 1.35 1.00 m", or the coordinates alone."""
    unit = layout.settings.length_unit
    figures = " ".join(height_figures(c, unit) for c in place.at) + f" {unit}"
    names = [r.title for r in layout.receptors if r.id == place.receptor]
    return f"{names[0]}, {figures}" if names else figures


def caption_text(layout: Layout, case: str, place: CyclePlace) -> str:
    """Quantity, place and case in one line, as exports print it."""
    where = place_text(layout, place)
    case_title = case_of(layout, case).title
    return f"Flux density over one period · {where} · case {case_title}"


def component_text(layout: Layout, component: Component) -> str:
    """ "50 Hz", with the circuit whose angles are its own."""
    hertz = f"{component.frequency:g} Hz"
    circuit = next((c for c in layout.circuits if c.id == component.group), None)
    return f"{hertz}, {circuit.title}" if circuit is not None else hertz


def wave_text(layout: Layout, wave: Wave) -> str:
    """Which frequencies a wave is made of, and whose it is."""
    hertz = " + ".join(f"{c.frequency:g}" for c in wave.components[:4])
    more = " + …" * (len(wave.components) > 4)
    group = wave.components[0].group
    circuit = next((c for c in layout.circuits if c.id == group), None)
    return f"{hertz}{more} Hz" + (f", {circuit.title}" if circuit else "")


def flux_text(tesla: float, unit: str) -> str:
    """A flux density with its unit."""
    return f"{significant(in_unit(tesla, unit))} {unit}"


def summary_text(
    layout: Layout, view: CycleView, before: CycleView | None = None
) -> str:
    """RMS and peak of the whole, as values or as bounds with their reasons.

    `before`: what they were, where they are held.
    """
    unit = layout.settings.flux_density_unit

    def told(value: float, reason: str) -> str:
        return f"{'at most ' if reason else ''}{flux_text(value, unit)}"

    parts = [
        f"RMS {told(view.rms, view.rms_reason)}",
        f"peak {told(view.peak, view.peak_reason)}",
    ]
    if before is not None:
        parts[0] += f", was {told(before.rms, before.rms_reason)}"
        parts[1] += f", was {told(before.peak, before.peak_reason)}"
    reasons = sorted({r for r in (view.rms_reason, view.peak_reason) if r})
    if reasons:
        parts.append("a bound, because " + "; ".join(reasons))
    if np.any(view.dc):
        still = float(np.linalg.norm(view.dc))
        parts.append(f"besides DC {flux_text(still, unit)}, not drawn")
    return " · ".join(parts)


def ellipse_text(layout: Layout, ellipse: FieldEllipse) -> str:
    """Both semi-axes, and the shape that they make."""
    unit = layout.settings.flux_density_unit
    ratio = ellipse.semi_minor / ellipse.semi_major if ellipse.semi_major else 0.0
    shape = (
        "a line" if ratio < 1e-6
        else "a circle" if ratio > 0.999
        else f"axes {significant(ratio, 2)} : 1"
    )  # fmt: skip
    return (
        f"{component_text(layout, ellipse.component)}: semi-major "
        f"{flux_text(ellipse.semi_major, unit)}, semi-minor "
        f"{flux_text(ellipse.semi_minor, unit)} (RMS), {shape}"
    )


def plane_axes(ellipse: FieldEllipse) -> Floats:
    """(2, 3) unit vectors that span the ellipse's plane; any across for a line."""
    along, across = ellipse.axes
    if not along.any():
        return np.array([[1.0, 0.0, 0.0], [0.0, 0.0, 1.0]])
    if not across.any():
        level = np.array([0.0, 0.0, 1.0]) if abs(along[2]) < 0.9 else np.eye(3)[0]
        across = np.cross(level, along)
        across = across / np.linalg.norm(across)
    return np.array([along, across])


def ellipse_curve(ellipse: FieldEllipse, n: int = 181) -> Floats:
    """(n, 2) the ellipse in its plane, instantaneous values. [T]"""
    angles = np.linspace(0.0, 2.0 * np.pi, n)
    curve: Floats = math.sqrt(2.0) * np.column_stack(
        [ellipse.semi_major * np.cos(angles), ellipse.semi_minor * np.sin(angles)]
    )
    return curve


def own_ellipse(view: CycleView, wave: Wave) -> FieldEllipse:
    """The largest ellipse among the components of a wave."""
    own = [e for e in view.ellipses if e.component in wave.components]
    return max(own, key=lambda e: e.semi_major)


def waves_csv(layout: Layout, view: CycleView, caption: str) -> str:
    """All waves as a table: time, components and magnitude, an instant a row."""
    unit = layout.settings.flux_density_unit
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    for line in (caption, summary_text(layout, view)):
        writer.writerow([line])
    writer.writerow(
        ["part", "time [s]", *(f"{n} [{unit}]" for n in ("Bx", "By", "Bz", "|B|"))]
    )
    for wave in view.waves:
        name = wave_text(layout, wave)
        for time, vector, size in zip(
            wave.times, wave.vectors, wave.magnitudes, strict=True
        ):
            values = [in_unit(float(v), unit) for v in (*vector, size)]
            writer.writerow([name, f"{time:.9g}", *(f"{v:.6g}" for v in values)])
    return out.getvalue()
