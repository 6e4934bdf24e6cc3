"""Mean potential and flux between straight cells that carry charge, for no, one and two infinite planes.

Two cells have complex centres z_i, z_j and complex lengths d. The potential of a charge spread over cell j, averaged
over cell i, is −1/(2π ε0) times the mean of Re K(z_i − z_j), with K = log z in free space, log z − log z̃ over a plane
at y = 0 (z̃ = z_i − z_j*, the image), and log sinh κz − log sinh κz̃ between planes at y = 0 and y = b, κ = π/(2b) (the
images in both planes summed). The flux through cell i to its left is −Im of the mean of d_i K′, over 2π.

Cells far apart use the means' expansion to second order in d. Near ones, and the images near them, get the exact double
integral: the second antiderivatives of log z and 1/z at the four corners of the parallelogram z ± d_i/2 ± d_j/2,
each corner divided by z so that no corner crosses the logarithm's cut.
Source: images and conformal maps, W. R. Smythe, Static and Dynamic Electricity (from memory); the rest is calculus.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from pairrules.fields.boundary import Complexes, Floats, Ints

_BLOCK = 20000  # pairs worked on at once, few enough to stay in the processor's cache
_BUFFERS = 14
_FAR = 150.0  # beyond this κx the potential between two planes is below any rounding
_NEAR = 1.6  # cells nearer than this times the sum of their lengths are integrated exactly


@dataclass(frozen=True, slots=True, kw_only=True)
class Surroundings:
    """The infinite planes: `grounded` where one lies at y = 0; `height` of the second above it, `None` without."""

    grounded: bool
    height: float | None = None


def interaction(
    centre: Complexes, way: Complexes, copper: int, rows_flux: Ints, around: Surroundings, *, axis: float | None = None
) -> tuple[Floats, Floats]:
    """Mean potentials (times 2π ε0) and fluxes (times 2π ε0) of cells with unit charge.

    Parameters
    ----------
    centre, way: complex (n,): centres of the cells and the way from start to end; y = 0 is the plane, if there is one.
    copper: at how many cells, from the first on, the potential is wanted. rows_flux: the cells where the flux is (k,).
    around: the infinite planes. axis: x of an axis left of which all cells lie, to have what their mirror images bring.

    Returns
    -------
    (sets, copper, n) and (sets, k, n); one set for the cells themselves, a second for their images in the axis.
    """
    way = _squared_up(way)
    count = len(centre)
    cells = _Cells(centre, way)
    sets = [cells] if axis is None else [cells, _Cells(2.0 * axis - centre.conj(), -way.conj())]
    potential = np.empty((len(sets), copper, count))
    flux = np.empty((len(sets), len(rows_flux), count))
    room = np.empty((_BUFFERS, max(_BLOCK, count)))  # fresh memory for every step would cost more than the arithmetic
    for place, charges in enumerate(sets):
        itself = place == 0
        first = 0
        while first < copper:  # the means are symmetric: what lies left of the diagonal is known from above it
            across = count - first
            last = min(first + max(_BLOCK // across, 1), copper)
            space = room[:, : (last - first) * across].reshape(_BUFFERS, last - first, across)
            here = np.arange(last - first) if itself else None
            part = potential[place, first:last, first:]
            _rows(cells.of(slice(first, last)), charges.of(slice(first, None)), here, around, space, part, False)
            potential[place, last:, first:last] = part[:, last - first : copper - first].T
            first = last
        at_once = max(_BLOCK // count, 1)
        for first in range(0, len(rows_flux), at_once):
            rows = rows_flux[first : first + at_once]
            space = room[:, : len(rows) * count].reshape(_BUFFERS, len(rows), count)
            part = flux[place, first : first + at_once]
            _rows(cells.of(rows), charges, rows if itself else None, around, space, part, True)
    return potential, flux


class _Cells(NamedTuple):
    centre: Complexes
    way: Complexes

    def of(self, which: slice | Ints) -> _Cells:
        return _Cells(self.centre[which], self.way[which])


def _squared_up(way: Complexes) -> Complexes:
    """Rounding taken off ways that are level or upright, so that the faster forms for those hold."""
    tiny = 1e-10 * np.abs(way)
    squared: Complexes = np.where(np.abs(way.real) < tiny, 0.0, way.real) + 1j * np.where(
        np.abs(way.imag) < tiny, 0.0, way.imag
    )
    return squared


def _rows(
    at: _Cells, charges: _Cells, same: Ints | None, around: Surroundings, room: Floats, found: Floats, wants_flux: bool
) -> None:
    """Fill `found` with the means over the cells `at` (r,) of what `charges` (c,) bring; `room` is memory to work in.

    same: which of the charges each cell itself is (r,), `None` where it is none of them.
    """
    kappa = 0.0 if around.height is None else np.pi / (2.0 * around.height)
    dx, dx2, dy, apart, image_apart, reach, wide, u, v, below, spare, other, sinh2, sinh_cosh = room
    (middle, own), (centre, way) = at, charges
    square, own_square = way * way / 24.0, own * own / 24.0
    slanted = bool(np.any(square.imag) or np.any(own_square.imag))
    x, y, size, own_y, own_size = centre.real, centre.imag, _NEAR * np.abs(way), middle.imag, _NEAR * np.abs(own)
    here = None if same is None else (np.arange(len(same)), same)
    np.add(own_square.real[:, None], square.real, out=wide)
    np.add(own_size[:, None], size, out=reach)
    np.multiply(reach, reach, out=reach)
    np.subtract(middle.real[:, None], x, out=dx)
    np.multiply(dx, dx, out=dx2)
    np.subtract(own_y[:, None], y, out=dy)
    np.multiply(dy, dy, out=apart)
    apart += dx2
    near = apart < reach
    if here is not None:
        near[here] = False
    exact = [(1.0, near, centre, way)]  # sign, where, charges (or their images) to integrate exactly
    if around.height is not None and 2.0 * size.max() > 2.0 * around.height - np.ptp(y):
        # a cell's own images in both planes, where cells are about as long as the planes are apart
        exact.extend(
            (1.0, dx2 + (dy - shift) ** 2 < reach, centre + 1j * shift, way)
            for shift in (2.0 * around.height, -2.0 * around.height)
        )
    if kappa:
        _hyperbolic(dx, kappa, sinh2, sinh_cosh, spare)
        _slope_between(kappa * own_y, -kappa * y, kappa, apart, here, u, v, sinh2, sinh_cosh, spare)
    else:
        _slope(dx, dy, apart, here, u, v, spare)
    lean = own_square.imag[:, None] + square.imag if slanted else None
    _expanded(u, v, wide, lean, kappa, own, found, spare, other, wants_flux=wants_flux)
    if here is not None:
        found[here] = 0.0
    if around.grounded:
        np.add(own_y[:, None], y, out=dy)
        np.multiply(dy, dy, out=image_apart)
        image_apart += dx2
        if (own_y - own_size).min() + (y - size).min() < 0.0:
            exact.append((-1.0, image_apart < reach, centre.conj(), way.conj()))
        if around.height is not None and (y + size).max() > around.height:
            shift = 2.0 * around.height
            exact.append((-1.0, dx2 + (dy - shift) ** 2 < reach, centre.conj() + 1j * shift, way.conj()))
        if kappa:
            _slope_between(kappa * own_y, kappa * y, kappa, image_apart, None, u, v, sinh2, sinh_cosh, spare)
        else:
            _slope(dx, dy, image_apart, None, u, v, spare)
        lean = own_square.imag[:, None] - square.imag if slanted else None
        _expanded(u, v, wide, lean, kappa, own, below, spare, other, wants_flux=wants_flux)
        found -= below
    if not wants_flux:
        np.divide(image_apart if around.grounded else 1.0, apart, out=below)
        np.log(below, out=below)
        below *= 0.5
        found += below
        if here is not None:
            found[here] += 1.5 - np.log(np.abs(own))
            if kappa:
                found[here] -= np.log(kappa) + 4.0 * kappa * kappa / 6.0 * own_square.real
    for sign, where, centres, ways in exact:
        i, j = np.nonzero(where)
        if len(i):
            found[i, j] += sign * _near(middle[i] - centres[j], own[i], ways[j], wants_flux=wants_flux)


def _slope(
    dx: Floats, dy: Floats, below: Floats, here: tuple[Ints, Ints] | None, u: Floats, v: Floats, spare: Floats
) -> None:
    """1/z = u − iv from z = dx + i dy and `below` = |z|², which is set to 1 at the places `here`, where z = 0."""
    if here is not None:
        below[here] = 1.0
    np.divide(1.0, below, out=spare)
    np.multiply(dx, spare, out=u)
    np.multiply(dy, spare, out=v)


def _hyperbolic(dx: Floats, kappa: float, sinh2: Floats, sinh_cosh: Floats, spare: Floats) -> None:
    """sinh² and sinh·cosh of κ dx, which a charge and its image share."""
    np.multiply(kappa, dx, out=sinh_cosh)
    np.clip(sinh_cosh, -_FAR, _FAR, out=sinh_cosh)
    np.exp(sinh_cosh, out=sinh_cosh)
    np.divide(1.0, sinh_cosh, out=spare)
    np.subtract(sinh_cosh, spare, out=sinh2)
    sinh_cosh += spare
    sinh2 *= 0.5
    sinh_cosh *= 0.5
    sinh_cosh *= sinh2
    sinh2 *= sinh2


def _slope_between(
    angle_i: Floats,
    angle_j: Floats,
    kappa: float,
    below: Floats,
    here: tuple[Ints, Ints] | None,
    u: Floats,
    v: Floats,
    sinh2: Floats,
    sinh_cosh: Floats,
    spare: Floats,
) -> None:
    """κ coth κz = u − iv, and |sinh κz|² into `below`; κ times the height of z is the sum of the two angles."""
    np.multiply(np.sin(angle_i)[:, None], np.cos(angle_j), out=spare)
    np.multiply(np.cos(angle_i)[:, None], np.sin(angle_j), out=v)
    spare += v
    spare *= spare
    np.add(sinh2, spare, out=below)
    if here is not None:
        below[here] = 1.0
    np.divide(kappa, below, out=spare)
    np.multiply(np.sin(2.0 * angle_i)[:, None], np.cos(2.0 * angle_j), out=v)
    np.multiply(np.cos(2.0 * angle_i)[:, None], np.sin(2.0 * angle_j), out=u)
    v += u
    v *= 0.5
    v *= spare
    np.multiply(sinh_cosh, spare, out=u)


def _expanded(
    u: Floats,
    v: Floats,
    wide: Floats,
    lean: Floats | None,
    kappa: float,
    way: Complexes,
    found: Floats,
    spare: Floats,
    other: Floats,
    *,
    wants_flux: bool,
) -> None:
    """Mean potential without its logarithm, or mean flux, to second order in the cells' lengths, into `found`.

    K″ = κ² − K′² and K‴ = 2 K′ (K′² − κ²); with w = (d_i² + d_j²)/24 · (K′² − κ²) the potential's second-order term
    is Re w, and the flux is −Im d_i K′ (1 + 2w). wide, lean: real and imaginary part of (d_i² + d_j²)/24, lean `None`
    where every cell lies level or upright. spare, other: memory to work in.
    """
    np.multiply(u, u, out=spare)
    np.multiply(v, v, out=other)
    level, upright = way.real[:, None], way.imag[:, None]
    if lean is not None:
        real, imaginary = spare - other - kappa * kappa, -2.0 * u * v
        if not wants_flux:
            found[:] = wide * real - lean * imaginary
            return
        wr, wi = 1.0 + 2.0 * (wide * real - lean * imaginary), 2.0 * (wide * imaginary + lean * real)
        found[:] = level * (v * wr - u * wi) - upright * (u * wr + v * wi)
        return
    if not wants_flux:
        np.subtract(spare, other, out=found)
        if kappa:
            found -= kappa * kappa
        found *= wide
        return
    if np.any(level):
        np.multiply(3.0, spare, out=found)
        found -= other
        found -= kappa * kappa
        found *= wide
        found += 0.5
        found *= v
        found *= 2.0 * level
    else:
        found[:] = 0.0
    if np.any(upright):
        other *= -3.0
        other += spare
        other -= kappa * kappa
        other *= wide
        other += 0.5
        other *= u
        other *= 2.0 * upright
        found -= other


def _near(apart: Complexes, own: Complexes, way: Complexes, *, wants_flux: bool) -> Floats:
    """What the exact mean of the singular term adds to its expansion, for pairs of cells `apart`."""
    slope = 1.0 / apart
    u, v = own * slope, way * slope
    bend = (u * u + v * v) / 24.0
    half_sum, half_difference = 0.5 * (u + v), 0.5 * (u - v)
    corners = np.concatenate((1.0 + half_sum, 1.0 - half_sum, 1.0 + half_difference, 1.0 - half_difference))
    size = corners.real**2 + corners.imag**2
    log = np.empty_like(corners)
    log.real = 0.5 * np.log(np.maximum(size, 1e-300))
    log.imag = np.arctan2(corners.imag, corners.real)
    log *= corners
    if not wants_flux:
        log *= corners
    plus, minus, across, back = log.reshape(4, -1)
    mean = (plus + minus - across - back) / (u * v)
    found: Floats = -(u * (mean - 1.0 - 2.0 * bend)).imag if wants_flux else 1.5 - 0.5 * mean.real - bend.real
    return found
