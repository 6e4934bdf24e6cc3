"""Chains to links: the name, the hops of each leg from pad to pad, the series steps, and what is missing."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
import shapely

from pairrules.board.columns import Ints
from pairrules.pairing.chains import Chain
from pairrules.pairing.ends import End, Ends, ends_of
from pairrules.pairing.hung_parts import hung_parts
from pairrules.pairing.link import Hop, Link, SeriesStep
from pairrules.pairing.natural_order import natural_key
from pairrules.pairing.pairs import DECLARED, LISTED, NetPair
from pairrules.pairing.series import Site, Step

_FOUND = {LISTED: 0, DECLARED: 1}
_LEGS = ("plus", "minus")


def link_of(
    site: Site, chain: Chain, pairs: Mapping[frozenset[int], NetPair], reference: tuple[int, ...]
) -> tuple[Link, bool, tuple[str, ...]]:
    """The link of a chain, whether its name was given, and sentences on listed pairs that it swallows.

    The pair that names it is a listed one, else a declared one, else the one whose nets share the shortest name.
    """
    own = [pairs[frozenset(node)] for node in chain.nodes if frozenset(node) in pairs]
    own.sort(
        key=lambda pair: (
            _FOUND.get(pair.found_by, 2),
            not pair.name,
            len(pair.shared),
            natural_key(pair.shared),
            pair.plus,
        )
    )
    lead = own[0]
    if any(node == (lead.minus, lead.plus) for node in chain.nodes):
        chain = _swapped(chain)
    ends = ends_of(
        site,
        chain,
        name=lead.shared,
        source=next((pair.source for pair in own if pair.source), ""),
        load=next((pair.load for pair in own if pair.load), ""),
    )
    if ends.flip:
        chain = _turned(chain)
        ends = Ends(first=ends.last, last=ends.first, flip=False, missing=ends.missing)
    missing = [*ends.missing, *_end_sentences(site, ends), *_step_sentences(site, chain)]
    hops: list[tuple[Hop, ...]] = []
    open_ends = list(ends.missing)
    for leg in (0, 1):
        legs, sentences = _hops(site, chain, ends, leg)
        hops.append(legs)
        open_ends += sentences
        missing.extend(sentences)
    name = lead.name or lead.shared
    link = Link(
        name=name,
        plus=lead.plus,
        minus=lead.minus,
        klass=next((pair.klass for pair in own if pair.klass), ""),
        found_by=lead.found_by,
        hops_plus=hops[0],
        hops_minus=hops[1],
        series=tuple(SeriesStep(plus=step.plus, minus=step.minus) for step in chain.steps),
        source=ends.first.part,
        load=ends.last.part,
        hung=hung_parts(site, chain, ends, reference),
        missing=tuple(missing),
        ends_known=not open_ends,
    )
    swallowed = tuple(
        f"the listed pair {pair.name or pair.shared} is the same link as {name} and is reported as one with it"
        for pair in own[1:]
        if pair.found_by == LISTED and pair.name not in {"", name}
    )
    return link, bool(lead.name), swallowed


def renamed(link: Link, name: str) -> Link:
    """The link under another name."""
    return replace(link, name=name)


def _swapped(chain: Chain) -> Chain:
    return Chain(
        nodes=tuple((minus, plus) for plus, minus in chain.nodes),
        steps=tuple(_crossed(step) for step in chain.steps),
        branches=tuple(_crossed(step) for step in chain.branches),
    )


def _crossed(step: Step) -> Step:
    return Step(plus=step.minus, minus=step.plus, to=(step.to[1], step.to[0]))


def _turned(chain: Chain) -> Chain:
    nodes = chain.nodes[::-1]
    steps = tuple(
        Step(plus=step.plus, minus=step.minus, to=node) for step, node in zip(chain.steps[::-1], nodes[1:], strict=True)
    )
    return Chain(nodes=nodes, steps=steps, branches=chain.branches)


def _hops(site: Site, chain: Chain, ends: Ends, leg: int) -> tuple[tuple[Hop, ...], tuple[str, ...]]:
    """One leg's hops, source first. Where no end part is known the farthest pad stands in, and a sentence says so."""
    wiring, missing = site.wiring, list[str]()
    series = {part for step in chain.steps for part in (step.plus, step.minus)}
    hops: list[Hop] = []
    net, start = chain.nodes[0][leg], _pads(site, ends.first, chain.nodes[0][leg], leg)
    for step in chain.steps:
        part = step.plus if leg == 0 else step.minus
        if part >= 0:
            hops.append(Hop(net=net, start=start, end=wiring.pads_at(part, net)))
            net = step.to[leg]
            start = wiring.pads_at(part, net)
    hops.append(Hop(net=net, start=start, end=_pads(site, ends.last, net, leg)))
    open_start, open_end = not hops[0].start, not hops[-1].end
    if open_start and open_end and len(hops) == 1:
        rows = _others(site, net, (), series)
        first, last = _farthest_two(site, rows)
        hops = [Hop(net=net, start=first, end=last)]
    else:
        if open_start:
            hops[0] = replace(hops[0], start=_farthest(site, hops[0].net, hops[0].end, series))
        if open_end:
            hops[-1] = replace(hops[-1], end=_farthest(site, hops[-1].net, hops[-1].start, series))
    for place, wanted, found, role in ((0, open_start, hops[0].start, "source"), (-1, open_end, hops[-1].end, "load")):
        if wanted:
            named = site.board.nets[hops[place].net]
            taken = (
                f"the pad {_pad_name(site, found[0])} is taken, the farthest"
                if found
                else f"no pad of {named} is left for it"
            )
            missing.append(f"{_LEGS[leg]} has no known part at its {role}; {taken}")
    return tuple(hops), tuple(missing)


