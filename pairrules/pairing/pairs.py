"""Nets to pairs: what the settings list, else what the file declares, else what names say and parts bear out."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace

from pairrules.board.board import Board, DeclaredPair
from pairrules.pairing.listed_pairs import PairRequest, asked_pairs
from pairrules.pairing.natural_order import natural_key
from pairrules.pairing.net_names import Reading, common_reading, readings, shared_name
from pairrules.pairing.net_patterns import matches
from pairrules.pairing.net_roles import is_control_word, is_high_low_word, is_lamp_word, is_rail_word, is_supply_name
from pairrules.pairing.wiring import Wiring

_VOLTAGE = re.compile(r"V(?:IN|OUT)[0-9]*")

LISTED, DECLARED, BY_NAME = "listed in the settings", "declared in the file", "net name"


@dataclass(frozen=True, slots=True, kw_only=True)
class NetPair:
    """Two nets that are the legs of a pair.

    Parameters
    ----------
    plus, minus: indices into `Board.nets`. name: as declared or listed, else "". shared: what the names share.
    klass, source, load: as declared in the file, "" where not. found_by: in words.
    """

    plus: int
    minus: int
    name: str
    shared: str
    found_by: str
    klass: str = ""
    source: str = ""
    load: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class NetPairs:
    """The pairs, sorted by name; the nets that look like half of one (indices); what was asked for and not found."""

    pairs: tuple[NetPair, ...]
    halves: tuple[int, ...]
    missing: tuple[str, ...]


def net_pairs(
    board: Board,
    wiring: Wiring,
    *,
    listed: tuple[PairRequest, ...],
    ignore: tuple[str, ...],
    reference: tuple[int, ...],
) -> NetPairs:
    """Every pair of nets; a net is in one at most, and settings go before the file, the file before names."""
    pairs, missing, taken = _given(board, wiring, listed)
    barred = frozenset(reference) | {net for net, kind in enumerate(board.net_kinds) if kind in {"ground", "power"}}
    free = [
        net
        for net in sorted(range(len(board.nets)), key=lambda net: natural_key(board.nets[net]))
        if wiring.used[net]
        and net not in taken
        and net not in barred
        and not any(matches(board.nets[net], pattern) for pattern in ignore)
    ]
    said = {net: readings(board.nets[net]) for net in free}
    for reading, plus, minus in _by_name(free, said):
        if plus not in taken and minus not in taken and _borne_out(wiring, barred, reading, plus, minus):
            taken.update((plus, minus))
            names = board.nets[plus], board.nets[minus]
            pairs.append(NetPair(plus=plus, minus=minus, name="", shared=shared_name(*names), found_by=BY_NAME))
    known = (common_reading(board.nets[pair.plus], board.nets[pair.minus]) for pair in pairs)
    kin = {reading.kin for reading in known if reading is not None}
    there: set[tuple[object, ...]] = {
        (*reading.key, reading.sign) for net in free if net not in taken for reading in said[net]
    }
    halves = tuple(net for net in free if net not in taken and _is_half(said[net], kin, there))
    pairs.sort(key=lambda pair: (natural_key(pair.name or pair.shared), pair.plus))
    return NetPairs(pairs=tuple(pairs), halves=halves, missing=tuple(missing))


def _given(board: Board, wiring: Wiring, listed: tuple[PairRequest, ...]) -> tuple[list[NetPair], list[str], set[int]]:
    """Pairs that the settings list and the file declares, what was not found of them, and their nets."""
    asked, sentences = asked_pairs(board.nets, listed)
    pairs: list[NetPair] = []
    missing = list(sentences)
    taken: set[int] = set()
    for one in asked:
        plus, minus = board.nets[one.plus], board.nets[one.minus]
        same = any({pair.plus, pair.minus} == {one.plus, one.minus} for pair in pairs)
        if same or (not one.exact and not (wiring.used[one.plus] and wiring.used[one.minus])):
            continue
        if one.plus in taken or one.minus in taken:
            if one.exact:
                missing.append(
                    f"the pair {plus} / {minus} is listed, but one of its nets is in a pair listed before it"
                )
            continue
        taken.update((one.plus, one.minus))
        pairs.append(
            NetPair(plus=one.plus, minus=one.minus, name=one.name, shared=shared_name(plus, minus), found_by=LISTED)
        )
    index = {name: net for net, name in enumerate(board.nets)}
    for declared in sorted(board.pairs, key=lambda pair: (natural_key(pair.name), natural_key(pair.plus), pair.minus)):
        label = declared.name or f"{declared.plus} / {declared.minus}"
        ends = index.get(declared.plus), index.get(declared.minus)
        if ends[0] is None or ends[1] is None or ends[0] == ends[1]:
            absent = [name for name, net in zip((declared.plus, declared.minus), ends, strict=True) if net is None]
            missing.append(
                f"the file declares the pair {label}, but "
                + (f"has no net {absent[0]}" if absent else "with one net only")
            )
        elif ends[0] in taken or ends[1] in taken:
            if not any({pair.plus, pair.minus} == set(ends) for pair in pairs):
                missing.append(f"the file declares the pair {label}, but one of its nets is in another pair")
            else:
                pairs[:] = [_with_declared(pair, declared) for pair in pairs]
        else:
            taken.update((ends[0], ends[1]))
            pairs.append(
                NetPair(
                    plus=ends[0],
                    minus=ends[1],
                    name=declared.name,
                    shared=shared_name(declared.plus, declared.minus),
                    found_by=DECLARED,
                    klass=declared.klass,
                    source=declared.source,
                    load=declared.load,
                )
            )
    return pairs, missing, taken


def _with_declared(pair: NetPair, declared: DeclaredPair) -> NetPair:
    """The listed pair with what the file says of it where the settings, which go first, say nothing."""
    return replace(
        pair,
        name=pair.name or declared.name,
        klass=pair.klass or declared.klass,
        source=pair.source or declared.source,
        load=pair.load or declared.load,
    )


def _by_name(free: list[int], said: dict[int, tuple[Reading, ...]]) -> list[tuple[Reading, int, int]]:
    """Every two nets whose names are two halves, the surest reading first, otherwise in the order of the nets."""
    halves: dict[tuple[object, ...], dict[int, int]] = {}
    for net in free:
        for reading in said[net]:
            halves.setdefault(reading.key, {}).setdefault(reading.sign, net)
    found: list[tuple[tuple[bool, int, int, int], Reading, int, int]] = []
    for place, net in enumerate(free):
        for reading in said[net]:
            minus = halves[reading.key].get(-1)
            if reading.sign > 0 and halves[reading.key][1] == net and minus is not None and minus != net:
                found.append(((not reading.sure, len(reading.tail), reading.rank, place), reading, net, minus))
    found.sort(key=lambda one: one[0])
    return [(reading, plus, minus) for _, reading, plus, minus in found]


def _borne_out(wiring: Wiring, barred: frozenset[int], reading: Reading, plus: int, minus: int) -> bool:
    """Whether two nets that are halves by name may be a pair.

    Supply rails and lamps never are, nor a voltage in or out that is poured as an area; a control line in both
    polarities only where both run between the same two parts; `_H`/`_L` not where the word means high and low; a
    reading that is not sure only where a part has both.
    """
    word = reading.stem_word
    if _is_none(reading) or (_VOLTAGE.fullmatch(word) and (wiring.poured[plus] or wiring.poured[minus])):
        return False
    if reading.pattern.startswith("H/L") and not reading.sure and is_high_low_word(word):
        return False
    needed = 2 if is_control_word(word) else 0 if reading.sure else 1
    if not needed:
        return True
    common = _reached(wiring, barred | {minus}, plus) & _reached(wiring, barred | {plus}, minus)
    return len(common) >= needed


def _reached(wiring: Wiring, barred: frozenset[int], net: int) -> set[int]:
    """Stations on the net, and on the nets one part in series away that are no supplies."""
    reached = set(wiring.stations_on(net))
    for part in wiring.parts_on(net):
        far = wiring.far_net(part, net)
        if far < 0 or far in barred or wiring.supplies[far] or wiring.is_crowded(far):
            continue
        if wiring.is_passive(part):
            reached.update(wiring.stations_on(far))
    return reached


def _is_none(reading: Reading) -> bool:
    """Whether the name is that of a supply rail or a lamp's end."""
    return (
        is_rail_word(reading.stem_word)
        or is_lamp_word(reading.stem_word)
        or is_supply_name(reading.head or reading.tail)
    )


def _is_half(said: tuple[Reading, ...], kin: set[tuple[str, str, str]], there: set[tuple[object, ...]]) -> bool:
    """Whether a net without a partner looks like half of a pair: by its own name, or because its kin are pairs."""
    for reading in said:
        if _is_none(reading) or is_control_word(reading.stem_word) or (*reading.key, -reading.sign) in there:
            continue
        if reading.lone or reading.kin in kin:
            return True
    return False
