"""Series resistance and shunt conductance of a pair's cross-section against frequency.

**Resistance.** At low frequency the current fills the copper of a leg evenly: Rdc = ρ/A. At high frequency it runs in a
skin of one depth, spread along the outline as the charge is in air (both follow the same potential problem), so that
Rac,ij = Rs ∮ J_i J_j dl, with Rs = √(π f µ0 ρ) and J_i the surface current for 1 A in leg i, none in the other. Between
the two √(Rdc² + Rac²) is taken: right at both ends, and within some ten to twenty per cent where the skin depth is near
half the copper's thickness (common practice, no source). Smooth copper; no roughness.

The share of planes and grounded neighbours is Rs ∮ J_i J_j dl over them, which holds while their copper is thicker than
the skin depth; at lower frequency it is too small, and goes to zero where the true one goes to the d.c. resistance of
what may be a wide plane.

**Conductance.** G = ω times the imaginary part of the complex capacitance, to first order in the loss tangents: each
dielectric's share of the energy times its loss tangent. Loss tangents are taken as the same at all frequencies.

Source: H. A. Wheeler, Formulas for the skin effect, Proceedings of the IRE 30 (1942) 412–424 (from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from pairrules.fields.boundary import Complexes, Floats
from pairrules.fields.cross_section import CrossSection
from pairrules.fields.reduction import reduce_matrix
from pairrules.fields.solve import AirCharge, SectionSolution

COPPER_OHM_M = 17.241e-9
"""Resistivity of annealed copper at 20 °C [ohm m]. Source: IEC 60028."""

_MU_0 = 4e-7 * np.pi
_POINTS = 400  # the most line charges that stand for one cell
_STEPS = 6000  # the most steps along a plane


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SkinIntegrals:
    """∮ J_i J_j dl for 1 A in leg i and 1 A in leg j [1/m], (2, 2).

    legs, grounded: over the copper of the legs, and over all that is at 0 V. direct: 1/A of each leg [1/m²], (2,).
    why_nan: why entries are NaN, if they are.
    """

    legs: Floats
    grounded: Floats
    direct: Floats
    why_nan: tuple[str, ...]


def skin_integrals(solution: SectionSolution) -> SkinIntegrals:
    """Integrals that give a pair's resistance at any frequency; NaN for a leg of no thickness: its copper is unknown.

    Raises
    ------
    ValueError: where the section has no pair, or no copper at 0 V lets common-mode current return.
    """
    section = solution.section
    if solution.pair is None or solution.pair.L is None:
        raise ValueError("resistance needs two legs and copper at 0 V")
    legs = list(section.signals)
    volts = _volts_for_one_ampere(section, solution.Cair)
    on_legs, on_ground = np.zeros((2, 2)), np.zeros((2, 2))
    for air in solution.air:
        charge = air.charge @ volts
        density = charge / np.abs(air.way)[:, None]
        of_legs = np.isin(air.owner, legs)
        of_ground = (air.owner < 0) | np.isin(air.owner, _places(section, "grounded"))
        on_legs += density[of_legs].T @ charge[of_legs]
        on_ground += density[of_ground].T @ charge[of_ground] + _on_planes(air, charge)
    area = np.array([section.conductors[place].area_mm2 * 1e-6 for place in legs])
    thin = area == 0.0
    on_legs[thin, :] = on_legs[:, thin] = np.nan
    why = tuple(
        f"{section.conductors[place].name} has no thickness, so its copper is unknown"
        for place, without in zip(legs, thin, strict=True)
        if without
    )
    direct = np.divide(1.0, area, out=np.full(2, np.nan), where=~thin)
    return SkinIntegrals(legs=on_legs, grounded=on_ground, direct=direct, why_nan=why)


def resistance(
    integrals: SkinIntegrals,
    frequencies: npt.ArrayLike,
    *,
    resistivity_ohm_m: float = COPPER_OHM_M,
    with_return: bool = False,
) -> Floats:
    """Series resistance matrix of the legs (F, 2, 2) [ohm/m]; model and validity stand at the top of the module.

    Parameters
    ----------
    integrals: from `skin_integrals`. frequencies: (F,) [Hz], 0 for d.c. resistivity_ohm_m: of all copper.
    with_return: whether the share of planes and grounded neighbours is in; without it the return is ideal.
    """
    hertz = np.asarray(frequencies, dtype=np.float64)
    surface = np.sqrt(np.pi * hertz * _MU_0 * resistivity_ohm_m)[:, None, None]
    found: Floats = surface * integrals.legs
    diagonal = np.arange(2)
    found[:, diagonal, diagonal] = np.hypot(found[:, diagonal, diagonal], resistivity_ohm_m * integrals.direct)
    if with_return:
        found = found + surface * integrals.grounded
    return found


def conductance(solution: SectionSolution, frequencies: npt.ArrayLike) -> Floats:
    """Shunt conductance matrix of the legs (F, 2, 2) [S/m], from the loss tangents of the section's dielectrics.

    Raises
    ------
    ValueError: where the section has no pair.
    """
    if solution.pair is None:
        raise ValueError("conductance of a pair needs two legs")
    c, g = solution.C, solution.G_per_omega
    keep = list(solution.section.signals)
    loose = _places(solution.section, "floating")
    reduced = g[np.ix_(keep, keep)].copy()
    if len(
        loose
    ):  # the floating conductors' potentials follow the capacitances; losses change them to second order only
        share = -np.linalg.solve(c[np.ix_(loose, loose)], c[np.ix_(loose, keep)])
        across = g[np.ix_(keep, loose)] @ share
        reduced += across + across.T + share.T @ g[np.ix_(loose, loose)] @ share
    omega = 2.0 * np.pi * np.asarray(frequencies, dtype=np.float64)
    found: Floats = omega[:, None, None] * reduced
    return found


def _volts_for_one_ampere(section: CrossSection, cair: Floats) -> Floats:
    """Potentials of all conductors (n, 2) that put charge 1 on leg i and none on the other leg and on what floats."""
    legs, loose = list(section.signals), _places(section, "floating")
    volts = np.zeros((len(section.conductors), 2))
    volts[legs] = np.linalg.inv(reduce_matrix(section, cair))
    if loose:
        volts[loose] = -np.linalg.solve(cair[np.ix_(loose, loose)], cair[np.ix_(loose, legs)] @ volts[legs])
    return volts


def _places(section: CrossSection, role: str) -> list[int]:
    return [place for place, conductor in enumerate(section.conductors) if conductor.role == role]


def _on_planes(air: AirCharge, charge: Floats) -> Floats:
    """∮ J_i J_j dl over a region's infinite planes.

    A line charge at height y over one plane draws the density −(1/π) y/(x² + y²); the product of two of them,
    integrated along the plane, is (1/π) (y + y′)/((x − x′)² + (y + y′)²). Between two planes at 0 and b the density
    is −sin a/(2b (cosh(πx/b) − cos a)), a = πy/b, and is summed in even steps, which for so smooth a curve is exact
    to 1e-4 once they are shorter than the height (trapezoidal rule).
    """
    middle, charge = _points(air, charge)
    x = middle.real
    low = middle.imag - air.bottom if air.bottom is not None else None
    high = air.top - middle.imag if air.top is not None else None
    if low is None or high is None:
        height = low if low is not None else high
        if height is None:
            return np.zeros((2, 2))
        both = height[:, None] + height
        drawn: Floats = charge.T @ (both / (np.pi * ((x[:, None] - x) ** 2 + both**2))) @ charge
        return drawn
    gap = float((low + high)[0])
    copper = np.minimum(low, high)
    step = max(float(copper[copper > 0.0].min()) / 1.5, (float(np.ptp(x)) + 8.0 * gap) / _STEPS)
    at = np.arange(x.min() - 4.0 * gap, x.max() + 4.0 * gap, step)
    steep = np.cosh(np.minimum(np.pi * np.abs(at[:, None] - x) / gap, 300.0))
    total = np.zeros((2, 2))
    for height in (low, high):
        angle = np.pi * height / gap
        on_plane = (np.sin(angle) / (2.0 * gap * (steep - np.cos(angle)))) @ charge
        total += step * on_plane.T @ on_plane
    return total


def _points(air: AirCharge, charge: Floats) -> tuple[Complexes, Floats]:
    """Line charges in place of cells, so many that they stand closer together than they are to a plane."""
    bounds = [bound for bound in (air.bottom, air.top) if bound is not None]
    if not bounds:
        return air.middle, charge
    ends = np.stack((air.middle - air.way / 2, air.middle, air.middle + air.way / 2))
    away = np.min([np.abs(ends.imag - bound) for bound in bounds], axis=0).max(axis=0)
    count = np.clip(np.ceil(2.0 * np.abs(air.way) / away), 1, _POINTS).astype(np.int64)
    cell = np.repeat(np.arange(len(count)), count)
    number = np.arange(len(cell)) - np.repeat(np.cumsum(count) - count, count)
    share = (number + 0.5) / count[cell] - 0.5
    return air.middle[cell] + share * air.way[cell], charge[cell] / count[cell, None]
