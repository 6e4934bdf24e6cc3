"""What a node means where a shape is expected; a fault where it means nothing of the kind."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

from pairrules.board.units import quantity
from pairrules.settings import nodes
from pairrules.settings.faults import Faults, nearest
from pairrules.settings.limit import TIMES, Timed
from pairrules.settings.nodes import Node
from pairrules.settings.shapes import Either, Flag, Kinds, ListOf, Named, Number, Quantity, Shape, Table, Text


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """A table as read: values by key, and the node of the table and of each key's value."""

    values: Mapping[str, Any]
    node: Node
    nodes: Mapping[str, Node]
    path: str

    def get(self, key: str) -> Any:
        """The value, None where the key is absent or its value faulty."""
        return self.values.get(key)


def read_shape(node: Node, shape: Shape, path: str, faults: Faults) -> Any:
    """The value of a node.

    Parameters
    ----------
    path: where it stands, such as "classes.bridge.limits", "" for the whole file.

    Returns
    -------
    Quantity: float, or `Timed` where its shape allows a time or a share of one. Number: float. Text: str. Flag: bool.
    ListOf: tuple. Table, Named, Kinds: `Entry`; Kinds with the value "kind" in it. None where a fault was noted; faulty
    parts of a list or table are left out of it.
    """
    match shape:
        case Quantity() | Number() | Text() | Flag():
            return _scalar(node, shape, path, faults)
        case Either():
            return read_shape(node, shape.scalar if isinstance(node, nodes.Scalar) else shape.nested, path, faults)
        case ListOf():
            return _list(node, shape, path, faults)
        case Table():
            return _table(node, shape, path, faults)
        case Named():
            return _named(node, shape, path, faults)
        case Kinds():
            return _kinds(node, shape, path, faults)


def _scalar(node: Node, shape: Quantity | Number | Text | Flag, path: str, faults: Faults) -> Any:
    if not isinstance(node, nodes.Scalar):
        found = "a list" if isinstance(node, nodes.Sequence) else "a table"
        wanted = {Quantity: "a quantity with its unit", Number: "a number", Text: "a text", Flag: "true or false"}
        faults.add(f"{path} is {found}", f"write {wanted[type(shape)]}", node)
        return None
    if node.empty:
        faults.add(f"{path} is empty", "fill it or leave it out", node)
        return None
    if isinstance(shape, Quantity):
        return _quantity(node, shape, path, faults)
    if isinstance(shape, Number):
        return _number(node, shape, path, faults)
    if isinstance(shape, Flag):
        if node.text in {"true", "false"}:
            return node.text == "true"
        faults.add(f"{path} is {node.text!r}", "write true or false", node)
        return None
    if shape.words and node.text not in shape.words:
        faults.add(f"{path} is {node.text!r}", _one_of(node.text, shape.words), node)
        return None
    if not node.text:
        faults.add(f"{path} is an empty text", "fill it or leave it out", node)
        return None
    return node.text


def _one_of(text: str, words: tuple[str, ...]) -> str:
    close = nearest(text, words)
    if close.startswith("write"):
        return close
    return f"write {words[0]!r}" if len(words) == 1 else f"write one of {', '.join(words)}"


_SHARE_OF = re.compile(r"(?P<share>.*?)\bof\b\s*(?P<of>.*)\Z")


def _quantity(node: nodes.Scalar, shape: Quantity, path: str, faults: Faults) -> float | Timed | None:
    share = _SHARE_OF.match(node.text) if shape.or_share else None
    if share is not None:
        if share["of"] not in TIMES:
            faults.add(f"{path} is a share of {share['of']!r}", _one_of(share["of"], TIMES), node)
            return None
        part = _quantity(replace(node, text=share["share"].strip()), _PART, path, faults)
        return Timed(amount=part, of=share["of"]) if isinstance(part, float) else None
    if shape.or_time and shape.dimension != "time" and _is_time(node.text):
        time = _quantity(node, _TIME, path, faults)
        return Timed(amount=time) if isinstance(time, float) else None
    try:
        value = quantity(node.text, shape.dimension)
    except ValueError as error:
        found, _, remedy = str(error).rpartition("; ")
        faults.add(f"{path}: {found}", remedy, node) if found else faults.add(
            f"{path}: {error}", "write a finite number", node
        )
        return None
    if value != 0 and not _LEAST < abs(value) < _MOST:
        faults.add(f"{path} is {node.text!r}", "write a value that a circuit can have", node)
        return None
    if not shape.signed and value < 0:
        faults.add(f"{path} is {node.text!r}", "write a value that is not negative", node)
        return None
    if shape.positive and value == 0:
        faults.add(f"{path} is {node.text!r}", "write a value above zero", node)
        return None
    if abs(value) >= shape.below:
        faults.add(f"{path} is {node.text!r}", f"write less than {100 * shape.below:g} %", node)
        return None
    return value * shape.scale


