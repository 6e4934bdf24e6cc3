"""Which pair of an earlier result is which pair of a later one, whatever has been renamed between."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterable
from dataclasses import dataclass

from pairrules.result import PairResult


@dataclass(frozen=True, slots=True, kw_only=True)
class Matched:
    """An old and a new pair that are the same one; `None` where there is no other. `by`: what told so, "" then."""

    old: PairResult | None
    new: PairResult | None
    by: str = ""


def matched(old: Iterable[PairResult], new: Iterable[PairResult]) -> tuple[Matched, ...]:
    """Every pair once: new ones in their order, then old ones that have no counterpart.

    In turn: the same two legs; the most nets in common; the same pins at both ends of both legs; the same end parts and
    parts in series; the same name. Where several fit equally and nothing tells them apart, none is taken.
    """
    olds, news = list(old), list(new)
    found: dict[int, tuple[int, str]] = {}

    def free() -> tuple[list[int], list[int]]:
        taken = {i for i, _ in found.values()}
        return [i for i in range(len(olds)) if i not in taken], [k for k in range(len(news)) if k not in found]

    def pair_up(key: Callable[[PairResult], Hashable], by: str) -> None:
        here, there = free()
        for k in there:
            wanted = key(news[k])
            if wanted is None or sum(key(news[other]) == wanted for other in there) > 1:
                continue
            fitting = [i for i in here if key(olds[i]) == wanted]
            if len(fitting) == 1:
                found[k] = (fitting[0], by)

    pair_up(lambda pair: frozenset((pair.plus, pair.minus)), "nets")
    here, there = free()
    shared = [(len(_nets(olds[i]) & _nets(news[k])), k, i) for i in here for k in there]
    for count, k, i in sorted(shared, key=lambda one: (-one[0], one[1], one[2])):
        if count and k not in found and i not in {taken for taken, _ in found.values()}:
            found[k] = (i, "some nets")
    pair_up(_pins, "pins at its ends")
    pair_up(_parts, "parts at its ends")
    pair_up(lambda pair: pair.name, "name")
    both = [
        Matched(old=olds[found[k][0]], new=pair, by=found[k][1]) if k in found else Matched(old=None, new=pair)
        for k, pair in enumerate(news)
    ]
    return (*both, *(Matched(old=olds[i], new=None) for i in free()[0]))


def _nets(pair: PairResult) -> frozenset[str]:
    return frozenset((pair.plus, pair.minus, *pair.nets_plus, *pair.nets_minus))


def _pins(pair: PairResult) -> Hashable:
    """Ends of both legs, whichever is called plus."""
    if not pair.ends_plus or not pair.ends_minus:
        return None
    return frozenset((pair.ends_plus, pair.ends_minus))


def _parts(pair: PairResult) -> Hashable:
    if not pair.source or not pair.load:
        return None
    return frozenset((pair.source, pair.load)), frozenset(part.ref for part in pair.series)
