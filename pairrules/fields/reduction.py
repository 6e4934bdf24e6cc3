"""From the matrices of all conductors of a section to those of its pair, and the pair's impedances and modes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.fields.boundary import Floats
from pairrules.fields.cross_section import CrossSection

SPEED_OF_LIGHT = 299792458.0
"""Metres per second, exact (SI)."""

_TO_MODES = np.array([[0.5, 1.0], [-0.5, 1.0]])  # V1, V2 from Vd, Vc; its transpose gives Id, Ic from I1, I2


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Pair:
    """The two legs, plus first; grounded neighbours at 0 V, floating ones at zero charge. SI units per metre.

    C, Cair [F/m]; L [H/m], `None` where no copper at 0 V lets common-mode current return.
    impedance_diff_ohm = √(Ldd/Cdd), impedance_common_ohm = √(Lcc/Ccc) for Vd = V1 − V2, Vc = (V1 + V2)/2,
    Id = (I1 − I2)/2, Ic = I1 + I2; the common one `None` like L. er_odd, er_even: effective permittivities Ldd Cdd c²
    and Lcc Ccc c² of the two modes so defined. er_modes: those of the true modes, the eigenvalues of L C c², smaller
    first.
    """

    C: Floats
    Cair: Floats
    L: Floats | None
    impedance_diff_ohm: float
    impedance_common_ohm: float | None
    er_odd: float
    er_even: float | None
    er_modes: tuple[float, float] | None

    @property
    def capacitance_tilt(self) -> float:
        """(C11 − C22)/(C11 + C22): what the legs differ by."""
        return float((self.C[0, 0] - self.C[1, 1]) / (self.C[0, 0] + self.C[1, 1]))

    @property
    def inductance_tilt(self) -> float | None:
        """(L11 − L22)/(L11 + L22)."""
        if self.L is None:
            return None
        return float((self.L[0, 0] - self.L[1, 1]) / (self.L[0, 0] + self.L[1, 1]))


def pair_of(section: CrossSection, c: Floats, cair: Floats) -> Pair | None:
    """The pair of a section with exactly two signals, else `None`.

    Parameters
    ----------
    c, cair: Maxwell matrices of all conductors [F/m], with the dielectrics and in air.
    """
    if len(section.signals) != 2:
        return None
    reduced = reduce_matrix(section, c)
    reduced_air = reduce_matrix(section, cair)
    cdd, ccc = _modal_capacitances(reduced)
    cdd_air, ccc_air = _modal_capacitances(reduced_air)
    # without a return for common-mode current the legs carry opposite charges only, and Cair has no inverse
    returns = ccc_air > 1e-9 * cdd_air
    if not returns:
        return Pair(
            C=reduced,
            Cair=reduced_air,
            L=None,
            impedance_diff_ohm=1.0 / (SPEED_OF_LIGHT * float(np.sqrt(cdd * cdd_air))),
            impedance_common_ohm=None,
            er_odd=cdd / cdd_air,
            er_even=None,
            er_modes=None,
        )
    inductance = np.linalg.inv(reduced_air) / SPEED_OF_LIGHT**2
    inductance = (inductance + inductance.T) / 2
    ldd = float(inductance[0, 0] + inductance[1, 1] - 2 * inductance[0, 1])
    lcc = float(inductance[0, 0] + inductance[1, 1] + 2 * inductance[0, 1]) / 4
    modes = np.sort(np.linalg.eigvals(inductance @ reduced).real) * SPEED_OF_LIGHT**2
    for matrix in (reduced, reduced_air, inductance):
        matrix.setflags(write=False)
    return Pair(
        C=reduced,
        Cair=reduced_air,
        L=inductance,
        impedance_diff_ohm=float(np.sqrt(ldd / cdd)),
        impedance_common_ohm=float(np.sqrt(lcc / ccc)),
        er_odd=ldd * cdd * SPEED_OF_LIGHT**2,
        er_even=lcc * ccc * SPEED_OF_LIGHT**2,
        er_modes=(float(modes[0]), float(modes[1])),
    )


def reduce_matrix(section: CrossSection, matrix: Floats) -> Floats:
    """Matrix of the signals alone: rows of grounded conductors dropped, floating ones eliminated at zero charge."""
    keep = list(section.signals)
    loose = [place for place, conductor in enumerate(section.conductors) if conductor.role == "floating"]
    own = matrix[np.ix_(keep, keep)].copy()
    if loose:
        across = matrix[np.ix_(keep, loose)]
        own -= across @ np.linalg.solve(matrix[np.ix_(loose, loose)], across.T)
    return own


def _modal_capacitances(c: Floats) -> tuple[float, float]:
    """Cdd = Id/Vd at Vc = 0 and Ccc = Ic/Vc at Vd = 0."""
    modal = _TO_MODES.T @ c @ _TO_MODES
    return float(modal[0, 0]), float(modal[1, 1])
