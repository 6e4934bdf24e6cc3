"""The balanced pairs of a board, each followed from its source end to its load end."""

from __future__ import annotations

from dataclasses import dataclass

from pairrules.board.board import Board
from pairrules.pairing.chains import chains_of
from pairrules.pairing.link import Link
from pairrules.pairing.link_names import distinct_names
from pairrules.pairing.links import link_of, renamed
from pairrules.pairing.listed_pairs import PairRequest
from pairrules.pairing.natural_order import natural_key
from pairrules.pairing.pairs import net_pairs
from pairrules.pairing.series import site_of
from pairrules.pairing.wiring import wiring_of

__all__ = ["PairRequest", "Pairing", "find_links"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Pairing:
    """The links of a board.

    Parameters
    ----------
    links: in natural order of their names, each name once.
    unpaired: names of nets that look like half of a pair and have no other half, in natural order.
    missing: pairs that the settings list or the file declares and the board does not have, one sentence each.
    """

    links: tuple[Link, ...]
    unpaired: tuple[str, ...]
    missing: tuple[str, ...]


def find_links(
    board: Board,
    *,
    listed: tuple[PairRequest, ...] = (),
    ignore: tuple[str, ...] = (),
    reference: tuple[int, ...],
) -> Pairing:
    """Pair the nets of a board and follow each pair through the parts in series with it.

    Parameters
    ----------
    listed: pairs the settings ask for; they go before pairs the file declares, and those before pairs by net name.
    ignore: patterns of nets that are never paired by name.
    reference: nets whose copper counts as reference (indices into `Board.nets`); never a leg, unless listed as one.

    Raises
    ------
    SettingsError: where a listed pair is contradictory in itself.
    """
    wiring = wiring_of(board)
    found = net_pairs(board, wiring, listed=listed, ignore=ignore, reference=reference)
    site = site_of(board, wiring, found.pairs, reference)
    chains = chains_of(site, found.pairs)
    by_nets = {frozenset((pair.plus, pair.minus)): pair for pair in found.pairs}
    made = [link_of(site, chain, by_nets, reference) for chain in chains]
    names = distinct_names(
        [(link.name, f"{board.nets[link.plus]}/{board.nets[link.minus]}", given) for link, given, _ in made]
    )
    links = [renamed(link, name) for (link, _, _), name in zip(made, names, strict=True)]
    on = {net for chain in chains for net in chain.nets}
    swallowed = [sentence for _, _, sentences in made for sentence in sentences]
    return Pairing(
        links=tuple(sorted(links, key=lambda link: natural_key(link.name))),
        unpaired=tuple(board.nets[net] for net in found.halves if net not in on),
        missing=(*found.missing, *swallowed),
    )
