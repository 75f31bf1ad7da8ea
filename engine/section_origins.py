"""Origins of a section's values after another section has taken its place.

What somebody vouched for is a value, not its place in the file: a conductor that
becomes free keeps the size that was confirmed, and a slot its origins when the ones
before it go. Import place: after `entered_values`, before `section_edits`.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from msgspec import Struct
from msgspec.structs import fields, replace

from engine.entered_values import part_at
from engine.items import ValueOrigin
from engine.runs import FreeSection, Run, Section

_CHANGED = "Changed afterwards."


def section_origins(
    run: Run, section: Section, names: Mapping[str, str] | None = None
) -> tuple[ValueOrigin, ...]:
    """The run's origins once it has `section`, each where its value now is.

    Origins of values that changed go. Where an origin of a whole covered them it
    stays, and what changed is said to be assumed.

    Parameters
    ----------
    run
        With its section as it was.
    section
        What takes its place.
    names
        New name of each slot by its old one, where it has another.
    """
    kept: dict[str, ValueOrigin] = {}
    for origin in run.origins:
        whole, _, path = origin.field.partition(".")
        if whole != "section":
            kept.setdefault(origin.field, origin)
            continue
        for found in _followed(origin, path, run.section, section, names or {}):
            kept.setdefault(found.field, found)
    return tuple(kept.values())


def _followed(
    origin: ValueOrigin,
    path: str,
    old: Section,
    new: Section,
    names: Mapping[str, str],
) -> Iterator[ValueOrigin]:
    """The origin at each place where its value, or a part of it, still is."""
    before = _at(old, path)
    is_alike = False
    for target in _targets(path, old, new, names):
        now = _at(new, target)
        if now is None or not _alike(before, now):
            continue
        changed = tuple(_differing(before, now, target))
        if changed == (target,):
            continue
        is_alike = True
        yield replace(origin, field=_field(target))
        if origin.kind != "assumed":
            for part in changed:
                yield ValueOrigin(field=_field(part), kind="assumed", note=_CHANGED)
    if not is_alike:
        for step in _steps(before):
            inner = f"{path}.{step}" if path else step
            yield from _followed(origin, inner, old, new, names)


def _targets(
    path: str, old: Section, new: Section, names: Mapping[str, str]
) -> tuple[str, ...]:
    """Where a value of the old section is to be looked for in the new one."""
    if not isinstance(new, FreeSection):
        return (path,)
    steps = path.split(".")
    if not isinstance(old, FreeSection):
        if steps[0] in ("width", "thickness"):
            steps = ["shape", *steps]
        if steps[0] != "shape":
            return (path,)
        return tuple(".".join(["slots", str(i), *steps]) for i in range(len(new.slots)))
    if steps[0] != "slots" or len(steps) == 1:
        return (path,)
    slot = part_at(old, ".".join(steps[:2]))
    if slot is None:
        return ()
    wanted = names.get(slot.name, slot.name)
    return tuple(
        ".".join(["slots", str(i), *steps[2:]])
        for i, slot in enumerate(new.slots)
        if slot.name == wanted
    )


def _alike(before: Any, now: Any) -> bool:
    """Whether the two have the same parts, so that they can be told one by one.

    Slots are alike only in the same order: elsewhere each is followed by itself.
    """
    if type(before) is not type(now):
        return False
    if isinstance(before, FreeSection):
        return [s.name for s in before.slots] == [s.name for s in now.slots]
    return True


def _differing(before: Any, now: Any, path: str) -> Iterator[str]:
    """Dotted names of the smallest parts in which the two differ."""
    if before == now:
        return
    steps = tuple(_steps(before))
    if type(before) is not type(now) or not steps or steps != tuple(_steps(now)):
        yield path
        return
    for step in steps:
        inner = f"{path}.{step}" if path else step
        yield from _differing(part_at(before, step), part_at(now, step), inner)


def _steps(value: Any) -> Iterator[str]:
    """Names of the parts of a value; an order of labels is one value."""
    if isinstance(value, Struct):
        yield from (field.name for field in fields(value))
    elif isinstance(value, tuple) and not any(isinstance(v, str) for v in value):
        yield from (str(i) for i in range(len(value)))


def _at(section: Section, path: str) -> Any:
    return part_at(section, path) if path else section


def _field(path: str) -> str:
    return f"section.{path}" if path else "section"
