"""Layout values as plain lists, dictionaries, text and numbers, and digests of them.

Fields that hold their default are left out, as in a file: what a later version of the
program adds to an item does not change the digest of an item that says nothing of it.
"""

from __future__ import annotations

import json
from functools import cache
from hashlib import sha256
from typing import Any

import msgspec
from msgspec import structs

from engine.items import Item


def plain(value: Any) -> Any:
    """Lists, dictionaries, text and numbers; fields with their default left out."""
    if isinstance(value, tuple | list):
        return [plain(part) for part in value]
    if not isinstance(value, msgspec.Struct):
        return value
    config = value.__struct_config__
    made = {} if config.tag is None else {str(config.tag_field): config.tag}
    for name, default in _defaults(type(value)):
        part = getattr(value, name)
        if default is msgspec.NODEFAULT or part != default:
            made[name] = plain(part)
    return made


def digest(item: Item) -> str:
    """SHA-256 of all that an item says, in hexadecimal digits.

    Equal items have equal digests, on every machine: 1 and 1.0 are the same number.
    """
    content = [type(item).__name__, _as_floats(plain(item))]
    text = json.dumps(content, sort_keys=True, separators=(",", ":"))
    return sha256(text.encode()).hexdigest()


def _as_floats(value: Any) -> Any:
    if isinstance(value, dict):
        return {name: _as_floats(part) for name, part in value.items()}
    if isinstance(value, list):
        return [_as_floats(part) for part in value]
    if isinstance(value, int | float) and not isinstance(value, bool):
        # Minus zero equals zero and must not tell two items apart.
        return float(value) + 0.0
    return value


@cache
def _defaults(kind: type[msgspec.Struct]) -> tuple[tuple[str, Any], ...]:
    """Names and defaults of the fields, as they stand in a file."""
    return tuple((field.name, field.default) for field in structs.fields(kind))
