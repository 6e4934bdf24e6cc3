"""A pair as a row of sections from source to load, each with the solved matrices of its cross-section."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from pairrules.balance.drawn_section import Drawing, draw
from pairrules.balance.leg_stretches import stretches
from pairrules.balance.pair_electrical import PairSection
from pairrules.balance.sampled_cuts import Cut, cuts_of, with_copper
from pairrules.balance.section_store import SectionMatrices, Store, solved
from pairrules.balance.stack_heights import Heights
from pairrules.board.columns import Floats
from pairrules.fields.cross_section import CrossSection
from pairrules.fields.loss import COPPER_OHM_M
from pairrules.geometry.cross_cut import CrossCuts
from pairrules.geometry.pair_geometry import LegRoute, PairGeometry

_BORROWED_SHARE = 0.05
"""Up to this share of the route may take over the section beside it where its own cannot be solved."""


class UnsolvableError(Exception):
    """A pair's sections cannot be solved; the sentence says why."""


def pair_sections(
    geometry: PairGeometry,
    heights: Heights,
    board_cuts: CrossCuts,
    *,
    layers: tuple[str, ...],
    own: frozenset[int],
    reference: frozenset[int],
    store: Store,
) -> tuple[PairSection, ...]:
    """The sections of a pair whose legs are both complete, in order from source to load.

    Parameters
    ----------
    layers: names of the copper layers, for messages. own: the pair's nets. reference: the reference nets.
    store: sections solved so far; added to.

    Raises
    ------
    UnsolvableError: where more than a twentieth of the route has no copper that could be its reference.
    """
    plus, minus, profile = geometry.plus, geometry.minus, geometry.profile_plus
    if plus is None or minus is None or profile is None:
        raise UnsolvableError("a leg is not routed from end to end")
    cuts = cuts_of(plus.pieces, minus.pieces, profile, stretches(plus.pieces, minus.pieces, profile), _breaks(geometry))
    cuts = with_copper(cuts, heights, board_cuts, own, reference)
    drawn = _drawn(cuts, heights)
    found: list[SectionMatrices | str] = [solved(section, store) for section in drawn]
    _borrow(cuts, found, plus, minus, layers)
    return _joined(cuts, drawn, found, heights)


def _breaks(geometry: PairGeometry) -> tuple[Floats, Floats]:
    return tuple(  # type: ignore[return-value]
        np.zeros(0) if cover is None else np.concatenate([cover.s_from, cover.s_to])
        for cover in (geometry.cover_plus, geometry.cover_minus)
    )


def _drawn(cuts: list[Cut], heights: Heights) -> list[CrossSection]:
    """The section of each cut; cuts that met the same are drawn once."""
    known: dict[object, CrossSection] = {}
    found = []
    for cut in cuts:
        key = (cut.layer, cut.legs, cut.beside, cut.planes)
        if key not in known:
            known[key] = draw(heights, cut.layer, cut.legs, cut.beside, dict(cut.planes))
        found.append(known[key])
    return found


def _length(cut: Cut) -> float:
    return max(cut.plus[1] - cut.plus[0], cut.minus[1] - cut.minus[0])


def _borrow(
    cuts: list[Cut], found: list[SectionMatrices | str], plus: LegRoute, minus: LegRoute, layers: tuple[str, ...]
) -> None:
    """Cuts that cannot be solved take over the nearest solved one of their leg, where they are a small share."""
    lost = [i for i, matrices in enumerate(found) if isinstance(matrices, str)]
    if not lost:
        return
    total = max(plus.track_mm, minus.track_mm)
    if math.fsum(_length(cuts[i]) for i in lost) > _BORROWED_SHARE * total:
        first = cuts[lost[0]]
        where = f"on {layers[first.layer]} at ({first.start[0]:.3f}, {first.start[1]:.3f}) mm"
        raise UnsolvableError(f"the cross-section {where} cannot be solved: {found[lost[0]]}")
    for i in lost:
        alike = [k for k in range(len(cuts)) if k not in lost and cuts[k].leg == cuts[i].leg]
        if not alike:
            raise UnsolvableError(f"no cross-section of {cuts[i].leg} can be solved: {found[i]}")
        found[i] = found[min(alike, key=lambda k: (abs(k - i), k))]


def _joined(
    cuts: list[Cut], drawn: list[CrossSection], found: list[SectionMatrices | str], heights: Heights
) -> tuple[PairSection, ...]:
    """Neighbouring cuts with the same solved matrices as one section."""
    sections: list[PairSection] = []
    last: tuple[object, str, int, int] | None = None
    for cut, section, matrices in zip(cuts, drawn, found, strict=True):
        if isinstance(matrices, str):
            continue
        key = (section, cut.leg, cut.hop, cut.layer)
        if last == key and sections and _meets(sections[-1], cut):
            before = sections[-1]
            sections[-1] = replace(
                before,
                plus_mm=(before.plus_mm[0], cut.plus[1]),
                minus_mm=(before.minus_mm[0], cut.minus[1]),
                end=cut.end,
            )
            continue
        last = key
        sections.append(_section(cut, matrices, heights))
    return tuple(sections)


def _meets(before: PairSection, cut: Cut) -> bool:
    return abs(before.plus_mm[1] - cut.plus[0]) < 1e-5 and abs(before.minus_mm[1] - cut.minus[0]) < 1e-5


def _section(cut: Cut, matrices: SectionMatrices, heights: Heights) -> PairSection:
    low, high = heights.copper[cut.layer]
    width = {leg.name: leg.width for leg in cut.legs}
    gap = math.nan
    if len(cut.legs) == 2:
        gap = cut.legs[1].span[0] - cut.legs[0].span[1]
    area = [leg.width * (high - low) * 1e-6 for leg in cut.legs]
    return PairSection(
        leg=cut.leg,
        plus_mm=cut.plus,
        minus_mm=cut.minus,
        hop=cut.hop,
        layer=cut.layer,
        start=cut.start,
        end=cut.end,
        width_plus_mm=width.get("plus", math.nan),
        width_minus_mm=width.get("minus", math.nan),
        gap_mm=gap,
        thickness_mm=high - low,
        C=matrices.C,
        L=matrices.L,
        R=np.array([COPPER_OHM_M / a if a > 0 else math.nan for a in area]),
        loss=matrices.loss,
        skin=matrices.skin,
        impedance_diff_ohm=matrices.diff,
        impedance_common_ohm=matrices.common,
        delay=matrices.delay,
        planes=tuple(k for k, _ in cut.planes),
        neighbours=cut.beside_nets,
        coupling=matrices.coupling,
        drawing=Drawing(heights=heights, layer=cut.layer, legs=cut.legs, beside=cut.beside, planes=cut.planes),
    )
