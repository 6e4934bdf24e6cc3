"""The parts that hang on a chain without carrying it on: terminations, bias, filters, protection, taps of a bus."""

from __future__ import annotations

from pairrules.pairing.chains import Chain
from pairrules.pairing.ends import Ends
from pairrules.pairing.link import HungPart
from pairrules.pairing.series import Site


def hung_parts(site: Site, chain: Chain, ends: Ends, reference: tuple[int, ...]) -> tuple[HungPart, ...]:
    """Every part on the chain's nets but its ends and the parts in series, from the source on, then in natural order.

    `step` counts from the chain's first node. A part on several nodes counts for the first of them.
    """
    wiring = site.wiring
    carrying = {part for step in chain.steps for part in (step.plus, step.minus)}
    carrying |= {part for end in (ends.first, ends.last) for part in (end.plus, end.minus)}
    legs = tuple(frozenset(node[leg] for node in chain.nodes) for leg in (0, 1))
    found: list[HungPart] = []
    seen: set[int] = set()
    for step, node in enumerate(chain.nodes):
        parts = {part for net in node for part in wiring.parts_on(net)} - carrying - seen
        seen |= parts
        ordered = sorted(parts, key=lambda one: int(wiring.order[one]))
        found.extend(_hung(site, part, legs, step, frozenset(reference)) for part in ordered)
    return tuple(found)


def _hung(site: Site, part: int, legs: tuple[frozenset[int], ...], step: int, reference: frozenset[int]) -> HungPart:
    wiring = site.wiring
    nets = set(wiring.nets_of(part))
    on = tuple(bool(nets & leg) for leg in legs)
    leg = "both" if all(on) else "plus" if on[0] else "minus"
    far = sorted(nets - legs[0] - legs[1])
    other = far[0] if len(far) == 1 else -1
    two = wiring.pins[part] == 2
    if leg == "both":
        kind = "across" if two else "tap"
    elif two or wiring.is_passive(part) or wiring.is_protector(part):
        kind = "to reference" if reference & set(far) else "to net"
        if other < 0 and len(reference & set(far)) == 1:
            other = min(reference & set(far))
        if not far:
            inside = nets & (legs[0] | legs[1])
            other = max(inside) if len(inside) > 1 else -1
    else:
        kind = "tap"
    own = sorted(row for net in nets & (legs[0] | legs[1]) for row in wiring.pads_at(part, net))
    return HungPart(part=part, kind=kind, leg=leg, pads=tuple(own), step=step, other=other)
