"""Which values of a layout are still assumed: entered values without an origin.

A value has an origin when it comes from a document, was measured, or was confirmed.
An origin of a whole field covers its parts; a part that is said to be assumed counts
as assumed all the same.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from typing import Any, TypeVar

from msgspec import Struct
from msgspec.structs import fields, replace

from engine.circuits import Circuit, LoadCase, OwnCurrents, Power
from engine.criteria import ReferenceLevel
from engine.equipment import Board, ConductorLoop, Transformer
from engine.field_words import field_words
from engine.items import Item, ValueOrigin
from engine.layout import Layout, Settings
from engine.places import Enclosure, Receptor, Room, Storey, Zone
from engine.runs import Joint, Run

AnyItem = TypeVar("AnyItem", bound=Item)

#: What a result depends on, by type of item. The other fields are wording, wiring or
#: appearance.
ENTERED_VALUES: dict[type[Item], tuple[str, ...]] = {
    Settings: ("uncertainty", "tolerances"),
    Storey: ("floor_level",),
    Room: ("outline", "floor_level", "ceiling_level"),
    Enclosure: ("footprint", "z_from", "z_to", "state", "front_clearance", "front"),
    Circuit: (
        "supply", "base_frequency", "voltage", "demand", "spectrum", "neutral",
        "net_current", "phase_relation",
    ),
    Transformer: ("terminals", "star"),
    Board: ("origin", "direction", "poles", "ways", "rated_current"),
    ConductorLoop: ("path", "share", "turns", "shape"),
    Run: ("route", "section", "turns", "rated_current", "containment"),
    Joint: ("at",),
    Zone: (
        "outline", "floor_level", "heights", "volume", "rule", "category",
        "clearance", "uncertainty",
    ),
    Receptor: ("at", "category", "measured", "uncertainty"),
    ReferenceLevel: ("values", "source"),
    LoadCase: ("factors", "own"),
}  # fmt: skip

#: Fields that say nothing while they hold their default: not an assumption then.
_SILENT: frozenset[tuple[type[Item], str]] = frozenset(
    {
        (Settings, "tolerances"),
        (Enclosure, "front_clearance"),
        (Enclosure, "front"),
        (Board, "rated_current"),
        (Run, "turns"),
        (Run, "rated_current"),
        (Run, "containment"),
        (Zone, "floor_level"),
        (Zone, "volume"),
        (Zone, "category"),
        (Zone, "uncertainty"),
        (Receptor, "category"),
        (Receptor, "measured"),
        (Receptor, "uncertainty"),
        (ReferenceLevel, "values"),
        (ReferenceLevel, "source"),
        (LoadCase, "factors"),
        (LoadCase, "own"),
    }
)

_LENGTHS = (
    "floor_level", "ceiling_level", "soffit_level", "slab_above", "z_from", "z_to",
    "front_clearance", "clearance", "at", "star", "heights", "diameter", "width",
    "thickness", "pitch", "set_pitch", "neutral_pitch", "gap", "insulation",
    "core_diameter", "core_circle_diameter", "outside_diameter", "setback", "foot_z",
    "position", "across", "fed_at", "z", "u", "v", "grid_step", "distance",
)  # fmt: skip

_UNITS = dict.fromkeys(_LENGTHS, "m") | {
    "base_frequency": "Hz", "frequency": "Hz", "voltage": "V", "rated_current": "A",
    "rms": "A", "flux_density": "T", "map_low": "T", "map_high": "T", "direction": "°",
    "front": "°", "angle": "°", "turn": "°", "north": "°",
}  # fmt: skip

#: What an empty field of a name stands for.
_NOTHING = {
    "at": "the middle of the ends",
    "demand": "no current entered",
}

_LONGEST_TEXT = 100


@dataclass(frozen=True)
class Assumption:
    """A value of an item that nothing yet confirms.

    Attributes
    ----------
    item : str
        Id of the item.
    field : str
        Name of the field, dotted for a part: "section.shape.diameter".
    value : str
        The value as text, with its unit where it is one number.
    reason : str
        What the user says about it, or nothing.
    """

    item: str
    field: str
    value: str
    reason: str = ""


def assumptions(layout: Layout) -> tuple[Assumption, ...]:
    """Every entered value without an origin, in the order of the layout."""
    found: list[Assumption] = []
    for item in layout.items():
        names = ENTERED_VALUES.get(type(item), ())
        for name in names:
            if _is_stated(item, name):
                found.extend(_of_field(item, name))
    return tuple(found)


def is_assumed(item: Item, path: str) -> bool:
    """Whether nothing confirms the value of an item at a dotted name.

    The origin nearest to the value counts: its own, else that of the whole it is a
    part of. What no result depends on is never an assumption.
    """
    name = path.partition(".")[0]
    if name not in ENTERED_VALUES.get(type(item), ()) or not _is_stated(item, name):
        return False
    kinds = {origin.field: origin.kind for origin in item.origins}
    while path:
        if path in kinds:
            return kinds[path] == "assumed"
        path = path.rpartition(".")[0]
    return True


def with_origin(item: AnyItem, origin: ValueOrigin) -> AnyItem:
    """The item with this origin of a value in place of the one it had.

    Origins of the value's parts stay. "assumed" without a note is no origin at all.
    """
    kept = tuple(o for o in item.origins if o.field != origin.field)
    if origin.kind == "assumed" and not origin.note:
        return replace(item, origins=kept)
    return replace(item, origins=(*kept, origin))


def origin_of(item: Item, field: str) -> ValueOrigin | None:
    """The origin stated for a value, or for the whole that it is a part of."""
    stated = {origin.field: origin for origin in item.origins}
    while field:
        if field in stated:
            return stated[field]
        field = field.rpartition(".")[0]
    return None


def restated(item: AnyItem, **values: Any) -> AnyItem:
    """The item with other values; what changed loses its origin and is assumed again.

    What a document or a person vouched for was the value before.
    """
    changed = {name for name, value in values.items() if getattr(item, name) != value}
    if not changed:
        return item
    kept = tuple(o for o in item.origins if o.field.partition(".")[0] not in changed)
    return replace(item, **{name: values[name] for name in changed}, origins=kept)


def value_text(value: object, field: str = "") -> str:
    """A value of a layout as a short text.

    Examples
    --------
    >>> value_text(2.5, "clearance"), value_text(()), value_text((1.0, 2.0, 3.5))
    ('2.5 m', 'none entered', '1, 2, 3.5')
    """
    text = _with_unit(value, field)
    return text if len(text) <= _LONGEST_TEXT else text[: _LONGEST_TEXT - 1] + "…"


def _with_unit(value: object, field: str) -> str:
    """A value and its unit, where it is a number or numbers of one."""
    text = _plain(value, field)
    unit = _UNITS.get(field, "")
    parts = value if isinstance(value, tuple) else (value,)
    is_number = [isinstance(p, float | int) and not isinstance(p, bool) for p in parts]
    if not unit or not parts or not all(is_number):
        return text
    return f"{text}{unit}" if unit == "°" else f"{text} {unit}"


def _is_stated(item: Item, name: str) -> bool:
    """Whether the field says something that a result depends on."""
    if name == "voltage" and isinstance(item, Circuit):
        return isinstance(item.demand, Power)
    if (type(item), name) not in _SILENT:
        return True
    return bool(getattr(item, name) != _defaults(type(item))[name])


@cache
def _defaults(kind: type[Item]) -> dict[str, Any]:
    return {field.name: field.default for field in fields(kind)}


def _of_field(item: Item, name: str) -> list[Assumption]:
    value = getattr(item, name)
    whole = [origin for origin in item.origins if origin.field == name]
    parts = [origin for origin in item.origins if origin.field.startswith(f"{name}.")]
    if not any(origin.kind != "assumed" for origin in whole):
        reasons = [o.note for o in whole if o.note]
        text = value_text(value, name)
        known = [
            field_words(o.field.removeprefix(f"{name}."))
            for o in parts
            if o.kind != "assumed"
        ]
        if known:
            text = f"{text} (apart from {', '.join(known)})"
        return [Assumption(item.id, name, text, " ".join(reasons))]
    return [
        Assumption(item.id, o.field, _part_text(value, name, o.field), o.note)
        for o in parts
        if o.kind == "assumed"
    ]


def _part_text(value: object, name: str, dotted: str) -> str:
    """The part's own value, where the dotted name leads to one."""
    for step in dotted.removeprefix(f"{name}.").split("."):
        if isinstance(value, tuple) and step.isdigit() and int(step) < len(value):
            value = value[int(step)]
        elif isinstance(value, Struct) and hasattr(value, step):
            value = getattr(value, step)
        else:
            return "not stated"
    return value_text(value, dotted.rpartition(".")[2])


