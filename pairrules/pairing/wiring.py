"""Which parts sit on which nets: the board's pads indexed once, both ways, and what each part is by its designator."""

from __future__ import annotations

import re
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from pairrules.board.board import Board
from pairrules.board.columns import Bools, Ints
from pairrules.pairing.natural_order import natural_key
from pairrules.pairing.net_roles import is_supply_name

_LETTERS = re.compile(r"([A-Za-z]+)[0-9]")

_SERIES = frozenset(
    {
        "C",
        "R",
        "L",
        "FB",
        "F",
        "FL",
        "LB",
        "LF",
        "BD",
        "FER",
        "CM",
        "CMC",
        "CH",
        "EMI",
        "JP",
        "SJ",
        "RN",
        "RA",
        "RP",
        "CA",
        "LN",
    }
)
"""Designators of parts that can stand in series. Source: IEEE 315 for C, R, L, F, FL (from memory)."""

_CONNECTORS = frozenset({"J", "P", "X", "CN", "CON", "CONN", "XS", "XP", "SK", "PL", "JK", "HDR"})

_PROTECTORS = frozenset({"D", "TVS", "ESD", "Z", "ZD", "RV", "VR", "VD", "GDT", "MOV"})

_CROWDED = 16


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Wiring:
    """Pads by net and by part.

    Parameters
    ----------
    pad_net: column of `Board.pads`.
    by_net, by_part: pad rows sorted by net and by part. net_from, part_from: where each net's, part's rows begin there.
    parts, nets: parts on each net, in natural order of their designators; nets of each part, ascending.
    stations: those of the parts on each net that can be an end by themselves.
    pins: how many different pins each part has (pads of one pin on several layers count once).
    letters: each part's designator without its number, in capitals. order: each part's place in natural order.
    used: whether each net has any copper or pad. poured: whether it has an area.
    supplies: whether its kind or name is a supply's or a ground's.
    """

    pad_net: Ints
    by_net: Ints
    net_from: Ints
    by_part: Ints
    part_from: Ints
    parts: tuple[tuple[int, ...], ...]
    nets: tuple[tuple[int, ...], ...]
    stations: tuple[tuple[int, ...], ...]
    pins: Ints
    letters: tuple[str, ...]
    order: Ints
    used: Bools
    poured: Bools
    supplies: Bools

    def pads_on(self, net: int) -> Ints:
        """Rows of the pads on a net."""
        return self.by_net[self.net_from[net] : self.net_from[net + 1]]

    def pads_of(self, part: int) -> Ints:
        """Rows of the pads of a part."""
        return self.by_part[self.part_from[part] : self.part_from[part + 1]]

    def pads_at(self, part: int, net: int) -> tuple[int, ...]:
        """Rows of a part's pads on a net."""
        rows = self.pads_of(part)
        return tuple(int(row) for row in rows[self.pad_net[rows] == net])

    def parts_on(self, net: int) -> tuple[int, ...]:
        """Parts with a pad on a net, in natural order of their designators."""
        return self.parts[net]

    def nets_of(self, part: int) -> tuple[int, ...]:
        """Nets a part has a pad on, sorted; pads without a net are left out."""
        return self.nets[part]

    def far_net(self, part: int, net: int) -> int:
        """The net at the other pin of a two-pin part; −1 where there is none."""
        if self.pins[part] != 2:
            return -1
        others = [other for other in self.nets[part] if other != net]
        return others[0] if len(others) == 1 else -1

    def is_passive(self, part: int) -> bool:
        """Whether the designator is that of a part that can stand in series."""
        return self.letters[part] in _SERIES

    def is_connector(self, part: int) -> bool:
        """Whether the designator is a connector's."""
        return self.letters[part] in _CONNECTORS

    def is_protector(self, part: int) -> bool:
        """Whether the designator is that of a diode or other protection."""
        return self.letters[part] in _PROTECTORS

    def is_active(self, part: int) -> bool:
        """Whether another signal is behind the part: three pins or more, and no passive, protection or connector."""
        return bool(self.pins[part] >= 3) and self.letters[part] not in _SERIES | _CONNECTORS | _PROTECTORS

    def is_station(self, part: int) -> bool:
        """Whether the part can be the end of a link by itself: a connector, or a part that is active."""
        return _is_station(self.letters[part], int(self.pins[part]))

    def stations_on(self, net: int) -> tuple[int, ...]:
        """The stations of a net, in natural order."""
        return self.stations[net]

    def is_crowded(self, net: int) -> bool:
        """Whether so many parts are on the net that it is taken for a supply rather than a leg."""
        return len(self.parts[net]) > _CROWDED


