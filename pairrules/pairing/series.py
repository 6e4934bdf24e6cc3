"""Where a pair goes on: the parts in series with both legs, or with one, and the two nets behind them."""

from __future__ import annotations

from collections.abc import Container, Mapping
from dataclasses import dataclass
from itertools import product

import numpy as np

from pairrules.board.board import Board
from pairrules.board.columns import Bools
from pairrules.pairing.natural_order import natural_key
from pairrules.pairing.pairs import NetPair
from pairrules.pairing.wiring import Wiring


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Site:
    """What following a pair needs to know of the board.

    Parameters
    ----------
    carries: whether each net can be a leg: no reference, no supply.
    partner: the other leg of each net that is in a pair. sign: +1 or −1 for each of them.
    """

    board: Board
    wiring: Wiring
    carries: Bools
    partner: Mapping[int, int]
    sign: Mapping[int, int]


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """Parts in series and the nets behind them: `plus` and `minus` are parts, −1 where that leg has none."""

    plus: int
    minus: int
    to: tuple[int, int]


def site_of(board: Board, wiring: Wiring, pairs: tuple[NetPair, ...], reference: tuple[int, ...]) -> Site:
    """The site of a board whose pairs of nets are known."""
    partner, sign = {}, {}
    for pair in pairs:
        partner[pair.plus], partner[pair.minus] = pair.minus, pair.plus
        sign[pair.plus], sign[pair.minus] = 1, -1
    carries = ~wiring.supplies
    carries[list(partner)] = True
    carries[list(reference)] = False
    return Site(board=board, wiring=wiring, carries=carries, partner=partner, sign=sign)


def ends_on(site: Site, node: tuple[int, int]) -> tuple[int, ...]:
    """Stations with pins on both legs, in natural order."""
    other = set(site.wiring.stations_on(node[1]))
    return tuple(part for part in site.wiring.stations_on(node[0]) if part in other)


def named_steps(site: Site, node: tuple[int, int], barred: Container[int]) -> tuple[Step, ...]:
    """Steps to nets that are a pair by themselves: the same kind of part in both legs first."""
    plus, minus = node
    alike: list[Step] = []
    unlike: list[Step] = []
    for (first, x), (second, y) in product(_series(site, plus, barred), _series(site, minus, barred)):
        if site.partner.get(x) == y and first != second and not _fed_back(site, node, (x, y)):
            same = site.wiring.letters[first] == site.wiring.letters[second]
            (alike if same else unlike).append(Step(plus=first, minus=second, to=(x, y)))
    wound = [step for step in _wound(site, node, barred) if site.partner.get(step.to[0]) == step.to[1]]
    return _one_each((*alike, *wound, *unlike))


def plain_steps(site: Site, node: tuple[int, int], barred: Container[int]) -> tuple[Step, ...]:
    """Steps to two nets that no name pairs, through alike parts: each the only one, or both leading to one part."""
    wiring = site.wiring
    onward = [
        [(part, far) for part, far in _series(site, net, barred) if far not in site.partner and _goes_on(site, far)]
        for net in node
    ]
    found: list[Step] = []
    lone: list[Step] = []
    for letters in sorted({wiring.letters[part] for part, _ in onward[0]}):
        plus, minus = ([(part, far) for part, far in leg if wiring.letters[part] == letters] for leg in onward)
        steps = [
            Step(plus=a, minus=b, to=(x, y))
            for (a, x), (b, y) in product(plus, minus)
            if x != y and a != b and not _fed_back(site, node, (x, y))
        ]
        meeting = [step for step in steps if ends_on(site, step.to)]
        found.extend(meeting)
        if not meeting:
            lone.extend(_only(site, steps))
    wound = [step for step in _wound(site, node, barred) if not {*step.to} & site.partner.keys()]
    return _one_each((*wound, *found, *lone))


def _only(site: Site, steps: list[Step]) -> list[Step]:
    """The steps where there are no two ways: none but one on each leg, or none but one on each leg to any station."""
    for some in (steps, [step for step in steps if all(site.wiring.stations_on(net) for net in step.to)]):
        if all(len({step.to[leg] for step in some}) == 1 for leg in (0, 1)):
            return some
    return []


def single_steps(site: Site, node: tuple[int, int], barred: Container[int]) -> tuple[Step, ...]:
    """Steps of one leg alone, to a part that the other leg reaches without one."""
    wiring, found = site.wiring, []
    for leg in (0, 1):
        here, other = node[leg], node[1 - leg]
        met = set(wiring.stations_on(other)) - set(wiring.stations_on(here))
        for part, far in _series(site, here, barred):
            if far not in site.partner and met & set(wiring.stations_on(far)):
                to = (far, other) if leg == 0 else (other, far)
                found.append(Step(plus=part if leg == 0 else -1, minus=-1 if leg == 0 else part, to=to))
    return tuple(found)


def _series(site: Site, net: int, barred: Container[int]) -> tuple[tuple[int, int], ...]:
    """Two-pin parts in series on a net and the net behind each, in natural order of the parts."""
    wiring, found = site.wiring, []
    for part in wiring.parts_on(net):
        far = wiring.far_net(part, net) if wiring.is_passive(part) else -1
        if far >= 0 and site.carries[far] and far not in barred:
            found.append((part, far))
    return tuple(found)


