"""Layout files: a layout as readable UTF-8 JSON, and back with every fault named.

A file is ``{"lodestead_layout": version, "layout": {...}}``. Fields that have their
default are left out. Writing replaces the old file only when the new one is whole.
"""

from __future__ import annotations

import codecs
import json
from collections import Counter
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import Annotated, Any

import msgspec
from msgspec import Meta, structs

from engine import migrations, plain_values
from engine.errors import UserError
from engine.items import Value
from engine.layout import Layout
from engine.runs import FreeSection, ParallelSets, Run, StackedBars
from engine.value_faults import faults, told
from engine.variant import Variant
from engine.written_file import write_file

#: Largest file that is opened. [bytes]
MAX_BYTES = 200_000_000
#: Most commas and opening brackets: what a hostile file could fill the memory with.
MAX_MARKS = 5_000_000
#: Most straight conductor pieces (legs times slots) of all runs.
MAX_LEGS = 1_000_000
#: Most currents (slots times the circuits they carry) of all runs.
MAX_LOADS = 1_000_000
#: Text lines are kept this short where the structure allows it.
WIDTH = 100


class LayoutFile(Value, frozen=True, kw_only=True):
    """What stands in a layout file."""

    #: Version of the form.
    lodestead_layout: Annotated[
        int, Meta(ge=migrations.SCHEMA_VERSION, le=migrations.SCHEMA_VERSION)
    ]
    layout: Layout


def read(path: str | Path) -> Layout:
    """The layout in the file at `path`.

    Raises
    ------
    UserError
        When it cannot be read or is not a layout; every fault is named.
    """
    path = Path(path)
    try:
        if not path.exists():
            raise UserError(f"{path.name} was not opened: there is no such file.")
        if not path.is_file():
            raise UserError(f"{path.name} was not opened: it is not a file.")
        with path.open("rb") as file:
            data = file.read(MAX_BYTES + 1)
    except (OSError, ValueError) as error:
        raise UserError(f"{path.name} was not opened: {_reason(error)}.") from error
    return decode(data, path.name)


def write(path: str | Path, layout: Layout) -> None:
    """Write `layout` to `path`; the old file stands until the new one is whole.

    Raises
    ------
    UserError
        When the layout could not be read back, or the file cannot be written.
    """
    write_file(path, encode(layout))


def decode(data: bytes, where: str) -> Layout:
    """The layout in the bytes of a file that is called `where` in messages.

    Raises
    ------
    UserError
        Names every fault with its path and what was expected.
    """
    opening = f"{where} was not opened"
    text = _text(data, opening)
    plain, repeated = _parsed(text, opening)
    version = _version(plain, opening)
    if version != migrations.SCHEMA_VERSION:
        if repeated:
            found = [f'"{key}" stands more than once' for key in _keys(repeated)]
            raise told(opening, found)
        old = plain.get("layout")
        new = migrations.migrated(old, version) if isinstance(old, dict) else old
        plain = plain | {"layout": new, "lodestead_layout": migrations.SCHEMA_VERSION}
        opening += f" (a file of version {version})"
    found = [_without_root(fault) for fault in faults(LayoutFile, plain, repeated)]
    if found:
        raise told(opening, found)
    layout = msgspec.convert(plain, LayoutFile).layout
    found = [*_repeated_ids(layout), *_too_much(layout)]
    if found:
        raise told(opening, found)
    return layout


def encode(layout: Layout) -> bytes:
    """The bytes of a layout file: the same for equal layouts.

    Raises
    ------
    UserError
        When a value is not one that could be read back.
    """
    content = {
        "lodestead_layout": migrations.SCHEMA_VERSION,
        "layout": plain_values.plain(layout),
    }
    found = [_without_root(fault) for fault in faults(LayoutFile, content)]
    found = found or [*_repeated_ids(layout), *_too_much(layout)]
    if found:
        raise told("The layout was not saved", found)
    data = ("\n".join(_lines(content)) + "\n").encode()
    if len(data) > MAX_BYTES or _marks(data) > MAX_MARKS:
        raise UserError("The layout was not saved: it is larger than a file may be.")
    return data


