"""Everything measured on the copper of one link: both routes, and what lies between them."""

from __future__ import annotations

import math

from pairrules.board.board import Board
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.copper_index import CopperIndex
from pairrules.geometry.gap_figures import coupled_length, gap_figures
from pairrules.geometry.leg_route import Break, leg_route
from pairrules.geometry.loop_area import loop_area
from pairrules.geometry.neighbours import NeighbourProfile, neighbours
from pairrules.geometry.outlined_copper import area_joins, course, unseen
from pairrules.geometry.pair_geometry import LegRoute, PairGeometry
from pairrules.geometry.reference_cover import reference_cover
from pairrules.geometry.spacing_profile import spacing_profiles
from pairrules.pairing.link import Hop, Link

LONGEST_LEG_MM = 50_000.0
"""Time and memory grow with the length of track; no pair is longer than the board, and none of those than ten metres.
Common practice, no source."""

_LEGS = ("plus", "minus")

LEAST_BESIDE_MM = 1.0
"""Foreign copper is looked for within the pair's reach, and this far at least."""


def measure_link(
    board: Board,
    link: Link,
    *,
    reach_mm: float | None,
    reference: tuple[int, ...],
    copper: BoardCopper | None = None,
    beside: bool = False,
) -> PairGeometry:
    """The geometry of one link.

    Parameters
    ----------
    reach_mm: within which a leg counts as beside the other; `None` for four times the pair's usual gap.
    reference: indices of the nets whose copper counts as reference.
    copper: the board's, where many links are measured; made here where absent.
    beside: whether foreign copper beside the legs is looked for too; it costs most on a crowded layer.
    """
    copper = copper or BoardCopper(board, reference)
    index = copper.index
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
    profile_plus, profile_minus, reach = spacing_profiles(plus.pieces, minus.pieces, reach_mm)
    gaps = gap_figures(profile_plus)
    apart = [leg.track_mm - coupled_length(profile) for leg, profile in ((plus, profile_plus), (minus, profile_minus))]
    area = loop_area(plus.pieces, minus.pieces)
    covers = [reference_cover(leg.pieces, board, copper.reference) for leg in (plus, minus)]
    missing += sorted({cover.missing for cover in covers if cover.missing})
    uncovered = [cover.uncovered_mm for cover in covers if cover.uncovered_mm is not None]
    return PairGeometry(
        routed="complete",
        plus=plus,
        minus=minus,
        profile_plus=profile_plus,
        profile_minus=profile_minus,
        reach_mm=reach,
        gap_min_mm=gaps.least,
        gap_median_mm=gaps.median,
        gap_max_mm=gaps.greatest,
        coupled_mm=gaps.coupled_mm,
        apart_mm=max(0.0, *apart),
        loop_area_mm2=area.total_mm2,
        net_loop_area_mm2=area.net_mm2,
        reference_uncovered_mm=math.fsum(uncovered) if len(uncovered) == len(covers) else None,
        cover_plus=covers[0],
        cover_minus=covers[1],
        neighbours_plus=_beside(copper, link, plus, reach) if beside else None,
        neighbours_minus=_beside(copper, link, minus, reach) if beside else None,
        missing=tuple(missing),
        unseen=hidden,
    )


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


def _beside(copper: BoardCopper, link: Link, leg: LegRoute, reach_mm: float) -> NeighbourProfile:
    own = tuple(sorted({hop.net for hop in (*link.hops_plus, *link.hops_minus)}))
    within = max(reach_mm, LEAST_BESIDE_MM)
    return neighbours(leg.pieces, copper.board, own, within, copper=copper.foreign)


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
