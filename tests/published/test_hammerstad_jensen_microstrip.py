"""E. Hammerstad and O. Jensen, Accurate models for microstrip computer-aided design, IEEE MTT-S Digest 1980, 407–409.

Single microstrip of no thickness, equations recalled from memory. The paper states that the impedance in air is better
than 0.01 % for u ≤ 1 and 0.03 % for u ≤ 1000, the effective permittivity better than 0.2 % for ε ≤ 128 and
0.01 ≤ u ≤ 100. Tolerance: those figures, and ours of 0.05 % on top.
"""

from __future__ import annotations

import math

import pytest

from pairrules.fields.cross_section import CrossSection, Layer, Plane
from pairrules.fields.reduction import SPEED_OF_LIGHT
from pairrules.fields.solve import solve_section
from tests.fields.sections import strip

ETA = 376.730313668


def impedance_in_air(u: float) -> float:
    f = 6 + (2 * math.pi - 6) * math.exp(-((30.666 / u) ** 0.7528))
    return ETA / (2 * math.pi) * math.log(f / u + math.sqrt(1 + (2 / u) ** 2))


def effective_permittivity(u: float, er: float) -> float:
    a = 1 + math.log((u**4 + (u / 52) ** 2) / (u**4 + 0.432)) / 49 + math.log(1 + (u / 18.1) ** 3) / 18.7
    b = 0.564 * ((er - 0.9) / (er + 3)) ** 0.053
    return (er + 1) / 2 + (er - 1) / 2 * (1 + 10 / u) ** (-a * b)


@pytest.mark.parametrize("er", [2.2, 4.2, 9.9])
@pytest.mark.parametrize("u", [0.2, 0.5, 1.0, 1.5, 2.0, 5.0, 15.0])
def test_single_strip(u: float, er: float) -> None:
    section = CrossSection(
        layers=(Layer(y0=0.0, y1=0.2, er=er),), planes=(Plane(y=0.0),), conductors=(strip("a", 0.0, 0.2 * u, 0.2),)
    )
    solved = solve_section(section)
    assert 1 / (SPEED_OF_LIGHT * solved.Cair[0, 0]) == pytest.approx(impedance_in_air(u), rel=3e-4 + 5e-4)
    ratio = solved.C[0, 0] / solved.Cair[0, 0]
    assert ratio == pytest.approx(effective_permittivity(u, er), rel=2e-3 + 5e-4)


def test_width_twice_the_height() -> None:
    """Width twice the height on ε 4.2: 49.71 ohm by the paper's formulas."""
    by_formula = impedance_in_air(2.0) / math.sqrt(effective_permittivity(2.0, 4.2))
    assert by_formula == pytest.approx(49.71, abs=5e-3)
    section = CrossSection(
        layers=(Layer(y0=0.0, y1=1.0, er=4.2),), planes=(Plane(y=0.0),), conductors=(strip("a", 0.0, 2.0, 1.0),)
    )
    solved = solve_section(section)
    found = 1 / (SPEED_OF_LIGHT * math.sqrt(solved.C[0, 0] * solved.Cair[0, 0]))
    assert found == pytest.approx(by_formula, rel=1.5e-3)
