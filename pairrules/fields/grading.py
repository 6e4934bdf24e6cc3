"""Divides the pieces of a boundary into cells, fine at corners and near other edges, coarse where little happens.

The wanted cell size at distance ρ from a corner is β ρ^(1−1/p) ℓ^(1/p) up to the corner's own scale ℓ and β ρ beyond,
the algebraic grading x ∝ t^p, p = 3, that suits charge densities ∝ ρ^(−1/2) (strip edge) and ρ^(−1/3) (square copper
corner); the corners of other pieces ask for β d at distance d. A piece's cell count is the integral of one over the
least of these sizes, and the cells divide that integral equally, so a mirrored section gets a mirrored mesh.
Source: algebraic grading for piecewise constant charges on polygons is common practice in boundary elements (p greater
than 3/2 over the exponent of the energy; from memory); the values of β are settled by tests against finite elements.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.fields.boundary import INTERFACE, Bools, Complexes, Floats, Ints, Pieces, Region

_OF_COPPER = 0.75  # β at copper corners in one dielectric
_OF_EDGE = 0.25  # β at the edges of strips and planes
_OF_EDGE_BETWEEN = 0.3  # the same where dielectrics meet
_OF_COPPER_BETWEEN = 0.38  # β at copper corners where dielectrics meet
_OF_INTERFACE = 0.3  # β on an interface that ends at copper
_OF_DIELECTRIC = 0.9  # β at corners where only dielectrics meet
_TO_INTERFACE = 0.6  # times a corner's β: what it asks of other pieces that are interfaces
_LEAST_SHARE = 0.45
_OPEN = 1.2  # how much finer where no whole plane holds the field together
_UNIFORM = 1.35  # how much finer in one dielectric, where copper alone has cells and more is asked of it
_DISTANT = 2.5  # how much coarser at most round the corners of grounded copper, dielectrics far from live copper
_STRAIGHT = 0.75  # corners that turn by less (radians) carry no singular charge worth grading: round outlines
_SAMPLES = 24


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Cells:
    """n cells: start, end complex (n,) [region's scale]; owner, left, right as in `Pieces` (n,)."""

    start: Complexes
    end: Complexes
    owner: Ints
    left: Complexes
    right: Complexes


def cells_of(pieces: Pieces, region: Region, *, refine: float = 1.0, left_of: float | None = None) -> Cells:
    """Grade the pieces, or those left of an axis alone; `refine` multiplies the number of cells."""
    corners, at_start, at_end = _corners(pieces, region)
    divided = _cut_beside_corners(pieces, corners)
    if divided is not pieces:
        pieces = divided
        corners, at_start, at_end = _corners(pieces, region)
    if left_of is not None:
        chosen = np.nonzero(pieces.start.real + pieces.end.real < 2.0 * left_of)[0]
        pieces, at_start, at_end = pieces.of(chosen), at_start[chosen], at_end[chosen]
    s = np.linspace(0.0, 1.0, _SAMPLES + 1)
    way = pieces.end - pieces.start
    length = np.abs(way)
    graded, slope = _two_sided(s)
    x = pieces.start[:, None] + graded[None, :] * way[:, None]
    apart = x[:, :, None] - corners.point[None, None, :]
    square = apart.real**2 + apart.imag**2
    rows = np.arange(len(way))
    foreign = square * (corners.beta * corners.beta)[None, None, :]
    foreign.transpose(0, 2, 1)[~corners.asked_of(pieces)] = np.inf
    foreign[rows, :, at_start] = np.inf
    foreign[rows, :, at_end] = np.inf
    rate = 1.0 / np.sqrt(np.maximum(foreign.min(axis=2, initial=np.inf), 1e-30))
    # cells wanted in a step of the sampling: length over size, in a form that stays smooth down to the corner
    rate[pieces.owner == INTERFACE] /= _TO_INTERFACE
    demand = rate * (length[:, None] * slope[None, :])
    ratio = _slope_ratio(s)
    for end, run, across in ((at_start, graded, ratio), (at_end, 1.0 - graded, ratio[::-1])):
        scale = (corners.reach[end] / length)[:, None]
        beta = np.where(pieces.owner == INTERFACE, corners.beta_interface[end], corners.beta[end])[:, None]
        near = across[None, :] / (beta * np.cbrt(scale))  # dρ / (β ρ^(2/3) ℓ^(1/3))
        beyond = slope[None, :] / (beta * np.maximum(run[None, :], 1e-12))
        own = np.where(run[None, :] < scale, near, beyond)
        own[~corners.sharp[end]] = 0.0
        demand = np.maximum(demand, own)
    demand *= _share(pieces)[:, None]
    if region.bottom is None and region.top is None:
        demand *= _OPEN
    if not np.any(pieces.owner == INTERFACE):
        demand *= _UNIFORM
    if region.bottom is not None and region.top is not None:  # a longer cell would feel more images than are exact
        demand = np.maximum(demand, length[:, None] * slope / (region.top - region.bottom))
    step = 1.0 / _SAMPLES
    running = np.zeros_like(demand)
    np.cumsum((demand[:, 1:] + demand[:, :-1]) * (0.5 * step), axis=1, out=running[:, 1:])
    total = running[:, -1]
    count = np.maximum(np.ceil(total * refine - 1e-6), 1.0).astype(np.int64)
    return _divide(pieces, running, count, s)


def _share(pieces: Pieces) -> Floats:
    """How finely an interface needs to be divided, against one between laminate and air.

    Its charge is in proportion to |ε_l − ε_r|/(ε_l + ε_r), and the error to the cube of the cells.
    """
    share = np.ones(len(pieces.start))
    on = pieces.owner == INTERFACE
    contrast = np.abs(pieces.left[on] - pieces.right[on]) / np.abs(pieces.left[on] + pieces.right[on])
    share[on] = np.clip(np.cbrt(contrast / 0.6), _LEAST_SHARE, 1.0)
    return share


def _cut_beside_corners(pieces: Pieces, corners: _Corners) -> Pieces:
    """Cut long pieces where they pass a corner so closely that sampling them from end to end would miss it."""
    way = pieces.end - pieces.start
    length = np.abs(way)
    offset = (corners.point[None, :] - pieces.start[:, None]) * (way.conj() / length)[:, None]
    along, apart = offset.real, np.abs(offset.imag)
    to_end = np.minimum(along, length[:, None] - along)
    spacing = (4.5 / _SAMPLES) * np.cbrt(np.maximum(to_end, 0.0) ** 2 * length[:, None])
    of, which = np.nonzero(corners.asked_of(pieces) & (to_end > apart + 1e-8) & (apart < spacing))
    if not len(of):
        return pieces
    order = np.lexsort((along[of, which], of))
    of, at, gap = of[order], along[of, which][order], apart[of, which][order]
    opens = np.ones(len(of), dtype=np.bool_)
    opens[1:] = (of[1:] != of[:-1]) | (at[1:] - at[:-1] > np.maximum(gap[1:], gap[:-1]))
    group = np.cumsum(opens) - 1
    middle = np.bincount(group, at) / np.bincount(group)  # corners that lie close together ask for one cut
    of = of[opens]
    source = np.concatenate((np.arange(len(way)), of))
    begin = np.concatenate((np.zeros(len(way)), middle))
    order = np.lexsort((begin, source))
    source, begin = source[order], begin[order]
    first = np.where(begin == 0.0, pieces.start[source], pieces.start[source] + begin * (way / length)[source])
    last = np.empty_like(first)
    last[:-1] = first[1:]
    closes = np.append(source[1:] != source[:-1], True)
    last[closes] = pieces.end[source[closes]]
    far = np.stack((pieces.far[source, 0] & (begin == 0.0), pieces.far[source, 1] & closes), axis=1)
    return Pieces(
        start=first, end=last, owner=pieces.owner[source], left=pieces.left[source], right=pieces.right[source], far=far
    )


def _divide(pieces: Pieces, running: Floats, count: Ints, s: Floats) -> Cells:
    rows = len(count)
    floor = np.concatenate(([0.0], np.cumsum(running[:, -1] + 1.0)))[:-1]
    piece = np.repeat(np.arange(rows), count)
    first = np.repeat(np.cumsum(count) - count, count)
    number = np.arange(len(piece)) - first
    wanted = running[piece, -1] * number / count[piece] + floor[piece]
    place = np.interp(wanted, (running + floor[:, None]).ravel(), (s[None, :] + 2.0 * np.arange(rows)[:, None]).ravel())
    share, _ = _two_sided(place - 2.0 * piece)
    way = pieces.end - pieces.start
    start = pieces.start[piece] + share * way[piece]
    begins = number == 0
    start[begins] = pieces.start[piece[begins]]
    end = np.empty_like(start)
    end[:-1] = start[1:]
    last = number == count[piece] - 1
    end[last] = pieces.end[piece[last]]
    return Cells(start=start, end=end, owner=pieces.owner[piece], left=pieces.left[piece], right=pieces.right[piece])


def _two_sided(t: Floats) -> tuple[Floats, Floats]:
    """The graded share t³/(t³ + (1−t)³) of a piece's length, and its slope."""
    u = 1.0 - t
    below = t**3 + u**3
    return t**3 / below, 3.0 * (t * u) ** 2 / below**2


def _slope_ratio(t: Floats) -> Floats:
    """Slope of `_two_sided` over x^(2/3), in the form that stays exact at t = 0."""
    u = 1.0 - t
    ratio: Floats = 3.0 * u * u / np.cbrt(t**3 + u**3) ** 4
    return ratio


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Corners:
    """k corners: where; β on the pieces that end there, and on interfaces among them; whether sharp; the conductor of
    whose round outline they are part, else −1; their scale ℓ. All (k,).
    """

    point: Complexes
    beta: Floats
    beta_interface: Floats
    sharp: Bools
    smooth: Ints
    reach: Floats

    def asked_of(self, pieces: Pieces) -> Bools:
        """Which corners ask which pieces for small cells: sharp ones all, those of round copper only other things."""
        asks: Bools = self.sharp | ((self.smooth >= 0) & (self.smooth != pieces.owner[:, None]))
        return asks


def _corners(pieces: Pieces, region: Region) -> tuple[_Corners, Ints, Ints]:
    """The corners, and which of them each piece starts and ends at."""
    ends = np.concatenate((pieces.start, pieces.end))
    same = np.abs(ends[:, None] - ends[None, :]) < 1e-8
    kept, number = np.unique(np.argmax(same, axis=1), return_inverse=True)
    corner, at_start, at_end = ends[kept], number[: len(pieces.start)], number[len(pieces.start) :]
    count = len(corner)
    copper = pieces.owner != INTERFACE
    has_copper = np.zeros(count, dtype=np.bool_)
    has_copper[at_start[copper]] = True
    has_copper[at_end[copper]] = True
    far = np.zeros(count, dtype=np.bool_)
    far[at_start[pieces.far[:, 0]]] = True
    far[at_end[pieces.far[:, 1]]] = True
    sheet = copper & ~np.isnan(pieces.left)
    has_sheet, has_interface = np.zeros(count, dtype=np.bool_), np.zeros(count, dtype=np.bool_)
    for chosen, marked in ((sheet, has_sheet), (~copper, has_interface)):
        marked[at_start[chosen]] = True
        marked[at_end[chosen]] = True
    beta = np.select(
        [has_sheet & has_interface, has_sheet, has_copper & has_interface, has_copper],
        [_OF_EDGE_BETWEEN, _OF_EDGE, _OF_COPPER_BETWEEN, _OF_COPPER],
        _OF_DIELECTRIC,
    )
    beta_interface = np.where(has_copper, _OF_INTERFACE, _OF_DIELECTRIC)
    # turning at corners where exactly two pieces of one kind meet head to tail
    way = (pieces.end - pieces.start) / np.abs(pieces.end - pieces.start)
    meeting = np.bincount(at_start, minlength=count) + np.bincount(at_end, minlength=count)
    into = np.full(count, -1, dtype=np.int64)
    out = np.full(count, -1, dtype=np.int64)
    into[at_end] = np.arange(len(way))
    out[at_start] = np.arange(len(way))
    through = (meeting == 2) & (into >= 0) & (out >= 0) & (pieces.owner[into] == pieces.owner[out])
    turn = np.abs(np.angle(way[np.maximum(out, 0)] / way[np.maximum(into, 0)]))
    round_off = through & (turn < _STRAIGHT)
    sharp = ~far & ~round_off
    smooth = np.where(round_off & has_copper & (turn > 1e-6), pieces.owner[np.maximum(into, 0)], -1)
    apart = np.abs(corner[:, None] - corner[None, :])
    np.fill_diagonal(apart, np.inf)
    apart[:, far] = np.inf
    reach = apart.min(axis=1, initial=np.inf)
    # the nearest piece that does not end here
    offset = (corner[:, None] - pieces.start[None, :]) * way.conj()[None, :]
    beyond = np.maximum(np.maximum(-offset.real, offset.real - np.abs(pieces.end - pieces.start)[None, :]), 0.0)
    to_piece = np.hypot(beyond, offset.imag)
    to_piece[:, ~copper] = np.inf
    rows = np.arange(len(way))
    to_piece[at_start, rows] = np.inf
    to_piece[at_end, rows] = np.inf
    reach = np.minimum(reach, to_piece.min(axis=1, initial=np.inf))
    for bound in (region.bottom, region.top):
        if bound is not None:
            gap = np.abs(corner.imag - bound)
            reach = np.minimum(reach, np.where(gap > 1e-9, gap, np.inf))
    coarser = _coarser(corner, region)
    found = _Corners(
        point=corner,
        beta=beta * coarser,
        beta_interface=beta_interface * coarser,
        sharp=sharp,
        smooth=smooth,
        reach=np.where(np.isfinite(reach), reach, 1.0),
    )
    return found, at_start, at_end


def _coarser(point: Complexes, region: Region) -> Floats:
    """How much coarser cells may be round a corner than beside live copper, for its distance from that copper.

    What is wrong there adds to the capacitance of grounded copper, little to that of the legs.
    """
    live = [c for place in region.members if (c := region.section.conductors[place]).role != "grounded"]
    if not live:
        return np.ones(point.shape)
    low_x, high_x = min(c.x_range[0] for c in live) / region.scale, max(c.x_range[1] for c in live) / region.scale
    low_y, high_y = min(c.y_range[0] for c in live) / region.scale, max(c.y_range[1] for c in live) / region.scale
    away = np.hypot(
        np.maximum(np.maximum(low_x - point.real, point.real - high_x), 0.0),
        np.maximum(np.maximum(low_y - point.imag, point.imag - high_y), 0.0),
    )
    coarser: Floats = np.clip(np.sqrt(away / (high_x - low_x)), 1.0, _DISTANT)
    return coarser
