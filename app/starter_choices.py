"""What can be begun with: an empty plan or a starter, and the values each asks for.

No Qt. All values are in SI; a starter's layout takes units and paper from the user's
preferences.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from msgspec.structs import replace

from app.files import empty_layout
from app.preferences import Preferences
from engine.layout import Layout
from engine.motions import neat
from engine.starters import riser_past_room, run_past_room, transformer_link_board
from engine.units import LENGTH_UNITS

#: What defaults of lengths are rounded to in units that are not metric. [unit]
_ROUND = {"ft": 0.5, "in": 6.0}

#: The office beside a run. [m]
_OFFICE = (6.0, 5.0)


@dataclass(frozen=True)
class Asked:
    """A number that a starter asks for: a current or a length.

    Attributes
    ----------
    key : str
        Of the starter's argument.
    label, tip : str
    is_length : bool
        Else a current.
    default, low, high : float
        [m] or [A]
    """

    key: str
    label: str
    tip: str
    is_length: bool
    default: float
    low: float
    high: float

    def begun_with(self, length_unit: str) -> float:
        """The default; a length as a round number of the unit it is shown in."""
        if not self.is_length or length_unit not in _ROUND:
            return self.default
        step = _ROUND[length_unit] * LENGTH_UNITS[length_unit]
        return neat(round(self.default / step) * step)


@dataclass(frozen=True)
class Offered:
    """Words to choose one of."""

    key: str
    label: str
    tip: str
    options: tuple[str, ...]
    default: str

    def begun_with(self, _length_unit: str) -> str:
        """The default."""
        return self.default


@dataclass(frozen=True)
class Beginning:
    """One way to begin.

    Attributes
    ----------
    name, about : str
        What a person calls it, and what it holds; "{office}": the office's size.
    asks : tuple of Asked or Offered
    make : callable or None
        Keyword arguments, `frequency` among them, to a layout; None: empty.
    """

    name: str
    about: str
    asks: tuple[Asked | Offered, ...] = ()
    make: Callable[..., Layout] | None = None

    def layout(self, choices: Preferences, values: Mapping[str, Any]) -> Layout:
        """The layout to begin with.

        Raises
        ------
        UserError
            When the values give no layout.
        """
        if self.make is None:
            return empty_layout(choices)
        made = self.make(frequency=float(choices.frequency), **values)
        settings = replace(
            made.settings,
            flux_density_unit=choices.flux_density_unit,
            length_unit=choices.length_unit,
            paper=choices.paper,
            grid_step=choices.grid_step,
        )
        return replace(made, settings=settings)

    def about_in(self, length_unit: str) -> str:
        """What it holds, with lengths in this unit; feet for inches, m for mm."""
        unit = {"mm": "m", "in": "ft"}.get(length_unit, length_unit)
        sides = " × ".join(f"{x / LENGTH_UNITS[unit]:.3g}" for x in _OFFICE)
        return self.about.format(office=f"{sides} {unit}")

    def defaults(self, length_unit: str) -> dict[str, Any]:
        """The values to begin with, lengths round in this unit."""
        return {ask.key: ask.begun_with(length_unit) for ask in self.asks}


def _current(default: float) -> Asked:
    tip = "RMS current of each line, cos φ 0.90 lagging"
    return Asked("current", "Current", tip, False, default, 1.0, 20_000.0)


def _distance(default: float, tip: str) -> Asked:
    return Asked("distance", "Distance", tip, True, default, 0.1, 50.0)


def _kind(default: str) -> Offered:
    options = ("busbar", "busbar trunking", "cable tray", "cable ladder", "conduit")
    return Offered("kind", "Kind", "What runs there", options, default)


BEGINNINGS: tuple[Beginning, ...] = (
    Beginning("Empty", "A ground floor and nothing on it."),
    Beginning(
        "Transformer, link and board",
        "A busbar link under the ceiling of a switch room; an office next door.",
        (
            _current(800.0),
            Asked(
                "link", "Link", "Length of its horizontal part", True, 5.0, 2.0, 100.0
            ),
        ),
        transformer_link_board,
    ),
    Beginning(
        "Run past a room",
        "Cables or bars over, under or beside an office of {office}.",
        (
            Offered(
                "where", "Where", "Over the ceiling, under the floor, or behind a wall",
                ("over", "under", "beside"), "under",
            ),
            _kind("cable tray"),
            _current(400.0),
            _distance(0.5, "From the office's ceiling, floor or wall to the run"),
        ),
        run_past_room,
    ),
    Beginning(
        "Riser past a room",
        "A riser through three storeys behind the wall of an office.",
        (
            _kind("busbar trunking"),
            _current(400.0),
            _distance(0.6, "From the office's wall to the middle of the riser"),
        ),
        riser_past_room,
    ),
)  # fmt: skip
