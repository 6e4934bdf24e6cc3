"""Cuts the outlines of a cross-section into straight pieces, each with one dielectric on either side.

Every outline (copper, planes, edges of slabs and patches) is cut where another one touches or crosses it; what lies in
copper, doubles another piece, or parts equal dielectrics is dropped. Points are complex numbers x + iy.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from pairrules.fields.cross_section import CrossSection, signed_area

Complexes = npt.NDArray[np.complex128]
Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]
Bools = npt.NDArray[np.bool_]

INTERFACE = -2
PLANE = -1
_TOUCH = 1e-9  # two points nearer than this share of the section's size are one
_FURTHER = 100.0  # how much further half-infinite planes are followed than interfaces, where no whole plane is
_BESIDE = 1e-6  # how far beside a piece, as a share of the section's size, the dielectric is looked up


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Region:
    """What lies between two neighbouring infinite planes (or beyond the last one), in units of `scale`.

    section: the section. members: places of the conductors that lie here. bottom, top: heights of the bounding planes
    [scale], `None` where there is none. scale: mm in one unit of length. reach: how far open interfaces and planes are
    followed to either side [scale].
    """

    section: CrossSection
    members: tuple[int, ...]
    bottom: float | None
    top: float | None
    scale: float
    x_range: tuple[float, float]
    reach: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Pieces:
    """Straight pieces of boundary, k of them.

    start, end: complex (k,). owner: place of the conductor, PLANE or INTERFACE (k,). left, right: relative permittivity
    on the left and right of the way from start to end; complex, ε(1 − i tan δ); NaN within copper. far: whether the end
    stands for infinity, (k, 2). contacts: what touches at 0 V, two by two: places of conductors, PLANE.
    """

    start: Complexes
    end: Complexes
    owner: Ints
    left: Complexes
    right: Complexes
    far: Bools
    contacts: tuple[tuple[int, int], ...] = ()

    def of(self, which: Ints | Bools) -> Pieces:
        """Some of them."""
        return Pieces(
            start=self.start[which],
            end=self.end[which],
            owner=self.owner[which],
            left=self.left[which],
            right=self.right[which],
            far=self.far[which],
            contacts=self.contacts,
        )


def pieces_of(region: Region) -> Pieces:
    """Cut the outlines of a region.

    Raises
    ------
    ValueError: where conductors overlap or touch that must not: each of them would need two potentials at once.
    """
    start, end, owner = _outlines(region)
    start, end, owner = _cut(start, end, owner, region)
    contacts = _contacts(start, end, owner, region)
    start, end, owner = _without_doubles(start, end, owner)
    return _with_dielectrics(start, end, owner, region, contacts)


def permittivity_at(region: Region, points: Complexes) -> Complexes:
    """Relative permittivity ε(1 − i tan δ) at points [scale], as if no copper were there."""
    section, scale = region.section, region.scale
    found = np.ones(points.shape, dtype=np.complex128)
    for layer in section.layers:
        inside = (points.imag > layer.y0 / scale) & (points.imag < layer.y1 / scale)
        found[inside] = layer.er * (1 - 1j * layer.loss_tangent)
    for patch in section.patches:
        corners = np.array(patch.polygon) / scale
        found[_inside(points, corners[:, 0] + 1j * corners[:, 1])] = patch.er * (1 - 1j * patch.loss_tangent)
    return found


def _outlines(region: Region) -> tuple[Complexes, Complexes, Ints]:
    section, scale = region.section, region.scale
    starts: list[complex] = []
    ends: list[complex] = []
    owners: list[int] = []

    def add(points: list[complex], owner: int, *, closed: bool) -> None:
        following = [*points[1:], points[0]] if closed else points[1:]
        starts.extend(points if closed else points[:-1])
        ends.extend(following)
        owners.extend([owner] * len(following))

    left, right = region.x_range[0] - region.reach, region.x_range[1] + region.reach
    further = _FURTHER * region.reach if region.bottom is None and region.top is None else 0.0
    for place in region.members:
        conductor = section.conductors[place]
        if conductor.strip is not None:
            x0, x1, y = (value / scale for value in conductor.strip)
            add([complex(x0, y), complex(x1, y)], place, closed=False)
        elif conductor.polygon is not None:
            add(_corners(conductor.polygon, scale), place, closed=True)
    for plane in section.planes:
        if plane.infinite or not _within(plane.y / scale, region):
            continue
        for x0, x1 in plane.intervals or ():
            a, b = max(x0 / scale, left), min(x1 / scale, right)
            if a < b:
                # without a whole plane the charge on a half-infinite one fades slowly
                points = [a, b]
                if further and a == left:
                    points.insert(0, a - further)
                if further and b == right:
                    points.append(b + further)
                add([complex(x, plane.y / scale) for x in points], PLANE, closed=False)
    for y in sorted({edge / scale for layer in section.layers for edge in (layer.y0, layer.y1)}):
        if _within(y, region):
            add([complex(left, y), complex(right, y)], INTERFACE, closed=False)
    for patch in section.patches:
        add(_corners(patch.polygon, scale), INTERFACE, closed=True)
    start, end = np.array(starts, dtype=np.complex128), np.array(ends, dtype=np.complex128)
    keep = np.abs(end - start) > _TOUCH
    return start[keep], end[keep], np.array(owners, dtype=np.int64)[keep]


def _corners(polygon: tuple[tuple[float, float], ...], scale: float) -> list[complex]:
    ordered = polygon if signed_area(polygon) > 0.0 else tuple(reversed(polygon))
    return [complex(x / scale, y / scale) for x, y in ordered]


def _within(y: float, region: Region) -> bool:
    above = region.bottom is None or y > region.bottom + _TOUCH
    return above and (region.top is None or y < region.top - _TOUCH)


def _cut(start: Complexes, end: Complexes, owner: Ints, region: Region) -> tuple[Complexes, Complexes, Ints]:
    way = end - start
    length = np.abs(way)
    unit = way / length
    cuts_of: list[Ints] = [np.arange(len(start)), np.arange(len(start))]
    cuts_at: list[Floats] = [np.zeros(len(start)), length.copy()]
    for points in (start, end):  # an end of another outline that lies on this one
        offset = (points[None, :] - start[:, None]) * unit.conj()[:, None]
        on, which = np.nonzero(
            (np.abs(offset.imag) < _TOUCH) & (offset.real > _TOUCH) & (offset.real < length[:, None] - _TOUCH)
        )
        cuts_of.append(on)
        cuts_at.append(offset.real[on, which])
    turn = _cross(unit[:, None], unit[None, :])
    slanted = np.abs(turn) > _TOUCH
    apart = start[None, :] - start[:, None]
    safe = np.where(slanted, turn, 1.0)
    along, across = _cross(apart, unit[None, :]) / safe, _cross(apart, unit[:, None]) / safe
    crossing = slanted & (along > _TOUCH) & (along < length[:, None] - _TOUCH)
    crossing &= (across > _TOUCH) & (across < length[None, :] - _TOUCH)
    on, which = np.nonzero(crossing)
    _refuse_crossings(region, owner[on], owner[which])
    for bound in (region.bottom, region.top):  # edges of patches that reach through a bounding plane
        if bound is not None:
            run = np.where(np.abs(unit.imag) > _TOUCH, unit.imag, np.inf)
            at = (bound - start.imag) / run
            hit = np.nonzero((at > _TOUCH) & (at < length - _TOUCH))[0]
            cuts_of.append(hit)
            cuts_at.append(at[hit])
    cuts_of.append(on)
    cuts_at.append(along[on, which])
    of, at = np.concatenate(cuts_of), np.concatenate(cuts_at)
    order = np.lexsort((at, of))
    of, at = of[order], at[order]
    new = (of[1:] == of[:-1]) & (at[1:] - at[:-1] > _TOUCH)
    of, a, b = of[:-1][new], at[:-1][new], at[1:][new]
    first = np.where(a == 0.0, start[of], start[of] + a * unit[of])
    last = np.where(b == length[of], end[of], start[of] + b * unit[of])
    middle = (first.imag + last.imag) / 2
    here = np.ones(len(of), dtype=np.bool_)
    if region.bottom is not None:
        here &= middle > region.bottom + _TOUCH
    if region.top is not None:
        here &= middle < region.top - _TOUCH
    return first[here], last[here], owner[of][here]


def _refuse_crossings(region: Region, one: Ints, other: Ints) -> None:
    for a, b in sorted(set(zip(one.tolist(), other.tolist(), strict=True))):
        if INTERFACE not in {a, b} and a != b:
            _refuse_contact(region, a, b)
        if a == b and a >= 0:
            raise ValueError(f"the outline of conductor {region.section.conductors[a].name!r} crosses itself")


def _refuse_contact(region: Region, one: int, other: int) -> None:
    conductors = region.section.conductors
    grounded = [place == PLANE or conductors[place].role == "grounded" for place in (one, other)]
    if not all(grounded):
        names = [f"conductor {conductors[place].name!r}" if place >= 0 else "a plane" for place in (one, other)]
        raise ValueError(f"{max(names)} and {min(names)} touch")


def _contacts(start: Complexes, end: Complexes, owner: Ints, region: Region) -> set[tuple[int, int]]:
    """Which conductors and planes share a point of their outlines."""
    copper = np.nonzero(owner != INTERFACE)[0]
    points, whose = np.concatenate((start[copper], end[copper])), np.concatenate((owner[copper], owner[copper]))
    near = np.abs(points[:, None] - points[None, :]) < 2 * _TOUCH
    one, other = np.nonzero(near & (whose[:, None] < whose[None, :]))
    found = set(zip(whose[one].tolist(), whose[other].tolist(), strict=True))
    for bound in (region.bottom, region.top):
        if bound is not None:
            for place in region.members:  # a piece that lies in the plane is gone already, so the conductor is asked
                heights = np.array(region.section.conductors[place].y_range) / region.scale
                if np.min(np.abs(heights - bound)) < 2 * _TOUCH:
                    found.add((PLANE, place))
    for a, b in sorted(found):
        _refuse_contact(region, a, b)
    return found


def _without_doubles(start: Complexes, end: Complexes, owner: Ints) -> tuple[Complexes, Complexes, Ints]:
    if not len(start):
        return start, end, owner
    middle, half = (start + end) / 2, (end - start) / 2
    same = np.abs(middle[:, None] - middle[None, :]) < 2 * _TOUCH
    same &= np.minimum(np.abs(half[:, None] - half[None, :]), np.abs(half[:, None] + half[None, :])) < 2 * _TOUCH
    first = np.argmax(same, axis=1)  # copper stands before planes, planes before interfaces
    keep = first == np.arange(len(start))
    return start[keep], end[keep], owner[keep]


def _with_dielectrics(
    start: Complexes, end: Complexes, owner: Ints, region: Region, contacts: set[tuple[int, int]]
) -> Pieces:
    way = end - start
    length = np.abs(way)
    middle = (start + end) / 2
    beside = 1j * way / length * np.minimum(_BESIDE, 0.01 * length)
    both = np.concatenate((middle + beside, middle - beside))
    epsilon = permittivity_at(region, both)
    copper = np.full(both.shape, -1, dtype=np.int64)
    for place in region.members:
        polygon = region.section.conductors[place].polygon
        if polygon is not None:
            corners = np.array(polygon) / region.scale
            inside = _inside(both, corners[:, 0] + 1j * corners[:, 1])
            if np.any(inside & (copper >= 0)):
                _refuse_contact(region, place, int(copper[inside & (copper >= 0)][0]))
            copper[inside] = place
    epsilon[copper >= 0] = np.nan
    left, right = epsilon[: len(start)], epsilon[len(start) :]
    within_left, within_right = copper[: len(start)], copper[len(start) :]
    for piece in np.nonzero((owner != INTERFACE) & ((within_left >= 0) | (within_right >= 0)))[0].tolist():
        for other in {int(within_left[piece]), int(within_right[piece])} - {-1, int(owner[piece])}:
            _refuse_contact(region, int(owner[piece]), other)
            contacts.add((int(owner[piece]), other))
    solid = np.array([c.polygon is not None for c in region.section.conductors], dtype=np.bool_)
    is_solid = (owner >= 0) & solid[np.maximum(owner, 0)]
    buried = np.isnan(left) & np.isnan(right)
    drop = buried | (is_solid & np.isnan(right))
    drop |= (owner == INTERFACE) & (np.isnan(left) | np.isnan(right) | (left == right))
    edges = (region.x_range[0] - region.reach, region.x_range[1] + region.reach)
    far = np.stack([(p.real <= edges[0]) | (p.real >= edges[1]) for p in (start, end)], axis=1)
    keep = ~drop
    return Pieces(
        start=start[keep],
        end=end[keep],
        owner=owner[keep],
        left=left[keep],
        right=right[keep],
        far=far[keep],
        contacts=tuple(sorted(contacts)),
    )


def _cross(a: Complexes, b: Complexes) -> Floats:
    return a.real * b.imag - a.imag * b.real


def _inside(points: Complexes, corners: Complexes) -> Bools:
    """Which points lie in a polygon (crossings of the ray to +x, even and odd)."""
    following = np.roll(corners, -1)
    x, y = points.real[:, None], points.imag[:, None]
    ya, yb = corners.imag[None, :], following.imag[None, :]
    straddles = (ya > y) != (yb > y)
    rise = np.where(yb == ya, 1.0, yb - ya)
    at = corners.real[None, :] + (y - ya) * (following.real - corners.real)[None, :] / rise
    odd: Bools = np.count_nonzero(straddles & (x < at), axis=1) % 2 == 1
    return odd
