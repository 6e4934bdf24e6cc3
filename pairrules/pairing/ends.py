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


def ends_of(site: Site, chain: Chain, *, source: str, load: str) -> Ends:
    """The ends of a chain; `source` and `load` are designators that the file declares, "" where it does not."""
    wiring, missing = site.wiring, list[str]()
    series = {part for step in chain.steps for part in (step.plus, step.minus)}
    first, last = (_candidates(site, chain.nodes[place], series) for place in (0, -1))
    declared: dict[str, int] = {}
    refs = {part.ref: index for index, part in enumerate(site.board.parts)}
    for role, ref in (("source", source), ("load", load)):
        part = refs.get(ref, -1)
        if part >= 0 and part in (*first, *last):
            declared[role] = part
        elif ref:
            missing.append(f"the file declares {ref} as {role}, which has no pins at the ends of both legs")
    wanted = set(declared.values())
    best: tuple[tuple[int, ...], int, int] | None = None
    for one, other in product(first or (-1,), last or (-1,)):
        if len(chain.nodes) == 1 and one == other and one >= 0 and len(first) > 1:
            continue
        chosen = (one, -1) if one == other and len(chain.nodes) == 1 else (one, other)
        rank = (
            -len(wanted & set(chosen)),
            sum(_cost(site, part) for part in chosen),
            int(chosen[0] >= 0 and chosen[1] >= 0 and wiring.is_connector(chosen[0]) == wiring.is_connector(chosen[1])),
            -sum(int(wiring.pins[part]) for part in chosen if part >= 0),
            *(int(wiring.order[part]) if part >= 0 else -1 for part in chosen),
        )
        if best is None or rank < best[0]:
            best = (rank, *chosen)
    assert best is not None
    ends = [End(plus=part, minus=part) for part in best[1:]]
    for place in (0, 1):
        if ends[place].plus < 0:
            ends[place] = _apart(site, chain.nodes[-place], {*series, *best[1:]})
    flip = _flip(site, chain, ends[0], ends[1], declared)
    return Ends(first=ends[0], last=ends[1], flip=flip, missing=tuple(missing))


def _candidates(site: Site, node: tuple[int, int], series: set[int]) -> tuple[int, ...]:
    """Parts with pins on both legs of a node, in natural order."""
    other = set(site.wiring.parts_on(node[1])) - series
    return tuple(part for part in site.wiring.parts_on(node[0]) if part in other)


def _cost(site: Site, part: int) -> int:
    """How unlikely a part is as an end: connectors and active parts first, a part across the legs last, then none."""
    wiring = site.wiring
    if part < 0:
        return 16
    if wiring.is_station(part):
        return 0
    if wiring.is_protector(part):
        return 6
    if wiring.is_passive(part):
        return 8
    return 2 if wiring.pins[part] == 2 else 1


def _apart(site: Site, node: tuple[int, int], barred: set[int]) -> End:
    """An end where each leg reaches a station of its own (two amplifiers); −1 for both unless both do."""
    found = [[part for part in site.wiring.stations_on(net) if part not in barred] for net in node]
    if not all(found):
        return End(plus=-1, minus=-1)
    return End(plus=found[0][0], minus=found[1][0])


def _flip(site: Site, chain: Chain, first: End, last: End, declared: dict[str, int]) -> bool:
    """Whether the source is at the last node.

    As declared; else, with a connector at one end only, the connector is the source unless the names say that the pair
    goes out (TX, OUT, DRV, TD); with two alike the first in natural order is; with one known the names decide.
    """
    wiring = site.wiring
    if "source" in declared:
        return declared["source"] != first.plus
    if "load" in declared:
        return declared["load"] != last.plus
    a, b = first.plus, last.plus
    outward, inward = _way(site, chain)
    if a < 0 and b < 0:
        return False
    if a < 0 or b < 0:
        known = a if a >= 0 else b
        leaves = not outward if wiring.is_connector(known) else not inward
        return leaves == (a < 0)
    if wiring.is_connector(a) != wiring.is_connector(b):
        return wiring.is_connector(a) == outward
    return bool(wiring.order[a] > wiring.order[b])


def _way(site: Site, chain: Chain) -> tuple[bool, bool]:
    """Whether the names of the chain's nets say that the pair goes out, comes in; the last word that says so holds."""
    said = [False, False]
    for net in sorted(chain.nets):
        for word in words(site.board.nets[net]):
            bare = _NUMBERS.sub("", word)
            out, inward = _OUTWARD.fullmatch(bare) is not None, _INWARD.fullmatch(bare) is not None
            if out or inward:
                said = [out, inward]
                break
    return said[0], said[1]