def _goes_on(site: Site, net: int) -> bool:
    return len(site.wiring.parts_on(net)) >= 2 and not site.wiring.is_crowded(net)


def _fed_back(site: Site, node: tuple[int, int], to: tuple[int, int]) -> bool:
    """Whether the parts lead from an active part back to itself, as the feedback of an amplifier does.

    Capacitors that lead from a part back to it, with nothing else on the nets, are a loop for trial and are followed.
    """
    wiring = site.wiring
    for here, there in zip(node, to, strict=True):
        before, after = wiring.stations_on(here), wiring.stations_on(there)
        if any(wiring.is_active(part) for part in set(before) & set(after)):
            between = [part for part in wiring.parts_on(here) if wiring.far_net(part, here) == there]
            loop = before == after and len(before) == 1 and all(wiring.letters[part] == "C" for part in between)
            if not (loop and between):
                return True
    return False


def _wound(site: Site, node: tuple[int, int], barred: Container[int]) -> tuple[Step, ...]:
    """Steps through one part that both legs pass: a choke of four pins, or two elements of an array."""
    wiring, found = site.wiring, []
    other = set(wiring.parts_on(node[1]))
    for part in wiring.parts_on(node[0]):
        if part not in other or not wiring.is_passive(part) or wiring.pins[part] < 4 or wiring.pins[part] % 2:
            continue
        to = _choke(site, part, node) if wiring.pins[part] == 4 else _array(site, part, node)
        if to is not None and all(site.carries[net] and net not in barred for net in to):
            found.append(Step(plus=part, minus=part, to=to))
    return tuple(found)


def _choke(site: Site, part: int, node: tuple[int, int]) -> tuple[int, int] | None:
    """The nets behind a part of four pins on four nets.

    Which winding is whose: by polarity where the nets have one, else by what the names share, else by the nearer pad,
    else by the order of the pins.
    """
    rest = [net for net in site.wiring.nets_of(part) if net not in node]
    if len(rest) != 2:
        return None
    x, y = rest
    sign = site.sign.get(node[0], 0)
    if sign and site.partner.get(x) == y:
        return (x, y) if site.sign[x] == sign else (y, x)
    likeness = _likeness(site, node, (x, y)) - _likeness(site, node, (y, x))
    if likeness:
        return (x, y) if likeness > 0 else (y, x)
    straight, crossed = (_apart(site, part, node, to) for to in ((x, y), (y, x)))
    if straight == crossed:
        # Decided by the pins, not the nets' order, so that legs called the other way round run the same way.
        rows = [[site.wiring.pads_at(part, net)[0] for net in nets] for nets in (node, (x, y))]
        first, second = ([natural_key(site.board.pads.pin[row]) for row in leg] for leg in rows)
        return (x, y) if (first[0] <= first[1]) == (second[0] <= second[1]) else (y, x)
    return (x, y) if straight < crossed else (y, x)


def _array(site: Site, part: int, node: tuple[int, int]) -> tuple[int, int] | None:
    """The nets behind two elements of an array: pins are numbered around it, so that i and n + 1 − i face each other.

    Source: common practice, no source.
    """
    wiring, pads = site.wiring, site.board.pads
    count, to = int(wiring.pins[part]), []
    for net in node:
        pins = {pads.pin[row] for row in wiring.pads_at(part, net)}
        pin = pins.pop() if len(pins) == 1 else ""
        if not (pin.isascii() and pin.isdigit() and len(pin) < 4):
            return None
        facing = str(count + 1 - int(pin))
        far = {int(pads.net[row]) for row in wiring.pads_of(part) if pads.pin[row] == facing}
        if len(far) != 1:
            return None
        to.append(far.pop())
    if min(to) < 0 or len({*to, *node}) != 4:
        return None
    return to[0], to[1]


def _likeness(site: Site, node: tuple[int, int], to: tuple[int, int]) -> int:
    """Letters that the names share at their beginnings, leg by leg."""
    total = 0
    for here, there in zip(node, to, strict=True):
        for a, b in zip(site.board.nets[here], site.board.nets[there], strict=False):
            if a != b:
                break
            total += 1
    return total


def _apart(site: Site, part: int, node: tuple[int, int], to: tuple[int, int]) -> float:
    """Distance [mm] between the pads of each winding, added."""
    at, total = site.board.pads.at, 0.0
    for here, there in zip(node, to, strict=True):
        first, second = site.wiring.pads_at(part, here)[0], site.wiring.pads_at(part, there)[0]
        total += float(np.hypot(*(at[first] - at[second])))
    return round(total, 6)


def _one_each(steps: tuple[Step, ...]) -> tuple[Step, ...]:
    """The first step to each two nets: a part beside it in parallel only hangs there."""
    kept: dict[tuple[int, int], Step] = {}
    for step in steps:
        kept.setdefault(step.to, step)
    return tuple(kept.values())
