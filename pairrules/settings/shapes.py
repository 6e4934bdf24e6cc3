"""The shapes a value in a settings file may have; one declaration serves the reader and the JSON Schema."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import TypeAlias

_NOTHING: Mapping[str, str] = MappingProxyType({})


@dataclass(frozen=True, slots=True, kw_only=True)
class Quantity:
    """A number with its unit.

    Parameters
    ----------
    dimension: a key of `board.units.DIMENSIONS`.
    scale: multiplies what `board.units.quantity` returns (to reach SI units).
    signed: may be negative. positive: must not be zero.
    below: its magnitude must be less than this; for shares.
    or_time: may instead be a time. or_share: may instead be a share of one of `limit.TIMES`. Both are read as `Timed`.
    """

    dimension: str
    scale: float = 1.0
    signed: bool = False
    positive: bool = False
    below: float = math.inf
    or_time: bool = False
    or_share: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Number:
    """A bare number, for what has no dimension. `least`, `most`: the bounds it may reach, None where any will do."""

    least: float | None = None
    most: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Text:
    """A text, or one of `words` where they are given."""

    words: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Flag:
    """`true` or `false`."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ListOf:
    """A list of one shape, with at least `least` and at most `most` entries (0: any number)."""

    of: Shape
    least: int = 1
    most: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A table with known keys.

    Parameters
    ----------
    keys: key to shape. required: keys that must be there. any_of: keys of which one must be there.
    not_both: pairs of keys that exclude each other. needs: key to the key that it cannot do without.
    """

    keys: Mapping[str, Shape]
    required: tuple[str, ...] = ()
    any_of: tuple[str, ...] = ()
    not_both: tuple[tuple[str, str], ...] = ()
    needs: Mapping[str, str] = field(default_factory=lambda: _NOTHING)


@dataclass(frozen=True, slots=True, kw_only=True)
class Named:
    """A table whose keys are names of the user's own, all values of one shape."""

    of: Shape


@dataclass(frozen=True, slots=True, kw_only=True)
class Kinds:
    """A table whose `kind` decides which other keys it may have."""

    kinds: Mapping[str, Table]


@dataclass(frozen=True, slots=True, kw_only=True)
class Either:
    """`scalar` where a single text stands, `nested` where a list or table does."""

    scalar: Quantity | Text
    nested: Shape


Shape: TypeAlias = Quantity | Number | Text | Flag | ListOf | Table | Named | Kinds | Either