_LEAST, _MOST = 1e-24, 1e18
"""Magnitudes of a quantity in its own unit; beyond them products and quotients of a few leave the range of numbers."""

_PART = Quantity(dimension="share")
_TIME = Quantity(dimension="time")


def _is_time(text: str) -> bool:
    try:
        quantity(text, "time")
    except ValueError:
        return False
    return True


def _number(node: nodes.Scalar, shape: Number, path: str, faults: Faults) -> float | None:
    try:
        value = float(node.text)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        faults.add(f"{path} is {node.text!r}", "write a plain number", node)
        return None
    if shape.least is not None and value < shape.least:
        faults.add(f"{path} is {node.text!r}", f"write a number of at least {shape.least:g}", node)
        return None
    if shape.most is not None and value > shape.most:
        faults.add(f"{path} is {node.text!r}", f"write a number of at most {shape.most:g}", node)
        return None
    return value


def _list(node: Node, shape: ListOf, path: str, faults: Faults) -> tuple[Any, ...] | None:
    if not isinstance(node, nodes.Sequence):
        faults.add(f"{path} is no list", "write a list, such as [first, second]", node)
        return None
    if len(node.items) < shape.least or (shape.most and len(node.items) > shape.most):
        wanted = f"exactly {shape.least}" if shape.most == shape.least else f"at least {shape.least}"
        faults.add(f"{path} has {len(node.items)} entries", f"give {wanted}", node)
        return None
    values = [read_shape(item, shape.of, f"{path}[{i}]", faults) for i, item in enumerate(node.items)]
    return tuple(value for value in values if value is not None)


def _table(node: Node, shape: Table, path: str, faults: Faults) -> Entry | None:
    if not _is_table(node, path, faults):
        return None
    return _entry(node, shape, path, faults)


def _is_table(node: Node, path: str, faults: Faults) -> bool:
    if isinstance(node, nodes.Mapping):
        return True
    empty = isinstance(node, nodes.Scalar) and node.empty
    what = path or "the file"
    faults.add(f"{what} is {'empty' if empty else 'no table'}", "write keys and values, such as key: value", node)
    return False


def _entry(node: Node, shape: Table, path: str, faults: Faults) -> Entry:
    assert isinstance(node, nodes.Mapping)
    what = path or "the top level"
    values: dict[str, Any] = {}
    places: dict[str, Node] = {}
    for key, content in node.entries:
        below = shape.keys.get(key.text)
        if below is None:
            faults.add(f"{what} knows no {key.text!r}", nearest(key.text, shape.keys), key)
            continue
        places[key.text] = content
        value = read_shape(content, below, f"{path}.{key.text}" if path else key.text, faults)
        if value is not None:
            values[key.text] = value
    for key_needed in shape.required:
        if key_needed not in places:
            faults.add(f"{what} lacks {key_needed!r}", "add it", node)
    if shape.any_of and not any(key in places for key in shape.any_of):
        wanted = " or ".join(repr(key) for key in shape.any_of)
        faults.add(f"{what} lacks {wanted}", "add it" if len(shape.any_of) == 1 else "add one of them", node)
    for one, other in shape.not_both:
        if one in places and other in places:
            faults.add(f"{what} has both {one!r} and {other!r}", "keep one of them", places[other])
    for key_given, key_needed in shape.needs.items():
        if key_given in places and key_needed not in places:
            faults.add(f"{what} has {key_given!r} without {key_needed!r}", f"add {key_needed!r}", node)
    return Entry(values=values, node=node, nodes=places, path=path)


def _named(node: Node, shape: Named, path: str, faults: Faults) -> Entry | None:
    if not _is_table(node, path, faults):
        return None
    assert isinstance(node, nodes.Mapping)
    if not node.entries:
        faults.add(f"{path} is empty", "fill it or leave it out", node)
    return _entry(node, Table(keys={key.text: shape.of for key, _ in node.entries}), path, faults)


def _kinds(node: Node, shape: Kinds, path: str, faults: Faults) -> Entry | None:
    if not _is_table(node, path, faults):
        return None
    assert isinstance(node, nodes.Mapping)
    kinds = tuple(shape.kinds)
    found = next((value for key, value in node.entries if key.text == "kind"), None)
    if found is None:
        faults.add(f"{path} lacks 'kind'", f"add kind: with one of {', '.join(kinds)}", node)
        return None
    kind = read_shape(found, Text(words=kinds), f"{path}.kind", faults)
    if kind is None:
        return None
    form = shape.kinds[kind]
    whole = Table(
        keys={"kind": Text(words=kinds), **form.keys},
        required=form.required,
        any_of=form.any_of,
        not_both=form.not_both,
        needs=form.needs,
    )
    return _entry(node, whole, path, faults)
