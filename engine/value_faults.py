"""What is wrong with plain data that is to become a value: every fault, with its path.

msgspec checks fast but stops at the first fault. Here the same rules, taken from the
same types, are walked to the end, so that a person can mend a file in one go.
"""

from __future__ import annotations

import difflib
import json
import math
from collections.abc import Iterable, Iterator, Mapping
from functools import cache
from itertools import islice
from typing import Annotated, Any

import msgspec
from msgspec import inspect

from engine.errors import UserError

#: Faults of one value that are gathered, and how many of them are printed.
MOST_GATHERED = 1000
MOST_PRINTED = 40
#: A layout is some ten levels deep; more than this is no layout.
DEEPEST = 40


def told(opening: str, faults: Iterable[str]) -> UserError:
    """One error that says all `faults`, one a line when there are several."""
    listed = list(faults)
    if len(listed) == 1:
        return UserError(f"{opening}: {listed[0]}.")
    lines = [f"- {fault}." for fault in listed[:MOST_PRINTED]]
    if len(listed) > MOST_PRINTED:
        lines.append(f"- And {len(listed) - MOST_PRINTED} more faults.")
    return UserError("\n".join([f"{opening} for {len(listed)} reasons:", *lines]))


def faults(
    kind: Any, plain: object, repeated: Mapping[int, list[str]] | None = None
) -> list[str]:
    """Everything that keeps `plain` from becoming a value of type `kind`.

    Parameters
    ----------
    kind : type
        A value's type, or an annotation that msgspec understands.
    plain : object
        Lists, dictionaries, text and numbers as read from a file.
    repeated : mapping, optional
        Keys that stood twice in the file, by `id` of their dictionary.

    Returns
    -------
    list of str
        "path: what was expected, what was found", in the order of the data.
    """
    found: dict[str, str] = {}
    for path, message in islice(_plain_faults(plain, repeated or {}), MOST_GATHERED):
        found.setdefault(path, message)
    if not any(message.startswith("is nested") for message in found.values()):
        try:
            msgspec.convert(plain, kind)
        except (msgspec.ValidationError, UnicodeError) as error:
            walked = islice(_walk(_type_of(kind), plain, ""), MOST_GATHERED)
            for path, message in walked:
                found.setdefault(path, message)
            if not found:
                found[""] = str(error)
    return [
        f"{path}: {message}" if path else message for path, message in found.items()
    ]


@cache
def _type_of(kind: Any) -> inspect.Type:
    return inspect.type_info(kind)


def _plain_faults(
    plain: object, repeated: Mapping[int, list[str]]
) -> Iterator[tuple[str, str]]:
    """Faults that no type knows: depth, repeated keys, not finite, broken text."""
    open_ends: list[tuple[object, str, int]] = [(plain, "", 0)]
    while open_ends:
        value, path, depth = open_ends.pop()
        if depth > DEEPEST:
            yield path[:30] + "…", f"is nested more than {DEEPEST} levels deep"
            return
        if isinstance(value, float):
            if not math.isfinite(value):
                yield path, f"expected a finite number, got {_got(value)}"
        elif isinstance(value, str):
            if _is_broken(value):
                yield path, "has half a character (a lone surrogate) in its text"
        elif isinstance(value, dict):
            for key in repeated.get(id(value), ()):
                yield _inside(path, key), "stands more than once"
            for key in value:
                if _is_broken(key):
                    yield path, "has half a character (a lone surrogate) in a name"
            children = [(v, _inside(path, k), depth + 1) for k, v in value.items()]
            open_ends.extend(reversed(children))
        elif isinstance(value, list | tuple):
            children = [(v, f"{path}[{i}]", depth + 1) for i, v in enumerate(value)]
            open_ends.extend(reversed(children))


def _is_broken(text: str) -> bool:
    if text.isascii():
        return False
    return any("\ud800" <= character <= "\udfff" for character in text)


def _inside(path: str, key: object) -> str:
    text = key if isinstance(key, str) else repr(key)
    if not text.isidentifier():
        text = _shortened(json.dumps(text))
    return f"{path}.{text}" if path else text


