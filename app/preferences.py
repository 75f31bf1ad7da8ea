"""What the program remembers of its user: units, theme, window, recent files.

Kept in one JSON file in the user's settings folder. A damaged or missing file means
the defaults, never an error.
"""

from __future__ import annotations

import contextlib
import locale
from pathlib import Path
from typing import Annotated, Literal

import msgspec
import platformdirs
from msgspec import Meta, Struct

#: Longest list of recent files.
MOST_RECENT = 10


class Preferences(Struct, frozen=True, kw_only=True):
    """The user's choices; unknown fields of newer versions are ignored."""

    frequency: Literal[50, 60] = 50
    flux_density_unit: Literal["µT", "mT", "nT", "mG", "G", "A/m"] = "µT"
    length_unit: Literal["m", "mm", "ft", "in"] = "m"
    paper: Literal["A4", "A3", "Letter", "Tabloid"] = "A4"
    theme: Literal["system", "light", "dark"] = "system"
    #: Size of text beside the system's. [%]
    text_size: Annotated[int, Meta(ge=90, le=150)] = 100
    recent: tuple[str, ...] = ()
    #: Window geometry and state as Qt gives them, base64.
    geometry: str = ""
    #: How the width is shared between drawing and panel, likewise.
    sharing: str = ""
    #: Side panels in windows of their own, by name, with the geometry of each.
    away: dict[str, str] = msgspec.field(default_factory=dict)
    #: False until the first strip was answered.
    chosen: bool = False

    @property
    def grid_step(self) -> float:
        """Step of exported grids of new layouts: a round length. [m]"""
        return 0.3048 if self.length_unit in ("ft", "in") else 0.25

    def with_recent(self, path: Path) -> Preferences:
        """With `path` as the most recent file."""
        name = str(path.resolve())
        rest = tuple(other for other in self.recent if other != name)
        return msgspec.structs.replace(self, recent=(name, *rest)[:MOST_RECENT])


def folder() -> Path:
    """The user's settings folder of the program."""
    return Path(platformdirs.user_config_dir("lodestead", appauthor=False))


def from_locale() -> Preferences:
    """First choices by the user's locale: 60 Hz, mG, feet and Letter in the US."""
    name = locale.getlocale()[0] or ""
    if name.endswith("_US"):
        return Preferences(
            frequency=60, flux_density_unit="mG", length_unit="ft", paper="Letter"
        )
    return Preferences()


def load(path: Path | None = None) -> Preferences:
    """The remembered choices, or first ones."""
    try:
        return msgspec.json.decode(
            (path or folder() / "preferences.json").read_bytes(), type=Preferences
        )
    except (OSError, msgspec.MsgspecError, UnicodeDecodeError):
        return from_locale()


def save(preferences: Preferences, path: Path | None = None) -> None:
    """Remember the choices; a folder that cannot be written is no error."""
    target = path or folder() / "preferences.json"
    with contextlib.suppress(OSError):
        target.parent.mkdir(parents=True, exist_ok=True)
        part = target.with_suffix(".part")
        part.write_bytes(msgspec.json.format(msgspec.json.encode(preferences)))
        part.replace(target)
