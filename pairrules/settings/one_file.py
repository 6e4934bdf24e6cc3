"""What one settings file says, before it is merged with what it builds on."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from pairrules.board.stackup import Layer
from pairrules.settings.faults import Faults
from pairrules.settings.limit import Limit, Timed
from pairrules.settings.network_models import cable_spec, curve, load_spec, pickup_spec, source_spec
from pairrules.settings.nodes import Node, Sequence
from pairrules.settings.pair_class import LimitsAndOff, PairClass, PinLengths, unreachable
from pairrules.settings.read_shape import Entry
from pairrules.settings.settings import ListedPair

OWN_SOURCE = "set by the project"
"""The source of a limit whose file names none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class OneFile:
    """The content of one file; `extends` and `class_nodes` keep the places for faults that only the chain shows."""

    extends: tuple[tuple[str, Node], ...] | None = None
    stackup: tuple[Layer, ...] | None = None
    reference_nets: tuple[str, ...] | None = None
    pairs: tuple[ListedPair, ...] = ()
    ignore: tuple[str, ...] = ()
    classes: tuple[PairClass, ...] = ()
    limits: LimitsAndOff = field(default_factory=lambda: ({}, ()))
    part_values: Mapping[str, str] = field(default_factory=dict)
    pin_lengths: PinLengths = field(default_factory=dict)
    waivers: Path | None = None
    like_nodes: tuple[tuple[str, Node], ...] = ()


def one_file(entry: Entry, faults: Faults, *, folder: Path, shipped: bool) -> OneFile:
    """The content of a read `settings_form`.

    Parameters
    ----------
    folder: what paths in the file are relative to. shipped: a limit without a source gets none, instead of the
        project's.
    """
    build = _Build(faults, "" if shipped else OWN_SOURCE)
    pairs, ignore = build.pairs(entry.get("pairs") or ())
    classes, like_nodes = build.classes(entry.get("classes"))
    extends = entry.get("extends")
    node = entry.nodes.get("extends")
    waivers = entry.get("waivers")
    return OneFile(
        extends=None if extends is None or not isinstance(node, Sequence) else tuple(zip(extends, node.items)),  # noqa: B905  faulty entries are left out
        stackup=build.stackup(entry),
        reference_nets=entry.get("reference_nets"),
        pairs=pairs,
        ignore=ignore,
        classes=classes,
        limits=build.limits(entry.get("limits")),
        part_values=_part_values(entry.get("part_values")),
        pin_lengths=_pin_lengths(entry.get("pin_lengths")),
        waivers=None if waivers is None else folder / waivers,
        like_nodes=like_nodes,
    )