def _plain(value: object, field: str = "") -> str:
    writers: tuple[tuple[type | tuple[type, ...], Callable[[Any], str]], ...] = (
        (bool, lambda v: "yes" if v else "no"),
        ((int, float), lambda v: f"{v:.6g}"),
        (str, lambda v: v or "not stated"),
        (OwnCurrents, lambda v: f"own currents of {v.circuit}"),
        (Struct, _struct_text),
        (tuple, _tuple_text),
    )
    if value is None or value == ():
        return _NOTHING.get(field, "none entered")
    return next(write(value) for kind, write in writers if isinstance(value, kind))


def _tuple_text(value: tuple[object, ...]) -> str:
    if all(isinstance(part, int | float) for part in value):
        return ", ".join(_plain(part) for part in value)
    if all(isinstance(part, str) for part in value):
        return " ".join(str(part) for part in value)
    if all(isinstance(part, Struct) for part in value) and len(value) <= 4:
        return "; ".join(_plain(part) for part in value)
    return f"{len(value)} entries"


def _struct_text(value: Struct) -> str:
    shown = [
        f"{field_words(field.name, type(value))} {_with_unit(part, field.name)}"
        for field in fields(value)
        if (part := getattr(value, field.name)) not in (None, (), "")
    ]
    tag = type(value).__struct_config__.tag
    kind = f"{tag}: " if isinstance(tag, str) else ""
    return kind + ", ".join(shown)
