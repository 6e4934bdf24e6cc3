"""Pairs that the settings ask for, by name or by pattern, looked up among a board's nets."""

from __future__ import annotations

from dataclasses import dataclass

from pairrules.errors import SettingsError
from pairrules.pairing.natural_order import natural_key
from pairrules.pairing.net_patterns import filled, starred


@dataclass(frozen=True, slots=True, kw_only=True)
class PairRequest:
    """One entry of the settings' `pairs`.

    Parameters
    ----------
    plus, minus: net names, or patterns whose stars match the same text.
    name: of the pair, "" where it is to be called by what the nets share; with a pattern the stars may stand in it too.
    place: where in the settings it stands, for messages.
    """

    plus: str
    minus: str
    name: str = ""
    place: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """Two nets that a request asks to be a pair, as indices. `exact`: named, not matched by a pattern."""

    plus: int
    minus: int
    name: str
    exact: bool


def asked_pairs(nets: tuple[str, ...], listed: tuple[PairRequest, ...]) -> tuple[tuple[Asked, ...], tuple[str, ...]]:
    """The pairs asked for, named ones first, and a sentence for each request that nothing fits.

    Raises
    ------
    SettingsError: where the two patterns of a request differ in their number of stars, or are the same.
    """
    index = {name: net for net, name in enumerate(nets)}
    exact: list[Asked] = []
    matched: list[Asked] = []
    missing: list[str] = []
    for request in listed:
        _check(request)
        where = f"{request.place}: " if request.place else ""
        plus, minus = index.get(request.plus), index.get(request.minus)
        if plus is not None and minus is not None:
            exact.append(Asked(plus=plus, minus=minus, name=request.name, exact=True))
        elif "*" in request.plus:
            found = _matched(nets, index, request)
            matched.extend(found)
            if not found:
                missing.append(f"{where}no two nets fit the pair {request.plus} / {request.minus}")
        else:
            for name, net in ((request.plus, plus), (request.minus, minus)):
                if net is None:
                    missing.append(
                        f"{where}the board has no net {name}, named in the pair {request.plus} / {request.minus}"
                    )
    return (*exact, *matched), tuple(missing)


def _matched(nets: tuple[str, ...], index: dict[str, int], request: PairRequest) -> list[Asked]:
    found: list[Asked] = []
    for name in sorted(nets, key=natural_key):
        texts = starred(name, request.plus)
        other = None if texts is None else index.get(filled(request.minus, texts))
        if texts is None or other is None or other == index[name]:
            continue
        stars = request.name.count("*")
        called = filled(request.name, texts[:stars]) if stars <= len(texts) else request.name
        found.append(Asked(plus=index[name], minus=other, name=called, exact=False))
    return found


def _check(request: PairRequest) -> None:
    if request.plus == request.minus:
        raise SettingsError(
            f"plus and minus are both {request.plus}", place=request.place, remedy="name the two nets of the pair"
        )
    stars = request.plus.count("*"), request.minus.count("*")
    if stars[0] != stars[1]:
        raise SettingsError(
            f"{request.plus} has {stars[0]} stars and {request.minus} has {stars[1]}",
            place=request.place,
            remedy="give both the same number of stars; they match the same text",
        )