def wiring_of(board: Board) -> Wiring:
    """The wiring of a board; takes one sort of the pads each way."""
    pads, nets, parts = board.pads, len(board.nets), len(board.parts)
    by_net, by_part = np.argsort(pads.net, kind="stable"), np.argsort(pads.part, kind="stable")
    natural = np.array(sorted(range(parts), key=lambda part: natural_key(board.parts[part].ref)), dtype=np.int64)
    order = np.empty(parts, dtype=np.int64)
    order[natural] = np.arange(parts)
    both = (pads.net >= 0) & (pads.part >= 0)
    net, part = pads.net[both], pads.part[both]
    used = np.zeros(nets, dtype=np.bool_)
    poured = np.zeros(nets, dtype=np.bool_)
    poured[[area.net for area in board.areas if area.net >= 0]] = True
    for column in (pads.net, board.tracks.net, board.vias.net):
        used[column[column >= 0]] = True
    pins = _pins(board)
    letters = tuple(_letters(part.ref) for part in board.parts)
    station = [_is_station(*one) for one in zip(letters, pins.tolist(), strict=True)]
    on_net = _grouped(net, order[part], nets, natural)
    supplies = [
        kind in {"ground", "power"} or is_supply_name(name)
        for kind, name in zip(board.net_kinds, board.nets, strict=True)
    ]
    return Wiring(
        pad_net=pads.net,
        by_net=by_net,
        net_from=np.searchsorted(pads.net[by_net], np.arange(nets + 1)),
        by_part=by_part,
        part_from=np.searchsorted(pads.part[by_part], np.arange(parts + 1)),
        parts=on_net,
        stations=tuple(tuple(one for one in on if station[one]) for on in on_net),
        nets=_grouped(part, net, parts, np.arange(nets)),
        pins=pins,
        letters=letters,
        order=order,
        used=used | poured,
        poured=poured,
        supplies=np.array(supplies, dtype=np.bool_),
    )


def _is_station(letters: str, pins: int) -> bool:
    if letters in _CONNECTORS:
        return pins >= 2
    return pins >= 3 and letters not in _SERIES and letters not in _PROTECTORS


def _grouped(group: Ints, member: Ints, groups: int, means: Ints) -> tuple[tuple[int, ...], ...]:
    """The members of each group, each once and ascending, as what they mean."""
    pairs = np.unique(np.column_stack([group, member]), axis=0)
    bounds = np.searchsorted(pairs[:, 0], np.arange(groups + 1)).tolist()
    members = means[pairs[:, 1]].tolist()
    return tuple(tuple(members[start:end]) for start, end in pairwise(bounds))


def _pins(board: Board) -> Ints:
    """Different pins of each part; a pin without a name is told from others by its place."""
    pads = board.pads
    seen: dict[object, int] = {}
    codes = [
        seen.setdefault(pin or (round(x, 6), round(y, 6)), len(seen))
        for pin, (x, y) in zip(pads.pin, pads.at.tolist(), strict=True)
    ]
    keys = np.unique(np.column_stack([pads.part, np.array(codes, dtype=np.int64)]), axis=0)[:, 0]
    return np.bincount(keys[keys >= 0], minlength=len(board.parts))


def _letters(ref: str) -> str:
    """`C` of `C12`, of `A1_C12` and of `C12_1`: the last piece that says what the part is, sheets aside."""
    pieces = [found[1].upper() for found in map(_LETTERS.match, re.split(r"[_\-./:]", ref)) if found]
    known = [piece for piece in pieces if piece in _SERIES | _CONNECTORS | _PROTECTORS]
    return known[-1] if known else pieces[-1] if pieces else ref.upper()
