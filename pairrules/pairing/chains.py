"""Pairs to chains: a pair followed both ways through what stands in series with it."""

from __future__ import annotations

from collections.abc import Collection, Container
from dataclasses import dataclass

from pairrules.pairing.pairs import NetPair
from pairrules.pairing.series import Site, Step, ends_on, named_steps, plain_steps, single_steps

_LARGE = 8
"""Pins from which an active part between two connectors is taken for the end of both rather than a protection array."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Chain:
    """Nodes (two nets each, leg by leg) and the steps between them; `steps[i].to` is `nodes[i + 1]`.

    `branches`: named pairs that are reached too, but by another way than the chain's.
    """

    nodes: tuple[tuple[int, int], ...]
    steps: tuple[Step, ...]
    branches: tuple[Step, ...] = ()

    @property
    def nets(self) -> frozenset[int]:
        """Every net of the chain."""
        return frozenset(net for node in self.nodes for net in node)


def chains_of(site: Site, pairs: tuple[NetPair, ...]) -> tuple[Chain, ...]:
    """The chains that the pairs belong to, each net in one at most."""
    taken: set[int] = set()
    found: list[Chain] = []
    for pair in pairs:
        # A seed that is cut off again (see `_cut`) starts once more, with what was kept now barred.
        while pair.plus not in taken:
            chain = _follow(site, (pair.plus, pair.minus), taken)
            taken |= chain.nets
            found.append(chain)
    return tuple(found)


@dataclass(frozen=True, slots=True)
class _Barred:
    """Nets of either of two sets, without a copy of both at every step."""

    taken: Collection[int]
    on: Collection[int]

    def __contains__(self, net: object) -> bool:
        return net in self.on or net in self.taken


def _follow(site: Site, seed: tuple[int, int], taken: Collection[int]) -> Chain:
    nodes, steps = [seed], list[Step]()
    branches: list[Step] = []
    on = set(seed)
    for forward in (True, False):
        while True:
            here = nodes[-1] if forward else nodes[0]
            ways = _ways(site, here, _Barred(taken, on), joined=len(nodes) > 1)
            if not ways:
                break
            on.update(ways[0].to)
            if forward:
                nodes.append(ways[0].to)
                steps.append(ways[0])
            else:
                nodes.insert(0, ways[0].to)
                steps.insert(0, Step(plus=ways[0].plus, minus=ways[0].minus, to=here))
    nodes, steps = _cut(site, nodes, steps)
    on = {net for node in nodes for net in node}
    for node in nodes:
        branches.extend(named_steps(site, node, _Barred(taken, on)))
    return Chain(nodes=tuple(nodes), steps=tuple(steps), branches=tuple(branches))


def _ways(site: Site, here: tuple[int, int], barred: Container[int], *, joined: bool) -> tuple[Step, ...]:
    """Ways on from a node, best first; to nets that no name pairs only while an end is still wanted there."""
    named = named_steps(site, here, barred)
    wanted = len(ends_on(site, here)) + joined < 2
    if named or not wanted:
        # A dead end (an option that is not fitted) is no way on where both ends are known without it.
        return named if wanted else tuple(step for step in named if not _dead_end(site, step))
    return plain_steps(site, here, barred) or single_steps(site, here, barred)


def _dead_end(site: Site, step: Step) -> bool:
    return all(len(site.wiring.parts_on(net)) <= 1 for net in step.to)


def _cut(site: Site, nodes: list[tuple[int, int]], steps: list[Step]) -> tuple[list[tuple[int, int]], list[Step]]:
    """One active part that feeds two connectors through parts in series makes two links: keep one of them."""
    wiring = site.wiring
    stations = [ends_on(site, node) for node in nodes]
    active = [
        place
        for place, parts in enumerate(stations)
        if any(wiring.is_active(part) and wiring.pins[part] >= _LARGE for part in parts)
    ]
    outer = (stations[0], stations[-1])
    if len(active) != 1 or active[0] in {0, len(nodes) - 1}:
        return nodes, steps
    if not all(parts and all(wiring.is_connector(part) for part in parts) for parts in outer):
        return nodes, steps
    first, last = (min(wiring.order[list(parts)]) for parts in outer)
    place = active[0]
    if first <= last:
        return nodes[: place + 1], steps[:place]
    return nodes[place:], steps[place:]
