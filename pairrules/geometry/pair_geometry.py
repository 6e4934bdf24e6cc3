"""Everything measured on the copper of one link, in the form rules and reports use. Lengths in mm."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairrules.board.columns import Bools, Floats, Ints, freeze

if TYPE_CHECKING:
    from pairrules.geometry.neighbours import NeighbourProfile
    from pairrules.geometry.reference_cover import Cover

TRACK, JOIN, BARREL, SERIES = 0, 1, 2, 3
"""Kinds of a route's pieces: drawn track; a straight join inside a pad or an area; a via's barrel; a part in series."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Pieces:
    """A leg's route from source to load as columns of k rows, each piece beginning where the one before ends.

    Parameters
    ----------
    start, end, centre, sweep: as in `Tracks`, seen from above (a barrel starts and ends at one place).
    width: [mm], NaN unless the kind is TRACK. layer: index into `Board.copper`; of a barrel the layer it leaves by.
    kind: TRACK, JOIN, BARREL or SERIES.
    length: [mm] what the piece adds to the leg's length (0 for SERIES; NaN for a barrel of unknown height).
    """

    start: Floats
    end: Floats
    centre: Floats
    sweep: Floats
    width: Floats
    layer: Ints
    kind: Ints
    length: Floats

    def __post_init__(self) -> None:
        freeze(
            self,
            {
                "start": (np.float64, (2,)),
                "end": (np.float64, (2,)),
                "centre": (np.float64, (2,)),
                "sweep": (np.float64, ()),
                "width": (np.float64, ()),
                "layer": (np.int64, ()),
                "kind": (np.int64, ()),
                "length": (np.float64, ()),
            },
        )

    def __len__(self) -> int:
        return len(self.kind)


@dataclass(frozen=True, slots=True, kw_only=True)
class Stub:
    """Track branching off the route: length of one connected branch, and where it leaves the route (layer, x, y)."""

    length_mm: float
    layer: int
    x_mm: float
    y_mm: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ViaUse:
    """A via the route passes: row in `Board.vias` (−1 for a plated pin hole), place, layers entered and left by."""

    via: int
    x_mm: float
    y_mm: float
    enter: int
    leave: int


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LegRoute:
    """One leg.

    Parameters
    ----------
    pieces: source first. length_mm: sum of `pieces.length`, barrels of unknown height left out.
    barrels_known: false where one was left out. track_mm: length of the TRACK pieces alone.
    vias: in order. stubs: longest first. width_mm: length-weighted median width; `None` without track.
    widths: ((width_mm, length_mm), ...) narrowest first. layers: ((layer, track length_mm), ...) top first.
    stub_mm: their sum.
    """

    pieces: Pieces
    length_mm: float
    barrels_known: bool
    track_mm: float
    vias: tuple[ViaUse, ...]
    stubs: tuple[Stub, ...]
    stub_mm: float
    width_mm: float | None
    widths: tuple[tuple[float, float], ...]
    layers: tuple[tuple[int, float], ...]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SpacingProfile:
    """Distance from one leg's tracks to the other leg, along the leg, as stretches (columns of k rows, in order of s).

    Parameters
    ----------
    s_from, s_to: [mm] track length from the source end (barrels, joins and series parts take none).
    piece: row of this leg's `Pieces`. other: row of the other leg's `Pieces` that is nearest; −1 where the other leg
        has no track on this layer.
    gap_from, gap_mid, gap_to: [mm] edge to edge at both ends and the middle; NaN where `other` is −1.
    angle: [rad] between the directions at the middle, 0 to π/2; NaN where `other` is −1.
    coupled: whether the other leg runs beside it there (same layer, within reach, turned less than 30 degrees).
    start, end: (k, 2) [mm] the stretch's ends on the board. layer: index into `Board.copper`.
    """

    s_from: Floats
    s_to: Floats
    piece: Ints
    other: Ints
    gap_from: Floats
    gap_mid: Floats
    gap_to: Floats
    angle: Floats
    coupled: Bools
    start: Floats
    end: Floats
    layer: Ints

    def __post_init__(self) -> None:
        freeze(
            self,
            {
                "s_from": (np.float64, ()),
                "s_to": (np.float64, ()),
                "piece": (np.int64, ()),
                "other": (np.int64, ()),
                "gap_from": (np.float64, ()),
                "gap_mid": (np.float64, ()),
                "gap_to": (np.float64, ()),
                "angle": (np.float64, ()),
                "coupled": (np.bool_, ()),
                "start": (np.float64, (2,)),
                "end": (np.float64, (2,)),
                "layer": (np.int64, ()),
            },
        )

    def __len__(self) -> int:
        return len(self.piece)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PairGeometry:
    """Both legs of a link and what lies between them.

    Parameters
    ----------
    routed: "complete" (both legs end to end), "partial" (a leg is broken), "none" (no copper on either leg).
    plus, minus: the legs; `None` where a leg is broken.
    profile_plus, profile_minus: each leg's spacing to the other; `None` unless both legs are complete.
    reach_mm: within which a leg counts as beside the other.
    gap_min_mm, gap_median_mm, gap_max_mm, coupled_mm, apart_mm, loop_area_mm2, net_loop_area_mm2,
    reference_uncovered_mm: as in the glossary; `None` where unknown.
    cover_plus, cover_minus: reference copper along each leg. neighbours_plus, neighbours_minus: foreign copper beside
        each leg on its own layer. `None` unless both legs are complete.
    broken: places where a leg breaks off, as (leg, layer, x_mm, y_mm).
    missing: why a figure is unknown, one sentence each.
    unseen: why what was measured is not all there is of the pair, so that it cannot be called good; "" where it is.
    """

    routed: str
    plus: LegRoute | None
    minus: LegRoute | None
    profile_plus: SpacingProfile | None = None
    profile_minus: SpacingProfile | None = None
    reach_mm: float | None = None
    gap_min_mm: float | None = None
    gap_median_mm: float | None = None
    gap_max_mm: float | None = None
    coupled_mm: float | None = None
    apart_mm: float | None = None
    loop_area_mm2: float | None = None
    net_loop_area_mm2: float | None = None
    reference_uncovered_mm: float | None = None
    cover_plus: Cover | None = None
    cover_minus: Cover | None = None
    neighbours_plus: NeighbourProfile | None = None
    neighbours_minus: NeighbourProfile | None = None
    broken: tuple[tuple[str, int, float, float], ...] = ()
    missing: tuple[str, ...] = ()
    unseen: str = ""
