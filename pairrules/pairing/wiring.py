"""Which parts sit on which nets: the board's pads indexed once, both ways, and what each part is by its designator."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from pairrules.board.board import Board
from pairrules.board.columns import Bools, Ints
from pairrules.pairing.natural_order import natural_key

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


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Wiring:
    """Pads by net and by part.

    Parameters
    ----------
    nets, parts: how many there are of each. pad_net, pad_part: columns of `Board.pads`.
    by_net, by_part: pad rows sorted by net and by part. net_from, part_from: where each net's, part's rows begin there.
    pins: how many different pins each part has (pads of one pin on several layers count once).
    letters: each part's designator without its number, in capitals. order: each part's place in natural order.
    used: whether each net has any copper or pad. poured: whether it has an area.
    """

    pad_net: Ints
    pad_part: Ints
    by_net: Ints
    net_from: Ints
    by_part: Ints
    part_from: Ints
    pins: Ints
    letters: tuple[str, ...]
    order: Ints
    used: Bools
    poured: Bools

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
        parts = np.unique(self.pad_part[self.pads_on(net)])
        parts = parts[parts >= 0]
        return tuple(int(part) for part in parts[np.argsort(self.order[parts])])

    def nets_of(self, part: int) -> tuple[int, ...]:
        """Nets a part has a pad on, sorted; pads without a net are left out."""
        nets = np.unique(self.pad_net[self.pads_of(part)])
        return tuple(int(net) for net in nets if net >= 0)

    def far_net(self, part: int, net: int) -> int:
        """The net at the other pin of a two-pin part; −1 where there is none."""
        others = [other for other in self.nets_of(part) if other != net]
        return others[0] if self.pins[part] == 2 and len(others) == 1 else -1

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
        return bool(self.pins[part] >= 3) and not (
            self.is_passive(part) or self.is_connector(part) or self.is_protector(part)
        )

    def is_station(self, part: int) -> bool:
        """Whether the part can be the end of a link by itself: a connector, or a part that is active."""
        return self.is_active(part) or (self.is_connector(part) and bool(self.pins[part] >= 2))

    def stations_on(self, net: int) -> tuple[int, ...]:
        """The stations of a net, in natural order."""
        return tuple(part for part in self.parts_on(net) if self.is_station(part))


def wiring_of(board: Board) -> Wiring:
    """The wiring of a board; takes one sort of the pads each way."""
    pads, nets, parts = board.pads, len(board.nets), len(board.parts)
    by_net, by_part = np.argsort(pads.net, kind="stable"), np.argsort(pads.part, kind="stable")
    order = np.empty(parts, dtype=np.int64)
    order[sorted(range(parts), key=lambda part: natural_key(board.parts[part].ref))] = np.arange(parts)
    used = np.zeros(nets, dtype=np.bool_)
    poured = np.zeros(nets, dtype=np.bool_)
    poured[[area.net for area in board.areas if area.net >= 0]] = True
    for column in (pads.net, board.tracks.net, board.vias.net):
        used[column[column >= 0]] = True
    return Wiring(
        pad_net=pads.net,
        pad_part=pads.part,
        by_net=by_net,
        net_from=np.searchsorted(pads.net[by_net], np.arange(nets + 1)),
        by_part=by_part,
        part_from=np.searchsorted(pads.part[by_part], np.arange(parts + 1)),
        pins=_pins(board),
        letters=tuple(_letters(part.ref) for part in board.parts),
        order=order,
        used=used | poured,
        poured=poured,
    )


def _pins(board: Board) -> Ints:
    """Different pins of each part; a pin without a name is told from others by its place."""
    pads = board.pads
    if len(pads) == 0:
        return np.zeros(len(board.parts), dtype=np.int64)
    names = [f"={pin}" if pin else f"@{x:.6f},{y:.6f}" for pin, (x, y) in zip(pads.pin, pads.at.tolist(), strict=True)]
    codes = np.unique(np.array(names), return_inverse=True)[1].reshape(-1)
    keys = np.unique(np.column_stack([pads.part, codes]), axis=0)[:, 0]
    return np.bincount(keys[keys >= 0], minlength=len(board.parts))


def _letters(ref: str) -> str:
    """`C` of `C12`, of `A1_C12` and of `C12_1`: the last piece that says what the part is, sheets aside."""
    pieces = [found[1].upper() for found in map(_LETTERS.match, re.split(r"[_\-./:]", ref)) if found]
    known = [piece for piece in pieces if piece in _SERIES | _CONNECTORS | _PROTECTORS]
    return known[-1] if known else pieces[-1] if pieces else ref.upper()
