"""M. Kirschning and R. H. Jansen, Accurate wide-range design equations for the frequency-dependent characteristic of
parallel coupled microstrip lines, IEEE Transactions on Microwave Theory and Techniques 32 (1984) 83–90; corrections
in the same journal 33 (1985) 288.

Static even- and odd-mode permittivity and impedance of two equal strips of no thickness, equations recalled from
memory. Stated range 0.1 ≤ u ≤ 10, 0.1 ≤ g ≤ 10, 1 ≤ ε ≤ 18; stated error 0.7 % of permittivity and 0.6 % of
impedance. Closed forms of coupled lines are judged no closer than 2 %.
"""

from __future__ import annotations

import math

import pytest

from pairrules.fields.solve import solve_section
from tests.fields.sections import microstrip
from tests.published.test_hammerstad_jensen_microstrip import effective_permittivity, impedance_in_air

ETA = 376.730313668


def even_and_odd(u: float, g: float, er: float) -> tuple[float, float, float, float]:
    """Impedance and effective permittivity: even, odd, even, odd."""
    v = u * (20 + g * g) / (10 + g * g) + g * math.exp(-g)
    er_even = effective_permittivity(v, er)
    er_single = effective_permittivity(u, er)
    a_o = 0.7287 * (er_single - (er + 1) / 2) * (1 - math.exp(-0.179 * u))
    b_o = 0.747 * er / (0.15 + er)
    c_o = b_o - (b_o - 0.207) * math.exp(-0.414 * u)
    d_o = 0.593 + 0.694 * math.exp(-0.562 * u)
    er_odd = ((er + 1) / 2 + a_o - er_single) * math.exp(-c_o * g**d_o) + er_single
    single = impedance_in_air(u) / math.sqrt(er_single)
    q1 = 0.8695 * u**0.194
    q2 = 1 + 0.7519 * g + 0.189 * g**2.31
    q3 = 0.1975 + (16.6 + (8.4 / g) ** 6) ** -0.387 + math.log(g**10 / (1 + (g / 3.4) ** 10)) / 241
    q4 = 2 * q1 / q2 / (math.exp(-g) * u**q3 + (2 - math.exp(-g)) * u**-q3)
    q5 = 1.794 + 1.14 * math.log(1 + 0.638 / (g + 0.517 * g**2.43))
    q6 = 0.2305 + math.log(g**10 / (1 + (g / 5.8) ** 10)) / 281.3 + math.log(1 + 0.598 * g**1.154) / 5.1
    q7 = (10 + 190 * g * g) / (1 + 82.3 * g**3)
    q8 = math.exp(-6.5 - 0.95 * math.log(g) - (g / 0.15) ** 5)
    q9 = math.log(q7) * (q8 + 1 / 16.5)
    q10 = (q2 * q4 - q5 * math.exp(math.log(u) * q6 * u**-q9)) / q2
    even = single * math.sqrt(er_single / er_even) / (1 - single / ETA * math.sqrt(er_single) * q4)
    odd = single * math.sqrt(er_single / er_odd) / (1 - single / ETA * math.sqrt(er_single) * q10)
    return even, odd, er_even, er_odd


@pytest.mark.parametrize("er", [2.5, 4.3, 9.8])
@pytest.mark.parametrize(("u", "g"), [(0.5, 0.3), (1.0, 0.25), (1.0, 1.0), (1.5, 0.75), (2.0, 0.5), (3.0, 2.0)])
def test_equal_strips(u: float, g: float, er: float) -> None:
    even, odd, er_even, er_odd = even_and_odd(u, g, er)
    pair = solve_section(microstrip(w=(0.2 * u, 0.2 * u), s=0.2 * g, h=0.2, er=er)).pair
    assert pair is not None
    assert pair.impedance_common_ohm is not None
    assert 2 * pair.impedance_common_ohm == pytest.approx(even, rel=0.02)
    assert pair.impedance_diff_ohm / 2 == pytest.approx(odd, rel=0.02)
    assert pair.er_even == pytest.approx(er_even, rel=0.02)
    assert pair.er_odd == pytest.approx(er_odd, rel=0.02)