class _Build:
    def __init__(self, faults: Faults, default_source: str) -> None:
        self._faults = faults
        self._default_source = default_source

    def _place(self, node: Node) -> str:
        return f"{self._faults.file} line {node.line}"

    def stackup(self, entry: Entry) -> tuple[Layer, ...] | None:
        listed: tuple[Entry, ...] | None = entry.get("stackup")
        if listed is None:
            return None
        layers: list[Layer] = []
        for one in listed:
            name, kind = one.get("name"), one.get("kind")
            if name is None or kind is None:
                continue
            if name in {layer.name for layer in layers}:
                self._faults.add(
                    f"{one.path}.name is {name!r} a second time", "name each layer once", one.nodes["name"]
                )
            layers.append(
                Layer(
                    name=name,
                    kind=kind,
                    thickness_mm=one.get("thickness"),
                    permittivity=one.get("permittivity"),
                    loss_tangent=one.get("loss_tangent"),
                )
            )
        if layers and not any(layer.kind == "copper" for layer in layers):
            self._faults.add("stackup has no copper layer", "list the copper layers too", entry.nodes["stackup"])
        return tuple(layers)

    def pairs(self, entries: tuple[Entry, ...]) -> tuple[tuple[ListedPair, ...], tuple[str, ...]]:
        pairs: list[ListedPair] = []
        ignore: list[str] = []
        for one in entries:
            ignore += one.get("ignore") or ()
            plus, minus, name = one.get("plus"), one.get("minus"), one.get("name") or ""
            if plus is None or minus is None:
                continue
            if plus == minus:
                self._faults.add(f"{one.path} has {plus!r} as plus and as minus", "name two nets", one.node)
            if plus.count("*") != minus.count("*"):
                self._faults.add(
                    f"{one.path} has {plus.count('*')} stars in plus and {minus.count('*')} in minus",
                    "write as many in both, they stand for the same text",
                    one.node,
                )
            if name and "*" in plus:
                self._faults.add(
                    f"{one.path} gives one name to all pairs of a pattern", "leave the name out", one.nodes["name"]
                )
            pairs.append(ListedPair(plus=plus, minus=minus, name=name, place=self._place(one.node)))
        return tuple(pairs), tuple(ignore)

    def limits(self, entry: Entry | None) -> LimitsAndOff:
        if entry is None:
            return {}, ()
        limits = {r: self._limit(r, v) for r, v in sorted(entry.values.items()) if isinstance(v, Entry)}
        return limits, tuple(rule for rule, value in sorted(entry.values.items()) if value == "off")

    def _limit(self, rule: str, entry: Entry) -> Limit:
        quantities = {key: value for key, value in sorted(entry.values.items()) if isinstance(value, float)}
        timed = {key: value for key, value in sorted(entry.values.items()) if isinstance(value, Timed)}
        if quantities.get("least", 0.0) > quantities.get("most", float("inf")):
            self._faults.add(f"{entry.path}: least is greater than most", "exchange or mend them", entry.node)
        source = entry.get("source") or self._default_source
        return Limit(
            rule=rule,
            severity=entry.get("severity") or "",
            quantities=quantities,
            source=re.sub(r"\s+", " ", source),
            place=self._place(entry.node),
            timed=timed,
        )

    def classes(self, entry: Entry | None) -> tuple[tuple[PairClass, ...], tuple[tuple[str, Node], ...]]:
        if entry is None:
            return (), ()
        read: dict[str, Entry] = dict(entry.values)
        built = tuple(self._class(name, one) for name, one in read.items())
        for one, taker in unreachable(built):
            self._faults.add(
                f"classes.{one.name} is never reached, class {taker!r} above it matches all that it would",
                "move it up or narrow the other's patterns",
                read[one.name].nodes["match"],
            )
        return built, tuple((name, one.nodes["like"]) for name, one in read.items() if "like" in one.values)

    def _class(self, name: str, entry: Entry) -> PairClass:
        limits, off = self.limits(entry.get("limits"))
        parts: dict[str, Any] = {key: entry.get(key) for key in ("source", "cable", "load", "pickup")}
        return PairClass(
            name=name,
            place=self._place(entry.node),
            like=entry.get("like") or "",
            match=entry.get("match") or (),
            source=parts["source"] and source_spec(parts["source"]),
            cable=parts["cable"] and cable_spec(parts["cable"], self._faults),
            load=parts["load"] and load_spec(parts["load"], self._faults),
            frequencies=tuple(sorted(set(entry.get("frequencies") or ()))),
            limits=limits,
            off=off,
            reach_mm=entry.get("reach"),
            breakout_mm=entry.get("breakout"),
            rise_time_ps=entry.get("rise_time"),
            unit_interval_ps=entry.get("unit_interval"),
            pickup=parts["pickup"] and pickup_spec(parts["pickup"], self._faults),
            mask=curve(entry.get("mask") or (), self._faults),
            pin_lengths=_pin_lengths(entry.get("pin_lengths")),
            expects_pin_lengths=entry.get("expects_pin_lengths") or (),
            places=self._places(entry),
        )

    def _places(self, entry: Entry) -> dict[str, str]:
        """Where each key of a class stands, and each limit in it."""
        found = {key: self._place(entry.nodes[key]) for key in entry.values if key != "limits"}
        limits = entry.get("limits")
        if limits is not None:
            found |= {f"limits.{rule}": self._place(limits.nodes[rule]) for rule in limits.values}
        return found


def _part_values(entry: Entry | None) -> dict[str, str]:
    return {} if entry is None else dict(sorted(entry.values.items()))


def _pin_lengths(entry: Entry | None) -> PinLengths:
    return {} if entry is None else {part: dict(pins.values) for part, pins in sorted(entry.values.items())}
