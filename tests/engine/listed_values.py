"""Values of every type that a layout can hold, made from the types themselves."""

from __future__ import annotations

import functools
from typing import Any

import msgspec
from msgspec import inspect

from engine.layout import Layout

Plain = dict[str, Any]


def rich_layout() -> Layout:
    """A layout with every type, every choice of a union and both ends of ranges.

    It makes no sense as a room; its references lead nowhere.
    """
    by_field: Plain = {}
    kind = inspect.type_info(Layout)
    assert isinstance(kind, inspect.StructType)
    for field in kind.fields:
        examples = _examples(field.type)
        by_field[field.name] = examples[-1]
    _number_ids(by_field)
    return msgspec.convert(by_field, Layout)


def _number_ids(by_field: Plain, stem: str = "") -> None:
    for name, held in by_field.items():
        for index, item in enumerate(held if isinstance(held, list) else [held]):
            item["id"] = f"{stem}{name} {index}"
            for part in ("replaced", "added") if name == "variants" else ():
                _number_ids(item[part], f"{part} ")


def _examples(kind: inspect.Type) -> list[Any]:
    """Plain values that together use every part of a type; the last is the fullest."""
    if isinstance(kind, inspect.Metadata):
        return _examples(kind.type)
    if isinstance(kind, inspect.UnionType):
        return [value for member in kind.types for value in _examples(member)]
    if isinstance(kind, inspect.StructType):
        return _structs(kind)
    if isinstance(kind, inspect.VarTupleType):
        return _lists(kind)
    if isinstance(kind, inspect.TupleType):
        parts = [_examples(member) for member in kind.item_types]
        return [[part[0] for part in parts], [part[-1] for part in parts]]
    if isinstance(kind, inspect.LiteralType):
        return list(kind.values)
    return _scalars(kind)


def _structs(kind: inspect.StructType) -> list[Plain]:
    examples = {field.name: _examples(field.type) for field in kind.fields}
    count = max((len(found) for found in examples.values()), default=1)
    tag = {} if kind.tag is None else {kind.tag_field: kind.tag}
    made = [
        tag | {name: found[-1 - i % len(found)] for name, found in examples.items()}
        for i in range(count)
    ]
    return made[::-1]


def _lists(kind: inspect.VarTupleType) -> list[list[Any]]:
    inner = _examples(kind.item_type)
    fewest = kind.min_length or 0
    most = min(kind.max_length or len(inner), max(len(inner), fewest))
    full = [inner[i % len(inner)] for i in range(most)]
    return [full[:fewest], full]


@functools.singledispatch
def _scalars(kind: inspect.Type) -> list[Any]:
    raise TypeError(f"no examples of {kind}")


@_scalars.register
def _(kind: inspect.NoneType) -> list[Any]:
    return [None]


@_scalars.register
def _(kind: inspect.BoolType) -> list[Any]:
    return [False, True]


@_scalars.register
def _(kind: inspect.IntType) -> list[Any]:
    return [kind.ge, kind.le]


@_scalars.register
def _(kind: inspect.FloatType) -> list[Any]:
    low = kind.ge if kind.ge is not None else 1e-9 if kind.gt is not None else -1e300
    high = kind.le if kind.le is not None else 1e300
    return [low, high, (low + high) / 3]


@_scalars.register
def _(kind: inspect.StrType) -> list[Any]:
    if kind.pattern and "64" in kind.pattern:
        return ["", "0123456789abcdef" * 4]
    if kind.pattern:
        return ["a", "Main feeder+1:2_3.4-5"]
    return ["x", 'Büro "quer" / Ω 磁\n\t<b>&amp;\\ 🧲']
