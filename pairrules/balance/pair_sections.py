"""A pair as a row of sections from source to load, each with the solved matrices of its cross-section."""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import pairwise

import numpy as np

from pairrules.balance.drawn_section import GRID_MM, Drawing, Leg, beside_steps, draw_steps
from pairrules.balance.leg_stretches import stretches
from pairrules.balance.met_copper import Beside
from pairrules.balance.pair_electrical import PairSection
from pairrules.balance.sampled_cuts import BOTH, LEGS, Cuts, cuts_of
from pairrules.balance.section_store import SectionMatrices, Store, solved
from pairrules.balance.stack_heights import Heights
from pairrules.board.columns import Floats
from pairrules.fields.cross_section import CrossSection
from pairrules.fields.loss import COPPER_OHM_M
from pairrules.geometry.pair_geometry import PairGeometry

_BORROWED_SHARE = 0.05
"""Up to this share of the route may take over the section beside it where its own cannot be solved."""


class UnsolvableError(Exception):
    """A pair's sections cannot be solved; the sentence says why."""


def pair_cuts(geometry: PairGeometry) -> Cuts | None:
    """Where a pair is cut across; `None` unless both legs are complete."""
    plus, minus, profile = geometry.plus, geometry.minus, geometry.profile_plus
    if plus is None or minus is None or profile is None:
        return None
    runs = stretches(plus.pieces, minus.pieces, profile)
    return cuts_of(plus.pieces, minus.pieces, profile, runs, _breaks(geometry))


def pair_sections(
    cuts: Cuts,
    beside: Sequence[Beside],
    heights: Heights,
    *,
    track_mm: float,
    layers: tuple[str, ...],
    store: Store,
) -> tuple[PairSection, ...]:
    """The sections of a pair, in order from source to load.

    Parameters
    ----------
    beside: what each cut meets. track_mm: length of the longer leg. layers: names of the copper layers, for messages.
    store: sections solved so far; added to.

    Raises
    ------
    UnsolvableError: where more than a twentieth of the route has no copper that could be its reference.
    """
    drawn = _drawn(cuts, beside, heights)
    # Cuts that are alike share one section, and a section's hash takes its time.
    known = {key: solved(section, store) for key, section in {id(section): section for section in drawn}.items()}
    found = [known[id(section)] for section in drawn]
    _borrow(cuts, found, track_mm, layers)
    return _joined(cuts, beside, drawn, found, heights)


def _breaks(geometry: PairGeometry) -> tuple[Floats, Floats]:
    return tuple(  # type: ignore[return-value]
        np.zeros(0) if cover is None else np.concatenate([cover.s_from, cover.s_to])
        for cover in (geometry.cover_plus, geometry.cover_minus)
    )


def _drawn(cuts: Cuts, beside: Sequence[Beside], heights: Heights) -> list[CrossSection]:
    """The section of each cut."""
    legs = np.rint(cuts.spans / GRID_MM).tolist()
    found = []
    for leg, layer, spans, met in zip(cuts.leg.tolist(), cuts.layer.tolist(), legs, beside, strict=True):
        named = tuple((name, int(low), int(high)) for name, (low, high) in zip(_names(leg), spans, strict=False))
        found.append(draw_steps(heights, layer, named, beside_steps(met.spans), met.planes))
    return found


def _names(leg: int) -> tuple[str, ...]:
    return LEGS[:BOTH] if leg == BOTH else (LEGS[leg],)


def _borrow(cuts: Cuts, found: list[SectionMatrices | str], track_mm: float, layers: tuple[str, ...]) -> None:
    """Cuts that cannot be solved take over the nearest solved one of their leg, where they are a small share."""
    lost = [i for i, matrices in enumerate(found) if isinstance(matrices, str)]
    if not lost:
        return
    length = np.maximum(cuts.plus[:, 1] - cuts.plus[:, 0], cuts.minus[:, 1] - cuts.minus[:, 0])
    if math.fsum(length[lost].tolist()) > _BORROWED_SHARE * track_mm:
        x, y = cuts.start[lost[0]]
        where = f"on {layers[cuts.layer[lost[0]]]} at ({x:.3f}, {y:.3f}) mm"
        raise UnsolvableError(f"the cross-section {where} cannot be solved: {found[lost[0]]}")
    for i in lost:
        alike = [k for k in range(len(cuts)) if k not in lost and cuts.leg[k] == cuts.leg[i]]
        if not alike:
            raise UnsolvableError(f"no cross-section of {LEGS[cuts.leg[i]]} can be solved: {found[i]}")
        found[i] = found[min(alike, key=lambda k: (abs(k - i), k))]


def _joined(
    cuts: Cuts,
    beside: Sequence[Beside],
    drawn: Sequence[CrossSection],
    found: Sequence[SectionMatrices | str],
    heights: Heights,
) -> tuple[PairSection, ...]:
    """Neighbouring cuts with the same section as one."""
    meets = np.ones(len(cuts), dtype=np.bool_)
    meets[:1] = False
    for column in (cuts.leg, cuts.hop, cuts.layer):
        meets[1:] &= column[1:] == column[:-1]
    for along in (cuts.plus, cuts.minus):
        meets[1:] &= np.abs(along[:-1, 1] - along[1:, 0]) < 1e-5
    first = [i for i, joins in enumerate(meets.tolist()) if not (joins and drawn[i] == drawn[i - 1])]
    sections = []
    for i, after in pairwise([*first, len(cuts)]):
        matrices = found[i]
        if not isinstance(matrices, str):
            sections.append(_section(cuts, i, after - 1, beside[i], matrices, heights))
    return tuple(sections)


def _section(
    cuts: Cuts, first: int, last: int, beside: Beside, matrices: SectionMatrices, heights: Heights
) -> PairSection:
    """The section of the cuts from first to last."""
    leg, layer = int(cuts.leg[first]), int(cuts.layer[first])
    low, high = heights.copper[layer]
    legs = tuple(
        Leg(name=name, centre=centre, width=width)
        for name, centre, width in zip(
            _names(leg), cuts.centre[first].tolist(), cuts.width[first].tolist(), strict=False
        )
    )
    width = {one.name: one.width for one in legs}
    gap = legs[1].span[0] - legs[0].span[1] if leg == BOTH else math.nan
    area = [one.width * (high - low) * 1e-6 for one in legs]
    return PairSection(
        leg=LEGS[leg],
        plus_mm=(float(cuts.plus[first, 0]), float(cuts.plus[last, 1])),
        minus_mm=(float(cuts.minus[first, 0]), float(cuts.minus[last, 1])),
        hop=int(cuts.hop[first]),
        layer=layer,
        start=_xy(cuts.start[first]),
        end=_xy(cuts.end[last]),
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
        planes=tuple(k for k, _ in beside.planes),
        neighbours=beside.nets,
        coupling=matrices.coupling,
        drawing=Drawing(heights=heights, layer=layer, legs=legs, beside=beside.spans, planes=beside.planes),
    )


def _xy(point: Floats) -> tuple[float, float]:
    return float(point[0]), float(point[1])
