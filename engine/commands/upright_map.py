"""The field on an upright plane, as a picture over the elevation or as numbers."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np

from engine.circuits import LoadCase
from engine.commands.horizontal_map import map_kind
from engine.conductors import conductors
from engine.elevation import Rect, Upright, elevation, extent_from_side
from engine.errors import Cancelled, Progress
from engine.exchange.map_export import write_plane_csv, write_png
from engine.exchange.svg import svg
from engine.layout import Layout
from engine.maps import plane_map
from engine.picture import MapSubject, map_picture, map_subjects
from engine.sight import LOOKING_X, LOOKING_Y
from engine.written_file import write_file

#: What the axes stand for; "−y" where y falls to the right.
_NAMES = {LOOKING_Y: ("x", "z"), LOOKING_X: ("−y", "z")}


def write_upright_map(
    layout: Layout,
    case: LoadCase,
    upright: Upright,
    name: str,
    out: Path,
    *,
    unit: str | None = None,
    shown: str = "",
    progress: Progress | None = None,
    cancelled: Cancelled | None = None,
) -> None:
    """Write the map on an upright plane, around rooms, zones and receptors.

    Parameters
    ----------
    name : str
        The plane in words: "vertical plane y 3.20 m".
    out : Path
        Its ending says the kind: a picture (.png, .svg) or numbers (.csv), with x, y
        and z of each point.
    shown : str
        Said first under the title of a picture: "variant Bond removed".

    Raises
    ------
    UserError
        When the ending is of no known kind, when the layout cannot be evaluated, or
        when the file cannot be written.
    """
    kind = map_kind(out)
    rect = extent_from_side(layout, upright.sight)
    plane = upright.rectangle(rect)
    step = layout.settings.grid_step if kind == ".csv" else None
    result = plane_map(
        layout, case, plane, step=step, progress=progress, cancelled=cancelled
    )
    subjects = [
        _placed(subject, upright, rect, f"{case.title}: {subject.quantity}, {name}")
        for subject in map_subjects(layout, case, result, unit=unit)
    ]
    subject = subjects[0]
    if kind == ".csv":
        seen = np.stack(np.meshgrid(subject.xs, subject.ys), axis=-1).reshape(-1, 2)
        write_plane_csv(out, subjects, upright.places(seen))
        return
    if shown:
        said = f"{shown[:1].upper()}{shown[1:]}."
        subject = replace(subject, lines=(said, *subject.lines))
    drawn = elevation(layout, conductors(layout), upright.sight)
    if kind == ".png":
        write_png(out, subject, drawn)
    else:
        picture = map_picture(subject, drawn, width=277.0, height=190.0)
        write_file(out, svg(picture).encode("utf-8"))


def _placed(
    subject: MapSubject, upright: Upright, rect: Rect, title: str
) -> MapSubject:
    """The map with the axes of the picture instead of distances along edges."""
    return replace(
        subject,
        xs=subject.xs + rect[0],
        ys=subject.ys + rect[1],
        title=title,
        names=_NAMES.get(upright.sight, ("along the line", "z")),
        north=None,
    )