def _walk(kind: inspect.Type, value: object, path: str) -> Iterator[tuple[str, str]]:
    """The faults of `value` against `kind` as pairs of path and message."""
    bare = kind.type if isinstance(kind, inspect.Metadata) else kind
    if isinstance(bare, inspect.UnionType):
        chosen = _member(bare, value)
        if chosen is not None:
            yield from _walk(chosen, value, path)
        elif isinstance(value, dict) and _tagged(bare):
            yield _tag_fault(bare, value, path)
        else:
            yield path, _mismatch(kind, value)
    elif isinstance(bare, inspect.StructType) and isinstance(value, dict):
        yield from _struct_faults(bare, value, path)
    elif isinstance(bare, inspect.VarTupleType) and isinstance(value, list | tuple):
        fewest, most = bare.min_length or 0, bare.max_length
        if len(value) < fewest or (most is not None and len(value) > most):
            yield path, f"expected {_expected(kind)}, got {len(value)} of them"
        for index, part in enumerate(value):
            yield from _walk(bare.item_type, part, f"{path}[{index}]")
    elif isinstance(bare, inspect.TupleType) and isinstance(value, list | tuple):
        if len(value) != len(bare.item_types):
            yield path, f"expected {_expected(kind)}, got {len(value)} of them"
            return
        for index, (part_type, part) in enumerate(
            zip(bare.item_types, value, strict=True)
        ):
            yield from _walk(part_type, part, f"{path}[{index}]")
    elif not _fits(bare, value):
        yield path, _mismatch(kind, value)


def _struct_faults(
    kind: inspect.StructType, value: dict[str, object], path: str
) -> Iterator[tuple[str, str]]:
    known = {field.encode_name: field for field in kind.fields}
    for name, field in known.items():
        if name in value:
            yield from _walk(field.type, value[name], _inside(path, name))
        elif field.required:
            expected = _expected(field.type)
            yield _inside(path, name), f"is missing (expected {expected})"
    for name in value:
        if name == kind.tag_field:
            if value[name] != kind.tag:
                yield (
                    _inside(path, name),
                    f"expected {_got(kind.tag)}, got {_got(value[name])}",
                )
        elif name not in known:
            near = difflib.get_close_matches(name, known, 1)
            hint = f'; perhaps "{near[0]}" is meant' if near else ""
            yield _inside(path, name), f"is no field that is known here{hint}"


def _tagged(kind: inspect.UnionType) -> dict[object, inspect.StructType]:
    """The struct members that a tag tells apart."""
    return {
        member.tag: member
        for member in kind.types
        if isinstance(member, inspect.StructType) and member.tag_field
    }


def _member(kind: inspect.UnionType, value: object) -> inspect.Type | None:
    """The member that `value` is meant to be; None when there is none."""
    tagged = _tagged(kind)
    if isinstance(value, dict) and tagged:
        tag_field = next(iter(tagged.values())).tag_field
        tag = value.get(str(tag_field))
        return tagged.get(tag) if isinstance(tag, str) else None
    kinds: tuple[type, ...]
    if isinstance(value, dict):
        kinds = (inspect.StructType,)
    elif isinstance(value, list | tuple):
        kinds = (inspect.VarTupleType, inspect.TupleType)
    elif value is None:
        kinds = (inspect.NoneType,)
    else:
        return _fitting_scalar(kind, value)
    for member in kind.types:
        bare = member.type if isinstance(member, inspect.Metadata) else member
        if isinstance(bare, kinds):
            return member
    return None


def _fitting_scalar(kind: inspect.UnionType, value: object) -> inspect.Type | None:
    for member in kind.types:
        bare = member.type if isinstance(member, inspect.Metadata) else member
        if _fits(bare, value):
            return member
    return None


def _tag_fault(
    kind: inspect.UnionType, value: dict[str, object], path: str
) -> tuple[str, str]:
    tagged = _tagged(kind)
    tag_field = str(next(iter(tagged.values())).tag_field)
    choices = "one of " + ", ".join(_got(tag) for tag in tagged)
    if tag_field not in value:
        return _inside(path, tag_field), f"is missing (expected {choices})"
    found = _got(value[tag_field])
    return _inside(path, tag_field), f"expected {choices}, got {found}"


def _fits(kind: inspect.Type, value: object) -> bool:
    """Whether a value without parts is what `kind` says."""
    if isinstance(kind, inspect.NoneType):
        return value is None
    if isinstance(kind, inspect.BoolType):
        return isinstance(value, bool)
    if isinstance(kind, inspect.LiteralType):
        return isinstance(value, str | int) and value in kind.values
    if isinstance(kind, inspect.StrType):
        return isinstance(value, str) and _accepts(kind, value)
    if isinstance(kind, inspect.IntType):
        is_number = isinstance(value, int) and not isinstance(value, bool)
        return is_number and _accepts(kind, value)
    if isinstance(kind, inspect.FloatType):
        is_number = isinstance(value, int | float) and not isinstance(value, bool)
        return is_number and _accepts(kind, value)
    return False


