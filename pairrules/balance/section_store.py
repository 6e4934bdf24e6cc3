"""Cross-sections solved once: the store that every pair of a board shares."""

from __future__ import annotations

import math
from collections.abc import MutableMapping
from dataclasses import dataclass

import numpy as np

from pairrules.board.columns import Floats
from pairrules.fields.cross_section import CrossSection
from pairrules.fields.loss import SkinIntegrals, skin_integrals
from pairrules.fields.solve import SectionSolution, solve_section

SPEED_OF_LIGHT = 299792458.0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SectionMatrices:
    """What a pair takes from a solved section, SI units per metre.

    Parameters
    ----------
    C, L, loss: (2, 2) of both legs, or (1, 1) of one; loss: conductance over angular frequency.
    diff, common: impedances [ohm], `None` for one leg. delay: of the odd mode, or of the one leg [s/m].
    skin: what gives the resistance at any frequency, `None` for one leg.
    coupling: capacitance of each neighbour to each leg [F/m].
    """

    C: Floats
    L: Floats
    loss: Floats
    diff: float | None
    common: float | None
    delay: float
    skin: SkinIntegrals | None
    coupling: tuple[tuple[float, ...], ...]


FLATTEST = 400.0
"""Width over height of a section that is still solved: cells, and with their square the memory, grow with it."""

Store = MutableMapping[CrossSection, SectionMatrices | str]
"""Section to its matrices, or to why it has none; a plain dict will do, whoever hands it in decides where it lives."""


def solved(section: CrossSection, store: Store) -> SectionMatrices | str:
    """The matrices of a section of one leg or two, from the store where they are there; or why there are none."""
    found = store.get(section)
    if found is None:
        found = store[section] = _matrices(section)
    return found


def _matrices(section: CrossSection) -> SectionMatrices | str:
    if (ratio := _flatness(section)) > FLATTEST:
        return f"its copper is {ratio:.0f} times as wide as high above its reference, beyond the {FLATTEST:.0f} solved"
    try:
        solution = solve_section(section)
    except ValueError as error:
        return str(error)
    return _of_pair(solution) if solution.pair is not None else _of_one(solution)


def _flatness(section: CrossSection) -> float:
    """Width of all copper over its least distance from a plane; 0 where there is no plane."""
    left = min(conductor.x_range[0] for conductor in section.conductors)
    right = max(conductor.x_range[1] for conductor in section.conductors)
    apart = [
        max(plane.y - conductor.y_range[1], conductor.y_range[0] - plane.y)
        for plane in section.planes
        for conductor in section.conductors
    ]
    least = min((height for height in apart if height > 0), default=0.0)
    return (right - left) / least if least > 0 else 0.0


def _of_pair(solution: SectionSolution) -> SectionMatrices | str:
    pair = solution.pair
    if pair is None or pair.L is None or pair.impedance_common_ohm is None:
        return "no copper that could be its reference lies above or below it"
    signals = solution.section.signals
    loss = solution.G_per_omega[np.ix_(signals, signals)]
    delay = math.sqrt(pair.er_odd) / SPEED_OF_LIGHT
    return SectionMatrices(
        C=pair.C,
        L=pair.L,
        loss=loss,
        diff=pair.impedance_diff_ohm,
        common=pair.impedance_common_ohm,
        delay=delay,
        skin=skin_integrals(solution),
        coupling=_coupling(solution),
    )


def _of_one(solution: SectionSolution) -> SectionMatrices | str:
    leg = solution.section.signals[0]
    C, air = float(solution.C[leg, leg]), float(solution.Cair[leg, leg])
    if not air > 1e-13:
        return "no copper that could be its reference lies above or below it"
    L = 1.0 / (SPEED_OF_LIGHT**2 * air)
    loss = solution.G_per_omega[leg : leg + 1, leg : leg + 1]
    return SectionMatrices(
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
