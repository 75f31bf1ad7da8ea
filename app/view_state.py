"""What is being looked at: load case, height, storey, view, upright planes, layers.

Not part of the layout and not undone. Views listen; one value, one notice.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

from PySide6.QtCore import QObject, Signal

#: Layers of the drawing that can be hidden, from below.
LAYERS = (
    "backing drawing",
    "map",
    "iso-lines",
    "rooms",
    "zones",
    "enclosures",
    "equipment",
    "runs",
    "profiles",
    "receptors",
    "labels",
    "upright plane",
)


@dataclass(frozen=True, kw_only=True)
class Look:
    """One way of looking at the layout.

    Attributes
    ----------
    case : str
        Id of the load case shown; empty for the first.
    height : float or None
        Height of the horizontal map above the datum. None: largest over the heights
        of the zone. [m]
    zone : str
        Id of the zone whose heights the map and the rail show; empty for the first.
    storey : str
        Id of the storey drawn upon; empty for the lowest.
    hidden : frozenset of str
        Layers that are not drawn.
    view : str
        The view in front: "Plan", "Looking +y", "Looking +x", "Along a line".
    plane_x, plane_y : float or None
        Where the upright planes of the elevations looking +x and +y stand; None: not
        chosen yet. [m]
    line : str
        Id of the profile that the view along a line shows; empty for the first.
    leg : int
        Which straight part of that profile, from 0.
    """

    case: str = ""
    height: float | None = None
    zone: str = ""
    storey: str = ""
    hidden: frozenset[str] = frozenset()
    view: str = "Plan"
    plane_x: float | None = None
    plane_y: float | None = None
    line: str = ""
    leg: int = 0

    @property
    def drawn(self) -> tuple[object, ...]:
        """What of it the drawing itself depends on, beside its map."""
        return (self.case, self.storey, self.hidden)


class ViewState(QObject):
    """Holds the current `Look`; `changed(look)` says that it is another one."""

    changed = Signal(object)

    def __init__(self) -> None:
        super().__init__()
        self._look = Look()

    @property
    def look(self) -> Look:
        return self._look

    def set(self, **values: Any) -> None:
        """Replace some fields of the look."""
        look = replace(self._look, **values)
        if look != self._look:
            self._look = look
            self.changed.emit(look)