def _accepts(
    kind: inspect.StrType | inspect.IntType | inspect.FloatType, value: Any
) -> bool:
    """msgspec's own answer on lengths, patterns and ranges."""
    limits = {name: getattr(kind, name, None) for name in _LIMITS}
    annotated = _annotation(type(kind), tuple(limits.items()))
    try:
        msgspec.convert(value, annotated)
    except (msgspec.ValidationError, UnicodeError):
        return False
    return True


_LIMITS = ("gt", "ge", "lt", "le", "min_length", "max_length", "pattern")


_PLAIN_TYPES: dict[type[inspect.Type], type] = {
    inspect.StrType: str,
    inspect.IntType: int,
    inspect.FloatType: float,
}


@cache
def _annotation(kind: type[inspect.Type], limits: tuple[tuple[str, Any], ...]) -> Any:
    plain = _PLAIN_TYPES[kind]
    stated = {name: limit for name, limit in limits if limit is not None}
    return Annotated[plain, msgspec.Meta(**stated)] if stated else plain


def _mismatch(kind: inspect.Type, value: object) -> str:
    return f"expected {_expected(kind)}, got {_got(value)}"


def _expected(kind: inspect.Type) -> str:
    """What a person should write where `kind` stands."""
    if isinstance(kind, inspect.Metadata):
        said = (kind.extra_json_schema or {}).get("description")
        return str(said) if said else _expected(kind.type)
    if isinstance(kind, inspect.UnionType):
        members = [m for m in kind.types if not isinstance(m, inspect.NoneType)]
        words = list(dict.fromkeys(_expected(member) for member in members))
        if len(members) < len(kind.types):
            words.append("null")
        return " or ".join(words)
    if isinstance(kind, inspect.LiteralType):
        words = [_got(value) for value in kind.values]
        return words[0] if len(words) == 1 else "one of " + ", ".join(words)
    if isinstance(kind, inspect.FloatType):
        return "a number" + _range(kind)
    if isinstance(kind, inspect.IntType):
        return "a whole number" + _range(kind)
    if isinstance(kind, inspect.StrType):
        return "text" + _count(kind.min_length, kind.max_length, "characters")
    if isinstance(kind, inspect.VarTupleType):
        return "a list" + _count(kind.min_length, kind.max_length, "entries")
    if isinstance(kind, inspect.TupleType):
        return f"a list of {len(kind.item_types)} entries"
    if isinstance(kind, inspect.BoolType):
        return "true or false"
    if isinstance(kind, inspect.NoneType):
        return "null"
    return "an object"


def _range(kind: inspect.FloatType | inspect.IntType) -> str:
    words = []
    if kind.gt is not None:
        words.append(f"greater than {kind.gt:g}")
    if kind.ge is not None:
        words.append(f"not less than {kind.ge:g}")
    if kind.lt is not None:
        words.append(f"less than {kind.lt:g}")
    if kind.le is not None:
        words.append(f"not greater than {kind.le:g}")
    return " " + " and ".join(words) if words else ""


def _count(fewest: int | None, most: int | None, of_what: str) -> str:
    if fewest and most is None:
        return f" of at least {fewest} {of_what}"
    if fewest and fewest == most:
        return f" of {most} {of_what}"
    if fewest:
        return f" of {fewest} to {most} {of_what}"
    return f" of at most {most} {of_what}" if most is not None else ""


def _got(value: object) -> str:
    """What was found, short enough for a sentence."""
    if value is None:
        return "null"
    if isinstance(value, dict):
        return "an object"
    if isinstance(value, list | tuple):
        return "a list"
    if isinstance(value, float) and not math.isfinite(value):
        return "a number that is not finite"
    if isinstance(value, bool | int | float | str):
        return _shortened(json.dumps(value, ensure_ascii=_has_breaks(value)))
    return f"a value of type {type(value).__name__}"


def _has_breaks(value: object) -> bool:
    return isinstance(value, str) and (_is_broken(value) or not value.isprintable())


def _shortened(text: str) -> str:
    return text if len(text) <= 60 else f"{text[:50]}… ({len(text)} characters)"
