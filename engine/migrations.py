"""Layouts of older files brought to the present form, one version at a time.

A migration takes the plain layout of one version and gives that of the next. What it
does not recognise it leaves alone: the typed reading then names it as a fault. When a
later version changes a default, its migration writes the old one into old files.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

#: Version of the form that this program writes.
SCHEMA_VERSION = 3

Plain = dict[str, Any]

_SETTING_OF_DEFAULT = {"frequency": "frequency", "unit": "flux_density_unit"}


def migrated(layout: Plain, version: int) -> Plain:
    """The plain layout in the present form, from that of `version`.

    Raises
    ------
    ValueError
        When there is no way from `version` to the present one.
    """
    if not 1 <= version <= SCHEMA_VERSION:
        raise ValueError(f"no migration from version {version}")
    for step in range(version, SCHEMA_VERSION):
        layout = _MIGRATIONS[step](layout)
    return layout


def _settings_from_defaults(layout: Plain) -> Plain:
    """Version 1 to 2: settings became an item, zones say `floor_level`."""
    new = dict(layout)
    defaults = layout.get("defaults")
    if isinstance(defaults, dict) and "settings" not in layout:
        del new["defaults"]
        new["settings"] = _settings(defaults)
    zones = layout.get("zones")
    if isinstance(zones, list):
        new["zones"] = [_with_floor_level(zone) for zone in zones]
    return new


def _settings(defaults: Plain) -> Plain:
    settings: Plain = {}
    for name, value in defaults.items():
        if name in _SETTING_OF_DEFAULT:
            settings[_SETTING_OF_DEFAULT[name]] = value
        elif name == "map_range" and isinstance(value, list) and len(value) == 2:
            settings["map_low"], settings["map_high"] = value
        elif name == "uncertainty":
            settings["uncertainty"] = {"relative": value}
        else:
            settings[name] = value
    return settings


def _with_floor_level(zone: object) -> object:
    if not isinstance(zone, dict) or "floor" not in zone or "floor_level" in zone:
        return zone
    return {
        "floor_level" if name == "floor" else name: value
        for name, value in zone.items()
    }


def _with_variants(layout: Plain) -> Plain:
    """Version 2 to 3: variants came, and an uncertainty that a budget gives.

    Older files have neither; programs of version 2 must refuse files that may.
    """
    return layout


_MIGRATIONS: Mapping[int, Callable[[Plain], Plain]] = {
    1: _settings_from_defaults,
    2: _with_variants,
}
