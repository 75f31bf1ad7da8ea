"""One entered value of an item by its dotted name, read or replaced.

`with_value` also sees to the value's origin: a value that was confirmed and is then
changed is an assumption again.
"""

from __future__ import annotations

from typing import Any, TypeVar

from msgspec import Struct
from msgspec.structs import replace

from engine.circuits import BalancedCurrent, Circuit
from engine.equipment import Dropper, Way
from engine.items import Item, ValueOrigin
from engine.places import MeasuredValue, Receptor, Uncertainty, Zone
from engine.runs import Connection, Run

AnyItem = TypeVar("AnyItem", bound=Item)

#: What a part that is not there yet begins as, when one of its own values is entered.
_FIRST: dict[tuple[type, str], Struct] = {
    (Receptor, "measured"): MeasuredValue(flux_density=0.0),
    (Receptor, "uncertainty"): Uncertainty(),
    (Zone, "uncertainty"): Uncertainty(),
    (Way, "dropper"): Dropper(pitch=0.1, setback=0.0, foot_z=0.0),
    (Circuit, "demand"): BalancedCurrent(rms=0.0),
    (Run, "start"): Connection(equipment=""),
    (Run, "end"): Connection(equipment=""),
}


def value_at(item: Item, path: str) -> Any:
    """The value of an item at a dotted name, such as "section.pitch" or "poles.0.z".

    None where a part on the way is not there.
    """
    return part_at(item, path)


def part_at(whole: Any, path: str) -> Any:
    """The part of any value at a dotted name; tuples by number."""
    found = whole
    for step in path.split("."):
        if found is None:
            return None
        if isinstance(found, tuple):
            at = int(step)
            found = found[at] if at < len(found) else None
        else:
            found = getattr(found, step, None)
    return found


def with_part(whole: Any, path: str, value: Any) -> Any:
    """Any value with another part at a dotted name."""
    return _with(whole, path.split("."), value)


def with_value(item: AnyItem, path: str, value: Any) -> AnyItem:
    """The item with another value at a dotted name.

    Origins of the value and of its parts go. Where an origin of a whole covered it,
    the value is said to be assumed.
    """
    changed: AnyItem = _with(item, path.split("."), value)
    if changed == item:
        return item
    kept = tuple(
        o
        for o in item.origins
        if o.field != path and not o.field.startswith(f"{path}.")
    )
    covered = any(o.kind != "assumed" and path.startswith(f"{o.field}.") for o in kept)
    if covered:
        kept += (ValueOrigin(field=path, kind="assumed", note="Changed afterwards."),)
    return replace(changed, origins=kept)


def _with(part: Any, steps: list[str], value: Any) -> Any:
    step, *further = steps
    if isinstance(part, tuple):
        at = int(step)
        new = _with(part[at], further, value) if further else value
        return (*part[:at], new, *part[at + 1 :])
    if not further:
        return replace(part, **{step: value})
    inner = getattr(part, step)
    if inner is None:
        inner = _FIRST[type(part), step]
    return replace(part, **{step: _with(inner, further, value)})
