"""S. B. Cohn, Shielded coupled-strip transmission line, IRE Transactions on Microwave Theory and Techniques 3 (1955)
29–38.

Exact for strips of no thickness midway between two planes, by conformal mapping: Z = (η/4√ε) K(k′)/K(k) with k_even
= tanh(πw/2b) tanh(π(w + s)/2b) and k_odd = tanh(πw/2b) coth(π(w + s)/2b); a single strip has k = tanh(πw/2b). The
formulas are from memory; that they are what the paper says is borne out by the field solution, which knows none of
them. K from scipy.special.ellipk, whose argument is m = k².
"""

from __future__ import annotations

import math

import pytest
from scipy.special import ellipk, ellipkm1  # type: ignore[import-untyped]

from pairrules.fields.cross_section import CrossSection, Layer, Plane
from pairrules.fields.reduction import SPEED_OF_LIGHT
from pairrules.fields.solve import solve_section
from tests.fields.sections import strip, stripline

ETA = 376.730313668

PAIRS = (
    # w, s, b, ε; the last two columns: what the formula gives, worked out beforehand
    (0.3, 0.1, 1.0, 4.2, 81.30872, 41.03299),
    (0.2, 0.2, 0.6, 4.2, 68.152, 51.434),
    (0.15, 0.15, 0.5, 4.0, 74.582, 53.893),
    (0.5, 0.1, 1.0, 1.0, 122.886, 69.866),
    (0.1, 0.05, 0.2, 3.8, None, None),
    (2.0, 0.05, 0.3, 4.0, None, None),
    (0.1, 1.0, 1.5, 2.2, None, None),
)


def impedance(k: float, er: float) -> float:
    return float(ETA / (4 * math.sqrt(er)) * ellipkm1(k * k) / ellipk(k * k))


@pytest.mark.parametrize(("w", "s", "b", "er", "even", "odd"), PAIRS)
def test_coupled_strips(w: float, s: float, b: float, er: float, even: float | None, odd: float | None) -> None:
    across, apart = math.tanh(math.pi * w / (2 * b)), math.tanh(math.pi * (w + s) / (2 * b))
    exact_even, exact_odd = impedance(across * apart, er), impedance(across / apart, er)
    if even is not None:
        assert exact_even == pytest.approx(even, abs=6e-4)
        assert exact_odd == pytest.approx(odd, abs=6e-4)
    pair = solve_section(stripline(w=w, s=s, b=b, er=er)).pair
    assert pair is not None
    assert pair.impedance_common_ohm is not None
    assert 2 * pair.impedance_common_ohm == pytest.approx(exact_even, rel=2e-4)
    assert pair.impedance_diff_ohm / 2 == pytest.approx(exact_odd, rel=2e-4)


@pytest.mark.parametrize(("w", "b", "er", "worked_out"), [(1.0, 1.0, 1.0, 65.354), (0.2, 0.6, 4.2, 60.131)])
def test_single_strip(w: float, b: float, er: float, worked_out: float) -> None:
    exact = impedance(math.tanh(math.pi * w / (2 * b)), er)
    assert exact == pytest.approx(worked_out, abs=6e-4)
    section = CrossSection(
        layers=(Layer(y0=0.0, y1=b, er=er),), planes=(Plane(y=0.0), Plane(y=b)), conductors=(strip("a", 0.0, w, b / 2),)
    )
    solved = solve_section(section)
    found = 1.0 / (SPEED_OF_LIGHT * math.sqrt(solved.C[0, 0] * solved.Cair[0, 0]))
    assert found == pytest.approx(exact, rel=2e-4)
