"""Moving the selection along one axis in space: previews, then one undo step."""

from __future__ import annotations

import math

from app import commands
from app.document import Document
from app.views.heights import length_text
from app.views.space_camera import Point3, SpaceCamera, along_axis
from app.views.space_letters import SpaceDimension
from engine.errors import UserError
from engine.motions import neat
from engine.shaping import moved
from engine.vertices import bounds

#: Axes by their words.
AXES: dict[str, Point3] = {
    "x": (1.0, 0.0, 0.0),
    "y": (0.0, 1.0, 0.0),
    "vertical": (0.0, 0.0, 1.0),
}

#: A way is caught at whole multiples of the finest of these that is at least a few
#: pixels long. [m]
_STEPS = (0.001, 0.005, 0.01, 0.05, 0.1, 0.5, 1.0, 5.0)
_PIXELS = 4.0


def caught_way(way: float, metres_per_pixel: float) -> float:
    """The nearest whole step of a way, coarser from afar. [m]

    Examples
    --------
    >>> caught_way(0.3468, 0.01), caught_way(0.3468, 0.0001)
    (0.35, 0.347)
    """
    least = _PIXELS * metres_per_pixel
    step = next((s for s in _STEPS if s >= least), _STEPS[-1])
    return neat(round(way / step) * step)


class AxisMove:
    """One drag of the document's selection along an axis.

    Attributes
    ----------
    axis : str
        A key of `AXES`, or empty while nothing is to be moved.
    """

    def __init__(self, document: Document) -> None:
        self._document = document
        self.axis = ""
        self._start: Point3 | None = None
        self._gripped = 0.0
        self._way = 0.0

    @property
    def is_under_way(self) -> bool:
        return self._start is not None

    @property
    def middle(self) -> Point3 | None:
        """The middle of what is selected; None when nothing with a place is. [m]"""
        selection, layout = self._document.selection, self._document.layout
        found = bounds(item for item in layout.items() if item.id in selection)
        if found is None:
            return None
        x, y, z = (0.5 * (a + b) for a, b in zip(*found, strict=True))
        return (x, y, z)

    def begin(self, camera: SpaceCamera, x: float, y: float) -> None:
        """Grip the selection at a pixel.

        Raises
        ------
        UserError
            When the axis is seen end-on, or nothing can be moved.
        """
        start = self.middle
        if start is None:
            raise UserError("Select what is to be moved: click it.")
        gripped = along_axis(camera, start, AXES[self.axis], x, y)
        if gripped is None:
            raise UserError(
                f"The {self.axis} axis is seen end-on here: look from another side to "
                "move along it."
            )
        self._start, self._gripped, self._way = start, gripped, 0.0

    def drag(self, camera: SpaceCamera, x: float, y: float, *, freely: bool) -> None:
        """Preview the selection moved towards a pixel."""
        if self._start is None:
            return
        found = along_axis(camera, self._start, AXES[self.axis], x, y)
        if found is None:
            return
        way = found - self._gripped
        self._way = neat(way) if freely else caught_way(way, camera.metres_per_pixel)
        document = self._document
        try:
            shifted = moved(document.committed, document.selection, *self._shift())
            document.preview(shifted)
        except UserError:
            document.revert()

    def end(self) -> None:
        """Commit the move as one undo step.

        Raises
        ------
        UserError
            When it cannot be made; nothing is changed then.
        """
        if self._start is None:
            return
        shift, self._start = self._shift(), None
        self._commit(shift)

    def cancel(self) -> None:
        """Put everything back."""
        self._start = None
        self._document.revert()

    def by(self, way: float) -> None:
        """Move by a typed length. [m]

        Raises
        ------
        UserError
            When nothing is selected, or the move cannot be made.
        """
        x, y, z = (neat(way * part) for part in AXES[self.axis])
        self._commit((x, y, z))

    def dimension(self) -> SpaceDimension | None:
        """The way so far, between the middles of what is moved."""
        if self._start is None or self._way == 0.0:
            return None
        x, y, z = (a + b for a, b in zip(self._start, self._shift(), strict=True))
        unit = self._document.layout.settings.length_unit
        name = "vertically" if self.axis == "vertical" else f"along {self.axis}"
        sign = "+" if self._way > 0 else ""
        text = f"{sign}{length_text(self._way, unit)} {unit} {name}"
        return SpaceDimension(self._start, (x, y, z), text)

    def _shift(self) -> Point3:
        x, y, z = (neat(self._way * part) for part in AXES[self.axis])
        return (x, y, z)

    def _commit(self, shift: Point3) -> None:
        if math.dist(shift, (0.0, 0.0, 0.0)) == 0.0:
            self._document.revert()
            return
        try:
            commands.move_selection(self._document, *shift)
        except UserError:
            self._document.revert()
            raise
