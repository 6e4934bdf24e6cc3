"""Mean potential and flux between straight cells that carry charge, for no, one and two infinite planes.

Two cells with complex centres z_i, z_j and complex lengths d: the potential of a charge spread over cell j, averaged over
cell i, is −1/(2π ε0) times the mean of Re K(z_i − z_j), with K = log z in free space, log z − log z̃ over a plane at y = 0
(z̃ = z_i − z_j*, the image), and log sinh κz − log sinh κz̃ between planes at y = 0 and y = b, κ = π/(2b) (the images of
both planes summed: the strip mapped on a half-plane). The flux through cell i to its left is −Im of the mean of d_i K′ over 2π.
Cells far apart use the means' expansion to second order in d; near ones, and the images near them, the exact double
integral: the second antiderivatives of log z and 1/z at the four corners of the parallelogram z ± d_i/2 ± d_j/2,
each corner divided by z so that no corner crosses the logarithm's cut.
Source: images and conformal maps, W. R. Smythe, Static and Dynamic Electricity (from memory); the integrals are elementary.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.fields.boundary import Bools, Complexes, Floats, Ints

_NEAR = 1.25  # cells nearer than this times the sum of their lengths are integrated exactly


@dataclass(frozen=True, slots=True, kw_only=True)
class Surroundings:
    """The infinite planes: `grounded` where one lies at y = 0; `height` of the second above it, `None` without."""

    grounded: bool
    height: float | None = None


def interaction(
    centre: Complexes, way: Complexes, rows_potential: Ints, rows_flux: Ints, around: Surroundings
) -> tuple[Floats, Floats]:
    """Mean potentials (times 2π ε0) and fluxes (times 2π) of cells with unit charge [charge / ε0 for the flux].

    Parameters
    ----------
    centre, way: complex (n,): centres of the cells and the way from start to end.
    rows_potential, rows_flux: the cells where the potential and the flux are wanted, (m,) and (k,).
    around: the infinite planes.

    Returns
    -------
    (m, n) and (k, n).
    """
    potential = np.zeros((len(rows_potential), len(centre)))
    flux = np.zeros((len(rows_flux), len(centre)))
    for rows, found, wants_flux in ((rows_potential, potential, False), (rows_flux, flux, True)):
        for first in range(0, len(rows), 64):
            block = rows[first : first + 64]
            found[first : first + 64] = _rows(centre, way, block, around, wants_flux=wants_flux)
    return potential, flux


def _rows(centre: Complexes, way: Complexes, rows: Ints, around: Surroundings, *, wants_flux: bool) -> Floats:
    kappa = 0.0 if around.height is None else np.pi / (2.0 * around.height)
    square = way * way
    spread = (square[rows, None] + square[None, :]) / 24.0
    z = centre[rows, None] - centre[None, :]
    here = (np.arange(len(rows)), rows)
    z[here] = 1.0
    size = np.abs(way)
    reach = (_NEAR * (size[rows, None] + size[None, :])) ** 2
    if wants_flux:
        found = _far_flux(z, way[rows], spread, kappa)
    else:
        found = _far_potential(z, spread, kappa)
    near = (z.real**2 + z.imag**2) < reach
    near[here] = False
    found += _near(z, way, rows, near, spread, wants_flux=wants_flux)
    if wants_flux:
        found[here] = 0.0
    else:
        itself = 1.5 - np.log(size[rows])
        if kappa:
            itself -= np.log(kappa) + kappa * kappa / 36.0 * square[rows].real
        found[here] = itself
    if not around.grounded:
        return found
    image = centre[rows, None] - centre.conj()[None, :]
    spread = (square[rows, None] + square.conj()[None, :]) / 24.0
    if wants_flux:
        found -= _far_flux(image, way[rows], spread, kappa)
    else:
        found -= _far_potential(image, spread, kappa)
    shifts = (0.0,) if around.height is None else (0.0, 2.0 * around.height)
    for shift in shifts:
        shifted = image - 1j * shift
        near = (shifted.real**2 + shifted.imag**2) < reach
        if near.any():
            found -= _near(shifted, way.conj(), rows, near, spread, wants_flux=wants_flux, testing=way)
    return found


def _far_potential(z: Complexes, spread: Complexes, kappa: float) -> Floats:
    if kappa == 0.0:
        square = z * z
        found: Floats = (spread / square).real - 0.5 * np.log(z.real**2 + z.imag**2)
        return found
    a = np.clip(kappa * z.real, -300.0, 300.0)
    b = kappa * z.imag
    sinh, sin = np.sinh(a), np.sin(b)
    below = sinh * sinh + sin * sin
    coth = (sinh * np.sqrt(1.0 + sinh * sinh) - 1j * (sin * np.cos(b))) / below
    found = -0.5 * np.log(below) + (spread * (kappa * kappa * (coth * coth - 1.0))).real
    return found


def _far_flux(z: Complexes, way: Complexes, spread: Complexes, kappa: float) -> Floats:
    if kappa == 0.0:
        slope = 1.0 / z
        bend = 2.0 * slope * slope
    else:
        a = np.clip(kappa * z.real, -300.0, 300.0)
        b = kappa * z.imag
        sinh, sin = np.sinh(a), np.sin(b)
        slope = kappa * (sinh * np.sqrt(1.0 + sinh * sinh) - 1j * (sin * np.cos(b))) / (sinh * sinh + sin * sin)
        bend = 2.0 * (slope * slope - kappa * kappa)
    found: Floats = -(way[:, None] * (slope * (1.0 + spread * bend))).imag
    return found


def _near(
    z: Complexes,
    way: Complexes,
    rows: Ints,
    near: Bools,
    spread: Complexes,
    *,
    wants_flux: bool,
    testing: Complexes | None = None,
) -> Floats:
    """What the exact mean of the singular term adds to its expansion, at the near pairs; 0 elsewhere."""
    correction = np.zeros(z.shape)
    i, j = np.nonzero(near)
    apart, wide = z[i, j], spread[i, j]
    own = (way if testing is None else testing)[rows[i]]
    u, v = own / apart, way[j] / apart
    corners = np.stack((1 + (u + v) / 2, 1 + (u - v) / 2, 1 - (u - v) / 2, 1 - (u + v) / 2))
    square = corners.real**2 + corners.imag**2
    touching = square < 1e-24
    log = 0.5 * np.log(np.where(touching, 1.0, square)) + 1j * np.arctan2(corners.imag, corners.real)
    sign = np.array([1.0, -1.0, -1.0, 1.0])[:, None]
    if wants_flux:
        mean = (sign * corners * log).sum(axis=0) / (u * v)
        slope = 1.0 / apart
        expanded = slope * (1.0 + 2.0 * wide * slope * slope)
        correction[i, j] = -(own * (mean * slope - expanded)).imag
    else:
        mean = 0.5 * (sign * corners * corners * log).sum(axis=0) / (u * v) - 1.5
        correction[i, j] = -(mean.real + (wide / (apart * apart)).real)
    return correction