def json_schema() -> dict[str, Any]:
    """JSON Schema of the present form of a layout file, made from the types."""
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "title": "Lodestead layout",
        "description": (
            "A described room: circuits, runs, equipment, places and levels. "
            "Lengths are in metres, currents in amperes RMS, angles in degrees."
        ),
        **msgspec.json.schema(LayoutFile),
    }


def _text(data: bytes, opening: str) -> str:
    if len(data) > MAX_BYTES:
        limit = f"{MAX_BYTES // 1_000_000} MB"
        raise UserError(f"{opening}: it is larger than the {limit} a layout may have.")
    if data.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        raise UserError(f"{opening}: it is UTF-16 text; save it as UTF-8.")
    if _marks(data) > MAX_MARKS:
        raise UserError(
            f"{opening}: it has more than {MAX_MARKS:,} entries, which no layout needs."
        )
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        raise UserError(
            f"{opening}: it is not UTF-8 text (line {line}); "
            "save it as UTF-8, or choose another file."
        ) from error
    if not text.strip():
        raise UserError(f"{opening}: it is empty.")
    return text


def _marks(data: bytes) -> int:
    return data.count(b",") + data.count(b"[") + data.count(b"{")


def _parsed(text: str, opening: str) -> tuple[Any, dict[int, list[str]]]:
    """Plain content, and the keys that stand twice by id of their dictionary."""
    repeated: dict[int, list[str]] = {}

    def as_object(pairs: list[tuple[str, object]]) -> dict[str, object]:
        made = dict(pairs)
        if len(made) < len(pairs):
            times = Counter(name for name, _ in pairs)
            repeated[id(made)] = [name for name in made if times[name] > 1]
            kept.append(made)
        return made

    # Kept alive, so that no other dictionary takes the place of its id.
    kept: list[dict[str, object]] = []
    try:
        plain = json.loads(text, object_pairs_hook=as_object, parse_int=_whole)
    except json.JSONDecodeError as error:
        rest = text[error.pos :].strip()
        where = f"line {error.lineno}, column {error.colno}"
        if not rest or error.msg.startswith("Unterminated string"):
            raise UserError(
                f"{opening}: it ends too early ({where}); a part of it is missing."
            ) from error
        raise UserError(
            f"{opening}: it is not valid JSON ({where}: {error.msg})."
        ) from error
    except RecursionError as error:
        raise UserError(f"{opening}: it is nested too deeply for a layout.") from error
    return plain, repeated


def _whole(digits: str) -> int | float:
    """A number without a point; a huge one is none that a layout can hold."""
    return int(digits) if len(digits) <= 300 else float("inf")


def _version(plain: Any, opening: str) -> int:
    if not isinstance(plain, dict) or "lodestead_layout" not in plain:
        raise UserError(
            f"{opening}: it is not a layout; a layout begins with "
            '"lodestead_layout" and the version of its form.'
        )
    version = plain["lodestead_layout"]
    if isinstance(version, bool) or not isinstance(version, int) or version < 1:
        raise UserError(
            f"{opening}: lodestead_layout: expected the version of its form, "
            f"a whole number from 1 to {migrations.SCHEMA_VERSION}."
        )
    if version > migrations.SCHEMA_VERSION:
        raise UserError(
            f"{opening}: it was written by a newer version of the program (form "
            f"{_digits(version)}; this one knows forms up to "
            f"{migrations.SCHEMA_VERSION}). Open it with that version."
        )
    return version


def _digits(number: int) -> str:
    return str(number) if number < 10**9 else "of a very large number"


def _keys(repeated: dict[int, list[str]]) -> list[str]:
    return [key[:60] for keys in repeated.values() for key in keys]


def _without_root(fault: str) -> str:
    """Paths as the user thinks of them: from the layout on."""
    return fault.removeprefix("layout.")


def _paths(layout: Layout) -> Iterator[tuple[str, str]]:
    """Where each item stands, and its id."""
    for field in structs.fields(Layout):
        value = getattr(layout, field.name)
        if isinstance(value, tuple):
            for index, item in enumerate(value):
                yield f"{field.name}[{index}]", item.id
        else:
            yield field.name, value.id


