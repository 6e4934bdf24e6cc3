"""Everything measured on the copper of one link: both routes, and what lies between them."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from pairrules.board.board import Board
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.copper_index import CopperIndex
from pairrules.geometry.gap_figures import coupled_length, gap_figures
from pairrules.geometry.leg_route import Break, leg_route
from pairrules.geometry.loop_area import loop_area
from pairrules.geometry.neighbours import NeighbourProfile, neighbours_of_legs
from pairrules.geometry.outlined_copper import area_joins, course, unseen
from pairrules.geometry.pair_geometry import LegRoute, PairGeometry
from pairrules.geometry.reference_cover import reference_covers
from pairrules.geometry.spacing_profile import spacing_profiles
from pairrules.pairing.link import Hop, Link

LONGEST_LEG_MM = 50_000.0
"""Time and memory grow with the length of track; no pair is longer than the board, and none of those than ten metres.
Common practice, no source."""

LONGEST_PASS_MM = 4_000.0
"""Pairs are measured together until their legs come to this length, which takes some tens of megabytes."""

_LEGS = ("plus", "minus")

LEAST_BESIDE_MM = 1.0
"""Foreign copper is looked for within the pair's reach, and this far at least."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """A link to be measured.

    reach_mm: within which a leg counts as beside the other; `None` for four times the pair's usual gap.
    beside: whether foreign copper beside the legs is looked for too; it costs most on a crowded layer.
    """

    link: Link
    reach_mm: float | None = None
    beside: bool = False


def measure_link(
    board: Board,
    link: Link,
    *,
    reach_mm: float | None,
    reference: tuple[int, ...],
    copper: BoardCopper | None = None,
    beside: bool = False,
) -> PairGeometry:
    """The geometry of one link. Parameters as of `Asked` and `measure_links`."""
    asked = Asked(link=link, reach_mm=reach_mm, beside=beside)
    (found,) = measure_links(board, [asked], copper=copper or BoardCopper(board, reference))
    return found


def measure_links(board: Board, asked: Sequence[Asked], *, copper: BoardCopper) -> list[PairGeometry]:
    """The geometry of each link, many in one pass. copper: the board's, which says which nets are reference."""
    found: dict[int, PairGeometry] = {}
    routed: list[_Routed] = []
    for place, one in enumerate(asked):
        route = _route(board, one, place, copper)
        if isinstance(route, PairGeometry):
            found[place] = route
        else:
            routed.append(route)
    for some in _passes(routed):
        found.update(zip((one.place for one in some), _measured(board, some, copper), strict=True))
    return [found[place] for place in range(len(asked))]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Routed:
    """A link whose legs are whole: which of those asked for, its legs, why figures are missing or not all there is."""

    place: int
    asked: Asked
    plus: LegRoute
    minus: LegRoute
    missing: tuple[str, ...]
    hidden: str


def _passes(routed: list[_Routed]) -> Iterator[list[_Routed]]:
    """The links in parts that are measured at once, none much longer than the memory it takes allows."""
    some: list[_Routed] = []
    length = 0.0
    for one in routed:
        some.append(one)
        length += one.plus.track_mm + one.minus.track_mm
        if length > LONGEST_PASS_MM:
            yield some
            some, length = [], 0.0
    if some:
        yield some


def _route(board: Board, asked: Asked, place: int, copper: BoardCopper) -> _Routed | PairGeometry:
    """The routes of both legs, or all that can be said of a link without them."""
    link, index = asked.link, copper.index
    plus = leg_route(board, index, link.hops_plus)
    minus = leg_route(board, index, link.hops_minus)
    beyond = [why for name, leg in (("plus", plus), ("minus", minus)) if (why := _beyond(name, leg))]
    if beyond:
        return PairGeometry(routed="partial", plus=None, minus=None, missing=(*link.missing, *beyond))
    if not isinstance(plus, LegRoute) or not isinstance(minus, LegRoute):
        return _broken(board, index, link, plus, minus)
    hops = (link.hops_plus, link.hops_minus)
    through = [area_joins(board, copper.areas, leg, own) for leg, own in zip((plus, minus), hops, strict=True)]
    lost = [
        why for name, leg, one in zip(_LEGS, (plus, minus), through, strict=True) if (why := course(name, leg, one))
    ]
    if lost:
        return PairGeometry(routed="partial", plus=None, minus=None, missing=(*link.missing, *lost))
    hidden = unseen(through[0].length_mm, through[1].length_mm)
    missing = [*link.missing, *filter(None, (hidden,))]
    if not plus.barrels_known or not minus.barrels_known:
        missing.append("the stackup's thicknesses are unknown, so the barrels of its vias are left out of the lengths")
    return _Routed(place=place, asked=asked, plus=plus, minus=minus, missing=tuple(missing), hidden=hidden)


