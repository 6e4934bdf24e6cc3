"""Nets: names, kinds and declared pairs from `LogicalNet`, names of unnamed copper from `PhyNet`."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from pairrules.board import DeclaredPair
from pairrules.readers.ipc2581.copper import Copper
from pairrules.readers.ipc2581.elements import NO_NET, children, length, word
from pairrules.readers.ipc2581.parts import Parts
from pairrules.readers.ipc2581.places import Places
from pairrules.readers.ipc2581.remarks import Remarks

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.element import Element

_KINDS = {"GROUND": "ground", "POWER": "power", "SIGNAL": "signal"}
_PLUS = re.compile(r"(?:\+|(?:^|[^A-Z])(?:P|POS|PLUS)|(?<=\d)P|D[PH])\d*\Z", re.IGNORECASE)


@dataclass(slots=True)
class Nets:
    """What a step says of its nets beside their copper."""

    kinds: dict[str, str] = field(default_factory=dict)
    names: dict[str, None] = field(default_factory=dict)
    pins: dict[tuple[str, str], str] = field(default_factory=dict)
    polarities: dict[tuple[str, str], str] = field(default_factory=dict)
    partners: dict[str, str] = field(default_factory=dict)
    points: list[tuple[complex, str, str]] = field(default_factory=list)


def read_logical_net(element: Element, nets: Nets) -> None:
    """A `LogicalNet`: its class, its pins, and in revision C its partner."""
    net = word(element, "name")
    if net.casefold() in NO_NET:
        return
    nets.names[net] = None
    nets.kinds[net] = _KINDS.get(word(element, "netClass").upper(), "")
    note_partner(element, net, nets)
    for tag, inner in children(element):
        if tag == "PinRef":
            pin = (word(inner, "componentRef"), word(inner, "pin"))
            nets.pins[pin] = net
            polarity = word(inner, "pinPolarity").upper()
            if polarity:
                nets.polarities[pin] = polarity


def note_partner(element: Element, net: str, nets: Nets) -> None:
    """The `netPair` of a `LogicalNet` or `Set`."""
    partner = word(element, "netPair")
    if not partner:
        return
    if net and partner and partner != net and partner.casefold() not in NO_NET:
        nets.partners.setdefault(net, partner)


def read_phy_net(element: Element, nets: Nets, factor: float) -> None:
    """A `PhyNet`: the places and layers its copper passes."""
    net = word(element, "name")
    if net.casefold() in NO_NET:
        return
    for tag, inner in children(element):
        if tag == "PhyNetPoint":
            at = complex(length(inner, "x", factor), length(inner, "y", factor))
            nets.points.append((at, word(inner, "layerRef"), net))


def name_unnamed(copper: Copper, nets: Nets) -> None:
    """Give copper whose set names no net the net of its pin, or of the physical net point it lies on."""
    for pad in copper.pads:
        if not pad.net:
            pad.net = nets.pins.get((pad.ref, pad.pin), "")
    if not nets.points:
        return
    places: Places[tuple[str, str]] = Places()
    for at, layer, net in nets.points:
        places.put(at, (layer, net))
    for pad in copper.pads:
        if not pad.net:
            pad.net = _found(places, pad.at, pad.layer)
    for hole in copper.holes:
        if not hole.net:
            hole.net = _found(places, hole.at, "")
    by_order: dict[int, str] = {}
    for track in copper.tracks:
        if not track.net and track.order not in by_order:
            net = _found(places, track.start, track.layer) or _found(places, track.end, track.layer)
            if net:
                by_order[track.order] = net  # a line's pieces are one piece of copper
    for track in copper.tracks:
        track.net = track.net or by_order.get(track.order, "")


def _found(places: Places[tuple[str, str]], at: complex, layer: str) -> str:
    return next((net for held, net in places.near(at) if not layer or held == layer), "")


def declared_pairs(nets: Nets, parts: Parts, known: set[str], remarks: Remarks) -> tuple[DeclaredPair, ...]:
    """The pairs the file declares, by name of the plus net.

    Which net is plus is told by the polarity of pins, else by the names' ends, else the first by name is.
    """
    found: dict[frozenset[str], DeclaredPair] = {}
    for net, partner in sorted(nets.partners.items()):
        both = frozenset((net, partner))
        if partner not in known:
            remarks.count(f"net {net} is paired with {partner}, which is not on the board")
        elif both not in found:
            score = _sign(net, nets, parts) - _sign(partner, nets, parts)
            plus, minus = (net, partner) if score > 0 or (score == 0 and net < partner) else (partner, net)
            found[both] = DeclaredPair(plus=plus, minus=minus)
    return tuple(sorted(found.values(), key=lambda pair: (pair.plus, pair.minus)))


def _sign(net: str, nets: Nets, parts: Parts) -> float:
    """Greater than nothing where a net looks like the plus one; what pins say outweighs what names say."""
    score = 1.0 if _PLUS.search(net) else 0.0
    for pin, owner in nets.pins.items():
        if owner == net:
            component = parts.components.get(pin[0])
            package = "" if component is None else component.package
            polarity = nets.polarities.get(pin) or parts.polarities.get((package, pin[1]), "")
            score += {"PLUS": 10.0, "MINUS": -10.0}.get(polarity, 0.0)
    return score