def _pads(site: Site, end: End, net: int, leg: int) -> tuple[int, ...]:
    part = (end.plus, end.minus)[leg]
    return site.wiring.pads_at(part, net) if part >= 0 else ()


def _others(site: Site, net: int, known: tuple[int, ...], series: set[int]) -> Ints:
    """Pads of a net but those of the parts in series and those known already, in an order that rows do not decide."""
    pads, rows = site.board.pads, site.wiring.pads_on(net)
    rows = rows[~np.isin(pads.part[rows], [part for part in series if part >= 0]) & ~np.isin(rows, known)]
    return rows[np.lexsort((pads.layer[rows], pads.at[rows, 1], pads.at[rows, 0]))]


def _farthest(site: Site, net: int, known: tuple[int, ...], series: set[int]) -> tuple[int, ...]:
    rows = _others(site, net, known, series)
    if len(rows) == 0:
        return ()
    if not known:
        return (int(rows[0]),)
    away = site.board.pads.at[rows] - site.board.pads.at[list(known)].mean(axis=0)
    return (int(rows[np.argmax(np.round(np.hypot(away[:, 0], away[:, 1]), 6))]),)


def _farthest_two(site: Site, rows: Ints) -> tuple[tuple[int, ...], tuple[int, ...]]:
    """The two pads farthest from one another; the two are corners of the convex hull (elementary geometry)."""
    if len(rows) < 2:
        return tuple(int(row) for row in rows), ()
    at = site.board.pads.at[rows]
    corners = shapely.get_coordinates(shapely.convex_hull(shapely.MultiPoint(at)))
    near = (
        np.flatnonzero((at[:, None, :] == corners[None, :, :]).all(axis=2).any(axis=1))
        if len(rows) > 64
        else np.arange(len(rows))
    )
    apart = np.round(np.hypot(*(at[near][:, None, :] - at[near][None, :, :]).transpose(2, 0, 1)), 6)
    first, last = np.unravel_index(int(np.argmax(apart)), apart.shape)
    if first == last:
        first, last = np.intp(0), np.intp(len(near) - 1)
    return (int(rows[near[first]]),), (int(rows[near[last]]),)


def _pad_name(site: Site, row: int) -> str:
    pads = site.board.pads
    part = int(pads.part[row])
    if part < 0:
        return f"at ({pads.at[row, 0]:.3f}, {pads.at[row, 1]:.3f})"
    return f"{site.board.parts[part].ref}.{pads.pin[row]}" if pads.pin[row] else site.board.parts[part].ref


def _end_sentences(site: Site, ends: Ends) -> tuple[str, ...]:
    parts = site.board.parts
    return tuple(
        f"the legs {verb} at different parts, plus at {parts[end.plus].ref} and minus at {parts[end.minus].ref}"
        for end, verb in ((ends.first, "start"), (ends.last, "end"))
        if end.plus != end.minus
    )


def _step_sentences(site: Site, chain: Chain) -> tuple[str, ...]:
    parts, nets, sign = site.board.parts, site.board.nets, site.sign
    found: list[str] = []
    for step, node in zip(chain.steps, chain.nodes[:-1], strict=True):
        for own, other, leg in ((step.plus, step.minus, 0), (step.minus, step.plus, 1)):
            if other < 0:
                found.append(f"{_LEGS[leg]} has {parts[own].ref} in series, {_LEGS[1 - leg]} has no part there")
        if step.plus >= 0 and step.minus >= 0 and site.wiring.letters[step.plus] != site.wiring.letters[step.minus]:
            found.append(
                f"plus has {parts[step.plus].ref} in series, minus has {parts[step.minus].ref}, another kind of part"
            )
        if sign.get(node[0], 0) * sign.get(step.to[0], 0) < 0:
            found.append(f"{nets[node[0]]} and {nets[step.to[0]]} are one leg, though their names differ in polarity")
    found.extend(
        f"another way on, through {_listed(parts[step.plus].ref, parts[step.minus].ref)} to {nets[step.to[0]]} and"
        f" {nets[step.to[1]]}, is reported as a pair of its own"
        for step in chain.branches
    )
    return tuple(found)


def _listed(plus: str, minus: str) -> str:
    return plus if plus == minus else f"{plus} and {minus}"