def _repeated_ids(layout: Layout) -> Iterator[str]:
    yield from _repeated(_paths(layout))
    for index, variant in enumerate(layout.variants):
        yield from _repeated(_paths_in(f"variants[{index}]", variant))


def _repeated(paths: Iterable[tuple[str, str]]) -> Iterator[str]:
    first: dict[str, str] = {}
    for path, item_id in paths:
        if item_id in first:
            yield (
                f'{path}.id: "{item_id}" is the id of {first[item_id]} already; '
                "every item needs its own"
            )
        else:
            first[item_id] = path


def _paths_in(path: str, variant: Variant) -> Iterator[tuple[str, str]]:
    """Where each item of a variant stands, and its id."""
    for name, items in (("replaced", variant.replaced), ("added", variant.added)):
        for field in structs.fields(items):
            for index, item in enumerate(getattr(items, field.name)):
                yield f"{path}.{name}.{field.name}[{index}]", item.id


def _too_much(layout: Layout) -> Iterator[str]:
    legs = loads = 0
    for run in _all_runs(layout):
        slots, carried = _slot_counts(run)
        legs += (len(run.route) - 1) * slots
        loads += carried
    if legs > MAX_LEGS:
        yield (
            f"runs: all together they have {legs:,} straight conductor pieces; "
            f"{MAX_LEGS:,} are the most that can be computed"
        )
    if loads > MAX_LOADS:
        yield (
            f"runs: all together their slots carry {loads:,} currents; "
            f"{MAX_LOADS:,} are the most that can be computed"
        )


def _all_runs(layout: Layout) -> Iterator[Run]:
    """Runs of the base and of every variant."""
    yield from layout.runs
    for variant in layout.variants:
        yield from (*variant.replaced.runs, *variant.added.runs)


def _slot_counts(run: Run) -> tuple[int, int]:
    """How many slots a run has, and how many currents they carry together."""
    section = run.section
    if isinstance(section, FreeSection):
        return len(section.slots), sum(len(slot.loads) for slot in section.slots)
    if isinstance(section, ParallelSets):
        slots = sum(len(order) for order in section.orders)
    elif isinstance(section, StackedBars):
        slots = len(section.order) * section.bars_per_pole
    else:
        slots = len(section.order)
    return slots, slots * len(section.circuits)


def _lines(value: Any) -> list[str]:
    """JSON text in lines; whatever fits on one line stands on one."""
    if isinstance(value, dict):
        names = [f"{json.dumps(name, ensure_ascii=False)}: " for name in value]
        return _broken("{", "}", names, [_lines(part) for part in value.values()])
    if isinstance(value, list):
        return _broken("[", "]", [""] * len(value), [_lines(part) for part in value])
    return [_scalar(value)]


def _broken(
    opened: str, closed: str, names: list[str], parts: list[list[str]]
) -> list[str]:
    length = sum(len(lines[0]) for lines in parts) + sum(
        len(name) + 2 for name in names
    )
    if length <= WIDTH and all(len(lines) == 1 for lines in parts):
        entries = [name + lines[0] for name, lines in zip(names, parts, strict=True)]
        return [opened + ", ".join(entries) + closed]
    lines = [opened]
    for index, (name, part) in enumerate(zip(names, parts, strict=True)):
        comma = "," if index < len(parts) - 1 else ""
        inner = [name + part[0], *part[1:]]
        inner[-1] += comma
        lines.extend("  " + line for line in inner)
    lines.append(closed)
    return lines


def _scalar(value: Any) -> str:
    if isinstance(value, float):
        if value.is_integer() and abs(value) < 1e15:
            return str(int(value))
        return repr(value)
    return json.dumps(value, ensure_ascii=False)


def _reason(error: Exception) -> str:
    """What the system says, without the path that the user knows already."""
    text = getattr(error, "strerror", None) or str(error)
    return text[:1].lower() + text[1:]
