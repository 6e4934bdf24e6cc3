"""Coupled microstrip worked out in the literature on multiconductor lines.

C. R. Paul, Analysis of Multiconductor Transmission Lines, 1994 (recalled, not re-read): two lands of width and
distance 100 mil on 62 mil of ε 4.7, thin: L11 0.3353, L12 0.0370 µH/m; C11 115.5, C12 −4.93 pF/m. Printed by a
coarse method; 2.5 %.

W. T. Weeks, IEEE Transactions on Microwave Theory and Techniques 18 (1970) 35–43, as quoted by C. Wei, R. F.
Harrington, J. R. Mautz and T. K. Sarkar, the same journal 32 (1984) 439–450 (recalled, not re-read): two strips of
width 3, thickness 1, gap 2, one above the plane on ε 2: C11 92.2, C12 −8.5 pF/m. 2 %.
"""

from __future__ import annotations

import pytest

from pairrules.fields.solve import solve_section
from tests.fields.sections import microstrip

MIL = 0.0254


def test_paul_two_lands() -> None:
    pair = solve_section(microstrip(w=(100 * MIL, 100 * MIL), s=100 * MIL, h=62 * MIL, er=4.7)).pair
    assert pair is not None
    assert pair.L is not None
    assert pair.L[0, 0] * 1e6 == pytest.approx(0.3353, rel=0.025)
    assert pair.L[0, 1] * 1e6 == pytest.approx(0.0370, rel=0.025)
    assert pair.C[0, 0] * 1e12 == pytest.approx(115.5, rel=0.025)
    assert pair.C[0, 1] * 1e12 == pytest.approx(-4.93, rel=0.025)


def test_weeks_two_thick_strips() -> None:
    pair = solve_section(microstrip(w=(3.0, 3.0), s=2.0, h=1.0, t=1.0, er=2.0)).pair
    assert pair is not None
    assert pair.C[0, 0] * 1e12 == pytest.approx(92.2, rel=0.02)
    assert pair.C[0, 1] * 1e12 == pytest.approx(-8.5, rel=0.02)
