"""What changes along a pair: its pieces, the gap, the running difference of the lengths, the impedance."""

from __future__ import annotations

import numpy as np

from pairrules.balance.pair_electrical import PairSection
from pairrules.board.columns import Floats
from pairrules.drawing import DrawnPiece, ImpedanceStretch, RunningDifference, SpacingStretch
from pairrules.drawn.plain_shapes import point
from pairrules.drawn.window_copper import known
from pairrules.geometry.curves import nearest
from pairrules.geometry.nearest_track import curves_of
from pairrules.geometry.pair_geometry import BARREL, JOIN, SERIES, TRACK, LegRoute, Pieces, SpacingProfile

_KINDS = {TRACK: "track", JOIN: "join", BARREL: "barrel", SERIES: "series"}
_SAME_MM = 1e-6


def drawn_pieces(pieces: Pieces) -> tuple[DrawnPiece, ...]:
    """A leg's route piece by piece."""
    along = _length_before(pieces)
    return tuple(
        DrawnPiece(
            kind=_KINDS[int(pieces.kind[row])],
            start=point(pieces.start[row]),
            end=point(pieces.end[row]),
            centre=point(pieces.centre[row]) if pieces.sweep[row] != 0.0 else None,
            sweep_rad=float(pieces.sweep[row]),
            width_mm=known(pieces.width[row]),
            layer=int(pieces.layer[row]),
            length_mm=known(pieces.length[row]),
            along_mm=float(along[row]),
        )
        for row in range(len(pieces))
    )


def spacing(profile: SpacingProfile) -> tuple[SpacingStretch, ...]:
    """The gap along a leg."""
    return tuple(
        SpacingStretch(
            from_mm=float(profile.s_from[row]),
            to_mm=float(profile.s_to[row]),
            gap_from_mm=known(profile.gap_from[row]),
            gap_mid_mm=known(profile.gap_mid[row]),
            gap_to_mm=known(profile.gap_to[row]),
            coupled=bool(profile.coupled[row]),
            layer=int(profile.layer[row]),
            start=point(profile.start[row]),
            end=point(profile.end[row]),
        )
        for row in range(len(profile))
    )


def running_difference(plus: LegRoute, minus: LegRoute, profile: SpacingProfile) -> tuple[RunningDifference, ...]:
    """Plus's length less minus's, at both ends of every stretch of plus along which minus runs beside it.

    A point of plus is set against the point of minus nearest to it, each leg counted from its own source end; the first
    row is the source end, the last the load's.
    """
    rows = np.flatnonzero(profile.coupled)
    before_plus, before_minus = _length_before(plus.pieces), _length_before(minus.pieces)
    own, other = curves_of(plus.pieces), curves_of(minus.pieces)
    found = [
        RunningDifference(along_mm=0.0, difference_mm=0.0, layer=int(plus.pieces.layer[0]), at=point(own.start[0]))
    ]
    ends: list[tuple[Floats, Floats, Floats]] = []
    for at in (profile.start[rows], profile.end[rows]):
        reached: list[Floats] = []
        for curves, pieces, before, of in (
            (own, plus.pieces, before_plus, profile.piece[rows]),
            (other, minus.pieces, before_minus, profile.other[rows]),
        ):
            t, _ = nearest(curves.take(of), at)
            reached.append(before[of] + t * pieces.length[of])
        ends.append((at, reached[0], reached[0] - reached[1]))
    for i, row in enumerate(rows.tolist()):
        for at, along, difference in ends:
            new = RunningDifference(
                along_mm=float(along[i]),
                difference_mm=float(difference[i]),
                layer=int(profile.layer[row]),
                at=point(at[i]),
            )
            last = found[-1]
            if abs(new.along_mm - last.along_mm) > _SAME_MM or abs(new.difference_mm - last.difference_mm) > _SAME_MM:
                found.append(new)
    found.append(
        RunningDifference(
            along_mm=plus.length_mm,
            difference_mm=plus.length_mm - minus.length_mm,
            layer=int(plus.pieces.layer[-1]),
            at=point(own.end[-1]),
        )
    )
    return tuple(found)


def impedance_along(sections: tuple[PairSection, ...]) -> tuple[ImpedanceStretch, ...]:
    """The solved sections from source to load."""
    return tuple(
        ImpedanceStretch(
            leg=section.leg,
            layer=section.layer,
            plus_from_mm=section.plus_mm[0],
            plus_to_mm=section.plus_mm[1],
            minus_from_mm=section.minus_mm[0],
            minus_to_mm=section.minus_mm[1],
            diff_ohm=section.impedance_diff_ohm,
            common_ohm=section.impedance_common_ohm,
            gap_mm=known(section.gap_mm),
            width_plus_mm=known(section.width_plus_mm),
            width_minus_mm=known(section.width_minus_mm),
            capacitance_tilt=section.capacitance_tilt,
            start=point(section.start),
            end=point(section.end),
        )
        for section in sections
    )


def _length_before(pieces: Pieces) -> Floats:
    """Length [mm] of the leg before each piece, barrels of unknown height left out."""
    length = np.nan_to_num(pieces.length)
    before: Floats = np.cumsum(length) - length
    return before
