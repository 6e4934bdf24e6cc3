"""What pairing finds, in names instead of indices, for tests to compare."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from pairrules.board import Board
from pairrules.pairing.find_links import Pairing, PairRequest, find_links
from pairrules.pairing.link import Hop, Link


@dataclass(frozen=True, kw_only=True)
class Told:
    """A link in names. `plus`, `minus`: "J1.1 S_P R1.1" for each hop, several pads joined by "/", "-" for none.

    `hung`: "R1 across both 0" and the far net where there is one.
    """

    name: str
    nets: tuple[str, str]
    source: str
    load: str
    plus: list[str]
    minus: list[str]
    series: list[tuple[str, str]]
    hung: list[str]
    missing: tuple[str, ...]
    found_by: str
    klass: str


def pairing(
    made: Board, *, listed: Sequence[PairRequest] = (), ignore: Sequence[str] = (), reference: str = "GND"
) -> Pairing:
    """`find_links` with the reference net by name."""
    nets = tuple(net for net, name in enumerate(made.nets) if name == reference)
    return find_links(made, listed=tuple(listed), ignore=tuple(ignore), reference=nets)


def told(made: Board, *, listed: Sequence[PairRequest] = ()) -> list[Told]:
    """Every link of a board."""
    return [_told(made, link) for link in pairing(made, listed=listed).links]


def one(made: Board, *, listed: Sequence[PairRequest] = ()) -> Told:
    """The only link of a board."""
    links = told(made, listed=listed)
    assert len(links) == 1, links
    return links[0]


def _told(made: Board, link: Link) -> Told:
    return Told(
        name=link.name,
        nets=(made.nets[link.plus], made.nets[link.minus]),
        source=_part(made, link.source),
        load=_part(made, link.load),
        plus=[_hop(made, hop) for hop in link.hops_plus],
        minus=[_hop(made, hop) for hop in link.hops_minus],
        series=[(_part(made, step.plus), _part(made, step.minus)) for step in link.series],
        hung=[
            " ".join(
                [made.parts[part.part].ref, part.kind, part.leg, str(part.step)]
                + ([made.nets[part.other]] if part.other >= 0 else [])
            )
            for part in link.hung
        ],
        missing=link.missing,
        found_by=link.found_by,
        klass=link.klass,
    )


def _part(made: Board, part: int) -> str:
    return made.parts[part].ref if part >= 0 else "-"


def _hop(made: Board, hop: Hop) -> str:
    start, end = ("/".join(_pad(made, row) for row in rows) or "-" for rows in (hop.start, hop.end))
    return f"{start} {made.nets[hop.net]} {end}"


def _pad(made: Board, row: int) -> str:
    return f"{_part(made, int(made.pads.part[row]))}.{made.pads.pin[row]}"
