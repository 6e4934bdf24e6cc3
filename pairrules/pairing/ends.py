"""The ends of a chain: which parts it runs from and to, and which of the two is the source.

Source of the preferences: common practice, no source.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from itertools import product

from pairrules.pairing.chains import Chain
from pairrules.pairing.net_roles import words
from pairrules.pairing.series import Site

_OUTWARD = re.compile(r"TX[A-Z]?|TXD[PN]?|TD[PN]?|DRV|DRIVE|[A-Z]*OUT[PN]?|DO")
_INWARD = re.compile(r"RX[A-Z]?|RXD[PN]?|RD[PN]?|[A-Z]*IN[PN]?|DI")
_NUMBERS = re.compile(r"[0-9]+")


@dataclass(frozen=True, slots=True, kw_only=True)
class End:
    """The part that each leg ends at, usually one and the same; −1 where none is known."""

    plus: int
    minus: int

    @property
    def part(self) -> int:
        """The part both legs end at, −1 where there is none."""
        return self.plus if self.plus == self.minus else -1


@dataclass(frozen=True, slots=True, kw_only=True)
class Ends:
    """Ends at the chain's first and last node. `flip`: whether the source is the last. `missing`: in sentences."""

    first: End
    last: End
    flip: bool
    missing: tuple[str, ...] = ()


def ends_of(site: Site, chain: Chain, *, name: str, source: str, load: str) -> Ends:
    """The ends of a chain.

    Parameters: name: what its nets' names share. source, load: designators that the file declares, else "".
    """
    wiring, missing = site.wiring, list[str]()
    series = {part for step in chain.steps for part in (step.plus, step.minus)}
    first, last = (_options(site, chain.nodes[place], series) for place in (0, -1))
    declared: dict[str, int] = {}
    near = {site.board.parts[end.part].ref: end.part for end in (*first, *last) if end.part >= 0}
    for role, ref in (("source", source), ("load", load)):
        if ref in near:
            declared[role] = near[ref]
        elif ref:
            missing.append(f"the file declares {ref} as {role}, which has no pins at the ends of both legs")
    wanted = set(declared.values())

    def rank(pair: tuple[End, End]) -> tuple[int, ...]:
        plus, minus = ([int(wiring.order[part]) if part >= 0 else -1 for part in (e.plus, e.minus)] for e in pair)
        return (
            -len(wanted & {end.part for end in pair}),
            sum(_cost(site, end) for end in pair),
            int(_outer(site, pair[0]) == _outer(site, pair[1])),
            -sum(int(wiring.pins[end.part]) for end in pair if end.part >= 0),
            *plus,
            *minus,
        )

    both = [
        (one, other)
        for one, other in product(_likely(site, first, wanted), _likely(site, last, wanted))
        if len(chain.nodes) > 1 or not {one.plus, one.minus} & {other.plus, other.minus} - {-1}
    ]
    best = min(both, key=rank)
    return Ends(
        first=best[0], last=best[1], flip=_flip(site, chain, best[0], best[1], name, declared), missing=tuple(missing)
    )


def _options(site: Site, node: tuple[int, int], series: set[int]) -> tuple[End, ...]:
    """Ends that a node offers: parts with pins on both legs, two stations with one leg each (two amplifiers), none."""
    plus, minus = ([part for part in site.wiring.parts_on(net) if part not in series] for net in node)
    both = set(plus) & set(minus)
    found = [End(plus=part, minus=part) for part in plus if part in both]
    own = [[part for part in leg if part not in both and site.wiring.is_station(part)] for leg in (plus, minus)]
    if all(own):
        found.append(End(plus=own[0][0], minus=own[1][0]))
    return (*found, End(plus=-1, minus=-1))


def _likely(site: Site, ends: tuple[End, ...], wanted: set[int]) -> tuple[End, ...]:
    """The ends that can come first: a few of those alike in all but pins and order.

    Thousands would make millions of two. Two ends of one chain share a part at most on each leg, so that a
    fifth of a kind is never asked for.
    """
    wiring, kinds = site.wiring, dict[tuple[bool, int, bool], list[End]]()
    for end in ends:
        kinds.setdefault((end.part in wanted, _cost(site, end), _outer(site, end)), []).append(end)

    def place(end: End) -> tuple[int, int]:
        pins = int(wiring.pins[end.part]) if end.part >= 0 else 0
        return -pins, int(wiring.order[end.plus]) if end.plus >= 0 else -1

    return tuple(end for alike in kinds.values() for end in sorted(alike, key=place)[:4])


def _cost(site: Site, end: End) -> int:
    """How unlikely an end is: connectors and active parts first, a part across the legs last, then none."""
    wiring = site.wiring
    if end.plus < 0:
        return 16
    if end.part < 0:
        return 4
    if wiring.is_station(end.part):
        return 0
    if wiring.is_protector(end.part):
        return 6
    if wiring.is_passive(end.part):
        return 8
    return 2 if wiring.pins[end.part] == 2 else 1


def _outer(site: Site, end: End) -> bool:
    """Whether the end is where the world begins: a connector or a sensor of two pins."""
    wiring = site.wiring
    if end.plus < 0 or wiring.is_passive(end.plus) or wiring.is_protector(end.plus):
        return False
    return wiring.is_connector(end.plus) or bool(wiring.pins[end.plus] == 2)


def _flip(site: Site, chain: Chain, first: End, last: End, name: str, declared: dict[str, int]) -> bool:
    """Whether the source is at the last node.

    As declared; else, with a connector or a sensor at one end only, it is the source unless the names say that the pair
    goes out (TX, OUT, DRV, TD); a part across the legs is a load; with two alike the first in natural order is the
    source; with one known the names decide.
    """
    wiring = site.wiring
    for role, source in (("source", True), ("load", False)):
        part = declared.get(role, -1)
        if part >= 0 and first.part != last.part and part in {first.part, last.part}:
            return (part == first.part) != source
    if first.plus < 0 and last.plus < 0:
        return False
    outward, inward = _way(site, chain, name)
    if first.plus < 0 or last.plus < 0:
        known = first if first.plus >= 0 else last
        is_source = not outward if _outer(site, known) else not inward
        return is_source == (first.plus < 0)
    if _outer(site, first) != _outer(site, last):
        return _outer(site, first) == outward
    idle = [wiring.is_passive(end.plus) or wiring.is_protector(end.plus) for end in (first, last)]
    if idle[0] != idle[1]:
        return idle[0]
    return bool(wiring.order[first.plus] > wiring.order[last.plus])


def _way(site: Site, chain: Chain, name: str) -> tuple[bool, bool]:
    """Whether the pair's name says that it goes out, comes in; else whether its nets' names do, where they agree."""
    for names in ((name,), tuple(site.board.nets[net] for net in chain.nets)):
        said = {_NUMBERS.sub("", word) for one in names for word in words(one)}
        outward = any(_OUTWARD.fullmatch(word) for word in said)
        inward = any(_INWARD.fullmatch(word) for word in said)
        if outward != inward:
            return outward, inward
    return False, False