def _measured(board: Board, routed: list[_Routed], copper: BoardCopper) -> list[PairGeometry]:
    """What lies between and beside the legs of each link."""
    pairs = [(one.plus.pieces, one.minus.pieces) for one in routed]
    spacings = spacing_profiles(pairs, [one.asked.reach_mm for one in routed])
    covers = reference_covers([leg for pair in pairs for leg in pair], board, copper.reference)
    beside = _beside(copper, routed, [spacing.reach_mm for spacing in spacings])
    found = []
    for place, (one, spacing) in enumerate(zip(routed, spacings, strict=True)):
        gaps = gap_figures(spacing.plus)
        legs = ((one.plus, spacing.plus), (one.minus, spacing.minus))
        apart = [leg.track_mm - coupled_length(profile) for leg, profile in legs]
        area = loop_area(one.plus.pieces, one.minus.pieces)
        own = covers[2 * place : 2 * place + 2]
        uncovered = [cover.uncovered_mm for cover in own if cover.uncovered_mm is not None]
        neighbours_plus, neighbours_minus = beside.get(place, (None, None))
        found.append(
            PairGeometry(
                routed="complete",
                plus=one.plus,
                minus=one.minus,
                profile_plus=spacing.plus,
                profile_minus=spacing.minus,
                reach_mm=spacing.reach_mm,
                gap_min_mm=gaps.least,
                gap_median_mm=gaps.median,
                gap_max_mm=gaps.greatest,
                coupled_mm=gaps.coupled_mm,
                apart_mm=max(0.0, *apart),
                loop_area_mm2=area.total_mm2,
                net_loop_area_mm2=area.net_mm2,
                reference_uncovered_mm=math.fsum(uncovered) if len(uncovered) == len(own) else None,
                cover_plus=own[0],
                cover_minus=own[1],
                neighbours_plus=neighbours_plus,
                neighbours_minus=neighbours_minus,
                missing=(*one.missing, *sorted({cover.missing for cover in own if cover.missing})),
                unseen=one.hidden,
            )
        )
    return found


def _beyond(name: str, leg: LegRoute | tuple[Break, ...]) -> str:
    """Why a leg cannot be measured though it need not be broken; "" where it can, or breaks off."""
    if not isinstance(leg, LegRoute):
        return next((f"{name} {gap.why}" for gap in leg if gap.crowded), "")
    if not len(leg.pieces):
        return f"{name} has no length: the pads at its two ends lie at one place"
    if leg.track_mm > LONGEST_LEG_MM:
        most = LONGEST_LEG_MM / 1000
        return f"{name} is {leg.track_mm / 1000:.0f} m long; legs longer than {most:.0f} m are not measured"
    return ""


def _beside(
    copper: BoardCopper, routed: list[_Routed], reaches: list[float]
) -> dict[int, tuple[NeighbourProfile, NeighbourProfile]]:
    """The neighbours of both legs of each link for which they are asked, by its place among `routed`."""
    places = [place for place, one in enumerate(routed) if one.asked.beside]
    if not places:
        return {}
    legs, own, within = [], [], []
    for place in places:
        one, link = routed[place], routed[place].asked.link
        nets = tuple(sorted({hop.net for hop in (*link.hops_plus, *link.hops_minus)}))
        legs += [one.plus.pieces, one.minus.pieces]
        own += [nets, nets]
        within += [max(reaches[place], LEAST_BESIDE_MM)] * 2
    found = neighbours_of_legs(legs, copper.board, own, within, copper=copper.foreign)
    return {place: (found[2 * i], found[2 * i + 1]) for i, place in enumerate(places)}


def _broken(
    board: Board,
    index: CopperIndex,
    link: Link,
    plus: LegRoute | tuple[Break, ...],
    minus: LegRoute | tuple[Break, ...],
) -> PairGeometry:
    bare = {leg for leg, hops in (("plus", link.hops_plus), ("minus", link.hops_minus)) if not _has_copper(index, hops)}
    missing = list(link.missing)
    places = []
    for leg, route in (("plus", plus), ("minus", minus)):
        if isinstance(route, LegRoute):
            continue
        if leg in bare:
            missing.append(f"{leg} has no copper in the file")
        for gap in route:
            places.append((leg, gap.layer, gap.x_mm, gap.y_mm))
            if leg not in bare:
                where = (
                    f" on {board.copper[gap.layer]} at ({gap.x_mm:.3f}, {gap.y_mm:.3f}) mm" if gap.layer >= 0 else ""
                )
                missing.append(f"{leg} is not routed from end to end: {gap.why}{where}")
    return PairGeometry(
        routed="none" if len(bare) == 2 else "partial",
        plus=plus if isinstance(plus, LegRoute) else None,
        minus=minus if isinstance(minus, LegRoute) else None,
        broken=tuple(places),
        missing=tuple(missing),
    )


def _has_copper(index: CopperIndex, hops: tuple[Hop, ...]) -> bool:
    return any(len(index.rows(kind, hop.net)) for hop in hops for kind in ("tracks", "areas"))
