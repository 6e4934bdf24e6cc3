"""The boundary elements against finite elements (scikit-fem) on sections that no closed form covers.

The finite elements are graded and extrapolated until the last refinement moves them by less than a tenth of what is
judged. Targets: C within 0.1 % of √(C_ii C_jj), that of air 0.05 %, and the legs' difference (C11 − C22)/(C11 +
C22), and the same of L, within 2e-4: conversion comes from the difference, not from the size.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pytest

from pairrules.fields.cross_section import CrossSection
from pairrules.fields.reduction import pair_of
from pairrules.fields.solve import solve_section
from tests.fields.finite_elements import capacitance
from tests.fields.sections import all_sections

SECTIONS = all_sections()

ODD = (
    "unequal strips",
    "trapezoids",
    "pour one side",
    "mask one leg",
    "floating neighbour",
    "plane ends",
    "slot under one leg",
    "two dielectrics",
    "strip on an interface",
    "one over the other",
    "no return",
    "contract",
)


def error(found: npt.NDArray[np.float64], reference: npt.NDArray[np.float64]) -> float:
    own = np.sqrt(np.diag(reference))
    return float(np.max(np.abs(found - reference) / np.outer(own, own)))


@pytest.mark.parametrize("name", ODD)
def test_capacitance(name: str) -> None:
    section = SECTIONS[name]
    solved = solve_section(section)
    reference, moved = capacitance(section, depths=(6, 8, 10))
    assert moved < 1.5e-4
    assert error(solved.C, reference) < 1e-3
    assert solved.pair is not None
    expected = pair_of(section, reference, solved.Cair)
    assert expected is not None
    assert solved.pair.capacitance_tilt == pytest.approx(expected.capacitance_tilt, abs=2e-4)


@pytest.mark.parametrize("name", ["trapezoids", "pour one side", "slot under one leg", "contract"])
def test_capacitance_in_air(name: str) -> None:
    section = SECTIONS[name]
    solved = solve_section(section)
    reference, moved = capacitance(section, depths=(6, 8, 10), air=True)
    assert moved < 1.5e-4
    assert error(solved.Cair, reference) < 5e-4
    assert solved.pair is not None
    expected = pair_of(section, reference, reference)
    assert expected is not None
    tilt = expected.inductance_tilt
    assert tilt is not None
    assert solved.pair.inductance_tilt == pytest.approx(tilt, abs=2e-4)


def test_conductance_is_what_finite_elements_say_of_the_energy() -> None:
    """G/ω is the sum over dielectrics of tan δ · ε ∂C/∂ε; the derivative is taken by finite elements."""
    section = SECTIONS["strip on an interface"]
    lossy, other = section.layers
    step = 0.01

    def with_permittivity(er: float) -> CrossSection:
        changed = type(lossy)(y0=lossy.y0, y1=lossy.y1, er=er, loss_tangent=lossy.loss_tangent)
        return CrossSection(conductors=section.conductors, layers=(changed, other), planes=section.planes)

    above, _ = capacitance(with_permittivity(lossy.er * (1 + step)), depths=(5, 6, 7))
    below, _ = capacitance(with_permittivity(lossy.er * (1 - step)), depths=(5, 6, 7))
    expected = lossy.loss_tangent * (above - below) / (2 * step)
    found = solve_section(section).G_per_omega
    assert error(found, expected) < 2e-3
