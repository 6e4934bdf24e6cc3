"""A pair as a row of sections from source to load, each with the solved matrices of its cross-section."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from pairrules.balance.drawn_section import draw
from pairrules.balance.leg_stretches import stretches
from pairrules.balance.pair_electrical import PairSection
from pairrules.balance.sampled_cuts import Cut, cuts_of, with_copper
from pairrules.balance.section_store import Store, solved
from pairrules.balance.stack_heights import Heights
from pairrules.board.columns import Floats
from pairrules.fields.cross_section import CrossSection
from pairrules.fields.loss import COPPER_OHM_M, SkinIntegrals, skin_integrals
from pairrules.fields.solve import SectionSolution
from pairrules.geometry.cross_cut import CrossCuts
from pairrules.geometry.pair_geometry import LegRoute, PairGeometry

SPEED_OF_LIGHT = 299792458.0
_BORROWED_SHARE = 0.05
"""Up to this share of the route may take over the section beside it where its own cannot be solved."""


class UnsolvableError(Exception):
    """A pair's sections cannot be solved; the sentence says why."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Matrices:
    C: Floats
    L: Floats
    loss: Floats
    diff: float | None
    common: float | None
    delay: float
    skin: SkinIntegrals | None
    coupling: tuple[tuple[float, ...], ...]


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
    drawn = [draw(heights, cut.layer, cut.legs, cut.beside, dict(cut.planes)) for cut in cuts]
    found: list[_Matrices | str] = [_solved(section, store) for section in drawn]
    _borrow(cuts, found, plus, minus, layers)
    return _joined(cuts, drawn, found, heights)


def _breaks(geometry: PairGeometry) -> tuple[Floats, Floats]:
    return tuple(  # type: ignore[return-value]
        np.zeros(0) if cover is None else np.concatenate([cover.s_from, cover.s_to])
        for cover in (geometry.cover_plus, geometry.cover_minus)
    )


def _solved(section: CrossSection, store: Store) -> _Matrices | str:
    try:
        solution = solved(section, store)
    except ValueError as error:
        return str(error)
    return _of_pair(solution) if solution.pair is not None else _of_one(solution)


def _of_pair(solution: SectionSolution) -> _Matrices | str:
    pair = solution.pair
    if pair is None or pair.L is None or pair.impedance_common_ohm is None:
        return "no copper that could be its reference lies above or below it"
    signals = solution.section.signals
    loss = solution.G_per_omega[np.ix_(signals, signals)]
    delay = math.sqrt(pair.er_odd) / SPEED_OF_LIGHT
    return _Matrices(
        C=pair.C,
        L=pair.L,
        loss=loss,
        diff=pair.impedance_diff_ohm,
        common=pair.impedance_common_ohm,
        delay=delay,
        skin=skin_integrals(solution),
        coupling=_coupling(solution),
    )


def _of_one(solution: SectionSolution) -> _Matrices | str:
    leg = solution.section.signals[0]
    C, air = float(solution.C[leg, leg]), float(solution.Cair[leg, leg])
    if not air > 1e-13:
        return "no copper that could be its reference lies above or below it"
    L = 1.0 / (SPEED_OF_LIGHT**2 * air)
    loss = solution.G_per_omega[leg : leg + 1, leg : leg + 1]
    return _Matrices(
        C=np.array([[C]]),
        L=np.array([[L]]),
        loss=loss,
        diff=None,
        common=None,
        delay=math.sqrt(L * C),
        skin=None,
        coupling=_coupling(solution),
    )


def _coupling(solution: SectionSolution) -> tuple[tuple[float, ...], ...]:
    signals = solution.section.signals
    others = [i for i in range(len(solution.section.conductors)) if i not in signals]
    return tuple(tuple(-float(solution.C[i, leg]) for leg in signals) for i in others)


def _length(cut: Cut) -> float:
    return max(cut.plus[1] - cut.plus[0], cut.minus[1] - cut.minus[0])


def _borrow(
    cuts: list[Cut], found: list[_Matrices | str], plus: LegRoute, minus: LegRoute, layers: tuple[str, ...]
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
    cuts: list[Cut], drawn: list[CrossSection], found: list[_Matrices | str], heights: Heights
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


def _section(cut: Cut, matrices: _Matrices, heights: Heights) -> PairSection:
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
    )
