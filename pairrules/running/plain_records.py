"""Frozen records to plain lists that JSON can hold, and back, by the types their fields are declared with."""

from __future__ import annotations

import dataclasses
import types
import typing
from functools import cache
from typing import Any, SupportsFloat, TypeVar

Record = TypeVar("Record")

_NEVER_KEPT = {"Drawing": object, "PairDrawing": object}
"""Fields of these types are `None` in every result that is kept; what they are is not imported for it."""


def to_plain(value: Any) -> Any:
    """A record as a list of its fields' values in order, tuples as lists, all else as it is."""
    if value is None or type(value) in {str, int, float, bool}:
        return value
    if isinstance(value, tuple):
        return [to_plain(one) for one in value]
    kind: Any = type(value)
    if hasattr(kind, "__dataclass_fields__"):
        return [to_plain(getattr(value, field.name)) for field in _fields(kind)]
    if isinstance(value, SupportsFloat) and hasattr(value, "item"):
        return value.item()  # a number of a numerical library
    raise TypeError(f"{type(value).__name__} has no plain form")


def from_plain(kind: type[Record], plain: Any) -> Record:
    """The record that `to_plain` gave `plain` for.

    Raises: ValueError where `plain` does not fit the fields' types.
    """
    made: Record = _made(kind, plain)
    return made


def _made(kind: Any, plain: Any) -> Any:
    if hasattr(kind, "__dataclass_fields__"):
        fields = _fields(kind)
        if not isinstance(plain, list) or len(plain) != len(fields):
            raise ValueError("a record has other fields")
        hints = _hints(kind)
        values = {one.name: _made(hints[one.name], value) for one, value in zip(fields, plain, strict=True)}
        return kind(**values)
    if kind in {str, bool, int, float}:
        # A length that came out as the whole number 0 was one before, too.
        if type(plain) is kind or (kind is float and type(plain) is int):
            return plain
        raise ValueError(f"{kind.__name__} is expected")
    origin, inner = typing.get_origin(kind), typing.get_args(kind)
    if origin is tuple and isinstance(plain, list):
        if len(inner) == 2 and inner[1] is Ellipsis:
            return tuple(_made(inner[0], one) for one in plain)
        if len(inner) == len(plain):
            return tuple(_made(of, one) for of, one in zip(inner, plain, strict=True))
    if origin is types.UnionType:
        if plain is None and types.NoneType in inner:
            return None
        for choice in inner:
            if choice is not types.NoneType:
                try:
                    return _made(choice, plain)
                except ValueError:
                    continue
    raise ValueError(f"{kind} is expected")


@cache
def _fields(kind: Any) -> tuple[dataclasses.Field[Any], ...]:
    return tuple(field for field in dataclasses.fields(kind) if field.init)


@cache
def _hints(kind: Any) -> dict[str, Any]:
    return typing.get_type_hints(kind, localns=_NEVER_KEPT)
